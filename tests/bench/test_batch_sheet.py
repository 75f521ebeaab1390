"""The batch sheet: amounts, grades, readings, mistakes, and sums that must agree."""

from __future__ import annotations

import numpy as np
import pytest
from bench_support import briefed, library, quick
from hypothesis import given, settings
from hypothesis import strategies as st

from formbuf.bench.batch_records import BatchSheet, WaySheet
from formbuf.bench.batch_sheet import batch_sheet
from formbuf.bench.grades import InHand, grade_of, known_grades, same_but_water
from formbuf.bench.predict import predict
from formbuf.errors import InputError, UnknownNameError
from formbuf.product.composition import mixture

#: Systems with a pH within their reach.
SYSTEMS = {
    "sodium_phosphate": 7.2,
    "potassium_phosphate": 7.2,
    "sodium_citrate": 5.5,
    "sodium_acetate": 4.8,
    "sodium_succinate": 5.2,
    "sodium_borate": 8.3,
    "histidine_hydrochloride": 6.0,
    "histidine_acetate": 5.5,
    "tris_hydrochloride": 7.8,
    "tris_acetate": 7.8,
    "citrate_phosphate": 5.0,
    "glycine": 3.0,
    "sodium_bicarbonate": 7.8,
    "meglumine_hydrochloride": 9.2,
    "histidine + acetate": 5.5,
    "none": 6.0,
}


def _sheet(
    system: str, ph: float, strength: float = 25.0, **options: object
) -> BatchSheet:
    return batch_sheet(quick(system, strength, ph, **options), volume_l=4.0)


def _weighed(way: WaySheet) -> dict[str, float]:
    """Materials of a way as moles per litre of the batch, from what is weighed."""
    found: dict[str, float] = {}
    for line in way.lines:
        mass = library().find_material(line.material).molar_mass_g_mol.value
        found[line.material] = 1000.0 * line.pure_g / mass / way.sums.batch_l
    return found


@pytest.mark.parametrize("system", SYSTEMS)
def test_a_sheet_fed_to_the_prediction_gives_the_ph(system: str) -> None:
    sheet = _sheet(system, SYSTEMS[system])
    for way in sheet.ways:
        result = predict(library(), _weighed(way), (25.0,))

        assert result.states[0].ph == pytest.approx(SYSTEMS[system], abs=2e-6)
        assert result.states[0].osmolality_mosm_kg == pytest.approx(
            way.osmolality_mosm_kg, abs=1e-3
        )


@given(
    st.sampled_from(sorted(set(SYSTEMS) - {"none", "sodium_bicarbonate"})),
    st.floats(1.0, 120.0),
    st.floats(-0.8, 0.8),
    st.floats(2.0, 40.0),
)
@settings(max_examples=40, deadline=None)
def test_any_sheet_gives_its_ph_and_is_neutral(
    system: str, strength: float, shift: float, measured_c: float
) -> None:
    ph = SYSTEMS[system] + shift
    bench = quick(system, strength, ph, measure_temperature_c=measured_c)
    for way in batch_sheet(bench, volume_l=1.0).ways:
        whole = mixture(library(), _weighed(way), volume_temperature_c=measured_c)

        assert float(whole.solve(measured_c).ph) == pytest.approx(ph, abs=2e-6)
        assert way.sums.positive_meq_l == pytest.approx(
            way.sums.negative_meq_l, abs=1e-5
        )
        assert way.sums.weighed_g + way.sums.water_g == pytest.approx(way.sums.batch_g)


@pytest.mark.parametrize(
    "system",
    ["sodium_phosphate", "sodium_citrate", "histidine_hydrochloride", "sodium_borate"],
)
def test_both_ways_end_in_the_same_product(system: str) -> None:
    """Free acid with sodium hydroxide, free base with hydrochloric acid."""
    forms, titrant = _sheet(system, SYSTEMS[system]).ways
    components: list[dict[str, float]] = []
    for way in (forms, titrant):
        total: dict[str, float] = {}
        for line in way.lines:
            for name, n in library().find_material(line.material).contents.items():
                total[name] = total.get(name, 0.0) + n * line.mmol_l
        components.append(total)

    assert forms.way.id == "forms"
    assert not forms.way.titrants
    assert titrant.way.id == "titrant"
    assert len(titrant.way.titrants) == 1
    # found within 7e-5: the volume of the titrant leaves a little less water
    assert components[0] == pytest.approx(components[1], rel=2e-4)
    assert not forms.way.by_product
    assert not titrant.way.by_product


