"""Reports of every outcome: one candidate, none, ties, no buffer needed, overrides."""

from __future__ import annotations

import functools
import re
from typing import Any

import pytest
from report_support import (
    Report,
    docx_blocks,
    example,
    html_blocks,
    markdown_blocks,
    report_of,
)

from formbuf.report.content import Document, OpenPoint

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

SPECIES = [
    "phosphate",
    "citrate",
    "tris",
    "histidine",
    "acetate",
    "succinate",
    "borate",
    "glycine",
    "carbonate",
    "glutamate",
    "lactate",
    "malate",
    "tartrate",
]
ANTIBODY = {
    "product": {"name": "Case", "route": "subcutaneous"},
    "ph": {"target": 6.0},
    "drug": {"kind": "antibody"},
}
TITRATION = [
    {"ph": 5.5, "base_mmol_l": -5.0},
    {"ph": 6.0, "base_mmol_l": 0.0},
    {"ph": 6.5, "base_mmol_l": 5.0},
]


def _but(*kept: str) -> list[str]:
    return [name for name in SPECIES if name not in kept]


CASES: dict[str, dict[str, Any]] = {
    "none left": {**ANTIBODY, "exclude": _but()},
    "one": {**ANTIBODY, "exclude": _but("histidine")},
    "two": {**ANTIBODY, "exclude": _but("histidine", "phosphate")},
    "no buffer leads": {
        **ANTIBODY,
        "drug": {
            "kind": "antibody",
            "concentration_mg_ml": 100.0,
            "titration": TITRATION,
        },
        "ranking": {"weights": {"precedent": 0.0}},
    },
    "no buffer beside": {
        **ANTIBODY,
        "drug": {
            "kind": "antibody",
            "concentration_mg_ml": 100.0,
            "titration": TITRATION,
        },
    },
    "no drug, no load": {
        "product": {"route": "intravenous"},
        "ph": {"target": 7.4, "low": 7.0, "high": 7.8},
        "dose": {"volume_ml": 1000.0},
        "loads": {"acid_mmol_l": 0.0, "base_mmol_l": 0.0},
        "container": {"type": "plastic_bag"},
        "drug": {"kind": "none"},
    },
    "override and own formula": {
        "product": {"name": "Case", "route": "subcutaneous"},
        "ph": {"target": 7.4},
        "drug": {"kind": "small_molecule"},
        "override": [
            {
                "rule": "precedent_avoid",
                "reason": "argued in the safety file",
                "name": "A. Scientist",
                "date": "2026-01-05",
            }
        ],
        "candidate": [
            {
                "name": "our buffer",
                "materials": {"disodium_hydrogen_phosphate_anhydrous": 5.0},
            }
        ],
    },
    "one criterion": {
        **ANTIBODY,
        "ranking": {
            "weights": {
                "capacity": 1.0,
                "temperature_drift": 0.0,
                "tonicity_share": 0.0,
                "compatibility": 0.0,
                "precedent": 0.0,
                "dose_burden": 0.0,
            }
        },
    },
    "nearly nothing said": {"product": {"route": "oral_liquid"}, "ph": {"target": 4.0}},
}
#: Faults that a text put together from parts is prone to.
FAULTS = (
    r"\bNone\b|\bnan\b|\binf\b|\bTrue\b|\bFalse\b",
    r"\{|\}|<[a-z]|\(\)|\[\]",
    r" [,.;:)]|\( |,,|\.\.|;;|,\.|;\.|: \.|: ;",
    r"\b(\w+) \1\b",
    r"\ba (?=[aeio][a-z]+ (acid|antibody|ampoule))",
    r"\bone (candidates|places|are)\b|\b(two|three|four) (candidate|place|is)\b",
    r"^[a-z].*[a-z]\.$",
)


#: The solver takes its time with a coarse titration curve.
SLOW = ("no buffer beside", "one criterion", "nearly nothing said")
PARAMS = [
    pytest.param(name, marks=pytest.mark.slow) if name in SLOW else name
    for name in (*CASES, "enzyme")
]


@pytest.fixture(params=PARAMS)
def report(request: pytest.FixtureRequest) -> Report:
    name = str(request.param)
    return example(name) if name == "enzyme" else case(name)


@functools.cache
def case(name: str) -> Report:
    return report_of(_dated(CASES[name]))


def _dated(brief: dict[str, Any]) -> dict[str, Any]:
    import datetime as dt

    rows = [
        {**row, "date": dt.date.fromisoformat(row["date"])}
        for row in brief.get("override", ())
    ]
    return {**brief, "override": rows} if rows else brief


def _sentences(document: Document) -> list[str]:
    from report_support import tidy

    from formbuf.report.content import Note, Paragraph, every_section

    return [
        tidy("".join(document.shown(s) for s in block.spans))
        for section in every_section(document.sections)
        for block in section.blocks
        if isinstance(block, Paragraph | Note)
    ]


