"""Fit the error of the activity model to our residuals against published pH values.

    python tests/tools/fit_activity_error.py

Three figures of ``knowledge/uncertainty.csv`` come from here, by maximum likelihood
on every second row of the tables marked ``test`` on the modern scale; the others are
the test (``tests/reference/test_coverage.py``). The variance of a residual is that of
the constants, weighing and reading, plus what the three figures bring.
"""

from __future__ import annotations

import sys
from collections.abc import Sequence
from pathlib import Path

import numpy as np

sys.path[:0] = [str(Path(__file__).parents[1]), str(Path(__file__).parents[2])]

from coverage_rows import FITTED_KEYS, Parts, parts, pooled  # noqa: E402

START = (0.008, 0.03, 0.0015)


def likelihood(figures: Sequence[float], rows: Sequence[Parts]) -> float:
    """Minus the logarithm of the likelihood, up to a constant."""
    floor, slope, extrapolation = figures
    v = np.array([p.variance(floor, slope, extrapolation) for p in rows])
    miss = np.array([p.miss for p in rows])
    return float(0.5 * np.sum(np.log(v) + miss * miss / v))


def fit(rows: Sequence[Parts]) -> tuple[float, ...]:
    """Figures that make the residuals of some rows most likely."""
    from scipy.optimize import minimize

    found = minimize(
        lambda x: likelihood([float(v) for v in np.exp(x)], rows),
        np.log(START),
        method="Nelder-Mead",
        options={"maxiter": 4000, "xatol": 1e-5, "fatol": 1e-8},
    )
    return tuple(float(v) for v in np.exp(found.x))


def main() -> None:
    """Print the figures."""
    fitted = [p for p, row in zip(parts(), pooled(), strict=True) if row.is_fitted]
    for key, value in zip(FITTED_KEYS, fit(fitted), strict=True):
        print(f"{key},{value:.3g}")
    print(f"rows fitted: {len(fitted)} of {len(pooled())}")


if __name__ == "__main__":
    main()
