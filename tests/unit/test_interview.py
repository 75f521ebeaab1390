"""The guided brief without a terminal: questions, answers, the way back, the file."""

from __future__ import annotations

import contextlib
import re
import tomllib
from typing import get_args

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from reference_tables import library

from formbuf.errors import InputError
from formbuf.library.rules import load_rulebook
from formbuf.product import interview_readers as readers
from formbuf.product.brief import brief_from_mapping, brief_from_text, complete
from formbuf.product.brief_writer import brief_toml, toml_value
from formbuf.product.interview import GROUPS, Interview, fact_questions
from formbuf.product.interview_questions import questions
from formbuf.product.vocabulary import DrugKind, Form, Route

NASAL = {
    "title": 'spray "N", 5 µg',
    "product.route": "nasal",
    "ph.target": "5.5",
    "product.form": "liquid",
    "drug.kind": "small molecule",
    "ph.low": "5.0 - 6.0",
    "storage.temperature_c": "25 C",
    "container.type": "bottle",
    "dose.volume_ml": "0.2 mL",
    "dose.per_day": "2",
    "drug.concentration_mg_ml": "10",
    "drug.molar_mass_g_mol": "320.4",
    "drug.pka": "base 9.1, acid 4.2",
    "drug.counter_ion": "sodium",
    "tonicity.agent": "sodium chloride",
    "excipient": "disodium_edetate_dihydrate 0.05 %; mannitol = 10 mmol/L",
    "exclude": "citrate potassium",
}


def _played(script: dict[str, str]) -> tuple[Interview, list[str]]:
    interview = Interview(questions(library()), library())
    asked = []
    while (question := interview.current()) is not None:
        asked.append(question.key)
        interview.answer(script.get(question.key, ""))
    return interview, asked


def _text(interview: Interview) -> str:
    left_open = {
        q.key: (line, q.text)
        for q in interview.open_questions()
        if (line := q.line_when_open()) is not None
    }
    return brief_toml(interview.data(), head=["one", "two"], open_keys=left_open)


def test_a_nasal_spray_is_asked_for_what_matters() -> None:
    interview, asked = _played(NASAL)
    assert "dose.infusion_rate_ml_h" not in asked
    assert "drug.isoelectric_point" not in asked
    assert "container.fill_volume_ml" not in asked
    assert "container.gas_permeable" in asked
    data = interview.data()
    assert data["ph"] == {"target": 5.5, "low": 5.0, "high": 6.0}
    assert data["drug"]["pka"] == [
        {"pka": 4.2, "acid_charge": 1},
        {"pka": 9.1, "acid_charge": 0},
    ]
    assert data["container"]["type"] == "plastic_bottle"
    assert [row["material"] for row in data["excipient"]] == [
        "disodium_edetate_dihydrate",
        "mannitol",
    ]


def test_the_file_holds_the_answers_and_names_what_is_open() -> None:
    interview, _ = _played(NASAL)
    text = _text(interview)
    assert text.startswith("# one\n# two\n")
    assert "# population =   # open: Who are the youngest patients?" in text
    brief = brief_from_text(text)
    assert brief.to_dict() == brief_from_mapping(interview.data()).to_dict()
    complete(brief, library())


def test_what_is_open_can_be_filled_in_where_it_stands() -> None:
    text = _text(_played(NASAL)[0])
    filled = text.replace("# population =   # open:", 'population = "child"  #')
    assert brief_from_text(filled).product.population == "child"
    loads = text.replace("# [loads]", "[loads]")
    loads = loads.replace("# acid_mmol_l =   # open:", "acid_mmol_l = 1.5  #")
    assert brief_from_text(loads).loads.acid_mmol_l == 1.5


@pytest.mark.parametrize("route", get_args(Route))
@pytest.mark.parametrize("form", [*get_args(Form), ""])
def test_every_route_and_form_gives_a_brief(route: str, form: str) -> None:
    interview, asked = _played(
        {"product.route": route, "ph.target": "6.5", "product.form": form}
    )
    assert len(asked) <= 20
    assert ("storage.use" in asked) == (form == "dried")
    assert ("tonicity.agent" in asked) == (
        route not in ("oral_liquid", "topical", "otic")
    )
    complete(brief_from_text(_text(interview)), library())


