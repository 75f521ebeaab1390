"""What must hold for every mixture the solver accepts."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from mixture_strategies import STEADY, Mix, amounts, known_ladders, mixes

from formbuf.chemistry import batch as batch_module
from formbuf.chemistry.capacity import capacity_mol_kg_ph, finite_capacity
from formbuf.chemistry.equilibrium import Solution, solve
from formbuf.chemistry.ionization import Ladder, pk_at
from formbuf.chemistry.speciation import particles, water_ions
from formbuf.chemistry.titration import (
    STRONG_ACID,
    STRONG_BASE,
    Titrant,
    titrant_for_ph,
)
from formbuf.constants import LN10
from formbuf.errors import ConvergenceError, InputError

BALANCE = 1e-9


def _solve(mix: Mix) -> Solution:
    return solve(*mix.arguments)


@STEADY
@given(mixes())
def test_charge_is_balanced(mix: Mix) -> None:
    solution = _solve(mix)
    found = particles(mix.ladders, mix.totals, mix.temperature_c, solution)
    found += water_ions(solution)
    charge = mix.charge + sum(p.charge * p.molality_mol_kg for p in found)
    squared = mix.charge2 + sum(p.charge**2 * p.molality_mol_kg for p in found)

    assert abs(float(charge)) <= BALANCE
    assert float(solution.ionic_strength_mol_kg) == pytest.approx(
        0.5 * float(squared), rel=1e-9, abs=BALANCE
    )


@STEADY
@given(mixes(least=1))
def test_mass_is_balanced(mix: Mix) -> None:
    solution = _solve(mix)
    found = particles(mix.ladders, mix.totals, mix.temperature_c, solution)
    for ladder, total in zip(mix.ladders, mix.totals, strict=True):
        units = {f"{ladder.name}/{a.name}": a.units for a in ladder.aggregates}
        held = sum(
            units.get(p.component, 1) * float(p.molality_mol_kg)
            for p in found
            if p.component == ladder.name or p.component in units
        )
        assert held == pytest.approx(total, abs=BALANCE)


@STEADY
@given(mixes(), amounts(1e-7, 1.0))
def test_base_never_lowers_ph(mix: Mix, base: float) -> None:
    """Strong base instead of an equally charged salt: titrant at constant salt."""
    before = solve(
        mix.ladders,
        mix.totals,
        mix.charge,
        mix.charge2 + base,
        mix.temperature_c,
        model="ideal",
    )
    after = solve(
        mix.ladders,
        mix.totals,
        mix.charge + base,
        mix.charge2 + base,
        mix.temperature_c,
        model="ideal",
    )

    assert float(after.ph) >= float(before.ph) - 1e-9


@STEADY
@given(
    st.lists(known_ladders(), min_size=1, max_size=2, unique_by=lambda x: x.name),
    st.lists(amounts(1e-3, 0.2), min_size=2, max_size=2),
    st.floats(0.0, 60.0),
)
def test_a_titration_curve_rises(
    ladders: list[Ladder], totals: list[float], temperature_c: float
) -> None:
    """With activity coefficients, at formulation strength, from acid to base."""
    scale = 4.0 * sum(totals[: len(ladders)])
    base = np.linspace(-scale, scale, 81)
    curve = solve(
        ladders,
        np.broadcast_to(totals[: len(ladders)], (81, len(ladders))),
        base,
        0.15 + np.abs(base),
        temperature_c,
    )

    assert np.all(np.diff(curve.ph) > 0.0)


@STEADY
@given(mixes(least=2), st.randoms(use_true_random=False))
def test_the_order_of_components_does_not_matter(mix: Mix, random: object) -> None:
    order = list(range(len(mix.ladders)))
    random.shuffle(order)  # type: ignore[attr-defined]
    there = solve(
        [mix.ladders[k] for k in order],
        [mix.totals[k] for k in order],
        mix.charge,
        mix.charge2,
        mix.temperature_c,
    )
    here = _solve(mix)

    assert float(there.ph) == pytest.approx(float(here.ph), abs=2e-9)
    assert there.variance_mol_kg == pytest.approx(
        here.variance_mol_kg[order], abs=BALANCE
    )


@STEADY
@given(mixes(least=1), st.lists(st.floats(-1.0, 1.0), min_size=1, max_size=12))
def test_a_state_alone_is_the_state_in_a_batch(mix: Mix, shares: list[float]) -> None:
    charge = mix.charge + np.array(shares) * sum(mix.totals)
    charge2 = mix.charge2 + np.abs(charge)
    together = solve(mix.ladders, mix.totals, charge, charge2, mix.temperature_c)
    for k in range(len(shares)):
        alone = solve(mix.ladders, mix.totals, charge[k], charge2[k], mix.temperature_c)
        assert float(alone.ph) == pytest.approx(float(together.ph[k]), abs=2e-9)
        assert float(alone.ionic_strength_mol_kg) == pytest.approx(
            float(together.ionic_strength_mol_kg[k]), rel=1e-9, abs=BALANCE
        )


@STEADY
@given(mixes(least=1), st.floats(0.0, 14.0))
def test_titrant_brings_the_ph_that_was_asked_for(mix: Mix, ph: float) -> None:
    bare = (mix.ladders, mix.totals, mix.charge, mix.charge2, mix.temperature_c)
    up = titrant_for_ph(*bare, ph, STRONG_BASE).amount_mol_kg
    titrant = STRONG_BASE if up >= 0.0 else STRONG_ACID
    amount = float(titrant_for_ph(*bare, ph, titrant).amount_mol_kg)
    reached = solve(
        mix.ladders,
        mix.totals,
        mix.charge + titrant.charge * amount,
        mix.charge2 + titrant.charge2 * amount,
        mix.temperature_c,
    )
    beta = float(capacity_mol_kg_ph(reached))

    assert amount >= 0.0
    assert float(reached.ph) == pytest.approx(ph, abs=1e-8 + 1e-12 / beta)


@STEADY
@given(known_ladders(), amounts(1e-3, 0.2), st.floats(4.5, 9.0), st.floats(0.0, 60.0))
def test_a_weak_titrant_brings_the_ph_too(
    ladder: Ladder, total: float, ph: float, temperature_c: float
) -> None:
    """Sodium with half as much acetic acid, into a solution with too much chloride."""
    acetate = Ladder("weak", 0, (4.756,), (-0.41,), (-142.0,))
    titrant = Titrant(1.0, 1.0, {"weak": 0.5})
    pair, chloride = [ladder, acetate], 4.0 * total
    found = titrant_for_ph(
        pair, [total, 0.0], -chloride, chloride, temperature_c, ph, titrant
    )
    amount = float(found.amount_mol_kg)
    reached = solve(
        pair,
        [total, 0.5 * amount],
        amount - chloride,
        amount + chloride,
        temperature_c,
    )

    assert amount > 0.0
    assert float(reached.ph) == pytest.approx(ph, abs=1e-7)
    assert float(reached.ionic_strength_mol_kg) == pytest.approx(
        float(found.ionic_strength_mol_kg), rel=1e-9, abs=BALANCE
    )


def _slope_at_fixed_activity(mix: Mix, solution: Solution) -> float:
    """Change of the net charge with pH, the ionic strength held [mol/(kg pH)]."""
    batch, _ = batch_module.prepare(*mix.arguments)
    root = np.sqrt(solution.ionic_strength_mol_kg).reshape(1)
    step = 1e-4
    up, down = (
        batch_module.balance(batch, solution.ph.reshape(1) + d, root).charge[0]
        for d in (step, -step)
    )
    return float(down - up) / (2.0 * step)


@STEADY
@given(mixes())
def test_capacity_is_the_slope_at_fixed_activity(mix: Mix) -> None:
    solution = _solve(mix)

    assert float(capacity_mol_kg_ph(solution)) == pytest.approx(
        _slope_at_fixed_activity(mix, solution), rel=1e-5, abs=1e-10
    )


@STEADY
@given(
    st.sampled_from([0.02, 0.08, 0.3, 0.6]), st.floats(0.01, 0.9), st.floats(0.0, 60.0)
)
def test_capacity_with_aggregates_is_the_slope(
    total: float, share: float, temperature_c: float
) -> None:
    borate = next(x for x in _all_known() if x.aggregates)
    mix = Mix((borate,), (total,), share * total, share * total, temperature_c)
    solution = _solve(mix)

    assert float(capacity_mol_kg_ph(solution)) == pytest.approx(
        _slope_at_fixed_activity(mix, solution), rel=1e-5
    )


def _all_known() -> list[Ladder]:
    from reference_tables import library

    from formbuf.product.composition import ladder_of

    return [ladder_of(species) for species in library().species.values()]


@STEADY
@given(mixes(least=1, coldest_c=0.0, hottest_c=60.0), st.floats(0.01, 1.0))
def test_finite_capacity_is_the_integral_of_the_differential_one(
    mix: Mix, width: float
) -> None:
    """Between their least and largest differential capacity over the window."""
    solution = solve(*mix.arguments, model="ideal")
    ph = float(solution.ph)
    if not 1.0 + width < ph < 13.0 - width:
        return
    found = finite_capacity(
        *mix.arguments, solution, ph - width, ph + width, model="ideal"
    )
    grid = np.linspace(ph, ph + width, 60)
    base = titrant_for_ph(
        mix.ladders,
        mix.totals,
        mix.charge,
        mix.charge2,
        mix.temperature_c,
        grid,
        STRONG_BASE,
        model="ideal",
    ).amount_mol_kg

    assert float(found.base_mol_kg) == pytest.approx(float(base[-1]), abs=1e-10)
    assert float(found.base_mol_kg) > 0.0
    assert float(found.acid_mol_kg) > 0.0
    assert float(found.base_mol_kg) >= float(found.base_water_mol_kg) - 1e-12
    assert float(found.acid_mol_kg) >= float(found.acid_water_mol_kg) - 1e-12


EXTREME = st.one_of(
    st.floats(allow_nan=True, allow_infinity=True),
    st.sampled_from([0.0, -0.0, 1e-300, 1e-30, 55.5, 999.0, 1001.0, 1e300, -1.0]),
)


@settings(parent=STEADY, max_examples=300)
@given(known_ladders(), EXTREME, EXTREME, EXTREME, EXTREME)
@example(Ladder("x", 3, (1.0, 2.0), (0.0, 0.0), (0.0, 0.0)), 999.0, 999.0, 999.0, 121.0)
@example(Ladder("x", 0, (4.0,), (0.0,), (0.0,)), 1e-300, 0.0, 0.0, -20.0)
def test_extreme_inputs_solve_or_raise(
    ladder: Ladder, total: float, charge: float, charge2: float, temperature_c: float
) -> None:
    try:
        solution = solve([ladder], [total], charge, charge2, temperature_c)
    except (InputError, ConvergenceError):
        return
    for name in ("ph", "ionic_strength_mol_kg", "hydrogen_mol_kg", "hydroxide_mol_kg"):
        assert np.isfinite(getattr(solution, name)).all()
    assert np.isfinite(solution.variance_mol_kg).all()
    assert np.isfinite(solution.charge_mol_kg).all()
    assert abs(float(solution.residual_mol_kg)) <= BALANCE


@STEADY
@given(known_ladders(), st.floats(-20.0, 121.0))
def test_pk_at_25_c_is_the_pk_of_the_table(
    ladder: Ladder, temperature_c: float
) -> None:
    assert pk_at(ladder, 25.0) == pytest.approx(ladder.pka, abs=1e-12)
    assert np.isfinite(pk_at(ladder, temperature_c)).all()


@STEADY
@given(mixes(least=1))
def test_shares_of_capacity_add_up(mix: Mix) -> None:
    solution = _solve(mix)
    water = solution.hydrogen_mol_kg + solution.hydroxide_mol_kg
    parts = LN10 * (water + solution.variance_mol_kg.sum(axis=-1))

    assert float(capacity_mol_kg_ph(solution)) == pytest.approx(float(parts))
    assert np.all(solution.variance_mol_kg >= -1e-15)
