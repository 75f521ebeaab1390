"""The product brief as a whole: remaining tables and the root model.

The root adds what spans tables: entries that contradict each other, patient and age,
a species both excluded and required. Names of species, materials and systems are
compared with the library later, by `formbuf.product.brief_check`.
"""

from __future__ import annotations

from typing import Annotated, Any

from pydantic import AfterValidator, Field, PrivateAttr

from formbuf.product.brief_drug import Drug, Pka, ladder_faults
from formbuf.product.brief_origin import Location, Origin
from formbuf.product.brief_tables import (
    BasisWord,
    CarbonDioxide,
    Container,
    Dose,
    Id,
    IsoDate,
    Loads,
    LongText,
    Number,
    Ph,
    Product,
    Storage,
    SystemName,
    Table,
    Text,
    Tonicity,
    fail,
)
from formbuf.product.brief_uncertainty import Uncertainty
from formbuf.product.vocabulary import (
    AGE_BANDS,
    STRONG_ELECTROLYTES,
    STRONG_IS_NO_BUFFER,
    Role,
    populations_at,
)

FACT_LIMIT = 300
FACT_LIST_LIMIT = 50
Scalar = bool | int | float | str
AMOUNT_KEYS = ("mmol_l", "mg_ml", "g_l", "percent_w_v")


class Excipient(Table):
    """A further solute and how much of it, in exactly one unit."""

    material: Text = Field(description="Material id, unique formula or unique name")
    mmol_l: Number | None = Field(default=None, ge=0, le=10000, description="mmol/L")
    mg_ml: Number | None = Field(default=None, ge=0, le=2000, description="mg/mL")
    g_l: Number | None = Field(default=None, ge=0, le=2000, description="g/L")
    percent_w_v: Number | None = Field(default=None, ge=0, le=100, description="% w/v")

    def faults(self) -> list[tuple[Location, str, str]]:
        """Exactly one amount."""
        given = [key for key in AMOUNT_KEYS if getattr(self, key) is not None]
        if len(given) == 1:
            return []
        allowed = "exactly one of " + ", ".join(AMOUNT_KEYS)
        if not given:
            return [((), "has no amount", allowed)]
        return [((given[1],), f"is given beside {given[0]}", allowed)]


