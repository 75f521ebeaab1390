"""The tables of facts, rules and dose limits, and what is refused in them."""

from __future__ import annotations

import csv
import re
import shutil
from pathlib import Path
from typing import get_args

import pytest
from rule_support import library, rulebook

from formbuf.advice.screening import concerned, screen
from formbuf.errors import InputError, KnowledgeError
from formbuf.library.library import Library
from formbuf.library.loader import load_library, open_library
from formbuf.library.predicate_cases import find_case, idle_parts
from formbuf.library.predicate_logic import judge
from formbuf.library.predicates import facts_in
from formbuf.library.rule_check import rule_faults
from formbuf.library.rule_tables import TOPICS, TRIGGERS
from formbuf.library.rules import load_rulebook
from formbuf.library.store import Store, knowledge_root
from formbuf.product import vocabulary as words
from formbuf.product.fact_values import CANDIDATE_COMPUTED, PRODUCT_COMPUTED

BAD = Path(__file__).parent.parent / "data" / "bad_rules"
RULES = [pytest.param(rule, id=rule.id) for rule in rulebook().rules]

#: The numbers of the rules gathered from the literature; 127 was never given.
NUMBERS = [number for number in range(1, 133) if number != 127]


# -- what the tables hold ----------------------------------------------------------


def test_every_rule_of_the_literature_is_there():
    held = {int(rule.id[1:4]) for rule in rulebook().rules}
    assert held == set(NUMBERS)
    assert len(NUMBERS) == 131


def test_every_rule_can_fire_stay_silent_and_holds_no_idle_part():
    assert rule_faults(rulebook().rules, rulebook().vocabulary) == []


@pytest.mark.parametrize("rule", RULES)
def test_facts_fire_silence_and_leave_open_each_rule(rule):
    vocabulary = rulebook().vocabulary
    fires = find_case(rule.condition, vocabulary, truth=True)
    silent = find_case(rule.condition, vocabulary, truth=False)
    assert rule.judge(fires) is True
    assert rule.judge(silent) is False
    assert rule.judge({}) is None
    # a fact taken away may leave the verdict open but never turns it
    rests_on = judge(rule.condition, fires).values
    assert rule.judge(rests_on) is True
    for name in rests_on:
        fewer = {other: value for other, value in rests_on.items() if other != name}
        assert rule.judge(fewer) in (True, None)
    missing = judge(rule.condition, {}).missing
    assert missing
    assert set(missing) <= set(facts_in(rule.condition))


@pytest.mark.parametrize("rule", RULES)
def test_outcomes_of_each_rule_for_whom_it_concerns(rule):
    vocabulary = rulebook().vocabulary
    fires = find_case(rule.condition, vocabulary, truth=True)
    silent = find_case(rule.condition, vocabulary, truth=False)
    whom = rule.concerns[0]
    species = [whom] if whom in library().species else ["phosphate"]
    for name, record in library().species.items():
        if record.family.replace(" ", "_") == whom:
            species = [name]
    system = whom if whom in library().systems else "own formula"
    candidate = concerned(library(), system, species)
    outcomes = []
    for facts in (fires, silent, {}):
        (finding,) = screen([rule], facts, candidate)
        outcomes.append(finding.outcome)
        assert finding.text.startswith(rule.title)
        assert finding.source or finding.basis in ("memory", "practice", "judgement")
    assert outcomes == ["fired", "not fired", "not evaluable"]
    if whom not in ("any", "any_buffer"):
        nobody = concerned(library(), "own formula", ["phthalate"])
        assert screen([rule], fires, nobody) == []


@pytest.mark.parametrize("rule", RULES)
def test_each_rule_says_why_and_what_to_do(rule):
    assert rule.effect
    assert rule.sources or rule.source_note
    assert all(source in library().sources for source in rule.sources)
    assert rule.topic in TOPICS
    assert set(rule.kinds) <= set(TRIGGERS)
    if rule.severity == "exclude" and not rule.id.endswith("b"):
        assert rule.mitigation
    if len(rule.id) > 4:
        assert rule.mended


