"""Ladders: pK at temperatures, slopes, fractions, aggregates."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry.ionization import (
    Ladder,
    log10_aggregate_constants,
    pk_at,
    pk_shift,
    pk_slope_per_k,
    state_fractions,
)
from formbuf.product.composition import ladder_of

TRIS = Ladder("tris", 1, (8.072,), (47.45,), (-59.0,))


def test_pk_shift_is_the_integral_of_the_enthalpy() -> None:
    """The van 't Hoff equation, integrated by small steps."""
    kelvin = np.linspace(298.15, 278.15, 20001)
    heat = 47450.0 - 59.0 * (kelvin - 298.15)
    slope = -heat / (np.log(10.0) * 8.31446261815324 * kelvin**2)
    integral = np.trapezoid(slope, kelvin)

    assert float(pk_shift(47.45, -59.0, 5.0)) == pytest.approx(integral, abs=1e-8)


def test_pk_of_tris() -> None:
    """Bates & Hetzer 1961: 8.6774 at 5 C, 7.4365 at 50 C."""
    assert pk_at(TRIS, [5.0, 50.0])[:, 0] == pytest.approx([8.6774, 7.4365], abs=0.006)


def test_shapes_follow_the_temperatures() -> None:
    two = Ladder("x", 0, (4.0, 6.0), (1.0, 2.0), (0.0, 0.0))

    assert pk_at(two, 25.0).shape == (2,)
    assert pk_at(two, np.zeros((3, 4))).shape == (3, 4, 2)


def test_a_missing_enthalpy_keeps_the_pk_and_says_so() -> None:
    unknown = Ladder("x", 0, (3.92,), (float("nan"),), (0.0,))

    assert float(pk_at(unknown, 60.0)[0]) == 3.92
    assert unknown.has_unknown_enthalpy
    assert not TRIS.has_unknown_enthalpy
    assert np.isnan(pk_slope_per_k(unknown)[0])


def test_slope_is_the_derivative() -> None:
    step = 1e-3
    for t in (5.0, 25.0, 40.0):
        up, down = pk_at(TRIS, t + step)[0], pk_at(TRIS, t - step)[0]
        assert float(pk_slope_per_k(TRIS, t)[0]) == pytest.approx(
            (up - down) / (2.0 * step), rel=1e-6
        )


def test_slope_of_tris() -> None:
    """-0.028 per kelvin (Good 1966; Bates)."""
    assert float(pk_slope_per_k(TRIS)[0]) == pytest.approx(-0.0279, abs=5e-5)


def test_half_is_ionised_at_the_pk() -> None:
    fractions = state_fractions(TRIS, 8.072, 25.0, 0.0)

    assert fractions == pytest.approx([0.5, 0.5])


def test_fractions_of_overlapping_steps_by_hand() -> None:
    citrate = Ladder("citrate", 0, (3.128, 4.761, 6.396), (0.0,) * 3, (0.0,) * 3)
    h, k1, k2, k3 = 1e-5, 10**-3.128, 10**-4.761, 10**-6.396
    parts = np.array([h**3, k1 * h**2, k1 * k2 * h, k1 * k2 * k3])

    assert state_fractions(citrate, 5.0, 25.0, 0.0) == pytest.approx(
        parts / parts.sum()
    )


def test_ionic_strength_moves_each_step_by_its_charges() -> None:
    """pK' = pK + (2 z - 1) D for the step of an acid of charge z."""
    d = 0.1
    for z in (1, 0, -1, -2):
        one = Ladder("x", z, (6.0,), (0.0,), (0.0,))
        at = 6.0 + (2 * z - 1) * d
        assert state_fractions(one, at, 25.0, d) == pytest.approx([0.5, 0.5])


def test_fractions_far_away_do_not_overflow() -> None:
    edta = ladder_of(library().species["edta"])
    fractions = state_fractions(edta, [-5.0, 30.0], 25.0, 0.3)

    assert np.isfinite(fractions).all()
    assert fractions.sum(axis=-1) == pytest.approx([1.0, 1.0])


def test_charges_run_down_the_ladder() -> None:
    assert ladder_of(library().species["histidine"]).charges == (2, 1, 0, -1)
    assert ladder_of(library().species["sulfate"]).charges == (-1, -2)


def test_aggregate_constants_are_published_at_25_c() -> None:
    """Felmy & Weare 1986: -7.528 for the triborate, -16.134 for the tetraborate."""
    borate = ladder_of(library().species["borate"])
    named = dict(
        zip(
            [a.name for a in borate.aggregates],
            log10_aggregate_constants(borate, 25.0),
            strict=True,
        )
    )

    assert named["triborate"] == pytest.approx(-7.528)
    assert named["tetraborate"] == pytest.approx(-16.134)


def test_aggregates_that_release_no_proton_do_not_move_with_temperature() -> None:
    """The constant moves with the first pK, once per proton released."""
    borate = ladder_of(library().species["borate"])
    move = pk_at(borate, 5.0)[0] - borate.pka[0]
    shift = log10_aggregate_constants(borate, 5.0) - log10_aggregate_constants(
        borate, 25.0
    )

    assert shift == pytest.approx([a.charge * move for a in borate.aggregates])
    assert log10_aggregate_constants(borate, np.zeros((4, 2))).shape == (4, 2, 2)


def test_steps_may_come_as_lists() -> None:
    listed = Ladder("x", 0, [4.7], [1.0], [0.0])  # type: ignore[arg-type]
    assert listed == Ladder("x", 0, (4.7,), (1.0,), (0.0,))
    assert pk_at(listed, 25.0).tolist() == [4.7]
