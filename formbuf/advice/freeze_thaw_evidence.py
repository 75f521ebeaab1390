"""What was measured of a system on freezing, nearest first, and what follows from it.

The order of the observations and the words of the verdict are judgement; the numbers
are those of the tables.
"""

from __future__ import annotations

import math
from collections.abc import Set
from dataclasses import dataclass
from typing import Any

from formbuf.advice.frozen import Frozen
from formbuf.chemistry.freezing_records import FreezingPath, Solid
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.freezing_assess import (
    DILUTE_MMOL_L,
    NEGLIGIBLE_BELOW,
    SUGAR_PERCENT,
    evidence_of,
    lowest_computed_c,
)
from formbuf.product.freezing_data import Observation, load_freezing_data, observations

#: Sources of the rule that says where real samples fall: concentration, sugar, rate.
RULE_SOURCES = ("gomez_2001", "croyle_1998", "murase_franks_1989")
#: Species whose neutral form is a gas that ice drives out.
VOLATILE_GAS = "carbonate"
_RULE_SALT = "disodium_hydrogen_phosphate_dodecahydrate"
#: Words in the co-solutes of an observation that mean an amorphous sugar.
_SUGARS = ("sucrose", "trehalose", "cellobiose")
#: What an observation that does not tell a condition is taken to differ by.
_UNTOLD = 1.0
_KELVIN_PER_STEP = 10.0
#: Conditions up to which an observation is one of the same case (judgement).
_SAME_PH, _SAME_FOLD = 0.5, 3.0


@dataclass(frozen=True, slots=True)
class Question:
    """The conditions that observations are compared with."""

    concentration_mmol_l: float
    ph: float
    lowest_c: float
    sugar_percent: float
    has_chloride: bool = False


@dataclass(frozen=True, slots=True)
class RankedObservation:
    """One published observation and how far its conditions are from those asked for.

    ``distance`` counts one for a tenfold concentration, a unit of initial pH, 10 K, an
    amorphous sugar or chloride on one side only, and each condition that is not told.
    ``alike``: initial pH within 0.5, concentration (where told) within threefold, and
    sugar and chloride on both sides or on neither.
    """

    observation: Observation
    distance: float
    alike: bool

    def to_dict(self) -> dict[str, Any]:
        """Return the observation in the shape of the JSON report."""
        return {
            **self.observation.to_dict(),
            "systems": list(self.observation.systems),
            "distance": self.distance,
            "alike": self.alike,
        }


@dataclass(frozen=True, slots=True)
class PublishedChange:
    """Range of the observed changes of pH that bear a number, and how many do.

    ``published`` of them were read in a source, ``recalled`` have the basis memory.
    """

    low: float
    high: float
    published: int
    recalled: int


def nearest_observations(
    library: Library, system: System, question: Question
) -> tuple[RankedObservation, ...]:
    """Return the observations of a system, those under the nearest conditions first.

    A system of two species, or a formula of the user's own, has those of the systems of
    each species; ties go to what was read in a source.
    """
    found: dict[str, Observation] = {}
    for name in _related(library, system):
        for one in observations(library, name):
            found.setdefault(one.id, one)
    ranked = [
        RankedObservation(one, _distance(one, question), _is_alike(one, question))
        for one in found.values()
    ]
    return tuple(
        sorted(
            ranked,
            key=lambda r: (
                r.distance,
                r.observation.basis != "published",
                r.observation.id,
            ),
        )
    )


def _related(library: Library, system: System) -> list[str]:
    """Return the system and, for two species or an own formula, those of each."""
    if len(system.species) < 2 and system.id in library.systems:
        return [system.id]
    parts = [
        other.id
        for other in library.systems.values()
        if len(other.species) == 1 and other.species[0] in system.species
    ]
    return [system.id, *parts]


def _distance(one: Observation, question: Question) -> float:
    amount = _number(one, "concentration", "_mmol_l", geometric=True)
    before = _number(one, "ph_initial", "")
    frozen = _number(one, "temperature_frozen", "_c")
    total = float(_has_sugar(one) != (question.sugar_percent >= SUGAR_PERCENT))
    total += float(_has_chloride(one) != question.has_chloride)
    total += (
        _UNTOLD
        if not amount or not question.concentration_mmol_l
        else abs(math.log10(amount / question.concentration_mmol_l))
    )
    total += _UNTOLD if before is None else abs(before - question.ph)
    total += (
        _UNTOLD
        if frozen is None
        else abs(frozen - question.lowest_c) / _KELVIN_PER_STEP
    )
    if observed_change(one) is None:
        total += _UNTOLD
    return total


