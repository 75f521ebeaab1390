"""The parts of a completed brief, one frozen record per table of the brief file.

Attribute names are the keys of the file. Concentrations in mmol/L of solution,
temperatures in degrees C, osmolalities in mosmol/kg of water, pressures in Pa.
"""

from __future__ import annotations

import datetime as dt
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

from formbuf.library.records import Basis
from formbuf.product.vocabulary import (
    BIOLOGIC_KINDS,
    KIND_GROUPS,
    PROTEIN_KINDS,
    ROUTE_GROUPS,
    ContainerType,
    DrugKind,
    Exposure,
    Filing,
    Form,
    Pharmacopoeia,
    Population,
    Route,
    RouteGroup,
    State,
    StorageKind,
)

#: First ice of an isotonic solution, C: 0.290 osmol/kg times 1.86 K kg/osmol.
ISOTONIC_FIRST_ICE_C = -0.54


@dataclass(frozen=True, slots=True)
class Assumption:
    """One value that the brief did not state.

    Parameters
    ----------
    key : str
        Key of the brief, for example ``"dose.volume_ml"``.
    value : bool, float or str
    unit : str
        Unit of the value, empty where it has none.
    basis : Basis
    reason : str
        Why this value.
    source : str
        Id of a source, empty where the basis allows none.
    """

    key: str
    value: bool | float | str
    unit: str
    basis: Basis
    reason: str
    source: str = ""


@dataclass(frozen=True, slots=True)
class ProductInfo:
    """What the product is and where it goes.

    ``precedent_route`` is the route whose table of precedent is used: the route
    itself, or the nearest one where it has no table.
    """

    name: str
    version: str
    route: Route
    form: Form
    population: Population
    filing: Filing | None
    pharmacopoeias: tuple[Pharmacopoeia, ...]
    precedent_route: str

    @property
    def route_group(self) -> RouteGroup:
        """Group of routes that share habits and limits."""
        return ROUTE_GROUPS[self.route]


@dataclass(frozen=True, slots=True)
class PhInfo:
    """Target and window, as measured at ``measure_temperature_c``."""

    target: float
    low: float
    high: float
    release_tolerance: float
    measure_temperature_c: float
    prepare_temperature_c: float
    storage_low: float | None
    storage_high: float | None


@dataclass(frozen=True, slots=True)
class StorageInfo:
    """One temperature; ``state`` is None until the first ice is known."""

    kind: StorageKind
    temperature_c: float
    state: State | None
    hours: float | None = None

    def state_at(self, first_ice_c: float = ISOTONIC_FIRST_ICE_C) -> State:
        """Return the stated state, else frozen below the first ice, else liquid."""
        if self.state is not None:
            return self.state
        return "frozen" if self.temperature_c < first_ice_c else "liquid"


@dataclass(frozen=True, slots=True)
class DoseInfo:
    """Dose volume, frequency and patient."""

    volume_ml: float
    per_day: float
    infusion_rate_ml_h: float | None
    body_mass_kg: float
    age_years: float | None

    @property
    def volume_ml_day(self) -> float:
        """Volume per day, mL; at least one dose, also where doses are days apart."""
        return self.volume_ml * max(self.per_day, 1.0)


@dataclass(frozen=True, slots=True)
class LoadsInfo:
    """Acid and base to carry, mmol/L over shelf life, and whether each is a default."""

    acid_mmol_l: float
    base_mmol_l: float
    note: str
    acid_is_default: bool
    base_is_default: bool

    @property
    def all_default(self) -> bool:
        """Whether neither load was stated."""
        return self.acid_is_default and self.base_is_default


@dataclass(frozen=True, slots=True)
class ContainerInfo:
    """Container; ``gas_permeable`` is None where nothing is known about the wall."""

    type: ContainerType
    fill_volume_ml: float
    count_alkali: bool
    gas_permeable: bool | None

    @property
    def is_glass(self) -> bool:
        """Whether the product touches glass."""
        return self.type.startswith("glass")


@dataclass(frozen=True, slots=True)
class CarbonDioxideInfo:
    """Exposure to carbon dioxide; pressure in Pa of the gas met (air if not stated)."""

    exposure: Exposure
    pressure_pa: float
    headspace_ratio: float | None


