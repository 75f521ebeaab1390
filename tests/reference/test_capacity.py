"""Worked examples of textbooks, by an ideal solution as they take it; NBS values."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import (
    Check,
    Residual,
    checks,
    mixture_of,
    select,
    show,
    sources,
    temperature_c,
)

from formbuf.chemistry.capacity import SINGLE_STEP_MAXIMUM, capacity_mol_kg_ph
from formbuf.chemistry.equilibrium import Solution, solve
from formbuf.chemistry.ionization import Ladder, state_fractions
from formbuf.chemistry.titration import Titrant, titrant_for_ph

TABLE = "capacity.csv"
SODIUM_ACETATE_G_MOL = 82.034


def _acid(pka: float) -> Ladder:
    return Ladder("acetate", 0, (pka,), (0.0,), (0.0,))


def _mix(pka: float, acid: float, salt: float, base: float = 0.0) -> Solution:
    """Ideal solution of an acid, its sodium salt and strong base or acid [mol/L]."""
    charge2 = salt + abs(base)
    total = [[acid + salt]]
    charge = [salt + base]
    return solve([_acid(pka)], total, charge, [charge2], 25.0, model="ideal")


def _check(key: str) -> Check:
    (row,) = select(TABLE, id=key)
    return row


def _compare(key: str, found: float, allowed: float, digits: int = 3) -> None:
    row = _check(key)
    residual = Residual(
        f"{row['case']}: {row['quantity']}",
        float(row["value"]),
        found,
        sources(row),
        row["status"],
    )
    show("worked example", [residual], digits)

    assert abs(residual.miss) <= allowed


def test_largest_capacity_of_one_step() -> None:
    solution = _mix(4.76, 0.5, 0.5)
    share = float(solution.variance_mol_kg[0, 0]) * np.log(10.0)

    _compare("capacity_0001", SINGLE_STEP_MAXIMUM, 0.0005)
    assert share == pytest.approx(SINGLE_STEP_MAXIMUM, rel=1e-6)


def test_ratio_of_salt_to_acid() -> None:
    """Florence & Attwood, example 3.9: acetic acid of pKa 4.76 at pH 5.2."""
    acid, salt = state_fractions(_acid(4.76), 5.2, 25.0, 0.0)

    _compare("capacity_0002", salt / acid, 0.0005)


def test_mass_of_salt() -> None:
    """Example 3.9: sodium acetate for 100 mL of 0.1 mol/L acetic acid at pH 5.2."""
    salt = Titrant(1.0, 1.0, {"acetate": 1.0})
    found = titrant_for_ph(
        [_acid(4.76)], [[0.1]], 0.0, 0.0, 25.0, [5.2], salt, model="ideal"
    )

    grams = 0.1 * float(found.amount_mol_kg[0]) * SODIUM_ACETATE_G_MOL
    _compare("capacity_0003", grams, 0.002)


def test_change_of_ph_by_base() -> None:
    """Example 3.10: 0.001 mol of sodium hydroxide to the buffer of example 3.9."""
    before = _mix(4.76, 0.1, 0.2754)
    after = _mix(4.76, 0.1, 0.2754, 0.01)

    _compare("capacity_0004", float((after.ph - before.ph)[0]), 0.005)


def test_van_slyke_equation() -> None:
    """Martin: 0.20 mol/L acetate where [H3O+] = Ka = 1.75e-5."""
    pka = -np.log10(1.75e-5)
    solution = _mix(pka, 0.1, 0.1)

    _compare("capacity_0005", float(capacity_mol_kg_ph(solution)[0]), 0.0005, 4)


def test_concentration_for_a_capacity() -> None:
    """Martin: 0.02 mol/(L pH) at pH 5.00 of an acid with Ka 1.75e-5."""
    ladder = _acid(-np.log10(1.75e-5))
    acid, salt = state_fractions(ladder, 5.0, 25.0, 0.0)

    _compare("capacity_0006", 0.02 / (np.log(10.0) * acid * salt), 0.00005, 4)


def test_water_against_a_little_acid() -> None:
    """Martin: 1 mL of 0.1 mol/L hydrochloric acid in 100 mL of water."""
    charge = np.array([0.0, -0.1 / 101.0])
    ph = solve([], np.zeros((2, 0)), charge, abs(charge), 25.0, model="ideal").ph

    _compare("capacity_0007", float(ph[0] - ph[1]), 0.05)


def test_buffer_against_the_same_acid() -> None:
    """Martin: the same acid in 0.01 mol/L acetic acid and sodium acetate."""
    before, after = (_mix(4.76, 0.01, 0.01, base) for base in (0.0, -0.001))

    _compare("capacity_0008", float((after.ph - before.ph)[0]), 0.005)


def test_learning_page() -> None:
    _compare("capacity_0009", float(_mix(4.75, 1.6, 0.4).ph[0]), 0.005)
    _compare("capacity_0010", float(_mix(4.75, 1.6, 0.4, 0.1).ph[0]), 0.005)


def _betas(rows: list[Check], factor: float) -> list[Residual]:
    found = []
    for row in rows:
        mixed = mixture_of(row)
        solution = mixed.solve(temperature_c(row))
        beta = float(capacity_mol_kg_ph(solution)) * float(mixed.water_kg_l) * factor
        found.append(
            Residual(
                f"{row['case']}: {row['system']}",
                float(row["value"]),
                beta,
                sources(row),
                row["status"],
            )
        )
    return found


def test_nbs_buffer_values_are_printed_beside_ours() -> None:
    """The tetroxalate figure lies a third below its composition's; the rest near."""
    rows = select(TABLE, case="NBS standard buffer value")
    residuals = _betas(rows, 1.0)
    show("NBS buffer values, mol/(kg pH) (report)", residuals, 4)

    assert len(residuals) == 8


def test_simulated_intestinal_fluids_are_printed_beside_ours() -> None:
    """Recalled, and without their bile salts: report."""
    rows = [r for r in checks(TABLE) if r["case"] in ("FaSSIF", "FeSSIF")]
    residuals = _betas(rows, 1000.0)
    show("capacity of simulated fluids, mmol/(L pH) (report)", residuals, 1)

    assert len(residuals) == 2
