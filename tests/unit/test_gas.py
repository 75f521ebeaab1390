"""Carbon dioxide in water and above it."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry import gas
from formbuf.chemistry.equilibrium import solve
from formbuf.chemistry.titration import STRONG_ACID, titrant_for_ph
from formbuf.constants import STANDARD_PRESSURE_PA
from formbuf.errors import InputError
from formbuf.product.composition import ladder_of


def _carbonate() -> object:
    return ladder_of(library().species["carbonate"])


def test_the_law_has_the_numbers_of_the_table() -> None:
    """Sander 2023: 3.3e-4 mol m-3 Pa-1 and 2400 K."""
    table = library().carbon_dioxide

    assert (
        table["henry_solubility"].value.value == gas.CARBON_DIOXIDE.solubility_mol_m3_pa
    )
    assert (
        table["henry_temperature_coefficient"].value.value
        == gas.CARBON_DIOXIDE.temperature_coefficient_k
    )


def test_henry_at_25_c() -> None:
    """pKH of 1.47 in mol/(L atm) (Harned & Davis 1943: 1.464); a third in bar."""
    molar_atm = float(gas.henry_mol_kg_pa(25.0)) * STANDARD_PRESSURE_PA

    assert float(gas.henry_mol_kg_pa(25.0)) == pytest.approx(3.31e-7, rel=1e-3)
    assert -np.log10(molar_atm) == pytest.approx(1.47, abs=0.01)


def test_carbon_dioxide_dissolves_better_in_the_cold() -> None:
    """Harned & Davis 1943: pKH 1.19 at 5 C and 1.66 at 40 C (``memory``)."""
    pk = -np.log10(gas.henry_mol_kg_pa([5.0, 40.0]) * STANDARD_PRESSURE_PA)

    assert pk == pytest.approx([1.19, 1.66], abs=0.05)


def test_pressure_and_dissolved_gas_are_inverse() -> None:
    pressure = np.array([0.0, 40.0, 1e5])
    dissolved = gas.dissolved_mol_kg(pressure, 5.0)

    assert gas.pressure_pa(dissolved, 5.0) == pytest.approx(pressure)


def test_water_in_air() -> None:
    """``practice``: pH 5.6; 1.4e-5 mol/kg dissolved."""
    air = library().carbon_dioxide["air_fraction_dry"].value.value
    pressure = gas.air_pressure_pa(air, 25.0)
    dissolved = gas.dissolved_mol_kg(pressure, 25.0)
    solution = solve(
        [_carbonate()], [dissolved], 0.0, 0.0, 25.0, open_components=["carbonate"]
    )

    assert float(pressure) == pytest.approx(41.7, abs=0.1)
    assert float(dissolved) == pytest.approx(1.38e-5, rel=0.01)
    assert float(solution.ph) == pytest.approx(5.6, abs=0.02)


def test_blood_plasma() -> None:
    """``practice``: 24 mmol/L bicarbonate under 40 mmHg at 37 C is pH 7.4."""
    dissolved = gas.dissolved_mol_kg(40.0 * 133.322, 37.0)
    solution = solve(
        [_carbonate()], [dissolved], 0.0243, 0.3, 37.0, open_components=["carbonate"]
    )

    assert float(dissolved) == pytest.approx(1.25e-3, rel=0.05)
    assert float(solution.ph) == pytest.approx(7.4, abs=0.05)


def test_bicarbonate_at_ph_4_5_needs_more_than_an_atmosphere() -> None:
    """A closed buffer of 75 mmol/kg would need about 2 atm above it."""
    total, ladder = [0.075], [_carbonate()]
    acid = titrant_for_ph(ladder, total, 0.075, 0.075, 25.0, 4.5, STRONG_ACID)
    amount = acid.amount_mol_kg
    solution = solve(ladder, total, 0.075 - amount, 0.075 + amount, 25.0)
    pressure = gas.implied_pressure_pa(ladder, total, 25.0, solution)

    assert float(pressure) / STANDARD_PRESSURE_PA == pytest.approx(2.2, abs=0.1)


def test_no_carbonate_no_pressure() -> None:
    acetate = ladder_of(library().species["acetate"])
    solution = solve([acetate], [[0.1]] * 2, 0.05, 0.05, 25.0)

    assert np.all(
        gas.implied_pressure_pa([acetate], [[0.1]] * 2, 25.0, solution) == 0.0
    )


def test_a_headspace_relieves_the_pressure() -> None:
    alone = gas.headspace_pressure_pa(0.01, 0.0, 25.0)
    shared = gas.headspace_pressure_pa(0.01, [0.5, 1.0], 25.0)
    moles_in_gas = shared[1] * 1e-3 / 0.99705 / (8.314462618 * 298.15)
    moles_in_water = gas.dissolved_mol_kg(shared[1], 25.0)

    assert float(alone) == pytest.approx(float(gas.pressure_pa(0.01, 25.0)))
    assert alone > shared[0] > shared[1]
    assert float(moles_in_gas + moles_in_water) == pytest.approx(0.01, rel=1e-4)


def test_acid_taken_up_from_the_air() -> None:
    """At pH 7.4 bicarbonate is eleven times the dissolved gas."""
    taken = gas.absorbed_acid_mol_kg(_carbonate(), 41.7, 7.4, 25.0)
    free = gas.dissolved_mol_kg(41.7, 25.0)

    assert float(taken / free) == pytest.approx(10.0 ** (7.4 - 6.351), rel=0.01)


@pytest.mark.parametrize("value", [-1.0, float("nan"), float("inf")])
def test_impossible_amounts_are_refused(value: float) -> None:
    with pytest.raises(InputError, match="0 or more"):
        gas.dissolved_mol_kg(value, 25.0)
    with pytest.raises(InputError, match="0 or more"):
        gas.pressure_pa(value, 25.0)
    with pytest.raises(InputError, match="0 or more"):
        gas.headspace_pressure_pa(0.1, value, 25.0)


def test_air_is_a_fraction() -> None:
    with pytest.raises(InputError, match="allowed are 0 to 1"):
        gas.air_pressure_pa(425.0, 25.0)
    assert float(gas.air_pressure_pa(0.0004, 99.0)) < float(
        gas.air_pressure_pa(0.0004, 25.0)
    )
