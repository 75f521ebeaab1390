"""Sums over the states of one component."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry import moments
from formbuf.chemistry.batch import prepare
from formbuf.chemistry.ionization import Aggregate, Ladder, state_fractions
from formbuf.errors import ConvergenceError
from formbuf.product.composition import ladder_of

CITRATE = Ladder("citrate", 0, (3.128, 4.761, 6.396), (0.0,) * 3, (0.0,) * 3)


def _sums(ladder: Ladder, amount: float, ph: float, d: float = 0.1) -> moments.Sums:
    batch, _ = prepare([ladder], [amount], 0.0, 0.0, 25.0)
    u, g = np.array([10.0**ph]), np.array([10.0**d])
    ratios = moments.step_ratios(u, g, [ladder])
    return moments.component_sums(batch.equilibria[0], np.array([amount]), u, g, ratios)


@pytest.mark.parametrize("name", ["citrate", "histidine", "edta", "sulfate", "tris"])
@pytest.mark.parametrize("ph", [1.0, 5.0, 9.0])
def test_sums_are_moments_of_the_charge(name: str, ph: float) -> None:
    ladder = ladder_of(library().species[name])
    amount = 0.02
    m = amount * state_fractions(ladder, ph, 25.0, 0.1)
    z = np.array(ladder.charges, dtype=float)
    found = _sums(ladder, amount, ph)

    def mean(values: np.ndarray) -> float:
        return float((m * values).sum() / amount)

    assert found.charge[0] == pytest.approx((m * z).sum())
    assert found.charge2[0] == pytest.approx((m * z**2).sum())
    assert found.held[0] == pytest.approx((m * (z - z[-1])).sum())
    assert found.var[0] == pytest.approx(amount * (mean(z**2) - mean(z) ** 2))
    assert found.cov[0] == pytest.approx(amount * (mean(z**3) - mean(z) * mean(z**2)))
    assert found.var2[0] == pytest.approx(amount * (mean(z**4) - mean(z**2) ** 2))


def test_an_open_component_grows_with_its_weights() -> None:
    carbonate = ladder_of(library().species["carbonate"])
    batch, _ = prepare(
        [carbonate], [1e-5], 0.0, 0.0, 25.0, open_components=["carbonate"]
    )
    u, g = np.array([1e8]), np.array([1.0])
    ratios = moments.step_ratios(u, g, [carbonate])
    found = moments.component_sums(batch.equilibria[0], np.array([1e-5]), u, g, ratios)
    bicarbonate = 1e-5 * 10.0 ** (8.0 - carbonate.pka[0])
    carbonate_ion = bicarbonate * 10.0 ** (8.0 - carbonate.pka[1])

    assert found.charge[0] == pytest.approx(-bicarbonate - 2.0 * carbonate_ion)
    assert found.var[0] == pytest.approx(bicarbonate + 4.0 * carbonate_ion)


def test_free_monomer_meets_the_mass_balance() -> None:
    borate = ladder_of(library().species["borate"])
    total = np.array([1e-6, 0.03, 0.3, 1.0])
    batch, _ = prepare([borate], total[:, None], 0.0, 0.0, 25.0)
    u, g = np.full(4, 10.0**8.5), np.full(4, 10.0**0.1)
    eq = batch.equilibria[0]
    weights = moments.state_weights(eq, moments.step_ratios(u, g, [borate]))
    free, parts = moments.free_monomer(eq, total, u, g, weights)
    held = free * weights.sum(axis=0)
    for a, part in zip(borate.aggregates, parts, strict=True):
        held = held + a.units * part

    assert held == pytest.approx(total, rel=1e-12)
    assert free[0] * weights.sum(axis=0)[0] == pytest.approx(1e-6, rel=1e-4)


def test_variance_with_aggregates_is_the_slope_of_charge() -> None:
    borate = ladder_of(library().species["borate"])
    step = 1e-5
    up, down = (_sums(borate, 0.3, 7.5 + s).charge[0] for s in (step, -step))

    assert _sums(borate, 0.3, 7.5).var[0] == pytest.approx(
        (down - up) / (2.0 * step) / np.log(10.0), rel=1e-6
    )


def test_covariances_are_the_slopes_by_the_activity_term() -> None:
    """d(charge)/d ln g and d(sum z^2 m)/d ln g, for states and aggregates alike."""
    borate = ladder_of(library().species["borate"])
    step = 1e-5
    for ladder, ph in ((CITRATE, 5.5), (borate, 8.0)):
        at = _sums(ladder, 0.1, ph)
        up, down = (_sums(ladder, 0.1, ph, 0.1 + s) for s in (step, -step))
        width = 2.0 * step * np.log(10.0)
        assert at.cov[0] == pytest.approx(
            (up.charge[0] - down.charge[0]) / width, rel=1e-5
        )
        assert at.var2[0] == pytest.approx(
            (up.charge2[0] - down.charge2[0]) / width, rel=1e-5
        )


def test_ratios_cover_every_step() -> None:
    mixed = [
        Ladder("a", 3, (1.0, 2.0), (0.0,) * 2, (0.0,) * 2),
        Ladder("b", -2, (5.0,), (0.0,), (0.0,)),
    ]
    u, g = np.array([2.0]), np.array([1.1])
    ratios = moments.step_ratios(u, g, mixed)

    assert set(ratios) == {3, 2, -2}
    for z, ratio in ratios.items():
        assert ratio[0] == pytest.approx(2.0 * 1.1 ** (1 - 2 * z))
    assert moments.step_ratios(u, g, []) == {}


def test_least_charge_counts_aggregates() -> None:
    plain = Ladder("x", 0, (9.0,), (0.0,), (0.0,))
    heavy = Ladder("x", 0, (9.0,), (0.0,), (0.0,), (Aggregate("y", 2, -4, -20.0),))

    assert moments.least_charge(plain) == -1.0
    assert moments.least_charge(heavy) == -2.0


def test_a_monomer_that_does_not_settle_is_an_error(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    monkeypatch.setattr(moments, "MONOMER_CAP", 1)
    with pytest.raises(ConvergenceError, match="borate"):
        _sums(ladder_of(library().species["borate"]), 0.5, 9.0)
