"""Amounts found by bisection, where the charge balance is not linear in them.

That is so where what is exchanged forms aggregates, such as borate in a pair.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.titration import Titrant
from formbuf.errors import ConvergenceError
from formbuf.product.composition import Mixture

Array = NDArray[np.float64]

BISECTIONS = 48
#: Returned where no amount within the limits gives the pH.
UNREACHED = -1.0


def brings_aggregates(mixed: Mixture, titrant: Titrant) -> bool:
    """Whether a titrant brings a component that forms aggregates."""
    return any(
        ladder.aggregates and titrant.components.get(ladder.name)
        for ladder in mixed.ladders
    )


def titrated_mmol_l(
    mixed: Mixture,
    titrant: Titrant,
    temperature_c: float,
    ph: Array,
    *,
    has_end: bool,
) -> Array | None:
    """Amount of titrant that closes the charge balance; None where to search for it.

    Parameters
    ----------
    mixed : Mixture
        Without titrant, its components listed.
    titrant : Titrant
    temperature_c : float
        Temperature [C].
    ph : ndarray, shape (...)
        Wanted pH.
    has_end : bool
        Whether the stretch ends with one form used up: an exchange towards a pH beyond
        both forms asks for amounts that do not exist, and need not settle.

    Returns
    -------
    ndarray, shape (...), or None
        [mmol/L].

    Raises
    ------
    ConvergenceError
        When the amount of a titrant without end does not settle.
    """
    if brings_aggregates(mixed, titrant):
        return None
    try:
        amount = mixed.titrate(temperature_c, ph, titrant).amount_mol_kg
    except ConvergenceError:
        if not has_end:
            raise
        return None
    moles: Array = 1000.0 * amount * mixed.water_kg_l
    return moles


def searched_mmol_l(
    ph_at: Callable[[Array], Array], wanted_ph: Array, most_mmol_l: Array
) -> Array:
    """Amount between 0 and a limit at which a rising pH meets the wanted one.

    Parameters
    ----------
    ph_at : callable
        From amounts [mmol/L], shape (...), to pH.
    wanted_ph : ndarray, shape (...)
    most_mmol_l : ndarray, shape (...)

    Returns
    -------
    ndarray, shape (...)
        [mmol/L]; -1 where the pH lies outside what the ends give.
    """
    low, high = np.zeros(wanted_ph.shape), np.array(most_mmol_l, dtype=float)
    reached = (ph_at(low) <= wanted_ph) & (ph_at(high) >= wanted_ph)
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        acid = ph_at(middle) < wanted_ph
        low, high = np.where(acid, middle, low), np.where(acid, high, middle)
    found: Array = np.where(reached, 0.5 * (low + high), UNREACHED)
    return found
