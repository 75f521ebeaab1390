"""What will attack the pH over shelf life: the load budget."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.advice.gas_uptake import GasUptake, gas_uptake
from formbuf.library import Library
from formbuf.library.records import Basis
from formbuf.product.product_brief import ProductBrief

Array = NDArray[np.float64]

#: Less than this of acid or base is no load: it moves no product (judgement) [mmol/L].
LEAST_LOAD_MMOL_L = 0.001


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

    @property
    def told_basis(self) -> str:
        """The basis in words: a load that the brief states is ``stated``, no judgement."""
        is_stated = self.basis == "judgement" and not self.is_default
        return "stated" if is_stated else self.basis


@dataclass(frozen=True, slots=True)
class LoadBudget:
    """All loads of a product.

    Attributes
    ----------
    items : tuple of LoadItem
    gas : GasUptake or None
        Where the product takes up carbon dioxide, of which ``items`` hold what it is at
        the lower limit of the window as measured.
    """

    items: tuple[LoadItem, ...]
    gas: GasUptake | None = None

    @property
    def acid_mmol_l(self) -> float:
        """Total acid [mmol/L]."""
        return sum(item.acid_mmol_l for item in self.items)

    @property
    def base_mmol_l(self) -> float:
        """Total base [mmol/L]."""
        return sum(item.base_mmol_l for item in self.items)

    def more_acid_mmol_l(self, ph: ArrayLike, temperature_c: float) -> Array:
        """Acid beyond the total that comes in at a temperature, down to a pH [mmol/L].

        A buffer whose pH rises on cooling stands above its window as measured then, and
        takes up more carbon dioxide.
        """
        if self.gas is None:
            return np.zeros(np.shape(ph))
        taken = self.gas.acid_mmol_l(ph, temperature_c)
        return np.maximum(taken - self.gas.counted_mmol_l, 0.0)

    @property
    def has_load(self) -> bool:
        """Whether there is a load at all; a trace of computed carbon dioxide is none."""
        return max(self.acid_mmol_l, self.base_mmol_l) >= LEAST_LOAD_MMOL_L

    def scaled(self, acid_factor: float, base_factor: float) -> LoadBudget:
        """Return the budget with every load of acid and of base times a factor."""
        items = tuple(
            replace(
                item,
                acid_mmol_l=acid_factor * item.acid_mmol_l,
                base_mmol_l=base_factor * item.base_mmol_l,
            )
            for item in self.items
        )
        gas = None if self.gas is None else self.gas.scaled(acid_factor)
        return LoadBudget(items, gas)

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
    taken = gas_uptake(library, brief)
    if taken is not None:
        items.append(
            LoadItem(
                taken.name,
                taken.counted_mmol_l,
                0.0,
                "derived",
                "sander_2023",
                taken.reason,
                False,
            )
        )
    return LoadBudget(tuple(items), taken)


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
