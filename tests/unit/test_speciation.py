"""Molalities of the particles of a solved mixture."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry.equilibrium import solve
from formbuf.chemistry.speciation import Particle, particles, water_ions
from formbuf.product.composition import ladder_of


def test_keys_name_component_and_charge() -> None:
    assert Particle("phosphate", -2, np.zeros(1)).key == "phosphate:-2"
    assert Particle("sodium", 1, np.zeros(1)).key == "sodium:1"


def test_forms_of_phosphate_at_ph_7() -> None:
    phosphate = ladder_of(library().species["phosphate"])
    solution = solve([phosphate], [[0.05]] * 2, 0.075, 0.075, [25.0, 5.0])
    found = {
        p.key: p.molality_mol_kg
        for p in particles([phosphate], [[0.05]] * 2, [25.0, 5.0], solution)
    }

    assert set(found) == {"phosphate:0", "phosphate:-1", "phosphate:-2", "phosphate:-3"}
    assert found["phosphate:-1"] == pytest.approx([0.025, 0.025], rel=1e-3)
    assert sum(found.values()) == pytest.approx([0.05, 0.05], rel=1e-12)


def test_aggregates_bear_their_own_name() -> None:
    borate = ladder_of(library().species["borate"])
    solution = solve([borate], [0.3], 0.05, 0.05, 25.0)
    found = {
        p.key: float(p.molality_mol_kg)
        for p in particles([borate], [0.3], 25.0, solution)
    }
    boron = (
        found["borate:0"]
        + found["borate:-1"]
        + 3.0 * found["borate/triborate:-1"]
        + 4.0 * found["borate/tetraborate:-2"]
    )

    assert boron == pytest.approx(0.3, rel=1e-10)
    assert found["borate/triborate:-1"] > 0.005


def test_an_open_component_keeps_its_first_state() -> None:
    carbonate = ladder_of(library().species["carbonate"])
    solution = solve(
        [carbonate], [1e-3], 0.02, 0.02, 25.0, open_components=["carbonate"]
    )
    found = particles(
        [carbonate], [1e-3], 25.0, solution, open_components=["carbonate"]
    )

    assert float(found[0].molality_mol_kg) == pytest.approx(1e-3)
    assert float(found[1].molality_mol_kg) == pytest.approx(0.02, rel=0.02)


def test_ions_of_water() -> None:
    solution = solve([], np.zeros((1, 0)), [-0.1], [0.1], 25.0)
    hydrogen, hydroxide = water_ions(solution)

    assert hydrogen.key == "hydrogen:1"
    assert hydroxide.key == "hydroxide:-1"
    assert hydrogen.molality_mol_kg == pytest.approx([0.1])
