"""Results as plain data for JSON: dictionaries, lists, texts and finite numbers.

Units stand in the names of the keys; numbers keep their full precision. What is
unknown is null. Names of keys are an interface: a schema is named
``formbuf.<what>/<version>``, and a key that is renamed or removed raises the version.
"""

from __future__ import annotations

import dataclasses
import datetime as dt
import math
from collections.abc import Iterable, Mapping, Set
from pathlib import PurePath
from typing import Any

from formbuf import __version__
from formbuf.advice.criteria_table import Settings
from formbuf.advice.loads import LoadBudget
from formbuf.advice.results import (
    Candidate,
    CriterionResult,
    LiquidState,
    Screen,
    Shortlist,
    Weighed,
)
from formbuf.library import Library
from formbuf.library.inactive_ingredients import SOURCE_ID

SHORTLIST_SCHEMA = "formbuf.shortlist/1"
EXPLAIN_SCHEMA = "formbuf.explain/1"


def header(schema: str, library: Library) -> dict[str, Any]:
    """Return the keys with which every JSON result begins.

    Parameters
    ----------
    schema : str
        Name and version, for example ``"formbuf.shortlist/1"``.
    library : Library
        The knowledge that the result rests on.
    """
    overlay = library.overlay
    return {
        "schema": schema,
        "formbuf_version": __version__,
        "knowledge": {
            "version": library.version,
            "sha256": library.sha256,
            "overlay": None if overlay is None else str(overlay),
            "overlay_sha256": library.overlay_sha256 or None,
            "precedent_file": plain(library.precedent_file),
            "overlay_changes": _overlay_changes(library),
        },
    }


def _overlay_changes(library: Library) -> list[dict[str, Any]]:
    """Return how many rows of which tables the overlay changes or adds."""
    if library.overlay is None:
        return []
    from formbuf.product.overlay_changes import overlay_changes

    return [plain(change) for change in overlay_changes(library)]


def plain(value: Any) -> Any:
    """Return any result as plain data.

    Records become dictionaries by field (by ``to_dict`` where they have it), numpy
    values become numbers and lists, numbers that are not finite become null.

    Raises
    ------
    TypeError
        For a value that has no plain form.
    """
    if value is None or isinstance(value, bool | int | str):
        return value
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, Mapping):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, Set):
        return [plain(item) for item in sorted(value, key=str)]
    if hasattr(value, "to_dict"):
        return plain(value.to_dict())
    if dataclasses.is_dataclass(value) and not isinstance(value, type):
        return {
            f.name: plain(getattr(value, f.name)) for f in dataclasses.fields(value)
        }
    if isinstance(value, dt.date):
        return value.isoformat()
    if isinstance(value, PurePath):
        return str(value)
    if hasattr(value, "tolist"):
        return plain(value.tolist())
    if isinstance(value, Iterable):
        return [plain(item) for item in value]
    msg = f"no plain form for {type(value).__name__}"
    raise TypeError(msg)


def shortlist_dict(result: Shortlist, *, top: int | None = None) -> dict[str, Any]:
    """Return a shortlist as plain data.

    Parameters
    ----------
    result : Shortlist
    top : int, optional
        Best places to keep; candidates without a place always stay.
    """
    kept = [c for c in result.candidates if within(c, top)]
    lead, backup = result.lead, result.backup
    return {
        **header(SHORTLIST_SCHEMA, result.library),
        "brief": plain(result.brief),
        "assumptions": plain(result.assumptions),
        "verdict": result.verdict,
        "lead": None if lead is None else lead.key,
        "backup": None if backup is None else backup.key,
        "loads": loads_dict(result.loads),
        "ranking": settings_dict(result.settings),
        "candidates": [candidate_dict(c) for c in kept],
        "product_findings": [finding_dict(f) for f in result.product_findings],
        "missing_facts": [missing_dict(m) for m in result.missing_facts],
        "warnings": list(result.warnings),
        **_confidence(result.confidence),
    }


