"""Net charge of a macro-ion at any pH and temperature, outside the solver."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import macro_ion
from formbuf.chemistry.ionization import Ladder, pk_at
from formbuf.errors import InputError

Array = NDArray[np.float64]


def charge_and_variance(
    ladder: Ladder, ph: ArrayLike, temperature_c: float
) -> tuple[Array, Array]:
    """Net charge of a macro-ion and the variance of its charge.

    Parameters
    ----------
    ladder : Ladder
        A macro-ion.
    ph : array_like, shape (...)
    temperature_c : float
        Temperature [C].

    Returns
    -------
    tuple of (ndarray, ndarray), shape (...)
        Charges per molecule, and -(dz/dpH)/ln 10.

    Raises
    ------
    InputError
        For a ladder that is no macro-ion.
    """
    if not ladder.is_macro_ion:
        msg = f"{ladder.name} is no macro-ion, allowed a protein"
        raise InputError(msg)
    at = np.asarray(ph, dtype=float)
    pk = pk_at(ladder, temperature_c)
    if ladder.curve is not None:
        return macro_ion.curve_charge(ladder.curve, at, pk[0])
    constants = tuple(np.asarray(10.0**-value) for value in pk)
    return macro_ion.sites_charge(
        ladder.sites, constants, np.asarray(10.0**at), ladder.work
    )
