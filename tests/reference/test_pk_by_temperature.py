"""What every chemist knows of pK and temperature; series are in `test_published`."""

from __future__ import annotations

import numpy as np
from reference_tables import library

from formbuf.chemistry.ionization import pk_slope_per_k
from formbuf.product.composition import ladder_of


def test_slopes_of_amines_are_steep_and_of_carboxylates_flat() -> None:
    """``practice``: amines fall by 0.02 to 0.03 per kelvin, carboxylates hardly move."""
    slope = {
        name: pk_slope_per_k(ladder_of(library().species[name]))
        for name in ("tris", "ethanolamine", "glycine", "acetate", "citrate")
    }

    assert -0.032 < slope["tris"][0] < -0.026
    assert -0.032 < slope["ethanolamine"][0] < -0.026
    assert -0.030 < slope["glycine"][1] < -0.024
    assert abs(slope["acetate"][0]) < 0.001
    assert np.all(np.abs(slope["citrate"]) < 0.003)
