"""Macro-ions in the solver: against another method, and what follows from the formulas."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.interpolate import PchipInterpolator
from scipy.optimize import brentq

from formbuf.chemistry.activity import slope, unit_charge_term
from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.chemistry.equilibrium import solve
from formbuf.chemistry.ionization import Ladder, pk_shift
from formbuf.chemistry.macro_charge import charge_and_variance
from formbuf.chemistry.macro_ion import Sites, curve_charge, curve_through
from formbuf.chemistry.speciation import particles
from formbuf.chemistry.titration import STRONG_BASE, titrant_for_ph
from formbuf.chemistry.water import pkw
from formbuf.errors import InputError

PROTEIN = Ladder(
    "protein",
    0,
    (3.67, 4.25, 6.54, 10.4, 13.8),
    (4.85, 2.51, 29.5, 43.4, float("nan")),
    (0.0,) * 5,
    sites=(Sites(52, 0), Sites(60, 0), Sites(26, 1), Sites(86, 1), Sites(36, 1)),
)
WORKED = replace(PROTEIN, work=0.03)
ACETATE = Ladder("acetate", 0, (4.756,), (-0.41,), (-142.0,))
POINTS = ([3.0, 4.0, 5.0, 6.0, 7.5, 9.0], [50.0, 30.0, 14.0, 10.0, 2.0, -20.0])
CURVE = Ladder.of_curve("protein", curve_through(*POINTS))


def _oracle(
    ladder: Ladder, acetate: float, protein: float, charge: float, charge2: float
) -> float:
    """PH by root finding on the charge balance, written from the definitions."""

    def gap(ph: float, ionic: float) -> float:
        d = float(unit_charge_term(slope(25.0, "guggenheim"), np.sqrt(ionic)))
        hydrogen, hydroxide = 10.0 ** (d - ph), 10.0 ** (ph - float(pkw(25.0)) + d)
        lost = 1.0 / (1.0 + 10.0 ** (4.756 - ph - d))
        net = float(charge_and_variance(ladder, ph, 25.0)[0])
        return charge + hydrogen - hydroxide - acetate * lost + protein * net

    def ionic_at(ph: float, ionic: float) -> float:
        d = float(unit_charge_term(slope(25.0, "guggenheim"), np.sqrt(ionic)))
        lost = acetate / (1.0 + 10.0 ** (4.756 - ph - d))
        water = 10.0 ** (d - ph) + 10.0 ** (ph - float(pkw(25.0)) + d)
        return 0.5 * (charge2 + lost + water)

    ionic, ph = 0.05, 7.0
    for _ in range(200):
        ph = brentq(lambda x, i=ionic: gap(x, i), -2.0, 16.0, xtol=1e-13)
        ionic = ionic_at(ph, ionic)
    return ph


@pytest.mark.parametrize(
    "ladder", [PROTEIN, WORKED, CURVE], ids=["sites", "work", "curve"]
)
@pytest.mark.parametrize("charge", [-0.03, -0.01, 0.0, 0.002, 0.005])
def test_ph_with_a_macro_ion_by_another_method(ladder: Ladder, charge: float) -> None:
    found = solve((ACETATE, ladder), [0.01, 5e-4], charge, abs(charge), 25.0)

    expected = _oracle(ladder, 0.01, 5e-4, charge, abs(charge))
    assert float(found.ph) == pytest.approx(expected, abs=1e-9)


def test_a_macro_ion_takes_no_part_in_the_ionic_strength() -> None:
    with_it = solve((ACETATE, PROTEIN), [0.0, 5e-4], -0.02, 0.02, 25.0)
    water = float(with_it.hydrogen_mol_kg + with_it.hydroxide_mol_kg)

    assert float(with_it.ionic_strength_mol_kg) == pytest.approx(0.5 * (0.02 + water))


def test_a_macro_ion_is_one_uncharged_particle_to_the_osmolality() -> None:
    solution = solve((PROTEIN,), [5e-4], -0.02, 0.02, 25.0)
    (one,) = particles((PROTEIN,), [5e-4], 25.0, solution)

    assert one.charge == 0
    assert float(one.molality_mol_kg) == pytest.approx(5e-4)


@pytest.mark.parametrize("ladder", [PROTEIN, WORKED], ids=["sites", "work"])
def test_capacity_is_the_slope_of_the_charge(ladder: Ladder) -> None:
    solution = solve((ladder,), [5e-4], -0.0159, 0.0159, 25.0)
    ph, step = float(solution.ph), 1e-5
    up, down = (charge_and_variance(ladder, ph + d, 25.0)[0] for d in (step, -step))

    own = float(capacity_mol_kg_ph(solution)) - np.log(10.0) * float(
        solution.hydrogen_mol_kg + solution.hydroxide_mol_kg
    )
    assert own == pytest.approx(-5e-4 * float(up - down) / (2.0 * step), rel=1e-6)


def test_curve_is_the_monotone_cubic_of_another_program() -> None:
    grid = np.linspace(3.0, 9.0, 601)

    ours = curve_charge(curve_through(*POINTS), grid)[0]
    assert np.max(np.abs(ours - PchipInterpolator(*POINTS)(grid))) < 1e-12


def test_curve_stays_as_it_is_beyond_its_points() -> None:
    charge, variance = curve_charge(curve_through(*POINTS), [1.0, 2.9, 9.1, 14.0])

    assert charge.tolist() == [50.0, 50.0, -20.0, -20.0]
    assert variance.tolist() == [0.0] * 4


@given(
    st.lists(st.floats(0.05, 2.0), min_size=1, max_size=12),
    st.lists(st.floats(0.0, 30.0), min_size=12, max_size=12),
    st.floats(-1.0, 121.0),
)
@settings(max_examples=150, deadline=None)
def test_charge_of_a_curve_never_rises(
    steps: list[float], falls: list[float], temperature_c: float
) -> None:
    ph = 2.0 + np.concatenate([[0.0], np.cumsum(steps)])
    charge = 40.0 - np.concatenate([[0.0], np.cumsum(falls[: len(steps)])])
    curve = curve_through(ph, charge)
    grid = np.linspace(ph[0] - 0.5, ph[-1] + 0.5, 400)
    shift = pk_shift(1.0, 0.0, temperature_c)

    values, variance = curve_charge(curve, grid, shift)
    assert np.all(np.diff(values) <= 1e-9)
    assert np.all(variance >= 0.0)


def test_variance_of_a_moved_curve_is_its_slope() -> None:
    curve, shift = curve_through(*POINTS), pk_shift(1.0, 0.0, 5.0)
    grid, step = np.linspace(3.2, 8.8, 200), 1e-6
    up, down = (curve_charge(curve, grid + d, shift)[0] for d in (step, -step))

    slope_of_it = -(up - down) / (2.0 * step * np.log(10.0))
    assert np.max(np.abs(slope_of_it - curve_charge(curve, grid, shift)[1])) < 1e-6


def test_cold_raises_the_ph_where_imidazole_titrates() -> None:
    at = np.array([5.0, 25.0])
    solution = solve((CURVE,), [[5e-4], [5e-4]], -0.004, 0.004, at)

    assert float(solution.ph[0] - solution.ph[1]) > 0.2


@given(st.floats(3.2, 8.8), st.sampled_from([CURVE, WORKED]))
@settings(max_examples=60, deadline=None)
def test_titration_and_solution_are_inverse(ph: float, protein: Ladder) -> None:
    ladders = (ACETATE, protein)
    found = titrant_for_ph(ladders, [0.01, 5e-4], -0.02, 0.02, 25.0, ph, STRONG_BASE)
    base = float(found.amount_mol_kg)
    back = solve(ladders, [0.01, 5e-4], base - 0.02, abs(base) + 0.02, 25.0)

    if base >= 0.0:
        assert float(back.ph) == pytest.approx(ph, abs=1e-6)


@pytest.mark.parametrize(
    ("ph", "charge"),
    [([5.0], [1.0]), ([5.0, 5.0], [2.0, 1.0]), ([5.0, 6.0], [1.0, 2.0])],
    ids=["one", "same_ph", "rising"],
)
def test_points_that_are_no_curve(ph: list[float], charge: list[float]) -> None:
    with pytest.raises(ValueError, match="curve needs"):
        curve_through(ph, charge)


def test_only_a_macro_ion_has_a_net_charge() -> None:
    with pytest.raises(InputError, match="no macro-ion"):
        charge_and_variance(ACETATE, 5.0, 25.0)
