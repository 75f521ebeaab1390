"""Properties of water against their sources, and the constants coded for them."""

from __future__ import annotations

from collections.abc import Callable, Iterator

import numpy as np
from numpy.typing import NDArray

from formbuf.bench.knowledge_audit import typed_constants
from formbuf.chemistry import water
from formbuf.library import Library, schemas
from formbuf.library.tables import Row
from formbuf.qualify.published import case
from formbuf.qualify.records import Case, Group

KIND = "water"
RELATIVE = 1e-12
#: Quantity in the table, the function, half its last printed decimal and decimals.
FUNCTIONS: tuple[
    tuple[str, Callable[[float], NDArray[np.float64]], float, int], ...
] = (
    ("debye_huckel_slope_log10_molal", water.debye_huckel_slope, 5.05e-6, 6),
    ("osmotic_slope_molal", water.osmotic_slope, 5.05e-6, 6),
    ("pkw_molal", water.pkw, 5.05e-5, 5),
)
#: Quantities of which only the recommended rows come from the coded formulation.
RECOMMENDED_ONLY = ("debye_huckel_slope_log10_molal", "pkw_molal")
OLDER_PKW_LIMIT = 0.012
OLDER_PKW_HIGHEST_C = 60.0


def groups(library: Library) -> Iterator[Group]:
    """Yield the coefficients, the functions and older measurements of pKw."""
    table = library.read_table(schemas.WATER_PROPERTIES)
    yield coefficients(library, table)
    for quantity, function, allowed, digits in FUNCTIONS:
        found = [
            row
            for row in table
            if row.text("quantity") == quantity
            and (quantity not in RECOMMENDED_ONLY or row.flag("recommended"))
        ]
        cases = [_at(library, row, function, allowed) for row in found]
        title = quantity.replace("_", " ")
        yield Group(f"water {title}", KIND, title, "1", tuple(cases), digits=digits)
    older = [
        _at(library, row, water.pkw, OLDER_PKW_LIMIT)
        for row in table
        if row.text("quantity") == "pkw_molal"
        and not row.flag("recommended")
        and (row.number("temperature_c") or 0.0) <= OLDER_PKW_HIGHEST_C
    ]
    title = "pkw molal, older measurements"
    yield Group(f"water {title}", KIND, title, "1", tuple(older), digits=4)


def coefficients(library: Library, table: tuple[Row, ...]) -> Group:
    """Return the coefficients of the table beside those that the program uses."""
    coded = typed_constants()
    cases = [
        case(
            library,
            row,
            row.text("quantity"),
            row.figure("value"),
            coded[row.text("quantity")],
            RELATIVE * abs(row.figure("value")),
        )
        for row in table
        if row.text("quantity") in coded
    ]
    title = "coefficients as coded"
    return Group(f"water {title}", KIND, title, "as tabled", tuple(cases))


def _at(
    library: Library,
    row: Row,
    function: Callable[[float], NDArray[np.float64]],
    allowed: float,
) -> Case:
    t = row.figure("temperature_c")
    label = f"{row.text('source')} {t:g} C"
    return case(library, row, label, row.figure("value"), float(function(t)), allowed)