def missing_dict(missing: Any) -> dict[str, Any]:
    """Return one unsaid fact that could change a standing as plain data."""
    return {
        "fact": missing.fact.name,
        "question": missing.fact.question,
        "held_in": missing.fact.held_in,
        "unit": missing.fact.unit,
        "could_exclude": missing.could_exclude,
        "rules": list(missing.rules),
        "systems": list(missing.systems),
    }


def explain_dict(
    result: Shortlist, candidate: Candidate, notes: Iterable[str] = ()
) -> dict[str, Any]:
    """Return everything behind one candidate as plain data."""
    cited = dict.fromkeys(sources_of(result, candidate))
    known = result.library.sources
    return {
        **header(EXPLAIN_SCHEMA, result.library),
        "brief": plain(result.brief),
        "assumptions": plain(result.assumptions),
        "verdict": result.verdict,
        "loads": loads_dict(result.loads),
        "ranking": settings_dict(result.settings),
        "candidate": candidate_dict(candidate),
        "product_findings": [finding_dict(f) for f in result.product_findings],
        "sources": [{"id": s, "text": known[s].text} for s in cited if s in known],
        "warnings": [*result.warnings, *notes],
    }


def within(candidate: Candidate, top: int | None) -> bool:
    """Whether a candidate is among the best places, or has none."""
    return top is None or candidate.rank is None or candidate.rank <= top


def candidate_dict(candidate: Candidate) -> dict[str, Any]:
    """Return one candidate as plain data."""
    c = candidate
    return {
        "system": c.key,
        "rank": c.rank,
        "standing": c.standing,
        "tied_with": list(c.tied_with),
        "desirability": plain(c.desirability),
        "desirability_deviation_ln": plain(c.deviation_ln),
        "limiting": c.limiting or None,
        "criteria": {name: criterion_dict(x) for name, x in c.criteria.items()},
        "name": c.name,
        "base_system": c.system.id,
        "species": list(c.system.species),
        "role": c.system.role,
        "is_own_formula": c.is_own_formula,
        "is_mixture": c.is_mixture,
        "variant_of": c.variant_of,
        "overlay": c.system.overlay,
        "required_mmol_l": plain(c.required_mmol_l),
        "limiting_load": c.limiting_load,
        "carried_share": plain(c.carried_share),
        "concentration_mmol_l": plain(c.concentration_mmol_l),
        "ceiling_mmol_l": plain(c.ceiling_mmol_l),
        "composition": [weighed_dict(w) for w in c.composition],
        "tonicity_fill": None
        if c.tonicity_fill is None
        else weighed_dict(c.tonicity_fill),
        "states": [state_dict(s) for s in c.states],
        "species_states": plain(c.species_states),
        "ph_drift": plain(c.ph_drift),
        "osmolality_mosm_kg": plain(c.osmolality_mosm_kg),
        "buffer_osmolality_mosm_kg": plain(c.buffer_osmolality_mosm_kg),
        "titratable_acidity_mmol_l": plain(c.titratable_acidity_mmol_l),
        "exposures": plain(c.exposures),
        "frozen": frozen_dict(c.frozen),
        "findings": [finding_dict(f) for f in c.findings],
        "screened_out_by": [screen_dict(s) for s in c.dropped_by],
        "screens_set_aside": [screen_dict(s) for s in c.screens if s.overridden_by],
        "finding_counts": dict(c.finding_counts),
        "notes": list(c.notes),
        **_confidence(c.confidence),
    }


def _confidence(record: Any) -> dict[str, Any]:
    """Return the key of what draws tell; nothing where none were made."""
    return {} if record is None else {"confidence": plain(record)}


def criterion_dict(criterion: CriterionResult) -> dict[str, Any]:
    """Return one criterion as plain data."""
    return {
        "value": plain(criterion.value),
        "unit": criterion.unit,
        "desirability": plain(criterion.desirability),
        "limiting": criterion.limiting,
        "sources": list(criterion.sources),
        "text": criterion.text,
        "deviation_ln": plain(criterion.deviation_ln),
    }


