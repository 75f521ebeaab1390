"""Smallest change of a requirement that changes the lead.

A requirement is moved outwards in steps until another candidate leads, then the place
of the change is narrowed by halving. A change and its return within one step are not
seen.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

from formbuf.advice.chance_records import WeightChange
from formbuf.advice.criteria_table import settings_for
from formbuf.advice.decision_map import Progress
from formbuf.advice.loads import load_budget
from formbuf.advice.results import Candidate
from formbuf.advice.variations import Known, Variation, heads_with
from formbuf.advice.weight_changes import weight_changes
from formbuf.errors import InputError
from formbuf.product.brief import Completed
from formbuf.product.product_brief import plain

#: Moves of the target pH and of a factor (either way), and how fine the answer is.
PH_STEPS = (0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.8, 1.0)
FACTOR_STEPS = (1.5, 2.0, 3.0, 5.0, 10.0)
PH_TOLERANCE, FACTOR_TOLERANCE = 0.01, 0.03
HALVINGS_CAP = 12


@dataclass(frozen=True, slots=True)
class RequirementChange:
    """How far a requirement must move for another candidate to lead.

    Attributes
    ----------
    requirement : str
        ``target_ph``, ``acid_load``, ``base_load`` or ``ceiling``.
    direction : str
        ``down`` or ``up``.
    value : float
        As it is: pH, mmol/L, or 1 for the ceilings.
    needed : float or None
        Value from which the lead changes; None where it keeps within ``limit``.
    limit : float
        Furthest value that was tried.
    unit : str
    new_lead : str or None
        Key of the candidate that leads then; None where none is acceptable.
    new_lead_name : str
    """

    requirement: str
    direction: str
    value: float
    needed: float | None
    limit: float
    unit: str
    new_lead: str | None
    new_lead_name: str


@dataclass(frozen=True, slots=True)
class Sensitivity:
    """What would change the lead.

    Attributes
    ----------
    lead : str or None
        Key of the lead as it is; None where no candidate is acceptable.
    lead_name : str
    weights : tuple of WeightChange
    requirements : tuple of RequirementChange
    """

    lead: str | None
    lead_name: str
    weights: tuple[WeightChange, ...]
    requirements: tuple[RequirementChange, ...]

    def to_dict(self) -> dict[str, Any]:
        """Return plain types for JSON."""
        found: dict[str, Any] = plain(self)
        return found


@dataclass(frozen=True, slots=True)
class _Axis:
    """One requirement moved one way, from distance 0 (as it is) outwards."""

    requirement: str
    value: float
    unit: str
    sign: float

    @property
    def is_ph(self) -> bool:
        """Whether the distance is in pH; else it is the logarithm of a factor."""
        return self.requirement == "target_ph"

    @property
    def direction(self) -> str:
        """Which way it is moved."""
        return "up" if self.sign > 0.0 else "down"

    @property
    def steps(self) -> Sequence[float]:
        """Distances that are tried, rising."""
        return PH_STEPS if self.is_ph else [math.log(step) for step in FACTOR_STEPS]

    @property
    def tolerance(self) -> float:
        """Distance to which a change is narrowed."""
        return PH_TOLERANCE if self.is_ph else FACTOR_TOLERANCE

    def variation(self, distance: float) -> Variation:
        """Return the product at a distance."""
        factor = math.exp(self.sign * distance)
        if self.requirement == "target_ph":
            return Variation(target_shift_ph=round(self.sign * distance, 9))
        if self.requirement == "acid_load":
            return Variation(acid_factor=factor)
        if self.requirement == "base_load":
            return Variation(base_factor=factor)
        return Variation(ceiling_factor=factor)

    def at(self, distance: float) -> float:
        """Return the requirement at a distance, in its unit."""
        move = self.sign * distance
        return self.value + move if self.is_ph else self.value * math.exp(move)


def sensitivity(
    completed: Completed,
    *,
    progress: Progress | None = None,
    known: Known | None = None,
) -> Sensitivity:
    """Return the smallest changes of weights and requirements that change the lead.

    Parameters
    ----------
    completed : Completed
    progress : callable, optional
    known : dict, optional
        Variations judged already, see `heads_with`.

    Returns
    -------
    Sensitivity
    """
    known = {} if known is None else known
    heads = heads_with(completed, Variation(), known)
    if not heads:
        return Sensitivity(None, "", (), ())
    settings = settings_for(completed.library, completed.brief)
    axes = _axes(completed)
    changes = []
    for done, axis in enumerate(axes):
        if progress is not None:
            progress(done, len(axes))
        changes.append(_change(completed, axis, heads[0], known))
    if progress is not None:
        progress(len(axes), len(axes))
    return Sensitivity(
        heads[0].key,
        heads[0].name,
        weight_changes(heads, settings.weights),
        tuple(changes),
    )


def _axes(completed: Completed) -> list[_Axis]:
    loads = load_budget(completed.library, completed.brief)
    requirements = (
        ("target_ph", completed.brief.ph.target, "pH"),
        ("acid_load", loads.acid_mmol_l, "mmol/L"),
        ("base_load", loads.base_mmol_l, "mmol/L"),
        ("ceiling", 1.0, "times"),
    )
    return [
        _Axis(name, value, unit, sign)
        for name, value, unit in requirements
        if value > 0.0
        for sign in (-1.0, 1.0)
    ]


def _change(
    completed: Completed, axis: _Axis, lead: Candidate, known: Known
) -> RequirementChange:
    """Walk outwards until the lead changes, then halve the last step."""
    same, furthest = 0.0, 0.0
    changed: tuple[float, Candidate | None] | None = None
    for step in axis.steps:
        try:
            now = _lead(completed, axis.variation(step), known)
        except InputError:
            break
        furthest = step
        if now is None or now.key != lead.key:
            changed = (step, now)
            break
        same = step
    if changed is not None:
        for _ in range(HALVINGS_CAP):
            if changed[0] - same <= axis.tolerance:
                break
            middle = 0.5 * (same + changed[0])
            now = _lead(completed, axis.variation(middle), known)
            if now is None or now.key != lead.key:
                changed = (middle, now)
            else:
                same = middle
    new = changed[1] if changed else None
    return RequirementChange(
        axis.requirement,
        axis.direction,
        axis.value,
        axis.at(changed[0]) if changed else None,
        axis.at(furthest),
        axis.unit,
        new.key if new else None,
        new.name if new else "",
    )


def _lead(completed: Completed, variation: Variation, known: Known) -> Candidate | None:
    heads = heads_with(completed, variation, known)
    return heads[0] if heads else None
