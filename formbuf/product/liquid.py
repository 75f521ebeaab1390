"""What a liquid product is asked at: its temperatures, and the acid it hands over."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE
from formbuf.constants import LIQUID_HIGH_C, LIQUID_LOW_C
from formbuf.product.composition import Mixture
from formbuf.product.product_brief import ProductBrief

Array = NDArray[np.float64]

PHYSIOLOGICAL_PH = 7.4
#: Least liquid temperature at which pH is reported; colder is frozen or extrapolated.
COLDEST_LIQUID_C = -20.0
#: Either way from a temperature, over which the slope of pH with it is taken [K].
SLOPE_STEP_K = 0.5


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


def slope_ends_c(temperature_c: Array) -> tuple[Array, Array]:
    """Temperatures a little warmer and cooler, within what can be computed [C]."""
    return (
        np.minimum(temperature_c + SLOPE_STEP_K, LIQUID_HIGH_C),
        np.maximum(temperature_c - SLOPE_STEP_K, LIQUID_LOW_C),
    )


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


def acidities_mmol_l(
    whole: Mixture,
    temperature_c: float,
    solution: Solution,
    own_mmol_l: Mapping[str, float],
) -> tuple[float, float]:
    """Strong base that brings a product to pH 7.4, and the buffer's own part of it.

    Parameters
    ----------
    whole : Mixture
        A single state.
    temperature_c : float
        Temperature [C].
    solution : Solution
        The product at that temperature.
    own_mmol_l : mapping of component to float
        Of each component, what the buffer brings [mmol/L]. Of one that an excipient
        brings too it has its share.

    Returns
    -------
    (whole_mmol_l, own_mmol_l)
        Negative: strong acid. The own part is what the charge of the buffer's species
        changes by on the way; water, drug and excipients take up the rest.
    """
    acid = float(solution.ph) < PHYSIOLOGICAL_PH
    titrant = STRONG_BASE if acid else STRONG_ACID
    reached = whole.titrate(temperature_c, PHYSIOLOGICAL_PH, titrant)
    change = np.asarray(solution.charge_mol_kg) - reached.charge_mol_kg
    own = 0.0
    for component, mmol_l in own_mmol_l.items():
        k = whole.index(component)
        if k >= 0 and whole.totals_mol_kg[k] > 0.0:
            own += float(change[k] / whole.totals_mol_kg[k]) * mmol_l
    amount = 1000.0 * float(reached.amount_mol_kg) * float(whole.water_kg_l)
    return (amount if acid else -amount), own