@pytest.mark.parametrize("kind", get_args(DrugKind))
def test_every_kind_of_drug_gives_a_brief(kind: str) -> None:
    script = {"product.route": "subcutaneous", "ph.target": "6", "drug.kind": kind}
    interview, asked = _played({**script, "drug.concentration_mg_ml": "50"})
    assert ("drug.concentration_mg_ml" in asked) == (kind != "none")
    assert ("drug.isoelectric_point" in asked) == (
        kind in ("antibody", "fusion_protein", "protein")
    )
    complete(brief_from_text(_text(interview)), library())


def test_required_answers_cannot_be_unknown() -> None:
    interview = Interview(questions(library()), library())
    interview.answer("")
    with pytest.raises(InputError, match="cannot do without"):
        interview.answer("unknown")
    current = interview.current()
    assert current is not None
    assert current.key == "product.route"


@pytest.mark.parametrize("word", ["", "unknown", "U", "don't know", "-"])
def test_words_for_unknown(word: str) -> None:
    interview = Interview(questions(library()), library())
    interview.answer(word)
    assert interview.answers == {"title": None}


def test_back_takes_the_last_answer_away() -> None:
    interview = Interview(questions(library()), library())
    assert not interview.back()
    interview.answer("x")
    interview.answer("nasal")
    assert interview.back()
    interview.answer("intravenous")
    assert interview.answers["product.route"] == "intravenous"


def test_answers_that_contradict_each_other_are_refused_at_once() -> None:
    interview = Interview(questions(library()), library())
    for text in ("", "nasal", "5.5", "liquid", "none"):
        interview.answer(text)
    with pytest.raises(InputError, match=r"target lies outside its window"):
        interview.answer("6 7")
    interview.answer("5 6")
    with pytest.raises(InputError, match=r"no temperature of a liquid|is above"):
        interview.answer("140")
    interview.answer("25")


def test_facts_come_after_what_they_hang_on() -> None:
    vocabulary = load_rulebook(library()).vocabulary
    asked = fact_questions([vocabulary["preservatives"]], vocabulary)
    assert [q.key for q in asked] == ["facts.multidose", "facts.preservatives"]
    assert not asked[1].applies({"facts.multidose": None})
    assert not asked[1].applies({"facts.multidose": False})
    assert asked[1].applies({"facts.multidose": True})


def test_every_fact_that_a_brief_holds_can_be_asked() -> None:
    vocabulary = load_rulebook(library()).vocabulary
    facts = [
        f
        for f in vocabulary.values()
        if f.held_in.startswith("facts.") or f.held_in == GROUPS
    ]
    samples = {"yes_no": "yes", "number": None, "choice": "1", "set": "1, 2"}
    for question, fact in zip(
        (fact_questions([f], vocabulary)[-1] for f in facts), facts, strict=True
    ):
        assert question.text.endswith("?")
        assert question.explain
        answer = samples[fact.kind] or f"{fact.low:g}"
        data: dict[str, object] = {}
        question.fill(data, question.read(answer))
        brief = {"product": {"route": "nasal"}, "ph": {"target": 6.0}, **data}
        brief_from_mapping(brief)


def test_every_question_is_explained_and_worded_as_one() -> None:
    for question in questions(library()):
        assert question.text.endswith("?")
        assert len(question.explain) > 30
    keys = [q.key for q in questions(library())]
    assert len(set(keys)) == len(keys)


# --- reading


