"""The work of charging a protein: published w, and what follows from the formulas."""

from __future__ import annotations

import itertools
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from reference_tables import Residual, show
from scipy.optimize import brentq

from formbuf.chemistry import macro_ion
from formbuf.chemistry.equilibrium import PH_HIGH, PH_LOW, solve
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.macro_charge import charge_and_variance
from formbuf.chemistry.macro_ion import Sites, sites_charge
from formbuf.chemistry.macro_work import (
    bjerrum_length_nm,
    hydrated_radius_nm,
    inverse_debye_length_per_nm,
    work_factor,
)
from formbuf.constants import LN10
from formbuf.errors import ConvergenceError, InputError

PKA = (3.67, 4.25, 6.54, 9.84, 10.4, 13.8)
SITES = (
    Sites(56, 0),
    Sites(60, 0),
    Sites(26, 1),
    Sites(58, 0),
    Sites(86, 1),
    Sites(36, 1),
)
TINY = (Sites(1, 0), Sites(1, 0), Sites(1, 1), Sites(1, 0), Sites(1, 1), Sites(1, 1))
HUGE = tuple(Sites(1000 * site.count, site.acid_charge) for site in SITES)
WORKS = (1e-6, 0.003, 0.017, 0.03, 0.1, 1.0, 30.0)


def _ladder(work: float, sites: tuple[Sites, ...] = SITES) -> Ladder:
    heats = (4.0,) * len(PKA)
    return Ladder("protein", 0, PKA, heats, (0.0,) * len(PKA), sites=sites, work=work)


# ------------------------------------------------------------------------ the constant


def test_work_of_ribonuclease() -> None:
    """From its titration: Tanford & Hauenstein 1956, J. Am. Chem. Soc. 78, 5287.

    Recalled (memory).
    """
    radius = hydrated_radius_nm(13_682.0, 0.73)
    published = {0.01: 0.112, 0.03: 0.093, 0.15: 0.061}
    found = {ionic: work_factor(radius, ionic) for ionic in published}
    show(
        "w of ribonuclease",
        [
            Residual(f"I = {i:g}", published[i], found[i], "Tanford 1956", "memory")
            for i in published
        ],
        4,
    )

    for ionic, value in published.items():
        assert found[ionic] == pytest.approx(value, rel=0.1)


def test_lengths_agree_with_the_dielectric_constant() -> None:
    """Water at 25 C has 78.4 (CRC Handbook, memory): l_B = e^2 / (4 pi eps kT)."""
    charge_c, permittivity, energy = 1.602176634e-19, 8.8541878128e-12, 4.11643e-21
    by_hand = 1e9 * charge_c**2 / (4.0 * np.pi * 78.4 * permittivity * energy)

    assert bjerrum_length_nm() == pytest.approx(by_hand, rel=1e-3)
    # 0.304 nm / sqrt(I) is the usual figure of textbooks (memory)
    assert 1.0 / inverse_debye_length_per_nm(0.1) == pytest.approx(0.961, rel=3e-3)


def test_salt_and_size_weaken_the_work() -> None:
    factors = [[work_factor(r, i) for i in (0.0, 0.01, 0.5, 5.0)] for r in (1.0, 4.2)]

    assert np.all(np.diff(factors, axis=1) < 0.0)
    assert np.all(np.diff(factors, axis=0) < 0.0)
    assert np.all(np.asarray(factors) > 0.0)


@pytest.mark.parametrize(
    ("radius_nm", "ionic", "word"),
    [
        (0.0, 0.1, "radius"),
        (-1.0, 0.1, "radius"),
        (float("nan"), 0.1, "radius"),
        (4.0, -0.1, "ionic strength"),
        (4.0, float("inf"), "ionic strength"),
    ],
)
def test_what_cannot_be_meant(radius_nm: float, ionic: float, word: str) -> None:
    with pytest.raises(InputError, match=word):
        work_factor(radius_nm, ionic)