@dataclass(frozen=True, slots=True)
class TonicityInfo:
    """Osmolality aimed at; None where the route asks for none.

    ``agent`` is a material id. ``amorphous_sugar_percent_w_v`` is the least content of
    glassy sugar known without the fill: stated as excipient, or assumed.
    """

    target_mosm_kg: float | None
    low_mosm_kg: float | None
    high_mosm_kg: float | None
    agent: str | None
    fill: bool
    agent_is_default: bool
    amorphous_sugar_percent_w_v: float
    amorphous_sugar_is_assumed: bool


@dataclass(frozen=True, slots=True)
class DrugStep:
    """One proton of the drug, in ascending pK; charge of the whole molecule."""

    pka: float
    acid_charge: int
    dh_kj_mol: float | None
    dcp_j_mol_k: float | None


@dataclass(frozen=True, slots=True)
class TitrationReading:
    """pH read after strong base (negative: acid) was added, mmol/L."""

    ph: float
    base_mmol_l: float


@dataclass(frozen=True, slots=True)
class TitrationPerGram:
    """pH at which a gram of the drug has taken up strong base (negative: acid), mmol."""

    ph: float
    mmol_g: float


#: How the proton binding of a drug is known.
ChargeSource = Literal["titration", "pka", "residues", "net_charge"]


@dataclass(frozen=True, slots=True)
class DrugInfo:
    """The drug; a concentration is None where neither stated nor convertible.

    ``residues`` counts the ionisable groups of a protein, free ends included,
    cysteines of disulfide bonds not.
    """

    kind: DrugKind
    name: str
    concentration_mg_ml: float | None
    concentration_mmol_l: float | None
    molar_mass_g_mol: float | None
    isoelectric_point: float | None
    counter_ion: str | None
    counter_ion_per_mole: float
    groups: tuple[str, ...]
    pka: tuple[DrugStep, ...]
    titration: tuple[TitrationReading, ...]
    net_charge: float | None = None
    net_charge_ph: float | None = None
    residues: Mapping[str, float] = field(default_factory=dict)
    titration_mmol_g: tuple[TitrationPerGram, ...] = ()

    @property
    def charge_known_from(self) -> ChargeSource | None:
        """What tells how the drug binds protons, the best first; None if nothing."""
        has_amount = bool(self.concentration_mmol_l)
        if self.titration or (self.titration_mmol_g and self.concentration_mg_ml):
            return "titration"
        if self.pka and has_amount:
            return "pka"
        if self.residues and has_amount:
            return "residues"
        if self.net_charge is not None and has_amount:
            return "net_charge"
        return None

    @property
    def kind_group(self) -> str:
        """Kind as in the table of precedent by kind; empty where none applies."""
        return KIND_GROUPS[self.kind]

    @property
    def is_biologic(self) -> bool:
        """Whether the drug is a biologic."""
        return self.kind in BIOLOGIC_KINDS

    @property
    def is_protein(self) -> bool:
        """Whether the drug is a protein, a fusion protein or an antibody."""
        return self.kind in PROTEIN_KINDS


@dataclass(frozen=True, slots=True)
class ExcipientInfo:
    """A further solute: material id, both amounts, and the amount as stated."""

    material: str
    mmol_l: float
    g_l: float
    stated: float
    stated_unit: str


@dataclass(frozen=True, slots=True)
class CandidateInfo:
    """A formula of the user's own: a system at a concentration, or materials."""

    name: str
    system: str | None
    concentration_mmol_l: float | None
    materials: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class AnchorInfo:
    """Ends of a desirability that replace those of the tables; None keeps ours."""

    full: float | None
    floor: float | None


@dataclass(frozen=True, slots=True)
class RankingInfo:
    """Weights and anchors that replace those of the tables."""

    weights: Mapping[str, float]
    anchors: Mapping[str, AnchorInfo]


@dataclass(frozen=True, slots=True)
class OverrideInfo:
    """A rule or screen set aside; for every system where ``system`` is None."""

    rule: str
    system: str | None
    reason: str
    name: str
    date: dt.date