@pytest.mark.parametrize(
    ("read", "text", "value"),
    [
        (readers.number, "6.5", 6.5),
        (readers.number_in("mg/mL"), " 10 mg/mL", 10.0),
        (readers.number_in("mL"), "0.5ml", 0.5),
        (readers.number_in("mL"), " .5 ", 0.5),
        (readers.number, "-40", -40.0),
        (readers.numbers, "5 -40; 25 C", [5.0, -40.0, 25.0]),
        (readers.numbers, "5, 25", [5.0, 25.0]),
        (readers.numbers, "5 5", [5.0]),
        (readers.pair, "5.7 6.3", (5.7, 6.3)),
        (readers.pair, "5.7 - 6.3", (5.7, 6.3)),
        (readers.pair, "5.7 to 6.3", (5.7, 6.3)),
        (readers.pair, "5.7-6.3", (5.7, 6.3)),
        (readers.numbers, "2-8", [2.0, 8.0]),
        (readers.numbers, "2 to 8 C", [2.0, 8.0]),
        (readers.numbers, "-20-25", [-20.0, 25.0]),
        (readers.numbers, "-40..-20", [-40.0, -20.0]),
        (readers.yes_no, "Y", True),
        (readers.yes_no, "no", False),
        (readers.one_of(("nasal", "otic")), "2", "otic"),
        (readers.one_of(("nasal", "otic")), "Nasal", "nasal"),
        (readers.one_of(("nasal", "otic")), "ear", "otic"),
        (readers.one_of(("nasal", "otic")), "na", "nasal"),
        (readers.some_of(("a", "b", "c")), "1, c", ["a", "c"]),
        (readers.some_of(("a", "b")), "none", ["none"]),
        (readers.some_of(("a", "b")), "No", ["none"]),
        (readers.names, "citrate, borate  tris", ["citrate", "borate", "tris"]),
        (readers.pka_steps, "acid 4.3", [{"pka": 4.3, "acid_charge": 0}]),
        (readers.pka_steps, "base: 9.1", [{"pka": 9.1, "acid_charge": 1}]),
        (
            readers.pka_steps,
            "base 9.6, acid 2.3 and acid 4.1",
            [
                {"pka": 2.3, "acid_charge": 1},
                {"pka": 4.1, "acid_charge": 0},
                {"pka": 9.6, "acid_charge": -1},
            ],
        ),
        (
            readers.excipients,
            "sucrose 8 %; L-methionine 10 mM",
            [
                {"material": "sucrose", "percent_w_v": 8.0},
                {"material": "L-methionine", "mmol_l": 10.0},
            ],
        ),
    ],
)
def test_answers_are_read(read, text: str, value: object) -> None:
    assert read(text) == value


@pytest.mark.parametrize(
    ("read", "text", "said"),
    [
        (readers.number, "6,5", "is no number"),
        (readers.number, "1 per week", "is no number"),
        (readers.number_in("mL"), "1 uL", "is not in mL"),
        (readers.number_in("mL"), "10 L", "is not in mL"),
        (readers.number_in("mL"), "3 4", "is no number"),
        (readers.number_in("mL"), "50 to 60", "is not in mL"),
        (readers.number, "much", "is no number"),
        (readers.number, "nan", "is no number"),
        (readers.number, "1e999", "is no number"),
        (readers.pair, "6", "no window"),
        (readers.pair, "7 6", "no window"),
        (readers.numbers, " ; ", "no number"),
        (readers.numbers, "room temperature", "or a range, as 2-8"),
        (readers.yes_no, "maybe", "neither yes nor no"),
        (readers.one_of(("nasal",)), "3", "its number, 1 to 1$"),
        (readers.one_of(("nasal",)), "nasl", "not in the list"),
        (readers.pka_steps, "4.3", "no pK"),
        (readers.pka_steps, " ", "no pK"),
        (readers.excipients, "sucrose", "no material with an amount"),
        (readers.excipients, "sucrose 8 cups", "no material with an amount"),
        (readers.excipients, "sucrose 8.8.8 %", "is no number"),
        (readers.excipients, ";", "no material"),
    ],
)
def test_answers_that_do_not_fit_are_told(read, text: str, said: str) -> None:
    with pytest.raises(InputError, match=said):
        read(text)


@given(st.text(max_size=60))
@settings(max_examples=300, deadline=None)
def test_no_answer_breaks_a_reader(text: str) -> None:
    for read in (
        readers.number,
        readers.numbers,
        readers.pair,
        readers.yes_no,
        readers.one_of(("nasal", "otic")),
        readers.some_of(("nasal", "otic")),
        readers.excipients,
        readers.pka_steps,
        readers.names,
        readers.plain,
    ):
        with contextlib.suppress(InputError):
            read(text)


# --- writing


@given(st.text(st.characters(exclude_categories=["Cs", "Cc"]), max_size=40))
def test_every_text_is_read_back(text: str) -> None:
    assert tomllib.loads(f"x = {toml_value(text)}") == {"x": text}


@given(
    st.one_of(
        st.booleans(),
        st.integers(-(2**53), 2**53),
        st.floats(allow_nan=False, allow_infinity=False),
        st.lists(st.text("ab_ \"\\'#", max_size=5), max_size=3),
    )
)
def test_every_value_is_read_back(value: object) -> None:
    assert tomllib.loads(f"x = {toml_value(value)}") == {"x": value}


def test_comments_stay_comments() -> None:
    text = _text(_played(NASAL)[0])
    for line in text.splitlines():
        assert re.fullmatch(r"#.*|\[.*\]|\w+ = .+|", line)