# ------------------------------------------------------------------------- the charge


def test_without_work_the_groups_are_independent() -> None:
    """Bit by bit what the sum over the groups gives."""
    ph = np.linspace(-2.0, 16.0, 361)
    u, constants = 10.0**ph, tuple(np.asarray(10.0**-pk) for pk in PKA)
    charge, variance = np.zeros(ph.shape), np.zeros(ph.shape)
    for site, constant in zip(SITES, constants, strict=True):
        ratio = u * constant
        lost = ratio / (1.0 + ratio)
        charge = charge + site.count * (site.acid_charge - lost)
        variance = variance + site.count * lost / (1.0 + ratio)

    found = sites_charge(SITES, constants, u, 0.0)
    assert np.array_equal(found[0], charge)
    assert np.array_equal(found[1], variance)


@pytest.mark.parametrize("work", WORKS)
@pytest.mark.parametrize("sites", [SITES, TINY, HUGE], ids=["antibody", "tiny", "huge"])
def test_charge_by_another_method(work: float, sites: tuple[Sites, ...]) -> None:
    ladder = _ladder(work, sites)
    factor = 2.0 * work / LN10

    def independent(ph: float) -> float:
        x = np.clip((np.asarray(PKA) - ph) * LN10, -700.0, 700.0)
        lost = 1.0 / (1.0 + np.exp(x))
        return sum(
            s.count * (s.acid_charge - y) for s, y in zip(sites, lost, strict=True)
        )

    most = sum(site.count for site in sites)
    for ph in (-2.0, 0.0, 2.0, 4.3, 5.0, 7.0, 9.0, 12.0, 14.0, 16.0):
        expected = brentq(
            lambda z, ph=ph: z - independent(ph + factor * z),
            -most,
            most,
            xtol=1e-13,
            rtol=1e-14,
        )
        found = float(charge_and_variance(ladder, ph, 25.0)[0])
        assert found == pytest.approx(expected, rel=1e-9, abs=1e-10 * most)


@pytest.mark.parametrize("work", WORKS)
@pytest.mark.parametrize("sites", [SITES, TINY], ids=["antibody", "tiny"])
def test_variance_is_the_slope_of_the_charge(
    work: float, sites: tuple[Sites, ...]
) -> None:
    ladder, ph, step = _ladder(work, sites), np.linspace(-1.0, 15.0, 161), 1e-4
    ends = [charge_and_variance(ladder, ph + d, 25.0)[0] for d in (-step, step)]
    wide = [charge_and_variance(ladder, ph + 2 * d, 25.0)[0] for d in (-step, step)]
    # central differences of fourth order
    slope = (8.0 * (ends[1] - ends[0]) - (wide[1] - wide[0])) / (12.0 * step)

    variance = charge_and_variance(ladder, ph, 25.0)[1]
    assert variance == pytest.approx(-slope / LN10, rel=1e-6, abs=1e-8)


@pytest.mark.parametrize("work", WORKS)
def test_the_isoelectric_point_does_not_move(work: float) -> None:
    isoelectric = brentq(
        lambda ph: float(charge_and_variance(_ladder(0.0), ph, 25.0)[0]), 2.0, 12.0
    )
    grid = np.linspace(0.0, 14.0, 141)
    worked = charge_and_variance(_ladder(work), grid, 25.0)[0]
    alone = charge_and_variance(_ladder(0.0), grid, 25.0)[0]

    at = charge_and_variance(_ladder(work), isoelectric, 25.0)[0]
    assert float(at) == pytest.approx(0.0, abs=1e-9)
    assert np.all(np.sign(worked) == np.sign(alone))
    assert np.all(np.abs(worked) <= np.abs(alone) * (1.0 + 1e-12))


