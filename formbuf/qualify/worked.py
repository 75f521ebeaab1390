"""Worked examples of textbooks, by an ideal solution as they take it."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.chemistry.equilibrium import Solution, solve
from formbuf.chemistry.ionization import Ladder, state_fractions
from formbuf.chemistry.titration import Titrant, titrant_for_ph
from formbuf.library import Library
from formbuf.qualify.published import case, mixture_of, rows, temperature_c
from formbuf.qualify.records import Case, Group

KIND = "worked examples"
TABLE = "capacity"
SODIUM_ACETATE_G_MOL = 82.034
#: Ionization constant of acetic acid as one textbook takes it.
TEXTBOOK_PKA = float(-np.log10(1.75e-5))
#: Largest difference of each example: about half its last printed figure.
LIMITS = {
    "capacity_0001": 0.0005,
    "capacity_0002": 0.0005,
    "capacity_0003": 0.002,
    "capacity_0004": 0.005,
    "capacity_0005": 0.0005,
    "capacity_0006": 0.00005,
    "capacity_0007": 0.05,
    "capacity_0008": 0.005,
    "capacity_0009": 0.005,
    "capacity_0010": 0.005,
}


def groups(library: Library) -> Iterator[Group]:
    """Yield the examples, then published buffer values that are shown only."""
    yield examples(library)
    for case_names, unit, factor, digits in (
        (("NBS standard buffer value",), "mol/(kg pH)", 1.0, 4),
        (("FaSSIF", "FeSSIF"), "mmol/(L pH)", 1000.0, 2),
    ):
        cases = buffer_values(library, case_names, factor)
        title = f"capacity: {' and '.join(case_names)}"
        yield Group(f"worked {title}", KIND, title, unit, tuple(cases), digits=digits)


def examples(library: Library) -> Group:
    """Return the examples with a printed result."""
    found = computed()
    cases = []
    for row in rows(library, TABLE):
        key = row.text("id")
        if key in LIMITS:
            label = f"{row.text('case')}: {row.text('quantity')}"
            value = row.figure("value")
            cases.append(case(library, row, label, value, found[key], LIMITS[key]))
    title = "textbook examples of capacity and pH"
    return Group(f"worked {title}", KIND, title, "as printed", tuple(cases), digits=4)


def computed() -> dict[str, float]:
    """Return what is found for each example, by its id in the table."""
    equal = mix(4.76, 0.5, 0.5)
    acid, salt = state_fractions(acetic(4.76), 5.2, 25.0, 0.0)
    acid_5, salt_5 = state_fractions(acetic(TEXTBOOK_PKA), 5.0, 25.0, 0.0)
    weighed = titrant_for_ph(
        [acetic(4.76)],
        [[0.1]],
        0.0,
        0.0,
        25.0,
        [5.2],
        Titrant(1.0, 1.0, {"acetate": 1.0}),
        model="ideal",
    )
    charge = np.array([0.0, -0.1 / 101.0])
    water = solve([], np.zeros((2, 0)), charge, abs(charge), 25.0, model="ideal").ph
    beta = capacity_mol_kg_ph(mix(TEXTBOOK_PKA, 0.1, 0.1))
    step = float(equal.variance_mol_kg[0, 0]) * np.log(10.0)
    return {
        "capacity_0001": step,
        "capacity_0002": float(salt / acid),
        "capacity_0003": 0.1 * float(weighed.amount_mol_kg[0]) * SODIUM_ACETATE_G_MOL,
        "capacity_0004": change(4.76, 0.1, 0.2754, 0.01),
        "capacity_0005": float(beta[0]),
        "capacity_0006": float(0.02 / (np.log(10.0) * acid_5 * salt_5)),
        "capacity_0007": float(water[0] - water[1]),
        "capacity_0008": change(4.76, 0.01, 0.01, -0.001),
        "capacity_0009": float(mix(4.75, 1.6, 0.4).ph[0]),
        "capacity_0010": float(mix(4.75, 1.6, 0.4, 0.1).ph[0]),
    }


def acetic(pka: float) -> Ladder:
    """Return acetic acid with a pKa of the textbook's choice."""
    return Ladder("acetate", 0, (pka,), (0.0,), (0.0,))


def mix(pka: float, acid: float, salt: float, base: float = 0.0) -> Solution:
    """Solve an acid, its sodium salt and strong base or acid as ideal [mol/L]."""
    charge2 = salt + abs(base)
    total = [[acid + salt]]
    return solve([acetic(pka)], total, [salt + base], [charge2], 25.0, model="ideal")


def change(pka: float, acid: float, salt: float, base: float) -> float:
    """Return the change of pH on adding strong base, or acid below zero [mol/L]."""
    return float((mix(pka, acid, salt, base).ph - mix(pka, acid, salt).ph)[0])


def buffer_values(
    library: Library, names: tuple[str, ...], factor: float
) -> list[Case]:
    """Return published capacities of compositions: shown."""
    cases = []
    for row in rows(library, TABLE):
        if row.text("case") not in names:
            continue
        mixed = mixture_of(library, row)
        solution = mixed.solve(temperature_c(row))
        beta = float(capacity_mol_kg_ph(solution)) * float(mixed.water_kg_l) * factor
        label = f"{row.text('case')}: {row.text('system')}"
        cases.append(case(library, row, label, row.figure("value"), beta))
    return cases
