"""What goes into a freezing calculation and what comes out.

Amounts are moles per kilogram of the water that was there before freezing.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.pitzer import PitzerSet
from formbuf.errors import InputError

Assumption = Literal["crystallising", "supersaturated"]
ASSUMPTIONS: tuple[Assumption, ...] = ("crystallising", "supersaturated")

#: Lowest temperature at which the brine and ice data hold, C.
LOWEST_C = -30.0
#: Highest temperature at which a frozen question makes sense, C.
HIGHEST_C = 0.0


def state_name(component: str, charge: int) -> str:
    """Return the name of one protonation state, for example ``phosphate[-2]``."""
    return f"{component}[{charge:+d}]" if charge else f"{component}[0]"


@dataclass(frozen=True, slots=True)
class Solid:
    """A salt or acid that may crystallise from the freeze-concentrated liquid.

    Attributes
    ----------
    id : str
    formula : str
        With its water of crystallisation, for example ``Na2HPO4.12H2O``.
    states : mapping of str to float
        Dissolved states and their count, in the names of `state_name` and of ions.
    components : mapping of str to float
        The same counted by component.
    waters : float
        Water of crystallisation.
    ln_k : tuple of float
        A and B of ln K = A + B/T for dissolution, T in K; includes the water.
    """

    id: str
    formula: str
    states: Mapping[str, float]
    components: Mapping[str, float]
    waters: float
    ln_k: tuple[float, float]


@dataclass(frozen=True, slots=True)
class Brine:
    """The activity model of the liquid and the solids it may form.

    Attributes
    ----------
    name : str
        Named in results, for example ``sodium phosphate brine``.
    parameters : PitzerSet or None
        None: extended Debye-Hueckel form, no solids.
    solids : tuple of Solid
    watched : tuple of Solid
        Never crystallise here; the path only says where they become
        supersaturated.
    error_ph : float or None
        Published-against-computed error of the bound; None where unquantified.
    notes : tuple of str
        What the model assumes, carried into every path.
    limits : mapping of str to float
        Highest molality of a dissolved state in the measurements behind the
        parameters [mol/kg]; above it the path carries a note.
    refused : mapping of str to float
        Share of its component above which a state without parameters ends the path.
    """

    name: str
    parameters: PitzerSet | None = None
    solids: tuple[Solid, ...] = ()
    watched: tuple[Solid, ...] = ()
    error_ph: float | None = None
    notes: tuple[str, ...] = ()
    limits: Mapping[str, float] = field(default_factory=dict)
    refused: Mapping[str, float] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class IonAmount:
    """Amount of a strong ion [mol/kg of initial water]."""

    name: str
    charge: int
    mol_kg: float


@dataclass(frozen=True, slots=True)
class NeutralAmount:
    """Amount of a neutral solute [mol/kg of initial water] and its osmotic law.

    ``osmotic_slope_kg_mol`` is b of phi = 1 + b m.
    """

    name: str
    mol_kg: float
    osmotic_slope_kg_mol: float = 0.0


@dataclass(frozen=True, slots=True)
class FreezingContents:
    """What is dissolved, and how the pH was set.

    Attributes
    ----------
    ladders : tuple of Ladder
        Ionising components.
    totals_mol_kg : tuple of float
        Total of each [mol/kg of initial water], same order.
    ions : tuple of IonAmount
        Strong ions.
    neutrals : tuple of NeutralAmount
    ph : float or None
        pH as prepared; the amount of ``base_ion`` or ``acid_ion`` is then adjusted
        to give it. None takes the ions as they are.
    trim : bool
        False: the pH is reached by adding titrant to the contents. True: the
        contents are complete and the ion that is there is trimmed, up or down, to
        what the activity model of the path needs for that pH.
    prepare_temperature_c : float
        Temperature at which ``ph`` was set [C], 0 to 60.
    base_ion, acid_ion : tuple of (str, int)
        Name and charge of the ion that comes with the titrant.
    glass_transition_c : float or None
        Glass transition of the freeze-concentrate [C]; the path stops there.
    """

    ladders: tuple[Ladder, ...] = ()
    totals_mol_kg: tuple[float, ...] = ()
    ions: tuple[IonAmount, ...] = ()
    neutrals: tuple[NeutralAmount, ...] = ()
    ph: float | None = None
    trim: bool = False
    prepare_temperature_c: float = 25.0
    base_ion: tuple[str, int] = ("sodium", 1)
    acid_ion: tuple[str, int] = ("chloride", -1)
    glass_transition_c: float | None = None

    def __post_init__(self) -> None:
        """Refuse amounts that cannot be."""
        if len(self.ladders) != len(self.totals_mol_kg):
            msg = (
                f"freezing contents: {len(self.ladders)} ladders but "
                f"{len(self.totals_mol_kg)} totals, allowed one total per ladder"
            )
            raise InputError(msg)
        proteins = [x.name for x in self.ladders if x.is_macro_ion]
        if proteins:
            msg = (
                f"freezing contents: {proteins[0]} is a protein or another macro-ion, "
                "allowed small molecules and ions"
            )
            raise InputError(msg, hint="leave it out together with its counter-ions")
        amounts = [
            *zip((x.name for x in self.ladders), self.totals_mol_kg, strict=True),
            *((x.name, x.mol_kg) for x in self.ions),
            *((x.name, x.mol_kg) for x in self.neutrals),
        ]
        names = [name for name, _ in amounts]
        for name, amount in amounts:
            if not (math.isfinite(amount) and amount >= 0.0):
                msg = (
                    f"freezing contents: {name} {amount} mol/kg, allowed 0 or "
                    "more and finite"
                )
                raise InputError(msg)
            if names.count(name) > 1:
                msg = f"freezing contents: {name} stands twice, allowed once"
                raise InputError(msg)
        if self.ph is not None and not 0.0 <= self.ph <= 14.0:
            msg = f"freezing contents: ph {self.ph}, allowed 0 to 14"
            raise InputError(msg)
        if not 0.0 <= self.prepare_temperature_c <= 60.0:
            msg = (
                f"freezing contents: prepare_temperature_c "
                f"{self.prepare_temperature_c}, allowed 0 to 60 C"
            )
            raise InputError(msg)


@dataclass(frozen=True, slots=True)
class FreezingPoint:
    """The mixture at one temperature.

    Attributes
    ----------
    temperature_c : float
    ph : float or None
        -log10 a(H+) of the liquid on the scale of its activity model; None where
        there is no liquid, or no number may be given (see ``state``).
    ice_fraction : float or None
        Share of the initial water that is ice.
    unfrozen_water_g_kg : float or None
        Liquid water [g per kg of initial water].
    ionic_strength_mol_kg : float or None
        Of the liquid [mol/kg of liquid water].
    solids : mapping of str to float
        Crystallised salts [mol/kg of initial water].
    liquid_mol_kg : mapping of str to float
        Components of the liquid [mol/kg of liquid water].
    species_mol_kg : mapping of str to float
        Dissolved species of the liquid [mol/kg of liquid water].
    saturation : mapping of str to float
        log10 of ion-activity product over solubility product of each solid.
    state : str
        ``liquid`` (no ice yet), ``frozen`` (ice and liquid), ``no liquid``,
        ``glass``, ``outside model``.
    """

    temperature_c: float
    ph: float | None
    ice_fraction: float | None
    unfrozen_water_g_kg: float | None
    ionic_strength_mol_kg: float | None
    solids: Mapping[str, float]
    liquid_mol_kg: Mapping[str, float] = field(default_factory=dict)
    species_mol_kg: Mapping[str, float] = field(default_factory=dict)
    saturation: Mapping[str, float] = field(default_factory=dict)
    state: str = "frozen"

    def to_dict(self) -> dict[str, Any]:
        """Return the point in the shape of the JSON report."""
        return {
            "temperature_c": self.temperature_c,
            "ph": self.ph,
            "ice_fraction": self.ice_fraction,
            "unfrozen_water_g_kg": self.unfrozen_water_g_kg,
            "ionic_strength_mol_kg": self.ionic_strength_mol_kg,
            "solids": dict(self.solids),
            "state": self.state,
        }


@dataclass(frozen=True, slots=True)
class FreezingEvent:
    """Something that happens at one temperature on the way down."""

    temperature_c: float
    event: str
    ph: float | None = None
    solid: str = ""

    def to_dict(self) -> dict[str, Any]:
        """Return the event in the shape of the JSON report."""
        return {
            "temperature_c": self.temperature_c,
            "event": self.event,
            "ph": self.ph,
            "solid": self.solid or None,
        }


@dataclass(frozen=True, slots=True)
class FreezingPath:
    """One bounding path from the preparation temperature down.

    Attributes
    ----------
    assumption : {"crystallising", "supersaturated"}
    brine : str
        Name of the activity model.
    error_ph : float or None
    ph_prepared : float
        pH of the liquid at the preparation temperature in this model.
    titrant : str
        Ion that was adjusted to give the prepared pH; empty where none was.
    titrant_mol_kg : float
        Change of its amount [mol/kg].
    points : tuple of FreezingPoint
        In the order of the temperatures asked for.
    events : tuple of FreezingEvent
        In falling temperature.
    metastable : tuple of FreezingPoint
        Temperatures below the last eutectic, with the salt that would have taken
        the last liquid held back; not an equilibrium.
    notes : tuple of str
    """

    assumption: Assumption
    brine: str
    error_ph: float | None
    ph_prepared: float
    titrant: str
    titrant_mol_kg: float
    points: tuple[FreezingPoint, ...]
    events: tuple[FreezingEvent, ...]
    metastable: tuple[FreezingPoint, ...] = ()
    notes: tuple[str, ...] = ()

    def to_dict(self) -> dict[str, Any]:
        """Return the path in the shape of the JSON report."""
        return {
            "assumption": self.assumption,
            "brine": self.brine,
            "error_ph": self.error_ph,
            "ph_prepared": self.ph_prepared,
            "points": [p.to_dict() for p in self.points],
            "events": [e.to_dict() for e in self.events],
            "metastable_points": [p.to_dict() for p in self.metastable],
            "notes": list(self.notes),
        }

    def event(self, name: str, solid: str = "") -> FreezingEvent | None:
        """Return the first event of a name (and solid), None if it never happens."""
        for one in self.events:
            if one.event == name and solid in ("", one.solid):
                return one
        return None
