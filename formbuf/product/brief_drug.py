"""The drug in a brief: amount, ionization steps and measured titration."""

from __future__ import annotations

import itertools

from pydantic import Field

from formbuf.product.brief_origin import Location
from formbuf.product.brief_tables import Id, Number, Table, Text, Whole
from formbuf.product.vocabulary import DrugKind


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
        return found + self._titration_faults()

    def _titration_faults(self) -> list[tuple[Location, str, str]]:
        points = self.titration
        if len(points) == 1:
            return [(("titration",), "holds one point", "two points or more")]
        for index, (before, after) in enumerate(itertools.pairwise(points)):
            if after.ph <= before.ph or after.base_mmol_l <= before.base_mmol_l:
                what = "does not rise: base added must raise the pH"
                return [(("titration", index + 1), what, "rising ph and base_mmol_l")]
        return []
