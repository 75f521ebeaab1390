"""The language of conditions: reading, checking, three-valued truth, cases."""

from __future__ import annotations

import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from formbuf.errors import ConvergenceError, InputError
from formbuf.library import predicate_cases
from formbuf.library.predicate_cases import find_case, idle_parts
from formbuf.library.predicate_logic import compile_condition, judge
from formbuf.library.predicate_parser import parse_condition
from formbuf.library.predicates import (
    MAX_LENGTH,
    AllOf,
    Amount,
    AnyOf,
    Arithmetic,
    Compare,
    ConditionError,
    Constant,
    Flag,
    Holds,
    Magnitude,
    Not,
    Number,
    OneOf,
    facts_in,
    write_condition,
)
from formbuf.library.rule_check import reachability_fault
from formbuf.library.vocabulary import (
    MISSING,
    FactDefinition,
    format_unit,
    multiply_units,
    unit_powers,
)


def fact(name, kind, *, unit="", choices=(), low=0.0, high=0.0):
    return FactDefinition(
        name, kind, unit, tuple(choices), low, high, "product", "?", f"facts.{name}"
    )


VOCABULARY = {
    each.name: each
    for each in (
        fact("frozen", "yes_no"),
        fact("glass", "yes_no"),
        fact("light", "yes_no"),
        fact("route", "choice", choices=("intravenous", "nasal", "topical")),
        fact("preservatives", "set", choices=("parabens", "benzoate", "phenol")),
        fact("ph", "number", unit="pH", low=0, high=14),
        fact("isoelectric_point", "number", unit="pH", low=0, high=14),
        fact("calcium_mmol_l", "number", unit="mmol/L", high=1000),
        fact("borate_mmol_l", "number", unit="mmol/L", high=1000),
        fact("volume_ml", "number", unit="mL", low=0.01, high=5000),
        fact("ratio", "number", unit="1", low=-10, high=10),
    )
}


def read(text):
    return parse_condition(text, VOCABULARY)


def truth(text, **facts):
    return compile_condition(read(text))(facts)


#: Two amounts for the arithmetic below.
IONS = {"borate_mmol_l": 4.0, "calcium_mmol_l": 2.0}

# -- reading -----------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "facts", "expected"),
    [
        ("frozen", {"frozen": True}, True),
        ("not frozen", {"frozen": True}, False),
        ("frozen", {}, None),
        ("frozen", {"frozen": MISSING}, None),
        ("route = nasal", {"route": "nasal"}, True),
        ("route != nasal", {"route": "nasal"}, False),
        ("route in (nasal, topical)", {"route": "topical"}, True),
        ("route not in (nasal, topical)", {"route": "topical"}, False),
        ("preservatives has phenol", {"preservatives": frozenset()}, False),
        (
            "preservatives has any of (phenol, benzoate)",
            {"preservatives": frozenset({"benzoate"})},
            True,
        ),
        ("preservatives has phenol", {}, None),
        ("calcium_mmol_l > 0 and ph >= 5.5", {"calcium_mmol_l": 1.0, "ph": 5.5}, True),
        ("calcium_mmol_l > 0 and ph >= 5.5", {"calcium_mmol_l": 0.0}, False),
        ("calcium_mmol_l > 0 and ph >= 5.5", {"calcium_mmol_l": 1.0}, None),
        ("ph < 4 or ph > 9", {"ph": 9.0}, False),
        ("frozen or ph > 9", {"frozen": True}, True),
        ("abs(ph - isoelectric_point) < 1", {"ph": 6, "isoelectric_point": 6.9}, True),
        ("abs(ph - isoelectric_point) < 1", {"ph": 6.0}, None),
        ("borate_mmol_l >= 2 * calcium_mmol_l", IONS, True),
        ("borate_mmol_l - 3 > calcium_mmol_l", IONS, False),
        ("calcium_mmol_l * borate_mmol_l > 7.5", IONS, True),
        ("(calcium_mmol_l + borate_mmol_l) / 2 = 3", IONS, True),
        ("calcium_mmol_l / volume_ml > 1", {"calcium_mmol_l": 5, "volume_ml": 2}, True),
        ("ratio <= -5", {"ratio": -6.0}, True),
        ("not (frozen or glass)", {"frozen": False, "glass": False}, True),
        ("frozen and (glass or light)", {"frozen": True, "glass": True}, True),
        ("2.5e1 < calcium_mmol_l", {"calcium_mmol_l": 30.0}, True),
    ],
)
def test_truth(text, facts, expected):
    assert truth(text, **facts) is expected
    assert judge(read(text), facts).truth is expected