def test_a_way_that_leaves_salt_behind_says_so() -> None:
    sheet = _sheet("histidine_acetate", 5.5)

    assert any("brings" in note and "chloride" in note for note in sheet.notes)
    assert sheet.ways[1].way.by_product["sodium"] > 1.0


def test_a_system_of_one_material_has_one_way() -> None:
    sheet = _sheet("meglumine_hydrochloride", 9.2)

    assert [way.way.id for way in sheet.ways] == ["titrant"]
    assert any("one way" in note for note in sheet.notes)


# ------------------------------------------------------------------------- grades


def test_an_assay_raises_what_is_weighed() -> None:
    plain = _sheet("sodium_phosphate", 7.2).ways[0]
    hand = InHand(
        assay_percent={"sodium_dihydrogen_phosphate_monohydrate": 98.0},
        water_percent={"sodium_dihydrogen_phosphate_monohydrate": 2.0},
    )
    wet = batch_sheet(
        quick("sodium_phosphate", 25.0, 7.2), volume_l=4.0, in_hand=hand
    ).ways[0]
    a, b = (
        next(x for x in way.lines if x.material.startswith("sodium_dihydrogen"))
        for way in (plain, wet)
    )

    assert b.weigh_g == pytest.approx(a.weigh_g / 0.98 / 0.98)
    assert b.pure_g == pytest.approx(a.pure_g)
    assert "assay" in b.grade.stated


def test_the_other_hydrate_in_hand() -> None:
    hand = InHand(hydrates=("disodium_hydrogen_phosphate_dihydrate", "Na2HPO4"))
    sheet = batch_sheet(
        quick("sodium_phosphate", 25.0, 7.2), volume_l=4.0, in_hand=hand
    )
    names = {line.material for line in sheet.ways[0].lines}

    assert "disodium_hydrogen_phosphate_anhydrous" in names
    assert predict(library(), _weighed(sheet.ways[0]), (25.0,)).states[0].ph == (
        pytest.approx(7.2, abs=1e-6)
    )


def test_titrants_by_strength_and_by_assay() -> None:
    bench = quick("sodium_phosphate", 25.0, 7.2)

    def base(hand: InHand):  # type: ignore[no-untyped-def]
        way = batch_sheet(bench, volume_l=4.0, in_hand=hand).ways[1]
        return next(x for x in way.lines if x.role == "titrant")

    usual = base(InHand())
    tenth = base(InHand(strength_mol_l={"sodium_hydroxide": 0.1}))
    pellets = base(InHand(grades={"sodium_hydroxide": "sodium_hydroxide_pellets"}))
    strong = base(InHand(grades={"sodium_hydroxide": "sodium_hydroxide_50"}))

    assert usual.measure_ml == pytest.approx(usual.mmol)
    assert tenth.measure_ml == pytest.approx(10.0 * usual.mmol)
    assert pellets.measure_ml is None
    assert pellets.weigh_g == pytest.approx(usual.mmol * 39.997e-3 / 0.98, rel=1e-4)
    assert strong.measure_ml == pytest.approx(strong.weigh_g / 1.525)


def test_concentrated_acids_come_with_cautions() -> None:
    hand = InHand(grades={"hydrochloric_acid": "hydrochloric_acid_37"})
    way = batch_sheet(
        quick("histidine_hydrochloride", 25.0, 6.0), volume_l=4.0, in_hand=hand
    ).ways[1]

    assert any("pour the acid into water" in text for text in way.cautions)


def test_acid_on_bicarbonate_is_warned_of() -> None:
    way = _sheet("sodium_bicarbonate", 7.5).ways[0]

    assert any("gives off carbon dioxide" in text for text in way.cautions)


def test_every_grade_of_the_tables_can_be_used() -> None:
    for grade in known_grades(library()).values():
        material = library().find_material(grade.material)
        hand = InHand(grades={grade.material: grade.id}).checked(library())
        used = grade_of(library(), material, hand)

        assert used.grams(1000.0, material.molar_mass_g_mol.value) > 0.0
        if used.form != "solid":
            volume = used.millilitres(1000.0, material.molar_mass_g_mol.value)
            assert volume is not None
            assert volume > 0.0


