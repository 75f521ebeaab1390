"""What every formulator knows, marked ``practice``, and what is known of borate."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry.capacity import capacity_mol_kg_ph, finite_capacity
from formbuf.chemistry.equilibrium import Solution, solve
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.titration import STRONG_BASE, titrant_for_ph
from formbuf.product.composition import ladder_of

ACETATE = Ladder("acetate", 0, (4.756,), (-0.41,), (-142.0,))
SALT = 0.15


def _at(ph: np.ndarray | float, total: float) -> Solution:
    """Acetate of a total molality, brought to a pH with sodium hydroxide in saline."""
    base = titrant_for_ph(
        [ACETATE], [total], 0.0, 2.0 * SALT, 25.0, ph, STRONG_BASE
    ).amount_mol_kg
    totals = np.full((*np.shape(base), 1), total)
    return solve([ACETATE], totals, base, 2.0 * SALT + base, 25.0)


def test_capacity_is_greatest_at_the_pk() -> None:
    """``practice``; at the pK of the medium, 0.2 below that at zero ionic strength."""
    grid = np.linspace(3.0, 6.5, 351)
    solution = _at(grid, 0.1)
    best = grid[np.argmax(capacity_mol_kg_ph(solution))]
    apparent = 4.756 - float(np.mean(solution.unit_charge_term))

    assert best == pytest.approx(apparent, abs=0.03)


def test_capacity_falls_to_a_third_one_unit_away() -> None:
    """``practice``; exactly 0.331 for one step, one unit from the pK of its medium."""
    away = np.array([-1.0, 0.0, 1.0])
    ph = 4.6 + away
    for _ in range(20):
        solution = _at(ph, 0.1)
        ph = 4.756 - solution.unit_charge_term + away
    beta = solution.variance_mol_kg[:, 0]

    assert beta[0] / beta[1] == pytest.approx(0.331, abs=0.001)
    assert beta[2] / beta[1] == pytest.approx(0.331, abs=0.001)


def test_ten_times_the_concentration_carries_ten_times_the_load() -> None:
    """``practice``; at the same ionic strength."""
    carried = []
    for total in (0.005, 0.05):
        base = titrant_for_ph(
            [ACETATE], [total], 0.0, 2.0 * SALT, 25.0, 5.0, STRONG_BASE
        ).amount_mol_kg
        mix = ([ACETATE], [total], base, 2.0 * SALT + base, 25.0)
        found = finite_capacity(*mix, solve(*mix), 4.8, 5.2)
        water = found.base_water_mol_kg, found.acid_water_mol_kg
        carried.append(
            [
                float(found.base_mol_kg - water[0]),
                float(found.acid_mol_kg - water[1]),
            ]
        )

    assert np.array(carried[1]) / carried[0] == pytest.approx([10.0, 10.0], rel=0.05)


def test_a_strong_acid_with_its_strong_base_is_no_buffer() -> None:
    """``practice``: sodium chloride at any strength carries what water carries."""
    mix = ([], np.zeros(0), 0.0, 0.3, 25.0)
    start = solve(*mix)
    found = finite_capacity(*mix, start, start.ph - 0.3, start.ph + 0.3)

    assert float(capacity_mol_kg_ph(start)) < 1e-6
    assert float(found.acid_mol_kg) < 1e-6
    assert float(found.base_mol_kg) < 1e-6


def test_acetate_holds_where_water_runs_away() -> None:
    """``practice``: 5 mmol/kg of strong base moves acetate near pH 5 by about 0.1."""
    dose = 0.005
    buffered = _at(np.array([5.0]), 0.1)
    sodium = -buffered.charge_mol_kg[:, 0]
    after = solve([ACETATE], [[0.1]], sodium + dose, 2 * SALT + sodium + dose, 25.0)
    water = solve(
        [], np.zeros((2, 0)), [0.0, dose], [2.0 * SALT, 2.0 * SALT + dose], 25.0
    )
    moved = float((after.ph - buffered.ph)[0])
    ran = float(water.ph[1] - water.ph[0])
    print(f"acetate moves by {moved:.3f}, water by {ran:.2f}")

    assert moved == pytest.approx(0.1, abs=0.03)
    assert 4.0 <= ran <= 5.0


@pytest.mark.parametrize(("boron", "reads"), [(0.08, 7.08), (0.3, 6.5)])
def test_polyborates_lower_the_ph_of_eye_drops(boron: float, reads: float) -> None:
    """Boric acid and borate mixed for pH 7.2 as if no polyborates formed.

    With the constants of Felmy & Weare 1986 they read 7.08 at 0.08 and 6.5 at
    0.3 mol/kg of boron, 25 C.
    """
    borate = ladder_of(library().species["borate"])
    naive = replace(borate, aggregates=())
    base = titrant_for_ph(
        [naive], [boron], 0.0, 0.0, 25.0, 7.2, STRONG_BASE
    ).amount_mol_kg
    found = float(solve([borate], [boron], base, base, 25.0).ph)
    print(f"{boron} mol/kg of boron mixed for pH 7.2 reads {found:.2f}")

    assert found == pytest.approx(reads, abs=0.03)
