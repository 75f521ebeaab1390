"""Values that cannot be cited as they stand: recalled, custom, or judged by us.

Each must be looked up, measured or argued before the report is used in a filing.
"""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from formbuf.advice.results import Candidate, Shortlist
from formbuf.library.records import Quantity
from formbuf.product.osmotics import OSMOTIC
from formbuf.report.words import BOOKS, CRITERIA, spoken, word

#: Bases that need confirmation; ``stated`` are loads of the author of the brief.
UNCITABLE = ("memory", "practice", "judgement", "stated")
#: Answers of the table of monographs as a report writes them.
_LOOKED_UP = {"unknown": "not looked up", "partial": "partly"}


def to_confirm(result: Shortlist, shown: list[Candidate]) -> list[dict[str, Any]]:
    """Return every value of such a basis behind the brief and the finalists.

    Returns
    -------
    list of dict
        ``group``, ``item``, ``value`` (number, text or null), ``unit``, ``basis``,
        ``why``.
    """
    rows = [
        *_assumptions(result),
        *_loads(result),
        *_species(result, shown),
        *_precedents(result, shown),
        *_limits(shown),
        *_rules(shown),
        *_freezing(shown),
        *_volumes(result),
        *_osmotic(result, shown),
        *_ranking(result),
    ]
    seen: set[tuple[str, str, str]] = set()
    kept = []
    for row in rows:
        key = (row["group"], row["item"], str(row["value"]))
        if row["basis"] in UNCITABLE and key not in seen:
            seen.add(key)
            kept.append(row)
    return kept


def _row(
    group: str, item: str, value: Any, unit: str, basis: str | None, why: str = ""
) -> dict[str, Any]:
    return {
        "group": group,
        "item": item,
        "value": value,
        "unit": unit,
        "basis": basis or "",
        "why": why,
    }


def _assumptions(result: Shortlist) -> Iterator[dict[str, Any]]:
    for a in result.assumptions:
        yield _row("assumed for the brief", a.key, a.value, a.unit, a.basis, a.reason)


def _loads(result: Shortlist) -> Iterator[dict[str, Any]]:
    for item in result.loads.items:
        amount = item.acid_mmol_l or item.base_mmol_l
        yield _row("load", item.name, amount, "mmol/L", item.told_basis, item.reason)


def _species(result: Shortlist, shown: list[Candidate]) -> Iterator[dict[str, Any]]:
    library = result.library
    for name in dict.fromkeys(s for c in shown for s in c.system.species):
        species = library.species.get(name)
        if species is None:
            continue
        for step in species.steps:
            found: tuple[tuple[str, Quantity | None], ...] = (
                ("pKa", step.pka),
                ("enthalpy of ionization", step.dh_kj_mol),
                ("heat capacity of ionization", step.dcp_j_mol_k),
            )
            for label, q in found:
                if q is not None:
                    item = f"{species.name}, step {step.step}: {label}"
                    unit = "" if q.unit == "1" else q.unit
                    yield _row("ionization", item, q.value, unit, q.basis, q.locator)
        for a in species.associations:
            item = f"{spoken(a.product)}: log10 K of formation"
            q = a.log10_k
            yield _row("ionization", item, q.value, "", q.basis, q.locator)


