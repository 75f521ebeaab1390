"""Check that every rule can fire, can stay silent, and holds no idle part."""

from __future__ import annotations

from collections.abc import Iterable

from formbuf.errors import ConvergenceError
from formbuf.library.predicate_cases import find_case, idle_parts
from formbuf.library.predicates import Condition
from formbuf.library.rule_tables import Rule
from formbuf.library.vocabulary import Vocabulary


def reachability_fault(condition: Condition, vocabulary: Vocabulary) -> str:
    """Return why a condition is of no use, or an empty text.

    Parameters
    ----------
    condition : Condition
        Parsed condition of a rule.
    vocabulary : mapping of str to FactDefinition
        Gives the ranges and choices of its facts.
    """
    try:
        if find_case(condition, vocabulary, truth=True) is None:
            return "can never be true, allowed a condition that some product meets"
        if find_case(condition, vocabulary, truth=False) is None:
            return "is always true, allowed a condition that some product does not meet"
        idle = idle_parts(condition, vocabulary)
    except ConvergenceError as error:
        return error.message
    if idle:
        return f"{idle[0]!r} has no say in it, allowed parts that can decide"
    return ""


def rule_faults(rules: Iterable[Rule], vocabulary: Vocabulary) -> list[str]:
    """Return one line for each rule whose condition is of no use."""
    lines = []
    for rule in rules:
        fault = reachability_fault(rule.condition, vocabulary)
        if fault:
            lines.append(f"rules.csv:{rule.id}:condition: {fault}")
    return lines
