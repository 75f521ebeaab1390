"""The largest capacity of one step; worked examples are in `test_published`."""

from __future__ import annotations

import numpy as np
import pytest

from formbuf.chemistry.capacity import SINGLE_STEP_MAXIMUM
from formbuf.qualify.worked import mix


def test_largest_capacity_of_one_step() -> None:
    """ln(10)/4: Van Slyke 1922, J. Biol. Chem. 52, 525."""
    share = float(mix(4.76, 0.5, 0.5).variance_mol_kg[0, 0]) * np.log(10.0)

    assert pytest.approx(np.log(10.0) / 4.0, abs=1e-4) == SINGLE_STEP_MAXIMUM
    assert share == pytest.approx(SINGLE_STEP_MAXIMUM, rel=1e-6)
