"""The inverse problem at known points and its refusals."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry import titration
from formbuf.chemistry.equilibrium import solve
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.titration import (
    STRONG_ACID,
    STRONG_BASE,
    Titrant,
    titrant_for_ph,
)
from formbuf.errors import ConvergenceError, InputError
from formbuf.product.composition import ladder_of


def _ladder(name: str) -> Ladder:
    return ladder_of(library().species[name])


def test_half_the_acid_is_neutralised_at_the_pk() -> None:
    acetate = Ladder("acetate", 0, (4.76,), (0.0,), (0.0,))
    found = titrant_for_ph(
        [acetate], [0.1], 0.0, 0.0, 25.0, 4.76, STRONG_BASE, model="ideal"
    )

    assert float(found.amount_mol_kg) == pytest.approx(0.05 - 10**-4.76, rel=1e-6)
    assert float(found.charge_mol_kg[0]) == pytest.approx(-0.05, rel=1e-6)


def test_acid_and_base_of_a_window() -> None:
    phosphate = [_ladder("phosphate")]
    base = titrant_for_ph(phosphate, [0.02], 0.03, 0.03, 25.0, 7.4, STRONG_BASE)
    acid = titrant_for_ph(phosphate, [0.02], 0.03, 0.03, 25.0, 6.4, STRONG_ACID)

    assert float(base.amount_mol_kg) > 0.0
    assert float(acid.amount_mol_kg) > 0.0
    back = solve(
        phosphate,
        [0.02],
        0.03 - acid.amount_mol_kg,
        0.03 + acid.amount_mol_kg,
        25.0,
    )
    assert float(back.ph) == pytest.approx(6.4, abs=1e-8)
    assert float(back.ionic_strength_mol_kg) == pytest.approx(
        float(acid.ionic_strength_mol_kg), abs=1e-9
    )


def test_exchange_of_one_form_for_the_other() -> None:
    """Disodium for monosodium phosphate: charge +1 per mole exchanged, none added."""
    exchange = Titrant(1.0, 1.0, {"phosphate": 0.0})
    found = titrant_for_ph(
        [_ladder("phosphate")], [0.05], 0.05, 0.05, 25.0, 7.0, exchange
    )

    assert 0.0 < float(found.amount_mol_kg) < 0.05


def test_many_ph_values_at_once() -> None:
    grid = np.linspace(3.0, 10.0, 15)
    found = titrant_for_ph(
        [_ladder("citrate")], [0.02], 0.0, 0.1, 25.0, grid, STRONG_BASE
    )

    assert found.amount_mol_kg.shape == (15,)
    assert np.all(np.diff(found.amount_mol_kg) > 0.0)


def test_a_solution_without_any_ion_starts_too() -> None:
    found = titrant_for_ph([], np.zeros(0), 0.0, 0.0, 25.0, 7.0, STRONG_BASE)

    assert float(found.amount_mol_kg) == pytest.approx(1e-9, abs=3e-9)


def test_taking_away_more_than_there_is_does_not_divide_by_zero() -> None:
    """A base asked to lower the pH comes out negative, with no ionic strength left."""
    found = titrant_for_ph(
        [_ladder("acetate")], [0.0], 0.0, 0.0, 25.0, 6.0, STRONG_BASE
    )

    assert float(found.amount_mol_kg) < 0.0
    assert np.isfinite(found.ionic_strength_mol_kg)


@pytest.mark.parametrize(
    ("titrant", "ph", "said"),
    [
        (Titrant(0.0, 0.0, {}), 7.0, "does not change the charge"),
        (Titrant(0.0, 0.0, {"tris": 1.0}), 7.0, "does not list"),
        (Titrant(0.0, 0.0, {"borate": 1.0}), 7.0, "aggregates"),
        (STRONG_BASE, 17.0, "between -2 and 16"),
        (STRONG_BASE, float("nan"), "between -2 and 16"),
    ],
)
def test_refusals(titrant: Titrant, ph: float, said: str) -> None:
    with pytest.raises(InputError, match=said):
        titrant_for_ph([_ladder("borate")], [0.1], 0.0, 0.1, 25.0, ph, titrant)


def test_an_open_component_cannot_be_a_titrant() -> None:
    with pytest.raises(InputError, match="open"):
        titrant_for_ph(
            [_ladder("carbonate")],
            [1e-5],
            0.0,
            0.1,
            25.0,
            7.0,
            Titrant(1.0, 1.0, {"carbonate": 1.0}),
            open_components=["carbonate"],
        )


def test_no_convergence_is_an_error(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(titration, "ITERATION_CAP", 1)
    with pytest.raises(ConvergenceError, match="did not settle in 1 steps"):
        titrant_for_ph([_ladder("citrate")], [0.1], 0.0, 0.0, 25.0, 6.0, STRONG_BASE)
