"""Words that the table and the figure of freezing and thawing share."""

from __future__ import annotations

from collections.abc import Mapping

from formbuf.advice.freeze_thaw_evidence import PublishedChange, solids
from formbuf.advice.freeze_thaw_results import FreezeThaw, FreezeThawSystem
from formbuf.advice.frozen import STEPS, Frozen
from formbuf.chemistry.freezing_records import (
    FreezingEvent,
    FreezingPath,
    FreezingPoint,
)
from formbuf.output import words
from formbuf.output.figures import ABSENT, decimals

#: Names of the two paths as headers and in running text.
PATH_WORDS: Mapping[str, str] = {
    "crystallising": "salts crystallise",
    "supersaturated": "no salt does",
}
_EVENTS: Mapping[str, str] = {
    "first ice": "first ice",
    "last ice": "last ice",
    "onset": "{solid} crystallises",
    "supersaturated": "{solid} supersaturated",
    "dissolved": "{solid} is used up",
    "eutectic": "eutectic",
    "no liquid": "no liquid below",
    "outside model": "the model ends",
    "pK extrapolation limit": "no pH below",
    "glass transition": "glass transition",
}
#: What stands for the pH where no liquid is left.
SOLID = "solid"


def title_of(result: FreezeThaw) -> str:
    """Return what is frozen, in one line."""
    if not result.is_quick:
        return f"On freezing: {words.title_of(result.brief)}"
    (s,) = result.systems
    at = result.brief.ph.measure_temperature_c
    added = [
        f"{row.stated:g} {row.stated_unit} "
        f"{result.library.find_material(row.material).name}"
        for row in result.brief.excipient
    ]
    contents = " with ".join([made(s), *([words.listed(added)] if added else [])])
    return (
        f"{contents}, pH {s.ph_before:.2f} at {at:g} C, frozen to {result.lowest_c:g} C"
    )


def made(s: FreezeThawSystem) -> str:
    """Return amount and name of a system: 10 mmol/L sodium phosphate."""
    if not s.concentration_mmol_l or s.name.endswith("mmol/L"):
        return s.name
    return f"{s.concentration_mmol_l:g} mmol/L {s.name}"


def event_words(result: FreezeThaw, event: FreezingEvent) -> str:
    """Return an event in words."""
    known = solids(result.library).get(event.solid)
    name = known.formula if known else event.solid.replace("_", " ")
    return _EVENTS.get(event.event, event.event).format(solid=name)


def point_ph(path: FreezingPath, point: FreezingPoint) -> str:
    """Return pH of a path at one temperature; in brackets where it is metastable."""
    if point.ph is not None:
        return words.ph_words(point.ph)
    for other in path.metastable:
        if other.temperature_c == point.temperature_c and other.ph is not None:
            return f"({other.ph:.2f})"
    return {"no liquid": SOLID, "glass": "glass"}.get(point.state, ABSENT)


def class_words(frozen: Frozen) -> str:
    """Return the class that counts, and why it is not that of the composition."""
    own, counted = frozen.assessment.freezing_class, frozen.counted_class
    if own == counted:
        return counted
    is_milder = own in STEPS and STEPS.index(counted) < STEPS.index(own)
    return f"{counted} ({own}, {'eased by sugar' if is_milder else 'sodium bound'})"


def range_words(found: PublishedChange | None) -> str:
    """Return a published range with how many observations stand behind it."""
    if found is None:
        return "no figure"
    low, high = decimals(found.low, 1, sign=True), decimals(found.high, 1, sign=True)
    span = low if low == high else f"{low} to {high}"
    return f"{span} ({found.published + found.recalled})"


def plain_solids(result: FreezeThaw, text: str) -> str:
    """Return a text with the formula of each solid in place of its id."""
    for name, solid in solids(result.library).items():
        text = text.replace(name, solid.formula)
    return text
