"""The solver at known points, its shapes and its way of failing."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry import equilibrium
from formbuf.chemistry.equilibrium import solve
from formbuf.chemistry.ionization import Ladder
from formbuf.errors import ConvergenceError, FormbufError
from formbuf.product.composition import ladder_of


def _ladder(name: str) -> Ladder:
    return ladder_of(library().species[name])


def test_water_is_neutral_at_half_pkw() -> None:
    found = solve([], np.zeros((2, 0)), 0.0, 0.0, [25.0, 5.0])

    assert found.ph == pytest.approx([13.9945 / 2, 14.7340 / 2], abs=1e-4)
    assert found.hydrogen_mol_kg == pytest.approx(found.hydroxide_mol_kg, rel=1e-9)


def test_strong_acid_and_base() -> None:
    """0.1 mol/kg hydrochloric acid and sodium hydroxide by the convention."""
    found = solve([], np.zeros((2, 0)), [-0.1, 0.1], [0.1, 0.1], 25.0)

    assert found.ph == pytest.approx([1.109, 12.885], abs=0.001)
    assert found.ionic_strength_mol_kg == pytest.approx([0.1, 0.1], rel=1e-9)


def test_the_ideal_model_gives_henderson_and_hasselbalch() -> None:
    acetate = Ladder("acetate", 0, (4.76,), (0.0,), (0.0,))
    found = solve([acetate], [0.3], 0.1, 0.1, 25.0, model="ideal")

    assert float(found.ph) == pytest.approx(4.76 + np.log10(0.1 / 0.2), abs=5e-4)
    assert float(found.unit_charge_term) == 0.0


def test_shapes_of_a_solution() -> None:
    found = solve(
        [_ladder("phosphate"), _ladder("tris")],
        np.full((4, 1, 2), 0.01),
        0.0,
        0.3,
        [5, 25],
    )

    assert found.ph.shape == (4, 2)
    assert found.charge_mol_kg.shape == (4, 2, 2)
    assert found.variance_mol_kg.shape == (4, 2, 2)
    assert found.residual_mol_kg.shape == (4, 2)
    assert np.ptp(found.ph, axis=0) == pytest.approx([0.0, 0.0], abs=1e-12)


def test_an_empty_call() -> None:
    found = solve([_ladder("tris")], np.zeros((0, 1)), np.zeros(0), np.zeros(0), 25.0)

    assert found.ph.shape == (0,)
    assert found.iterations == 0


def test_more_states_than_one_chunk(monkeypatch: pytest.MonkeyPatch) -> None:
    rng = np.random.default_rng(1)
    charge = rng.uniform(0.0, 0.15, 1000)
    totals = np.full((1000, 1), 0.05)
    whole = solve([_ladder("citrate")], totals, charge, charge, 25.0)
    monkeypatch.setattr(equilibrium, "CHUNK", 64)
    parts = solve([_ladder("citrate")], totals, charge, charge, 25.0)

    assert parts.ph == pytest.approx(whole.ph, abs=1e-9)
    assert parts.charge_mol_kg == pytest.approx(whole.charge_mol_kg, abs=1e-10)


def test_bisection_finds_what_newton_finds(monkeypatch: pytest.MonkeyPatch) -> None:
    ladders = [_ladder("citrate"), _ladder("borate"), _ladder("histidine")]
    totals = np.array([[0.05, 0.1, 0.02], [0.001, 0.3, 0.0], [0.0, 0.0, 0.0]])
    charge, charge2 = np.array([0.1, 0.05, 1e-9]), np.array([0.2, 0.05, 0.1])
    newton = solve(ladders, totals, charge, charge2, 25.0)
    monkeypatch.setattr(equilibrium, "EARLY_CAP", 0)
    monkeypatch.setattr(equilibrium, "NEWTON_CAP", 0)
    bisected = solve(ladders, totals, charge, charge2, 25.0)

    assert bisected.ph == pytest.approx(newton.ph, abs=1e-9)
    assert bisected.ionic_strength_mol_kg == pytest.approx(
        newton.ionic_strength_mol_kg, abs=1e-12
    )


def test_bisection_with_the_ideal_model(monkeypatch: pytest.MonkeyPatch) -> None:
    newton = solve([_ladder("citrate")], [0.05], 0.1, 0.1, 25.0, model="ideal")
    monkeypatch.setattr(equilibrium, "EARLY_CAP", 0)
    monkeypatch.setattr(equilibrium, "NEWTON_CAP", 0)
    bisected = solve([_ladder("citrate")], [0.05], 0.1, 0.1, 25.0, model="ideal")

    assert float(bisected.ph) == pytest.approx(float(newton.ph), abs=1e-9)
    assert float(bisected.ionic_strength_mol_kg) == pytest.approx(
        float(newton.ionic_strength_mol_kg), abs=1e-12
    )


def test_no_convergence_is_an_error(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(equilibrium, "EARLY_CAP", 0)
    monkeypatch.setattr(equilibrium, "NEWTON_CAP", 0)
    monkeypatch.setattr(equilibrium, "BISECTION_CAP", 3)
    with pytest.raises(ConvergenceError, match=r"citrate 0\.05 mol/kg") as caught:
        solve([_ladder("citrate")], [0.05], 0.1, 0.1, 25.0)
    assert caught.value.exit_code == 5
    assert caught.value.hint
    assert isinstance(caught.value, FormbufError)


def test_residuals_are_reported() -> None:
    found = solve(
        [_ladder("citrate")], np.full((50, 1), 0.05), np.linspace(0, 0.2), 0.2, 5.0
    )

    assert np.abs(found.residual_mol_kg).max() <= 1e-10
    assert 0 < found.iterations <= 20


def test_open_carbonate_holds_its_gas() -> None:
    """``practice``: water in contact with air has pH 5.6."""
    dissolved = 1.4e-5
    found = solve(
        [_ladder("carbonate")],
        [dissolved],
        0.0,
        0.0,
        25.0,
        open_components=["carbonate"],
    )

    assert float(found.ph) == pytest.approx(5.6, abs=0.03)


def test_an_aggregating_component_can_be_open() -> None:
    borate = _ladder("borate")
    found = solve([borate], [0.01], 0.0, 0.0, 25.0, open_components=["borate"])

    assert np.isfinite(found.ph)
