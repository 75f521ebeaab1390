"""What a report says: names, units, origins and standings as a reader expects them.

The facts checked are those of the example briefs and of the tables of knowledge; no
published value is compared here.
"""

from __future__ import annotations

import re

import pytest
from report_support import Page, docx_blocks, example, html_blocks, markdown_blocks

from formbuf.advice.loads import load_budget
from formbuf.library import load_library
from formbuf.product.brief import brief_from_mapping, complete
from formbuf.report.changes import Change, Changes, Moved, Reason
from formbuf.report.changes_page import headline, why
from formbuf.report.content import Table, every_section
from formbuf.report.origins import INTERNAL, stated_keys
from formbuf.report.reading import degrees
from formbuf.report.story import Story
from formbuf.report.write_docx import to_docx


def _rows(name: str, table: str) -> list[list[str]]:
    document = example(name).document
    for section in every_section(document.sections):
        for block in section.blocks:
            if isinstance(block, Table) and block.id == table:
                return [
                    ["".join(document.shown(s) for s in cell) for cell in row]
                    for row in block.rows
                ]
    pytest.fail(f"{name}: no table {table}")


def _text(name: str) -> str:
    return "\n".join(html_blocks(example(name).html))


def test_a_concentrated_antibody_is_told_to_buffer_by_estimate() -> None:
    share = next(
        c for c in example("antibody_bulk").data["candidates"] if c["system"] == "none"
    )["carried_share"]
    assert share > 1.0, "the example has lost its point"
    text = _text("antibody_bulk")
    assert "counts as nothing" not in text
    assert "estimated from its isoelectric point and net charge" in text
    assert "what it buffers is an estimate (section 5)" in text
    assert f"By calculation the product carries {share:.1f} times the load" in text
    none = next(r for r in _rows("antibody_bulk", "t-candidates") if "no added" in r[0])
    assert none[1:3] == ["-", "enough by calculation, to be confirmed by a titration"]


def test_an_antibody_of_unknown_charge_is_told_to_count_as_nothing() -> None:
    text = _text("antibody")
    assert "what the drug itself buffers counts as nothing" in text
    assert "what it buffers is not known; only its volume counts" in text
    assert "the buffer is then a margin" not in text
    none = next(r for r in _rows("antibody", "t-candidates") if "no added" in r[0])
    assert none[2] == "open"


@pytest.mark.parametrize(
    ("shown", "wanted"),
    [
        ("at -40 C", "at \u221240\u00a0°C"),
        ("2-40 C, 0.3 to 0.5 C/min", "2-40\u00a0°C, 0.3 to 0.5\u00a0°C/min"),
        ("-0.0028/C", "-0.0028/°C"),
        ("Per C: ring", "Per\u00a0°C: ring"),
        ("vitamin C, 5 Ca, 3 C-N", "vitamin C, 5 Ca, 3 C-N"),
    ],
)
def test_temperatures_bear_their_sign(shown: str, wanted: str) -> None:
    assert degrees(shown) == wanted


@pytest.mark.parametrize("name", ["ampoule", "antibody_bulk"])
def test_only_texts_of_the_user_keep_their_degrees(name: str) -> None:
    page = Page(example(name).html)
    loose = [
        e.text
        for e in page.all("bdi")
        if re.search(r"(\d|[Pp]er) C(?![\w-])", e.text)
        and not e.attributes["title"].startswith("/brief/")
    ]
    assert not loose


def test_what_the_brief_leaves_out_is_no_limit_of_the_brief() -> None:
    rows = {r[0]: r[2] for r in _rows("ampoule", "t-control")}
    assert rows["Osmolality"].startswith("assumed, the range that the route bears")
    assert rows["pH at release"].startswith("brief, tolerance assumed;")
    assert rows["pH over shelf life"].startswith("brief;")


def test_the_record_of_the_input_tells_the_origin_of_every_key() -> None:
    rows = {r[0]: r[2] for r in _rows("ampoule", "t-input")}
    assert set(rows.values()) <= {
        "stated",
        "assumed",
        "computed",
        "preset",
        "not stated",
    }
    assert not set(INTERNAL) & set(rows)
    for key, origin in {
        "storage[1].temperature_c": "stated",
        "storage[1].kind": "preset",
        "storage[3].temperature_c": "assumed",
        "drug.concentration_mg_ml": "stated",
        "drug.concentration_mmol_l": "computed",
        "drug.counter_ion_per_mole": "assumed",
        "drug.pka[1].pka": "stated",
        "candidate[1].materials.trisodium_citrate_dihydrate": "stated",
        "product.version": "not stated",
    }.items():
        assert rows[key] == origin, key
    assert {r[0]: r[2] for r in _rows("eye_drop", "t-input")}[
        "excipient[1].g_l"
    ] == "computed"
    told = {r[0]: r[2] for r in _rows("enzyme", "t-brief")}
    assert told["Temperature, body"] == "assumed"
    assert told["Temperature, process"] == "stated"