@pytest.mark.parametrize(
    ("text", "character", "what"),
    [
        ("", 1, "allowed a fact or a number"),
        (
            "calcum_mmol_l > 0",
            1,
            "unknown fact 'calcum_mmol_l', allowed calcium_mmol_l",
        ),
        ("route = intravenus", 9, "is no choice of route, allowed intravenous"),
        ("route in (nasal, nasal)", 18, "'nasal' stands twice"),
        ("route < nasal", 1, "route is a choice"),
        ("frozen = yes", 8, "frozen is a yes or no"),
        ("frozen in (yes, no)", 8, "frozen is a yes or no"),
        ("preservatives = phenol", 1, "preservatives is a set"),
        ("ph", 3, "the end after a number"),
        ("ph and frozen", 4, "'and' after a number"),
        ("ph + frozen > 3", 6, "frozen is a yes or no, allowed a number fact"),
        ("ph > calcium_mmol_l", 4, "pH > mmol/L: units differ"),
        ("ph + calcium_mmol_l > 3", 4, "pH + mmol/L: units differ"),
        ("calcium_mmol_l * ph > borate_mmol_l", 21, "units differ"),
        ("ph > 55", 6, "55 is out of range of ph, allowed 0 to 14 pH"),
        ("ph > -1", 6, "-1 is out of range"),
        ("3 > 2", 3, "two numbers compared"),
        ("4 < ph < 7", 8, "a second comparison"),
        ("frozen and glass or light", 18, "'and' and 'or' side by side"),
        ("(ph > 3", 8, "the end is out of place, allowed ')'"),
        ("ph > 3)", 7, "')' is out of place"),
        ("ph > ", 5, "the end is out of place"),
        ("frozen glass", 8, "'glass' is out of place"),
        ("calcium_mmol_l / borate_mmol_l > 2", 18, "divisor may be zero"),
        ("calcium_mmol_l / 0 > 2", 18, "divisor may be zero"),
        ("ph.real > 3", 3, "'.' is out of place"),
        ("__import__('os')", 12, '"\'" is out of place'),
        ("ph > 1e999", 6, "out of range"),
        ("and frozen", 1, "'and' is out of place"),
        ("abs frozen", 5, "allowed '('"),
        ("x := 3", 3, "':' is out of place"),
        ("not " * 30 + "frozen", 85, "deeper than 20"),
        ("(" * 30 + "frozen" + ")" * 30, 22, "deeper than 20"),
        ("frozen" + " " * MAX_LENGTH + "x", MAX_LENGTH + 1, "characters long"),
    ],
)
def test_faults_say_where_and_what_is_allowed(text, character, what):
    with pytest.raises(ConditionError) as caught:
        read(text)
    assert what in str(caught.value)
    assert caught.value.character == character
    assert isinstance(caught.value, InputError)


def test_verdict_names_values_and_missing():
    verdict = judge(read("frozen and ph > 3"), {"frozen": True})
    assert verdict.truth is None
    assert verdict.values == {"frozen": True}
    assert verdict.missing == ("ph",)
    fired = judge(read("frozen or ph > 3 or glass"), {"frozen": True, "ph": 2.0})
    assert fired.truth is True
    assert fired.values == {"frozen": True}
    assert fired.missing == ()
    silent = judge(read("frozen and ph > 3"), {"ph": 2.0})
    assert (silent.truth, silent.values) == (False, {"ph": 2.0})


