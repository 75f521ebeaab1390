"""Defaults that give way: excluded tonicity agents, and doses that are upper ends."""

from __future__ import annotations

import pytest
from brief_support import (
    DRIED,
    HEAD,
    WITHOUT_SUCROSE,
    assumed_values,
    completed_text,
    quick_brief,
)

from formbuf import shortlist
from formbuf.errors import InputError
from formbuf.library import Library, load_library
from formbuf.product.brief import (
    brief_from_text,
)


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


@pytest.mark.parametrize(
    ("text", "agent", "said"),
    [
        ('exclude = ["sodium"]\n' + HEAD, "mannitol", "sodium_chloride"),
        ('exclude = ["sodium_chloride"]\n' + HEAD, "mannitol", "sodium_chloride"),
        (WITHOUT_SUCROSE, "trehalose_dihydrate", "sucrose"),
        ('exclude = ["mannitol"]\n' + DRIED, "sucrose", "mannitol"),
    ],
)
def test_an_excluded_agent_gives_way_and_the_assumption_says_to_what(
    text: str, agent: str, said: str, library: Library
) -> None:
    completed = completed_text(text, library)
    row = next(a for a in completed.assumptions if a.key == "tonicity.agent")
    assert completed.brief.tonicity.agent == row.value == agent
    assert completed.brief.tonicity.agent_is_default
    excluded = completed.brief.exclude[0]
    assert row.reason == f"instead of {said}, since the brief excludes {excluded}"


def test_without_any_agent_left_nothing_fills(library: Library) -> None:
    text = 'exclude = ["sodium", "mannitol"]\n' + HEAD
    completed = completed_text(text, library)
    assert completed.brief.tonicity.agent is None
    assert not completed.brief.tonicity.fill
    assert assumed_values(completed)["tonicity.fill"] is False
    keys = [row.key for row in completed.assumptions]
    assert keys.count("tonicity.fill") == 1
    with pytest.raises(InputError, match="excludes every customary agent"):
        completed_text(text + "[tonicity]\nfill = true\n", library)
    own = completed_text(text + '[tonicity]\nagent = "glycerol"\n', library).brief
    assert own.tonicity.agent == "glycerol"
    assert own.tonicity.fill


def test_an_assumed_dose_says_whether_it_is_the_largest(library: Library) -> None:
    for route, words in (
        ("subcutaneous", "largest usual volume of the route, conservative"),
        ("intramuscular", "largest usual volume of the route, conservative"),
        ("ophthalmic_topical", "typical volume of the route"),
    ):
        rows = {a.key: a for a in quick_brief(library, route=route).assumptions}
        assert rows["dose.volume_ml"].reason.startswith(words)
        fill = rows["container.fill_volume_ml"].reason
        assert ("meets more glass" in fill) == (route != "ophthalmic_topical")


def test_an_excluded_material_screens_the_buffer_made_of_it(library: Library) -> None:
    """Tris acetate holds none of the hydrochloride and stays."""
    text = 'exclude = ["tromethamine_hydrochloride"]\n' + HEAD.replace("6.0", "8.0")
    result = shortlist(brief_from_text(text), library)
    reasons = {
        c.key: [s.text for s in c.dropped_by if s.id == "excluded"]
        for c in result.candidates
    }
    said = "tromethamine_hydrochloride is excluded by the brief"
    assert reasons["tris_hydrochloride"] == [said]
    assert reasons["tris_acetate"] == []


def test_an_unknown_name_is_still_refused(library: Library) -> None:
    with pytest.raises(InputError, match="unknown species, system, ion or material"):
        completed_text('exclude = ["sucros"]\n' + HEAD, library)
