"""From what is weighed to what the solver needs, and back to what a product shows.

A composition is a set of materials in mmol per litre of solution (or per kg of
water), each a number or an array over states. It becomes a `Mixture`: ladders with
total molalities, strong ions and uncharged solutes, and the water in which they
are dissolved.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import equilibrium, osmolality, speciation, titration
from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.ionization import Aggregate, Ladder
from formbuf.chemistry.speciation import Particle
from formbuf.chemistry.titration import Titrant, Titration
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import Material, Species

Array = NDArray[np.float64]
AmountBasis = Literal["solution", "water"]

#: Ions whose complexes with citrate, edetate or phosphate the solver leaves out.
COMPLEXING_IONS = frozenset({"calcium", "magnesium", "zinc", "aluminium", "iron"})
#: Temperature at which a freezing-point osmometer compares solutions [C].
OSMOMETER_TEMPERATURE_C = 0.0
#: Solutes may not take more than this share of the volume.
MOST_SOLUTE_VOLUME_ML_L = 600.0


@dataclass(frozen=True)
class Mixture:
    """A solution ready for the solver; arrays share the leading shape of states.

    Attributes
    ----------
    ladders : tuple of Ladder
    totals_mol_kg : ndarray, shape (..., components)
    ions_mol_kg : mapping of str to ndarray
        Strong ions by id.
    ion_charges : mapping of str to int
    neutrals_mol_kg : mapping of str to ndarray
    water_kg_l : ndarray, shape (...)
        Water per litre of solution [kg/L]; 1 where amounts are per kg of water.
    open_components : tuple of str
    notes : tuple of str
        What the model leaves out for this composition.
    """

    ladders: tuple[Ladder, ...]
    totals_mol_kg: Array
    ions_mol_kg: Mapping[str, Array]
    ion_charges: Mapping[str, int]
    neutrals_mol_kg: Mapping[str, Array]
    water_kg_l: Array
    open_components: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()

    @property
    def strong_charge_mol_kg(self) -> Array:
        """Sum of z m over the strong ions."""
        total: Array = np.zeros(np.shape(self.water_kg_l))
        for name, amount in self.ions_mol_kg.items():
            total = total + self.ion_charges[name] * amount
        return total

    @property
    def strong_charge2_mol_kg(self) -> Array:
        """Sum of z^2 m over the strong ions."""
        total: Array = np.zeros(np.shape(self.water_kg_l))
        for name, amount in self.ions_mol_kg.items():
            total = total + self.ion_charges[name] ** 2 * amount
        return total

    def index(self, component: str) -> int:
        """Position of a component among the ladders; -1 where it is absent."""
        names = [ladder.name for ladder in self.ladders]
        return names.index(component) if component in names else -1

    def solve(
        self, temperature_c: ArrayLike, *, model: ActivityModel = "guggenheim"
    ) -> Solution:
        """Solve for pH at one temperature (or one per state) [C]."""
        return equilibrium.solve(
            self.ladders,
            self.totals_mol_kg,
            self.strong_charge_mol_kg,
            self.strong_charge2_mol_kg,
            temperature_c,
            open_components=self.open_components,
            model=model,
        )

    def titrate(
        self, temperature_c: ArrayLike, ph: ArrayLike, titrant: Titrant
    ) -> Titration:
        """Amount of titrant [mol/kg water] that gives the stated pH."""
        return titration.titrant_for_ph(
            self.ladders,
            self.totals_mol_kg,
            self.strong_charge_mol_kg,
            self.strong_charge2_mol_kg,
            temperature_c,
            ph,
            titrant,
            open_components=self.open_components,
        )

    def dissolved(self, temperature_c: ArrayLike, solution: Solution) -> list[Particle]:
        """Every charged or ionising particle with its molality."""
        ions = [
            Particle(name, self.ion_charges[name], np.asarray(amount))
            for name, amount in self.ions_mol_kg.items()
        ]
        return ions + speciation.particles(
            self.ladders,
            self.totals_mol_kg,
            temperature_c,
            solution,
            open_components=self.open_components,
        )

    def osmolality(
        self,
        temperature_c: ArrayLike,
        solution: Solution,
        law: osmolality.OsmoticLaw,
    ) -> osmolality.Osmolality:
        """Osmolality of the whole solution, as a freezing-point osmometer reads it.

        The particles are those of the solution solved at ``temperature_c``; the
        coefficients, mostly fitted to freezing points, hold near 0 C.
        """
        return osmolality.osmolality(
            self.dissolved(temperature_c, solution) + speciation.water_ions(solution),
            self.neutrals_mol_kg,
            OSMOMETER_TEMPERATURE_C,
            law,
        )

    def capacity_mmol_l_ph(self, solution: Solution) -> Array:
        """Differential capacity of everything [mmol/L per pH]."""
        beta: Array = 1000.0 * capacity_mol_kg_ph(solution) * self.water_kg_l
        return beta

    def with_ion(self, ion: str, charge: int, amount_mol_kg: ArrayLike) -> Mixture:
        """Return the mixture with more of a strong ion [mol/kg water]."""
        ions = dict(self.ions_mol_kg)
        ions[ion] = np.asarray(ions.get(ion, 0.0) + np.asarray(amount_mol_kg))
        return replace(
            self, ions_mol_kg=ions, ion_charges={**self.ion_charges, ion: charge}
        )


@dataclass(frozen=True, slots=True)
class Extra:
    """Something dissolved that is no material of the tables: the drug.

    Attributes
    ----------
    name : str
    ladder : Ladder or None
        Its protonation states, where the brief gives them.
    mmol_l : float
        Molar concentration; 0 where unknown (a protein given by mass only).
    mg_ml : float
        Mass concentration, for the volume it takes up.
    volume_ml_g : float
        Partial specific volume.
    ions_mmol_l : mapping of str to float
        Counter-ions it brings: strong ions or components.
    """

    name: str
    ladder: Ladder | None
    mmol_l: float
    mg_ml: float
    volume_ml_g: float
    ions_mmol_l: Mapping[str, float] = field(default_factory=dict)


def ladder_of(species: Species) -> Ladder:
    """Return the ladder of a species of the library; unknown enthalpies become NaN."""
    steps = species.steps
    return Ladder(
        species.id,
        steps[0].acid_charge,
        tuple(s.pka.value for s in steps),
        tuple(s.dh_kj_mol.value if s.dh_kj_mol else float("nan") for s in steps),
        tuple(s.dcp_j_mol_k.value if s.dcp_j_mol_k else 0.0 for s in steps),
        tuple(
            Aggregate(a.product, a.units, a.charge, a.log10_k.value)
            for a in species.associations
        ),
    )


def volume_ml_mol(library: Library, material: Material) -> float:
    """Volume that one mole of a material takes up, without its crystal water [mL/mol]."""
    dry = material.molar_mass_g_mol.value - 18.015 * material.waters
    volumes = library.partial_volumes
    for component in material.contents:
        if component in volumes and len(material.contents) == 1:
            return dry * volumes[component].volume_ml_g.value
    if material.id in volumes:
        return dry * volumes[material.id].volume_ml_g.value
    has_ions = any(component in library.ions for component in material.contents)
    key = "default_salt" if has_ions else "default_organic"
    return dry * volumes[key].volume_ml_g.value


def mixture(
    library: Library,
    materials: Mapping[str, ArrayLike],
    *,
    basis: AmountBasis = "solution",
    extras: Sequence[Extra] = (),
    volume_temperature_c: float = 25.0,
    open_components: Sequence[str] = (),
) -> Mixture:
    """Turn weighed materials into a mixture for the solver.

    Parameters
    ----------
    library : Library
    materials : mapping of material id to array_like, shape (...)
        Amounts [mmol per litre of solution], or per kg of water with
        ``basis="water"``; not negative.
    basis : {"solution", "water"}
    extras : sequence of Extra
        The drug; only with ``basis="solution"``.
    volume_temperature_c : float
        Temperature at which volumes were measured [C].
    open_components : sequence of str
        Components in exchange with a gas; their amount is set afterwards.

    Returns
    -------
    Mixture

    Raises
    ------
    InputError
        For a material whose complex the solver does not model, or solutes that
        take up most of the volume.
    """
    amounts = {k: np.asarray(v, dtype=float) for k, v in materials.items()}
    shape = np.broadcast_shapes(*(a.shape for a in amounts.values()), ())
    records = {k: library.find_material(k) for k in amounts}
    for key, record in records.items():
        if not record.modelled:
            msg = f"{key}: {record.note or 'its complex is not modelled'}"
            raise InputError(msg, hint="leave it out of the calculation")
    water = _water(library, records, amounts, extras, basis, volume_temperature_c)
    zero = np.zeros(())
    content: dict[str, Array] = {}
    for key, record in records.items():
        for component, count in record.contents.items():
            content[component] = content.get(component, zero) + count * amounts[key]
    for extra in extras:
        for component, mmol_l in extra.ions_mmol_l.items():
            content[component] = content.get(component, zero) + mmol_l
    return _assemble(library, content, extras, shape, water, tuple(open_components))


def _water(
    library: Library,
    records: Mapping[str, Material],
    amounts: Mapping[str, Array],
    extras: Sequence[Extra],
    basis: AmountBasis,
    temperature_c: float,
) -> Array:
    if basis == "water":
        return np.ones(())
    volume: Array = np.zeros(())
    for key, record in records.items():
        volume = volume + amounts[key] / 1000.0 * volume_ml_mol(library, record)
    for extra in extras:
        volume = volume + extra.mg_ml * extra.volume_ml_g
    if np.any(volume > MOST_SOLUTE_VOLUME_ML_L):
        msg = (
            f"the solutes take up {float(np.max(volume)):.0f} mL of each litre, "
            f"allowed {MOST_SOLUTE_VOLUME_ML_L:g}"
        )
        raise InputError(msg, hint="check the amounts and their units")
    return osmolality.water_kg_l(volume, temperature_c)


def _assemble(
    library: Library,
    content_mmol: Mapping[str, Array],
    extras: Sequence[Extra],
    shape: tuple[int, ...],
    water: Array,
    open_components: tuple[str, ...],
) -> Mixture:
    """Sort the contents into ladders, strong ions and uncharged solutes."""
    shape = np.broadcast_shapes(shape, np.shape(water))
    water = np.broadcast_to(water, shape)

    def molal(mmol: ArrayLike) -> Array:
        values: Array = np.broadcast_to(mmol, shape) / 1000.0 / water
        return values

    ladders: list[Ladder] = []
    totals: list[Array] = []
    ions: dict[str, Array] = {}
    neutrals: dict[str, Array] = {}
    for component, mmol in content_mmol.items():
        if component in library.species:
            ladders.append(ladder_of(library.species[component]))
            totals.append(molal(mmol))
        elif component in library.ions:
            ions[component] = molal(mmol)
        else:
            neutrals[component] = molal(mmol)
    for extra in extras:
        if extra.ladder is not None:
            ladders.append(extra.ladder)
            totals.append(molal(extra.mmol_l))
        elif extra.mmol_l > 0.0:
            neutrals[extra.name] = molal(extra.mmol_l)
    stacked = np.stack(totals, axis=-1) if totals else np.zeros((*shape, 0))
    charges = {name: library.ions[name].charge for name in ions}
    return Mixture(
        tuple(ladders),
        stacked,
        ions,
        charges,
        neutrals,
        water,
        open_components,
        combined_notes(ions, [ladder.name for ladder in ladders]),
    )


def combined_notes(
    ions: Mapping[str, Array], components: Sequence[str]
) -> tuple[str, ...]:
    """Say which complexes the solver leaves out for these ions and components."""
    notes = []
    if "sulfate" in components:
        notes.append("ion pairs of sulfate are not modelled")
    metals = sorted(name for name in ions if name in COMPLEXING_IONS)
    binders = sorted(
        {"citrate", "phosphate", "edta", "carbonate", "tartrate", "malate"}
        & set(components)
    )
    if metals and binders:
        notes.append(
            f"complexes of {', '.join(metals)} with {', '.join(binders)} are not "
            "modelled: pH and osmolality leave them out"
        )
    return tuple(notes)
