"""Freezing against independent calculations and recalled brines.

Phase points, freezing points and measured frozen pH are compared in `test_published`.
"""

from __future__ import annotations

import pytest
from freezing_support import path


@pytest.mark.parametrize(
    ("temperature_c", "earlier"),
    # an independent calculation from the same published parameters and solubilities
    [(-0.6, 7.14), (-2.0, 5.44), (-5.0, 4.48), (-10.0, 3.8)],
)
def test_crystallising_path_against_an_independent_calculation(
    temperature_c: float, earlier: float
) -> None:
    run = path({"phosphate": 0.05}, 7.4, [temperature_c])
    point = run.metastable[0] if run.metastable else run.points[0]
    assert point.ph is not None
    print(f"{temperature_c} C: pH {point.ph:.3f}, earlier {earlier}")

    assert point.ph == pytest.approx(earlier, abs=0.05)


@pytest.mark.parametrize(
    ("temperature_c", "earlier"),
    [(0.0, 7.53), (-2.0, 7.26), (-5.0, 7.04), (-10.0, 6.94)],
)
def test_supersaturated_path_against_an_independent_calculation(
    temperature_c: float, earlier: float
) -> None:
    run = path({"phosphate": 0.1}, 7.4, [temperature_c], assumption="supersaturated")
    ph = run.points[0].ph
    assert ph is not None
    print(f"{temperature_c} C: pH {ph:.3f}, earlier {earlier}")

    assert ph == pytest.approx(earlier, abs=0.03)


@pytest.mark.parametrize(
    ("temperature_c", "earlier"),
    [(-3.0, 6.79), (-5.0, 6.19), (-10.0, 5.36), (-15.0, 4.86), (-20.0, 4.48)],
)
def test_saline_phosphate_against_an_independent_calculation(
    temperature_c: float, earlier: float
) -> None:
    # 10 mmol/kg phosphate with 150 mmol/kg sodium chloride, pH 7.4
    amounts = {"phosphate": 0.01, "sodium": 0.15, "chloride": 0.15}
    ph = path(amounts, 7.4, [temperature_c]).points[0].ph
    assert ph is not None
    print(f"{temperature_c} C: pH {ph:.3f}, earlier {earlier}")

    assert ph == pytest.approx(earlier, abs=0.06)


@pytest.mark.parametrize(
    ("percent", "published", "allowed_k"),
    # CRC Handbook, memory (10, 15 and 20 % lie beyond the table read)
    [(5, 3.05, 0.05), (10, 6.56, 0.2), (15, 10.89, 0.2), (20, 16.46, 0.3)],
)
def test_sodium_chloride_brines(
    percent: float, published: float, allowed_k: float
) -> None:
    m = 1000.0 * percent / (100.0 - percent) / 58.44
    run = path({"sodium": m, "chloride": m}, None, [-18.0], assumption="supersaturated")
    ice = run.event("first ice")
    assert ice is not None
    print(f"{percent} % NaCl: published {published}, found {-ice.temperature_c:.2f} K")

    assert -ice.temperature_c == pytest.approx(published, abs=allowed_k)
