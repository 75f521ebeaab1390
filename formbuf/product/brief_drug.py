"""The drug in a brief: amount, ionization steps and measured titration."""

from __future__ import annotations

import itertools
from typing import Annotated

from pydantic import Field

from formbuf.product.brief_origin import Location
from formbuf.product.brief_tables import Id, Number, Table, Text, Whole
from formbuf.product.vocabulary import PROTEIN_GROUPS, DrugKind

Count = Annotated[Number, Field(ge=0, le=100_000)]
Residues = Annotated[str, Field(strict=True, min_length=1, max_length=50_000)]


class Pka(Table):
    """One proton of a molecule; ``acid_charge`` is the charge of the whole molecule."""

    pka: Number = Field(ge=-5, le=20, description="pK at 25 C, zero ionic strength")
    acid_charge: Whole = Field(
        ge=-30, le=30, description="Charge of the molecule before it loses this proton"
    )
    dh_kj_mol: Number | None = Field(
        default=None, ge=-200, le=200, description="Enthalpy of ionization, kJ/mol"
    )
    dcp_j_mol_k: Number | None = Field(
        default=None,
        ge=-2000,
        le=2000,
        description="Heat capacity of ionization, J/(mol K)",
    )


class TitrationPoint(Table):
    """One reading of a measured titration of the product without buffer."""

    ph: Number = Field(ge=0, le=14, description="pH read")
    base_mmol_l: Number = Field(
        ge=-1000, le=1000, description="Strong base added, mmol/L; negative for acid"
    )


def ladder_faults(key: str, steps: tuple[Pka, ...]) -> list[tuple[Location, str, str]]:
    """Return a fault where the steps, ascending in pK, do not lose a charge each."""
    order = sorted(range(len(steps)), key=lambda index: steps[index].pka)
    for before, after in itertools.pairwise(order):
        expected = steps[before].acid_charge - 1
        if steps[after].acid_charge != expected:
            what = (
                f"acid_charge {steps[after].acid_charge} does not follow "
                f"{steps[before].acid_charge} at the pK below it: each proton lost "
                "takes one charge from the whole molecule"
            )
            return [((key, after, "acid_charge"), what, str(expected))]
    return []


class ProteinChain(Table):
    """One polypeptide chain of the drug, in one-letter codes."""

    sequence: Residues = Field(description="Sequence in one-letter codes")
    copies: Whole = Field(
        default=1, ge=1, le=1000, description="How often the molecule holds the chain"
    )


