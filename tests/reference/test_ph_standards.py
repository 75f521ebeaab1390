"""PH of the standard solutions, 0 to 50 C, against the published values."""

from __future__ import annotations

import numpy as np
import pytest
from reference_tables import (
    Check,
    Residual,
    checks,
    groups,
    largest,
    mixture_of,
    select,
    show,
    sources,
    temperature_c,
)

from formbuf.chemistry.capacity import capacity_mol_kg_ph

TABLE = "ph_standards.csv"
LIMIT = {"phthalate": 0.025, "hydrochloric_acid": 0.025}
USUAL_LIMIT = 0.02
HIGHEST_C = 50.0

MISSES = {
    ("carbonate", "jis_z_8802"): (
        "the Japanese table prints the carbonate standard up to 0.008 above the NIST "
        "values of Staples & Bates, which are met within 0.018; miss 0.024 at 20 C"
    )
}


def _standards() -> list[Check]:
    return [
        row
        for row in select(TABLE, use="test", quantity="ph")
        if 0.0 <= temperature_c(row) <= HIGHEST_C
    ]


def _series() -> list[object]:
    found = []
    for key in groups(_standards(), "group", "sources"):
        marks = (
            [pytest.mark.xfail(strict=True, reason=MISSES[key])]
            if key in MISSES
            else []
        )
        found.append(pytest.param(*key, id="-".join(key), marks=marks))
    return found


def _residuals(rows: list[Check]) -> list[Residual]:
    return [
        Residual(
            f"{row['solution']} {temperature_c(row):g} C",
            float(row["value"]),
            float(mixture_of(row).solve(temperature_c(row)).ph),
            sources(row),
            row["status"],
        )
        for row in rows
    ]


@pytest.mark.parametrize(("group", "source"), _series())
def test_standards_meet_their_published_ph(group: str, source: str) -> None:
    rows = [r for r in _standards() if r["group"] == group and r["sources"] == source]
    residuals = _residuals(rows)
    show(f"pH of {group}, 0 to 50 C", residuals)

    assert largest(residuals) <= LIMIT.get(group, USUAL_LIMIT)


def test_every_group_of_standards_is_there() -> None:
    assert {r["group"] for r in _standards()} == {
        "borax",
        "carbonate",
        "citrate",
        "hydrochloric_acid",
        "phosphate",
        "phthalate",
        "tartrate",
        "tetroxalate",
    }


def test_printed_slopes_with_temperature() -> None:
    """Ph. Eur. 2.2.3 prints dpH/dT to the fourth decimal, for 15 to 35 C."""
    residuals = []
    for row in select(TABLE, use="test", quantity="dph_dt"):
        mixed = mixture_of(row)
        slope = (mixed.solve(30.0).ph - mixed.solve(20.0).ph) / 10.0
        residuals.append(
            Residual(
                row["group"],
                float(row["value"]),
                float(slope),
                sources(row),
                row["status"],
            )
        )
    show("slope of the standards, 1/K", residuals, 4)

    assert largest(residuals) <= 0.0005


CITRATE_DILUTION = pytest.mark.xfail(
    strict=True,
    reason=(
        "recalled as 0.024 for the citrate standard; the model, which meets its pH and "
        "the dilution of six other standards, gives 0.047; miss 0.023"
    ),
)


@pytest.mark.parametrize(
    "group",
    [
        "tetroxalate",
        "tartrate",
        pytest.param("citrate", marks=CITRATE_DILUTION),
        "phthalate",
        "phosphate",
        "borax",
        "carbonate",
    ],
)
def test_dilution_values(group: str) -> None:
    """Change of pH on adding an equal volume of water; recalled from Bates 1973."""
    (row,) = select(TABLE, use="test", quantity="dilution_value", group=group)
    whole, half = mixture_of(row), mixture_of(_halved(row))
    change = float(half.solve(25.0).ph - whole.solve(25.0).ph)
    residual = Residual(group, float(row["value"]), change, sources(row), row["status"])
    show("change of pH on adding an equal volume of water", [residual])

    assert abs(residual.miss) <= USUAL_LIMIT


def _halved(row: Check) -> Check:
    parts = (part.split("=") for part in row["composition"].split())
    half = " ".join(f"{name}={float(amount) / 2.0}" for name, amount in parts)
    return {**row, "composition": half}


def test_buffer_values_beside_the_printed_ones() -> None:
    """The printed figures have one or two digits and lie up to a third off: report."""
    residuals = []
    for row in select(TABLE, quantity="buffer_value", use="test"):
        solution = mixture_of(row).solve(25.0)
        residuals.append(
            Residual(
                row["group"],
                float(row["value"]),
                float(capacity_mol_kg_ph(solution)),
                sources(row),
                row["status"],
            )
        )
    show("buffer value of the standards, mol/(kg pH)", residuals)

    assert np.all(np.isfinite([r.found for r in residuals]))
    assert len(residuals) == 7


def test_excluded_rows_are_only_those_that_cannot_be_computed() -> None:
    left_out = {row["group"] for row in checks(TABLE) if row["use"] == "exclude"}

    assert left_out == {"calcium_hydroxide", "din_19266", "phosphate_7_00", "tartrate"}