def _precedents(result: Shortlist, shown: list[Candidate]) -> Iterator[dict[str, Any]]:
    library = result.library
    route = result.brief.product.precedent_route
    group = result.brief.route_group
    kind = result.brief.drug.kind_group
    for key in dict.fromkeys(s for c in shown for s in c.system.species):
        row = library.precedents.get((key, route))
        known = library.species.get(key)
        name = spoken(key) if known is None else known.name
        if row is not None:
            yield _row(
                "precedent",
                f"{name}: level",
                row.level,
                "",
                row.level_basis,
                row.reason,
            )
            for label, value in (
                ("usual concentration, up to", row.usual_high_mmol_l),
                ("ceiling", row.ceiling_mmol_l),
            ):
                if value is not None:
                    basis = row.concentration_basis
                    yield _row("precedent", f"{name}: {label}", value, "mmol/L", basis)
            books = ", ".join(
                f"{word(BOOKS, book)} {_LOOKED_UP.get(answer, answer)}"
                for book, answer in row.monographs.items()
            )
            yield _row(
                "precedent", f"{name}: monographs", books, "", row.monograph_basis
            )
        for entry in library.kind_precedents:
            fits = entry.route_group == group and entry.kind in (kind, "any")
            if entry.species == key and fits:
                item = f"{name}: level for this kind of product"
                yield _row("precedent", item, entry.level, "", entry.basis, entry.note)


def _limits(shown: list[Candidate]) -> Iterator[dict[str, Any]]:
    for c in shown:
        for row in c.exposures:
            if row.limit is not None:
                item = f"{spoken(row.substance)}: limit"
                yield _row(
                    "dose limit", item, row.limit, row.limit_unit, row.limit_basis
                )


def _rules(shown: list[Candidate]) -> Iterator[dict[str, Any]]:
    for c in shown:
        for finding in c.findings:
            if finding.truth is True:
                item = f"{finding.rule}: {finding.record.title}"
                yield _row(
                    "rule", item, None, "", finding.basis, finding.record.source_note
                )
                if finding.record.threshold_basis in ("compiler", "mixed"):
                    yield _row(
                        "rule",
                        f"{finding.rule}: threshold {finding.record.text}",
                        None,
                        "",
                        "judgement",
                        "threshold set by the builders of the tables",
                    )


def _freezing(shown: list[Candidate]) -> Iterator[dict[str, Any]]:
    for c in shown:
        found = getattr(c.frozen, "assessment", c.frozen)
        if found is not None:
            yield _row(
                "freezing",
                f"{c.system.name}: class on freezing",
                found.freezing_class,
                "",
                found.basis,
                found.reason,
            )


def _volumes(result: Shortlist) -> Iterator[dict[str, Any]]:
    volumes = result.library.partial_volumes
    wanted = ["protein"] if result.brief.drug.is_protein else []
    agent = result.brief.tonicity.agent
    if agent:
        wanted += list(result.library.find_material(agent).contents)
    for name in [*wanted, "default_salt"]:
        if name in volumes:
            q = volumes[name].volume_ml_g
            item = f"{spoken(name)}: partial specific volume"
            yield _row("volume", item, q.value, q.unit, q.basis, q.locator)


def _osmotic(result: Shortlist, shown: list[Candidate]) -> Iterator[dict[str, Any]]:
    if not any(c.osmolality_mosm_kg for c in shown):
        return
    for row in result.library.read_table(OSMOTIC):
        agent = result.brief.tonicity.agent
        contents = result.library.find_material(agent).contents if agent else {}
        if row.text("neutral") in contents:
            yield _row(
                "osmolality",
                f"{spoken(row.text('neutral'))}: osmotic coefficient",
                row.figure("coefficient_kg_mol"),
                "kg/mol",
                row.text("basis"),
                row.text("locator"),
            )


def _ranking(result: Shortlist) -> Iterator[dict[str, Any]]:
    basis = result.settings.basis
    why = "set by the builders; a brief may replace them under [ranking]"
    for name, weight in result.settings.weights.items():
        yield _row(
            "ranking", f"weight of {word(CRITERIA, name)}", weight, "", basis, why
        )
    for name, anchors in result.settings.anchors.items():
        item = f"anchor of {word(CRITERIA, name)}: full desirability at"
        unit = "" if anchors.unit == "1" else anchors.unit
        yield _row("ranking", item, anchors.full, unit, basis, why)
        if anchors.floor is not None:
            item = f"anchor of {word(CRITERIA, name)}: floor at"
            yield _row("ranking", item, anchors.floor, unit, basis, why)
