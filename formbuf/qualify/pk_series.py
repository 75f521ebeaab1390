"""The pK of each step with temperature, against independent series."""

from __future__ import annotations

from collections.abc import Iterator

from formbuf.chemistry.ionization import pk_at, pk_slope_per_k
from formbuf.library import Library
from formbuf.library.tables import Row
from formbuf.product.composition import ladder_of
from formbuf.qualify.published import case, rows, series, temperature_c
from formbuf.qualify.records import Case, Group

KIND = "pK with temperature"
TABLE = "pka_by_temperature"
USUAL_LIMIT = 0.015
OWN_LIMIT = {"tris": 0.006, "ethanolamine": 0.006, "citrate": 0.006}
HIGHEST_C = 50.0
KNOWN_MISSES = {
    "tris 1 datta_grzybowski": (
        "an unpublished series: its 5 C value lies 0.014 below the one tabulated by "
        "Bates & Hetzer 1961, which is met within 0.005; miss 0.014 at 5 C"
    )
}


def groups(library: Library) -> Iterator[Group]:
    """Yield the independent series, then what is shown only."""
    yield from independent(library)
    yield of_the_table_itself(library)
    yield in_salt(library)
    yield apparent(library)
    yield slopes(library)


def independent(library: Library) -> Iterator[Group]:
    """Yield each independent series at zero ionic strength, 0 to 50 C."""
    found = at_zero_ionic_strength(library, use="test", independent=True)
    for key, of_series in series(found, "species", "step", "sources"):
        species, step, sources = key
        limit = OWN_LIMIT.get(species, USUAL_LIMIT)
        yield Group(
            f"{TABLE} {' '.join(key)}",
            KIND,
            f"{species}, step {step} ({sources})",
            "pK",
            tuple(pk_case(library, row, limit) for row in of_series),
            known_miss=KNOWN_MISSES.get(" ".join(key), ""),
            digits=4,
        )


def of_the_table_itself(library: Library) -> Group:
    """Return series on which rows of the table rest: they prove only the equation."""
    found = [
        row
        for row in at_zero_ionic_strength(library, independent=False)
        if row.text("use") != "test"
    ]
    cases = tuple(pk_case(library, row, USUAL_LIMIT) for row in found)
    title = "series that the table itself rests on"
    return Group(f"{TABLE} not independent", KIND, title, "pK", cases, digits=4)


def in_salt(library: Library) -> Group:
    """Return series in a salt medium; their activity correction is not stated: shown."""
    found = [
        row
        for row in rows(library, TABLE, quantity="pka", independent=True, use="report")
        if row.number("ionic_strength_mol_l")
    ]
    cases = tuple(pk_case(library, row) for row in found)
    title = "in a salt medium, beside ours at zero ionic strength"
    return Group(f"{TABLE} medium", KIND, title, "pK", cases)


def apparent(library: Library) -> Group:
    """Return supplier values at 0.1 mol/L and an unstated ionic strength: shown."""
    found = [
        row
        for row in rows(library, "temperature", quantity="pka_apparent")
        if row.text("species")
    ]
    cases = tuple(pk_case(library, row) for row in found)
    title = "apparent at 0.1 mol/L, beside ours at zero ionic strength"
    return Group("temperature apparent", KIND, title, "pK", cases)


def slopes(library: Library) -> Group:
    """Return handbook slopes, rounded and of unstated strength: shown."""
    cases = []
    for row in rows(library, TABLE, quantity="dpka_dt", use="report"):
        ladder = ladder_of(library.species[row.text("species")])
        slope = pk_slope_per_k(ladder, temperature_c(row))[step_index(library, row)]
        label = f"{row.text('species')} {row.integer('step')}"
        cases.append(case(library, row, label, row.figure("value"), float(slope)))
    title = "slopes of handbooks"
    return Group(f"{TABLE} slope", KIND, title, "1/K", tuple(cases), digits=4)


def at_zero_ionic_strength(library: Library, **wanted: object) -> list[Row]:
    """Return the pK values at zero ionic strength, 0 to 50 C."""
    return [
        row
        for row in rows(library, TABLE, quantity="pka", **wanted)
        if row.number("ionic_strength_mol_l") == 0.0
        and 0.0 <= temperature_c(row) <= HIGHEST_C
    ]


def pk_case(library: Library, row: Row, allowed: float | None = None) -> Case:
    """Return the case of a row that prints the pK of one step."""
    ladder = ladder_of(library.species[row.text("species")])
    pks = pk_at(ladder, temperature_c(row))
    label = f"{row.text('species')} {row.integer('step')} {temperature_c(row):g} C"
    found = float(pks[step_index(library, row)])
    return case(library, row, label, row.figure("value"), found, allowed)


def step_index(library: Library, row: Row) -> int:
    """Return the place of a row's step in the ladder of its species."""
    steps = library.species[row.text("species")].steps
    return [s.step for s in steps].index(row.integer("step"))
