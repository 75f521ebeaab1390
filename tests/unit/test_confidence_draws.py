"""Draws of inputs and of mixtures: exact where they must be, first order where not."""

from __future__ import annotations

import dataclasses
import math

import numpy as np
import pytest
from confidence_support import (
    drawn_mixture,
    library,
    mixed,
    silent,
    with_pka,
)

from formbuf.advice.error_model import error_model, group_of_step
from formbuf.advice.sampling import Sampler, normal_quantiles
from formbuf.chemistry import equilibrium, titration
from formbuf.chemistry.ionization import pk_shift
from formbuf.errors import InputError, UnknownNameError
from formbuf.product.uncertainty_parts import UncertaintyInfo

ACETATE = {"acetic_acid_glacial": 50.0, "sodium_acetate_trihydrate": 50.0}
LN10 = math.log(10.0)


def test_the_same_seed_gives_the_same_bytes_whatever_else_is_drawn() -> None:
    one, two = Sampler(500, 3), Sampler(500, 3)
    two.normal("something else")

    assert one.normal("pka").tobytes() == two.normal("pka").tobytes()
    assert one.exponential("w").tobytes() == two.exponential("w").tobytes()
    assert one.gamma("w", 2.0).tobytes() == two.gamma("w", 2.0).tobytes()


def test_another_seed_or_name_gives_other_draws() -> None:
    base = Sampler(500, 3)

    assert not np.array_equal(base.normal("a"), base.normal("b"))
    assert not np.array_equal(base.normal("a"), Sampler(500, 4).normal("a"))


def test_every_share_of_an_input_is_drawn_once() -> None:
    sampler = Sampler(1000, 1)

    assert np.array_equal(np.sort(sampler.order("x")), np.arange(1000))
    assert np.array_equal(np.sort(sampler.normal("x")), normal_quantiles(1000))
    assert sampler.normal("x").mean() == pytest.approx(0.0, abs=1e-12)
    assert sampler.normal("x").std() == pytest.approx(1.0, abs=1e-12)


def test_quantiles_are_those_of_scipy() -> None:
    from scipy.special import ndtri

    shares = (np.arange(400) + 0.5) / 400
    expected = ndtri(shares)
    expected /= np.sqrt(np.mean(expected**2))

    assert normal_quantiles(400) == pytest.approx(expected, rel=1e-12)


def test_the_mirrored_set_is_the_antithetic_one() -> None:
    plain, mirrored = Sampler(800, 2), Sampler(800, 2, mirrored=True)

    assert mirrored.normal("x") == pytest.approx(-plain.normal("x"), abs=1e-12)


def test_draws_fill_the_space_better_than_independent_ones() -> None:
    from scipy.stats import qmc

    sampler = Sampler(1000, 1)
    ours = np.stack(
        [(sampler.order(name) + 0.5) / 1000 for name in ("a", "b", "c")], axis=-1
    )
    independent = np.random.default_rng(1).random((1000, 3))

    assert qmc.discrepancy(ours) < 0.5 * qmc.discrepancy(independent)


@pytest.mark.parametrize(("count", "seed"), [(99, 1), (1_000_001, 1), (2500, -1)])
def test_counts_and_seeds_that_are_refused(count: int, seed: int) -> None:
    with pytest.raises(InputError, match="allowed"):
        Sampler(count, seed)


