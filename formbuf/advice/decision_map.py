"""The map of the decision: lead and back-up over the target pH."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np

from formbuf.advice.results import Candidate
from formbuf.advice.variations import (
    HIGHEST_TARGET_PH,
    LOWEST_TARGET_PH,
    Known,
    Variation,
    heads_with,
)
from formbuf.errors import InputError
from formbuf.product.brief import Completed
from formbuf.product.product_brief import plain

DEFAULT_REACH_PH, DEFAULT_STEP_PH = 1.0, 0.1
MOST_STEPS = 200

#: Called with the number of variations judged so far and their total.
Progress = Callable[[int, int], None]


@dataclass(frozen=True, slots=True)
class Place:
    """One ranked candidate at one target pH.

    Attributes
    ----------
    system, name : str
    desirability : float
    concentration_mmol_l : float
    ph_drift : float or None
    limiting : str
        Criterion that pulls it down most.
    tied_with : tuple of str
    """

    system: str
    name: str
    desirability: float
    concentration_mmol_l: float
    ph_drift: float | None
    limiting: str
    tied_with: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class MapPoint:
    """All places at one target pH, best first; empty where none is acceptable."""

    target_ph: float
    places: tuple[Place, ...]

    @property
    def lead(self) -> Place | None:
        """The first place."""
        return self.places[0] if self.places else None

    @property
    def backup(self) -> Place | None:
        """The second place."""
        return self.places[1] if len(self.places) > 1 else None


@dataclass(frozen=True, slots=True)
class DecisionMap:
    """Lead and back-up over the target pH.

    Attributes
    ----------
    title : str
        Of the brief.
    target_ph : float
        Of the brief itself.
    points : tuple of MapPoint
        By rising pH.
    """

    title: str
    target_ph: float
    points: tuple[MapPoint, ...]

    def to_dict(self) -> dict[str, Any]:
        """Return plain types for JSON."""
        return {
            "title": self.title,
            "target_ph": self.target_ph,
            "points": plain(self.points),
        }


def decision_map(
    completed: Completed,
    *,
    reach_ph: float = DEFAULT_REACH_PH,
    step_ph: float = DEFAULT_STEP_PH,
    progress: Progress | None = None,
    known: Known | None = None,
) -> DecisionMap:
    """Judge a product again at targets around its own.

    Parameters
    ----------
    completed : Completed
    reach_ph : float
        How far to go either way, above 0.
    step_ph : float
        Above 0; at most 200 steps either way.
    progress : callable, optional
    known : dict, optional
        Variations judged already, see `heads_with`.

    Returns
    -------
    DecisionMap
        Targets outside pH 1 to 13 are left out.

    Raises
    ------
    InputError
        For a reach or step that is not allowed.
    """
    known = {} if known is None else known
    shifts = _shifts(completed.brief.ph.target, reach_ph, step_ph)
    points = []
    for done, shift in enumerate(shifts):
        if progress is not None:
            progress(done, len(shifts))
        moved = Variation(target_shift_ph=shift)
        heads = heads_with(completed, moved, known)
        target = round(completed.brief.ph.target + shift, 9)
        points.append(MapPoint(target, tuple(_place(c) for c in heads)))
    if progress is not None:
        progress(len(shifts), len(shifts))
    brief = completed.brief
    return DecisionMap(
        brief.product.name or brief.title, brief.ph.target, tuple(points)
    )


def _shifts(target: float, reach_ph: float, step_ph: float) -> list[float]:
    if not (0.0 < step_ph <= reach_ph and reach_ph / step_ph <= MOST_STEPS):
        msg = (
            f"a map of +/- {reach_ph:g} pH in steps of {step_ph:g}, allowed a step "
            f"above 0 and up to {MOST_STEPS} of them either way"
        )
        raise InputError(msg)
    count = int(np.floor(reach_ph / step_ph + 1e-9))
    return [
        round(k * step_ph, 9)
        for k in range(-count, count + 1)
        if LOWEST_TARGET_PH <= target + k * step_ph <= HIGHEST_TARGET_PH
    ]


def _place(c: Candidate) -> Place:
    return Place(
        c.key,
        c.name,
        c.desirability or 0.0,
        c.concentration_mmol_l,
        c.ph_drift,
        c.limiting,
        c.tied_with,
    )
