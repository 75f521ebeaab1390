"""Completing a brief: defaults by route, form and kind, and what is said of them."""

from __future__ import annotations

import json
import tomllib
import typing
from pathlib import Path
from typing import Any

import pytest
from brief_support import (
    DRIED,
    HEAD,
    WITHOUT_SUCROSE,
    assumed_values,
    completed_text,
    quick_brief,
)

from formbuf.library import Library, load_library
from formbuf.library.records import BASES, SOURCELESS
from formbuf.product import vocabulary
from formbuf.product.brief import (
    brief_from_mapping,
    complete,
    read_brief,
)
from formbuf.product.brief_cases import read_cases
from formbuf.product.brief_filler import Filler

ROOT = Path(__file__).resolve().parents[2]
EXAMPLES = sorted((ROOT / "examples").glob("*.toml"))


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


# ---------------------------------------------------------------- defaults


def test_every_default_states_reason_basis_and_source(library: Library) -> None:
    cases = [case for rows in read_cases(library).values() for case in rows]
    assert len(cases) > 40
    for case in cases:
        assert len(case.reason) > 10, case.key
        assert case.basis in BASES, case.key
        assert case.source or case.basis in SOURCELESS, case.key
        assert case.unit or not isinstance(case.value, float), case.key


def test_words_in_conditions_exist(library: Library) -> None:
    allowed = {
        "route": set(vocabulary.ROUTES),
        "route_group": set(vocabulary.ROUTE_GROUPS.values()),
        "form": set(typing.get_args(vocabulary.Form)),
        "kind": set(vocabulary.KIND_GROUPS),
        "population": set(vocabulary.AGE_BANDS),
    }
    for rows in read_cases(library).values():
        for case in rows:
            for condition, words in case.conditions.items():
                assert set(words) <= allowed[condition], case.key


def test_every_default_is_used_by_some_brief(library: Library) -> None:
    used: set[int] = set()
    find = Filler.find

    def watched(self: Filler, *arguments: Any) -> Any:
        case = find(self, *arguments)
        used.add(id(case))
        return case

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(Filler, "find", watched)
        for route in vocabulary.ROUTES:
            for form in typing.get_args(vocabulary.Form):
                for kind in vocabulary.KIND_GROUPS:
                    quick_brief(library, route=route, form=form, drug_kind=kind)
        for volume_ml in (1.0, 1000.0):
            quick_brief(library, route="intravenous", volume_ml=volume_ml)
        for population in vocabulary.AGE_BANDS:
            product = {"route": "nasal", "population": population}
            patient = {"product": product, "ph": {"target": 6}}
            complete(brief_from_mapping(patient), library)
        completed_text('exclude = ["sodium"]\n' + HEAD, library)
        completed_text(WITHOUT_SUCROSE, library)
        completed_text('exclude = ["mannitol"]\n' + DRIED, library)
        completed_text(HEAD + '[drug]\ncounter_ion = "chloride"\n', library)
        completed_text(
            HEAD + '[[species]]\nid = "a"\nsource = "report"\n'
            "step = [{pka = 6, acid_charge = 1}]\n",
            library,
        )
    cases = [case for rows in read_cases(library).values() for case in rows]
    unused = [f"{case.key} = {case.value}" for case in cases if id(case) not in used]
    assert unused == []


