"""PH of standard solutions, and of the buffer tables of handbooks and pharmacopoeias."""

from __future__ import annotations

from collections.abc import Iterator

from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.library import Library
from formbuf.library.tables import Row
from formbuf.qualify.published import (
    case,
    mixture_of,
    ph_case,
    rows,
    series,
    temperature_c,
)
from formbuf.qualify.records import Case, Group

#: The scale of Soerensen reads about this much below the modern one.
SOERENSEN_OFFSET = 0.04
STANDARDS = "pH of standard solutions"
TABLES = "pH of buffer tables"
STANDARD_LIMIT = 0.02
OWN_STANDARD_LIMIT = {"phthalate": 0.025, "hydrochloric_acid": 0.025}
SLOPE_LIMIT_PER_K = 0.0005
HIGHEST_C = 50.0
TABLE_MEAN_LIMIT = 0.03
OWN_TABLE_MEAN_LIMIT = {"USP Acetate Buffer": 0.05}
TABLE_LIMIT = 0.11

#: Tables of buffer recipes and the columns that name one series of each.
BUFFER_TABLES = {
    "handbook_buffers": ("system", "table"),
    "pharmacopoeia_buffers": ("body", "buffer"),
}
KNOWN_MISSES = {
    "carbonate jis_z_8802": (
        "the Japanese table prints the carbonate standard up to 0.008 above the NIST "
        "values of Staples & Bates, which are met within 0.018; miss 0.024 at 20 C"
    ),
    "citrate": (
        "recalled as 0.024 for the citrate standard; the model, which meets its pH and "
        "the dilution of six other standards, gives 0.047; miss 0.023"
    ),
    "acetate Gomori 0.2 M stocks": (
        "listed as modern, yet it lies 0.044 below the model throughout, which is the "
        "offset of the scale of Soerensen; the same recipes of Walpole 1914, listed on "
        "that scale, agree to 0.000 on average; miss of the mean 0.044"
    ),
    "HCl-KCl Clark & Lubs (Gomori)": (
        "Clark & Lubs 1917: 0.045 beyond the offset of the old scale, most at the acid "
        "end; the later table of Bower & Bates (USP) with other volumes is met to 0.015"
    ),
}


def groups(library: Library) -> Iterator[Group]:
    """Yield the groups of standards and of buffer tables."""
    yield from standards(library)
    yield slopes(library)
    yield from dilution_values(library)
    yield buffer_values(library)
    yield from at_temperatures(library)
    for table in BUFFER_TABLES:
        for use in ("test", "report"):
            yield from buffer_tables(library, table, use)


def standards(library: Library) -> Iterator[Group]:
    """Yield the pH of each standard solution by source, 0 to 50 C."""
    found = [
        row
        for row in rows(library, "ph_standards", use="test", quantity="ph")
        if 0.0 <= temperature_c(row) <= HIGHEST_C
    ]
    for (group, sources), of_series in series(found, "group", "sources"):
        limit = OWN_STANDARD_LIMIT.get(group, STANDARD_LIMIT)
        key = f"{group} {sources}"
        yield Group(
            f"ph_standards {key}",
            STANDARDS,
            f"{group.replace('_', ' ')}, 0 to {HIGHEST_C:g} C ({sources})",
            "pH",
            tuple(
                ph_case(
                    library,
                    row,
                    f"{row.text('solution')} {temperature_c(row):g} C",
                    allowed=limit,
                )
                for row in of_series
            ),
            known_miss=KNOWN_MISSES.get(key, ""),
        )


def slopes(library: Library) -> Group:
    """Return the printed slopes of the standards, taken from 20 to 30 C."""
    cases = []
    for row in rows(library, "ph_standards", use="test", quantity="dph_dt"):
        mixed = mixture_of(library, row)
        slope = float((mixed.solve(30.0).ph - mixed.solve(20.0).ph) / 10.0)
        published = row.figure("value")
        label = row.text("group")
        cases.append(case(library, row, label, published, slope, SLOPE_LIMIT_PER_K))
    title = "slope of the standards with temperature, 20 to 30 C"
    return Group("ph_standards slope", STANDARDS, title, "1/K", tuple(cases), digits=4)


