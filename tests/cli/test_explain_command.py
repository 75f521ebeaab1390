"""What ``formbuf explain`` shows of one candidate, in data and in words."""

from __future__ import annotations

import csv
import io
from typing import Any

import pytest
from cli_runner import EXAMPLES, formbuf

from formbuf.library import load_library

ANTIBODY = str(EXAMPLES / "antibody.toml")
HEADER = ["schema", "formbuf_version", "knowledge"]


@pytest.fixture(scope="module")
def antibody() -> dict[str, Any]:
    return formbuf("shortlist", ANTIBODY, "--format", "json").data()


def _rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text, newline="")))


@pytest.mark.parametrize(
    "name", ["none", "histidine_hydrochloride", "tris_hydrochloride", "sodium_borate"]
)
def test_explain_shows_everything_behind_one(
    name: str, antibody: dict[str, Any]
) -> None:
    done = formbuf("explain", ANTIBODY, name, "--json")
    assert done.code == 0
    data = done.data()
    assert list(data) == [
        *HEADER,
        "brief",
        "assumptions",
        "verdict",
        "loads",
        "ranking",
        "candidate",
        "product_findings",
        "sources",
        "warnings",
    ]
    listed = next(c for c in antibody["candidates"] if c["system"] == name)
    explained = data["candidate"]
    if listed["standing"] == "screened out":
        # the shortlist does not freeze what a screen dropped; the explanation does
        assert explained["frozen"] is not None
        freezing = ("frozen", "criteria", "findings", "finding_counts", "limiting")
        for key in (*freezing, "desirability", "desirability_deviation_ln"):
            explained[key] = listed[key]
    assert explained == listed
    assert set(data["ranking"]["weights"]) >= {"capacity", "precedent"}
    known = load_library().sources
    assert all(known[s["id"]].text == s["text"] for s in data["sources"])


def test_explain_in_words(antibody: dict[str, Any]) -> None:
    text = " ".join(
        formbuf("explain", ANTIBODY, "sodium_phosphate", columns=2000).out.split()
    )
    for heading in (
        "Why this place",
        "Size and loads",
        "Composition, per litre",
        "States",
        "Dissolved at the measurement temperature",
        "Freezing and drying",
        "Findings that apply or are open",
        "What a dose brings",
        "Ionization",
        "Sources",
    ):
        assert heading in text
    c = next(c for c in antibody["candidates"] if c["system"] == "sodium_phosphate")
    for criterion in c["criteria"].values():
        assert " ".join(criterion["text"].split()) in text


def test_explain_tells_why_one_was_dropped() -> None:
    text = formbuf("explain", ANTIBODY, "tris_hydrochloride").out
    assert "screened out" in text
    assert "Screens" in text
    assert "ceiling" in text


def test_explain_csv_holds_every_leaf() -> None:
    rows = _rows(formbuf("explain", ANTIBODY, "none", "--format", "csv").out)
    assert {row["key"] for row in rows} >= {"schema", "candidate.system", "verdict"}


@pytest.mark.slow
def test_explain_judges_what_the_brief_does_not_consider() -> None:
    done = formbuf("explain", ANTIBODY, "bis_tris_hydrochloride")
    assert done.code == 0
    assert "judged because it was asked for" in done.out


@pytest.mark.slow
def test_explain_takes_the_formula_of_the_user() -> None:
    data = formbuf("shortlist", ANTIBODY, "--json").data()
    own = next(c for c in data["candidates"] if c["is_own_formula"])
    by_key = formbuf("explain", ANTIBODY, own["system"], "--json").data()
    by_name = formbuf("explain", ANTIBODY, own["name"], "--json").data()
    assert by_key["candidate"] == by_name["candidate"] == own