def test_every_form_can_be_written_and_says_the_same(report: Report) -> None:
    told = html_blocks(report.html)
    assert told == markdown_blocks(report.markdown)
    assert told == docx_blocks(report.docx)


def test_sentences_are_whole(report: Report) -> None:
    for line in _sentences(report.document):
        plain = re.sub(r"\s*\[\d+(, \d+)*\]", "", line)
        for fault in FAULTS[:-1]:
            found = re.search(fault, plain)
            assert found is None, (fault, found and found.group(), line)
        assert plain[:1].isupper() or plain[:1] in "“0123456789" or plain[:2] == "pH", (
            line
        )
        assert plain.endswith((".", "if")), line


def _summary(report: Report) -> str:
    blocks = html_blocks(report.html)
    start = next(i for i, b in enumerate(blocks) if b.endswith("Decision summary"))
    end = next(i for i, b in enumerate(blocks) if b.endswith("Product requirements"))
    return " ".join(blocks[start:end])


def test_nobody_left() -> None:
    report = case("none left")
    text = _summary(report)
    assert "No candidate is acceptable." in text
    assert "is excluded by the brief" in text
    assert "puts forward" not in text
    titles = " ".join(s.id for s in report.document.sections)
    for absent in ("design", "experiments", "ranking", "process"):
        assert absent not in titles
    assert not [p for p in report.document.open_points if p.id == "ph-made"]


def test_a_single_candidate_has_no_backup() -> None:
    text = _summary(case("one"))
    assert "It is the only candidate left to rank" in text
    assert "There is no back-up." in text
    assert "Back-up" not in text.replace("There is no back-up.", "")
    assert "tied" not in text


def test_two_candidates() -> None:
    text = _summary(case("two"))
    assert "first of two places" in text
    assert "The back-up is" in text


def test_ties_are_told_in_words() -> None:
    report = example("enzyme")
    lead = next(c for c in report.data["candidates"] if c["rank"] == 1)
    assert lead["tied_with"], "the example has lost its tie"
    text = _summary(report)
    assert "cannot be told apart from" in text
    assert "is tied with no other candidate" not in text
    assert any(p.id == "tie" and p.weight == 1 for p in report.document.open_points)


def test_no_buffer_is_put_forward() -> None:
    report = case("no buffer leads")
    assert report.data["lead"] == "none", "the case has lost its point"
    text = _summary(report)
    assert "puts forward no added buffer with the pH set to" in text
    assert "0 mmol/L" not in text
    assert any(p.id == "no-buffer" for p in report.document.open_points)
    assert not any(p.id == "titration" for p in report.document.open_points)


def test_an_override_is_told_with_reason_name_and_date() -> None:
    blocks = html_blocks(case("override and own formula").html)
    for told in ("argued in the safety file", "A. Scientist", "2026-01-05"):
        assert told in blocks
    assert any("set aside for boric acid and borax" in b for b in blocks)


def test_an_own_formula_outside_its_window_is_dropped_with_its_ph() -> None:
    blocks = html_blocks(case("override and own formula").html)
    own = next(b for b in blocks if b.startswith("“our buffer”"))
    assert "it is screened out: as given it reads pH 9." in own


def test_default_loads_are_an_open_point_and_a_caution() -> None:
    report = case("one")
    point = next(p for p in report.document.open_points if p.id == "loads")
    assert point.weight == 1
    assert "No acid or base load was stated." in _summary(report)


def test_open_points_are_told_once_each(report: Report) -> None:
    points: tuple[OpenPoint, ...] = report.document.open_points
    assert len({p.id for p in points}) == len(points)
    assert all(p.experiment and p.decides and p.statement for p in points)


def test_every_link_of_a_report_leads_somewhere(report: Report) -> None:
    from report_support import Page

    page = Page(report.html)
    ids = {e.attributes.get("id") for e in page.elements}
    assert all(a.attributes["href"][1:] in ids for a in page.all("a"))


def test_values_to_confirm_hold_no_published_one(report: Report) -> None:
    rows = report.data["rationale"]["to_confirm"]
    assert rows
    known = {"memory", "practice", "judgement", "stated"}
    assert {r["basis"] for r in rows} <= known
    assert {r["group"] for r in rows if r["basis"] == "stated"} <= {"load"}


def test_a_result_with_draws_has_a_section_on_confidence() -> None:
    drawn, plain = example("antibody", 200), example("antibody")
    assert "confidence" in [s.id for s in drawn.document.sections]
    assert "confidence" not in [s.id for s in plain.document.sections]
    text = _summary(drawn)
    assert re.search(r"The lead comes first in \d+ % of the draws", text)
    assert "of the draws" not in _summary(plain)
    assert drawn.data["rationale"]["seed"] == 1
    assert plain.data["rationale"]["seed"] is None