BAD_HANDS = {
    "assay_above": (InHand(assay_percent={"l_histidine": 101.0}), "101 %, allowed 0.1"),
    "assay_zero": (InHand(assay_percent={"l_histidine": 0.0}), "0 %, allowed 0.1"),
    "wet": (InHand(water_percent={"l_histidine": 99.0}), "99 %, allowed 0 to 95"),
    "strength": (InHand(strength_mol_l={"hydrochloric_acid": 0.0}), "0 mol/L, allowed"),
    "density": (InHand(density_kg_l={"glycerol": 12.6}), "12.6 kg/L, allowed"),
    "other_grade": (
        InHand(grades={"l_histidine": "sodium_hydroxide_50"}),
        "is a grade of sodium_hydroxide",
    ),
    "no_hydrate": (InHand(hydrates=("l_histidine",)), "no other hydrate"),
}


@pytest.mark.parametrize("name", BAD_HANDS)
def test_grades_that_cannot_be(name: str) -> None:
    hand, words = BAD_HANDS[name]
    bench = quick("sodium_phosphate", 10.0, 7.0)
    with pytest.raises(InputError) as caught:
        batch_sheet(bench, volume_l=1.0, in_hand=hand)
    assert words in str(caught.value)


def test_unknown_grades_and_materials() -> None:
    bench = quick("sodium_phosphate", 10.0, 7.0)
    with pytest.raises(UnknownNameError, match="unknown grade"):
        batch_sheet(
            bench, volume_l=1.0, in_hand=InHand(grades={"sodium_hydroxide": "lye"})
        )
    with pytest.raises(UnknownNameError, match="unknown material"):
        batch_sheet(bench, volume_l=1.0, in_hand=InHand(assay_percent={"salt": 99.0}))


# ------------------------------------------------- size, readings, mistakes, sums


def test_mass_and_volume_are_the_same_batch() -> None:
    bench = quick("sodium_phosphate", 25.0, 7.2)
    by_volume = batch_sheet(bench, volume_l=4.0)
    by_mass = batch_sheet(bench, mass_kg=by_volume.ways[0].sums.batch_g / 1000.0)

    assert by_mass.batch_l == pytest.approx(4.0)


def test_density_of_isotonic_saline() -> None:
    """9 g/L of sodium chloride: 1.0046 kg/L at 20 C (memory)."""
    sheet = _sheet("none", 6.0, materials_mmol_l={"sodium_chloride": 154.0})

    assert sheet.ways[0].sums.density_kg_l == pytest.approx(1.0046, abs=0.002)


@pytest.mark.parametrize(
    "size",
    [{}, {"volume_l": 0.0}, {"volume_l": 1.0, "mass_kg": 1.0}, {"volume_l": 1e9}],
)
def test_sizes_that_are_none(size: dict[str, float]) -> None:
    with pytest.raises(InputError, match="--volume"):
        batch_sheet(quick("sodium_phosphate", 10.0, 7.0), **size)  # type: ignore[arg-type]


def test_readings_are_those_of_the_composition() -> None:
    way = _sheet(
        "tris_hydrochloride", 7.8, prepare_temperature_c=18.0, storage_c=[5.0]
    ).ways[0]
    shown = predict(library(), _weighed(way), (5.0, 18.0, 25.0)).states

    assert [r.temperature_c for r in way.readings] == [5.0, 18.0, 25.0]
    assert [r.ph for r in way.readings] == pytest.approx(
        [s.ph for s in shown], abs=1e-6
    )
    assert way.readings[1].slope_per_k == pytest.approx(-0.028, abs=0.003)


def test_the_reading_for_storage_gives_the_target_there() -> None:
    """Set to the reading at preparation, the product has its target at 5 C."""
    bench = quick(
        "tris_hydrochloride", 20.0, 7.5, prepare_temperature_c=20.0, storage_c=[5.0]
    )
    (storage,) = batch_sheet(bench, volume_l=1.0).ways[0].storage_readings
    made = quick(
        "tris_hydrochloride",
        20.0,
        storage.meter_at_prepare,
        measure_temperature_c=20.0,
        storage_c=[5.0],
    )
    readings = {
        r.temperature_c: r.ph for r in batch_sheet(made, volume_l=1.0).ways[0].readings
    }

    assert readings[5.0] == pytest.approx(7.5, abs=1e-4)
    assert readings[25.0] == pytest.approx(storage.meter_at_25, abs=1e-4)


