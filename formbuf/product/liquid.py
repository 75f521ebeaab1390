"""What a liquid product is asked at: its temperatures, and the acid it hands over."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE
from formbuf.product.composition import Mixture
from formbuf.product.product_brief import ProductBrief

Array = NDArray[np.float64]

PHYSIOLOGICAL_PH = 7.4
#: Least liquid temperature at which pH is reported; colder is frozen or extrapolated.
COLDEST_LIQUID_C = -20.0


def liquid_temperatures(brief: ProductBrief) -> dict[float, tuple[str, ...]]:
    """Temperatures at which the product is liquid, with what each stands for."""
    found: dict[float, list[str]] = {}
    found.setdefault(brief.ph.measure_temperature_c, []).append("measure")
    found.setdefault(brief.ph.prepare_temperature_c, []).append("prepare")
    for entry in brief.storage:
        if entry.state_at() == "liquid" and entry.temperature_c >= COLDEST_LIQUID_C:
            kinds = found.setdefault(entry.temperature_c, [])
            if entry.kind not in kinds:
                kinds.append(entry.kind)
    return {t: tuple(found[t]) for t in sorted(found)}


def titratable_acidity_mmol_l(
    whole: Mixture, temperature_c: ArrayLike, ph: ArrayLike
) -> Array:
    """Strong base that brings a product to pH 7.4.

    Parameters
    ----------
    whole : Mixture
    temperature_c : array_like, shape (...)
        Temperature [C].
    ph : array_like, shape (...)
        pH of the product at that temperature.

    Returns
    -------
    ndarray, shape (...)
        [mmol/L]; negative: strong acid.
    """
    base = whole.titrate(temperature_c, PHYSIOLOGICAL_PH, STRONG_BASE).amount_mol_kg
    acid = whole.titrate(temperature_c, PHYSIOLOGICAL_PH, STRONG_ACID).amount_mol_kg
    amount = np.where(np.asarray(ph) < PHYSIOLOGICAL_PH, base, -acid)
    result: Array = 1000.0 * amount * whole.water_kg_l
    return result
