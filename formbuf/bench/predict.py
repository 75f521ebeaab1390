"""pH, ionic strength, capacity and osmolality of a composition at temperatures.

The composition is fixed where it is made; its molalities then hold at every
temperature. Left out is what the solver leaves out: complexes of calcium, magnesium
and zinc, ion pairs.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Literal, get_args

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry import gas
from formbuf.chemistry.capacity import (
    capacity_mol_kg_ph,
    component_capacity_mol_kg_ph,
)
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.osmolality import Osmolality, freezing_point_c
from formbuf.constants import (
    ACTIVITY_LIMIT_MOL_KG,
    IONIZATION_HIGH_C,
    IONIZATION_LOW_C,
    REFERENCE_TEMPERATURE_K,
    STANDARD_PRESSURE_PA,
    ZERO_CELSIUS_K,
)
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import Material
from formbuf.notebook import html_table
from formbuf.product.composition import Mixture, ladder_of, mixture
from formbuf.product.osmotics import osmotic_law

if TYPE_CHECKING:
    import pandas as pd

Array = NDArray[np.float64]
Basis = Literal["solution", "molal"]
Amounts = Literal["mmol/L", "g/L", "mmol/kg", "g/kg"]
BASES: tuple[Basis, ...] = get_args(Basis)
AMOUNTS: tuple[Amounts, ...] = get_args(Amounts)

REFERENCE_C = REFERENCE_TEMPERATURE_K - ZERO_CELSIUS_K
#: Share of the capacity from which a missing enthalpy is worth a note.
SHARE_THAT_MATTERS = 0.05
#: Range in which the solubility of carbon dioxide rests on data, C.
GAS_LOW_C, GAS_HIGH_C = 0.0, 60.0
LARGEST_AMOUNT = 1e6
LARGEST_PRESSURE_PA = 5e5


@dataclass(frozen=True, slots=True)
class Added:
    """One material of a composition.

    Attributes
    ----------
    material, name : str
    mmol, grams : float
        Per litre of solution, or per kg of water with the molal basis.
    """

    material: str
    name: str
    mmol: float
    grams: float


@dataclass(frozen=True, slots=True)
class PredictedSpecies:
    """One dissolved particle; ``charge`` in elementary charges."""

    component: str
    charge: int
    mmol_kg: float


@dataclass(frozen=True, slots=True)
class PredictedState:
    """A composition at one temperature.

    Attributes
    ----------
    temperature_c : float
    ph : float
    ionic_strength_mol_kg : float
    capacity_mmol_kg_ph : float
        Of everything, per kg of water.
    capacity_mmol_l_ph : float or None
        Per litre of solution; None with the molal basis.
    osmolality_mosm_kg : float
    carbon_dioxide_pa : float or None
        Pressure of carbon dioxide in equilibrium with it; None without carbonate.
    species : tuple of PredictedSpecies
    notes : tuple of str
        What a reader must know about this state.
    """

    temperature_c: float
    ph: float
    ionic_strength_mol_kg: float
    capacity_mmol_kg_ph: float
    capacity_mmol_l_ph: float | None
    osmolality_mosm_kg: float
    carbon_dioxide_pa: float | None
    species: tuple[PredictedSpecies, ...]
    notes: tuple[str, ...]


#: What a table of a prediction shows.
SHOWN = (
    *("temperature_c", "ph", "ionic_strength_mol_kg", "capacity_mmol_kg_ph"),
    *("osmolality_mosm_kg", "carbon_dioxide_pa"),
)


@dataclass(frozen=True, slots=True)
class Prediction:
    """What a composition shows.

    Attributes
    ----------
    library : Library
    basis : {"solution", "molal"}
    added : tuple of Added
    water_kg_l : float or None
        Water per litre of solution; None with the molal basis.
    open_to_carbon_dioxide_pa : float or None
        Pressure of carbon dioxide above it; None where it is closed.
    states : tuple of PredictedState
        In the order of the temperatures asked for.
    """

    library: Library
    basis: Basis
    added: tuple[Added, ...]
    water_kg_l: float | None
    open_to_carbon_dioxide_pa: float | None
    states: tuple[PredictedState, ...]

    @property
    def table(self) -> pd.DataFrame:
        """One row per temperature as a pandas table, units in the column names."""
        import pandas as pd

        return pd.DataFrame(self._rows())

    def __repr__(self) -> str:
        found = (f"pH {s.ph:.2f} at {s.temperature_c:g} C" for s in self.states)
        return f"<Prediction of {self._composition()}: {', '.join(found)}>"

    def _repr_html_(self) -> str:
        """Return the states as a table for a notebook."""
        return html_table(f"Prediction of {self._composition()}", self._rows())

    def _composition(self) -> str:
        per = "kg" if self.basis == "molal" else "L"
        return ", ".join(f"{a.mmol:g} mmol/{per} {a.material}" for a in self.added)

    def _rows(self) -> list[dict[str, float | None]]:
        return [{name: getattr(s, name) for name in SHOWN} for s in self.states]


def predict(
    library: Library,
    materials: Mapping[str, float],
    temperatures_c: Sequence[float] = (REFERENCE_C,),
    *,
    amounts: Amounts = "mmol/L",
    open_to_carbon_dioxide_pa: float | None = None,
) -> Prediction:
    """Predict what a composition shows at temperatures.

    Parameters
    ----------
    library : Library
    materials : mapping of str to float
        Material (id, unique formula or unique name) and its amount, 0 or more.
    temperatures_c : sequence of float
        -20 to 121 [C]; ionization data rest on 0 to 77 C.
    amounts : {"mmol/L", "g/L", "mmol/kg", "g/kg"}
        Unit of the amounts: per litre of solution at 25 C, or per kg of water.
    open_to_carbon_dioxide_pa : float, optional
        Pressure of carbon dioxide with which the solution is in equilibrium at every
        temperature [Pa], 0 to 500 000; what carbonate was added then counts by its
        cation only. Closed if absent.

    Returns
    -------
    Prediction

    Raises
    ------
    UnknownNameError
        No material bears a name.
    InputError
        An amount, temperature or pressure cannot be used, or a closed carbonate
        solution would need more than 1 atm of carbon dioxide.
    ConvergenceError
        The equilibrium was not solved within its cap.
    """
    basis: Basis = "solution" if amounts in ("mmol/L", "g/L") else "molal"
    added = _added(library, materials, in_grams=amounts in ("g/L", "g/kg"))
    at = np.array([_temperature(t) for t in temperatures_c], dtype=float)
    if not at.size:
        msg = "no temperature is given, allowed at least one"
        raise InputError(msg)
    mixed = mixture(
        library,
        {row.material: row.mmol for row in added},
        basis="water" if basis == "molal" else "solution",
    )
    if open_to_carbon_dioxide_pa is not None:
        mixed = _opened(library, mixed, at, open_to_carbon_dioxide_pa)
    solution = mixed.solve(at)
    states = _states(library, mixed, at, solution, molal=basis == "molal")
    if open_to_carbon_dioxide_pa is None:
        _refuse_escaping_gas(states)
    return Prediction(
        library,
        basis,
        added,
        None if basis == "molal" else float(np.max(mixed.water_kg_l)),
        open_to_carbon_dioxide_pa,
        states,
    )


def _added(
    library: Library, materials: Mapping[str, float], *, in_grams: bool
) -> tuple[Added, ...]:
    if not materials:
        msg = "no material is given, allowed at least one"
        raise InputError(msg)
    rows: dict[str, Added] = {}
    for text, amount in materials.items():
        material = library.find_material(text)
        if not 0.0 <= amount <= LARGEST_AMOUNT:
            msg = f"{text}: amount {amount:g}, allowed 0 to {LARGEST_AMOUNT:g}"
            raise InputError(msg)
        if material.id in rows:
            msg = f"{text}: {material.id} is given twice, allowed once"
            raise InputError(msg, hint="Give the sum of both amounts.")
        rows[material.id] = _weighed(material, float(amount), in_grams=in_grams)
    return tuple(rows.values())


def _weighed(material: Material, amount: float, *, in_grams: bool) -> Added:
    molar_mass_g_mol = material.molar_mass_g_mol.value
    mmol = 1000.0 * amount / molar_mass_g_mol if in_grams else amount
    return Added(material.id, material.name, mmol, mmol * molar_mass_g_mol / 1000.0)


def _temperature(temperature_c: float) -> float:
    if not np.isfinite(temperature_c):
        msg = f"temperature {temperature_c:g} is no finite number, allowed -20 to 121 C"
        raise InputError(msg)
    return float(temperature_c)


def _opened(library: Library, mixed: Mixture, at: Array, pressure_pa: float) -> Mixture:
    """Return the mixture in equilibrium with carbon dioxide at each temperature."""
    if not 0.0 <= pressure_pa <= LARGEST_PRESSURE_PA:
        msg = (
            f"pressure of carbon dioxide {pressure_pa:g} Pa, allowed 0 to "
            f"{LARGEST_PRESSURE_PA:g} Pa"
        )
        raise InputError(msg)
    totals = np.broadcast_to(
        mixed.totals_mol_kg, (*at.shape, mixed.totals_mol_kg.shape[-1])
    ).copy()
    ladders = mixed.ladders
    dissolved = gas.dissolved_mol_kg(pressure_pa, at)
    place = mixed.index(gas.CARBONATE)
    if place < 0:
        ladders = (*ladders, ladder_of(library.get_species(gas.CARBONATE)))
        totals = np.concatenate([totals, dissolved[:, np.newaxis]], axis=-1)
    else:
        totals[:, place] = dissolved
    return replace(
        mixed,
        ladders=ladders,
        totals_mol_kg=totals,
        ions_mol_kg={k: _wide(v, at) for k, v in mixed.ions_mol_kg.items()},
        neutrals_mol_kg={k: _wide(v, at) for k, v in mixed.neutrals_mol_kg.items()},
        water_kg_l=_wide(mixed.water_kg_l, at),
        open_components=(gas.CARBONATE,),
    )


def _wide(values: Array, at: Array) -> Array:
    wide: Array = np.broadcast_to(values, at.shape)
    return wide


def _states(
    library: Library, mixed: Mixture, at: Array, solution: Solution, *, molal: bool
) -> tuple[PredictedState, ...]:
    law = osmotic_law(library)
    osmol = mixed.osmolality(at, solution, law)
    osmolality = _wide(osmol.osmolality_mosm_kg, at)
    capacity = 1000.0 * capacity_mol_kg_ph(solution)
    litre = mixed.capacity_mmol_l_ph(solution)
    particles = mixed.dissolved(at, solution)
    pressure = _pressure(mixed, at, solution)
    ice = freezing_point_c(np.maximum(osmolality, 0.0))
    shares = component_capacity_mol_kg_ph(solution)
    states = []
    for k, t in enumerate(at):
        notes = _notes(mixed, float(t), float(ice[k]), solution, shares, k, osmol)
        states.append(
            PredictedState(
                float(t),
                float(solution.ph[k]),
                float(solution.ionic_strength_mol_kg[k]),
                float(capacity[k]),
                None if molal else float(litre[k]),
                float(osmolality[k]),
                None if pressure is None else float(pressure[k]),
                tuple(
                    PredictedSpecies(
                        p.component,
                        p.charge,
                        1000.0 * float(_wide(p.molality_mol_kg, at)[k]),
                    )
                    for p in particles
                ),
                notes,
            )
        )
    return tuple(states)


def _pressure(mixed: Mixture, at: Array, solution: Solution) -> Array | None:
    """Pressure of carbon dioxide in equilibrium with the solution [Pa]."""
    place = mixed.index(gas.CARBONATE)
    if place < 0:
        return None
    if gas.CARBONATE in mixed.open_components:
        return gas.pressure_pa(mixed.totals_mol_kg[..., place], at)
    return gas.implied_pressure_pa(mixed.ladders, mixed.totals_mol_kg, at, solution)


def _notes(
    mixed: Mixture,
    temperature_c: float,
    first_ice_c: float,
    solution: Solution,
    shares: Array,
    k: int,
    osmol: Osmolality,
) -> tuple[str, ...]:
    notes = list(mixed.notes)
    if not IONIZATION_LOW_C <= temperature_c <= IONIZATION_HIGH_C:
        notes.append("outside 0 to 77 C the ionization data are extrapolated")
    if temperature_c < first_ice_c:
        notes.append(f"below the first ice at {first_ice_c:.2f} C: holds while liquid")
    strength = float(solution.ionic_strength_mol_kg[k])
    if strength > ACTIVITY_LIMIT_MOL_KG:
        notes.append(
            f"ionic strength {strength:.2f} mol/kg is above {ACTIVITY_LIMIT_MOL_KG:g}, "
            "up to which the activity model was checked"
        )
    if temperature_c != REFERENCE_C:
        total = float(shares[k].sum())
        notes += [
            f"an enthalpy of {ladder.name} is unknown: its pK is taken as at 25 C"
            for j, ladder in enumerate(mixed.ladders)
            if ladder.has_unknown_enthalpy
            and float(shares[k, j]) > SHARE_THAT_MATTERS * total
        ]
    if osmol.unfitted_pairs:
        pairs = ", ".join(f"{a} with {b}" for a, b in osmol.unfitted_pairs)
        notes.append(
            f"no osmotic data for {pairs}: osmolality may be up to 10 % too high"
        )
    has_gas = mixed.index(gas.CARBONATE) >= 0
    if has_gas and not GAS_LOW_C <= temperature_c <= GAS_HIGH_C:
        notes.append("outside 0 to 60 C the solubility of carbon dioxide is a guess")
    return tuple(notes)


def _refuse_escaping_gas(states: Sequence[PredictedState]) -> None:
    """Refuse a closed solution that carbon dioxide would leave in bubbles."""
    for state in states:
        pressure = state.carbon_dioxide_pa
        if pressure is not None and pressure > STANDARD_PRESSURE_PA:
            msg = (
                f"at {state.temperature_c:g} C and pH {state.ph:.2f} it would need "
                f"{pressure / 1000.0:.0f} kPa of carbon dioxide above it, allowed in a "
                f"closed solution {STANDARD_PRESSURE_PA / 1000.0:.0f} kPa: the gas leaves"
            )
            raise InputError(
                msg, hint="State the pressure above it: --open-to-carbon-dioxide PA."
            )