def test_a_shift_of_pk_is_the_ladder_with_that_pk() -> None:
    """Phosphate, citrate and borate with its polyborates, at 5 C."""
    mix = mixed(
        sodium_dihydrogen_phosphate_anhydrous=20.0,
        trisodium_citrate_dihydrate=10.0,
        boric_acid=100.0,
        sodium_tetraborate_decahydrate=10.0,
    )
    rng = np.random.default_rng(5)
    shifts = {
        ladder.name: rng.normal(0.0, 0.1, (7, len(ladder.pka)))
        for ladder in mix.ladders
    }
    args = (
        np.tile(mix.totals_mol_kg, (7, 1)),
        np.full(7, mix.strong_charge_mol_kg),
        np.full(7, mix.strong_charge2_mol_kg),
    )
    together = equilibrium.solve(mix.ladders, *args, 5.0, pk_shift=shifts)
    base = titration.titrant_for_ph(
        mix.ladders, *args, 5.0, 7.0, titration.STRONG_BASE, pk_shift=shifts
    )
    for k in range(7):
        ladders = [
            dataclasses.replace(
                ladder,
                pka=tuple(np.array(ladder.pka) + shifts[ladder.name][k]),
                aggregates=tuple(
                    dataclasses.replace(
                        a, log10_k=a.log10_k + a.charge * shifts[ladder.name][k][0]
                    )
                    for a in ladder.aggregates
                ),
            )
            for ladder in mix.ladders
        ]
        one = (args[0][k], args[1][k], args[2][k])
        alone = equilibrium.solve(ladders, *one, 5.0)
        amount = titration.titrant_for_ph(
            ladders, *one, 5.0, 7.0, titration.STRONG_BASE
        )

        assert together.ph[k] == pytest.approx(float(alone.ph), abs=1e-9)
        assert base.amount_mol_kg[k] == pytest.approx(
            float(amount.amount_mol_kg), abs=1e-10
        )


@pytest.mark.parametrize("shape", [(3, 2), (4, 1), ()])
def test_shifts_of_another_shape_are_refused(shape: tuple[int, ...]) -> None:
    mix = mixed(**ACETATE)

    with pytest.raises(InputError, match="pK shifts"):
        equilibrium.solve(
            mix.ladders,
            np.tile(mix.totals_mol_kg, (3, 1)),
            np.zeros(3),
            np.zeros(3),
            25.0,
            pk_shift={"acetate": np.zeros(shape)},
        )


def test_without_errors_every_draw_is_the_nominal_ph() -> None:
    made = drawn_mixture(silent("acetate"), **ACETATE)

    assert made.ph(25.0) == pytest.approx(float(mixed(**ACETATE).solve(25.0).ph))
    assert made.inputs == {}


def test_the_linear_case_is_the_propagation_of_error() -> None:
    """Equal parts of acid and salt: pH = pK + log10(salt/acid), so that the squares of
    the pKa's error and of sqrt(2) times the weighing's over ln 10 add up."""
    model = with_pka(silent("acetate", weighing_relative=0.02), acetate=0.01)
    ph = drawn_mixture(model, **ACETATE).ph(25.0)
    expected = math.hypot(0.01, math.sqrt(2.0) * 0.02 / LN10)

    # the added salt moves the activity coefficient a little, hence 3 %
    assert ph.std() == pytest.approx(expected, rel=0.03)


def test_the_activity_error_grows_with_charge_and_ionic_strength() -> None:
    """One standard deviation is |2z-1| I times the slope, with the floor beside it."""
    slope = 0.05
    model = silent("phosphate", activity_slope_kg_mol=slope)
    salts = {
        "sodium_dihydrogen_phosphate_anhydrous": 25.0,
        "disodium_hydrogen_phosphate_anhydrous": 25.0,
    }
    ph = drawn_mixture(model, **salts).ph(25.0)
    ionic = float(mixed(**salts).solve(25.0).ionic_strength_mol_kg)

    assert ph.std() == pytest.approx(3.0 * slope * ionic, rel=0.02)


def test_the_error_of_hydrogen_ions_counts_only_where_they_buffer() -> None:
    acid = drawn_mixture(silent(activity_floor_ph=0.01), hydrochloric_acid=100.0)
    buffer = drawn_mixture(silent("acetate", activity_floor_ph=0.01), **ACETATE)

    assert acid.ph(25.0).std() == pytest.approx(0.01, rel=1e-6)
    assert "hydrogen:activity" not in buffer.inputs


def test_an_enthalpy_error_moves_ph_with_temperature_only() -> None:
    model = silent("acetate")
    stated = dataclasses.replace(model.stated, dh_kj_mol={"acetate": 2.0})
    made = drawn_mixture(dataclasses.replace(model, stated=stated), **ACETATE)
    expected = 2.0 * abs(float(pk_shift(1.0, 0.0, 5.0)))

    assert made.ph(25.0).std() == pytest.approx(0.0, abs=1e-9)
    assert made.ph(5.0).std() == pytest.approx(expected, rel=0.01)