def test_a_ratio_by_zero_is_unknown_and_says_so():
    condition = Compare(
        Arithmetic("/", Amount("ph"), Amount("ratio")), ">", Number(1.0)
    )
    verdict = judge(condition, {"ph": 7.0, "ratio": 0.0})
    assert verdict.truth is None
    assert verdict.missing == ("ph", "ratio")


def test_values_of_a_wrong_type_never_count_as_true():
    assert truth("frozen", frozen="yes") is False
    assert truth("preservatives has phenol", preservatives="phenol") is None
    assert truth("ph > 3", ph="7") is None


def test_units():
    assert unit_powers("mmol/L/pH") == (("L", -1), ("mmol", 1), ("pH", -1))
    assert unit_powers("1") == ()
    assert unit_powers("mmol^2/L^2") == (("L", -2), ("mmol", 2))
    product = multiply_units(unit_powers("mmol/L"), unit_powers("mL"))
    assert format_unit(product) == "mL·mmol/L"
    assert format_unit(unit_powers("1/day")) == "1/day"
    for broken in ("mmol//L", "", "mmol/L^x"):
        with pytest.raises(ValueError, match=r"unit|invalid"):
            unit_powers(broken)


# -- cases -------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("text", "fault"),
    [
        ("ph < 4 and ph > 9", "can never be true"),
        ("frozen and not frozen", "can never be true"),
        ("route = nasal and route = topical", "can never be true"),
        ("ph >= 4 or ph < 5", "is always true"),
        ("route in (intravenous, nasal, topical)", "is always true"),
        ("ph < 4 or ph < 5", "'ph < 4' has no say"),
        ("frozen and (frozen or glass)", "has no say"),
        ("ph < 4 or ph > 9", ""),
        ("calcium_mmol_l * borate_mmol_l > 300", ""),
        ("abs(ph - isoelectric_point) < 1 and frozen", ""),
        ("calcium_mmol_l > borate_mmol_l", ""),
        ("ph > 14", "can never be true"),
        ("calcium_mmol_l >= 0", "is always true"),
    ],
)
def test_conditions_that_are_of_no_use_are_found(text, fault):
    found = reachability_fault(read(text), VOCABULARY)
    assert (fault in found) if fault else found == ""


def test_a_case_has_the_truth_it_was_asked_for_and_nothing_idle():
    condition = read("frozen and (ph > 7 or route = nasal)")
    for wanted in (True, False):
        case = find_case(condition, VOCABULARY, truth=wanted)
        assert compile_condition(condition)(case) is wanted
    assert idle_parts(condition, VOCABULARY) == ()


def test_the_search_gives_up_rather_than_hang(monkeypatch):
    monkeypatch.setattr(predicate_cases, "MAX_STEPS", 2)
    condition = read("calcium_mmol_l * borate_mmol_l < 1 and ph > 7 and frozen")
    with pytest.raises(ConvergenceError, match="not settled after 2 cases"):
        find_case(Not(condition), VOCABULARY, truth=False)
    assert "not settled" in reachability_fault(condition, VOCABULARY)


# -- laws --------------------------------------------------------------------------

_LIMITS = st.sampled_from([0.0, 4.0, 7.0, 9.5])
_TESTS = st.one_of(
    st.builds(Flag, st.sampled_from(["frozen", "glass", "light"])),
    st.builds(
        OneOf, st.just("route"), st.sampled_from([("nasal",), ("nasal", "topical")])
    ),
    st.builds(
        Holds,
        st.just("preservatives"),
        st.sampled_from([("phenol",), ("phenol", "benzoate")]),
    ),
    st.builds(
        Compare,
        st.just(Amount("ph")),
        st.sampled_from(["<", "<=", ">", ">=", "=", "!="]),
        st.builds(Number, _LIMITS),
    ),
    st.just(
        Compare(
            Magnitude(Arithmetic("-", Amount("ph"), Amount("isoelectric_point"))),
            "<",
            Number(1.0),
        )
    ),
)
CONDITIONS = st.recursive(
    _TESTS,
    lambda inner: st.one_of(
        st.builds(Not, inner),
        st.builds(AllOf, st.lists(inner, min_size=2, max_size=3).map(tuple)),
        st.builds(AnyOf, st.lists(inner, min_size=2, max_size=3).map(tuple)),
    ),
    max_leaves=6,
)
_VALUES = {
    "frozen": st.booleans(),
    "glass": st.booleans(),
    "light": st.booleans(),
    "route": st.sampled_from(["intravenous", "nasal", "topical"]),
    "preservatives": st.frozensets(st.sampled_from(["parabens", "benzoate", "phenol"])),
    "ph": st.sampled_from([0.0, 3.5, 4.0, 7.0, 7.5, 9.5, 14.0]),
    "isoelectric_point": st.sampled_from([0.0, 4.5, 7.0, 9.0]),
}
PARTIAL = st.fixed_dictionaries(
    {}, optional={n: st.one_of(st.just(MISSING), v) for n, v in _VALUES.items()}
)
COMPLETE = st.fixed_dictionaries(_VALUES)