def weighed_dict(weighed: Weighed) -> dict[str, Any]:
    """Return one material with its amount as plain data."""
    return {
        "material": weighed.material,
        "mmol_l": plain(weighed.mmol_l),
        "g_l": plain(weighed.g_l),
    }


def state_dict(state: LiquidState) -> dict[str, Any]:
    """Return the product at one temperature as plain data."""
    fields: dict[str, Any] = plain(state)
    return fields


def screen_dict(screen: Screen) -> dict[str, Any]:
    """Return one screen as plain data; ``overridden_by`` is empty while it drops."""
    fields: dict[str, Any] = plain(screen)
    return fields


def finding_dict(finding: Any) -> dict[str, Any]:
    """Return one judged rule as plain data.

    Parameters
    ----------
    finding : Finding
        Anything with ``rule``, ``severity``, ``outcome``, ``text``, ``basis`` and
        ``source``; the further attributes of ``formbuf.advice.screening.Finding`` are
        added where they exist.
    """
    known = {
        "rule": finding.rule,
        "severity": finding.severity,
        "outcome": finding.outcome,
        "text": finding.text,
        "basis": finding.basis,
        "source": finding.source,
    }
    for name in ("topic", "scope", "weighs_as", "values", "missing"):
        if hasattr(finding, name):
            known[name] = plain(getattr(finding, name))
    known["overridden_by"] = plain(getattr(finding, "override", None))
    return known


def frozen_dict(frozen: Any) -> dict[str, Any] | None:
    """Return what freezing does to a candidate as plain data.

    Parameters
    ----------
    frozen : Frozen or None
        The keys of its ``assessment`` come first, then its own.
    """
    if frozen is None:
        return None
    found: dict[str, Any] = plain(getattr(frozen, "assessment", frozen))
    if hasattr(frozen, "assessment"):
        found["counted_class"] = frozen.counted_class
        found["remark"] = frozen.remark
        found["sugar_percent_w_v"] = plain(frozen.sugar_percent)
    return found


def loads_dict(loads: LoadBudget) -> dict[str, Any]:
    """Return the load budget as plain data."""
    return {
        "acid_mmol_l": plain(loads.acid_mmol_l),
        "base_mmol_l": plain(loads.base_mmol_l),
        "all_default": loads.all_default,
        "items": plain(loads.items),
    }


def settings_dict(settings: Settings) -> dict[str, Any]:
    """Return weights and anchors of the ranking as plain data."""
    return {
        "weights": plain(settings.weights),
        "anchors": plain(settings.anchors),
        "floor_value": settings.floor_value,
        "source": settings.source,
        "basis": settings.basis,
    }


def sources_of(result: Shortlist, candidate: Candidate) -> list[str]:
    """Return the ids of every source behind a candidate, in order of appearance."""
    library = result.library
    found: list[str] = []
    for species in candidate.system.species:
        for step in library.species[species].steps:
            found += [
                q.source for q in (step.pka, step.dh_kj_mol, step.dcp_j_mol_k) if q
            ]
        found += [a.log10_k.source for a in library.species[species].associations]
        row = library.precedents.get((species, result.brief.product.precedent_route))
        found += [row.source] if row is not None else []
        found += [SOURCE_ID] if row is not None and row.listed else []
    for criterion in candidate.criteria.values():
        found += criterion.sources
    found += [item.source for item in result.loads.items]
    found += [screen.source for screen in candidate.screens]
    found += [row.limit_source for row in candidate.exposures]
    for finding in candidate.findings:
        record = getattr(finding, "record", None)
        if finding.outcome == "fired":
            found += getattr(record, "sources", ())
    assessment = getattr(candidate.frozen, "assessment", None)
    found += getattr(assessment, "sources", ())
    found.append(result.settings.source)
    return [source for source in dict.fromkeys(found) if source]
