"""The same chemistry in PHREEQC, through phreeqpython, with our constants.

Every constant of a temperature is written into its database: pKw, the pK of each
step, the aggregates, and the activity convention (gamma from the extended
Debye-Hueckel form with B a = 1.5). PHREEQC computes its own slope A(T); it is run at
the temperature at which that slope equals ours, which moves nothing else, since the
constants are given as numbers without a temperature law.

What stays different: PHREEQC lowers the activity of water with the solutes (by 0.017
per mol/kg), which touches the ionization of water only.
"""

from __future__ import annotations

import contextlib
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.activity import ION_SIZE_FACTOR
from formbuf.chemistry.ionization import Ladder, log10_aggregate_constants, pk_at
from formbuf.chemistry.water import debye_huckel_slope, pkw

Array = NDArray[np.float64]

HEAD = """SOLUTION_MASTER_SPECIES
H H+ -1 H 1.008
H(0) H2 0 H
H(1) H+ -1 0.0
E e- 0 0 0
O H2O 0 O 16
O(0) O2 0 O
O(-2) H2O 0 0.0
Na Na+ 0 Na 22.99
Cl Cl- 0 Cl 35.45
"""
ELEMENTS = ("Xa", "Xb", "Xc", "Xd", "Xe", "Xf", "Xg", "Xh", "Xi", "Xj", "Xk", "Xl")


@dataclass(frozen=True)
class Batch:
    """States at one temperature: totals (n, J), sodium and chloride (n,) [mol/kg]."""

    ladders: tuple[Ladder, ...]
    totals: Array
    sodium: Array
    chloride: Array
    temperature_c: float


def start() -> Any:
    """A fresh PHREEQC."""
    import phreeqpython

    return phreeqpython.PhreeqPython().ip


def slopes(engine: Any, temperature_c: float) -> tuple[float, float]:
    """PHREEQC's own A and B at a temperature."""
    engine.load_database_string(HEAD + _species((), 25.0, 3.0) + "END\n")
    engine.run_string(
        "SELECTED_OUTPUT\n -reset false\nUSER_PUNCH\n -headings A B\n"
        f" 10 PUNCH DH_A, DH_B\nSOLUTION 1\n temp {temperature_c!r}\n"
        " units mol/kgw\n Na 0.01 charge\nEND\n"
    )
    a, b = engine.get_selected_output_array()[1]
    return float(a), float(b)


def matching_temperature_c(engine: Any, temperature_c: float) -> float:
    """Temperature at which PHREEQC's slope A equals ours at ``temperature_c``."""
    wanted = float(debye_huckel_slope(temperature_c))
    low, high = temperature_c - 3.0, temperature_c + 3.0
    for _ in range(40):
        middle = 0.5 * (low + high)
        if slopes(engine, middle)[0] < wanted:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


def _charge(z: int) -> str:
    return "" if z == 0 else f"{z:+d}"


def _species(ladders: Sequence[Ladder], temperature_c: float, ion_size: float) -> str:
    gamma = f" -gamma {ion_size!r} 0.0\n"
    text = "SOLUTION_SPECIES\n"
    for plain in ("H+", "Na+", "Cl-"):
        text += f"{plain} = {plain}\n log_k 0\n{gamma}"
    text += "e- = e-\n log_k 0\nH2O = H2O\n log_k 0\n"
    text += f"H2O = OH- + H+\n log_k {-float(pkw(temperature_c))!r}\n{gamma}"
    text += "2 H2O = O2 + 4 H+ + 4 e-\n log_k -86\n2 H+ + 2 e- = H2\n log_k -3\n"
    for name, ladder in zip(ELEMENTS, ladders, strict=False):
        lowest = ladder.charges[-1]
        master = f"{name}{_charge(lowest)}"
        text += f"{master} = {master}\n log_k 0\n{gamma}"
        pks = [float(pk) for pk in pk_at(ladder, temperature_c)]
        total = 0.0
        for n, pk in enumerate(reversed(pks), start=1):
            total += pk
            count = "" if n == 1 else str(n)
            state = f"H{count}{name}{_charge(lowest + n)}"
            text += f"{master} + {n} H+ = {state}\n log_k {total!r}\n{gamma}"
        if ladder.aggregates:
            formed = log10_aggregate_constants(ladder, temperature_c)
            for one, log10_k in zip(ladder.aggregates, formed, strict=True):
                held = one.charge - one.units * lowest
                state = f"H{held}{name}{one.units}{_charge(one.charge)}"
                constant = one.units * total + float(log10_k)
                text += f"{one.units} {master} + {held} H+ = {state}\n"
                text += f" log_k {constant!r}\n{gamma}"
    return text


def load(engine: Any, batch: Batch, phreeqc_c: float) -> None:
    """Load the database of one temperature."""
    masters = "".join(
        f"{name} {name}{_charge(ladder.charges[-1])} 0 {name} 100\n"
        for name, ladder in zip(ELEMENTS, batch.ladders, strict=False)
    )
    b = slopes(engine, phreeqc_c)[1]
    species = _species(batch.ladders, batch.temperature_c, ION_SIZE_FACTOR / b)
    engine.load_database_string(HEAD + masters + species + "END\n")


def block(batch: Batch, rows: Sequence[int], phreeqc_c: float) -> str:
    """Input that solves the rows for pH by electroneutrality."""
    text = "SELECTED_OUTPUT\n -reset false\n -high_precision true\n"
    text += 'USER_PUNCH\n -headings ph water\n 10 PUNCH -LA("H+"), ACT("H2O")\n'
    for number, row in enumerate(rows, start=1):
        text += (
            f"SOLUTION {number}\n temp {phreeqc_c!r}\n units mol/kgw\n pH 7 charge\n"
        )
        for element, amount in (
            ("Na", batch.sodium[row]),
            ("Cl", batch.chloride[row]),
        ):
            if amount > 0.0:
                text += f" {element} {float(amount)!r}\n"
        for name, amount in zip(ELEMENTS, batch.totals[row], strict=False):
            if amount > 0.0:
                text += f" {name} {float(amount)!r}\n"
    return text + "END\n"


def solve(engine: Any, batch: Batch, phreeqc_c: float) -> tuple[Array, Array]:
    """PH and activity of water of every state; NaN where PHREEQC finds no solution."""
    load(engine, batch, phreeqc_c)
    rows = list(range(len(batch.sodium)))
    try:
        return _run(engine, block(batch, rows, phreeqc_c))
    except Exception:
        ph, water = np.full(len(rows), np.nan), np.full(len(rows), np.nan)
        for row in rows:
            with contextlib.suppress(Exception):
                one = _run(engine, block(batch, [row], phreeqc_c))
                ph[row], water[row] = one[0][0], one[1][0]
        return ph, water


def _run(engine: Any, text: str) -> tuple[Array, Array]:
    engine.run_string(text)
    table = engine.get_selected_output_array()[1:]
    ph, water = np.array([[float(cell) for cell in line] for line in table]).T
    return ph, water