class Candidate(Table):
    """A formula of the user's own, judged as it is: a system, or materials."""

    name: Text | None = Field(default=None, description="Name shown in results")
    system: SystemName | None = Field(
        default=None,
        description="Buffer system, or two species with a plus, set to the target pH",
    )
    concentration_mmol_l: Number | None = Field(
        default=None, gt=0, le=2000, description="Total buffer concentration, mmol/L"
    )
    materials: dict[str, Annotated[Number, Field(ge=0, le=2000)]] = Field(
        default_factory=dict, max_length=30, description="Material = mmol/L"
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Either system and concentration, or name and materials; and a buffer."""
        found: list[tuple[Location, str, str]] = []
        both = "system with concentration_mmol_l, or name with materials"
        if self.system is not None and self.materials:
            found.append((("materials",), "are given beside system", both))
        elif self.system is not None:
            if self.system in STRONG_ELECTROLYTES:
                found.append((("system",), STRONG_IS_NO_BUFFER, "a buffer system"))
            elif self.concentration_mmol_l is None and self.system != "none":
                found.append(
                    (("system",), "is given without concentration_mmol_l", both)
                )
        elif not self.materials:
            found.append(((), "has neither system nor materials", both))
        else:
            if self.name is None:
                found.append(((), "has materials but no name", both))
            if self.concentration_mmol_l is not None:
                what = "is given without system"
                found.append((("concentration_mmol_l",), what, both))
            if all(key.lower() in STRONG_ELECTROLYTES for key in self.materials):
                allowed = "at least one material that holds a proton"
                found.append((("materials",), STRONG_IS_NO_BUFFER, allowed))
        return found


class Anchor(Table):
    """The two ends of a desirability, in the unit of its criterion."""

    full: Number | None = Field(
        default=None, ge=-1e6, le=1e6, description="Here it is 1"
    )
    floor: Number | None = Field(
        default=None, ge=-1e6, le=1e6, description="Here it is 0.05"
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """At least one end, and not twice the same."""
        if self.full is None and self.floor is None:
            return [((), "holds neither full nor floor", "at least one of them")]
        if self.full == self.floor:
            return [(("floor",), "equals full", "two different ends")]
        return []


class Ranking(Table):
    """Weights and anchors of criteria, where they differ from the tables."""

    weights: dict[Id, Annotated[Number, Field(ge=0, le=1000)]] = Field(
        default_factory=dict, max_length=20, description="Criterion = weight"
    )
    anchors: dict[Id, Anchor] = Field(
        default_factory=dict, max_length=20, description="Criterion = ends"
    )


class OwnSpecies(Table):
    """An in-house acid-base species; replaces ours of the same id."""

    id: Id = Field(description="Id")
    name: Text | None = Field(default=None, description="Name")
    cas: Text | None = Field(default=None, description="CAS number")
    family: Text | None = Field(
        default=None, description="Family, for example carboxylic acid"
    )
    step: tuple[Pka, ...] = Field(
        min_length=1, max_length=12, description="Ionization steps"
    )
    pka_uncertainty: Number | None = Field(
        default=None, gt=0, le=1, description="Standard uncertainty of every pK"
    )
    source: Text = Field(description="Report or paper the values come from")
    basis: BasisWord = Field(
        default="judgement", description="How the values are known"
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Each proton lost takes one charge away."""
        return ladder_faults("step", self.step)


class OwnMaterial(Table):
    """An in-house material; a content with the material's own id is a neutral solute."""

    id: Id = Field(description="Id")
    name: Text | None = Field(default=None, description="Name")
    formula: Text | None = Field(default=None, description="Formula")
    contents: dict[Id, Annotated[Number, Field(gt=0, le=100)]] = Field(
        min_length=1, max_length=12, description="Component = moles per mole"
    )
    waters: Number = Field(
        default=0.0, ge=0, le=30, description="Water of crystallisation"
    )
    molar_mass_g_mol: Number = Field(gt=0, le=1e10, description="Molar mass, g/mol")
    cas: Text | None = Field(default=None, description="CAS number")
    solubility_g_per_100g_water: Number | None = Field(
        default=None, gt=0, le=1000, description="Solubility, g per 100 g of water"
    )
    solubility_temperature_c: Number | None = Field(
        default=None, ge=-20, le=121, description="Temperature of the solubility, C"
    )
    source: Text = Field(description="Report or paper the values come from")
    basis: BasisWord = Field(
        default="judgement", description="How the values are known"
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Check that a solubility comes with its temperature."""
        amount, at = self.solubility_g_per_100g_water, self.solubility_temperature_c
        if (amount is None) == (at is None):
            return []
        given = "temperature_c" if amount is None else "g_per_100g_water"
        what = "is given without its temperature or its amount"
        return [((f"solubility_{given}",), what, "both or neither")]


class OwnSystem(Table):
    """An in-house buffer system, made of species and materials."""

    id: Id = Field(description="Id")
    name: Text | None = Field(default=None, description="Name")
    species: tuple[Id, ...] = Field(min_length=1, max_length=2, description="Species")
    acid_material: Id | None = Field(
        default=None, description="Material of the acid side"
    )
    base_material: Id | None = Field(
        default=None, description="Material of the basic side"
    )
    acid_titrant: Id = Field(
        default="hydrochloric_acid", description="Acid that sets the pH"
    )
    base_titrant: Id = Field(
        default="sodium_hydroxide", description="Base that sets the pH"
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """At least one material brings the species in."""
        if self.acid_material is None and self.base_material is None:
            return [((), "names no material", "acid_material, base_material or both")]
        return []


class Override(Table):
    """A rule or screen set aside by a named scientist, with the reason."""

    rule: Text = Field(description="Rule or screen set aside")
    system: Id | None = Field(
        default=None, description="Only for this system; all if absent"
    )
    reason: LongText = Field(min_length=10, description="Why, ten characters or more")
    name: Text = Field(description="Who decided")
    date: IsoDate = Field(description="When, as an ISO date")


def _check_facts(facts: dict[str, Any]) -> dict[str, Any]:
    """Refuse anything but finite scalars and short lists of them."""
    faults: list[tuple[Location, str, str]] = []
    for key, value in facts.items():
        items = value if isinstance(value, list) else [value]
        if len(items) > FACT_LIST_LIMIT:
            faults.append(((key,), "is too long", f"at most {FACT_LIST_LIMIT} entries"))
        elif not all(_is_plain(item) for item in items):
            what = "is neither yes/no, a finite number, a text nor a list of them"
            faults.append(((key,), what, 'true, 4.5, "text" or a list'))
    if faults:
        raise fail(*faults)
    return facts


def _is_plain(value: object) -> bool:
    if isinstance(value, bool):
        return True
    if isinstance(value, int | float):
        return -1e12 <= value <= 1e12
    return isinstance(value, str) and value.isprintable() and len(value) <= 500


class Brief(Table):
    """What a formulator says about one product, as written: nothing filled in.

    Made by `read_brief`, `brief_from_options` or `brief_from_mapping`; these turn every
    fault into one `InputError`. `formbuf.product.brief.complete` fills the rest.
    """

    title: Text | None = Field(default=None, description="The product in one line")
    product: Product
    ph: Ph
    storage: tuple[Storage, ...] = Field(
        default=(), max_length=30, description="Temperatures"
    )
    dose: Dose = Field(default_factory=Dose)
    loads: Loads = Field(default_factory=Loads)
    container: Container = Field(default_factory=Container)
    carbon_dioxide: CarbonDioxide = Field(default_factory=CarbonDioxide)
    tonicity: Tonicity = Field(default_factory=Tonicity)
    drug: Drug = Field(default_factory=Drug)
    excipient: tuple[Excipient, ...] = Field(default=(), max_length=40)
    exclude: tuple[Id, ...] = Field(
        default=(),
        max_length=60,
        description="Species, systems, ions or materials never to use",
    )
    require: tuple[SystemName, ...] = Field(
        default=(),
        max_length=60,
        description="Species, systems or pairs that must be among them",
    )
    consider_roles: tuple[Role, ...] = Field(
        default=(), max_length=6, description="Further roles of systems to consider"
    )
    candidate: tuple[Candidate, ...] = Field(default=(), max_length=20)
    ranking: Ranking = Field(default_factory=Ranking)
    uncertainty: Uncertainty = Field(default_factory=Uncertainty)
    species: tuple[OwnSpecies, ...] = Field(default=(), max_length=30)
    material: tuple[OwnMaterial, ...] = Field(default=(), max_length=60)
    system: tuple[OwnSystem, ...] = Field(default=(), max_length=30)
    override: tuple[Override, ...] = Field(default=(), max_length=60)
    facts: Annotated[dict[Id, Any], AfterValidator(_check_facts)] = Field(
        default_factory=dict,
        max_length=FACT_LIMIT,
        description="Answers that rules test",
    )

    _origin: Origin = PrivateAttr(default_factory=Origin)

    @property
    def origin(self) -> Origin:
        """Where the brief was written, for messages."""
        return self._origin

    def faults(self) -> list[tuple[Location, str, str]]:
        """Check what spans several tables."""
        found: list[tuple[Location, str, str]] = []
        for index, name in enumerate(self.exclude):
            if name == "none":
                what = "cannot be excluded: the product without buffer is always shown"
                found.append(
                    (("exclude", index), what, "species, systems, ions or materials")
                )
            elif name in self.require:
                found.append((("exclude", index), "is also required", "one of the two"))
        for index, entry in enumerate(self.storage):
            twin = (entry.kind, entry.temperature_c, entry.state)
            earlier = self.storage[:index]
            if twin in [(row.kind, row.temperature_c, row.state) for row in earlier]:
                found.append(
                    (("storage", index), "repeats an entry above", "each once")
                )
        for key in ("species", "material", "system"):
            ids = [row.id for row in getattr(self, key)]
            for index, name in enumerate(ids):
                if name in ids[:index]:
                    found.append(((key, index, "id"), "is used twice", "each id once"))
        return found + self._patient_faults()

    def _patient_faults(self) -> list[tuple[Location, str, str]]:
        population, age = self.product.population, self.dose.age_years
        if population is None or age is None or population in populations_at(age):
            return []
        low, high = AGE_BANDS[population]
        what = f"does not fit population {population}"
        return [(("dose", "age_years"), what, f"{low:.3g} to below {high:.3g}")]

    def to_dict(self) -> dict[str, Any]:
        """Return what was stated, as plain types for JSON; absent keys left out."""
        plain: dict[str, Any] = self.model_dump(
            mode="json", exclude_none=True, exclude_unset=True
        )
        return plain
