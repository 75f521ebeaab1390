"""The activity model and its osmotic part."""

from __future__ import annotations

import numpy as np
import pytest

from formbuf.chemistry import activity
from formbuf.chemistry.water import debye_huckel_slope


def test_gamma_of_chloride_by_the_convention() -> None:
    """Bates & Guggenheim 1960 at I = 0.1, 25 C: log gamma = -0.1094 with A = 0.5100."""
    found = float(activity.log10_gamma(-1, 0.1, 25.0))

    assert found == pytest.approx(-0.51005 * 0.1**0.5 / (1 + 1.5 * 0.1**0.5), abs=1e-6)
    assert found == pytest.approx(-0.1094, abs=1e-4)


def test_gamma_grows_with_the_square_of_the_charge() -> None:
    found = activity.log10_gamma([0, 1, 2, -3], 0.05, 25.0)

    assert found == pytest.approx(found[1] * np.array([0.0, 1.0, 4.0, 9.0]))


def test_limiting_law() -> None:
    found = float(activity.log10_gamma(1, 1e-8, 25.0))

    assert found == pytest.approx(-float(debye_huckel_slope(25.0)) * 1e-4, rel=1e-3)


def test_the_ideal_model_has_no_slope() -> None:
    assert np.all(activity.slope([5.0, 25.0], "ideal") == 0.0)
    assert activity.slope(25.0, "guggenheim") == debye_huckel_slope(25.0)


def test_osmotic_part_obeys_gibbs_and_duhem() -> None:
    """For a 1-1 salt: d[m (1 - phi)] = -m d ln gamma."""
    a_slope = float(debye_huckel_slope(25.0))
    m = np.linspace(1e-6, 0.5, 200001)
    ln_gamma = np.log(10.0) * activity.log10_gamma(1, m, 25.0)
    lost = -2.0 * np.trapezoid(m, ln_gamma)

    found = activity.osmotic_debye_huckel(a_slope, [m[0], m[-1]])
    assert float(found[1] - found[0]) == pytest.approx(float(lost), rel=1e-5)


def test_osmotic_part_of_dilute_sodium_chloride() -> None:
    """Robinson & Stokes 1959, App. 8: phi of 0.1 mol/kg is 0.932."""
    lost = float(activity.osmotic_debye_huckel(debye_huckel_slope(25.0), 0.1))

    assert 1.0 - lost / 0.2 == pytest.approx(0.932, abs=0.002)


def test_osmotic_part_is_zero_without_ions() -> None:
    assert float(activity.osmotic_debye_huckel(0.51, 0.0)) == 0.0
