"""Freezing and thawing as plain data: the JSON report and flat rows."""

from __future__ import annotations

from typing import Any

from formbuf.advice.freeze_thaw_results import FreezeThaw, FreezeThawSystem
from formbuf.output.freeze_thaw_words import plain_solids
from formbuf.output.serialise import header, plain, weighed_dict

FREEZE_THAW_SCHEMA = "formbuf.freeze_thaw/1"


def freeze_thaw_dict(result: FreezeThaw) -> dict[str, Any]:
    """Return a comparison as plain data.

    Solids are in mol per kg of initial water; an observation names the systems of the
    tables that it stands for, and its distance from each system asked about.
    """
    asked = {
        "form": "composition" if result.is_quick else "brief",
        "lowest_c": result.lowest_c,
        "temperatures_c": list(result.temperatures_c),
        "is_frozen_or_dried": result.is_frozen,
    }
    brief = None if result.is_quick else plain(result.brief)
    return {
        **header(FREEZE_THAW_SCHEMA, result.library),
        "asked": asked,
        "brief": brief,
        "assumptions": plain(result.assumptions),
        "units": {"solids": "mol per kg of initial water"},
        "systems": [system_dict(result, s) for s in result.systems],
        "paths": [path for s in result.systems for path in paths_of(s)],
        "observations": observations_of(result),
        "left_out": list(result.left_out),
        "warnings": list(result.warnings),
    }


def system_dict(result: FreezeThaw, s: FreezeThawSystem) -> dict[str, Any]:
    """Return what holds for one system, its paths and observations apart."""
    found = s.frozen.assessment
    return {
        "system": s.key,
        "name": s.name,
        "base_system": s.system.id,
        "concentration_mmol_l": s.concentration_mmol_l,
        "composition": [weighed_dict(w) for w in s.composition],
        "tonicity_fill": weighed_dict(s.tonicity_fill) if s.tonicity_fill else None,
        "sugar_percent_w_v": float(s.frozen.sugar_percent),
        "standing": s.standing or None,
        "rank": s.rank,
        "variant_of": s.variant_of,
        "measure_temperature_c": result.brief.ph.measure_temperature_c,
        "ph_before": s.ph_before,
        "liquid_states": plain(s.liquid),
        "class": found.freezing_class,
        "counted_class": s.frozen.counted_class,
        "counted_because": s.frozen.remark or None,
        "basis": found.basis,
        "reason": plain_solids(result, found.reason),
        "sources": list(found.sources),
        "quantified": found.quantified,
        "shift": plain(found.freezing_shift),
        "cooling_shift": plain(found.cooling_shift),
        "where_samples_fall": s.where,
        "where_sources": list(s.where_sources),
        "published_change": plain(s.published),
        "verdict": s.verdict,
        "thawing": s.thaw,
        "volatile_share": plain(s.volatile_share),
        "notes": [plain_solids(result, n) for n in (*found.notes, *s.notes)],
    }


def paths_of(s: FreezeThawSystem) -> list[dict[str, Any]]:
    """Return the bounding paths of a system."""
    return [
        {"system": s.key, **plain(path.to_dict())} for path in s.frozen.assessment.paths
    ]


def observations_of(result: FreezeThaw) -> list[dict[str, Any]]:
    """Return every observation once, nearest first, with the systems it is near to."""
    rows: dict[str, dict[str, Any]] = {}
    for s in result.systems:
        for ranked in s.observations:
            row = rows.setdefault(
                ranked.observation.id,
                {**plain(ranked.to_dict()), "asked": {}},
            )
            row["asked"][s.key] = ranked.distance
            row["distance"] = min(row["distance"], ranked.distance)
            row["alike"] = row["alike"] or ranked.alike
    return sorted(rows.values(), key=lambda row: (row["distance"], row["id"]))


def records(result: FreezeThaw) -> list[dict[str, Any]]:
    """Return one flat row per system, path and temperature; liquid states included."""
    rows = []
    for s in result.systems:
        rows += [
            _record(s, "liquid", p.temperature_c, p.ph, "liquid", {}) for p in s.liquid
        ]
        for path in s.frozen.assessment.paths:
            extension = [("metastable", p) for p in path.metastable]
            every = [(path.assumption, p) for p in path.points]
            for name, p in [*every, *extension]:
                rows.append(
                    _record(s, name, p.temperature_c, p.ph, p.state, p.to_dict())
                )
    return rows


def _record(
    s: FreezeThawSystem,
    path: str,
    temperature_c: float,
    ph: float | None,
    state: str,
    point: dict[str, Any],
) -> dict[str, Any]:
    found = s.frozen.assessment
    solids = [f"{name}={amount!r}" for name, amount in point.get("solids", {}).items()]
    return {
        "system": s.key,
        "name": s.name,
        "concentration_mmol_l": s.concentration_mmol_l,
        "path": path,
        "temperature_c": temperature_c,
        "ph": ph,
        "state": state,
        "ice_fraction": point.get("ice_fraction"),
        "unfrozen_water_g_kg": point.get("unfrozen_water_g_kg"),
        "ionic_strength_mol_kg": point.get("ionic_strength_mol_kg"),
        "solids_mol_kg": solids,
        "ph_before": s.ph_before,
        "class": found.freezing_class,
        "counted_class": s.frozen.counted_class,
        "shift": found.freezing_shift,
        "cooling_shift": found.cooling_shift,
        "published_change_low": s.published.low if s.published else None,
        "published_change_high": s.published.high if s.published else None,
        "verdict": s.verdict,
    }
