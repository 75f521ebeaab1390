"""The result with everything a rationale prints, as one JSON-ready mapping.

The shortlist in the shape of its JSON result, and under ``rationale`` what stands
behind it: names, precedents, rules, constants, curves, sensitivities and sources.
The report is written from this mapping alone, so that each of its numbers has a place
in it.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from formbuf.advice.precedent import kind_applies, kind_row
from formbuf.advice.results import Candidate, Shortlist
from formbuf.errors import InputError
from formbuf.library.records import Precedent
from formbuf.library.rules import load_rulebook
from formbuf.output.serialise import plain, shortlist_dict
from formbuf.product.freezing_data import load_freezing_data
from formbuf.report.batch_data import batch_data
from formbuf.report.changes import compare
from formbuf.report.confirmation import to_confirm
from formbuf.report.curves import curves
from formbuf.report.foundations import constants
from formbuf.report.origins import stated_keys
from formbuf.report.room import room
from formbuf.report.sensitivity import finalists, nearest_misses, sensitivity

RATIONALE_SCHEMA = "formbuf.rationale/1"
#: Works behind the equations, cited by the text of the report itself.
METHOD_SOURCES = (
    "goldberg_2002",
    "archer_wang_1990",
    "clegg_1994",
    "bandura_lvov_2006",
    "van_slyke_1922",
    "derringer_1980",
    "harrington_1965",
    "kim_frederick_1988",
    "pitzer_mayorga_1973",
    "murphy_koop_2005",
)
#: Keys under which ids of sources stand in a result.
_SOURCE_KEYS = ("source", "sources", "limit_source")


@dataclass(frozen=True, slots=True)
class Origin:
    """How a report was asked for.

    Parameters
    ----------
    brief_name : str
        Name of the brief's file without its folder; empty where there was none.
    brief_sha256 : str
        Checksum of the file.
    command : str
    stamp : str
        Date and time, only where asked for.
    stated : tuple of str
        Keys that the brief's file states.
    """

    brief_name: str = ""
    brief_sha256: str = ""
    command: str = ""
    stamp: str = ""
    stated: tuple[str, ...] = ()


def origin_of(
    path: str, *, stamp: str = "", draws: int | None = None, seed: int = 1
) -> Origin:
    """Return the origin of a report on a brief file.

    Raises
    ------
    InputError
        The file cannot be read.
    """
    try:
        content = Path(path).read_bytes()
    except (OSError, ValueError) as error:
        msg = f"{path}: the brief cannot be read"
        raise InputError(msg) from error
    digest = hashlib.sha256(content).hexdigest()
    stated = stated_keys(content.decode("utf-8", errors="replace"))
    name = Path(path).name
    drawn = "" if draws is None else f" --draws {draws} --seed {seed}"
    return Origin(name, digest, f"formbuf rationale {name}{drawn}", stamp, stated)


def rationale_dict(
    result: Shortlist,
    origin: Origin | None = None,
    old: Mapping[str, Any] | None = None,
) -> dict[str, Any]:
    """Return a shortlist with everything a rationale prints, as plain data.

    Parameters
    ----------
    result : Shortlist
    origin : Origin, optional
    old : mapping, optional
        An earlier result, as `formbuf.report.results_file.read_result` returns it; what
        changed since then becomes part of the rationale.
    """
    shown = finalists(result)
    data = shortlist_dict(result)
    data["schema"] = RATIONALE_SCHEMA
    sheet = batch_data(result, shown)
    block = {
        "origin": plain(origin or Origin()),
        "seed": None if result.confidence is None else result.confidence.seed,
        "counts": {
            "judged": len(result.candidates),
            "places": len(result.heads),
            "dropped": len(result.dropped),
        },
        "finalists": [c.key for c in shown],
        "nearest_misses": [] if shown else [c.key for c in nearest_misses(result)],
        "names": names(result, sheet),
        "precedents": precedents(result),
        "kind_counts": kind_applies(result.library, result.brief),
        "settings": plain(result.settings.table),
        "rules": rules(result),
        "room": {c.key: room(result, c) for c in shown},
        "sensitivity": sensitivity(result),
        "constants": constants(result, shown),
        "curves": curves(result, with_none(result, shown)),
        "batch_sheet": sheet,
        "to_confirm": to_confirm(result, shown),
    }
    if old is not None:
        block["changes"] = plain(compare(old, data))
    data["rationale"] = block
    block["sources"] = sources(result, data)
    return data


def with_none(result: Shortlist, shown: list[Candidate]) -> list[Candidate]:
    """Return the finalists and the product without buffer."""
    none = result.candidate("none")
    return shown if none is None or none in shown else [*shown, none]


def names(result: Shortlist, sheet: Mapping[str, Any] | None = None) -> dict[str, Any]:
    """Return names of species and materials that occur, on the batch sheet too."""
    library = result.library
    materials: dict[str, None] = {}
    species: dict[str, None] = {}
    for c in result.candidates:
        for weighed in (
            *c.composition,
            *([c.tonicity_fill] if c.tonicity_fill else []),
        ):
            materials[weighed.material] = None
        species.update(dict.fromkeys(s for s in c.system.species))
        species.update(dict.fromkeys(s.component for s in c.species_states))
        species.update(dict.fromkeys(row.substance for row in c.exposures))
    materials.update(dict.fromkeys(row.material for row in result.brief.excipient))
    for own in result.brief.candidate:
        materials.update(dict.fromkeys(own.materials))
    if result.brief.tonicity.agent:
        materials[result.brief.tonicity.agent] = None
    for way in (sheet or {}).get("ways", ()):
        materials.update(
            (e["material"], None) for e in way["weighing_errors_1_percent"]
        )
        materials.update((w["weighed"], None) for w in way["wrong_hydrates"])
    found: dict[str, Any] = {"materials": {}, "components": {}, "solids": {}}
    if any(c.frozen is not None for c in result.candidates):
        freezing = load_freezing_data(library)
        solids = [s for brine in freezing.brines.values() for s in brine.solids]
        found["solids"] = {s.id: s.formula for s in (*solids, *freezing.watched)}
    for key in materials:
        m = library.find_material(key)
        found["materials"][key] = {
            "name": m.name,
            "formula": m.formula,
            "molar_mass_g_mol": m.molar_mass_g_mol.value,
            "source": m.molar_mass_g_mol.source,
            "basis": m.molar_mass_g_mol.basis,
            "overlay": m.overlay,
        }
    tables = (library.species, library.ions, library.neutrals)
    for key in species:
        for table in tables:
            if key in table:
                found["components"][key] = table[key].name
                break
    return found


def precedents(result: Shortlist) -> dict[str, Any]:
    """Return what is known of each species of a candidate on the route."""
    library, brief = result.library, result.brief
    wanted = dict.fromkeys(s for c in result.candidates for s in c.system.species)
    found: dict[str, Any] = {}
    for species in wanted:
        row: Precedent | None = library.precedents.get(
            (species, brief.product.precedent_route)
        )
        kind = kind_row(library, brief, species)
        entry: dict[str, Any] = {} if row is None else plain(row)
        entry["kind_level"] = None if kind is None else kind.level
        entry["kind_basis"] = None if kind is None else kind.basis
        entry["kind_source"] = None if kind is None else kind.source
        found[species] = entry
    return found


def rules(result: Shortlist) -> dict[str, Any]:
    """Return every rule that applies or could not be judged, as the tables hold it."""
    found: dict[str, Any] = {}
    missing: dict[str, dict[str, None]] = {}
    for findings in [result.product_findings, *(c.findings for c in result.candidates)]:
        for finding in findings:
            if finding.truth is False:
                continue
            rule = finding.record
            missing.setdefault(rule.id, {}).update(dict.fromkeys(finding.missing))
            found[rule.id] = {
                "title": rule.title,
                "condition": rule.text,
                "severity": rule.severity,
                "topic": rule.topic,
                "scope": rule.scope,
                "favours": rule.favours,
                "carried_by": rule.carried_by or None,
                "effect": rule.effect,
                "magnitude": rule.magnitude,
                "mitigation": rule.mitigation,
                "sources": list(rule.sources),
                "source_note": rule.source_note,
                "basis": rule.basis,
                "threshold_basis": rule.threshold_basis,
                "overlay": rule.overlay,
            }
    for name, facts in missing.items():
        found[name]["questions"] = _questions(result, facts)
    return dict(sorted(found.items()))


def _questions(result: Shortlist, missing: Iterable[str]) -> list[dict[str, str]]:
    """Return what to ask for each fact that is missing, and where to write it."""
    vocabulary = load_rulebook(result.library).vocabulary
    return [
        {
            "fact": name,
            "question": vocabulary[name].question,
            "held_in": vocabulary[name].held_in,
        }
        for name in missing
        if name in vocabulary
    ]


def sources(result: Shortlist, data: dict[str, Any]) -> dict[str, Any]:
    """Return the reference of every source that the result or the method names."""
    known = result.library.sources
    found = dict.fromkeys((*METHOD_SOURCES, *_ids(data)))
    entries = {}
    for name in sorted(found):
        source = known.get(name)
        if source is not None:
            entries[name] = {
                "text": source.text.split(" doi:")[0],
                "doi": source.doi,
                "read_in": source.locator_note,
                "note": source.note,
                "incomplete": not (source.authors and source.title),
                "overlay": source.overlay,
            }
    return entries


def _ids(value: Any, key: str = "") -> Iterable[str]:
    if isinstance(value, dict):
        for name, item in value.items():
            yield from _ids(item, name)
    elif isinstance(value, list):
        for item in value:
            yield from _ids(item, key)
    elif isinstance(value, str) and (key in _SOURCE_KEYS or key.endswith("_source")):
        yield from (part.strip() for part in value.split(";"))
