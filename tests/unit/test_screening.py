"""Findings, overrides, topics, missing facts; and the facts they rest on."""

from __future__ import annotations

import datetime as dt
import time

import pytest
from hypothesis import given
from hypothesis import strategies as st
from rule_support import (
    brief_text,
    judged,
    library,
    quantities,
    rulebook,
    situation,
)

from formbuf.advice.missing_facts import missing_that_matter
from formbuf.advice.screening import (
    check_overrides,
    common_findings,
    concerned,
    counts,
    screen,
    worst_per_topic,
)
from formbuf.errors import InputError
from formbuf.product.facts import candidate_facts, product_facts
from formbuf.product.product_parts import OverrideInfo

ANTIBODY = 'kind = "antibody"\nconcentration_mg_ml = 50'
SUCROSE = '[[excipient]]\nmaterial = "sucrose"\npercent_w_v = 8'
DATE = dt.date(2026, 3, 31)


def override(rule, *, system=None, reason="seen in development", name="A. Chemist"):
    return OverrideInfo(rule, system, reason, name, DATE)


def findings_of(text, system, mmol_l=10.0, overrides=(), **known):
    where = situation(text)
    made = quantities(where, system, mmol_l, **known)
    facts = candidate_facts(where, product_facts(where), made)
    candidate = concerned(where.library, system, made.species, made.species_mmol_l)
    return screen(rulebook().rules, facts.values, candidate, overrides)


# -- findings ----------------------------------------------------------------------


def test_only_rules_that_concern_the_candidate_are_judged():
    found = judged(brief_text("subcutaneous", 6.0), "histidine_hydrochloride")
    assert "R100" in found
    assert "R098" not in found
    vial = '[container]\ntype = "glass_vial"'
    none = judged(brief_text("subcutaneous", 6.0, rest=vial), "none", 0.0)
    assert "R123" not in none
    assert "R080" in none
    mixed = judged(brief_text("subcutaneous", 6.0), "histidine_acetate")
    assert {"R100", "R042"} <= set(mixed)


def test_a_rule_met_only_through_an_excipient_ranks_nobody():
    rest = (
        '[[excipient]]\nmaterial = "l_arginine_hydrochloride"\nmmol_l = 100\n'
        '[[excipient]]\nmaterial = "glucose_anhydrous"\nmmol_l = 100\n'
    )
    text = brief_text("intravenous", 7.4, rest=rest)
    found = judged(text, "sodium_phosphate")["R047"]
    assert found.truth is True
    assert found.through_buffer is False
    assert found.scope == "product"
    assert not found.screens_out
    assert found.weighs_as is None
    through = judged(text, "tris_hydrochloride")["R047"]
    assert through.screens_out


def test_a_finding_reports_its_numbers():
    found = judged(brief_text("subcutaneous", 6.0), "sodium_citrate", 10.0)["R098"]
    assert found.outcome == "fired"
    assert found.values == {"route": "subcutaneous", "citrate_mmol_l": 10.0}
    assert "usach_2019" in found.source
    assert found.severity == "warn"


def test_unjudged_exclusions_count_only_where_the_trigger_is_likely():
    vaccine = brief_text("intramuscular", 6.5, drug='kind = "vaccine"')
    likely = judged(vaccine, "sodium_citrate")["R017"]
    assert likely.outcome == "not evaluable"
    assert likely.likely
    assert likely.weighs_as == "warn"
    assert not likely.screens_out
    unlikely = judged(brief_text("intravenous", 7.4), "sodium_phosphate")["R001"]
    assert unlikely.outcome == "not evaluable"
    assert unlikely.weighs_as is None


def test_findings_that_speak_for_a_buffer_cost_nothing():
    text = brief_text("intravenous", 6.0, product='form = "dried"')
    found = judged(text, "sodium_citrate")["R033"]
    assert found.truth is True
    assert found.weighs_as is None