def dilution_values(library: Library) -> Iterator[Group]:
    """Yield the change of pH on adding an equal volume of water."""
    found = rows(library, "ph_standards", use="test", quantity="dilution_value")
    for is_known, chosen in (
        (False, [r for r in found if r.text("group") not in KNOWN_MISSES]),
        (True, [r for r in found if r.text("group") in KNOWN_MISSES]),
    ):
        cases = []
        for row in chosen:
            whole, half = mixture_of(library, row), mixture_of(library, row, 0.5)
            change = float(half.solve(25.0).ph - whole.solve(25.0).ph)
            label, value = row.text("group"), row.figure("value")
            cases.append(case(library, row, label, value, change, STANDARD_LIMIT))
        name = chosen[0].text("group") if is_known else "standards"
        yield Group(
            f"ph_standards dilution {name}",
            STANDARDS,
            f"change of pH on adding an equal volume of water, {name}",
            "pH",
            tuple(cases),
            known_miss=KNOWN_MISSES.get(name, ""),
        )


def buffer_values(library: Library) -> Group:
    """Return the printed buffer values; one or two digits, up to a third off: shown."""
    cases = []
    for row in rows(library, "ph_standards", use="test", quantity="buffer_value"):
        beta = float(capacity_mol_kg_ph(mixture_of(library, row).solve(25.0)))
        label = row.text("group")
        cases.append(case(library, row, label, row.figure("value"), beta))
    title = "buffer value of the standards"
    unit = "mol/(kg pH)"
    return Group("ph_standards capacity", STANDARDS, title, unit, tuple(cases))


def at_temperatures(library: Library) -> Iterator[Group]:
    """Yield buffers at three temperatures; those of an unclear recipe are shown."""
    for use, limit in (("test", STANDARD_LIMIT), ("report", None)):
        found = rows(library, "temperature", quantity="ph", use=use)
        cases = tuple(
            ph_case(
                library,
                row,
                f"{row.text('system')} {temperature_c(row):g} C",
                allowed=limit,
            )
            for row in found
        )
        names = ", ".join(dict.fromkeys(row.text("system") for row in found))
        title = "buffers at 5, 25 and 37 C" if use == "test" else names
        yield Group(f"temperature ph {use}", STANDARDS, title, "pH", cases)


def buffer_tables(library: Library, table: str, use: str) -> Iterator[Group]:
    """Yield each table of buffer recipes.

    Those marked ``report`` are shown only; recipes that stand alone share a group.
    """
    found = [row for row in rows(library, table, use=use) if row.counts("composition")]
    is_test = use == "test"
    limit = TABLE_LIMIT if is_test else None
    alone: list[Case] = []
    for key, of_table in series(found, *BUFFER_TABLES[table]):
        name = " ".join(key)
        cases = tuple(_recipe(library, row, name, limit) for row in of_table)
        if len(cases) == 1 and not is_test:
            alone += cases
            continue
        yield Group(
            f"{table} {name} {use}",
            TABLES,
            name,
            "pH",
            cases,
            mean_allowed=(
                OWN_TABLE_MEAN_LIMIT.get(name, TABLE_MEAN_LIMIT) if is_test else None
            ),
            known_miss=KNOWN_MISSES.get(name, "") if is_test else "",
        )
    if alone:
        title = f"{table.replace('_', ' ')}, single recipes"
        yield Group(f"{table} single", TABLES, title, "pH", tuple(alone))


def _recipe(library: Library, row: Row, name: str, limit: float | None) -> Case:
    offset = SOERENSEN_OFFSET if row.text("scale") == "soerensen" else 0.0
    label = f"{name} {row.figure('target_ph'):g}"
    return ph_case(
        library, row, label, allowed=limit, column="target_ph", offset=offset
    )