@given(
    st.lists(st.floats(0.01, 500.0), min_size=6, max_size=6),
    st.floats(1e-9, 1000.0),
    st.floats(-5.0, 5.0),
)
@settings(max_examples=150, deadline=None)
def test_charge_never_rises_and_stays_between_its_ends(
    counts: list[float], work: float, shift: float
) -> None:
    sites = tuple(Sites(n, s.acid_charge) for n, s in zip(counts, SITES, strict=True))
    constants = tuple(np.asarray(10.0 ** (shift - pk)) for pk in PKA)
    charge, variance = sites_charge(
        sites, constants, 10.0 ** np.linspace(-2.0, 16.0, 181), work
    )
    total = sum(counts)

    assert np.all(np.isfinite(charge))
    assert np.all(variance >= 0.0)
    assert np.all(np.diff(charge) <= 1e-10 * total)
    assert charge.min() >= macro_ion.lowest_charge(sites, None) - 1e-9 * total
    assert charge.max() <= sum(s.count * s.acid_charge for s in sites) + 1e-9 * total


def test_shapes_and_constants_per_state() -> None:
    """As draws use it: one constant per state, any shape of pH."""
    ladder = _ladder(0.03)
    constants = tuple(10.0 ** -(pk + np.array([-0.3, 0.0, 0.3])) for pk in PKA)
    together = sites_charge(SITES, constants, np.full(3, 1e5), ladder.work)[0]
    single = [
        float(
            sites_charge(
                SITES, tuple(k[i] for k in constants), np.asarray(1e5), ladder.work
            )[0]
        )
        for i in range(3)
    ]

    assert together.tolist() == pytest.approx(single, rel=1e-12)
    assert charge_and_variance(ladder, np.full((2, 3), 5.0), 25.0)[0].shape == (2, 3)


def test_what_does_not_converge_says_so(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(macro_ion, "WORK_CAP", 1)

    with pytest.raises(
        ConvergenceError, match="322 groups did not converge in 1 steps"
    ):
        charge_and_variance(_ladder(1.0), 2.0, 25.0)


# ------------------------------------------------------------------------ in mixtures


@pytest.mark.parametrize(
    ("work", "sites", "total"),
    [
        (work, sites, total)
        for work, (sites, most) in itertools.product(
            (0.017, 0.3, 30.0), ((SITES, 2e-3), (TINY, 0.1), (HUGE, 2e-6))
        )
        for total in (1e-9, most)
    ],
)
def test_the_solver_holds_with_extreme_macro_ions(
    work: float, sites: tuple[Sites, ...], total: float
) -> None:
    ladder = _ladder(work, sites)
    acid = np.array([-0.3, -0.01, -1e-4, 0.0, 1e-4, 0.01, 0.3])
    found = solve((ladder,), np.full((7, 1), total), acid, np.abs(acid), 25.0)

    assert np.all(np.diff(found.ph) > 0.0)
    assert found.ph.min() > PH_LOW
    assert found.ph.max() < PH_HIGH
    assert np.max(np.abs(found.residual_mol_kg)) < 1e-9
    charge = charge_and_variance(ladder, found.ph, 25.0)[0]
    assert found.charge_mol_kg[:, 0] == pytest.approx(total * charge, abs=1e-9)


def test_quadratic_convergence_is_kept() -> None:
    """The derivative that Newton's method uses is that of the charge with its work."""
    acetate = Ladder("acetate", 0, (4.756,), (-0.41,), (-142.0,))
    acid = np.linspace(-0.05, 0.02, 300)
    totals = np.tile([0.01, 1e-3], (300, 1))
    steps = [
        solve((acetate, _ladder(w)), totals, acid, np.abs(acid), 25.0).iterations
        for w in (0.0, 0.017, 0.05)
    ]

    assert max(steps[1:]) <= steps[0] + 1


def test_a_ladder_with_work_is_another_ladder() -> None:
    """Caches tell them apart."""
    assert hash(_ladder(0.1)) != hash(_ladder(0.2))
    assert replace(_ladder(0.1), work=0.2) == _ladder(0.2)