def test_right_at_another_temperature() -> None:
    bench = quick("tris_hydrochloride", 20.0, 7.5, storage_c=[5.0])
    sheet = batch_sheet(bench, volume_l=1.0, right_at_c=5.0)
    readings = {r.temperature_c: r.ph for r in sheet.ways[0].readings}

    assert readings[5.0] == pytest.approx(7.5, abs=1e-6)
    assert readings[25.0] < 7.1


def test_weighing_errors_are_those_of_the_prediction() -> None:
    way = _sheet("sodium_phosphate", 7.2).ways[0]
    planned = _weighed(way)
    start = predict(library(), planned, (25.0,)).states[0].ph
    for error in way.weighing_errors:
        off = {**planned, error.material: 1.01 * planned[error.material]}
        shown = predict(library(), off, (25.0,)).states[0].ph

        assert error.d_ph == pytest.approx(shown - start, abs=1e-7)


def test_the_wrong_hydrate() -> None:
    """Heptahydrate weighed as anhydrous leaves little of the base (by hand: 53 %)."""
    way = _sheet("sodium_phosphate", 7.2).ways[0]
    wrong = {w.weighed: w for w in way.wrong_hydrates}
    anhydrous = wrong["disodium_hydrogen_phosphate_anhydrous"]

    assert anhydrous.amount_share == pytest.approx(268.062 / 141.957, rel=1e-4)
    assert anhydrous.d_ph > 0.2
    assert wrong["disodium_hydrogen_phosphate_dodecahydrate"].d_ph < -0.05
    material = library().find_material("disodium_hydrogen_phosphate_heptahydrate")
    assert {m.id for m in same_but_water(library(), material)} <= set(wrong)


def test_a_meter_two_kelvin_off() -> None:
    way = _sheet("tris_hydrochloride", 7.8).ways[0]

    assert way.warmer_solution_d_ph == pytest.approx(0.056, abs=0.004)
    assert way.compensation_d_ph == pytest.approx(0.8 * 2.0 / 298.15, rel=1e-6)


def test_the_allowance_moves_the_batch_by_the_tolerance() -> None:
    bench = quick("sodium_phosphate", 25.0, 7.2)
    way = batch_sheet(bench, volume_l=4.0).ways[0]
    a = way.allowance
    assert a.acid_ml is not None
    lower = {**_weighed(way), "hydrochloric_acid": a.acid_ml / 4.0}
    shown = predict(library(), lower, (25.0,)).states[0].ph

    assert shown == pytest.approx(7.2 - bench.tolerance_ph, abs=2e-3)


def test_a_tonicity_agent_fills_to_the_target() -> None:
    sheet = _sheet("sodium_phosphate", 7.2, agent="mannitol", target_mosm_kg=300.0)

    for way in sheet.ways:
        assert way.osmolality_mosm_kg == pytest.approx(300.0, abs=0.1)
        (line,) = [x for x in way.lines if x.role == "tonicity agent"]
        assert line.material == "mannitol"


def test_a_drug_is_weighed_and_never_meets_strong_acid() -> None:
    drug = (
        'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
        "isoelectric_point = 8.4\nnet_charge = 15\nnet_charge_ph = 6\n"
    )
    hand = InHand(grades={"hydrochloric_acid": "hydrochloric_acid_37"})
    sheet = batch_sheet(briefed(drug), volume_l=2.0, in_hand=hand)
    way = sheet.ways[0]
    (line,) = [x for x in way.lines if x.role == "drug"]

    assert line.weigh_g == pytest.approx(200.0)
    assert way.lines[-1] is line
    assert any("never put concentrated acid" in step for step in way.steps)
    assert any("counter-ions" in note for note in sheet.notes)
    assert way.sums.positive_meq_l == pytest.approx(way.sums.negative_meq_l, abs=1e-6)
    assert np.isclose(way.sums.weighed_g + way.sums.water_g, way.sums.batch_g)
