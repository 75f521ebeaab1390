"""The uncertain inputs of one mixture: each drawn once, by name, and remembered."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.error_model import ErrorModel
from formbuf.advice.sampling import Sampler
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.water import water_density_kg_l
from formbuf.library import Library
from formbuf.product.background import DRUG
from formbuf.product.composition import Mixture

Array = NDArray[np.float64]
#: Errors of the pK of one component, each of shape (draws, steps): a fixed part, and
#: those of enthalpy [kJ/mol] and heat capacity [J/(mol K)].
Shift = tuple[Array, Array, Array]

#: Share of free hydrogen or hydroxide ions in the capacity from which the error of
#: their own activity coefficient counts.
LEAST_WATER_SHARE = 0.01


@dataclass(frozen=True, slots=True)
class Input:
    """One uncertain input.

    Attributes
    ----------
    name : str
        Of its stream of draws.
    label : str
        As people say it.
    advice : str
        What would make it surer.
    deviation : float
        One standard deviation.
    unit : str
    """

    name: str
    label: str
    advice: str
    deviation: float
    unit: str


@dataclass(frozen=True, slots=True)
class Amount:
    """Something put into the mixture, whose amount is uncertain.

    Attributes
    ----------
    source : Input
        Relative error of the amount.
    contents_mmol_l : mapping of component to float
        What it brings [mmol per litre of solution].
    """

    source: Input
    contents_mmol_l: Mapping[str, float]


class Builder:
    """Draws the inputs of one mixture and remembers each."""

    def __init__(self, model: ErrorModel, sampler: Sampler) -> None:
        self.model = model
        self.sampler = sampler
        self.inputs: dict[str, Input] = {}

    def draw(self, entry: Input) -> Array:
        """Return the errors of one input, shape (draws,), in its unit."""
        if entry.deviation <= 0.0:
            return np.zeros(self.sampler.count)
        self.inputs[entry.name] = entry
        return entry.deviation * self.sampler.normal(entry.name)

    def figure(self, key: str, name: str = "") -> Array:
        """Return the errors of an input that is a figure of the table."""
        entry = self.model.figures[key]
        stream = name or key
        label = entry.what
        return self.draw(Input(stream, label, entry.advice, entry.value, entry.unit))

    def amounts(
        self, mixture: Mixture, amounts: Sequence[Amount]
    ) -> tuple[Array, Array, Array, Array]:
        """Totals, charge and squared charge with their errors; osmoles as a share."""
        water = 1000.0 * float(mixture.water_kg_l)
        totals = np.tile(mixture.totals_mol_kg, (self.sampler.count, 1))
        zero = np.zeros(self.sampler.count)
        charge = zero + float(mixture.strong_charge_mol_kg)
        charge2 = zero + float(mixture.strong_charge2_mol_kg)
        osmoles = zero
        particles = float(np.sum(mixture.totals_mol_kg)) + sum(
            float(v)
            for v in (*mixture.ions_mol_kg.values(), *mixture.neutrals_mol_kg.values())
        )
        for amount in amounts:
            error = self.draw(amount.source)
            for component, mmol_l in amount.contents_mmol_l.items():
                change = error * (mmol_l / water)
                osmoles = osmoles + change / max(particles, 1e-12)
                position = mixture.index(component)
                if position >= 0:
                    totals[:, position] += change
                elif component in mixture.ion_charges:
                    z = mixture.ion_charges[component]
                    charge = charge + z * change
                    charge2 = charge2 + z * z * change
        return np.maximum(totals, 0.0), charge, np.maximum(charge2, 0.0), osmoles

    def volume(self, temperature_c: float) -> Array:
        """Relative error of every concentration through the volume."""
        around = water_density_kg_l(np.array([-0.5, 0.5]) + max(temperature_c, 0.5))
        expansion = float(np.log(around[0] / around[1]))
        return self.figure("volume_relative") + expansion * self.figure(
            "fill_temperature_k"
        )

    def shifts(
        self, library: Library, ladder: Ladder, ionic_strength_mol_kg: float
    ) -> Shift:
        """Errors of the pK of one component, see `Drawn`."""
        parts: list[tuple[Array, Array, Array]] = []
        names = step_names(library, ladder)
        errors = self.model.step_errors(library, ladder)
        for k, (error, name) in enumerate(zip(errors, names, strict=True)):
            fixed = self._constant(ladder, name, "pka", error.pka, "pKa", "1")
            if not ladder.is_macro_ion:
                spread = self.model.activity(ladder.charges[k], ionic_strength_mol_kg)
                fixed = fixed + self._activity(ladder, name, spread)
            what = "enthalpy"
            heat = self._constant(ladder, name, "dh", error.dh_kj_mol, what, "kJ/mol")
            what, unit = "heat capacity", "J/(mol K)"
            bend = self._constant(ladder, name, "dcp", error.dcp_j_mol_k, what, unit)
            parts.append(
                (
                    fixed,
                    error.dh_offset_kj_mol + heat,
                    error.dcp_offset_j_mol_k + bend,
                )
            )
        fixed_part, per_heat, per_bend = (
            np.stack(column, axis=-1) for column in zip(*parts, strict=True)
        )
        return fixed_part, per_heat, per_bend

    def _constant(
        self,
        ladder: Ladder,
        name: str,
        key: str,
        deviation: float,
        what: str,
        unit: str,
    ) -> Array:
        figure = {
            "pka": "drug_pka" if ladder.name == DRUG else "pka_default",
            "dh": "dh_default_kj_mol",
            "dcp": "dcp_default_j_mol_k",
        }[key]
        advice = self.model.figures[figure].advice
        label = f"{what} of {name.replace(':', ', step ')}"
        return self.draw(Input(f"{name}:{key}", label, advice, deviation, unit))

    def _activity(self, ladder: Ladder, name: str, deviation: float) -> Array:
        advice = self.model.figures["activity_floor_ph"].advice
        label = f"activity model for {name.replace(':', ', step ')}"
        return self.draw(Input(f"{name}:activity", label, advice, deviation, "1"))

    def hydrogen(self, nominal: Solution, ionic_strength_mol_kg: float) -> Array:
        """Error of pH through the activity coefficient of free hydrogen ions."""
        free = float(nominal.hydrogen_mol_kg + nominal.hydroxide_mol_kg)
        share = free / (free + float(np.sum(nominal.variance_mol_kg)))
        if share < LEAST_WATER_SHARE:
            return np.zeros(self.sampler.count)
        spread = share * self.model.activity(1, ionic_strength_mol_kg)
        advice = self.model.figures["activity_floor_ph"].advice
        label = "activity model for hydrogen ions"
        return self.draw(Input("hydrogen:activity", label, advice, spread, "1"))


def step_names(library: Library, ladder: Ladder) -> list[str]:
    """Names of the steps of a component, as ``citrate:3``."""
    if ladder.name in library.species:
        steps = library.species[ladder.name].steps
        return [f"{ladder.name}:{step.step}" for step in steps]
    return [f"{ladder.name}:{k + 1}" for k in range(len(ladder.pka))]