@pytest.mark.parametrize("route", vocabulary.ROUTES)
def test_completion_of_every_route_form_and_kind(route: str, library: Library) -> None:
    for form in typing.get_args(vocabulary.Form):
        for kind in vocabulary.KIND_GROUPS:
            completed = quick_brief(library, route=route, form=form, drug_kind=kind)
            brief = completed.brief
            low, high = brief.ph.low, brief.ph.high
            tolerance = brief.ph.release_tolerance
            assert low < brief.ph.target - tolerance
            assert high > brief.ph.target + tolerance
            assert brief.dose.volume_ml > 0
            assert brief.container.fill_volume_ml > 0
            assert brief.temperatures_c("liquid")
            states = {row.state_at() for row in brief.storage if row.kind == "storage"}
            assert form in states
            assert brief.container.count_alkali == brief.container.is_glass
            if brief.tonicity.fill:
                assert brief.tonicity.agent in library.materials
                assert brief.tonicity.target_mosm_kg == 290.0
            precedents = {key[1] for key in library.precedents}
            assert brief.product.precedent_route in precedents
            own = route in precedents
            assert (brief.product.precedent_route == route) == own
            text = json.dumps(completed.to_dict(), allow_nan=False)
            assert json.loads(text)["brief"]["product"]["route"] == route


def test_every_assumption_has_reason_and_basis(library: Library) -> None:
    for row in quick_brief(library, route="ophthalmic_topical").assumptions:
        assert len(row.reason) > 10
        assert row.basis in BASES
        assert row.source == "" or row.source in library.sources


def test_plain_defaults_of_an_injected_antibody(library: Library) -> None:
    completed = quick_brief(library, route="subcutaneous", drug_kind="antibody")
    brief = completed.brief
    assert (brief.ph.low, brief.ph.high) == (5.7, 6.3)
    assert brief.ph.release_tolerance == 0.1
    assert brief.ph.measure_temperature_c == brief.ph.prepare_temperature_c == 25.0
    assert brief.liquid_storage_temperatures_c == (5.0,)
    assert brief.temperatures_c(kind="body") == (37.0,)
    assert brief.dose.volume_ml == 1.5  # Usach et al. 2019, from the route table
    assert brief.dose.per_day == 1.0
    assert (brief.loads.acid_mmol_l, brief.loads.base_mmol_l) == (0.2, 0.2)
    assert brief.loads.all_default
    assert brief.container.type == "glass_vial"
    assert brief.container.fill_volume_ml == 1.5
    assert brief.container.count_alkali
    assert brief.carbon_dioxide.exposure == "closed"
    assert brief.tonicity.agent == "sucrose"
    assert (brief.tonicity.low_mosm_kg, brief.tonicity.high_mosm_kg) == (240.0, 600.0)
    assert brief.is_parenteral
    assert brief.drug.kind_group == "antibody_or_fusion"
    sources = {row.key: row.source for row in completed.assumptions}
    assert sources["dose.volume_ml"] == "usach_2019"


@pytest.mark.parametrize(
    ("options", "agent", "container", "stored_c"),
    [
        ({"route": "intravenous"}, "sodium_chloride", "glass_vial", 25.0),
        ({"route": "ophthalmic_topical"}, "sodium_chloride", "plastic_dropper", 25.0),
        ({"route": "nasal"}, "sodium_chloride", "plastic_bottle", 25.0),
        ({"route": "inhalation"}, "sodium_chloride", "plastic_ampoule", 25.0),
        (
            {"route": "intravenous", "volume_ml": 1000.0},
            "sodium_chloride",
            "plastic_bag",
            25.0,
        ),
        (
            {"route": "intravenous", "form": "dried"},
            "mannitol",
            "glass_vial",
            25.0,
        ),
        (
            {"route": "intravenous", "form": "dried", "drug_kind": "protein"},
            "sucrose",
            "glass_vial",
            5.0,
        ),
        (
            {"route": "subcutaneous", "drug_kind": "peptide"},
            "mannitol",
            "glass_vial",
            5.0,
        ),
        (
            {"route": "intramuscular", "form": "frozen", "drug_kind": "vector"},
            "sucrose",
            "glass_vial",
            -70.0,
        ),
        (
            {"route": "intramuscular", "form": "frozen", "drug_kind": "vaccine"},
            "sucrose",
            "glass_vial",
            -20.0,
        ),
    ],
)
def test_defaults_by_route_form_and_kind(
    options: dict[str, Any],
    agent: str,
    container: str,
    stored_c: float,
    library: Library,
) -> None:
    brief = quick_brief(library, **({"drug_kind": "small_molecule"} | options)).brief
    assert brief.tonicity.agent == agent
    assert brief.container.type == container
    assert brief.temperatures_c(kind="storage") == (stored_c,)


