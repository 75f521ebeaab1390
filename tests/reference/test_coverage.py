"""Whether predicted intervals of pH hold the published values, table by table.

The figures are those of ``knowledge/uncertainty.csv``; the activity-model error was
fitted to every second row. Sources are those of the rows in ``knowledge/checks``.
"""

from __future__ import annotations

import sys
from collections.abc import Iterable
from pathlib import Path

import numpy as np
import pytest
from coverage_rows import FITTED_KEYS, Row, parts, ph_draws, pooled

from formbuf.advice.error_model import error_model, group_of_step
from formbuf.library import load_library

sys.path.insert(0, str(Path(__file__).parents[1] / "tools"))

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

LEAST_COVERAGE = 0.90
RMS_LOW, RMS_HIGH = 0.5, 1.3


class Found:
    """Standardised residual and whether the 95 % interval holds, per row."""

    def __init__(self) -> None:
        model = error_model(load_library())
        self.rows = pooled()
        z, inside = [], []
        for row in self.rows:
            draws = ph_draws(row, model)
            low, high = np.quantile(draws, [0.025, 0.975])
            z.append((row.published - float(np.mean(draws))) / float(np.std(draws)))
            inside.append(bool(low <= row.published <= high))
        self.z, self.inside = np.array(z), np.array(inside)

    def figures(self, chosen: Iterable[bool]) -> tuple[int, float, float]:
        """Count, coverage and root mean square of the chosen rows."""
        mask = np.array(list(chosen))
        z = self.z[mask]
        return int(mask.sum()), float(self.inside[mask].mean()), _rms(z)


def _rms(z: np.ndarray) -> float:
    return float(np.sqrt(np.mean(z * z)))


@pytest.fixture(scope="module")
def found() -> Found:
    return Found()


def _show(title: str, figures: tuple[int, float, float]) -> None:
    count, coverage, rms = figures
    print(f"  {title:<52} n {count:>3}  coverage {coverage:6.1%}  rms {rms:5.2f}")


def test_coverage_of_the_pooled_rows(found: Found) -> None:
    print("\nstandardised residuals of pH and coverage of the 95 % interval")
    for table in dict.fromkeys(row.table for row in found.rows):
        _show(table, found.figures(row.table == table for row in found.rows))
    everything = found.figures(True for _ in found.rows)
    _show("all rows", everything)
    _, coverage, rms = everything

    assert coverage >= LEAST_COVERAGE
    assert RMS_LOW <= rms <= RMS_HIGH


def test_coverage_of_the_rows_that_were_not_fitted(found: Found) -> None:
    held = found.figures(not row.is_fitted for row in found.rows)
    _show("rows that were not fitted", held)

    assert held[1] >= LEAST_COVERAGE
    assert RMS_LOW <= held[2] <= RMS_HIGH


def test_coverage_where_the_solution_itself_was_left_out_of_the_fit() -> None:
    """Rows of one solution hang together, so leaving whole solutions out is harder."""
    from fit_activity_error import fit

    rows, known = pooled(), parts()
    inside: list[bool] = []
    z: list[float] = []
    print("\nfitted without the solution, then tested on it (first order)")
    for solution in dict.fromkeys(row.solution for row in rows):
        others = [p for p, r in zip(known, rows, strict=True) if r.solution != solution]
        figures = fit(others)
        own = [p for p, r in zip(known, rows, strict=True) if r.solution == solution]
        ratio = np.array([p.miss / np.sqrt(p.variance(*figures)) for p in own])
        _show(solution, (len(own), float(np.mean(np.abs(ratio) < 1.96)), _rms(ratio)))
        z += list(ratio)
        inside += list(np.abs(ratio) < 1.96)
    _show("all solutions", (len(z), float(np.mean(inside)), _rms(np.array(z))))

    assert np.mean(inside) >= LEAST_COVERAGE
    assert RMS_LOW <= _rms(np.array(z)) <= RMS_HIGH


def test_the_fitted_figures_are_those_of_the_table() -> None:
    from fit_activity_error import fit

    model = error_model(load_library())
    rows = [p for p, row in zip(parts(), pooled(), strict=True) if row.is_fitted]
    fitted = fit(rows)
    for key, value in zip(FITTED_KEYS, fitted, strict=True):
        print(f"  {key}: fitted {value:.3g}, in the table {model.number(key):.3g}")

    for key, value in zip(FITTED_KEYS, fitted, strict=True):
        assert model.number(key) == pytest.approx(value, rel=0.05)


def test_every_modern_table_takes_part() -> None:
    tables = {row.table for row in pooled()}

    assert len(tables) >= 30
    assert len(pooled()) >= 430


def _known(what: str) -> dict[str, list[float]]:
    values: dict[str, list[float]] = {"nitrogen": [], "carboxyl": [], "other": []}
    for species in load_library().species.values():
        for step in species.steps:
            quantity = getattr(step, what)
            if quantity is not None:
                group = group_of_step(species.family, step.pka.value)
                values[group].append(quantity.value)
    return values


@pytest.mark.parametrize(
    ("what", "key", "unit"),
    [("dh_kj_mol", "dh", "kj_mol"), ("dcp_j_mol_k", "dcp", "j_mol_k")],
)
def test_unknown_constants_are_spread_as_the_known_ones(
    what: str, key: str, unit: str
) -> None:
    """Mean and spread of the known steps of ``ionization.csv``, by kind of group."""
    model = error_model(load_library())
    for group, values in _known(what).items():
        mean, spread = float(np.mean(values)), float(np.std(values, ddof=1))
        print(f"  {key} {group}: n {len(values)}, mean {mean:.1f}, spread {spread:.1f}")

        assert model.number(f"missing_{key}_{group}_mean_{unit}") == pytest.approx(
            mean, rel=0.06, abs=1.0
        )
        assert model.number(f"missing_{key}_{group}_{unit}") == pytest.approx(
            spread, rel=0.03
        )


def test_a_row_that_is_off_would_be_seen(found: Found) -> None:
    """Published values moved by 0.1 must fall outside: the intervals are not empty."""
    model = error_model(load_library())
    room = [row for row in found.rows if _is_plain(row)]
    missed = 0
    for row in room:
        low, high = np.quantile(ph_draws(row, model), [0.025, 0.975])
        missed += not low <= row.published + 0.1 <= high

    assert missed / len(room) > 0.95


def _is_plain(row: Row) -> bool:
    return not row.was_read and 0.0 <= float(row.check["temperature_c"]) <= 50.0
