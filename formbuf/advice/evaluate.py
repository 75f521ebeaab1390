"""What one made product shows: pH at every temperature, capacity, osmolality, dose."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.results import LiquidState, SpeciesState, Weighed
from formbuf.chemistry.capacity import (
    capacity_mol_kg_ph,
    component_capacity_mol_kg_ph,
    finite_capacity,
)
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.constants import (
    IONIZATION_HIGH_C,
    IONIZATION_LOW_C,
)
from formbuf.library import Library
from formbuf.product.composition import Mixture, mixture
from formbuf.product.liquid import (
    acidities_mmol_l,
    liquid_temperatures,
    slope_ends_c,
)
from formbuf.product.product_brief import ProductBrief
from formbuf.product.recipe import Recipe, weighed

Array = NDArray[np.float64]

STRONG_BASES = ("sodium_hydroxide", "potassium_hydroxide")
STRONG_ACIDS = ("hydrochloric_acid",)
NO_TITRANT: Mapping[str, float] = MappingProxyType({})


@dataclass(frozen=True)
class Product:
    """A made product and what it shows; see `LiquidState` for the states.

    Attributes
    ----------
    mixture : Mixture
    buffer_mmol_l : mapping of material to float
        All that is added for the pH, titrant included.
    own_mmol_l : mapping of material to float
        Of that, what the buffer answers for: less the titrant that the product would
        need without any buffer.
    composition : tuple of Weighed
        The buffer's own materials.
    tonicity_fill : Weighed or None
    states : tuple of LiquidState
    species_states : tuple of SpeciesState
    osmolality_mosm_kg, buffer_osmolality_mosm_kg : float
    unfitted_pairs : tuple of str
        Ion pairs of the product without osmotic data.
    titratable_acidity_mmol_l : float
        Strong base that brings it to pH 7.4; negative: strong acid.
    own_acidity_mmol_l : float
        Of that, what the buffer's own species take up.
    own_capacity_share : float
        Share of the buffer's first species in the buffer's capacity.
    """

    mixture: Mixture
    buffer_mmol_l: Mapping[str, float]
    own_mmol_l: Mapping[str, float]
    composition: tuple[Weighed, ...]
    tonicity_fill: Weighed | None
    states: tuple[LiquidState, ...]
    species_states: tuple[SpeciesState, ...]
    osmolality_mosm_kg: float
    buffer_osmolality_mosm_kg: float
    unfitted_pairs: tuple[str, ...]
    titratable_acidity_mmol_l: float
    own_acidity_mmol_l: float
    own_capacity_share: float


def evaluate(
    library: Library,
    brief: ProductBrief,
    buffer_mmol_l: Mapping[str, float],
    fill_mmol_l: float,
    whole: Mixture,
    species: tuple[str, ...],
    agent: str | None,
    law: OsmoticLaw,
    *,
    bare_titrant_mmol_l: Mapping[str, float] = NO_TITRANT,
) -> Product:
    """Describe a made product.

    Parameters
    ----------
    library : Library
    brief : ProductBrief
    buffer_mmol_l : mapping of material to float
        The buffer's own materials [mmol/L].
    fill_mmol_l : float
        Tonicity agent added [mmol/L].
    whole : Mixture
        The whole product, a single state.
    species : tuple of str
        The buffer's own species.
    agent : str or None
        Tonicity agent.
    law : OsmoticLaw
    bare_titrant_mmol_l : mapping of material to float
        What brings the product without buffer to its pH, as of a drug given as the
        free acid; no burden of the buffer.

    Returns
    -------
    Product
    """
    temperatures = liquid_temperatures(brief)
    at = np.array(list(temperatures))
    many = np.concatenate([at, *slope_ends_c(at)])
    solution = whole.solve(many)
    measure = list(temperatures).index(brief.ph.measure_temperature_c)
    own = [whole.index(name) for name in species if whole.index(name) >= 0]
    states = _states(brief, whole, own, temperatures, solution, measure)
    t = brief.ph.measure_temperature_c
    measured = whole.solve(t)
    osmol = whole.osmolality(t, measured, law)
    alone = 0.0
    own_mmol_l = less_titrant(buffer_mmol_l, bare_titrant_mmol_l)
    if own_mmol_l:
        bare = mixture(library, own_mmol_l)
        alone = float(bare.osmolality(t, bare.solve(t), law).osmolality_mosm_kg)
    brought = content_mmol_l(library, own_mmol_l, species)
    acidity, own_acidity = acidities_mmol_l(whole, t, measured, brought)
    first = whole.index(species[0]) if species else -1
    parts = component_capacity_mol_kg_ph(solution)[measure]
    own_total = float(parts[own].sum()) if own else 0.0
    fill = None
    if agent is not None and fill_mmol_l > 0.0:
        fill = Weighed(*weighed(library, {agent: fill_mmol_l})[0])
    return Product(
        whole,
        buffer_mmol_l,
        own_mmol_l,
        tuple(Weighed(*row) for row in weighed(library, buffer_mmol_l)),
        fill,
        states,
        _species_states(whole, t, measured),
        float(osmol.osmolality_mosm_kg),
        alone,
        tuple(f"{a} with {b}" for a, b in osmol.unfitted_pairs),
        acidity,
        own_acidity,
        float(parts[first]) / own_total if own_total > 0.0 and first >= 0 else 0.0,
    )


def content_mmol_l(
    library: Library, materials_mmol_l: Mapping[str, float], species: tuple[str, ...]
) -> dict[str, float]:
    """Amount of each of some species that materials bring [mmol/L]."""
    content = dict.fromkeys(species, 0.0)
    for key, mmol_l in materials_mmol_l.items():
        for component, count in library.find_material(key).contents.items():
            if component in content:
                content[component] += count * mmol_l
    return content


def less_titrant(
    buffer_mmol_l: Mapping[str, float], bare_titrant_mmol_l: Mapping[str, float]
) -> dict[str, float]:
    """Materials of a buffer without the titrant that the product needs anyway.

    One hydroxide stands for another.
    """
    own = dict(buffer_mmol_l)
    for kind in (STRONG_BASES, STRONG_ACIDS):
        left = sum(bare_titrant_mmol_l.get(key, 0.0) for key in kind)
        for key in kind:
            taken = min(own.get(key, 0.0), left)
            left -= taken
            if taken > 0.0:
                own[key] -= taken
    return {key: mmol_l for key, mmol_l in own.items() if mmol_l > 1e-9}


def _states(
    brief: ProductBrief,
    whole: Mixture,
    own: list[int],
    temperatures: Mapping[float, tuple[str, ...]],
    solution: Solution,
    measure: int,
) -> tuple[LiquidState, ...]:
    n = len(temperatures)
    at = np.array(list(temperatures))
    ph = solution.ph
    reference = ph[measure]
    low = ph[:n] - (reference - brief.ph.low)
    high = ph[:n] + (brief.ph.high - reference)
    single = whole.solve(at)
    finite = finite_capacity(
        whole.ladders,
        whole.totals_mol_kg,
        whole.strong_charge_mol_kg,
        whole.strong_charge2_mol_kg,
        at,
        single,
        low,
        high,
    )
    water = 1000.0 * float(whole.water_kg_l)
    total = capacity_mol_kg_ph(single) * water
    shares = component_capacity_mol_kg_ph(single)[:, own].sum(axis=-1) * water
    warmer, cooler = slope_ends_c(at)
    slope = (ph[n : 2 * n] - ph[2 * n :]) / (warmer - cooler)
    return tuple(
        LiquidState(
            float(t),
            kinds,
            float(ph[k]),
            float(slope[k]),
            float(total[k]),
            float(shares[k]),
            float(single.ionic_strength_mol_kg[k]),
            float(finite.acid_mol_kg[k]) * water,
            float(finite.base_mol_kg[k]) * water,
            not IONIZATION_LOW_C <= t <= IONIZATION_HIGH_C,
        )
        for k, (t, kinds) in enumerate(temperatures.items())
    )


def _species_states(
    whole: Mixture, temperature_c: float, solution: Solution
) -> tuple[SpeciesState, ...]:
    water = 1000.0 * float(whole.water_kg_l)
    rows = [
        SpeciesState(p.component, p.charge, float(p.molality_mol_kg) * water)
        for p in whole.dissolved(temperature_c, solution)
    ]
    return tuple(row for row in rows if row.mmol_l > 1e-6)


def single(recipe: Recipe) -> tuple[dict[str, float], float]:
    """Materials and fill of a recipe made at one concentration."""
    return (
        {k: float(v) for k, v in recipe.buffer_mmol_l.items() if float(v) > 0.0},
        float(recipe.fill_mmol_l),
    )
