"""Buffer capacity: differential, per component, and for a finite change of pH.

beta = ln 10 ( [H+] + [OH-] + sum_j C_j Var_j(charge) )

(Van Slyke 1922, J. Biol. Chem. 52, 525, in the general form that holds for any
number of overlapping steps) at fixed activity coefficients. With their feedback
the true slope is up to 10 % higher, most for citrate and phosphate without other salt.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.ionization import Ladder, state_fractions
from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE, titrant_for_ph
from formbuf.constants import LN10

Array = NDArray[np.float64]

#: Largest capacity of one step over its concentration, ln(10)/4.
SINGLE_STEP_MAXIMUM = LN10 / 4.0


def capacity_mol_kg_ph(solution: Solution) -> Array:
    """Differential buffer capacity of everything that buffers.

    Parameters
    ----------
    solution : Solution

    Returns
    -------
    ndarray, shape (...)
        beta [mol/(kg water) per pH unit].
    """
    water = solution.hydrogen_mol_kg + solution.hydroxide_mol_kg
    total: Array = LN10 * (water + solution.variance_mol_kg.sum(axis=-1))
    return total


def component_capacity_mol_kg_ph(solution: Solution) -> Array:
    """Share of each component in the differential capacity.

    Parameters
    ----------
    solution : Solution

    Returns
    -------
    ndarray, shape (..., components)
        [mol/(kg water) per pH unit]; water's own share is left out.
    """
    return LN10 * solution.variance_mol_kg


@dataclass(frozen=True, slots=True)
class FiniteCapacity:
    """Strong acid and base needed to move pH to the limits of a window.

    Attributes
    ----------
    acid_mol_kg, base_mol_kg : ndarray, shape (...)
        All that buffers, water included [mol/kg].
    acid_water_mol_kg, base_water_mol_kg : ndarray, shape (...)
        The part that water alone takes up [mol/kg].
    """

    acid_mol_kg: Array
    base_mol_kg: Array
    acid_water_mol_kg: Array
    base_water_mol_kg: Array


def finite_capacity(
    ladders: Sequence[Ladder],
    totals_mol_kg: ArrayLike,
    strong_charge_mol_kg: ArrayLike,
    strong_charge2_mol_kg: ArrayLike,
    temperature_c: ArrayLike,
    start: Solution,
    low_ph: ArrayLike,
    high_ph: ArrayLike,
    *,
    open_components: Sequence[str] = (),
    model: ActivityModel = "guggenheim",
) -> FiniteCapacity:
    """Acid that lowers pH to ``low_ph`` and base that raises it to ``high_ph``.

    Solved exactly: the added acid and base count in the ionic strength.

    Parameters
    ----------
    ladders, totals_mol_kg, strong_charge_mol_kg, strong_charge2_mol_kg, temperature_c
        The mixture, as for ``formbuf.chemistry.equilibrium.solve``.
    start : Solution
        The solved mixture.
    low_ph, high_ph : array_like, shape (...)
        Limits of pH at ``temperature_c``.
    open_components, model
        As for ``solve``.

    Returns
    -------
    FiniteCapacity
    """
    args = (
        ladders,
        totals_mol_kg,
        strong_charge_mol_kg,
        strong_charge2_mol_kg,
        temperature_c,
    )
    acid, base = (
        titrant_for_ph(
            *args, limit, titrant, open_components=open_components, model=model
        )
        for limit, titrant in ((low_ph, STRONG_ACID), (high_ph, STRONG_BASE))
    )
    hydrogen, hydroxide = start.hydrogen_mol_kg, start.hydroxide_mol_kg
    down = 10.0 ** (start.ph - np.asarray(low_ph, dtype=float))
    up = 10.0 ** (np.asarray(high_ph, dtype=float) - start.ph)
    return FiniteCapacity(
        acid.amount_mol_kg,
        base.amount_mol_kg,
        hydrogen * (down - 1.0) + hydroxide * (1.0 - 1.0 / down),
        hydroxide * (up - 1.0) + hydrogen * (1.0 - 1.0 / up),
    )


def useful_range(
    ladder: Ladder, share: float = 1.0 / 3.0
) -> tuple[tuple[float, float], ...]:
    """Ranges of pH in which a component holds a given share of a single step's maximum.

    Parameters
    ----------
    ladder : Ladder
    share : float
        Share of 0.576 C; one third is reached one unit from a lone pK.

    Returns
    -------
    tuple of (low, high)
        At 25 C and I = 0, by 0.01 pH between 0 and 14; overlapping steps merge.
    """
    grid = np.round(np.arange(0.0, 14.005, 0.01), 2)
    fractions = state_fractions(ladder, grid, 25.0, 0.0)
    charges = np.asarray(ladder.charges, dtype=float)
    mean = fractions @ charges
    variance = fractions @ charges**2 - mean**2
    ratio = LN10 * variance / SINGLE_STEP_MAXIMUM
    inside = np.concatenate(([False], ratio >= share, [False]))
    edges = np.flatnonzero(inside[1:] != inside[:-1])
    return tuple(
        (float(grid[a]), float(grid[b - 1]))
        for a, b in zip(edges[::2], edges[1::2], strict=True)
    )