def _is_alike(one: Observation, question: Question) -> bool:
    """Whether an observation can be set against the paths as it is."""
    before = _number(one, "ph_initial", "")
    held = _number(one, "concentration", "_mmol_l", geometric=True)
    own = question.concentration_mmol_l
    if before is None or abs(before - question.ph) > _SAME_PH:
        return False
    if held is not None and not own / _SAME_FOLD <= held <= own * _SAME_FOLD:
        return False
    if _has_chloride(one) != question.has_chloride:
        return False
    return _has_sugar(one) == (question.sugar_percent >= SUGAR_PERCENT)


def _has_sugar(one: Observation) -> bool:
    return any(word in one.texts.get("cosolutes", "") for word in _SUGARS)


def _has_chloride(one: Observation) -> bool:
    told = " ".join(
        one.texts.get(k, "") for k in ("buffer", "counter_ion", "cosolutes")
    )
    return "chloride" in told or "saline" in told


def _number(
    one: Observation, name: str, unit: str, *, geometric: bool = False
) -> float | None:
    """Return a number of an observation, or the middle of its range."""
    numbers = one.numbers
    value = numbers.get(f"{name}{unit}")
    if value is not None:
        return value
    low, high = numbers.get(f"{name}_low{unit}"), numbers.get(f"{name}_high{unit}")
    if low is None or high is None:
        return low if high is None else high
    return math.sqrt(low * high) if geometric else 0.5 * (low + high)


def observed_change(one: Observation) -> tuple[float, float] | None:
    """Return the lowest and highest change of pH of an observation, if it has numbers."""
    numbers = one.numbers
    names = ("ph_change", "ph_change_low", "ph_change_high")
    values = [numbers[name] for name in names if name in numbers]
    return (min(values), max(values)) if values else None


def published_change(seen: tuple[RankedObservation, ...]) -> PublishedChange | None:
    """Return the range over all observations that bear a number."""
    ranges = [(observed_change(r.observation), r.observation.basis) for r in seen]
    bearing = [(change, basis) for change, basis in ranges if change is not None]
    if not bearing:
        return None
    read = sum(basis == "published" for _, basis in bearing)
    return PublishedChange(
        min(low for (low, _), _ in bearing),
        max(high for (_, high), _ in bearing),
        read,
        len(bearing) - read,
    )


def solids(library: Library) -> dict[str, Solid]:
    """Return every solid of the freezing tables by its id."""
    data = load_freezing_data(library)
    every = [*data.watched, *(s for b in data.brines.values() for s in b.solids)]
    return {solid.id: solid for solid in every}


def formula(library: Library, solid: str) -> str:
    """Return the formula of a solid, its name where the tables hold none."""
    known = solids(library).get(solid)
    return known.formula if known else solid.replace("_", " ")


def _suspect(library: Library, system: System, contents: Set[str]) -> str:
    """Return the formula of what is known to crystallise, if it can form at all."""
    solid = evidence_of(library, system).crystallises
    known = solids(library).get(solid)
    if known is not None and not set(known.components) <= contents:
        return ""
    return formula(library, solid) if solid else ""


def where_samples_fall(
    library: Library, system: System, frozen: Frozen, contents: Set[str]
) -> tuple[str, tuple[str, ...]]:
    """Return in words where real samples fall, and the sources of that rule.

    Parameters
    ----------
    library : Library
    system : System
    frozen : Frozen
    contents : set of str
        Components and ions of the product.
    """
    found = frozen.assessment
    evidence = evidence_of(library, system)
    if not has_ice(frozen):
        return "no ice forms at the temperatures asked for", ()
    if found.quantified:
        if found.paths[0].event("onset") is None:
            lowest = lowest_computed_c(found.paths[0])
            where = f"on the path: no salt reaches its solubility down to {lowest:g} C"
            return where, ()
        if frozen.sugar_percent >= SUGAR_PERCENT or _follows_rule(found.paths[0]):
            return found.where_samples_fall, RULE_SOURCES
        return f"between the two paths: {evidence.reason}", evidence.sources
    over = [e for e in found.paths[0].events if e.event == "supersaturated"]
    if over:
        text = (
            f"on the path down to {over[0].temperature_c:.1f} C, where "
            f"{formula(library, over[0].solid)} becomes supersaturated; off it where "
            "that crystallises"
        )
        return text, evidence.sources
    what = _suspect(library, system, contents)
    if what:
        return f"off the path where {what} crystallises", evidence.sources
    return "near the path, if nothing crystallises; no bound is known", evidence.sources


