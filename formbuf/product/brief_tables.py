"""The tables of a product brief, as pydantic models: what each key may hold.

Every table is frozen and refuses unknown keys. Numbers are taken strictly (no text,
no true or false) and finite. What several keys mean together is checked beside the
keys; a fault names the key it belongs to. Concentrations in mmol/L of solution,
temperatures in degrees C, pressures in Pa.
"""

from __future__ import annotations

import datetime as dt
import re
import unicodedata
from typing import Annotated, Any, Literal

from pydantic import AfterValidator, BaseModel, BeforeValidator, ConfigDict, Field
from pydantic_core import PydanticCustomError

from formbuf.product.brief_origin import Location
from formbuf.product.vocabulary import (
    ContainerType,
    Exposure,
    Filing,
    Form,
    Pharmacopoeia,
    Population,
    Route,
    State,
    StorageKind,
)

_ID = re.compile(r"[a-z][a-z0-9_]*")
_DIRECTION_MARKS = frozenset("\u202a\u202b\u202c\u202d\u202e\u2066\u2067\u2068\u2069")
LIQUID_STATE_C = (-20.0, 121.0)
FROZEN_ONLY_BELOW_C = -80.0


def fail(*faults: tuple[Location, str, str]) -> PydanticCustomError:
    """Return the error that carries faults as (where below here, what, allowed)."""
    return PydanticCustomError("brief_faults", "see faults", {"faults": faults})


def _plain_text(text: str) -> str:
    for character in text:
        if unicodedata.category(character) in {"Cc", "Cs", "Zl", "Zp"}:
            raise fail(((), "holds a control character", "printable text on one line"))
        if character in _DIRECTION_MARKS:
            raise fail(((), "holds an invisible direction mark", "printable text"))
    if text != text.strip() or not text:
        raise fail(((), "is empty or begins or ends with a blank", "text"))
    return text


def _identifier(text: str) -> str:
    if not _ID.fullmatch(text):
        raise fail(((), "is not an id", "small letters, digits and _, a letter first"))
    return text


def _system_name(text: str) -> str:
    names = [part.strip() for part in text.split("+")]
    if len(names) > 2 or not all(_ID.fullmatch(name) for name in names):
        allowed = (
            'an id of small letters, digits and _, or two as "histidine + acetate"'
        )
        raise fail(((), "is no system and no pair of species", allowed))
    return " + ".join(names)


def _iso_date(value: object) -> object:
    if isinstance(value, dt.date) and not isinstance(value, dt.datetime):
        return value
    if isinstance(value, str) and re.fullmatch(r"\d{4}-\d{2}-\d{2}", value):
        try:
            return dt.date.fromisoformat(value)
        except ValueError:
            pass
    raise fail(((), "is not a date", "an ISO date such as 2026-03-31"))


Number = Annotated[float, Field(strict=True, allow_inf_nan=False)]
Whole = Annotated[int, Field(strict=True)]
Flag = Annotated[bool, Field(strict=True)]
Text = Annotated[str, Field(max_length=200), AfterValidator(_plain_text)]
LongText = Annotated[str, Field(max_length=1000), AfterValidator(_plain_text)]
Id = Annotated[str, Field(max_length=80), AfterValidator(_identifier)]
SystemName = Annotated[str, Field(max_length=160), AfterValidator(_system_name)]
IsoDate = Annotated[dt.date, BeforeValidator(_iso_date)]
BasisWord = Literal["published", "derived", "memory", "practice", "judgement"]


class Table(BaseModel):
    """One table of a brief: frozen, unknown keys refused, built on first use."""

    model_config = ConfigDict(frozen=True, extra="forbid", defer_build=True)

    def model_post_init(self, _context: Any, /) -> None:
        """Check what the keys mean together."""
        faults = self.faults()
        if faults:
            raise fail(*faults)

    def faults(self) -> list[tuple[Location, str, str]]:
        """Return (where, what, allowed) for every contradiction between keys."""
        return []


