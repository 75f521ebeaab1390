"""Formulas of materials: atoms, masses, and what cannot be read."""

from __future__ import annotations

import pytest

from formbuf.library.formulas import count_atoms, molar_mass_g_mol


@pytest.mark.parametrize(
    ("formula", "atoms"),
    [
        ("NaCl", {"Na": 1, "Cl": 1}),
        ("(NH4)2SO4", {"N": 2, "H": 8, "S": 1, "O": 4}),
        ("Na2C6H6O7·1.5H2O", {"Na": 2, "C": 6, "H": 9, "O": 8.5}),
        ("Ca(C6H11O7)2·H2O", {"Ca": 1, "C": 12, "H": 24, "O": 15}),
        ("C6H9N3O2·HCl·H2O", {"C": 6, "H": 12, "N": 3, "O": 3, "Cl": 1}),
    ],
)
def test_atoms_are_counted(formula: str, atoms: dict[str, float]) -> None:
    assert count_atoms(formula) == atoms


@pytest.mark.parametrize(
    ("formula", "mass"),
    [
        # sums of the abridged standard atomic weights, IUPAC 2021
        ("H2O", 18.015),
        ("NaCl", 58.440),
        ("Na2HPO4·7H2O", 268.063),
        ("C4H11NO3", 121.136),
    ],
)
def test_molar_mass_is_the_sum_of_the_weights(formula: str, mass: float) -> None:
    assert molar_mass_g_mol(formula) == pytest.approx(mass, abs=5e-4)


@pytest.mark.parametrize(
    ("formula", "words"),
    [
        ("", "does not begin with an element"),
        ("na", "does not begin with an element"),
        ("NaXx", "'Xx' in 'NaXx' is no known element"),
        ("Na(Cl", "never closed"),
        ("NaCl)2", "never opened"),
        ("Na-Cl", "'-' in 'Na-Cl' is no part of a formula"),
        ("NaCl·", "does not begin with an element"),
    ],
)
def test_what_cannot_be_read_is_named(formula: str, words: str) -> None:
    with pytest.raises(ValueError, match=r".") as caught:
        count_atoms(formula)

    assert words in str(caught.value)