class Drug(Table):
    """The drug: how much, and what of it binds protons."""

    kind: DrugKind | None = Field(default=None, description="Kind of drug")
    name: Text | None = Field(default=None, description="Name or code of the drug")
    concentration_mg_ml: Number | None = Field(
        default=None, ge=0, le=1000, description="Concentration, mg/mL"
    )
    concentration_mmol_l: Number | None = Field(
        default=None, ge=0, le=5000, description="Concentration, mmol/L"
    )
    molar_mass_g_mol: Number | None = Field(
        default=None,
        ge=10,
        le=1e10,
        description="Molar mass of the form weighed, g/mol",
    )
    isoelectric_point: Number | None = Field(
        default=None, ge=0, le=14, description="Isoelectric point"
    )
    net_charge: Number | None = Field(
        default=None,
        ge=-10000,
        le=10000,
        description="Net charge per molecule at net_charge_ph",
    )
    net_charge_ph: Number | None = Field(
        default=None, ge=0, le=14, description="pH of the net charge"
    )
    chain: tuple[ProteinChain, ...] = Field(
        default=(), max_length=60, description="Polypeptide chains of a protein"
    )
    residues: dict[Id, Count] = Field(
        default_factory=dict,
        max_length=20,
        description="Ionisable group of a protein = count per molecule",
    )
    disulfides: Whole | None = Field(
        default=None, ge=0, le=10000, description="Disulfide bonds per molecule"
    )
    counter_ion: Id | None = Field(
        default=None, description="Ion or species of the drug salt"
    )
    counter_ion_per_mole: Number | None = Field(
        default=None, gt=0, le=20, description="Counter-ions per mole of drug"
    )
    groups: tuple[Id, ...] = Field(
        default=(), max_length=40, description="Functional groups"
    )
    pka: tuple[Pka, ...] = Field(
        default=(), max_length=20, description="Ionization steps"
    )
    titration: tuple[TitrationPoint, ...] = Field(
        default=(), max_length=500, description="Measured titration without buffer"
    )
    titration_file: Text | None = Field(
        default=None,
        description="CSV of a titration of the protein: ph, mmol_g (base per gram)",
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Check amounts, ladder, counter-ion and titration."""
        found = ladder_faults("pka", self.pka)
        mass, amount = self.concentration_mg_ml, self.concentration_mmol_l
        if mass is not None and amount is not None:
            what = "is given beside concentration_mmol_l"
            found.append((("concentration_mg_ml",), what, "one of the two"))
        needs_moles = "pka" if self.pka else "counter_ion" if self.counter_ion else ""
        if needs_moles and mass and self.molar_mass_g_mol is None:
            what = f"is missing: {needs_moles} counts moles, the brief gives mg/mL"
            found.append((("molar_mass_g_mol",), what, "a molar mass, g/mol"))
        if self.counter_ion_per_mole is not None and self.counter_ion is None:
            what = "is given without drug.counter_ion"
            found.append((("counter_ion_per_mole",), what, "both or neither"))
        return found + self._protein_faults() + self._titration_faults()

    def _protein_faults(self) -> list[tuple[Location, str, str]]:
        """Check the descriptions of a protein against each other."""
        found: list[tuple[Location, str, str]] = []
        if (self.net_charge is None) != (self.net_charge_ph is None):
            given = "net_charge" if self.net_charge is not None else "net_charge_ph"
            other = "net_charge_ph" if given == "net_charge" else "net_charge"
            found.append(((given,), f"is given without {other}", "both or neither"))
        elif self.net_charge is not None and self.isoelectric_point is None:
            what = "is given without isoelectric_point, which a line of charge needs"
            found.append((("net_charge",), what, "both or neither"))
        if self.chain and self.residues:
            found.append((("residues",), "are given beside chain", "one of the two"))
        if self.disulfides is not None and not self.chain:
            what = "is given without [[drug.chain]]; count free cysteine in residues"
            found.append((("disulfides",), what, "only with chain"))
        for name in self.residues:
            if name not in PROTEIN_GROUPS:
                known = ", ".join(PROTEIN_GROUPS)
                found.append((("residues", name), "is no group known here", known))
        described = "chain" if self.chain else "residues" if self.residues else ""
        if described and self.pka:
            found.append(((described,), "is given beside pka", "one of the two"))
        return found + self._amount_faults(described)

    def _amount_faults(self, described: str) -> list[tuple[Location, str, str]]:
        """Check that charges per molecule come with moles; chains bring their own."""
        counts = "residues" if self.residues else ""
        counts = counts or ("net_charge" if self.net_charge is not None else "")
        mass = self.concentration_mg_ml
        if counts and mass and self.molar_mass_g_mol is None and described != "chain":
            what = f"is missing: {counts} counts moles, the brief gives mg/mL"
            return [(("molar_mass_g_mol",), what, "a molar mass, g/mol")]
        return []

    def _titration_faults(self) -> list[tuple[Location, str, str]]:
        points = self.titration
        if points and self.titration_file is not None:
            what = "is given beside [[drug.titration]]"
            return [(("titration_file",), what, "one of the two")]
        if points and self.pka:
            what = "is given beside pka, which describes the same protons"
            return [(("titration",), what, "one of the two")]
        if len(points) == 1:
            return [(("titration",), "holds one point", "two points or more")]
        for index, (before, after) in enumerate(itertools.pairwise(points)):
            if after.ph <= before.ph or after.base_mmol_l <= before.base_mmol_l:
                what = "does not rise: base added must raise the pH"
                return [(("titration", index + 1), what, "rising ph and base_mmol_l")]
        return []
