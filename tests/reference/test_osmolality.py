"""Osmolality: saline, and the expected errors that results are given with.

The held rows of published freezing points are compared in `test_published`.
"""

from __future__ import annotations

import numpy as np
import pytest
from osmotic_data import NOTHING, points
from reference_tables import library

from formbuf.chemistry.osmolality import (
    EXPECTED_ERROR_FITTED,
    EXPECTED_ERROR_UNFITTED,
    UNFITTED_PAIR_KG_MOL,
    OsmoticLaw,
)
from formbuf.product.composition import mixture
from formbuf.product.osmotics import osmotic_law


def _law() -> OsmoticLaw:
    return osmotic_law(library())


def test_saline_reads_what_osmometers_read() -> None:
    """0.9 % sodium chloride: 286 mosmol/kg (Zander), 308 mosmol/L as labelled."""
    mixed = mixture(library(), {"sodium_chloride": 9000.0 / 58.44})
    found = mixed.osmolality(0.0, mixed.solve(0.0), _law())

    assert float(found.osmolality_mosm_kg) == pytest.approx(286.0, abs=3.0)
    assert found.unfitted_pairs == ()


def test_expected_errors_are_those_of_the_held_rows() -> None:
    law = _law()
    rows = [
        p
        for p in points(quantity="freezing_point_depression")
        if not p.is_fitted
        and 0.1 <= p.observed_osmol_kg <= 0.6
        and p.substance != "Maltose"
    ]
    fitted = np.array([p.osmolality(law) / p.observed_osmol_kg - 1.0 for p in rows])
    salts = [p for p in rows if any(q.charge for q in p.particles)]
    bare = np.array([p.osmolality(NOTHING) / p.observed_osmol_kg - 1.0 for p in salts])
    fitted_rms, bare_rms = (float(np.sqrt(np.mean(x**2))) for x in (fitted, bare))
    pair_rms = float(np.sqrt(np.mean(np.square(list(law.pairs.values())))))
    print(
        f"{len(rows)} held rows: rms {fitted_rms:.4f}; no coefficients {bare_rms:.4f}"
    )

    assert fitted_rms == pytest.approx(EXPECTED_ERROR_FITTED, abs=0.005)
    assert bare_rms == pytest.approx(EXPECTED_ERROR_UNFITTED, abs=0.005)
    assert pair_rms == pytest.approx(UNFITTED_PAIR_KG_MOL, abs=0.01)
