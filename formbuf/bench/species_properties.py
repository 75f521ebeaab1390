"""What follows from a species' ionization data: useful pH range and slope of each pK."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Any

from formbuf.chemistry.capacity import useful_range
from formbuf.chemistry.ionization import pk_slope_per_k
from formbuf.library import Library
from formbuf.product.composition import ladder_of


def computed_columns(library: Library) -> Mapping[str, Mapping[str, Any]]:
    """Compute, per species, what the tables do not hold.

    Parameters
    ----------
    library : Library

    Returns
    -------
    mapping of species to mapping
        ``pka_25c`` per step; ``pka_slope_per_k`` per step at 25 C, ``unknown`` where
        the enthalpy is; ``useful_ph``, the ranges in which at least a third of a
        single step's greatest capacity is there (25 C, zero ionic strength).
    """
    found: dict[str, Mapping[str, Any]] = {}
    for name, species in library.species.items():
        ladder = ladder_of(species)
        slopes = pk_slope_per_k(ladder)
        ranges = useful_range(ladder)
        found[name] = {
            "pka_25c": " ".join(f"{pk:.2f}" for pk in ladder.pka),
            "pka_slope_per_k": " ".join(
                "unknown" if math.isnan(s) else f"{s:+.4f}" for s in slopes
            ),
            "useful_ph": ", ".join(f"{low:.1f} to {high:.1f}" for low, high in ranges),
        }
    return found