@given(CONDITIONS, CONDITIONS, PARTIAL)
def test_kleene_laws(a, b, facts):
    def value(node):
        return compile_condition(node)(facts)

    assert value(Not(Not(a))) is value(a)
    assert value(Not(AllOf((a, b)))) is value(AnyOf((Not(a), Not(b))))
    assert value(Not(AnyOf((a, b)))) is value(AllOf((Not(a), Not(b))))
    assert value(AllOf((a, b))) is value(AllOf((b, a)))
    assert value(AllOf((a, a))) is value(a)
    assert value(AllOf((a, AnyOf((a, b))))) is value(a)
    assert value(AnyOf((a, AllOf((a, b))))) is value(a)
    assert value(AllOf((a, Constant(True)))) is value(a)
    assert value(AnyOf((a, Constant(False)))) is value(a)
    assert value(AllOf((a, Constant(False)))) is False
    assert value(AnyOf((a, Constant(True)))) is True


@pytest.mark.parametrize(
    ("a", "b"), list(itertools.product([True, False, None], repeat=2))
)
def test_kleene_tables(a, b):
    facts = {n: v for n, v in (("frozen", a), ("glass", b)) if v is not None}
    low = False if False in (a, b) else None if None in (a, b) else True
    high = True if True in (a, b) else None if None in (a, b) else False
    assert truth("frozen and glass", **facts) is low
    assert truth("frozen or glass", **facts) is high


@given(CONDITIONS, PARTIAL, COMPLETE)
def test_more_facts_never_turn_a_known_verdict(condition, facts, rest):
    verdict = compile_condition(condition)
    before = verdict(facts)
    known = {name: value for name, value in facts.items() if value is not MISSING}
    after = verdict({**rest, **known})
    assert after is not None
    if before is not None:
        assert after is before


@given(CONDITIONS, PARTIAL)
def test_judge_and_compiled_agree_and_explain(condition, facts):
    verdict = judge(condition, facts)
    assert verdict.truth is compile_condition(condition)(facts)
    assert bool(verdict.missing) is (verdict.truth is None)
    assert set(verdict.missing) <= set(facts_in(condition))
    assert all(facts[name] == value for name, value in verdict.values.items())
    if verdict.truth is not None:
        assert judge(condition, verdict.values).truth is verdict.truth


@given(CONDITIONS, PARTIAL)
def test_written_conditions_read_back(condition, facts):
    back = read(write_condition(condition))
    assert compile_condition(back)(facts) is compile_condition(condition)(facts)
    assert set(facts_in(back)) == set(facts_in(condition))


@given(CONDITIONS)
def test_found_cases_hold(condition):
    for wanted in (True, False):
        case = find_case(condition, VOCABULARY, truth=wanted)
        if case is not None:
            assert compile_condition(condition)(case) is wanted


@given(st.text(max_size=60))
def test_any_text_is_read_or_refused_by_its_own_error(text):
    try:
        found = read(text)
    except ConditionError as error:
        found = error.character
    place = found if isinstance(found, int) else 1
    assert 1 <= place <= len(text) + 1
