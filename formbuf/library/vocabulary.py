"""Facts that a screening rule can test: their types, units, choices and values.

A *fact* is one property of the product or of a candidate buffer: a yes or no, a
number with a unit, one name out of a list, or a set of names. A value that nobody
has given is :data:`MISSING`, never ``False`` or zero.

This module holds the types only. ``knowledge/facts.csv`` holds the vocabulary and
``formbuf.library.rules`` reads it.
"""

from __future__ import annotations

import enum
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

FactType = Literal["yes_no", "number", "choice", "set"]
FACT_TYPES: Final = ("yes_no", "number", "choice", "set")
Scope = Literal["product", "candidate"]
Silence = Literal["unknown", "no", "zero", "none", "no_if_listed", "zero_if_listed"]
SILENCES: Final = ("unknown", "no", "zero", "none", "no_if_listed", "zero_if_listed")


class Missing(enum.Enum):
    """The type of :data:`MISSING`: a fact that nobody has given."""

    MISSING = "missing"

    def __repr__(self) -> str:
        return "MISSING"


MISSING: Final = Missing.MISSING

FactValue: TypeAlias = bool | float | str | frozenset[str]
FactMapping: TypeAlias = Mapping[str, FactValue | Missing]


@dataclass(frozen=True, slots=True)
class FactDefinition:
    """One row of the facts vocabulary.

    Parameters
    ----------
    name : str
        Name used in conditions; a dimensional name ends in its unit.
    kind : {"yes_no", "number", "choice", "set"}
        What values the fact takes.
    unit : str
        Unit of a number (``"1"`` for a pure number), empty otherwise.
    choices : tuple of str
        The names a choice or set may hold, empty otherwise.
    low, high : float
        Range of a number, in its unit; an answer or a threshold outside is refused.
    scope : {"product", "candidate"}
        Whether every candidate shares the value.
    question : str
        What a formulator is asked, in plain words.
    held_in : str
        Key path in the brief, or ``computed``.
    only_if : str
        Condition under which the fact is asked at all; empty means always.
    otherwise : str
        Value when ``only_if`` is false; empty leaves the fact missing.
    silence : str
        What it means that the brief says nothing; see :data:`SILENCES`.
    inferred_from : str
        ``excipients: a, b`` (a material that contains one of these),
        ``condition: ...`` (a condition on other facts) or ``computed: how``.
    note : str
        Basis of the inference or of the range.
    overlay : bool
        Whether the row comes from a user's own tables.
    """

    name: str
    kind: FactType
    unit: str
    choices: tuple[str, ...]
    low: float
    high: float
    scope: Scope
    question: str
    held_in: str
    only_if: str = ""
    otherwise: str = ""
    silence: Silence = "unknown"
    inferred_from: str = ""
    note: str = ""
    overlay: bool = False


Vocabulary: TypeAlias = Mapping[str, FactDefinition]

UnitPowers: TypeAlias = tuple[tuple[str, int], ...]


def unit_powers(unit: str) -> UnitPowers:
    """Split a unit such as ``mmol/L/pH`` or ``mmol^2/L^2`` into symbols and powers.

    Symbols are compared as they stand: ``mmol`` and ``mol`` are different units and
    are never converted into each other.

    Parameters
    ----------
    unit : str
        Factors joined by ``/`` or a middle dot, each with an optional ``^power``.

    Returns
    -------
    tuple of (str, int)
        Symbols with non-zero powers, sorted; empty for a pure number.

    Raises
    ------
    ValueError
        If a factor is empty or a power is not a whole number.
    """
    powers: dict[str, int] = {}
    for place, part in enumerate(unit.split("/")):
        for factor in part.split("·"):
            symbol, _, power = factor.strip().partition("^")
            if not symbol:
                raise ValueError(f"unit {unit!r} has an empty factor")
            if symbol == "1":
                continue
            exponent = int(power) if power else 1
            powers[symbol] = powers.get(symbol, 0) + (-exponent if place else exponent)
    return _tidy(powers)


def multiply_units(left: UnitPowers, right: UnitPowers, sign: int = 1) -> UnitPowers:
    """Return the unit of a product (``sign`` 1) or of a ratio (``sign`` -1)."""
    powers = dict(left)
    for symbol, power in right:
        powers[symbol] = powers.get(symbol, 0) + sign * power
    return _tidy(powers)


def format_unit(powers: UnitPowers) -> str:
    """Write a unit for a message: ``mmol^2/L^2``, or ``1`` for a pure number."""
    above = [_factor(symbol, power) for symbol, power in powers if power > 0]
    below = [_factor(symbol, -power) for symbol, power in powers if power < 0]
    return "/".join(["·".join(above) or "1", *below])


def _factor(symbol: str, power: int) -> str:
    return symbol if power == 1 else f"{symbol}^{power}"


def _tidy(powers: Mapping[str, int]) -> UnitPowers:
    return tuple(sorted((name, power) for name, power in powers.items() if power))
