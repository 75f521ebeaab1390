"""Rows of ``facts.csv`` as definitions, derivations and an order to settle them in."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import cast

from formbuf.library.predicate_logic import Judge, compile_condition
from formbuf.library.predicate_parser import parse_condition
from formbuf.library.predicates import Condition, ConditionError, facts_in
from formbuf.library.rule_tables import Derivation
from formbuf.library.store import TableFaults
from formbuf.library.tables import Row
from formbuf.library.vocabulary import (
    FactDefinition,
    FactType,
    FactValue,
    Scope,
    Silence,
    Vocabulary,
    unit_powers,
)

#: The fact that says whether absence from the list of excipients means none.
LISTED = "excipients_listed"
_SILENCE: Mapping[str, tuple[str, ...]] = {
    "yes_no": ("unknown", "no", "no_if_listed"),
    "number": ("unknown", "zero", "zero_if_listed"),
    "choice": ("unknown", "none"),
    "set": ("unknown", "none"),
}


def parse_cell(
    row: Row,
    column: str,
    text: str,
    vocabulary: Vocabulary,
    faults: TableFaults,
    *,
    scope: Scope,
) -> Condition | None:
    """Parse a condition; within the product, facts of a candidate are a fault."""
    try:
        node = parse_condition(text, vocabulary)
    except ConditionError as error:
        faults.add(row, column, str(error))
        return None
    if scope == "product":
        foreign = [n for n in facts_in(node) if vocabulary[n].scope == "candidate"]
        if foreign:
            faults.add(
                row,
                column,
                f"{', '.join(foreign)} differ by candidate, allowed facts of the product",
            )
            return None
    return node


def build_vocabulary(rows: tuple[Row, ...], faults: TableFaults) -> Vocabulary:
    """Return the facts by name."""
    return {row.text("fact"): _build_fact(row, faults) for row in rows}


def _build_fact(row: Row, faults: TableFaults) -> FactDefinition:
    kind = cast("FactType", row.text("kind"))
    low, high = row.number("low"), row.number("high")
    choices = row.ids("choices")
    if kind == "number":
        if low is None or high is None or low >= high:
            faults.add(row, "low", "range is missing or empty, allowed low below high")
        _check_unit(row, faults)
    else:
        for column in ("unit", "low", "high"):
            if row.values[column] is not None:
                faults.add(row, column, f"given for a {kind} fact, allowed empty")
    if (kind in ("choice", "set")) != bool(choices):
        faults.add(row, "choices", "allowed for a choice or a set, and only there")
    if len(set(choices)) < len(choices):
        faults.add(row, "choices", "a name stands twice, allowed once")
    silence = cast("Silence", row.text("silence"))
    if silence not in _SILENCE[kind]:
        allowed = ", ".join(_SILENCE[kind])
        faults.add(row, "silence", f"{silence!r} for a {kind} fact, allowed {allowed}")
    elif kind == "choice" and silence == "none" and "none" not in choices:
        faults.add(row, "silence", "'none' is no choice of it, allowed unknown")
    return FactDefinition(
        name=row.text("fact"),
        kind=kind,
        unit=row.text("unit"),
        choices=choices,
        low=low if low is not None else 0.0,
        high=high if high is not None else 0.0,
        scope=cast("Scope", row.text("scope")),
        question=row.text("question"),
        held_in=row.text("held_in"),
        only_if=row.text("only_if"),
        otherwise=row.text("otherwise"),
        silence=silence,
        inferred_from=row.text("inferred_from"),
        note=row.text("note"),
        overlay=row.overlay,
    )


def _check_unit(row: Row, faults: TableFaults) -> None:
    try:
        unit_powers(row.text("unit"))
    except ValueError:
        what = f"{row.text('unit')!r} is no unit, allowed such as mmol/L or mg^2/L^2"
        faults.add(row, "unit", what)


@dataclass(frozen=True, slots=True)
class Derived:
    """A derivation with the facts its conditions name."""

    derivation: Derivation
    needs: tuple[str, ...]


def build_derivations(
    rows: tuple[Row, ...], vocabulary: Vocabulary, faults: TableFaults
) -> Mapping[str, Derived]:
    """Return how each fact is derived."""
    return {row.text("fact"): _build_derived(row, vocabulary, faults) for row in rows}


def _build_derived(row: Row, vocabulary: Vocabulary, faults: TableFaults) -> Derived:
    fact = vocabulary[row.text("fact")]
    needs: list[str] = []

    def condition(text: str, column: str) -> Judge | None:
        node = parse_cell(row, column, text, vocabulary, faults, scope=fact.scope)
        if node is None:
            return None
        needs.extend(facts_in(node))
        return compile_condition(node)

    only_if = condition(fact.only_if, "only_if") if fact.only_if else None
    otherwise = _otherwise(row, fact, faults)
    conditions: dict[str, Judge | None] = {}
    lists: dict[str, tuple[str, ...]] = {}
    computed = fact.held_in == "computed" and not fact.inferred_from
    for step in filter(None, (s.strip() for s in fact.inferred_from.split(";"))):
        word, _, rest = step.partition(" ")
        if word == "computed" and not computed:
            computed = True
            needs += _computed_from(row, rest, vocabulary, faults)
        elif (
            word in ("yes", "no")
            and rest.startswith("when ")
            and word not in conditions
        ):
            if fact.kind != "yes_no":
                faults.add(row, "inferred_from", f"{word!r} for a {fact.kind} fact")
            conditions[word] = condition(rest[5:], "inferred_from")
        elif word in ("contains", "members") and rest and word not in lists:
            lists[word] = tuple(rest.split())
        else:
            faults.add(
                row,
                "inferred_from",
                f"{step!r} is unknown, allowed 'yes when ...', 'no when ...', "
                "'contains a b', 'members a b', 'computed', 'computed from a b', each "
                "once",
            )
    if fact.silence.endswith("_if_listed"):
        needs.append(LISTED)
    derivation = Derivation(
        only_if=only_if,
        otherwise=otherwise,
        yes_when=conditions.get("yes"),
        no_when=conditions.get("no"),
        contains=lists.get("contains", ()),
        members=lists.get("members", ()),
        computed=computed,
    )
    return Derived(derivation, tuple(dict.fromkeys(needs)))


def _computed_from(
    row: Row, text: str, vocabulary: Vocabulary, faults: TableFaults
) -> list[str]:
    """Return the facts named in ``computed from a b``."""
    word, _, rest = text.partition(" ")
    names = rest.split()
    unknown = [name for name in names if name not in vocabulary]
    if (text and (word != "from" or not names)) or unknown:
        what = f"'computed {text}' names no known facts, allowed 'computed from FACT'"
        faults.add(row, "inferred_from", what)
        return []
    return names


def _otherwise(row: Row, fact: FactDefinition, faults: TableFaults) -> FactValue | None:
    text = fact.otherwise
    if not text:
        return None
    if not fact.only_if:
        faults.add(row, "otherwise", "given without only_if, allowed with it only")
        return None
    if fact.kind == "yes_no" and text in ("yes", "no"):
        return text == "yes"
    if fact.kind == "choice" and text in fact.choices:
        return text
    if fact.kind == "set" and text == "none":
        return frozenset()
    number = fact.kind == "number" and re.fullmatch(r"-?\d+(\.\d+)?", text)
    if number and fact.low <= float(text) <= fact.high:
        return float(text)
    faults.add(row, "otherwise", f"{text!r} is no value of a {fact.kind} fact")
    return None


def order_facts(
    rows: tuple[Row, ...], derived: Mapping[str, Derived], faults: TableFaults
) -> tuple[str, ...]:
    """Return the facts so that each follows those it needs; cycles are faults."""
    done: dict[str, None] = {}
    waiting = {row.text("fact"): row for row in rows}
    while waiting:
        ready = [
            name
            for name in waiting
            if all(need in done or need not in derived for need in derived[name].needs)
        ]
        if not ready:
            for name, row in waiting.items():
                others = ", ".join(
                    need for need in derived[name].needs if need in waiting
                )
                faults.add(row, "inferred_from", f"derived in a circle with {others}")
            break
        for name in ready:
            done[name] = None
            del waiting[name]
    return tuple(done)
