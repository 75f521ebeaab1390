"""Annexes: constants, input record, references, reproducibility."""

from __future__ import annotations

from typing import Any

from formbuf.report.content import (
    Block,
    Column,
    Items,
    Paragraph,
    ReferenceList,
    Section,
    Spans,
)
from formbuf.report.origins import INTERNAL, assumed_keys, origin
from formbuf.report.reading import Cursor, cite, link, spans
from formbuf.report.story import Story, number, source_cell, table


def constants(story: Story) -> Section:
    """Return the equations and the constants behind the finalists."""
    place = story.more.at("constants")
    blocks: list[Block] = [Items(_equations())]
    if place.get("ionization"):
        blocks.append(_ionization(story, place))
    others = _others(place)
    if others:
        blocks.append(
            table(
                "t-constants",
                spans("Further constants"),
                (
                    Column("Quantity", width=2.6),
                    number("Value", 1.2),
                    Column("Unit", width=1.6),
                    Column("Basis and source", width=1.6),
                ),
                others,
            )
        )
    return Section(
        "constants", spans("Equations and constants"), tuple(blocks), annex=True
    )


def _equations() -> tuple[Spans, ...]:
    return (
        spans(
            "Ionization against temperature: ln K(T) = ln K(T0) − (ΔH/R)(1/T − 1/T0) + "
            "(ΔCp/R)(T0/T − 1 + ln(T/T0)), T0 = 298.15 K",
            cite("goldberg_2002"),
            "; without ΔCp by ΔH alone.",
        ),
        spans(
            "Activity coefficients: log10 γ = −z² A √I/(1 + 1.5 √I)",
            cite(("archer_wang_1990", "clegg_1994")),
            "; γ = 1 for uncharged species.",
        ),
        spans("Ionization of water: pKw(T)", cite("bandura_lvov_2006"), "."),
        spans(
            "Equilibrium: the pH closes the charge balance of all species; ionic strength "
            "and activity coefficients converge with it."
        ),
        spans(
            "Capacity: β = ln 10 ([H+] + [OH−] + Σ C Var(z)), the variance over the charges "
            "z of each component",
            cite("van_slyke_1922"),
            ".",
        ),
        spans(
            "Osmolality: Σ φ m, the electrolyte part by integration of the activity model "
            "with one fitted coefficient for each pair of ions."
        ),
        spans(
            "Amounts per kg of water follow from the volume that the solutes take up: water "
            "per litre = density of water × (1 − Σ c M v)."
        ),
    )


def _ionization(story: Story, place: Cursor) -> Block:
    rows = []
    marked = False
    for step in place.each("ionization"):
        conflict = bool(step.get("conflict"))
        marked = marked or conflict
        rows.append(
            (
                spans(
                    step.quote("name"),
                    " (own table)" if step.get("overlay") else None,
                    " *" if conflict else None,
                ),
                spans(step.plain("step")),
                spans(step.value("acid_charge", places=0, sign=True)),
                _with_error(step.at("pka")),
                _with_error(step.at("dh_kj_mol")),
                _with_error(step.at("dcp_j_mol_k")),
                _sources(step),
            )
        )
    notes = [
        spans(
            "Thermodynamic values at 25 °C and zero ionic strength ± standard uncertainty "
            "(judgement). A dash means unknown."
        )
    ]
    if marked:
        notes.append(
            spans(
                "* Another source gives a value outside the uncertainty first stated."
            )
        )
    return table(
        "t-ionization",
        spans("Ionization of the components of the finalists"),
        (
            Column("Component", width=1.7),
            number("Step", 0.6),
            number("Charge of the acid", 0.8),
            number("pKa", 1.2),
            number("ΔH, kJ/mol", 1.2),
            number("ΔCp, J/(mol K)", 1.2),
            Column("Basis and source", width=1.5),
        ),
        rows,
        notes,
    )


def _with_error(q: Cursor) -> Spans:
    if q.data is None:
        return spans("-")
    if q.get("uncertainty") is None:
        return spans(q.plain("value"))
    return spans(q.plain("value"), " ± ", q.plain("uncertainty"))


