"""A mixture under the error model: its pH, charge and amounts in every draw.

Nothing loops over draws: pK, amounts and charge become arrays along them, and one
call of the solver takes them all. The error of the activity model is put into the pK
of each step, which is how it acts on a buffer; into pH itself only by the share that
free hydrogen ions have in the capacity.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.draw_inputs import Amount, Builder, Input, Shift
from formbuf.advice.error_model import ErrorModel
from formbuf.advice.sampling import Sampler
from formbuf.chemistry import equilibrium
from formbuf.chemistry.batch import balance, prepare
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.ionization import pk_shift
from formbuf.chemistry.titration import STRONG_BASE, titrant_for_ph
from formbuf.library import Library
from formbuf.product.composition import Mixture

Array = NDArray[np.float64]


@dataclass
class Drawn:
    """A mixture in every draw.

    Attributes
    ----------
    mixture : Mixture
        The nominal one, a single state.
    model : ErrorModel
    sampler : Sampler
    totals_mol_kg : ndarray, shape (draws, components)
    charge_mol_kg, charge2_mol_kg : ndarray, shape (draws,)
        Strong-ion charge and squared charge.
    root_ionic_strength : float
        Nominal [mol^0.5 kg^-0.5].
    shifts : mapping of component to Shift
    reading : ndarray, shape (draws,)
        Added to the solved pH: activity coefficient of hydrogen ions.
    amounts_relative : ndarray, shape (draws,)
        Relative error of the osmolality through the amounts.
    inputs : dict of str to Input
        Everything that was drawn, by the name of its stream.
    """

    mixture: Mixture
    model: ErrorModel
    sampler: Sampler
    totals_mol_kg: Array
    charge_mol_kg: Array
    charge2_mol_kg: Array
    root_ionic_strength: float
    shifts: Mapping[str, Shift]
    reading: Array
    amounts_relative: Array
    inputs: dict[str, Input] = field(default_factory=dict)

    @property
    def count(self) -> int:
        """Number of draws; one where it is the nominal mixture."""
        return int(self.totals_mol_kg.shape[0])

    def nominal(self) -> Drawn:
        """Return the mixture without errors, as a single draw."""
        mixture = self.mixture
        return dataclasses.replace(
            self,
            totals_mol_kg=np.reshape(mixture.totals_mol_kg, (1, -1)),
            charge_mol_kg=np.reshape(mixture.strong_charge_mol_kg, 1),
            charge2_mol_kg=np.reshape(mixture.strong_charge2_mol_kg, 1),
            shifts={},
            reading=np.zeros(1),
            amounts_relative=np.zeros(1),
        )

    def pk_shift_at(self, temperature_c: float) -> dict[str, Array]:
        """Return the shift of every pK at a temperature, by component."""
        heat = float(pk_shift(1.0, 0.0, temperature_c))
        bend = float(pk_shift(0.0, 1.0, temperature_c))
        far = self.model.extrapolation(temperature_c)
        found = {}
        for name, (fixed, per_heat, per_bend) in self.shifts.items():
            shift = fixed + heat * per_heat + bend * per_bend
            if far:
                shift = shift + self._extrapolation(name, shift.shape[-1], far)
            found[name] = shift
        return found

    def _extrapolation(self, component: str, steps: int, deviation: float) -> Array:
        """Errors of pK at a temperature without measurements, shape (draws, steps)."""
        entry = self.model.figures["extrapolation_per_k"]
        columns = []
        for k in range(steps):
            stream = f"{component}:{k + 1}:extrapolation"
            label = f"{entry.what} ({component})"
            known = self.inputs.get(stream)
            most = max(deviation, known.deviation if known else 0.0)
            self.inputs[stream] = Input(stream, label, entry.advice, most, "1")
            columns.append(deviation * self.sampler.normal(stream))
        return np.stack(columns, axis=-1)

    def solve(self, temperature_c: float, base_mol_kg: Array | float = 0.0) -> Solution:
        """Solve every draw at a temperature, with strong base (or acid, negative)."""
        return equilibrium.solve(
            self.mixture.ladders,
            self.totals_mol_kg,
            self.charge_mol_kg + base_mol_kg,
            self.charge2_mol_kg + np.abs(base_mol_kg),
            temperature_c,
            open_components=self.mixture.open_components,
            pk_shift=self.pk_shift_at(temperature_c),
        )

    def ph(self, temperature_c: float, base_mol_kg: Array | float = 0.0) -> Array:
        """Return pH in every draw, shape (draws,)."""
        return self.solve(temperature_c, base_mol_kg).ph + self.reading

    def adjust(self, temperature_c: float, ph: Array) -> None:
        """Bring every draw to a pH with strong acid or base."""
        base = titrant_for_ph(
            self.mixture.ladders,
            self.totals_mol_kg,
            self.charge_mol_kg,
            self.charge2_mol_kg,
            temperature_c,
            ph - self.reading,
            STRONG_BASE,
            open_components=self.mixture.open_components,
            pk_shift=self.pk_shift_at(temperature_c),
        ).amount_mol_kg
        self.charge_mol_kg = self.charge_mol_kg + base
        self.charge2_mol_kg = np.maximum(self.charge2_mol_kg + base, 0.0)

    def charges_at(
        self,
        temperature_c: float,
        ph: Array | float,
        components: Sequence[int],
        *,
        shifted: bool = True,
    ) -> Array:
        """Charge that components carry at a pH, summed over them.

        Parameters
        ----------
        temperature_c : float
        ph : array_like, shape (draws,)
        components : sequence of int
            Positions among the ladders.
        shifted : bool
            Whether the errors of the pK count.

        Returns
        -------
        ndarray, shape (draws,)
            [mol/kg], at the nominal ionic strength.
        """
        ladders = [self.mixture.ladders[k] for k in components]
        names = {ladder.name for ladder in ladders}
        shifts = self.pk_shift_at(temperature_c) if shifted else {}
        batch, _ = prepare(
            ladders,
            self.totals_mol_kg[:, list(components)],
            np.zeros(self.count),
            np.zeros(self.count),
            temperature_c,
            pk_shift={name: shifts[name] for name in shifts if name in names},
        )
        root = np.full(self.count, self.root_ionic_strength)
        at = balance(batch, np.broadcast_to(ph, (self.count,)) - self.reading, root)
        total: Array = np.zeros(self.count)
        for part in at.sums:
            total = total + part.charge
        return total


def drawn(
    library: Library,
    model: ErrorModel,
    sampler: Sampler,
    mixture: Mixture,
    amounts: Sequence[Amount],
    temperature_c: float,
) -> Drawn:
    """Put a mixture under the error model.

    Parameters
    ----------
    library : Library
    model : ErrorModel
    sampler : Sampler
    mixture : Mixture
        A single state.
    amounts : sequence of Amount
        What was weighed, with its error; the rest of the mixture has none.
    temperature_c : float
        Temperature at which the mixture is measured [C].

    Returns
    -------
    Drawn
    """
    nominal = mixture.solve(temperature_c)
    ionic = float(nominal.ionic_strength_mol_kg)
    builder = Builder(model, sampler)
    totals, charge, charge2, osmoles = builder.amounts(mixture, amounts)
    shared = builder.volume(temperature_c)
    scale = 1.0 + shared
    return Drawn(
        mixture,
        model,
        sampler,
        totals * scale[:, np.newaxis],
        charge * scale,
        charge2 * scale,
        float(np.sqrt(ionic)),
        {
            ladder.name: builder.shifts(library, ladder, ionic)
            for ladder in mixture.ladders
        },
        builder.hydrogen(nominal, ionic),
        osmoles + shared,
        builder.inputs,
    )
