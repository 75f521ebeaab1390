"""Screening by rules: facts of each candidate, its findings, and what they weigh."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from formbuf.advice.burden import limited
from formbuf.advice.case import Case
from formbuf.advice.criteria_table import CRITERIA
from formbuf.advice.evaluate import Product
from formbuf.advice.results import Candidate, CriterionResult, Exposure, Screen
from formbuf.advice.screening import (
    Finding,
    common_findings,
    concerned,
    counts,
    screen,
    worst_per_topic,
)
from formbuf.advice.wording import lower_first, plain
from formbuf.library.records import System
from formbuf.product import quantities
from formbuf.product.facts import candidate_facts
from formbuf.product.quantities import CandidateQuantities

#: Decimals of the pH that rules test: a product made to pH 6 is not below pH 6
#: because its equilibrium was solved to 5.9999998.
PH_DIGITS = 3


def quantities_of(
    case: Case, system: System, product: Product, frozen_class: str | None
) -> CandidateQuantities:
    """Gather what the calculation says about a candidate, for facts and exposures."""
    mixed = product.mixture
    scale = 1000.0 * float(mixed.water_kg_l)
    forms: dict[str, dict[int, float]] = {}
    for row in product.species_states:
        forms.setdefault(row.component, {})[row.charge] = row.mmol_l
    measured = next(s for s in product.states if "measure" in s.kinds)
    own = frozenset(
        component
        for key in product.buffer_mmol_l
        for component in case.library.find_material(key).contents
        if component in case.library.species
    )
    return CandidateQuantities(
        system=system.id,
        species=own,
        ph={s.temperature_c: round(s.ph, PH_DIGITS) for s in product.states},
        measure_temperature_c=case.brief.ph.measure_temperature_c,
        species_mmol_l={
            ladder.name: float(mixed.totals_mol_kg[..., j]) * scale
            for j, ladder in enumerate(mixed.ladders)
            if ladder.name in case.library.species
        },
        ions_mmol_l={k: float(v) * scale for k, v in mixed.ions_mol_kg.items()},
        neutrals_mmol_l={
            k: float(v) * scale
            for k, v in mixed.neutrals_mol_kg.items()
            if k in case.library.neutrals
        },
        forms_mmol_l={k: v for k, v in forms.items() if k in case.library.species},
        ionic_strength_mol_kg=measured.ionic_strength_mol_kg,
        capacity_mmol_l_ph=measured.capacity_mmol_l_ph,
        titratable_acidity_mmol_l=product.titratable_acidity_mmol_l,
        osmolality_mosm_kg=product.osmolality_mosm_kg,
        frozen_drift_class=frozen_class,
    )


def findings_of(case: Case, found: CandidateQuantities) -> tuple[Finding, ...]:
    """Judge every rule that concerns a candidate."""
    sheet = candidate_facts(case.situation, case.facts, found)
    who = concerned(
        case.library, found.system, found.species, tuple(found.species_mmol_l)
    )
    return tuple(screen(case.rulebook.rules, sheet.values, who, case.brief.override))


def exposures_of(case: Case, found: CandidateQuantities) -> tuple[Exposure, ...]:
    """Set what a dose and a day bring against the limits of the tables."""
    rows = quantities.exposures(found, case.brief, case.library)
    return limited(
        case,
        tuple(
            Exposure(r.substance, r.mmol_dose, r.mmol_day, r.mg_dose, r.mg_day)
            for r in rows
        ),
    )


def rule_screens(findings: Sequence[Finding]) -> list[Screen]:
    """Exclusions that fired, as screens; those set aside keep their reason."""
    screens = []
    for finding in findings:
        if finding.truth is not True or finding.severity != "exclude":
            continue
        if finding.scope != "candidate":
            continue
        o = finding.override
        who = f"{o.name}, {o.date.isoformat()}: {o.reason}" if o else ""
        screens.append(
            Screen(
                finding.rule,
                f"{finding.text}{shown_values(finding)}",
                finding.basis,
                finding.source,
                who,
            )
        )
    return screens


def shown_values(finding: Finding) -> str:
    """Return the facts that settled a finding, in brackets."""
    parts = []
    for name, value in finding.values.items():
        if isinstance(value, bool):
            parts.append(f"{name} {'yes' if value else 'no'}")
        elif isinstance(value, float | int):
            parts.append(f"{name} {plain(value)}")
        elif isinstance(value, frozenset):
            parts.append(f"{name} {', '.join(sorted(value))}")
        else:
            parts.append(f"{name} {value}")
    return f" ({'; '.join(parts)})" if parts else ""


def with_compatibility(
    case: Case, candidates: Sequence[Candidate]
) -> tuple[list[Candidate], tuple[Finding, ...]]:
    """Add the compatibility criterion; what holds for all candidates ranks none.

    Parameters
    ----------
    case : Case
    candidates : sequence of Candidate
        With their findings.

    Returns
    -------
    (candidates, product_findings)
        The second holds one finding of each rule that fires for every candidate.
    """
    alive = {c.key: c.findings for c in candidates if not c.dropped_by and c.findings}
    common = common_findings(alive)
    shared: dict[str, Finding] = {}
    for findings in alive.values():
        for finding in findings:
            if finding.rule in common and finding.truth is True:
                shared.setdefault(finding.rule, finding)
    judged = []
    for c in candidates:
        if not c.criteria:
            judged.append(c)
            continue
        criterion = _criterion(case, c, common)
        ordered = {
            name: value
            for name in CRITERIA
            for value in [{**c.criteria, "compatibility": criterion}.get(name)]
            if value is not None
        }
        judged.append(replace(c, criteria=ordered, finding_counts=counts(c.findings)))
    return judged, tuple(shared[key] for key in sorted(shared))


def _criterion(
    case: Case, candidate: Candidate, common: frozenset[str]
) -> CriterionResult:
    """Judge by the worst finding over all topics, so that a count never tells."""
    own = [f for f in candidate.findings if f.rule not in common]
    worst = worst_per_topic(own, carried_elsewhere=tuple(candidate.criteria))
    section = case.settings.table["compatibility"]
    spread = case.settings.number("uncertainty", "compatibility_ln")
    heaviest: Finding | None = None
    value = 1.0
    for finding in worst.values():
        key = "note" if finding.weighs_as == "note" else "warn"
        if float(section[key]) < value:
            value, heaviest = float(section[key]), finding
    if heaviest is None:
        return CriterionResult(None, "", 1.0, "no finding of its own")
    unsure = heaviest.truth is None
    rule = f"{heaviest.rule}, open, taken as a warning" if unsure else heaviest.rule
    said = f"{heaviest.record.title}; {lower_first(heaviest.record.effect)}"
    text = f"{said} ({rule})"
    sources = tuple(s for s in heaviest.record.sources if s)
    return CriterionResult(None, "", value, text, sources=sources, deviation_ln=spread)
