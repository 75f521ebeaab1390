"""Read ``facts.csv``, ``rules.csv`` and ``dose_limits.csv``.

Every condition is parsed and checked against the vocabulary while it is read. All
faults of all three tables come at once, as ``file:line:column: what, allowed``; those
of an overlay are the user's (exit 3), ours are ours (exit 4). Whether a rule can fire
at all is checked here for rows of an overlay, and for ours by
`formbuf.library.rule_check`, since it takes longer.
"""

from __future__ import annotations

import functools
import re
from typing import cast

from formbuf.errors import nearest
from formbuf.library.fact_rows import (
    build_derivations,
    build_vocabulary,
    order_facts,
    parse_cell,
)
from formbuf.library.library import Library
from formbuf.library.predicate_logic import Judge, compile_condition
from formbuf.library.predicates import Constant
from formbuf.library.rule_check import reachability_fault
from formbuf.library.rule_tables import (
    ANY,
    ANY_BUFFER,
    DOSE_LIMITS,
    FACTS,
    RULES,
    TRIGGERS,
    DoseLimit,
    LimitPer,
    LimitUse,
    Rule,
    Rulebook,
    Severity,
    ThresholdBasis,
    as_basis,
)
from formbuf.library.store import TableFaults
from formbuf.library.tables import Row
from formbuf.library.vocabulary import (
    Scope,
    Vocabulary,
)

_RULE_ID = re.compile(r"[A-Z][A-Za-z0-9_]{0,30}")
#: Substances of dose limits that are neither species nor ion of the tables.
_OTHER_SUBSTANCES = ("titratable_acidity", "boron", "aluminium", "phosphorus")


@functools.lru_cache(maxsize=8)
def load_rulebook(library: Library) -> Rulebook:
    """Load vocabulary, rules and dose limits, a user's tables on top.

    Raises
    ------
    KnowledgeError
        If a row of ours is broken; every fault at once.
    InputError
        If a row of the overlay is broken.
    """
    facts = library.read_table(FACTS)
    rules = library.read_table(RULES)
    limits = library.read_table(DOSE_LIMITS)
    faults = TableFaults()
    book = build_rulebook(library, facts, rules, limits, faults)
    faults.raise_if_any()
    return book


def build_rulebook(
    library: Library,
    facts: tuple[Row, ...],
    rules: tuple[Row, ...],
    limits: tuple[Row, ...],
    faults: TableFaults,
) -> Rulebook:
    """Build a rulebook from rows; what does not fit is noted in ``faults``."""
    vocabulary = build_vocabulary(facts, faults)
    derived = build_derivations(facts, vocabulary, faults)
    candidates = _concerned(library)
    substances = {*library.species, *library.ions, *_OTHER_SUBSTANCES}
    built_rules = [_build_rule(row, vocabulary, candidates, faults) for row in rules]
    built_limits = [_build_limit(row, vocabulary, substances, faults) for row in limits]
    return Rulebook(
        vocabulary=vocabulary,
        derivations={name: each.derivation for name, each in derived.items()},
        order=order_facts(facts, derived, faults),
        rules=tuple(rule for rule in built_rules if rule is not None),
        dose_limits=tuple(limit for limit in built_limits if limit is not None),
    )


def family_slug(family: str) -> str:
    """Return the word by which ``concerns`` names a family of species."""
    return family.replace(" ", "_")


def _concerned(library: Library) -> set[str]:
    families = {family_slug(species.family) for species in library.species.values()}
    return {*library.species, *library.systems, *families, ANY, ANY_BUFFER}


def _build_rule(
    row: Row, vocabulary: Vocabulary, candidates: set[str], faults: TableFaults
) -> Rule | None:
    name = row.text("rule")
    if not _RULE_ID.fullmatch(name):
        faults.add(
            row, "rule", f"{name!r} is no rule id, allowed such as R001 or R001b"
        )
    _check_names(row, "concerns", candidates, faults)
    _check_names(row, "kind", set(TRIGGERS), faults)
    if row.text("basis") in ("published", "derived") and not row.ids("sources"):
        faults.add(row, "sources", f"empty for a {row.text('basis')} rule")
    scope = cast("Scope", row.text("scope"))
    if scope == "product" and row.ids("concerns") != (ANY,):
        faults.add(row, "concerns", "a product rule says the same of all, allowed any")
    node = parse_cell(
        row, "condition", row.text("condition"), vocabulary, faults, scope=scope
    )
    likely = _likely(row, vocabulary, faults)
    if node is None:
        return None
    if row.overlay:
        fault = reachability_fault(node, vocabulary)
        if fault:
            faults.add(row, "condition", fault)
    return Rule(
        id=name,
        title=row.text("title"),
        concerns=row.ids("concerns"),
        topic=row.text("topic"),
        kinds=row.ids("kind"),
        scope=scope,
        severity=cast("Severity", row.text("severity")),
        text=row.text("condition"),
        condition=node,
        judge=compile_condition(node),
        likely=likely,
        favours=row.flag("favours"),
        carried_by=row.text("carried_by"),
        effect=row.text("effect"),
        magnitude=row.text("magnitude"),
        mitigation=row.text("mitigation"),
        sources=row.ids("sources"),
        source_note=row.text("source_note"),
        basis=as_basis(row.text("basis")),
        threshold_basis=cast("ThresholdBasis", row.text("threshold_basis")),
        note=row.text("note"),
        mended=row.text("mended"),
        overlay=row.overlay,
    )


def _likely(row: Row, vocabulary: Vocabulary, faults: TableFaults) -> Judge:
    text = row.text("likely")
    if text in ("yes", "no"):
        return compile_condition(Constant(text == "yes"))
    node = parse_cell(row, "likely", text, vocabulary, faults, scope="product")
    return compile_condition(Constant(False) if node is None else node)


def _check_names(row: Row, column: str, known: set[str], faults: TableFaults) -> None:
    for name in row.ids(column):
        if name not in known:
            near = ", ".join(nearest(name, known)) or f"{len(known)} known names"
            faults.add(row, column, f"unknown name {name!r}, allowed {near}")


def _build_limit(
    row: Row, vocabulary: Vocabulary, substances: set[str], faults: TableFaults
) -> DoseLimit | None:
    _check_names(row, "substance", substances, faults)
    if row.text("basis") in ("published", "derived") and not row.ids("sources"):
        faults.add(row, "sources", f"empty for a {row.text('basis')} limit")
    if not row.ids("sources") and not row.text("source_note"):
        faults.add(row, "source_note", "empty beside empty sources, allowed a reason")
    text = row.text("applies_if")
    node = parse_cell(row, "applies_if", text, vocabulary, faults, scope="product")
    if node is None:
        return None
    return DoseLimit(
        id=row.text("limit"),
        substance=row.text("substance"),
        per=cast("LimitPer", row.text("per")),
        value=row.figure("value"),
        unit=row.text("unit"),
        use=cast("LimitUse", row.text("use")),
        applies=compile_condition(node),
        applies_text=text,
        meaning=row.text("meaning"),
        sources=row.ids("sources"),
        source_note=row.text("source_note"),
        basis=as_basis(row.text("basis")),
        note=row.text("note"),
        overlay=row.overlay,
    )