def test_worst_per_topic_counts_once_and_not_what_a_criterion_carries():
    text = brief_text("subcutaneous", 7.0, drug=ANTIBODY, product='form = "frozen"')
    findings = findings_of(text, "sodium_phosphate", 50.0)
    worst = worst_per_topic(findings)
    assert worst["freezing"].severity == "warn"
    assert len(worst) == len({finding.topic for finding in worst.values()})
    fewer = worst_per_topic(findings, carried_elsewhere=["frozen_drift"])
    assert "freezing" not in fewer
    assert set(fewer) < set(worst)


def test_counts():
    vial = '[container]\ntype = "glass_vial"'
    text = brief_text("subcutaneous", 6.0, rest=vial)
    found = counts(findings_of(text, "sodium_citrate"))
    assert found["warn"] >= 2  # R077 and R098
    assert found["not evaluable"] > 0
    assert found["exclude"] == 0


def test_common_findings_are_product_rules_and_those_of_all():
    vial = '[container]\ntype = "glass_vial"'
    text = brief_text("subcutaneous", 6.0, drug=ANTIBODY, rest=vial)
    systems = ("histidine_hydrochloride", "sodium_citrate", "sodium_acetate")
    both = {system: findings_of(text, system) for system in systems}
    shared = common_findings(both)
    assert "R080" in shared  # product rule
    assert "R123" in shared  # every buffer
    assert "R098" not in shared  # citrate alone
    with_none = {**both, "none": findings_of(text, "none", 0.0)}
    assert common_findings(with_none) == shared
    assert common_findings({"sodium_citrate": both["sodium_citrate"]}) == {"R080"}


# -- overrides ---------------------------------------------------------------------


def test_an_override_is_listed_and_weighs_less():
    text = brief_text("subcutaneous", 5.0, product='form = "dried"')
    plain = {f.rule: f for f in findings_of(text, "sodium_acetate")}
    assert plain["R038"].screens_out
    given = [override("R038"), override("R042", system="sodium_citrate")]
    found = {f.rule: f for f in findings_of(text, "sodium_acetate", overrides=given)}
    assert not found["R038"].screens_out
    assert found["R038"].truth is True
    assert found["R038"].weighs_as == "warn"
    assert found["R038"].override == given[0]
    assert found["R042"].override is None


def test_overridden_warnings_and_notes_step_down():
    vial = '[container]\ntype = "glass_vial"'
    text = brief_text("subcutaneous", 6.0, rest=vial)
    given = [override("R098"), override("R084")]
    found = {f.rule: f for f in findings_of(text, "sodium_citrate", overrides=given)}
    assert found["R098"].weighs_as == "note"
    assert found["R084"].weighs_as is None


@pytest.mark.parametrize(
    ("given", "message"),
    [
        ([override("R999")], "override[1].rule: is no rule or screen, value 'R999'"),
        ([override("R098", reason="   ")], "override[1].reason: is empty"),
        ([override("R098", name=" ")], "override[1].name: is empty"),
        (
            [override("R098"), override("R098")],
            "override[2].rule: is overridden twice, value 'R098'",
        ),
        (
            [override("R098", system="soda")],
            "override[1].system: is no system, value 'soda'",
        ),
    ],
)
def test_overrides_without_rule_or_reason_are_refused(given, message):
    with pytest.raises(InputError) as caught:
        check_overrides(given, rulebook(), systems=library().systems)
    assert message in caught.value.message


def test_sound_overrides_pass():
    given = [override("R098"), override("R098", system="sodium_citrate")]
    check_overrides([*given, override("precedent")], rulebook(), screens=["precedent"])


# -- missing facts -----------------------------------------------------------------


