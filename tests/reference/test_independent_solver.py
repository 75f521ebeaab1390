"""The batch solver against nested root finding, state by state."""

from __future__ import annotations

import brentq_oracle
import numpy as np
import pytest
from reference_tables import library

from formbuf.chemistry.equilibrium import solve
from formbuf.product.composition import ladder_of

LIMIT_PH = 1e-9
STATES = 40


@pytest.mark.parametrize("seed", range(4))
def test_random_mixtures_agree_with_root_finding(seed: int) -> None:
    """Dilute to 1 mol/kg, far outside and inside the buffering range, -10 to 90 C."""
    rng = np.random.default_rng(seed)
    names = sorted(library().species)
    worst = 0.0
    for _ in range(STATES):
        picked = rng.choice(names, size=rng.integers(1, 4), replace=False)
        ladders = [ladder_of(library().species[name]) for name in picked]
        totals = 10.0 ** rng.uniform(-5.0, 0.0, len(ladders))
        charge = float(rng.uniform(-1.5, 1.5) * totals.sum())
        charge2 = abs(charge) + float(10.0 ** rng.uniform(-4.0, 0.0))
        t = float(rng.uniform(-10.0, 90.0))
        ours = solve(ladders, totals, charge, charge2, t)
        ph, ionic = brentq_oracle.solve(ladders, totals, charge, charge2, t)
        worst = max(worst, abs(float(ours.ph) - ph))

        assert float(ours.ionic_strength_mol_kg) == pytest.approx(ionic, rel=1e-8)
    print(f"{STATES} states: largest difference {worst:.1e} pH")

    assert worst <= LIMIT_PH


def test_borate_at_eye_drop_strength_agrees() -> None:
    borate = ladder_of(library().species["borate"])
    for total, base in ((0.08, 0.0008), (0.3, 0.003), (0.3, 0.1), (0.5, 0.25)):
        ours = solve([borate], [total], base, base, 25.0)
        ph, _ = brentq_oracle.solve([borate], [total], base, base, 25.0)

        assert float(ours.ph) == pytest.approx(ph, abs=LIMIT_PH)
