"""Find facts under which a condition is true, false or rests on each of its parts.

The checker of the rules uses this to refuse a condition that can never fire, that
always fires, or that holds a part without any say. The search tries values around
every threshold and at the ends of each range, one fact after the other, and gives up
a branch as soon as the three-valued verdict is settled. It is exact for conditions
whose comparisons each have one fact; for comparisons of several facts it may miss a
narrow case, which then shows as a fault that a curator can look at.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from itertools import pairwise
from typing import TypeAlias

from formbuf.errors import ConvergenceError
from formbuf.library.predicate_logic import Truth, compile_condition
from formbuf.library.predicates import (
    AllOf,
    Amount,
    AnyOf,
    Arithmetic,
    Compare,
    Condition,
    Constant,
    Expression,
    Holds,
    Magnitude,
    Not,
    Number,
    OneOf,
    facts_in,
    write_condition,
)
from formbuf.library.vocabulary import FactDefinition, FactValue, Vocabulary

Case: TypeAlias = dict[str, FactValue]

#: Most assignments that one search looks at.
MAX_STEPS = 200_000
_SPREAD = (0.003, 0.03, 0.1, 0.3, 0.5, 0.7, 0.9)


def find_case(
    condition: Condition, vocabulary: Vocabulary, *, truth: bool
) -> Case | None:
    """Return facts under which a condition has a truth value, or None.

    The case names no more facts than the verdict needs: facts that it leaves out may
    take any value.

    Raises
    ------
    ConvergenceError
        If the search is not over after `MAX_STEPS` assignments.
    """
    verdict = compile_condition(condition)

    def settled(facts: Case) -> Truth:
        found = verdict(facts)
        return None if found is None else found is truth

    return _search(condition, vocabulary, settled)


def idle_parts(condition: Condition, vocabulary: Vocabulary) -> tuple[str, ...]:
    """Return the parts that could be struck out without changing any verdict."""
    full = compile_condition(condition)
    idle = []
    for part, shortened in _without_each(condition):
        short = compile_condition(shortened)

        def differs(facts: Case, short: Callable[[Case], Truth] = short) -> Truth:
            first, second = full(facts), short(facts)
            return None if first is None or second is None else first is not second

        if _search(condition, vocabulary, differs) is None:
            idle.append(write_condition(part))
    return tuple(idle)


def _without_each(condition: Condition) -> Iterator[tuple[Condition, Condition]]:
    """Yield each part of an ``and`` or ``or`` with the condition that lacks it."""
    match condition:
        case Not(inner):
            for part, shortened in _without_each(inner):
                yield part, Not(shortened)
        case AllOf(parts) | AnyOf(parts):
            join = type(condition)
            neutral = Constant(isinstance(condition, AllOf))
            for place, part in enumerate(parts):
                before, after = parts[:place], parts[place + 1 :]
                yield part, join((*before, neutral, *after))
                for inner, shortened in _without_each(part):
                    yield inner, join((*before, shortened, *after))
        case _:
            return


def _search(
    condition: Condition, vocabulary: Vocabulary, settled: Callable[[Case], Truth]
) -> Case | None:
    """Return the first case that settles True, or None when none does."""
    names = facts_in(condition)
    tries = [try_values(condition, vocabulary[name]) for name in names]
    facts: Case = {}
    steps = 0

    def descend(depth: int) -> bool:
        nonlocal steps
        steps += 1
        if steps > MAX_STEPS:
            message = (
                f"condition {write_condition(condition)!r} is not settled after "
                f"{MAX_STEPS} cases, allowed fewer facts in one rule"
            )
            raise ConvergenceError(message)
        found = settled(facts)
        if found is not None or depth == len(names):
            return found is True
        for value in tries[depth]:
            facts[names[depth]] = value
            if descend(depth + 1):
                return True
        del facts[names[depth]]
        return False

    return dict(facts) if descend(0) else None


def try_values(condition: Condition, fact: FactDefinition) -> list[FactValue]:
    """Return the values of a fact that can make a difference to a condition."""
    if fact.kind == "yes_no":
        return [True, False]
    named = list(dict.fromkeys(_names_tested(condition, fact.name)))
    if fact.kind == "choice":
        others = [choice for choice in fact.choices if choice not in named]
        return [*named, *others[:1]]
    if fact.kind == "set":
        return [frozenset(named), frozenset(), *(frozenset({name}) for name in named)]
    return [*_try_numbers(condition, fact)]


def _try_numbers(condition: Condition, fact: FactDefinition) -> list[float]:
    limits = sorted(set(_numbers_beside(condition, fact.name)))
    low, high = fact.low, fact.high
    values = [*limits]
    for limit in limits:
        step = max(abs(limit), 1e-3) * 1e-3
        values += [limit + step, limit - step]
    values += [(a + b) / 2 for a, b in pairwise(limits)]
    values += [low, high]
    values += [low + share * (high - low) for share in _SPREAD]
    return list(dict.fromkeys(value for value in values if low <= value <= high))


def _names_tested(condition: Condition, fact: str) -> Iterator[str]:
    match condition:
        case OneOf(name, names) | Holds(name, names):
            if name == fact:
                yield from names
        case Not(part):
            yield from _names_tested(part, fact)
        case AllOf(parts) | AnyOf(parts):
            for part in parts:
                yield from _names_tested(part, fact)


def _numbers_beside(condition: Condition, fact: str) -> Iterator[float]:
    """Yield the numbers of the comparisons in which a fact stands, and their sums."""
    match condition:
        case Compare(left, _, right):
            if fact in (*facts_in(left), *facts_in(right)):
                numbers = [*_numbers(left), *_numbers(right)]
                yield from numbers
                for number in numbers:
                    yield -number
                for first, second in pairwise(numbers):
                    yield from (first + second, first - second)
                    if first:
                        yield second / first
        case Not(part):
            yield from _numbers_beside(part, fact)
        case AllOf(parts) | AnyOf(parts):
            for part in parts:
                yield from _numbers_beside(part, fact)


def _numbers(expression: Expression) -> Iterator[float]:
    match expression:
        case Number(value):
            yield value
        case Arithmetic(_, left, right):
            yield from _numbers(left)
            yield from _numbers(right)
        case Magnitude(part):
            yield from _numbers(part)
        case Amount():
            return