def test_a_text_that_is_no_brief_states_nothing() -> None:
    assert stated_keys("= nothing") == ()


def test_loads_of_the_author_are_stated_and_no_judgement() -> None:
    cells = [r[-1] for r in _rows("ampoule", "t-loads")]
    assert cells[0] == "stated"
    rows = [r for r in _rows("ampoule", "t-confirm") if "over shelf life" in r[0]]
    assert [r[2] for r in rows] == ["stated", "stated"]
    defaults = {r[2] for r in _rows("enzyme", "t-confirm") if "shelf life" in r[0]}
    assert defaults == {"judgement"}


def test_a_budget_keeps_its_basis_and_tells_it_in_words() -> None:
    brief = brief_from_mapping(
        {
            "product": {"route": "intravenous"},
            "ph": {"target": 7.0},
            "loads": {"acid_mmol_l": 0.4},
        }
    )
    library = load_library()
    acid, base = load_budget(library, complete(brief, library).brief).items[:2]
    assert (acid.basis, acid.told_basis) == ("judgement", "stated")
    assert (base.basis, base.told_basis) == ("judgement", "judgement")


def test_the_batch_sheet_names_what_is_weighed() -> None:
    for way in ("batch-1", "batch-2"):
        mistakes = [r[0] for r in _rows("antibody_bulk", f"t-{way}-mistakes")]
        assert "1 % more sucrose" in mistakes
        assert not [m for m in mistakes if "_" in m]
        kinds = {r[1] for r in _rows("antibody_bulk", f"t-{way}-readings")}
        assert {"preparation", "measurement", "storage"} <= kinds
    hydrates = _rows("antibody_bulk", "t-batch-1-hydrates")
    assert hydrates
    assert not [r for r in hydrates if "_" in r[0] + r[1]]


def test_values_to_confirm_bear_words_and_no_keys_of_tables() -> None:
    items = [r[:2] for r in _rows("enzyme", "t-confirm")]
    told = [" ".join(i) for i in items]
    assert "weight of freezing drift 2" in told
    assert not [t for t in told if "usp_nf" in t or "ph_eur" in t]
    more = [" ".join(r[:2]) for r in _rows("ampoule", "t-confirm")]
    assert any("USP-NF not looked up, Ph. Eur. yes" in t for t in more)


def test_further_reasons_are_no_candidates() -> None:
    first = [r[0] for r in _rows("ampoule", "t-exclusions")]
    assert "– further reason" in first
    assert "and" not in first


def test_incomplete_references_are_marked_and_listed() -> None:
    report = example("ampoule")
    known = load_library().sources
    marked = {r.source for r in report.document.references if r.remark}
    assert marked == {
        r.source
        for r in report.document.references
        if not (known[r.source].authors and known[r.source].title)
    }
    assert 0 < len(marked) < len(report.document.references)
    numbers = report.document.numbers
    shown = ", ".join(str(n) for n in sorted(numbers[s] for s in marked))
    assert f"completed before filing: [{shown}]." in _text("ampoule")


@pytest.mark.parametrize("name", ["ampoule", "antibody_bulk"])
def test_rules_apply_or_stay_open(name: str) -> None:
    text = _text(name)
    assert "Rules that apply or could not be judged" in text
    assert not re.search(r"\b(fired?|fires|not evaluable|Arm without)\b", text)
    assert not re.search(r"tied with nobody|counts for nobody|rank nobody", text)


def test_changes_speak_of_rules_and_leads_in_the_same_words() -> None:
    reason = Reason("rule R126", None, "fired")
    moved = Moved("x", "x", 1, 2, "lead", "viable", 0.9, 0.8, 5.0, 5.0, (reason,))
    assert why(moved) == "rule R126: not judged, now applies"
    changes = Changes((), (), (), Change("lead", None, "a"), None, (), (moved,))
    assert headline(changes, {"a": "A"}).startswith("The lead was none and is now A.")


@pytest.mark.slow
def test_the_forms_of_the_bulk_say_the_same() -> None:
    report = example("antibody_bulk")
    told = html_blocks(report.html)
    assert told == markdown_blocks(report.markdown)
    assert told == docx_blocks(to_docx(report.document))
    assert Story(report.data).lead is not None