def test_routes_without_osmolality_limits_get_no_target(library: Library) -> None:
    brief = quick_brief(library, route="oral_liquid").brief
    assert brief.tonicity.target_mosm_kg is None
    assert brief.tonicity.agent is None
    assert not brief.tonicity.fill
    asked = quick_brief(library, route="oral_liquid", tonicity_agent="glycerol").brief
    assert asked.tonicity.target_mosm_kg == 290.0
    assert asked.tonicity.fill


def test_default_agent_respects_exclusions(library: Library) -> None:
    text = 'exclude = ["sodium"]\n' + HEAD
    assert completed_text(text, library).brief.tonicity.agent == "mannitol"


def test_target_moves_into_stated_limits(library: Library) -> None:
    completed = completed_text(HEAD + "[tonicity]\nlow_mosm_kg = 320\n", library)
    assert completed.brief.tonicity.target_mosm_kg == 320.0
    assert assumed_values(completed)["tonicity.target_mosm_kg"] == 320.0


def test_narrow_window_narrows_the_release_tolerance(library: Library) -> None:
    completed = completed_text(HEAD + "low = 5.9\nhigh = 6.3\n", library)
    assert completed.brief.ph.release_tolerance == pytest.approx(0.05)
    assert assumed_values(completed)["ph.release_tolerance"] == pytest.approx(0.05)


def test_nothing_stated_is_assumed(library: Library) -> None:
    for path in EXAMPLES:
        stated = tomllib.loads(path.read_text(encoding="utf-8"))
        for key in assumed_values(complete(read_brief(path), library)):
            table, _, name = key.partition(".")
            inside = stated.get(table, {})
            assert not (isinstance(inside, dict) and name in inside), (path.name, key)


def test_stated_values_survive(library: Library) -> None:
    for path in EXAMPLES:
        stated = read_brief(path).to_dict()
        echoed = complete(read_brief(path), library).brief.to_dict()
        for table in ("product", "ph", "dose", "loads", "container", "tonicity"):
            for key, value in stated.get(table, {}).items():
                assert echoed[table][key] == value, (path.name, table, key)


def test_population_follows_from_age(library: Library) -> None:
    completed = completed_text(HEAD + "[dose]\nage_years = 1\n", library)
    assert completed.brief.product.population == "infant"
    assert completed.brief.dose.body_mass_kg == 7.0
    assert assumed_values(completed)["product.population"] == "infant"


def test_counted_alkali_means_glass(library: Library) -> None:
    text = (
        '[product]\nroute = "nasal"\n[ph]\ntarget = 6\n[container]\ncount_alkali = true'
    )
    completed = completed_text(text, library)
    assert completed.brief.container.is_glass
    assert "container.type" in assumed_values(completed)


def test_wall_of_an_assumed_plastic_is_not_known(library: Library) -> None:
    assert quick_brief(library, route="nasal").brief.container.gas_permeable is None
    text = '[product]\nroute = "nasal"\n[ph]\ntarget = 6\n[container]\ntype = "plastic_bag"'
    assert completed_text(text, library).brief.container.gas_permeable is True
    assert (
        quick_brief(library, route="subcutaneous").brief.container.gas_permeable
        is False
    )


@pytest.mark.parametrize(
    ("route", "volume_ml", "large"),
    [
        ("intravenous", 100.0, True),
        ("intravenous", 99.0, False),
        ("irrigation", 500.0, False),
    ],
)
def test_large_volume(
    route: str, volume_ml: float, large: bool, library: Library
) -> None:
    brief = quick_brief(library, route=route, volume_ml=volume_ml).brief
    assert brief.is_large_volume_intravenous == large


