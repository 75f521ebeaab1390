"""Differential and finite capacity; useful ranges."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry.capacity import (
    SINGLE_STEP_MAXIMUM,
    capacity_mol_kg_ph,
    component_capacity_mol_kg_ph,
    finite_capacity,
    useful_range,
)
from formbuf.chemistry.equilibrium import solve
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.titration import STRONG_BASE, titrant_for_ph
from formbuf.product.composition import ladder_of

ACETATE = Ladder("acetate", 0, (4.756,), (-0.41,), (-142.0,))


def test_capacity_of_water() -> None:
    """Van Slyke 1922: ln 10 ([H+] + [OH-])."""
    found = solve([], np.zeros((1, 0)), [1e-3], [1e-3], 25.0)

    assert capacity_mol_kg_ph(found) == pytest.approx(np.log(10.0) * 1e-3, rel=1e-3)


def test_shares_of_the_components() -> None:
    two = [ACETATE, Ladder("amine", 1, (8.07,), (47.0,), (-59.0,))]
    found = solve(two, [0.1, 0.1], -0.05, 0.15, 25.0)
    shares = component_capacity_mol_kg_ph(found)

    assert shares.shape == (2,)
    assert shares[0] > 100.0 * shares[1]
    assert float(capacity_mol_kg_ph(found)) > float(shares.sum())


def test_the_true_slope_is_a_little_steeper_than_at_fixed_activity() -> None:
    """0 to 7 % more base per pH in a dilute citrate or phosphate than beta says."""
    for name, charge in (("citrate", 0.1), ("phosphate", 0.075)):
        ladder = ladder_of(library().species[name])
        at = solve([ladder], [0.05], charge, charge, 25.0)
        base = titrant_for_ph(
            [ladder],
            [0.05],
            0.0,
            0.0,
            25.0,
            at.ph + np.array([-0.01, 0.01]),
            STRONG_BASE,
        ).amount_mol_kg
        ratio = float(base[1] - base[0]) / 0.02 / float(capacity_mol_kg_ph(at))
        print(f"{name}: true slope over beta {ratio:.3f}")
        assert 1.0 < ratio < 1.12


def test_finite_capacity_is_what_moves_the_ph() -> None:
    mix = ([ACETATE], [0.02], 0.01, 0.16, 25.0)
    start = solve(*mix)
    low, high = float(start.ph) - 0.3, float(start.ph) + 0.2
    found = finite_capacity(*mix, start, low, high)
    for amount, target in ((-found.acid_mol_kg, low), (found.base_mol_kg, high)):
        moved = solve([ACETATE], [0.02], 0.01 + amount, 0.16 + abs(amount), 25.0)
        assert float(moved.ph) == pytest.approx(target, abs=1e-8)
    assert 0.0 < float(found.acid_water_mol_kg) < float(found.acid_mol_kg)
    assert 0.0 < float(found.base_water_mol_kg) < float(found.base_mol_kg)


def test_water_alone_carries_its_own_share() -> None:
    mix = ([], np.zeros(0), 0.0, 0.2, 25.0)
    start = solve(*mix)
    found = finite_capacity(*mix, start, start.ph - 1.0, start.ph + 1.0)

    assert float(found.acid_mol_kg) == pytest.approx(
        float(found.acid_water_mol_kg), rel=1e-5
    )
    assert float(found.base_mol_kg) == pytest.approx(
        float(found.base_water_mol_kg), rel=1e-5
    )


def test_finite_capacity_of_an_open_solution() -> None:
    carbonate = ladder_of(library().species["carbonate"])
    mix = ([carbonate], [1.2e-3], 0.024, 0.3, 37.0)
    start = solve(*mix, open_components=["carbonate"])
    opened = finite_capacity(
        *mix, start, start.ph - 0.1, start.ph + 0.1, open_components=["carbonate"]
    )
    closed_total = float(1.2e-3 - start.charge_mol_kg[0])
    closed_mix = ([carbonate], [closed_total], 0.024, 0.3, 37.0)
    closed = finite_capacity(
        *closed_mix, solve(*closed_mix), start.ph - 0.1, start.ph + 0.1
    )

    assert float(opened.acid_mol_kg) > 3.0 * float(closed.acid_mol_kg)


def test_useful_range_of_a_single_step() -> None:
    """One unit on either side of the pK holds a third of the maximum."""
    ((low, high),) = useful_range(ACETATE)

    assert low == pytest.approx(4.756 - 1.0, abs=0.02)
    assert high == pytest.approx(4.756 + 1.0, abs=0.02)


def test_useful_ranges_merge_where_steps_overlap() -> None:
    species = library().species
    assert len(useful_range(ladder_of(species["citrate"]))) == 1
    assert len(useful_range(ladder_of(species["phosphate"]))) == 3
    assert useful_range(ladder_of(species["edta"]))[-1][1] <= 14.0


def test_a_smaller_share_gives_a_wider_range() -> None:
    (narrow,), (wide,) = useful_range(ACETATE, 0.5), useful_range(ACETATE, 0.1)

    assert wide[0] < narrow[0] < narrow[1] < wide[1]
    assert pytest.approx(np.log(10.0) / 4.0) == SINGLE_STEP_MAXIMUM