class Product(Table):
    """What the product is and where it goes."""

    name: Text | None = Field(default=None, description="Name or code of the product")
    version: Text | None = Field(default=None, description="Version of this brief")
    route: Route = Field(description="Route of administration")
    form: Form | None = Field(default=None, description="Form in which it is stored")
    population: Population | None = Field(
        default=None, description="Youngest patients meant"
    )
    filing: Filing | None = Field(default=None, description="Kind of regulatory filing")
    pharmacopoeias: tuple[Pharmacopoeia, ...] = Field(
        default=(),
        max_length=3,
        description="Pharmacopoeias the buffer must be in; any if empty",
    )


class Ph(Table):
    """Target pH and its window, as measured at ``measure_temperature_c``."""

    target: Number = Field(ge=1, le=13, description="pH aimed at")
    low: Number | None = Field(
        default=None, ge=0, le=14, description="Lower end of the window"
    )
    high: Number | None = Field(
        default=None, ge=0, le=14, description="Upper end of the window"
    )
    release_tolerance: Number | None = Field(
        default=None,
        gt=0,
        le=2,
        description="pH by which a batch may miss the target at release",
    )
    measure_temperature_c: Number | None = Field(
        default=None, ge=0, le=100, description="Temperature at which pH is measured, C"
    )
    prepare_temperature_c: Number | None = Field(
        default=None,
        ge=0,
        le=100,
        description="Temperature at which pH is set in the batch, C",
    )
    storage_low: Number | None = Field(
        default=None,
        ge=0,
        le=14,
        description="Lower limit of pH at storage temperature",
    )
    storage_high: Number | None = Field(
        default=None,
        ge=0,
        le=14,
        description="Upper limit of pH at storage temperature",
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Check both windows and the room for the release tolerance."""
        found = _pair_faults("low", self.low, "high", self.high)
        found += _pair_faults(
            "storage_low", self.storage_low, "storage_high", self.storage_high
        )
        if found or self.low is None or self.high is None:
            return found
        if not self.low < self.target < self.high:
            what = f"target lies outside its window {self.low:g} to {self.high:g}"
            return [(("target",), what, f"between {self.low:g} and {self.high:g}")]
        room = min(self.target - self.low, self.high - self.target)
        if self.release_tolerance is not None and self.release_tolerance >= room - 1e-9:
            what = "leaves no room between release and the window"
            return [(("release_tolerance",), what, f"below {room:.3g}")]
        return []


def _pair_faults(
    low_key: str, low: float | None, high_key: str, high: float | None
) -> list[tuple[Location, str, str]]:
    """Return the faults of a lower and an upper limit that come together."""
    if (low is None) != (high is None):
        given, absent = (low_key, high_key) if high is None else (high_key, low_key)
        return [((given,), f"is given without {absent}", "both or neither")]
    if low is not None and high is not None and low >= high:
        return [((low_key,), f"is not below {high_key}", f"below {high:g}")]
    return []


class Storage(Table):
    """One temperature the product meets, and what for."""

    kind: StorageKind = Field(
        default="storage", description="What the temperature stands for"
    )
    temperature_c: Number = Field(ge=-200, le=150, description="Temperature, C")
    state: State | None = Field(
        default=None,
        description="State at that temperature; computed from first ice if absent",
    )
    hours: Number | None = Field(default=None, gt=0, le=1e6, description="How long, h")

    def faults(self) -> list[tuple[Location, str, str]]:
        """Check that the state can exist at the temperature."""
        at, state = self.temperature_c, self.state
        here: Location = ("temperature_c",)
        if at < FROZEN_ONLY_BELOW_C and state in {"liquid", "dried"}:
            return [(here, f"is too cold for state {state}", "-80 to 150")]
        low, high = LIQUID_STATE_C
        if state == "liquid" and not low <= at <= high:
            return [(here, "is no temperature of a liquid", f"{low:g} to {high:g}")]
        if state is None and at > high:
            return [
                (here, "is above any liquid", f"{high:g} or less, or a dried state")
            ]
        if state == "frozen" and at > 0:
            return [(here, "is above the melting point of ice", "0 or less if frozen")]
        if self.kind == "body" and not 20 <= at <= 45:
            return [(here, "is no body temperature", "20 to 45")]
        return []


class Dose(Table):
    """How much the patient gets, how often and how fast."""

    volume_ml: Number | None = Field(
        default=None, gt=0, le=20000, description="Volume, mL"
    )
    per_day: Number | None = Field(
        default=None, gt=0, le=200, description="Doses per day"
    )
    infusion_rate_ml_h: Number | None = Field(
        default=None, gt=0, le=20000, description="Infusion rate, mL/h"
    )
    body_mass_kg: Number | None = Field(
        default=None, ge=0.3, le=400, description="Body mass, kg"
    )
    age_years: Number | None = Field(
        default=None, ge=0, le=120, description="Age, years"
    )


class Loads(Table):
    """Acid and base that the product must carry over its shelf life."""

    acid_mmol_l: Number | None = Field(
        default=None, ge=0, le=1000, description="Acid, mmol/L"
    )
    base_mmol_l: Number | None = Field(
        default=None, ge=0, le=1000, description="Base, mmol/L"
    )
    note: LongText | None = Field(default=None, description="Where the loads come from")


class Container(Table):
    """What the product is kept in."""

    type: ContainerType | None = Field(default=None, description="Primary container")
    fill_volume_ml: Number | None = Field(
        default=None, gt=0, le=1e6, description="Volume filled, mL"
    )
    count_alkali: Flag | None = Field(
        default=None, description="Whether alkali from the glass counts as a load"
    )
    gas_permeable: Flag | None = Field(
        default=None,
        description="Whether carbon dioxide passes the wall over shelf life",
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Only glass gives alkali."""
        if self.count_alkali and self.type and not self.type.startswith("glass"):
            what = f"is true for {self.type}, which gives no alkali"
            return [(("count_alkali",), what, "false, or a glass container")]
        return []


class CarbonDioxide(Table):
    """How the solution meets carbon dioxide."""

    exposure: Exposure | None = Field(
        default=None, description="How the solution meets gas"
    )
    pressure_pa: Number | None = Field(
        default=None, ge=0, le=1e6, description="Partial pressure of carbon dioxide, Pa"
    )
    headspace_ratio: Number | None = Field(
        default=None, gt=0, le=100, description="Gas volume per volume of solution"
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Check that a headspace, and nothing else, comes with its volume."""
        if self.exposure == "headspace" and self.headspace_ratio is None:
            what = "is headspace without carbon_dioxide.headspace_ratio"
            return [(("exposure",), what, "a headspace_ratio beside it")]
        if self.exposure != "headspace" and self.headspace_ratio is not None:
            what = "is given but exposure is not headspace"
            return [(("headspace_ratio",), what, 'only with exposure = "headspace"')]
        return []


class Tonicity(Table):
    """Osmolality aimed at, its limits, and the solute that fills the room."""

    target_mosm_kg: Number | None = Field(
        default=None, gt=0, le=3000, description="Osmolality aimed at, mosmol/kg"
    )
    low_mosm_kg: Number | None = Field(
        default=None, ge=0, le=5000, description="Lowest osmolality, mosmol/kg"
    )
    high_mosm_kg: Number | None = Field(
        default=None, gt=0, le=5000, description="Highest osmolality, mosmol/kg"
    )
    agent: Text | None = Field(default=None, description="Material that fills the room")
    fill: Flag | None = Field(
        default=None, description="Whether the agent is added up to the target"
    )

    def faults(self) -> list[tuple[Location, str, str]]:
        """Check the limits and that the target lies within them."""
        low, high, target = self.low_mosm_kg, self.high_mosm_kg, self.target_mosm_kg
        if low is not None and high is not None and low >= high:
            return [(("low_mosm_kg",), "is not below high_mosm_kg", f"below {high:g}")]
        if target is not None and low is not None and target < low:
            return [(("target_mosm_kg",), "is below low_mosm_kg", f"{low:g} or more")]
        if target is not None and high is not None and target > high:
            return [(("target_mosm_kg",), "is above high_mosm_kg", f"{high:g} or less")]
        return []
