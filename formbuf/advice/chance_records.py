"""Chances of ranks, flips of pairs and changes of weights, as frozen records."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Chance:
    """A share of draws and its standard error.

    Attributes
    ----------
    value : float
        0 to 1.
    standard_error : float
        Of a count of independent draws, with one success and one failure added so
        that it does not vanish at 0 and 1.
    """

    value: float
    standard_error: float


@dataclass(frozen=True, slots=True)
class RankChances:
    """Ranks of one candidate over the draws.

    Attributes
    ----------
    ranks : tuple of Chance
        Of rank 1, 2, ...; they sum to one.
    lead : Chance
    expected_loss : float
        Mean of the best desirability less its own: what choosing it costs.
    """

    ranks: tuple[Chance, ...]
    lead: Chance
    expected_loss: float


@dataclass(frozen=True, slots=True)
class Flip:
    """Chance that two candidates stand in the other order."""

    first: str
    second: str
    chance: Chance


@dataclass(frozen=True, slots=True)
class WeightChange:
    """How far one weight must move for another candidate to lead.

    Attributes
    ----------
    criterion : str
    weight : float
        As given.
    needed : float or None
        Weight at which the lead changes; None where no weight of zero or more does it.
    new_lead : str or None
        Key of the candidate that leads beyond it.
    """

    criterion: str
    weight: float
    needed: float | None
    new_lead: str | None
