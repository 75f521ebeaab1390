"""Results show themselves briefly, in HTML, and as pandas tables with units."""

from __future__ import annotations

import subprocess
import sys

import pytest
from cli_runner import EXAMPLES, ROOT, clean_environment
from reference_tables import library

import formbuf
from formbuf.advice.freeze_thaw import compare_freezing
from formbuf.advice.results import Shortlist
from formbuf.bench.predict import predict
from formbuf.notebook import MOST_ROWS, html_table, shown
from formbuf.product.brief import read_brief

#: Words for quantities that have no unit.
BARE = {"rank", "system", "standing", "limiting", "screened_out_by", "ph_drift", "ph"}
BARE |= {"assumption", "state", "ice_fraction"}
UNITS = ("_mmol_l", "_mosm_kg", "_c", "_mol_kg", "_kg_ph", "_pa", "_g_kg")


@pytest.fixture(scope="module")
def result() -> Shortlist:
    return formbuf.shortlist(read_brief(EXAMPLES / "eye_drop.toml"), library())


def _with_units(columns: list[str]) -> None:
    for name in columns:
        assert name in BARE or name.endswith((*UNITS, "desirability")), name


def test_a_shortlist(result: Shortlist) -> None:
    text = repr(result)
    assert text.startswith(f"<Shortlist: {result.verdict}")
    assert len(text) < 300
    table = result.table
    assert str(table["rank"].dtype) == "Int64"
    assert len(table) == len(result.candidates)
    _with_units(list(table.columns))
    page = result._repr_html_()
    assert page.count("<tr>") == len(result.ranked) + 1
    assert result.ranked[0].key in page


def test_a_candidate(result: Shortlist) -> None:
    lead = result.ranked[0]
    assert repr(lead).startswith(f"<Candidate {lead.key} ")
    assert len(repr(lead)) < 160


def test_a_prediction() -> None:
    found = predict(library(), {"sodium_chloride": 154.0}, (25.0, 5.0))
    assert repr(found).startswith("<Prediction of 154 mmol/L sodium_chloride: pH ")
    assert list(found.table["temperature_c"]) == [25.0, 5.0]
    _with_units(list(found.table.columns))
    assert found._repr_html_().count("<tr>") == 3


def test_a_comparison_on_freezing() -> None:
    found = compare_freezing(read_brief(EXAMPLES / "antibody.toml"), library())
    assert repr(found).startswith("<FreezeThaw down to -40 C: ")
    table = found.table
    assert {"crystallising", "supersaturated"} <= set(table["assumption"])
    _with_units(list(table.columns))
    assert found._repr_html_().count("<tr>") == len(found.systems) + 1


def test_a_library() -> None:
    assert len(repr(library())) < 200
    assert library().version in repr(library())


def test_html_is_escaped() -> None:
    page = html_table("<script>", [{"<b>": "<img src=x>", "ph": None}], "a & b")
    assert "<script>" not in page
    assert "<img" not in page
    assert "&lt;b&gt;" in page
    assert "a &amp; b" in page


def test_long_tables_are_cut() -> None:
    page = html_table("t", [{"n": i} for i in range(MOST_ROWS + 5)])
    assert page.count("<tr>") == MOST_ROWS + 1
    assert "and 5 more rows" in page


@pytest.mark.parametrize(
    ("value", "text"),
    [(None, "-"), (float("nan"), "-"), (0.123456, "0.1235"), (7, "7"), ("x", "x")],
)
def test_shown(value: object, text: str) -> None:
    assert shown(value) == text


@pytest.mark.slow
def test_the_example_of_the_python_interface_runs() -> None:
    done = subprocess.run(
        [sys.executable, "-W", "error", str(EXAMPLES / "python_interface.py")],
        capture_output=True,
        text=True,
        check=False,
        cwd=ROOT.parent,
        env=clean_environment({}),
    )
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""
    for part in (
        "<Shortlist: Lead: ",
        "formbuf.shortlist/1",
        "<Prediction of 20 mmol/L sodium_acetate_trihydrate",
        "<FreezeThaw down to -40 C",
        "[10.03",
    ):
        assert part in done.stdout