def test_numbers_in_a_condition_have_a_stated_basis():
    for rule in rulebook().rules:
        plain = re.sub(r"[a-z_]+[a-z0-9_]*", "", rule.text)
        thresholds = [n for n in re.findall(r"\d+(?:\.\d+)?", plain) if float(n) > 0]
        if thresholds:
            assert rule.threshold_basis != "qualitative", rule.id


def test_a_test_of_a_condition_can_fail():
    # the guard above would notice a rule whose second half has no say
    rule = next(rule for rule in rulebook().rules if rule.id == "R001")
    assert idle_parts(rule.condition, rulebook().vocabulary) == ()


def test_facts_agree_with_the_words_of_a_brief():
    vocabulary = rulebook().vocabulary
    assert set(vocabulary["route"].choices) == set(words.ROUTES)
    assert set(vocabulary["drug_kind"].choices) == set(get_args(words.DrugKind))
    assert set(vocabulary["container_type"].choices) == set(
        get_args(words.ContainerType)
    )
    assert set(vocabulary["product_state"].choices) == set(get_args(words.Form))
    assert set(vocabulary["filing"].choices) == set(get_args(words.Filing))
    assert set(library().diluents) < set(vocabulary["diluents"].choices)


def test_computed_facts_are_computed():
    for name, derivation in rulebook().derivations.items():
        fact = rulebook().vocabulary[name]
        registry = PRODUCT_COMPUTED if fact.scope == "product" else CANDIDATE_COMPUTED
        by_contents = fact.scope == "candidate" and bool(derivation.contains)
        assert (name in registry) is (derivation.computed and not by_contents), name
    named = {*PRODUCT_COMPUTED, *CANDIDATE_COMPUTED}
    assert named <= set(rulebook().vocabulary)


def test_every_fact_can_be_asked():
    for fact in rulebook().vocabulary.values():
        assert fact.question.endswith("?")
        table, _, key = fact.held_in.partition(".")
        assert table in ("facts", "product", "drug", "container", "dose", "ph") or (
            fact.held_in == "computed"
        )
        assert table != "facts" or key == fact.name
        if fact.unit:
            assert fact.low < fact.high


def test_derived_facts_follow_what_they_need():
    order = {name: place for place, name in enumerate(rulebook().order)}
    assert set(order) == set(rulebook().vocabulary)
    assert order["drug_kind"] < order["drug_is_protein"] < order["protein_mg_ml"]
    assert order["container_type"] < order["glass_container"]


def test_dose_limits_cover_every_route_and_the_named_substances():
    book = rulebook()
    for route in words.ROUTES:
        for volume_ml in (0.5, 10.0, 500.0):
            facts = {
                "route": route,
                "dose_volume_ml": volume_ml,
                "renal_impairment": False,
            }
            for substance in ("sodium", "potassium", "phosphate", "titratable_acidity"):
                limit = book.burden_limit(substance, "dose", facts)
                assert limit is not None, (route, volume_ml, substance)
                assert limit.value > 0.0
    nobody = {"route": "oral_liquid", "age_years": 1.0}
    assert [x.value for x in book.limits("boron", nobody)] == [1.0]
    assert [x.value for x in book.limits("boron", {"age_years": 30.0})] == [10.0]
    assert book.limits("boron", {}) == ()


def test_the_stricter_burden_limit_stands_for_renal_failure():
    facts = {"route": "subcutaneous", "dose_volume_ml": 1.0, "renal_impairment": True}
    limit = rulebook().burden_limit("phosphate", "dose", facts)
    assert limit is not None
    assert limit.value == 5.0