def test_daily_volume_and_kind_groups(library: Library) -> None:
    eye = quick_brief(library, route="ophthalmic_topical", drug_kind="vaccine").brief
    assert eye.dose.volume_ml_day == pytest.approx(4 * 0.05)
    assert eye.drug.is_biologic
    assert not eye.drug.is_protein
    assert eye.drug.kind_group == "vaccine_or_vector"
    assert eye.route_group == "ophthalmic_topical"
    rare = completed_text(
        HEAD + "[dose]\nvolume_ml = 1\nper_day = 0.07\n", library
    ).brief
    assert rare.dose.volume_ml_day == 1.0


# ---------------------------------------------------------------- frozen and dried


@pytest.mark.parametrize(
    ("options", "tail", "percent", "assumed"),
    [
        ({"form": "frozen", "drug_kind": "antibody"}, "", 5.0, True),
        ({"form": "dried", "drug_kind": "protein"}, "", 5.0, True),
        ({"form": "liquid", "drug_kind": "antibody", "store": [5, -40]}, "", 5.0, True),
        ({"form": "liquid", "drug_kind": "antibody", "store": [5]}, "", 0.0, False),
        ({"form": "frozen", "drug_kind": "small_molecule"}, "", 0.0, False),
        (
            {"form": "frozen", "drug_kind": "antibody", "tonicity_agent": "mannitol"},
            "",
            0.0,
            False,
        ),
    ],
)
def test_assumed_sugar(
    options: dict[str, Any], tail: str, percent: float, assumed: bool, library: Library
) -> None:
    tonicity = quick_brief(library, route="subcutaneous", **options).brief.tonicity
    assert tonicity.amorphous_sugar_percent_w_v == percent
    assert tonicity.amorphous_sugar_is_assumed == assumed


def test_stated_sugar_counts_as_it_is(library: Library) -> None:
    text = (
        '[product]\nroute = "subcutaneous"\nform = "frozen"\n[ph]\ntarget = 6\n'
        '[drug]\nkind = "antibody"\n'
        '[[excipient]]\nmaterial = "sucrose"\nmg_ml = 30\n'
        '[[excipient]]\nmaterial = "mannitol"\nmg_ml = 30\n'
    )
    tonicity = completed_text(text, library).brief.tonicity
    assert tonicity.amorphous_sugar_percent_w_v == pytest.approx(3.0)
    assert not tonicity.amorphous_sugar_is_assumed


def test_open_states_follow_the_first_ice(library: Library) -> None:
    brief = quick_brief(library, route="subcutaneous", store=[5, -1, -40]).brief
    assert [row.state for row in brief.storage[:3]] == [None, None, None]
    assert brief.liquid_storage_temperatures_c == (5.0,)
    assert brief.frozen_storage_temperatures_c == (-40.0, -1.0)
    assert brief.temperatures_c("liquid", "storage", first_ice_c=-2.0) == (-1.0, 5.0)
    decided = brief.with_first_ice(-2.0)
    assert [row.state for row in decided.storage[:3]] == ["liquid", "liquid", "frozen"]
    assert decided.liquid_storage_temperatures_c == (-1.0, 5.0)
    assert brief.is_frozen
    assert not brief.is_dried


def test_dried_product(library: Library) -> None:
    completed = quick_brief(library, route="intravenous", form="dried", store=[5, -20])
    brief = completed.brief
    assert brief.dried_storage_temperatures_c == (-20.0, 5.0)
    assert brief.liquid_storage_temperatures_c == ()
    assert brief.temperatures_c("liquid", "use") == (25.0,)
    assert brief.is_dried
    assert not brief.is_frozen
    assert assumed_values(completed)["storage.state"] == "dried"


def test_frozen_product_with_liquid_storage_only(library: Library) -> None:
    brief = quick_brief(library, route="intravenous", form="frozen", store=[5]).brief
    assert brief.frozen_storage_temperatures_c == (-20.0,)
    assert brief.liquid_storage_temperatures_c == (5.0,)