def test_an_unknown_enthalpy_is_that_of_its_kind_of_group() -> None:
    """Meglumine has no enthalpy in the tables: it is drawn as other amines are."""
    model = silent(
        missing_dh_nitrogen_mean_kj_mol=35.0, missing_dh_nitrogen_kj_mol=10.0
    )
    made = drawn_mixture(model, meglumine=20.0, hydrochloric_acid=10.0)
    drift = made.ph(5.0) - made.ph(25.0)
    per_kj = float(pk_shift(1.0, 0.0, 5.0))

    assert library().species["meglumine"].steps[0].dh_kj_mol is None
    assert drift.mean() == pytest.approx(35.0 * per_kj, rel=0.02)
    assert drift.std() == pytest.approx(10.0 * per_kj, rel=0.02)


def test_extrapolation_counts_outside_the_measured_temperatures_only() -> None:
    made = drawn_mixture(silent("acetate", extrapolation_per_k=0.001), **ACETATE)

    assert made.ph(60.0).std() == pytest.approx(0.0, abs=1e-9)
    assert made.ph(80.0).std() == pytest.approx(0.020, rel=0.01)
    assert made.ph(-10.0).std() == pytest.approx(0.010, rel=0.01)


def test_the_antithetic_set_has_the_same_spread() -> None:
    model = error_model(library())
    plain = drawn_mixture(model, Sampler(2500, 1), **ACETATE).ph(5.0)
    other = drawn_mixture(model, Sampler(2500, 1, mirrored=True), **ACETATE).ph(5.0)

    assert other.mean() == pytest.approx(plain.mean(), abs=plain.std() / 50.0)
    assert other.std() == pytest.approx(plain.std(), rel=0.03)


def test_the_order_of_materials_does_not_matter() -> None:
    model = error_model(library())
    forward = drawn_mixture(model, **ACETATE).ph(25.0)
    backward = drawn_mixture(model, **dict(reversed(ACETATE.items()))).ph(25.0)

    assert backward == pytest.approx(forward, abs=1e-9)


def test_an_adjusted_batch_forgets_its_constants_where_it_is_set() -> None:
    model = with_pka(silent("acetate"), acetate=0.05)
    made = drawn_mixture(model, **ACETATE)
    before = made.ph(25.0).std()
    made.adjust(25.0, np.full(made.count, 5.0))

    assert before == pytest.approx(0.05, rel=0.03)
    assert made.ph(25.0) == pytest.approx(5.0, abs=1e-8)


@pytest.mark.parametrize(
    ("family", "pka", "group"),
    [
        ("amine or amino acid", 8.07, "nitrogen"),
        ("sulfonic amine", 2.5, "carboxyl"),
        ("carboxylic acid", 4.76, "carboxyl"),
        ("carboxylic acid", 11.6, "other"),
        ("inorganic", 7.2, "other"),
    ],
)
def test_kinds_of_groups(family: str, pka: float, group: str) -> None:
    assert group_of_step(family, pka) == group


def test_a_figure_of_the_brief_replaces_that_of_the_table() -> None:
    stated = UncertaintyInfo(numbers={"meter_ph": 0.005}, pka={"acetate": 0.1})
    model = error_model(library(), stated)
    ladder = mixed(**ACETATE).ladders[0]

    assert model.number("meter_ph") == 0.005
    assert model.figures["meter_ph"].stated
    assert not model.figures["end_point_ph"].stated
    assert model.step_errors(library(), ladder)[0].pka == 0.1


def test_an_uncertainty_of_an_unknown_species_is_refused() -> None:
    with pytest.raises(UnknownNameError, match=r"uncertainty\.pka.*acetat'") as caught:
        error_model(library(), UncertaintyInfo(pka={"acetat": 0.1}))

    assert "acetate" in caught.value.hint
