"""Carbon dioxide that a product takes up, as the acid it amounts to.

It pulls the pH down, and the lower it gets the less is taken up: what decides whether
a window holds is the uptake at its lower limit. Cold solutions take up more, so that
the worst of the liquid storage temperatures and that of measurement counts.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.advice.wording import plain
from formbuf.chemistry import gas
from formbuf.chemistry.ionization import Ladder, state_fractions
from formbuf.chemistry.water import water_density_kg_l
from formbuf.constants import GAS_CONSTANT_J_MOL_K, ZERO_CELSIUS_K
from formbuf.library import Library
from formbuf.product.composition import ladder_of
from formbuf.product.product_brief import ProductBrief

Array = NDArray[np.float64]

#: Temperatures at which Henry's constant of carbon dioxide holds [C].
HENRY_LOW_C, HENRY_HIGH_C = 0.0, 60.0
#: Share of the acid load from which uptake beyond the budget is worth a word.
WORTH_SAYING = 0.1


@dataclass(frozen=True, slots=True)
class GasUptake:
    """How a product meets carbon dioxide.

    Attributes
    ----------
    carbonate : Ladder
    pressure_pa : float
        Of carbon dioxide; in a closed headspace, when it is closed.
    headspace_ratio : float or None
        Volume of gas over volume of liquid; None where the pressure is kept.
    closed_c : float
        Temperature at which a headspace is closed, taken as that of measurement [C].
    counted_mmol_l : float
        Acid in the load budget.
    reason : str
    """

    carbonate: Ladder
    pressure_pa: float
    headspace_ratio: float | None
    closed_c: float
    counted_mmol_l: float = 0.0
    reason: str = ""

    @property
    def name(self) -> str:
        """Name of the load."""
        if self.headspace_ratio is None:
            return "carbon dioxide taken up"
        return "carbon dioxide of the headspace"

    def scaled(self, factor: float) -> GasUptake:
        """Return it with so many times the gas: uptake is linear in the pressure."""
        return replace(
            self,
            pressure_pa=factor * self.pressure_pa,
            counted_mmol_l=factor * self.counted_mmol_l,
        )

    def left_pa(self, ph: ArrayLike, temperature_c: float) -> Array:
        """Pressure above the product once it has taken up its share [Pa].

        What a closed headspace holds shares itself between gas and solution.
        """
        if self.headspace_ratio is None:
            return np.full(np.shape(ph), self.pressure_pa)
        t = within_henry(temperature_c)
        per_k = self.headspace_ratio / 1000.0 / GAS_CONSTANT_J_MOL_K
        held_mol_l = self.pressure_pa * per_k / (self.closed_c + ZERO_CELSIUS_K)
        in_gas_mol_l_pa = per_k / (t + ZERO_CELSIUS_K)
        free = state_fractions(self.carbonate, ph, t, 0.0)[..., 0]
        dissolved = gas.dissolved_mol_kg(1.0, t) / free * water_density_kg_l(t)
        left: Array = held_mol_l / (in_gas_mol_l_pa + dissolved)
        return left

    def acid_mmol_l(self, ph: ArrayLike, temperature_c: float) -> Array:
        """Acid that the uptake amounts to at a pH [mmol/L].

        Outside the 0 to 60 C of Henry's constant the nearer of the two is taken.
        """
        t = within_henry(temperature_c)
        left_pa = self.left_pa(ph, t)
        molal = gas.absorbed_acid_mol_kg(self.carbonate, left_pa, ph, t)
        litre = 1.0 if self.headspace_ratio is None else water_density_kg_l(t)
        taken: Array = 1000.0 * molal * litre
        return taken


def gas_uptake(library: Library, brief: ProductBrief) -> GasUptake | None:
    """Return how a product meets carbon dioxide; None where it does not.

    Parameters
    ----------
    library : Library
    brief : ProductBrief

    Returns
    -------
    GasUptake or None
        With the acid it amounts to at the lower limit of the window as measured, at the
        worst temperature.
    """
    met = brief.carbon_dioxide
    ratio = met.headspace_ratio
    if met.exposure == "open" or brief.container.gas_permeable:
        ratio = None
    elif ratio is None:
        return None
    measure_c, low = brief.ph.measure_temperature_c, brief.ph.low
    carbonate = ladder_of(library.species["carbonate"])
    bare = GasUptake(carbonate, met.pressure_pa, ratio, measure_c)
    stored = (measure_c, *brief.liquid_storage_temperatures_c)
    at_c = list(dict.fromkeys(within_henry(t) for t in stored))
    worst_c = max(at_c, key=lambda t: float(bare.acid_mmol_l(low, t)))
    where = f"at pH {low:.2f}, the lower limit, and {worst_c:g} C"
    if len(at_c) > 1:
        where += ", the worst of the liquid storage and measurement temperatures"
    text = (
        f"in equilibrium with {met.pressure_pa:.0f} Pa of carbon dioxide {where}"
        if ratio is None
        else f"{ratio:g} volumes of gas at {met.pressure_pa:.0f} Pa of carbon dioxide "
        f"over the solution, of which {float(bare.left_pa(low, worst_c)):.0f} Pa are "
        f"left {where}"
    )
    counted = float(bare.acid_mmol_l(low, worst_c))
    return replace(bare, counted_mmol_l=counted, reason=text)


def within_henry(temperature_c: float) -> float:
    """Return the nearest temperature at which Henry's constant holds [C]."""
    return min(max(temperature_c, HENRY_LOW_C), HENRY_HIGH_C)


def uptake_notes(
    uptake: GasUptake | None,
    brief: ProductBrief,
    acid_mmol_l: float,
    ph_by_c: Mapping[float, float],
) -> list[str]:
    """Say where a product takes up more than the budget holds, for its pH rises cold.

    Parameters
    ----------
    uptake : GasUptake or None
    brief : ProductBrief
    acid_mmol_l : float
        Acid load in total.
    ph_by_c : mapping of temperature to float
        pH of the product, that of measurement included.

    Returns
    -------
    list of str
        Empty where the budget covers it.
    """
    measured = ph_by_c.get(brief.ph.measure_temperature_c)
    if uptake is None or measured is None:
        return []
    found = []
    for t in brief.liquid_storage_temperatures_c:
        if t in ph_by_c:
            low = brief.ph.low + ph_by_c[t] - measured
            found.append((float(uptake.acid_mmol_l(low, t)), t, low))
    taken, at_c, low = max(found, default=(0.0, 0.0, 0.0))
    if taken - uptake.counted_mmol_l <= WORTH_SAYING * acid_mmol_l:
        return []
    text = (
        f"at {at_c:g} C its pH is higher and its lower limit lies at pH {low:.2f}: down "
        f"to there it takes up {plain(taken)} mmol/L of acid as carbon dioxide, "
        f"which count for it in place of the {plain(uptake.counted_mmol_l)} of the loads"
    )
    return [text]
