"""Rows of the published checks, and the solutions they describe."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from formbuf.library import Library
from formbuf.library.tables import Row
from formbuf.product.composition import Mixture, mixture
from formbuf.qualify.records import Case

#: Temperature of a row that prints none [C].
USUAL_TEMPERATURE_C = 25.0


def rows(library: Library, table: str, **wanted: object) -> list[Row]:
    """Return the rows of a table of checks whose columns hold the wanted values."""
    return [
        row
        for row in library.check_table(table)
        if all(row[column] == value for column, value in wanted.items())
    ]


def series(
    found: Iterable[Row], *columns: str
) -> Iterator[tuple[tuple[str, ...], list[Row]]]:
    """Yield the rows in groups by the texts of some columns, in the table's order."""
    groups: dict[tuple[str, ...], list[Row]] = {}
    for row in found:
        groups.setdefault(tuple(key_text(row, c) for c in columns), []).append(row)
    yield from groups.items()


def key_text(row: Row, column: str) -> str:
    """Return the cell of a column as text, ids joined by blanks."""
    value = row[column]
    if isinstance(value, tuple):
        return " ".join(value)
    return "" if value is None else str(value)


def references(library: Library, row: Row) -> str:
    """Return the sources of a row as short references."""
    column = "sources" if "sources" in row.values else "source"
    found = [library.sources[name] for name in row.ids(column)]
    return "; ".join(f"{s.authors or s.title} {s.year}".strip() for s in found)


def temperature_c(row: Row) -> float:
    """Return the temperature of a row; 25 C where none is printed."""
    value = row.number("temperature_c")
    return USUAL_TEMPERATURE_C if value is None else value


def mixture_of(library: Library, row: Row, factor: float = 1.0) -> Mixture:
    """Return the solution of a row, ready to be solved; diluted by a factor."""
    water = row.text("composition_unit") == "mmol_kg_water"
    amounts = {k: factor * v for k, v in row.counts("composition").items()}
    return mixture(library, amounts, basis="water" if water else "solution")


def ph_case(
    library: Library,
    row: Row,
    label: str,
    *,
    allowed: float | None = None,
    column: str = "value",
    offset: float = 0.0,
) -> Case:
    """Return the case of a row that prints the pH of its composition.

    Parameters
    ----------
    library : Library
    row : Row
    label : str
    allowed : float, optional
        Largest difference.
    column : str
        Column of the pH.
    offset : float
        What the scale of the row reads below the modern one.
    """
    t = temperature_c(row)
    found = float(mixture_of(library, row).solve(t).ph)
    return case(library, row, label, row.figure(column) + offset, found, allowed)


def case(
    library: Library,
    row: Row,
    label: str,
    published: float,
    found: float,
    allowed: float | None = None,
) -> Case:
    """Return a case with the sources and the basis of its row."""
    basis = row.text("status" if "status" in row.values else "basis")
    source = references(library, row)
    return Case(label, published, float(found), allowed, source, basis)
