"""What the tables of knowledge hold, as frozen records.

Every value keeps where it came from: a `Quantity` carries its unit, source, locator
and basis. A source is the id of a row of ``sources.csv``; it is empty only where the
basis is practice, judgement or memory.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Literal

Basis = Literal["published", "derived", "memory", "practice", "judgement"]
BASES: tuple[Basis, ...] = ("published", "derived", "memory", "practice", "judgement")
#: Bases that may stand without a source.
SOURCELESS: tuple[Basis, ...] = ("memory", "practice", "judgement")


@dataclass(frozen=True, slots=True)
class Source:
    """One work from which values were taken.

    Parameters
    ----------
    id : str
        Author and year, for example ``goldberg_2002``.
    authors, year, title, container : str
        As printed; ``container`` is the journal with volume and pages, the publisher
        or the database. Empty where not known.
    locator_note : str
        What in the work was used, or in which copy it was read.
    doi : str
        Digital object identifier without a prefix.
    note : str
        Anything a reader should know.
    overlay : bool
        Whether the user brought it.
    """

    id: str
    authors: str
    year: str
    title: str
    container: str
    locator_note: str = ""
    doi: str = ""
    note: str = ""
    overlay: bool = False

    @property
    def text(self) -> str:
        """The reference as one line."""
        head = " ".join(part for part in (self.authors, self.year) if part)
        parts = [part for part in (head, self.title, self.container) if part]
        line = ". ".join(part.rstrip(".") for part in parts)
        return f"{line}. doi:{self.doi}" if self.doi else f"{line}."


@dataclass(frozen=True, slots=True)
class Quantity:
    """One number with its unit and where it came from.

    Parameters
    ----------
    value : float
    unit : str
        ``"1"`` where it has none.
    source : str
        Id of a source, empty where the basis allows none.
    locator : str
        Table, page or entry within the source.
    basis : Basis
    uncertainty : float, optional
        Standard uncertainty in ``unit``; always the judgement of the builders.
    note : str
    """

    value: float
    unit: str
    source: str
    locator: str
    basis: Basis
    uncertainty: float | None = None
    note: str = ""


@dataclass(frozen=True, slots=True)
class Crosscheck:
    """A second value of a quantity, found in another source."""

    quantity: str
    value: float
    source: str


@dataclass(frozen=True, slots=True)
class IonizationStep:
    """One proton leaving a species, at 25 C and zero ionic strength.

    Parameters
    ----------
    species : str
    step : int
        Number of the proton, the most acid first; a species may begin at 2 where the
        first proton is always gone.
    acid_charge : int
        Charge of the form that still holds the proton.
    pka : Quantity
    dh_kj_mol, dcp_j_mol_k : Quantity or None
        Enthalpy and heat capacity of ionization; None where unknown.
    note : str
    confirmed_by, conflict : tuple of Crosscheck
        Second values that agree, or that lie outside the uncertainty first stated.
    overlay : bool
    """

    species: str
    step: int
    acid_charge: int
    pka: Quantity
    dh_kj_mol: Quantity | None = None
    dcp_j_mol_k: Quantity | None = None
    note: str = ""
    confirmed_by: tuple[Crosscheck, ...] = ()
    conflict: tuple[Crosscheck, ...] = ()
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Association:
    """A product that holds several units of one species, such as a polyborate.

    ``units`` of the neutral form give one product of charge ``charge`` and
    ``protons_released`` protons, with the constant ``log10_k`` (mol/kg of water).
    """

    product: str
    species: str
    units: int
    charge: int
    protons_released: int
    log10_k: Quantity
    note: str = ""
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Species:
    """An acid-base species with its ladder of ionization steps."""

    id: str
    name: str
    cas: str
    family: str
    is_candidate: bool
    steps: tuple[IonizationStep, ...]
    associations: tuple[Association, ...] = ()
    overlay: bool = False

    @property
    def charges(self) -> tuple[int, ...]:
        """Charges from the most to the least protonated form, one more than steps."""
        first = self.steps[0].acid_charge
        return tuple(range(first, first - len(self.steps) - 1, -1))


@dataclass(frozen=True, slots=True)
class Ion:
    """An ion that takes no part in acid-base equilibria."""

    id: str
    name: str
    charge: int
    molar_mass_g_mol: float
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Neutral:
    """A dissolved component without charge, such as a sugar."""

    id: str
    name: str
    kind: str
    molar_mass_g_mol: float
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Solubility:
    """How much of a material dissolves in 100 g of water at one temperature.

    ``g_per_100g_water`` is None where only words are known (``miscible``).
    """

    material: str
    g_per_100g_water: Quantity | None
    temperature_c: float | None
    words: str = ""
    note: str = ""
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Material:
    """What is weighed, as moles of its components per mole.

    Protons are never listed: electroneutrality finds them. ``waters`` counts the
    water of crystallisation, which dissolves into the solvent.
    """

    id: str
    name: str
    formula: str
    contents: Mapping[str, float]
    waters: float
    molar_mass_g_mol: Quantity
    cas: str = ""
    solubilities: tuple[Solubility, ...] = ()
    modelled: bool = True
    note: str = ""
    overlay: bool = False

    def named_in(self, names: Iterable[str]) -> set[str]:
        """Return those of some names that mean the material or what it holds."""
        return {self.id, *self.contents}.intersection(names)


@dataclass(frozen=True, slots=True)
class System:
    """A buffer system: species with its counter-ion and the materials that make it."""

    id: str
    name: str
    role: str
    species: tuple[str, ...]
    acid_material: str | None
    base_material: str | None
    acid_titrant: str
    base_titrant: str
    note: str = ""
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Precedent:
    """How well a species is established on a route, and at which concentration.

    Concentrations in mmol/L. ``monographs`` maps ``usp_nf``, ``ph_eur`` and ``jp`` to
    ``yes``, ``no`` or ``unknown`` (not looked up). The species ``none`` stands for the
    product without an added buffer. ``daily_mmol`` is the largest amount a day that a
    user's file lists; ``listed`` says which row of it replaced the ceiling, and what
    stood there before.
    """

    species: str
    route: str
    level: str
    usual_low_mmol_l: float | None
    usual_high_mmol_l: float | None
    ceiling_mmol_l: float | None
    monographs: Mapping[str, str]
    monograph_note: str
    usual_forms: str
    reason: str
    source: str
    level_basis: Basis
    concentration_basis: Basis | None
    monograph_basis: Basis
    locator: str = ""
    overlay: bool = False
    daily_mmol: float | None = None
    listed: str = ""


@dataclass(frozen=True, slots=True)
class KindPrecedent:
    """How usual a species is for a kind of product on a group of routes."""

    kind: str
    route_group: str
    species: str
    level: str
    basis: Basis
    source: str = ""
    note: str = ""
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class RouteLimit:
    """Range of pH, osmolality and volume that a route bears.

    ``usual_volume_is`` says whether the usual volume is ``typical`` or the ``largest``
    that is usual; empty where nobody said.
    """

    route: str
    ph_low: float
    ph_high: float
    osmolality_low_mosm_kg: float | None
    osmolality_high_mosm_kg: float | None
    usual_volume_ml: float | None
    source: str
    basis: Basis
    locator: str = ""
    note: str = ""
    overlay: bool = False
    usual_volume_is: str = ""


@dataclass(frozen=True, slots=True)
class GlassAlkali:
    """Most alkali that type I glass gives in the surface test, by fill volume."""

    fill_volume_above_ml: float
    fill_volume_to_ml: float | None
    limit_ml_0p01m_hcl_per_100ml: float
    alkali_mmol_l: Quantity
    note: str = ""
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class PartialVolume:
    """Partial specific volume of a solute in water, mL/g."""

    solute: str
    volume_ml_g: Quantity
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class CarbonDioxideValue:
    """One value needed for carbon dioxide in water and air."""

    quantity: str
    value: Quantity
    temperature_c: float | None
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Diluent:
    """An infusion fluid that a product is diluted with; contents in mmol/L."""

    id: str
    name: str
    contents_mmol_l: Mapping[str, float]
    ph_low: float
    ph_high: float
    basis: Basis
    source: str = ""
    note: str = ""
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class SideChain:
    """pK of an ionizable group of proteins; ``acid_charge`` as in `IonizationStep`."""

    group: str
    residue: str
    acid_charge: int
    pk_model_peptide: Quantity
    pk_folded_average: Quantity
    note: str = ""
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class WaterProperty:
    """One property of water, at a temperature or as a coefficient of an equation."""

    quantity: str
    temperature_c: float | None
    value: Quantity
    recommended: bool
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class Conflict:
    """Where a second look found another value, and what was done about it."""

    table: str
    row_key: str
    column: str
    old_value: str
    found_value: str
    unit: str
    source: str
    verdict: str
    note: str
    overlay: bool = False
