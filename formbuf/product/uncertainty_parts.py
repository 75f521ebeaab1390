"""What a brief says about how sure its numbers are, as a frozen record."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

#: How the pH of a batch comes about: from weighed amounts alone, or set with acid or
#: base to what the meter should read.
Preparation = Literal["weighed", "adjusted"]


@dataclass(frozen=True, slots=True)
class UncertaintyInfo:
    """Standard deviations that replace those of ``uncertainty.csv``.

    Attributes
    ----------
    preparation : {"weighed", "adjusted"}
    numbers : mapping of str to float
        By the key of the table, in its unit.
    pka : mapping of species to float
        Of every pK of the species.
    dh_kj_mol, dcp_j_mol_k : mapping of species to float
        Of every enthalpy and heat capacity of the species.
    """

    preparation: Preparation = "weighed"
    numbers: Mapping[str, float] = field(default_factory=dict)
    pka: Mapping[str, float] = field(default_factory=dict)
    dh_kj_mol: Mapping[str, float] = field(default_factory=dict)
    dcp_j_mol_k: Mapping[str, float] = field(default_factory=dict)
