"""Conditions of screening rules: a small language, read from a cell, never run as code.

A condition says when a rule fires. It is written over the facts of
``knowledge/facts.csv`` and is only ever parsed into the nodes of this module; nothing
of it is handed to Python.

Grammar
-------
::

    condition   = parts
    parts       = part { "and" part } | part { "or" part }     never both unbracketed
    part        = [ "not" ] test | [ "not" ] "(" condition ")"
    test        = fact                                         a yes_no fact
                | fact ( "=" | "!=" ) name                     a choice
                | fact [ "not" ] "in" "(" name { "," name } ")"
                | fact "has" name                              a set
                | fact "has" "any" "of" "(" name { "," name } ")"
                | amount ( "<" | "<=" | ">" | ">=" | "=" | "!=" ) amount
    amount      = product { ( "+" | "-" ) product }
    product     = factor { ( "*" | "/" ) factor }
    factor      = number | "-" number | fact | "abs" "(" amount ")" | "(" amount ")"

Examples: ``route = intravenous and diluent_contains_calcium``;
``calcium_mmol_l > 0 and ph >= 5.5``; ``preservatives has any of (parabens, benzoate)``;
``abs(ph - isoelectric_point) < 1``; ``polyol_mmol_l >= borate_mmol_l``.

A bare number takes the unit of the fact that it stands beside, and must lie in that
fact's range; facts of different units are never compared, added or subtracted. A
divisor is a number or a fact whose range leaves zero out. Bounds on both sides are
two tests (``ph >= 4 and ph < 7``).

Truth
-----
Three values after Kleene (1952): true, false, unknown. A test is unknown while one of
its facts is missing; ``and`` is false as soon as one part is false, ``or`` true as
soon as one part is true, whatever else is missing. A verdict that is known therefore
stays the same whatever the missing facts turn out to be.

References
----------
S. C. Kleene, Introduction to Metamathematics, 1952, section 64.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Literal, TypeAlias

from formbuf.errors import InputError

Comparison = Literal["<", "<=", ">", ">=", "=", "!="]
Operator = Literal["+", "-", "*", "/"]

#: Longest condition that is read, in characters, and deepest nesting of brackets.
MAX_LENGTH = 1000
MAX_DEPTH = 20


@dataclass(frozen=True, slots=True)
class Number:
    """A number as written."""

    value: float


@dataclass(frozen=True, slots=True)
class Amount:
    """The value of a number fact."""

    fact: str


@dataclass(frozen=True, slots=True)
class Arithmetic:
    """A sum, difference, product or ratio."""

    operator: Operator
    left: Expression
    right: Expression


@dataclass(frozen=True, slots=True)
class Magnitude:
    """The absolute value of an amount."""

    part: Expression


Expression: TypeAlias = Number | Amount | Arithmetic | Magnitude


@dataclass(frozen=True, slots=True)
class Constant:
    """Always true or always false; arises only where a part is taken out."""

    value: bool


@dataclass(frozen=True, slots=True)
class Flag:
    """A yes_no fact is yes."""

    fact: str


@dataclass(frozen=True, slots=True)
class OneOf:
    """A choice is one of the names."""

    fact: str
    names: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Holds:
    """A set holds at least one of the names."""

    fact: str
    names: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Compare:
    """Two amounts stand in an order."""

    left: Expression
    comparison: Comparison
    right: Expression


@dataclass(frozen=True, slots=True)
class Not:
    """The part is false."""

    part: Condition


@dataclass(frozen=True, slots=True)
class AllOf:
    """Every part is true."""

    parts: tuple[Condition, ...]


@dataclass(frozen=True, slots=True)
class AnyOf:
    """At least one part is true."""

    parts: tuple[Condition, ...]


Condition: TypeAlias = Constant | Flag | OneOf | Holds | Compare | Not | AllOf | AnyOf


class ConditionError(InputError):
    """A condition cannot be read: what is wrong, where in it, and what is allowed.

    Parameters
    ----------
    what : str
        What is wrong and what is allowed.
    character : int
        Place in the condition, counted from 1.
    """

    def __init__(self, what: str, character: int) -> None:
        self.what = what
        self.character = character
        super().__init__(f"{what} (character {character})")


def facts_in(node: Condition | Expression) -> tuple[str, ...]:
    """Return the facts that a condition or an amount names, in order, each once."""
    return tuple(dict.fromkeys(_facts(node)))


def _facts(node: Condition | Expression) -> Iterator[str]:
    match node:
        case Amount(fact) | Flag(fact) | OneOf(fact, _) | Holds(fact, _):
            yield fact
        case Arithmetic(_, left, right) | Compare(left, _, right):
            yield from _facts(left)
            yield from _facts(right)
        case Magnitude(inner):
            yield from _facts(inner)
        case Not(part):
            yield from _facts(part)
        case AllOf(parts) | AnyOf(parts):
            for each in parts:
                yield from _facts(each)
        case Number() | Constant():
            return


def write_condition(node: Condition | Expression) -> str:
    """Write a condition or an amount in the language it is read from."""
    match node:
        case Number(value):
            return f"{value:.15g}"
        case Amount(fact) | Flag(fact):
            return fact
        case Arithmetic(operator, left, right):
            return f"({write_condition(left)} {operator} {write_condition(right)})"
        case Magnitude(inner):
            return f"abs({write_condition(inner)})"
        case Constant(truth):
            return "yes" if truth else "no"
        case OneOf(fact, (name,)):
            return f"{fact} = {name}"
        case OneOf(fact, names):
            return f"{fact} in ({', '.join(names)})"
        case Holds(fact, (name,)):
            return f"{fact} has {name}"
        case Holds(fact, names):
            return f"{fact} has any of ({', '.join(names)})"
        case Compare(left, comparison, right):
            return f"{write_condition(left)} {comparison} {write_condition(right)}"
        case Not(part):
            return f"not ({write_condition(part)})"
        case AllOf(parts):
            return " and ".join(_bracketed(part) for part in parts)
        case AnyOf(parts):
            return " or ".join(_bracketed(part) for part in parts)


def _bracketed(part: Condition) -> str:
    text = write_condition(part)
    return f"({text})" if isinstance(part, AllOf | AnyOf) else text
