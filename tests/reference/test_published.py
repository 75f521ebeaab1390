"""Every published check against what is found: sources and limits in `formbuf.qualify`.

Standard solutions, buffer tables, pK series, worked examples, osmolality, brines and
freezing; misses that are known and explained are expected to stay.
"""

from __future__ import annotations

import pytest
from qualified import computed, is_met, names
from reference_tables import library

from formbuf.library.tables import Row

PARTS = {
    "water": ("water ",),
    "standards": (
        "ph_standards ",
        "temperature ph",
        "handbook_buffers ",
        "pharmacopoeia_buffers ",
    ),
    "pk_series": ("pka_by_temperature ", "temperature apparent"),
    "worked": ("worked ",),
    "osmolality": ("osmolality ",),
    "brines": ("brines ",),
    "freezing": ("freezing ",),
    "numerics": ("numerics ",),
}


@pytest.mark.parametrize(
    ("part", "name"),
    [(part, name) for part, starts in PARTS.items() for name in names(*starts)],
)
def test_a_group_of_checks(part: str, name: str) -> None:
    is_met(part, name)


@pytest.mark.parametrize("part", PARTS)
def test_no_group_is_left_out(part: str) -> None:
    assert set(computed(part)) == set(names(*PARTS[part]))


def _rows(table: str, **wanted: str) -> list[Row]:
    return [
        row
        for row in library().check_table(table)
        if all(row.text(column) == value for column, value in wanted.items())
    ]


def test_every_standard_solution_takes_part() -> None:
    assert {r.text("group") for r in _rows("ph_standards", use="test")} == {
        "borax",
        "carbonate",
        "citrate",
        "hydrochloric_acid",
        "phosphate",
        "phthalate",
        "tartrate",
        "tetroxalate",
    }


def test_excluded_standards_are_only_those_that_cannot_be_computed() -> None:
    left_out = {r.text("group") for r in _rows("ph_standards", use="exclude")}

    assert left_out == {"calcium_hydroxide", "din_19266", "phosphate_7_00", "tartrate"}


@pytest.mark.parametrize("table", ["handbook_buffers", "pharmacopoeia_buffers"])
def test_recipes_without_a_composition_are_no_tests(table: str) -> None:
    rows = _rows(table, use="test")

    assert rows
    assert all(row.counts("composition") for row in rows)


@pytest.mark.parametrize(
    ("part", "name", "least"),
    [
        ("standards", "temperature ph test", 12),
        ("pk_series", "pka_by_temperature medium", 15),
        ("pk_series", "pka_by_temperature slope", 30),
        ("pk_series", "temperature apparent", 25),
        ("osmolality", "osmolality other solutes", 16),
        ("osmolality", "osmolality osmotic coefficients at 25 C", 31),
        ("osmolality", "osmolality solutions of 1 g/100 mL", 21),
        ("brines", "brines osmotic coefficients, same parameters", 60),
        ("brines", "brines osmotic coefficients, measured", 25),
    ],
)
def test_groups_are_as_large_as_their_tables_let_them(
    part: str, name: str, least: int
) -> None:
    assert len(computed(part)[name].cases) >= least


def test_series_behind_the_table_are_told_apart() -> None:
    """They prove the equation, not the values."""
    cases = computed("pk_series")["pka_by_temperature not independent"].cases

    assert {case.label.split()[0] for case in cases} == {
        "borate",
        "malate",
        "aces",
        "bis_tris",
        "ada",
    }


def test_very_soluble_solids_become_supersaturated_too_warm() -> None:
    """Citric acid and sodium acetate: up to 6.5 K, which the freezing output says."""
    name = "freezing onset of supersaturation, concentrated liquids"
    misses = [case.miss for case in computed("freezing")[name].cases]

    assert all(0.0 < miss < 6.5 for miss in misses)
