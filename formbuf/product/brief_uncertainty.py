"""The table ``[uncertainty]`` of a brief: how sure its numbers are.

Every figure is one standard deviation and replaces that of ``uncertainty.csv``.
"""

from __future__ import annotations

from types import MappingProxyType
from typing import Annotated

from pydantic import Field

from formbuf.product.brief_tables import Id, Number, Table
from formbuf.product.uncertainty_parts import Preparation, UncertaintyInfo

_BY_SPECIES = 40
#: Keys that hold something else than the figure of a key of the table.
_OTHER = frozenset({"preparation", "load_relative", "pka", "dh_kj_mol", "dcp_j_mol_k"})


class Uncertainty(Table):
    """Standard deviations, where they differ from those of the tables."""

    preparation: Preparation | None = Field(
        default=None,
        description="weighed: pH from the amounts alone; adjusted: set with acid or base",
    )
    weighing_relative: Number | None = Field(
        default=None, ge=0, le=0.2, description="Weighing and assay of each material"
    )
    volume_relative: Number | None = Field(
        default=None, ge=0, le=0.2, description="Making up to volume"
    )
    fill_temperature_k: Number | None = Field(
        default=None, ge=0, le=30, description="Temperature when made up to volume, K"
    )
    end_point_ph: Number | None = Field(
        default=None, ge=0, le=1, description="Titration end point, pH"
    )
    meter_ph: Number | None = Field(
        default=None, ge=0, le=1, description="Calibration of the pH meter, pH"
    )
    reading_temperature_k: Number | None = Field(
        default=None, ge=0, le=20, description="Temperature of the reading, K"
    )
    load_relative: Number | None = Field(
        default=None, ge=0, le=3, description="Loads over shelf life, as a share"
    )
    drug_pka: Number | None = Field(
        default=None, ge=0, le=2, description="pKa of the drug"
    )
    drug_dh_kj_mol: Number | None = Field(
        default=None, ge=0, le=60, description="Enthalpy of the drug, kJ/mol"
    )
    drug_concentration_relative: Number | None = Field(
        default=None, ge=0, le=1, description="Concentration of the drug, as a share"
    )
    protein_group_pka: Number | None = Field(
        default=None, ge=0, le=3, description="pK of the groups of a protein"
    )
    protein_titration_ph: Number | None = Field(
        default=None, ge=0, le=1, description="Titration curve of a protein, pH"
    )
    activity_floor_ph: Number | None = Field(
        default=None, ge=0, le=1, description="Activity model at any ionic strength"
    )
    activity_slope_kg_mol: Number | None = Field(
        default=None, ge=0, le=3, description="Activity model, per ionic strength"
    )
    pka: dict[Id, Annotated[Number, Field(ge=0, le=2)]] = Field(
        default_factory=dict, max_length=_BY_SPECIES, description="Species = pKa"
    )
    dh_kj_mol: dict[Id, Annotated[Number, Field(ge=0, le=60)]] = Field(
        default_factory=dict,
        max_length=_BY_SPECIES,
        description="Species = enthalpy of ionization, kJ/mol",
    )
    dcp_j_mol_k: dict[Id, Annotated[Number, Field(ge=0, le=1000)]] = Field(
        default_factory=dict,
        max_length=_BY_SPECIES,
        description="Species = heat capacity of ionization, J/(mol K)",
    )

    def info(self) -> UncertaintyInfo:
        """Return what was stated, for the upper layers."""
        numbers = {
            key: float(value)
            for key in type(self).model_fields
            if key not in _OTHER and (value := getattr(self, key)) is not None
        }
        if self.load_relative is not None:
            numbers["load_stated_ln"] = float(self.load_relative)
            numbers["load_default_ln"] = float(self.load_relative)
        return UncertaintyInfo(
            self.preparation or "weighed",
            MappingProxyType(numbers),
            MappingProxyType(dict(self.pka)),
            MappingProxyType(dict(self.dh_kj_mol)),
            MappingProxyType(dict(self.dcp_j_mol_k)),
        )