def test_missing_facts_that_matter_come_with_their_question():
    text = brief_text("intramuscular", 6.5, drug='kind = "vaccine"', rest=SUCROSE)
    both = {
        system: findings_of(text, system)
        for system in ("sodium_citrate", "sodium_phosphate", "tris_hydrochloride")
    }
    asked = missing_that_matter(both, rulebook().vocabulary)
    assert 0 < len(asked) <= 5
    by_name = {each.fact.name: each for each in asked}
    adjuvant = by_name["adjuvant"]
    assert adjuvant.could_exclude
    assert "R017" in adjuvant.rules
    assert adjuvant.fact.question == "Which adjuvant is used?"
    assert adjuvant.fact.held_in == "facts.adjuvant"
    assert all(each.fact.held_in != "computed" for each in asked)


def test_facts_that_change_no_standing_are_not_asked():
    text = brief_text("subcutaneous", 6.0, drug=ANTIBODY, rest=SUCROSE)
    both = {s: findings_of(text, s) for s in ("sodium_citrate", "sodium_acetate")}
    asked = {m.fact.name for m in missing_that_matter(both, rulebook().vocabulary)}
    # a product rule and a note never change the order
    assert "single_junction_electrode" not in asked
    assert "ph_adjusted_after_tonicity" not in asked
    few = missing_that_matter(both, rulebook().vocabulary, contenders=[])
    assert few == []


def test_answering_the_missing_facts_settles_their_rules():
    def asked(*lines):
        facts = "[facts]\n" + "\n".join(lines)
        text = brief_text("subcutaneous", 6.0, drug=ANTIBODY, rest=facts)
        systems = ("sodium_citrate", "sodium_acetate", "sodium_phosphate")
        both = {system: findings_of(text, system) for system in systems}
        return missing_that_matter(both, rulebook().vocabulary, limit=50)

    answers = {"yes_no": "false", "number": "0", "set": '"none"'}
    before = asked()
    assert before
    for each in before:
        if each.fact.held_in.startswith("facts."):
            after = asked(f"{each.fact.name} = {answers[each.fact.kind]}")
            assert each.fact.name not in {other.fact.name for other in after}


# -- whole -------------------------------------------------------------------------

_KINDS = st.sampled_from(
    ["antibody", "protein", "peptide", "small_molecule", "vaccine", "none"]
)
_ROUTES = st.sampled_from(
    ["intravenous", "subcutaneous", "ophthalmic_topical", "nasal"]
)


@given(_KINDS, _ROUTES, st.floats(4.0, 9.0), st.booleans())
def test_learning_more_never_turns_a_verdict(kind, route, ph, light):
    target = round(ph, 2)
    text = brief_text(route, target, drug=f'kind = "{kind}"')
    more = brief_text(
        route,
        target,
        drug=f'kind = "{kind}"',
        rest=f"[facts]\nlight_exposed = {str(light).lower()}\nmultidose = false\n",
    )
    before = judged(text, "sodium_phosphate")
    after = judged(more, "sodium_phosphate")
    for rule, finding in before.items():
        if finding.truth is not None:
            assert after[rule].truth is finding.truth


@pytest.mark.bench
def test_screening_everything_takes_under_50_ms():
    where = situation(brief_text("subcutaneous", 6.0, drug=ANTIBODY, rest=SUCROSE))
    base = product_facts(where)
    made = {}
    for system in library().systems.values():
        mmol_l = 0.0 if system.id == "none" else 10.0
        made[system.id] = quantities(where, system.id, mmol_l)
    assert len(made) >= 36
    best = float("inf")
    for _ in range(7):
        start = time.perf_counter()
        judged_rules = 0
        for system, found in made.items():
            facts = candidate_facts(where, base, found)
            who = concerned(library(), system, found.species, found.species_mmol_l)
            judged_rules += len(screen(rulebook().rules, facts.values, who))
        best = min(best, time.perf_counter() - start)
    print(f"{len(made)} systems, {judged_rules} verdicts: {best * 1e3:.1f} ms")
    assert judged_rules > 1000
    assert best < 0.050
