"""Published observations of frozen buffers in words, with source, basis, conditions."""

from __future__ import annotations

from collections.abc import Mapping

from formbuf.advice.freeze_thaw_results import FreezeThaw, FreezeThawSystem
from formbuf.library import Library
from formbuf.library.records import Source
from formbuf.output.figures import ABSENT
from formbuf.output.page import Column, Grid, Items
from formbuf.product.freezing_data import Observation

#: Observations shown of one composition, and of each of several systems.
SHOWN_OF_ONE, SHOWN_OF_EACH = 8, 2
#: What is told where an observation bears no number.
DIRECTIONS: Mapping[str, str] = {
    "none": "no change",
    "small": "small change",
    "acid": "turns acid",
    "basic": "turns basic",
}


def observed_grid(library: Library, s: FreezeThawSystem) -> Grid:
    """Return the nearest observations of one composition, one per row."""
    columns = (
        Column("mmol/L", "right"),
        Column("pH\nbefore", "right"),
        Column("pH\nfrozen", "right"),
        Column("Frozen\nat, C", "right"),
        Column("Conditions; source, basis"),
    )
    kept = [r.observation for r in s.observations[:SHOWN_OF_ONE]]
    rows = [
        (
            amount(one),
            interval(one, "ph_initial"),
            frozen_words(one),
            temperature(one),
            f"{conditions(one)}; {cited(library, one)}",
        )
        for one in kept
    ]
    more = len(s.observations) - len(kept)
    if more > 0:
        rows.append(("", "", "", "", f"and {more} more (--format json)"))
    return Grid(columns, tuple(rows))


def observed_items(library: Library, s: FreezeThawSystem) -> Items:
    """Return the nearest observations of one of several systems, as sentences."""
    kept = [r.observation for r in s.observations[:SHOWN_OF_EACH]]
    texts = [sentence(library, one) for one in kept]
    more = len(s.observations) - len(kept)
    if more > 0:
        texts[-1] += f" And {more} more (--format json)."
    return Items(tuple(texts))


def sentence(library: Library, one: Observation) -> str:
    """Return one observation as a sentence."""
    parts = [one.texts.get("buffer", "")]
    if amount(one) != ABSENT:
        parts.insert(0, f"{amount(one)} mmol/L")
    before = interval(one, "ph_initial")
    text = " ".join(parts)
    text += f", pH {before}" if before != ABSENT else ""
    at = temperature(one)
    place = f" at {at} C" if at[-1:].isdigit() else f", {at}" if at != ABSENT else ""
    return (
        f"{text}: {frozen_words(one)}{place}; {conditions(one)}. {cited(library, one)}."
    )


def amount(one: Observation) -> str:
    """Return the concentration as told, mmol/L."""
    text = one.texts.get("concentration_text")
    value = one.numbers.get("concentration_mmol_l")
    if value is not None:
        return f"{value:g}"
    return text or _range(
        one.numbers, "concentration_low_mmol_l", "concentration_high_mmol_l"
    )


def interval(one: Observation, name: str) -> str:
    """Return a pH or the range it stands in."""
    value = one.numbers.get(name)
    if value is not None:
        return f"{value:.1f}"
    return _range(one.numbers, f"{name}_low", f"{name}_high")


def frozen_words(one: Observation) -> str:
    """Return pH when frozen, else its change, else the direction."""
    numbers = one.numbers
    if "ph_frozen" in numbers:
        error = numbers.get("ph_frozen_error")
        return f"{numbers['ph_frozen']:.1f}" + (f" ± {error:.1f}" if error else "")
    if "ph_change" in numbers:
        return f"change {numbers['ph_change']:+.1f}".replace("+0.0", "0")
    low, high = numbers.get("ph_change_low"), numbers.get("ph_change_high")
    if low is not None and high is not None:
        return f"change {low:+.1f} to {high:+.1f}"
    if low is not None:
        return f"change down to {low:+.1f}"
    if high is not None:
        return (
            f"change {high:+.1f} or more"
            if high > 0
            else f"change {high:+.1f} or below"
        )
    direction = one.texts.get("direction", "")
    return DIRECTIONS.get(direction, direction) or ABSENT


def temperature(one: Observation) -> str:
    """Return the frozen temperature as told."""
    value = one.numbers.get("temperature_frozen_c")
    if value is not None:
        return f"{value:g}"
    return one.texts.get("temperature_text") or _range(
        one.numbers, "temperature_frozen_low_c", "temperature_frozen_high_c"
    )


def _range(numbers: Mapping[str, float], low: str, high: str) -> str:
    if low in numbers and high in numbers:
        return f"{numbers[low]:g} to {numbers[high]:g}"
    return f"{numbers[high]:g} or less" if high in numbers else ABSENT


def conditions(one: Observation) -> str:
    """Return cooling, co-solutes and method."""
    texts = one.texts
    solutes = texts.get("cosolutes", "")
    told = [
        texts.get("cooling", ""),
        "" if solutes in ("", "none") else f"with {solutes}",
        texts.get("method", ""),
    ]
    return ", ".join(part for part in told if part) or "conditions not told"


def cited(library: Library, one: Observation) -> str:
    """Return the source of an observation, short, and its basis."""
    source = library.sources.get(one.source)
    name = short_source(source) if source else one.source
    return f"{name}, {one.basis}"


def short_source(source: Source) -> str:
    """Return authors and year as in running text: Gomez et al. 2001."""
    authors = [part.strip() for part in source.authors.split(",") if part.strip()]
    if not authors:
        return source.id
    families = [part.rsplit(" ", 1)[0] for part in authors]
    if len(families) > 2:
        return f"{families[0]} et al. {source.year}"
    return f"{' & '.join(families)} {source.year}".strip()


def source_items(result: FreezeThaw) -> Items:
    """Return the sources of what is shown, in full, in order of appearance."""
    shown = SHOWN_OF_ONE if result.is_quick else SHOWN_OF_EACH
    ids: dict[str, None] = {}
    for s in result.systems:
        ids |= dict.fromkeys(s.frozen.assessment.sources)
        ids |= dict.fromkeys(s.where_sources)
        ids |= dict.fromkeys(r.observation.source for r in s.observations[:shown])
    known = result.library.sources
    return Items(tuple(full_source(known[i]) for i in ids if i in known))


def full_source(source: Source) -> str:
    """Return one source in full: id, authors, year, title, where, identifier."""
    parts = [f"{source.authors} {source.year}".strip(), source.title, source.container]
    if source.doi:
        parts.append(f"doi:{source.doi}")
    return f"{source.id}: {'. '.join(part.rstrip('.') for part in parts if part)}."
