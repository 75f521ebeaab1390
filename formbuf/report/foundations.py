"""Constants that a result rests on, each with its source and basis."""

from __future__ import annotations

from typing import Any

from formbuf.advice.results import Candidate, Shortlist
from formbuf.library.records import Quantity
from formbuf.product.osmotics import OSMOTIC

#: Properties of water that the calculation uses, and what they are called.
WATER = {
    "debye_huckel_slope_log10_molal": "Debye-Hückel slope A (log10, molal)",
    "pkw_molal": "pKw (molal)",
}
REFERENCE_C = 25.0


def constants(result: Shortlist, shown: list[Candidate]) -> dict[str, Any]:
    """Return the constants behind the candidates shown, as plain data.

    Parameters
    ----------
    result : Shortlist
    shown : list of Candidate
    """
    components = _components(shown)
    return {
        "ionization": _ionization(result, components),
        "associations": _associations(result, components),
        "water": _water(result),
        "osmotic": _osmotic(result, shown),
        "volumes": _volumes(result),
    }


def quantity(found: Quantity) -> dict[str, Any]:
    """Return one quantity as plain data."""
    return {
        "value": found.value,
        "unit": found.unit,
        "uncertainty": found.uncertainty,
        "source": found.source,
        "locator": found.locator,
        "basis": found.basis,
    }


def _components(shown: list[Candidate]) -> list[str]:
    """Ionising components of the candidates shown, their own species first."""
    own = [name for c in shown for name in c.system.species]
    dissolved = [
        ladder.name
        for c in shown
        if c.mixture is not None
        for ladder in c.mixture.ladders
    ]
    return list(dict.fromkeys([*own, *dissolved]))


def _ionization(result: Shortlist, components: list[str]) -> list[dict[str, Any]]:
    library = result.library
    rows = []
    for name in components:
        if name not in library.species:
            continue
        species = library.species[name]
        for step in species.steps:
            enthalpy, heat_capacity = step.dh_kj_mol, step.dcp_j_mol_k
            rows.append(
                {
                    "species": name,
                    "name": species.name,
                    "step": step.step,
                    "acid_charge": step.acid_charge,
                    "pka": quantity(step.pka),
                    "dh_kj_mol": quantity(enthalpy) if enthalpy else None,
                    "dcp_j_mol_k": quantity(heat_capacity) if heat_capacity else None,
                    "conflict": [
                        {"quantity": c.quantity, "value": c.value, "source": c.source}
                        for c in step.conflict
                    ],
                    "overlay": step.overlay,
                }
            )
    return rows


def _associations(result: Shortlist, components: list[str]) -> list[dict[str, Any]]:
    library = result.library
    return [
        {
            "product": a.product,
            "species": name,
            "units": a.units,
            "charge": a.charge,
            "log10_k": quantity(a.log10_k),
        }
        for name in components
        if name in library.species
        for a in library.species[name].associations
    ]


def _water(result: Shortlist) -> list[dict[str, Any]]:
    return [
        {
            "name": WATER[row.quantity],
            "temperature_c": row.temperature_c,
            **quantity(row.value),
        }
        for row in result.library.water_properties
        if row.recommended
        and row.quantity in WATER
        and row.temperature_c == REFERENCE_C
    ]


def _osmotic(result: Shortlist, shown: list[Candidate]) -> list[dict[str, Any]]:
    """Coefficients of the osmotic law for what the candidates hold."""
    held: set[str] = set()
    for c in shown:
        held.update(f"{s.component}:{s.charge}" for s in c.species_states)
        if c.mixture is not None:
            held.update(c.mixture.neutrals_mol_kg)
    rows = []
    for row in result.library.read_table(OSMOTIC):
        pair = (row.text("cation"), row.text("anion"))
        neutral = row.text("neutral")
        if not (neutral in held or (pair[0] and set(pair) <= held)):
            continue
        rows.append(
            {
                "of": neutral or " with ".join(pair),
                "value": row.figure("coefficient_kg_mol"),
                "unit": "kg/mol",
                "uncertainty": row.figure("uncertainty_kg_mol"),
                "source": row.text("source"),
                "locator": row.text("locator"),
                "basis": row.text("basis"),
            }
        )
    return rows


def _volumes(result: Shortlist) -> list[dict[str, Any]]:
    """Partial specific volumes of what the brief puts into the bottle."""
    library, brief = result.library, result.brief
    wanted = ["protein"] if brief.drug.is_protein else []
    keys = [row.material for row in brief.excipient]
    if brief.tonicity.agent:
        keys.append(brief.tonicity.agent)
    for key in keys:
        wanted += list(library.find_material(key).contents)
    wanted += ["default_salt"]
    return [
        {"of": name, **quantity(library.partial_volumes[name].volume_ml_g)}
        for name in dict.fromkeys(wanted)
        if name in library.partial_volumes
    ]
