"""What draws tell of a shortlist, as frozen records."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.chance_records import Chance, Flip, RankChances, WeightChange
from formbuf.advice.error_model import Deviation
from formbuf.advice.variance_shares import QuantityShares
from formbuf.product.product_brief import plain

LEVELS = (0.025, 0.05, 0.25, 0.5, 0.75, 0.95, 0.975)


@dataclass(frozen=True, slots=True)
class Interval:
    """Middle, spread and central intervals of a quantity; unit as its owner says.

    Attributes
    ----------
    median, deviation : float
    low_50 ... high_95 : float
        Ends of the central 50, 90 and 95 %.
    """

    median: float
    deviation: float
    low_50: float
    high_50: float
    low_90: float
    high_90: float
    low_95: float
    high_95: float


def interval(values: NDArray[np.float64]) -> Interval:
    """Return the intervals of draws, shape (draws,)."""
    ends = [float(q) for q in np.quantile(values, LEVELS)]
    low_95, low_90, low_50, median, high_50, high_90, high_95 = ends
    spread = float(np.std(values))
    return Interval(median, spread, low_50, high_50, low_90, high_90, low_95, high_95)


@dataclass(frozen=True, slots=True)
class TemperatureConfidence:
    """One candidate at one temperature.

    Attributes
    ----------
    temperature_c : float
    kinds : tuple of str
    ph : Interval
        Of the product itself, without reading errors and loads.
    within_at_end : Chance or None
        Chance to be within the window at the end of shelf life whichever load comes;
        None for temperatures at which it is not stored or measured.
    """

    temperature_c: float
    kinds: tuple[str, ...]
    ph: Interval
    within_at_end: Chance | None


@dataclass(frozen=True, slots=True)
class CandidateConfidence:
    """What draws tell of one candidate.

    Attributes
    ----------
    temperatures : tuple of TemperatureConfidence
        Empty where there is nothing to solve.
    read_ph : Interval or None
        As a meter reads it at release, at the measurement temperature.
    within_at_release, within_at_end : Chance or None
        Of that reading; the second at every temperature at once.
    carries_loads : Chance or None
        Chance that the proposed concentration carries the loads from the worst
        release pH.
    required_mmol_l, capacity_mmol_l_ph, osmolality_mosm_kg : Interval or None
    ranks : RankChances or None
        At the given weights; None for a candidate without a place of its own.
    ranks_around, ranks_any : RankChances or None
        With weights around the given ones, and with all weights alike.
    over_head : Chance or None
        For a variant: chance to be better than the one that stands.
    """

    temperatures: tuple[TemperatureConfidence, ...]
    read_ph: Interval | None
    within_at_release: Chance | None
    within_at_end: Chance | None
    carries_loads: Chance | None
    required_mmol_l: Interval | None
    capacity_mmol_l_ph: Interval | None
    osmolality_mosm_kg: Interval | None
    ranks: RankChances | None = None
    ranks_around: RankChances | None = None
    ranks_any: RankChances | None = None
    over_head: Chance | None = None

    def to_dict(self) -> dict[str, Any]:
        """Return plain types for JSON."""
        values = _fields(self)
        return {name: plain(value) for name, value in values.items()}

    def at(self, temperature_c: float) -> TemperatureConfidence | None:
        """Return one temperature, None where it was not drawn."""
        return next(
            (t for t in self.temperatures if t.temperature_c == temperature_c), None
        )


@dataclass(frozen=True, slots=True)
class Confidence:
    """What draws tell of a shortlist as a whole.

    Attributes
    ----------
    draws, seed : int
    preparation : str
        ``weighed`` or ``adjusted``, see `formbuf.product.uncertainty_parts`.
    largest_standard_error : float
        Of any chance reported.
    tie_share : float
        Candidates whose order flips in more than this share of draws are tied.
    flips : tuple of Flip
        Every pair of places.
    shares : tuple of QuantityShares
        What the spread of a quantity comes from.
    weight_changes : tuple of WeightChange
        Smallest change of each weight that changes the lead.
    figures : mapping of str to Deviation
        The error model.
    statement : str
        How far the chances can be trusted.
    """

    draws: int
    seed: int
    preparation: str
    largest_standard_error: float
    tie_share: float
    flips: tuple[Flip, ...]
    shares: tuple[QuantityShares, ...]
    weight_changes: tuple[WeightChange, ...]
    figures: Mapping[str, Deviation]
    statement: str

    def to_dict(self) -> dict[str, Any]:
        """Return plain types for JSON."""
        return {name: plain(value) for name, value in _fields(self).items()}


def _fields(record: CandidateConfidence | Confidence) -> dict[str, Any]:
    return {name: getattr(record, name) for name in record.__slots__}
