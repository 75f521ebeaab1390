"""What will attack the pH over shelf life: the load budget."""

from __future__ import annotations

from dataclasses import dataclass

from formbuf.chemistry import gas
from formbuf.chemistry.ionization import state_fractions
from formbuf.chemistry.water import water_density_kg_l
from formbuf.constants import GAS_CONSTANT_J_MOL_K, ZERO_CELSIUS_K
from formbuf.library import Library
from formbuf.library.records import Basis
from formbuf.product.composition import ladder_of
from formbuf.product.product_brief import ProductBrief


@dataclass(frozen=True, slots=True)
class LoadItem:
    """One acid or base load.

    Attributes
    ----------
    name : str
    acid_mmol_l, base_mmol_l : float
        Strong acid and base it amounts to [mmol/L over shelf life].
    basis : Basis
    source : str
        Id of a source, empty where the basis allows none.
    reason : str
    is_default : bool
        Whether nobody stated it.
    """

    name: str
    acid_mmol_l: float
    base_mmol_l: float
    basis: Basis
    source: str
    reason: str
    is_default: bool


@dataclass(frozen=True, slots=True)
class LoadBudget:
    """All loads of a product.

    Attributes
    ----------
    items : tuple of LoadItem
    """

    items: tuple[LoadItem, ...]

    @property
    def acid_mmol_l(self) -> float:
        """Total acid [mmol/L]."""
        return sum(item.acid_mmol_l for item in self.items)

    @property
    def base_mmol_l(self) -> float:
        """Total base [mmol/L]."""
        return sum(item.base_mmol_l for item in self.items)

    @property
    def all_default(self) -> bool:
        """Whether no load was stated, and none is computed beyond the defaults.

        What the pack lets in is computed, not stated: a trace of carbon dioxide does
        not turn default allowances into a user's loads.
        """
        computed = [item for item in self.items if item.basis == "derived"]
        rest = [item for item in self.items if item.basis != "derived"]
        return (
            all(item.is_default for item in rest)
            and sum(i.acid_mmol_l for i in computed) <= sum(i.acid_mmol_l for i in rest)
            and sum(i.base_mmol_l for i in computed) <= sum(i.base_mmol_l for i in rest)
        )


def load_budget(library: Library, brief: ProductBrief) -> LoadBudget:
    """Collect the loads of a product: stated or default, glass alkali, carbon dioxide.

    Parameters
    ----------
    library : Library
    brief : ProductBrief

    Returns
    -------
    LoadBudget
    """
    loads = brief.loads
    reason = loads.note or "stated in the brief"
    default = "default allowance: nobody has stated the loads of this product"
    items = [
        LoadItem(
            "acid over shelf life",
            loads.acid_mmol_l,
            0.0,
            "judgement",
            "",
            default if loads.acid_is_default else reason,
            loads.acid_is_default,
        ),
        LoadItem(
            "base over shelf life",
            0.0,
            loads.base_mmol_l,
            "judgement",
            "",
            default if loads.base_is_default else reason,
            loads.base_is_default,
        ),
    ]
    if brief.container.is_glass and brief.container.count_alkali:
        items.append(_glass(library, brief.container.fill_volume_ml))
    open_to_gas = brief.carbon_dioxide.exposure == "open"
    if open_to_gas or brief.container.gas_permeable:
        items.append(_carbon_dioxide(library, brief))
    elif brief.carbon_dioxide.headspace_ratio is not None:
        items.append(_headspace(library, brief, brief.carbon_dioxide.headspace_ratio))
    return LoadBudget(tuple(items))


def _glass(library: Library, fill_volume_ml: float) -> LoadItem:
    for row in library.glass_alkali:
        upper = row.fill_volume_to_ml
        if row.fill_volume_above_ml < fill_volume_ml and (
            upper is None or fill_volume_ml <= upper
        ):
            q = row.alkali_mmol_l
            return LoadItem(
                "alkali from glass",
                0.0,
                q.value,
                q.basis,
                q.source,
                f"type I limit of the surface test at {fill_volume_ml:g} mL fill; "
                "an upper screening bound",
                True,
            )
    q = library.glass_alkali[0].alkali_mmol_l
    return LoadItem(
        "alkali from glass",
        0.0,
        q.value,
        q.basis,
        q.source,
        "type I limit of the surface test at the smallest fill",
        True,
    )


def _carbon_dioxide(library: Library, brief: ProductBrief) -> LoadItem:
    """Acid that dissolved carbon dioxide amounts to at the lower limit of the window.

    It pulls the pH down, and the lower it gets the less is taken up: what decides
    whether the window holds is the uptake at its lower limit.
    """
    ladder = ladder_of(library.species["carbonate"])
    temperature_c = brief.ph.measure_temperature_c
    taken = gas.absorbed_acid_mol_kg(
        ladder, brief.carbon_dioxide.pressure_pa, brief.ph.low, temperature_c
    )
    return LoadItem(
        "carbon dioxide taken up",
        1000.0 * float(taken),
        0.0,
        "derived",
        "sander_2023",
        f"in equilibrium with {brief.carbon_dioxide.pressure_pa:.0f} Pa of carbon "
        f"dioxide at pH {brief.ph.low:.2f}, the lower limit, and {temperature_c:g} C",
        False,
    )


def _headspace(library: Library, brief: ProductBrief, ratio: float) -> LoadItem:
    """Acid that the carbon dioxide of a closed headspace amounts to at the lower limit.

    What the gas holds when it is closed shares itself between gas and solution.
    """
    ladder = ladder_of(library.species["carbonate"])
    t, ph = brief.ph.measure_temperature_c, brief.ph.low
    pressure_pa = brief.carbon_dioxide.pressure_pa
    in_gas_mol_l_pa = ratio / 1000.0 / (GAS_CONSTANT_J_MOL_K * (t + ZERO_CELSIUS_K))
    water_kg_l = float(water_density_kg_l(t))
    free = float(state_fractions(ladder, ph, t, 0.0)[..., 0])
    dissolved_mol_l_pa = float(gas.dissolved_mol_kg(1.0, t)) / free * water_kg_l
    left_pa = pressure_pa * in_gas_mol_l_pa / (in_gas_mol_l_pa + dissolved_mol_l_pa)
    taken = float(gas.absorbed_acid_mol_kg(ladder, left_pa, ph, t)) * water_kg_l
    return LoadItem(
        "carbon dioxide of the headspace",
        1000.0 * taken,
        0.0,
        "derived",
        "sander_2023",
        f"{ratio:g} volumes of gas at {pressure_pa:.0f} Pa of carbon dioxide over the "
        f"solution, of which {left_pa:.0f} Pa are left at pH {ph:.2f}, "
        f"the lower limit, and {t:g} C",
        False,
    )
