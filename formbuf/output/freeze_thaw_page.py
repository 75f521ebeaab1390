"""Freezing and thawing to read: one composition in full, or systems side by side."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import TypeVar

from formbuf.advice.freeze_thaw_evidence import has_ice
from formbuf.advice.freeze_thaw_results import (
    FreezeThaw,
    FreezeThawSystem,
    LiquidPoint,
)
from formbuf.chemistry.freezing_records import FreezingPath
from formbuf.output import words
from formbuf.output.figures import ABSENT, decimals, significant
from formbuf.output.freeze_thaw_data import freeze_thaw_dict, records
from formbuf.output.freeze_thaw_observed import (
    observed_grid,
    observed_items,
    source_items,
)
from formbuf.output.freeze_thaw_words import (
    PATH_WORDS,
    SOLID,
    class_words,
    event_words,
    made,
    plain_solids,
    point_ph,
    range_words,
    title_of,
)
from formbuf.output.page import (
    WIDE,
    Block,
    Column,
    Grid,
    Heading,
    Items,
    Page,
    Paragraph,
    number,
    section,
)

_Told = TypeVar("_Told", str, Items)
_KINDS: Mapping[str, str] = {
    "measure": "pH as set",
    "prepare": "preparation",
    "storage": "liquid storage",
    "use": "liquid",
    "accelerated": "accelerated",
    "body": "body",
    "process": "process",
    "asked": "liquid",
}
_SUMMARY_LEGEND = (
    "Freezing adds: largest difference of a path from the same liquid cooled without "
    "ice; it decides the class where both paths are computed (phosphates), elsewhere "
    "published observations do. Cooling alone: what that liquid does by itself. "
    "Published change: lowest to highest observation with a figure, whatever its "
    "conditions, and their number."
)
#: Two events at most this far apart stand in one row, K.
_SAME_ROW_K = 0.05


@dataclass(frozen=True, slots=True)
class _Row:
    """One temperature of the table of a single composition."""

    temperature_c: float
    text: str
    cells: tuple[str, ...]


def freeze_thaw_page(result: FreezeThaw) -> Page:
    """Return a comparison as a page."""
    return Page(
        payload=lambda: freeze_thaw_dict(result),
        records=lambda: records(result),
        blocks=lambda: _quick(result) if result.is_quick else _side_by_side(result),
    )


def _quick(result: FreezeThaw) -> list[Block]:
    (s,) = result.systems
    found: list[Block] = [
        Heading(title_of(result), 1),
        Paragraph(_headline(result, s), strong=True),
        _by_temperature(result, s),
        Paragraph(_legend(result)),
        _summary(result),
        Paragraph(_SUMMARY_LEGEND),
    ]
    found += _conclusions(result)
    found += section(
        "Published observations, nearest conditions first",
        observed_grid(result.library, s),
    )
    found += section("Notes on validity", Items(tuple(_notes(result))))
    found += section("Sources", source_items(result))
    found += section("Warnings", words.warnings_items(result.warnings))
    found.append(Paragraph(words.CAUTION))
    return found


def _side_by_side(result: FreezeThaw) -> list[Block]:
    found: list[Block] = [Heading(title_of(result), 1)]
    if not result.systems:
        found.append(Paragraph("No system of the shortlist is left to freeze."))
    else:
        found += [
            Paragraph(_depth(result)),
            _wide_table(result),
            Paragraph(_legend(result)),
            _summary(result),
            Paragraph(_SUMMARY_LEGEND),
        ]
        found += _conclusions(result)
    seen = _grouped((observed_items(result.library, s), s.name) for s in result.systems)
    for items, names in seen.items():
        found += section(f"Published, nearest first: {words.listed(names)}", items)
    found += section("Notes on validity", Items(tuple(_notes(result))))
    found += section("Left out", Items(result.left_out))
    found += section("Sources", source_items(result))
    found += section("Warnings", words.warnings_items(result.warnings))
    found.append(Paragraph(words.CAUTION))
    return found


def _headline(result: FreezeThaw, s: FreezeThawSystem) -> str:
    found = s.frozen.assessment
    reason = plain_solids(result, found.reason)
    name = class_words(s.frozen)
    return f"{name[0].upper()}{name[1:]}: {reason}. Verdict: {s.verdict}."


def _depth(result: FreezeThaw) -> str:
    if result.is_frozen:
        text = f"Coldest temperature: {result.lowest_c:g} C"
    else:
        text = (
            "The product is kept liquid; this is what freezing by accident would do, "
            f"down to {result.lowest_c:g} C"
        )
    first = min(s.rank for s in result.systems if s.rank is not None)
    lead = next(s for s in result.systems if s.rank == first)
    return f"{text}. Order of the shortlist; the first is {made(lead)}."


def _by_temperature(result: FreezeThaw, s: FreezeThawSystem) -> Grid:
    """Return pH at every temperature, liquid first, events between."""
    paths = s.frozen.assessment.paths
    columns = [number("C"), Column("What happens")]
    for path in paths:
        *first, last = PATH_WORDS[path.assumption].split(" ")
        columns.append(number(f"pH, {' '.join(first)}\n{last}"))
    columns += [
        number("Ice, %"),
        number("Liquid water,\ng/kg", WIDE),
        number("Ionic strength,\nmol/kg", WIDE),
    ]
    rows = [_liquid_row(p, paths) for p in s.liquid]
    rows += _event_rows(result, paths)
    rows += _point_rows(paths)
    rows.sort(key=lambda row: (-row.temperature_c, row.text == ""))
    return Grid(
        tuple(columns),
        tuple((_celsius(row.temperature_c), row.text, *row.cells) for row in rows),
    )


def _liquid_row(point: LiquidPoint, paths: Sequence[FreezingPath]) -> _Row:
    """Return a liquid state; no pH on a path whose salt has left it before the ice."""
    kinds = list(dict.fromkeys(_KINDS[k] for k in point.kinds))
    kinds = [k for k in kinds if k != "preparation" or len(kinds) == 1]
    onsets = [path.event("onset") for path in paths]
    ph = [
        ABSENT
        if onset is not None and onset.temperature_c > point.temperature_c
        else words.ph_words(point.ph)
        for onset in onsets
    ]
    return _Row(point.temperature_c, ", ".join(kinds), (*ph, "0", ABSENT, ABSENT))


def _event_rows(result: FreezeThaw, paths: Sequence[FreezingPath]) -> list[_Row]:
    """Return one row per temperature at which something happens on some path."""
    found: list[tuple[float, list[str], list[float | None]]] = []
    for column, path in enumerate(paths):
        for event in path.events:
            if event.event == "supersaturated" and len(paths) > 1:
                continue  # the onset on the other path says it
            near = [
                row for row in found if abs(row[0] - event.temperature_c) < _SAME_ROW_K
            ]
            row = near[0] if near else (event.temperature_c, [], [None] * len(paths))
            if not near:
                found.append(row)
            text = event_words(result, event)
            if text not in row[1]:
                row[1].append(text)
            row[2][column] = event.ph
    return [
        _Row(
            at,
            ", ".join(texts),
            (*(words.ph_words(ph) if ph is not None else "" for ph in phs), "", "", ""),
        )
        for at, texts, phs in found
    ]


def _point_rows(paths: Sequence[FreezingPath]) -> list[_Row]:
    rows = []
    for points in zip(*(path.points for path in paths), strict=True):
        at = points[0].temperature_c
        ice = points[0].ice_fraction
        rows.append(
            _Row(
                at,
                "",
                (
                    *(point_ph(path, p) for path, p in zip(paths, points, strict=True)),
                    decimals(100.0 * ice if ice is not None else None, 1),
                    significant(points[0].unfrozen_water_g_kg),
                    significant(points[0].ionic_strength_mol_kg),
                ),
            )
        )
    return rows


def _celsius(temperature_c: float) -> str:
    text = f"{temperature_c:.2f}"
    return text.rstrip("0").rstrip(".")


def _wide_table(result: FreezeThaw) -> Grid:
    """Return one line per system with its pH as a liquid, then one per frozen path."""
    liquid = sorted(
        {p.temperature_c for s in result.systems for p in s.liquid}, reverse=True
    )
    usual = result.brief.ph.measure_temperature_c
    minor = {p.temperature_c for s in result.systems for p in s.liquid if _is_minor(p)}
    columns = [Column("System, its pH at")]
    columns += [
        number(f"{t:g} C", 100 if t in minor and t != usual else 0) for t in liquid
    ]
    columns += [number(f"{t:g} C") for t in result.shown_c]
    rows = []
    for s in result.systems:
        ph = {p.temperature_c: p.ph for p in s.liquid}
        cells = [words.ph_words(ph.get(t)) for t in liquid]
        name = f"or {made(s)}" if s.variant_of else made(s)
        rows.append((name, *cells, *([""] * len(result.shown_c))))
        frozen = {
            PATH_WORDS[path.assumption]: _at(path, result.shown_c)
            for path in s.frozen.assessment.paths
        }
        if len(frozen) > 1 and len(set(frozen.values())) == 1:
            frozen = {"on both paths": next(iter(frozen.values()))}
        for label, row in frozen.items():
            rows.append((f"  {label}", *([""] * len(liquid)), *row))
    return Grid(tuple(columns), tuple(rows))


def _at(path: FreezingPath, temperatures_c: Sequence[float]) -> tuple[str, ...]:
    points = {p.temperature_c: p for p in path.points}
    return tuple(point_ph(path, points[t]) for t in temperatures_c)


def _is_minor(point: LiquidPoint) -> bool:
    """Whether a narrow table of several systems may leave a liquid temperature out."""
    return set(point.kinds) <= {"prepare", "body", "accelerated"}


def _legend(result: FreezeThaw) -> str:
    paths = [p for s in result.systems for p in s.frozen.assessment.paths]
    text = (
        "Two bounds, never one number: on one path every salt crystallises at its "
        "solubility, on the other none does. Freezing reads from top to bottom, "
        "thawing back up."
        if result.is_quick
        else "First line: pH as a liquid. Below, where ice stands beside the liquid: "
        "salts crystallise at their solubility, or no salt does. Freezing reads from "
        "left to right, thawing back."
    )
    if len({p.assumption for p in paths}) == 1:
        text += " The other bound, where a salt would crystallise, is not computed."
    if any(p.metastable for p in paths):
        text += (
            " In brackets: metastable, with the last salt held back; at equilibrium no "
            "liquid is left there."
        )
    if any(point_ph(path, p) == SOLID for path in paths for p in path.points):
        text += f" {SOLID}: no liquid, pH undefined."
    return text


def _summary(result: FreezeThaw) -> Grid:
    columns = (
        Column("System"),
        number("Cooling\nalone, pH"),
        number("Freezing\nadds, pH"),
        Column("Class"),
        Column("Published\nchange, pH"),
        Column("Verdict"),
    )
    rows = [
        (
            s.name,
            words.ph_words(s.frozen.assessment.cooling_shift, sign=True),
            words.ph_words(s.frozen.assessment.freezing_shift, sign=True),
            class_words(s.frozen),
            range_words(s.published),
            s.verdict,
        )
        for s in result.systems
    ]
    return Grid(columns, tuple(rows))


def _conclusions(result: FreezeThaw) -> list[Block]:
    """Say where real samples fall and how they thaw; equal answers stand together."""
    where = _grouped(
        (f"{s.where}{_cited(s.where_sources)}", s.name) for s in result.systems
    )
    thaw = _grouped((s.thaw, s.name) for s in result.systems)
    single = len(result.systems) == 1
    return [
        *section("Where real samples fall (judgement)", _told(where, single=single)),
        *section("Thawing", _told(thaw, single=single)),
    ]


def _cited(sources: Sequence[str]) -> str:
    return f" ({', '.join(sources)})" if sources else ""


def _grouped(pairs: Iterable[tuple[_Told, str]]) -> dict[_Told, list[str]]:
    """Gather the names of which the same is told."""
    found: dict[_Told, list[str]] = {}
    for told, name in pairs:
        found.setdefault(told, []).append(name)
    return found


def _told(groups: Mapping[str, Sequence[str]], *, single: bool) -> Items:
    return Items(
        tuple(
            f"{text[0].upper()}{text[1:]}."
            if single
            else f"{words.listed(names)}: {text}."
            for text, names in groups.items()
        )
    )


def _notes(result: FreezeThaw) -> list[str]:
    """Return expected errors and what the models leave out, each note once."""
    pairs: list[tuple[str, str]] = []
    for s in result.systems:
        found = s.frozen.assessment
        error = found.paths[0].error_ph
        if found.quantified and error is not None:
            text = f"expected error of the crystallising bound: {error:g} pH either way"
        elif has_ice(s.frozen):
            text = "no error can be stated: class and direction only"
        else:
            text = "nothing freezes"
        pairs.append((text, s.name))
        if s.frozen.remark:
            pairs.append((s.frozen.remark, s.name))
        noted = [note for path in found.paths for note in path.notes]
        pairs += [(note, s.name) for note in (*found.notes, *noted, *s.notes)]
    groups = {t: list(dict.fromkeys(n)) for t, n in _grouped(pairs).items()}
    every = list(dict.fromkeys(s.name for s in result.systems))
    return [
        plain_solids(
            result,
            text if len(names) == len(every) else f"{_those(names, every)}: {text}",
        )
        for text, names in groups.items()
    ]


def _those(names: Sequence[str], every: Sequence[str]) -> str:
    """Return names as in a sentence; the exceptions where they are fewer."""
    others = [name for name in every if name not in names]
    if len(others) < len(names) - 1:
        return f"all but {words.listed(others)}"
    return words.listed(names)
