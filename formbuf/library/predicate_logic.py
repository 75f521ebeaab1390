"""Judge conditions against facts: true, false or unknown.

`compile_condition` turns a condition into a plain function for speed; `judge` gives
the same answer with the values it rests on and the facts that are missing. A test
holds the two equal.
"""

from __future__ import annotations

import math
import operator
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import Final, TypeAlias

from formbuf.library.predicates import (
    AllOf,
    Amount,
    AnyOf,
    Arithmetic,
    Compare,
    Condition,
    Constant,
    Expression,
    Flag,
    Holds,
    Magnitude,
    Not,
    Number,
    OneOf,
    facts_in,
)
from formbuf.library.vocabulary import MISSING, FactMapping, FactValue

Truth: TypeAlias = bool | None
Judge: TypeAlias = Callable[[FactMapping], Truth]
_Measure: TypeAlias = Callable[[FactMapping], float | None]

_COMPARE: Final[Mapping[str, Callable[[float, float], bool]]] = {
    "<": operator.lt,
    "<=": operator.le,
    ">": operator.gt,
    ">=": operator.ge,
    "=": operator.eq,
    "!=": operator.ne,
}
_ARITHMETIC: Final[Mapping[str, Callable[[float, float], float]]] = {
    "+": operator.add,
    "-": operator.sub,
    "*": operator.mul,
    "/": operator.truediv,
}


@dataclass(frozen=True, slots=True)
class Verdict:
    """What a condition comes to.

    Parameters
    ----------
    truth : bool or None
        None where a missing fact decides.
    values : mapping of str to value
        The facts the verdict rests on; for an unknown verdict those that are known.
    missing : tuple of str
        The facts without which it stays unknown, empty otherwise.
    """

    truth: Truth
    values: Mapping[str, FactValue]
    missing: tuple[str, ...]


def compile_condition(condition: Condition) -> Judge:
    """Return a function of a mapping of facts that gives True, False or None.

    A fact that the mapping lacks counts as missing.
    """
    match condition:
        case Constant(truth):
            return lambda _facts: truth
        case Flag(fact):
            return _flag(fact)
        case OneOf(fact, names):
            return _one_of(fact, frozenset(names))
        case Holds(fact, names):
            return _holds(fact, frozenset(names))
        case Compare(Amount(fact), comparison, Number(value)):
            return _threshold(fact, _COMPARE[comparison], value)
        case Compare(left, comparison, right):
            return _compare(_measure(left), _COMPARE[comparison], _measure(right))
        case Not(part):
            return _not(compile_condition(part))
        case AllOf(parts):
            return _join([compile_condition(part) for part in parts], ends_on=False)
        case AnyOf(parts):
            return _join([compile_condition(part) for part in parts], ends_on=True)


def _flag(fact: str) -> Judge:
    def judge_flag(facts: FactMapping) -> Truth:
        value = facts.get(fact, MISSING)
        return None if value is MISSING else value is True

    return judge_flag


def _one_of(fact: str, names: frozenset[str]) -> Judge:
    def judge_choice(facts: FactMapping) -> Truth:
        value = facts.get(fact, MISSING)
        return None if value is MISSING else value in names

    return judge_choice


def _holds(fact: str, names: frozenset[str]) -> Judge:
    def judge_set(facts: FactMapping) -> Truth:
        value = facts.get(fact, MISSING)
        if not isinstance(value, frozenset):
            return None
        return not names.isdisjoint(value)

    return judge_set


def _threshold(
    fact: str, compare: Callable[[float, float], bool], limit: float
) -> Judge:
    def judge_threshold(facts: FactMapping) -> Truth:
        value = facts.get(fact, MISSING)
        return compare(value, limit) if isinstance(value, float | int) else None

    return judge_threshold


def _compare(
    left: _Measure, compare: Callable[[float, float], bool], right: _Measure
) -> Judge:
    def judge_comparison(facts: FactMapping) -> Truth:
        low, high = left(facts), right(facts)
        return None if low is None or high is None else compare(low, high)

    return judge_comparison


def _not(part: Judge) -> Judge:
    def judge_not(facts: FactMapping) -> Truth:
        value = part(facts)
        return None if value is None else not value

    return judge_not


def _join(parts: list[Judge], *, ends_on: bool) -> Judge:
    """Join by ``and`` (``ends_on`` False) or ``or``: one such part decides at once."""

    def judge_join(facts: FactMapping) -> Truth:
        result: Truth = not ends_on
        for part in parts:
            value = part(facts)
            if value is ends_on:
                return ends_on
            if value is None:
                result = None
        return result

    return judge_join


def _measure(expression: Expression) -> _Measure:
    match expression:
        case Number(value):
            return lambda _facts: value
        case Amount(fact):

            def amount(facts: FactMapping) -> float | None:
                found = facts.get(fact, MISSING)
                return found if isinstance(found, float | int) else None

            return amount
        case Magnitude(part):
            inner = _measure(part)

            def magnitude(facts: FactMapping) -> float | None:
                found = inner(facts)
                return None if found is None else abs(found)

            return magnitude
        case Arithmetic(sign, left, right):
            return _arithmetic(sign, _measure(left), _measure(right))


def _arithmetic(sign: str, left: _Measure, right: _Measure) -> _Measure:
    compute = _ARITHMETIC[sign]

    def arithmetic(facts: FactMapping) -> float | None:
        first, second = left(facts), right(facts)
        if first is None or second is None or (sign == "/" and second == 0.0):
            return None
        found = compute(first, second)
        return found if math.isfinite(found) else None

    return arithmetic


def judge(condition: Condition, facts: FactMapping) -> Verdict:
    """Judge a condition and say on which values the verdict rests.

    Parameters
    ----------
    condition : Condition
        As `parse_condition` gives it.
    facts : mapping of str to value or MISSING
        What is known.

    Returns
    -------
    Verdict
        Parts that had no say (the false parts of a true ``or``, the true parts of a
        false ``and``) are left out of its values.
    """
    match condition:
        case Not(part):
            inner = judge(part, facts)
            turned = None if inner.truth is None else not inner.truth
            return Verdict(turned, inner.values, inner.missing)
        case AllOf(parts):
            return _judge_parts(parts, facts, ends_on=False)
        case AnyOf(parts):
            return _judge_parts(parts, facts, ends_on=True)
        case _:
            return _judge_test(condition, facts)


def _judge_test(condition: Condition, facts: FactMapping) -> Verdict:
    values: dict[str, FactValue] = {}
    missing: list[str] = []
    for name in facts_in(condition):
        value = facts.get(name, MISSING)
        if value is MISSING:
            missing.append(name)
        else:
            values[name] = value
    truth = compile_condition(condition)(facts)
    if truth is None and not missing:
        missing = list(values)  # a ratio by zero or a value of the wrong type
    return Verdict(truth, values, tuple(missing) if truth is None else ())


def _judge_parts(
    parts: tuple[Condition, ...], facts: FactMapping, *, ends_on: bool
) -> Verdict:
    verdicts = [judge(part, facts) for part in parts]
    decisive = [verdict for verdict in verdicts if verdict.truth is ends_on]
    if decisive:
        return Verdict(ends_on, _values(decisive), ())
    open_parts = [verdict for verdict in verdicts if verdict.truth is None]
    if not open_parts:
        return Verdict(not ends_on, _values(verdicts), ())
    missing = dict.fromkeys(name for part in open_parts for name in part.missing)
    return Verdict(None, _values(verdicts), tuple(missing))


def _values(verdicts: list[Verdict]) -> dict[str, FactValue]:
    return {name: value for each in verdicts for name, value in each.values.items()}