def _follows_rule(path: FreezingPath) -> bool:
    """Whether the salt is the one that the rule of concentration was found with."""
    onset = path.event("onset")
    return onset is not None and onset.solid == _RULE_SALT


def has_ice(frozen: Frozen) -> bool:
    """Whether ice forms at any temperature of the paths."""
    return any(e.event == "first ice" for e in frozen.assessment.paths[-1].events)


def thawing(
    library: Library, system: System, frozen: Frozen, contents: Set[str]
) -> str:
    """Say what the first melt is like where a salt has left the liquid."""
    back = "thawing runs the path backwards"
    found = frozen.assessment
    if not has_ice(frozen):
        return "nothing to thaw"
    path = found.paths[0]
    onset = path.event("onset")
    if path.assumption == "crystallising" and onset is not None:
        salt, melt = ("basic", "acid") if _turns_acid(path) else ("acid", "basic")
        return (
            f"{back}, but a crystallised {salt} salt ({formula(library, onset.solid)}) "
            f"dissolves late: the first melt is {melt}, more so than the table shows"
        )
    what = _suspect(library, system, contents)
    if found.quantified or not what:
        return f"{back}; nothing is expected to dissolve late"
    text = f"{back}, but where {what} has crystallised it dissolves late"
    direction = evidence_of(library, system).direction
    if direction in ("acid", "basic"):
        text += f": the first melt is {direction}"
    return text


def _turns_acid(path: FreezingPath) -> bool:
    """Whether the liquid turns acid from the first onset of a salt on."""
    onset = path.event("onset")
    later = [p.ph for p in path.points if p.ph is not None and p.solids]
    later += [e.ph for e in path.events if e.event == "eutectic" and e.ph is not None]
    if onset is None or onset.ph is None or not later:
        return False
    return later[-1] < onset.ph


def _known_of(seen: tuple[RankedObservation, ...]) -> str:
    """Say why what is known of a system does not settle its class."""
    if not seen:
        return "no evidence is known"
    if published_change(seen) is None:
        return "published without figures"
    return "what is published does not settle it"


def verdict(
    system: System,
    frozen: Frozen,
    seen: tuple[RankedObservation, ...] = (),
    *,
    is_frozen: bool,
    volatile_share: float | None,
) -> str:
    """Return in one sentence what to do about a system.

    Parameters
    ----------
    system : System
    frozen : Frozen
    seen : tuple of RankedObservation
        What was published of it.
    is_frozen : bool
        Whether the product is ever frozen.
    volatile_share : float or None
        Share of its volatile neutral form, where it is dried and that matters.
    """
    found = frozen.assessment
    name = frozen.counted_class
    drift, shift = found.cooling_shift, found.freezing_shift
    if not has_ice(frozen):
        text = "stays liquid at the temperatures asked for"
    elif name == "negligible":
        text = "little change was observed; confirm for this product"
        is_small = shift is not None and abs(shift) < NEGLIGIBLE_BELOW
        if frozen.remark:
            text = "small shift expected; confirm that nothing crystallises"
        elif is_small and drift is not None and abs(drift) >= NEGLIGIBLE_BELOW:
            text = "freezing adds little; cooling alone moves the pH"
        elif found.quantified:
            text = "computed to move little on freezing; confirm by measurement"
        elif not is_small:
            text = "little change was observed, more is computed; measure it"
    elif name == "moderate":
        text = "usable if the pH of the frozen sample is measured"
    elif name == "severe":
        text = "fails only when frozen, which this product is not"
        if is_frozen and found.quantified and found.paths[0].event("onset") is None:
            text = "avoid frozen: concentrating alone moves the pH"
        elif is_frozen and VOLATILE_GAS in system.species:
            text = "avoid frozen: carbon dioxide leaves the liquid unless it is sealed"
        elif is_frozen:
            text = (
                f"avoid frozen, or hold crystallisation back: {SUGAR_PERCENT:g} % "
                f"sucrose or trehalose, {DILUTE_MMOL_L:g} mmol/L or less, fast cooling"
            )
    elif name == "sources disagree":
        text = "measure it: published results disagree"
    else:
        text = f"measure it: {_known_of(seen)}"
    if volatile_share is not None:
        text += (
            f"; on drying {100.0 * volatile_share:.2g} % stands in its volatile form "
            "and is lost"
        )
    return text