def test_limits_repeat_the_thresholds_of_their_rules():
    by_id = {rule.id: rule for rule in rulebook().rules}
    limits = {limit.id: limit.value for limit in rulebook().dose_limits}
    for name, rule in (
        ("boron_day_under_2", "R023"),
        ("boron_day_under_12", "R023"),
        ("boron_day_under_18", "R023"),
        ("citrate_rate", "R106"),
        ("phosphate_renal_day", "R109"),
        ("maleate_day", "R121"),
        ("tris_kg_dose", "R122"),
        ("potassium_label_dose", "R104"),
        ("sodium_label_dose", "R105"),
    ):
        assert re.search(rf"\b{limits[name]:g}\b", by_id[rule].text), name


# -- what is refused ---------------------------------------------------------------

FAULTS = {
    "rules-unknown_fact": "2:condition: unknown fact 'calcum_mmol_l', allowed calcium",
    "rules-unknown_choice": "2:condition: 'intravenus' is no choice of route, allowed",
    "rules-units_differ": "2:condition: mmol/L > mL: units differ",
    "rules-threshold_out_of_range": "2:condition: 55 is out of range of ph, allowed 0",
    "rules-never_true": "2:condition: can never be true",
    "rules-always_true": "2:condition: is always true",
    "rules-idle_part": "2:condition: 'ph < 4' has no say",
    "rules-unbracketed": "2:condition: 'and' and 'or' side by side, allowed only with",
    "rules-chained": "2:condition: a second comparison, allowed one per test",
    "rules-python_call": '2:condition: "\'" is out of place, allowed names, numbers',
    "rules-attribute": "2:condition: '.' is out of place",
    "rules-open_bracket": "2:condition: the end is out of place, allowed ')'",
    "rules-yes_no_compared": "2:condition: freezes is a yes or no, allowed 'freezes'",
    "rules-set_as_flag": "2:condition: preservatives is a set, allowed 'preservatives",
    "rules-number_as_flag": "2:condition: 'and' after a number, allowed < <=",
    "rules-divisor_zero": "2:condition: divisor may be zero, allowed a number or",
    "rules-two_numbers": "2:condition: two numbers compared, allowed a fact",
    "rules-name_twice": "2:condition: 'nasal' stands twice, allowed once",
    "rules-no_condition": "2:condition: empty, allowed a value",
    "rules-product_by_candidate": "2:condition: ph differ by candidate, allowed facts",
    "rules-product_of_one_buffer": "2:concerns: a product rule says the same of all",
    "rules-unknown_species": "2:concerns: unknown name 'phosfate', allowed phosphate",
    "rules-unknown_topic": "2:topic: 'solubility' is unknown, allowed adducts",
    "rules-unknown_severity": "2:severity: 'forbid' is unknown, allowed exclude, warn",
    "rules-unknown_source": "2:sources: unknown id 'nobody_1900', allowed ids of",
    "rules-published_without_source": "2:sources: empty for a published rule",
    "rules-bad_id": "2:rule: '9R' is no rule id, allowed such as R001",
    "rules-twice": "3:rule: duplicate of line 2",
    "rules-likely_unknown": "2:likely: 'vaccin' is no choice of drug_kind, allowed vac",
    "rules-unknown_trigger": "2:kind: unknown name 'weather', allowed",
    "rules-short_row": "2:row: 2 cells, allowed 20 as in the header",
    "rules-unknown_column": "1:colour: unknown column, allowed rule, title",
    "facts-no_range": "2:low: range is missing or empty, allowed low below high",
    "facts-range_in_words": "2:low: 'two' is not a number, allowed",
    "facts-no_choices": "2:choices: allowed for a choice or a set, and only there",
    "facts-wrong_silence": "2:silence: 'zero' for a yes_no fact, allowed unknown, no",
    "facts-circle": "2:inferred_from: derived in a circle with trial_fact",
    "facts-unknown_inference": "2:inferred_from: 'guess when freezes' is unknown, all",
    "facts-computed_from_nothing": "2:inferred_from: 'computed from weather' names no",
    "facts-otherwise_alone": "2:otherwise: given without only_if, allowed with it only",
    "facts-otherwise_wrong": "2:otherwise: 'maybe' is no value of a yes_no fact",
    "facts-no_unit": "2:unit: 'mmol//L' is no unit, allowed such as mmol/L",
    "facts-product_from_candidate": "2:only_if: ph differ by candidate, allowed facts",
    "dose_limits-unknown_substance": "2:substance: unknown name 'sodum', allowed sodiu",
    "dose_limits-negative": "2:value: -1 is out of range, allowed 0 to 1e+06",
    "dose_limits-by_candidate": "2:applies_if: ph differ by candidate, allowed facts",
    "dose_limits-no_reason": "2:source_note: empty beside empty sources, allowed a r",
}
#: Found by the slower check of our own tables, not while they are read.
SLOW = {"rules-never_true", "rules-always_true", "rules-idle_part"}


