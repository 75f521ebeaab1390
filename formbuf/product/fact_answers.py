"""Check the answers that a brief gives in ``[facts]`` and ``drug.groups``."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from formbuf.errors import InputError, nearest
from formbuf.library.vocabulary import (
    MISSING,
    FactDefinition,
    FactValue,
    Missing,
    Vocabulary,
)

#: The answer that leaves a fact open, whatever silence would mean.
UNKNOWN = "unknown"
#: The answer that empties a set.
NONE = "none"


def read_answers(
    answers: Mapping[str, Any], groups: Sequence[str], vocabulary: Vocabulary
) -> dict[str, FactValue | Missing]:
    """Return the answers as typed facts.

    Parameters
    ----------
    answers : mapping of str to bool, number, str or list
        The table ``[facts]`` of a brief.
    groups : sequence of str
        ``drug.groups``; empty says nothing.
    vocabulary : mapping of str to FactDefinition

    Raises
    ------
    InputError
        If an answer names no fact, a fact that is held elsewhere, or does not fit.
    """
    values: dict[str, FactValue | Missing] = {}
    faults: list[str] = []
    for name, answer in answers.items():
        key = f"facts.{name}"
        fact = vocabulary.get(name)
        if fact is None:
            near = nearest(name, vocabulary)
            hint = f"; did you mean {' or '.join(near)}?" if near else ""
            faults.append(f"{key}: no rule tests this fact{hint}")
        elif not fact.held_in.startswith("facts."):
            place = "is computed" if fact.held_in == "computed" else "is held in "
            where = "" if fact.held_in == "computed" else fact.held_in
            faults.append(f"{key}: {place}{where}, allowed only there")
        else:
            _add(values, faults, key, fact, answer)
    if groups and "drug_groups" in vocabulary:
        fact = vocabulary["drug_groups"]
        _add(values, faults, "drug.groups", fact, list(groups))
    if faults:
        raise InputError("\n".join(faults), hint="Run `formbuf knowledge show facts`.")
    return values


def _add(
    values: dict[str, FactValue | Missing],
    faults: list[str],
    key: str,
    fact: FactDefinition,
    answer: object,
) -> None:
    value = MISSING if answer == UNKNOWN else _value(fact, answer)
    if value is None:
        faults.append(f"{key}: {answer!r} does not fit, allowed {allowed(fact)}")
    else:
        values[fact.name] = value


def _value(fact: FactDefinition, answer: object) -> FactValue | None:
    """Return an answer as the value of a fact, or None where it does not fit."""
    if fact.kind == "yes_no":
        return answer if isinstance(answer, bool) else None
    if fact.kind == "number":
        if isinstance(answer, bool) or not isinstance(answer, int | float):
            return None
        return float(answer) if fact.low <= answer <= fact.high else None
    if fact.kind == "choice":
        return answer if isinstance(answer, str) and answer in fact.choices else None
    names = [answer] if isinstance(answer, str) else answer
    if not isinstance(names, list) or not all(isinstance(n, str) for n in names):
        return None
    if names == [NONE] or not names:
        return frozenset()
    return frozenset(names) if set(names) <= set(fact.choices) else None


def fits(fact: FactDefinition, answer: object) -> bool:
    """Whether an answer can be the value of a fact, or says that it is not known."""
    return answer == UNKNOWN or _value(fact, answer) is not None


def allowed(fact: FactDefinition) -> str:
    """Say which answers a fact takes."""
    if fact.kind == "yes_no":
        return "true or false"
    if fact.kind == "number":
        return f"a number from {fact.low:g} to {fact.high:g} ({fact.unit})"
    names = ", ".join(fact.choices)
    return names if fact.kind == "choice" else f"none, or a list of {names}"