def _sources(step: Cursor) -> Spans:
    parts: list[Any] = []
    groups: dict[tuple[str, str], None] = {}
    for key in ("pka", "dh_kj_mol", "dcp_j_mol_k"):
        q = step.at(key)
        if q.data is not None:
            groups[(q.text("basis"), q.text("source"))] = None
    bases: dict[str, list[str]] = {}
    for basis, source in groups:
        bases.setdefault(basis, []).append(source)
    for basis, sources in bases.items():
        parts += ["; " if parts else "", basis, cite(sources)]
    return spans(*parts)


def _others(place: Cursor) -> list[tuple[Spans, ...]]:
    return [
        *(
            _constant(spans(entry.quote("name"), " at 25 °C"), entry)
            for entry in place.each("water")
        ),
        *(
            _constant(
                spans("log10 K of formation, ", entry.quote("product")),
                entry.at("log10_k"),
            )
            for entry in place.each("associations")
        ),
        *(
            _constant(spans(f"{label}, ", entry.quote("of")), entry)
            for key, label in (
                ("volumes", "partial specific volume"),
                ("osmotic", "osmotic coefficient"),
            )
            for entry in place.each(key)
        ),
    ]


def _constant(name: Spans, entry: Cursor) -> tuple[Spans, ...]:
    unit = entry.text("unit")
    return (
        name,
        _with_error(entry),
        spans("-") if unit in ("", "1") else spans(entry.quote("unit")),
        source_cell(entry.get("source"), entry.text("basis")),
    )


def input_record(story: Story) -> Section:
    """Return every key of the completed brief."""
    assumed = assumed_keys(story)
    stated = frozenset(story.more.get("origin", "stated") or ())
    rows = [
        (spans(key), spans(leaf.plain()), spans(origin(key, leaf, assumed, stated)))
        for key, leaf in _leaves(story.brief)
        if key not in INTERNAL
    ]
    notes = [
        spans(
            "Assumed values stand with their reasons in ",
            link("assumed"),
            ". Computed: follows from other keys. Preset: the program's own value where "
            "the brief says nothing.",
        )
    ]
    return Section(
        "input",
        spans("Input record"),
        (
            table(
                "t-input",
                spans("The brief as completed, key by key"),
                (
                    Column("Key", width=2.4),
                    Column("Value", width=3.6),
                    Column("Origin", width=0.8),
                ),
                rows,
                notes,
            ),
        ),
        annex=True,
    )


def _leaves(place: Cursor, prefix: str = "") -> list[tuple[str, Cursor]]:
    data = place.data
    found: list[tuple[str, Cursor]] = []
    if isinstance(data, dict) and data:
        for key in data:
            name = f"{prefix}.{key}" if prefix else str(key)
            found += _leaves(place.at(key), name)
    elif isinstance(data, list) and any(isinstance(x, dict | list) for x in data):
        for i in range(len(data)):
            found += _leaves(place.at(i), f"{prefix}[{i + 1}]")
    else:
        found.append((prefix, place))
    return found


def references() -> Section:
    """Return the reference list."""
    return Section("references", spans("References"), (ReferenceList(),), annex=True)


def reproducibility(story: Story) -> Section:
    """Return how to get the same result again."""
    root, more = story.root, story.more
    command = more.text("origin", "command")
    words = spans(
        "The calculation has no random part and reads no clock: the same brief, program "
        "and knowledge give the same numbers and the same text. "
        if more.get("seed") is None
        else "With the seed stated, the same brief, program and knowledge give the same "
        "numbers. ",
        "With an output named FILE.json the same command writes the result with every "
        "number of this report; in the HTML form the title of a number is its place in "
        "that file (a JSON pointer). ",
    )
    if command:
        words = spans(words, "Command: ", more.quote("origin", "command"), ". ")
    words = spans(
        words,
        "Program formbuf ",
        root.quote("formbuf_version"),
        ", knowledge ",
        root.quote("knowledge", "version"),
        " with checksum ",
        root.quote("knowledge", "sha256"),
        ".",
    )
    return Section(
        "reproducibility", spans("Reproducibility"), (Paragraph(words),), annex=True
    )
