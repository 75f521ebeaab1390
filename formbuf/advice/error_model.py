"""How sure each input of a prediction is: the error model.

Every figure is one standard deviation from ``uncertainty.csv`` or, for the constants
of ionization, from their own row; a brief may replace each. Errors are taken as
normal and independent, except that one error of a constant serves every candidate,
temperature and pH in which the constant takes part.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from formbuf.chemistry.ionization import Ladder
from formbuf.errors import KnowledgeError, UnknownNameError
from formbuf.library import Library
from formbuf.library.records import BASES, Basis, IonizationStep, Species
from formbuf.library.tables import Column, Schema
from formbuf.product.background import DRUG
from formbuf.product.uncertainty_parts import Preparation, UncertaintyInfo

UNCERTAINTY = Schema(
    "uncertainty.csv",
    (
        Column("key", "id", required=True),
        Column("value", "number", required=True, low=-1000.0, high=1000.0),
        Column("unit", required=True),
        Column("what", required=True),
        Column("advice"),
        Column("source", "id", refers_to="sources.csv"),
        Column("locator"),
        Column("basis", required=True, choices=BASES),
        Column("reason", required=True),
    ),
    ("key",),
)
#: Temperatures [C] between which pK(T) rests on measurements.
MEASURED_LOW_C, MEASURED_HIGH_C = 0.0, 60.0
#: pK from which a proton on an amine or amino acid sits on nitrogen, and below which
#: one of an acid sits on a carboxyl group.
NITROGEN_FROM_PKA, CARBOXYL_BELOW_PKA = 5.5, 7.0

Group = Literal["nitrogen", "carboxyl", "other"]


@dataclass(frozen=True, slots=True)
class Deviation:
    """One figure of the error model and why it is what it is.

    Attributes
    ----------
    key : str
    value : float
        One standard deviation (or a mean, where the key says so) in ``unit``.
    unit, what, advice : str
        ``what`` names the input, ``advice`` what would make it surer.
    basis : Basis
    source : str
        Id of a source; empty where the basis allows none.
    reason : str
    stated : bool
        Whether the brief states it.
    """

    key: str
    value: float
    unit: str
    what: str
    advice: str
    basis: Basis
    source: str
    reason: str
    stated: bool = False


@dataclass(frozen=True, slots=True)
class StepError:
    """Errors of one ionization step.

    ``dh_offset_kj_mol`` and ``dcp_offset_j_mol_k`` are what is added to the constants
    that the ladder counts as zero where they are unknown.
    """

    pka: float
    dh_offset_kj_mol: float
    dh_kj_mol: float
    dcp_offset_j_mol_k: float
    dcp_j_mol_k: float
    dh_is_unknown: bool


@dataclass(frozen=True)
class ErrorModel:
    """The error model of one brief.

    Attributes
    ----------
    figures : mapping of str to Deviation
    preparation : {"weighed", "adjusted"}
    stated : UncertaintyInfo
    """

    figures: Mapping[str, Deviation]
    preparation: Preparation
    stated: UncertaintyInfo

    def number(self, key: str) -> float:
        """Return one figure.

        Raises
        ------
        KnowledgeError
            If ``uncertainty.csv`` lacks the key.
        """
        entry = self.figures.get(key)
        if entry is None:
            raise KnowledgeError([f"uncertainty.csv:1:key: {key} is missing"])
        return entry.value

    def activity(self, acid_charge: int, ionic_strength_mol_kg: float) -> float:
        """Error of the activity model in the pK of a step, as a standard deviation.

        Parameters
        ----------
        acid_charge : int
            Charge of the form that still holds the proton; 1 for H+ itself.
        ionic_strength_mol_kg : float
            [mol/kg], 0 to about 0.5.
        """
        slope = self.number("activity_slope_kg_mol")
        grown = slope * abs(2 * acid_charge - 1) * ionic_strength_mol_kg
        return math.hypot(self.number("activity_floor_ph"), grown)

    def extrapolation(self, temperature_c: float) -> float:
        """Error in a pK at a temperature without measurements, standard deviation."""
        beyond = max(temperature_c - MEASURED_HIGH_C, MEASURED_LOW_C - temperature_c)
        return self.number("extrapolation_per_k") * max(beyond, 0.0)

    def step_errors(self, library: Library, ladder: Ladder) -> tuple[StepError, ...]:
        """Return the errors of every step of a component.

        Parameters
        ----------
        library : Library
        ladder : Ladder
            A species of the library, the drug, or a macro-ion.
        """
        if ladder.curve is not None:
            shift = self.number("protein_titration_ph")
            return (StepError(shift, 0.0, 0.0, 0.0, 0.0, False),)
        if ladder.is_macro_ion:
            spread = self.number("protein_group_pka")
            heat = self.number("drug_dh_kj_mol")
            one = StepError(spread, 0.0, heat, 0.0, 0.0, False)
            return (one,) * len(ladder.pka)
        if ladder.name == DRUG:
            return tuple(self._drug_step(ladder, k) for k in range(len(ladder.pka)))
        species = library.species[ladder.name]
        return tuple(self._step(species, step) for step in species.steps)

    def _step(self, species: Species, step: IonizationStep) -> StepError:
        name, stated = species.id, self.stated
        pka = step.pka.uncertainty
        if name in stated.pka or pka is None:
            pka = stated.pka.get(name, self.number("pka_default"))
        group = group_of_step(species.family, step.pka.value)
        dh, dcp = step.dh_kj_mol, step.dcp_j_mol_k
        offset, spread = 0.0, self.number("dh_default_kj_mol")
        if dh is None:
            offset = self.number(f"missing_dh_{group}_mean_kj_mol")
            spread = self.number(f"missing_dh_{group}_kj_mol")
        elif dh.uncertainty is not None:
            spread = dh.uncertainty
        bend, width = 0.0, self.number("dcp_default_j_mol_k")
        if dcp is None:
            bend = self.number(f"missing_dcp_{group}_mean_j_mol_k")
            width = self.number(f"missing_dcp_{group}_j_mol_k")
        elif dcp.uncertainty is not None:
            width = dcp.uncertainty
        return StepError(
            pka,
            offset,
            stated.dh_kj_mol.get(name, spread),
            bend,
            stated.dcp_j_mol_k.get(name, width),
            dh is None,
        )

    def _drug_step(self, ladder: Ladder, k: int) -> StepError:
        pka, charge = ladder.pka[k], ladder.charges[k]
        unknown = math.isnan(ladder.dh_kj_mol[k])
        group = group_of_step("amine" if charge > 0 else "carboxylic acid", pka)
        bend = self.number(f"missing_dcp_{group}_mean_j_mol_k")
        width = self.number(f"missing_dcp_{group}_j_mol_k")
        if ladder.dcp_j_mol_k[k]:
            bend, width = 0.0, self.number("dcp_default_j_mol_k")
        return StepError(
            self.number("drug_pka"),
            self.number(f"missing_dh_{group}_mean_kj_mol") if unknown else 0.0,
            self.number(f"missing_dh_{group}_kj_mol" if unknown else "drug_dh_kj_mol"),
            bend,
            width,
            unknown,
        )


def group_of_step(family: str, pka: float) -> Group:
    """Return the kind of group that a proton leaves, for an unknown enthalpy.

    Parameters
    ----------
    family : str
        As in ``species.csv``.
    pka : float
    """
    if "amin" in family and pka >= NITROGEN_FROM_PKA:
        return "nitrogen"
    acid = "carbox" in family or "amin" in family
    return "carboxyl" if acid and pka < CARBOXYL_BELOW_PKA else "other"


def error_model(library: Library, stated: UncertaintyInfo | None = None) -> ErrorModel:
    """Return the error model of the library with a brief's figures on top.

    Parameters
    ----------
    library : Library
    stated : UncertaintyInfo, optional
        What the brief says under ``[uncertainty]``.

    Raises
    ------
    KnowledgeError
        If ``uncertainty.csv`` is broken.
    UnknownNameError
        For a species that the library does not hold.
    """
    given = stated or UncertaintyInfo()
    for key in ("pka", "dh_kj_mol", "dcp_j_mol_k"):
        for name in getattr(given, key):
            if name not in library.species:
                where = f"uncertainty.{key}"
                raise UnknownNameError("species", name, library.species, where=where)
    figures = {}
    for row in library.read_table(UNCERTAINTY):
        key = row.text("key")
        own = given.numbers.get(key)
        figures[key] = Deviation(
            key,
            row.figure("value") if own is None else own,
            row.text("unit"),
            row.text("what"),
            row.text("advice"),
            row.text("basis"),  # type: ignore[arg-type]
            row.text("source"),
            row.text("reason"),
            own is not None,
        )
    return ErrorModel(figures, given.preparation, given)