def broken_library(name: str, folder: Path, *, ours: bool) -> Library:
    """A library with one broken table, as ours or laid over ours."""
    table = name.partition("-")[0] + ".csv"
    if not ours:
        shutil.copy(BAD / f"{name}.csv", folder / table)
        return load_library(folder)
    shutil.copytree(Path(str(knowledge_root())), folder / "knowledge")
    shutil.copy(BAD / f"{name}.csv", folder / "knowledge" / table)
    return open_library(Store(folder / "knowledge"))


def test_every_broken_table_is_expected():
    assert {path.stem for path in BAD.glob("*.csv")} == set(FAULTS)
    assert len(FAULTS) >= 25


@pytest.mark.parametrize("name", sorted(FAULTS))
def test_a_broken_overlay_is_the_users_and_said_by_line(name, tmp_path):
    with pytest.raises(InputError) as caught:
        load_rulebook(broken_library(name, tmp_path, ours=False))
    table = name.partition("-")[0] + ".csv"
    assert f"{table}:{FAULTS[name]}" in caught.value.message
    assert str(tmp_path) in caught.value.message
    assert caught.value.exit_code == 3


@pytest.mark.parametrize("name", sorted(set(FAULTS) - SLOW))
def test_a_broken_table_of_ours_is_ours(name, tmp_path):
    with pytest.raises(KnowledgeError) as caught:
        load_rulebook(broken_library(name, tmp_path, ours=True))
    table = name.partition("-")[0] + ".csv"
    assert any(
        line.startswith(f"{table}:{FAULTS[name]}") for line in caught.value.faults
    )
    assert caught.value.exit_code == 4


@pytest.mark.parametrize("name", sorted(SLOW))
def test_useless_rules_of_ours_are_found_by_the_check(name, tmp_path):
    book = load_rulebook(broken_library(name, tmp_path, ours=True))
    (line,) = rule_faults(book.rules, book.vocabulary)
    assert FAULTS[name].partition("condition: ")[2] in line


def test_an_overlay_rule_wins_and_is_marked(tmp_path):
    names = ("rule", "title", "concerns", "topic", "kind", "scope", "severity",
             "condition", "likely", "favours", "effect", "basis", "threshold_basis",
             "source_note")  # fmt: skip
    rows = [
        ("R098", "citrate, house limit", "citrate", "pain", "route", "candidate",
         "exclude", "route = subcutaneous and citrate_mmol_l > 5", "no", "no", "Pain",
         "judgement", "compiler", "house experience"),
        ("HOUSE_1", "house rule", "any_buffer", "process", "process", "candidate",
         "note", "autoclaved", "no", "no", "Slow", "judgement", "qualitative", "plant"),
    ]  # fmt: skip
    with (tmp_path / "rules.csv").open("w", newline="", encoding="utf-8") as file:
        csv.writer(file).writerows([names, *rows])
    book = load_rulebook(load_library(tmp_path))
    by_id = {rule.id: rule for rule in book.rules}
    assert len(book.rules) == len(rulebook().rules) + 1
    assert by_id["R098"].overlay
    assert by_id["R098"].severity == "exclude"
    assert by_id["HOUSE_1"].overlay
    assert not by_id["R099"].overlay
