"""The same states in PHREEQC with our constants: the numerics, and nothing else."""

from __future__ import annotations

import numpy as np
import phreeqc_oracle
import pytest
from reference_tables import library

from formbuf.chemistry import batch as batch_module
from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.equilibrium import solve
from formbuf.chemistry.titration import STRONG_BASE, titrant_for_ph
from formbuf.product.composition import ladder_of

TEMPERATURES_C = (0.0, 5.0, 25.0, 37.0, 50.0)
MIXTURES = 8
STATES = 25
LIMIT_PH = 1e-3


def _draw(rng: np.random.Generator, temperature_c: float) -> phreeqc_oracle.Batch:
    """One to three species, 1 to 100 mmol/kg each, salt, and pH 3 to 10."""
    names = sorted(library().species)
    picked = rng.choice(names, size=rng.integers(1, 4), replace=False)
    ladders = tuple(ladder_of(library().species[name]) for name in picked)
    totals = 10.0 ** rng.uniform(-3.0, -1.0, (STATES, len(ladders)))
    ph = rng.uniform(3.0, 10.0, STATES)
    salt = rng.uniform(0.0, 0.15, STATES)
    base = titrant_for_ph(
        ladders, totals, 0.0, 2.0 * salt, temperature_c, ph, STRONG_BASE
    ).amount_mol_kg
    return phreeqc_oracle.Batch(
        ladders,
        totals,
        salt + np.maximum(base, 0.0),
        salt + np.maximum(-base, 0.0),
        temperature_c,
    )


def _ours(states: phreeqc_oracle.Batch) -> np.ndarray:
    return solve(
        states.ladders,
        states.totals,
        states.sodium - states.chloride,
        states.sodium + states.chloride,
        states.temperature_c,
    ).ph


@pytest.mark.parametrize("temperature_c", TEMPERATURES_C)
def test_random_compositions_agree_with_phreeqc(
    temperature_c: float, monkeypatch: pytest.MonkeyPatch
) -> None:
    rng = np.random.default_rng(int(temperature_c) + 20)
    engine = phreeqc_oracle.start()
    there_c = phreeqc_oracle.matching_temperature_c(engine, temperature_c)
    plain, corrected, unsolved, compared = 0.0, 0.0, 0, 0
    water_at = batch_module._water
    for _ in range(MIXTURES):
        states = _draw(rng, temperature_c)
        found, water = phreeqc_oracle.solve(engine, states, there_c)
        solved = np.isfinite(found)
        unsolved += int(np.count_nonzero(~solved))
        compared += int(np.count_nonzero(solved))
        plain = max(plain, float(np.max(np.abs(found - _ours(states))[solved])))
        activity = np.where(solved, water, 1.0)

        def with_water_activity(
            t: np.ndarray, model: ActivityModel, activity: np.ndarray = activity
        ) -> tuple[np.ndarray, np.ndarray]:
            kw, a_slope = water_at(t, model)
            return kw * activity, a_slope

        monkeypatch.setattr(batch_module, "_water", with_water_activity)
        gap = np.abs(found - _ours(states))[solved]
        monkeypatch.setattr(batch_module, "_water", water_at)
        corrected = max(corrected, float(gap.max()))
    print(
        f"{temperature_c:g} C (PHREEQC at {there_c:.2f} C for the same slope A): "
        f"{compared} states compared, {unsolved} not solved by PHREEQC; largest "
        f"difference {corrected:.1e} pH with its activity of water in Kw, "
        f"{plain:.1e} pH without"
    )

    assert corrected <= LIMIT_PH
    assert compared >= 0.9 * MIXTURES * STATES


def test_slopes_of_the_two_programs_differ_a_little() -> None:
    """Bradley & Pitzer 1979 in PHREEQC, Archer & Wang 1990 here; within 0.0005."""
    engine = phreeqc_oracle.start()
    for t in TEMPERATURES_C:
        theirs, _ = phreeqc_oracle.slopes(engine, t)
        ours = float(batch_module.activity.debye_huckel_slope(t))
        print(f"{t:g} C: A of PHREEQC {theirs:.5f}, ours {ours:.5f}")
        assert theirs == pytest.approx(ours, abs=5e-4)
