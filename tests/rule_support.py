"""Judges a brief and a buffer by the rules, from text to findings, for the tests."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable, Mapping
from functools import cache

from formbuf.advice.screening import Finding, concerned, screen
from formbuf.chemistry.titration import STRONG_BASE
from formbuf.library import Library, load_library
from formbuf.library.rule_tables import Rulebook
from formbuf.library.rules import load_rulebook
from formbuf.product.background import background_of
from formbuf.product.brief import Completed, brief_from_text, complete
from formbuf.product.composition import Mixture, mixture
from formbuf.product.facts import (
    FactSheet,
    Situation,
    candidate_facts,
    prepare,
    product_facts,
)
from formbuf.product.quantities import CandidateQuantities
from formbuf.product.recipe import make


@cache
def library() -> Library:
    return load_library()


@cache
def rulebook() -> Rulebook:
    return load_rulebook(library())


def brief_text(
    route: str, ph: float, *, drug: str = "", product: str = "", rest: str = ""
) -> str:
    """A brief in a few words; ``drug`` and ``product`` are lines of their tables."""
    return (
        f'[product]\nroute = "{route}"\n{product}\n[ph]\ntarget = {ph}\n'
        f"[drug]\n{drug}\n{rest}\n"
    )


def completed(text: str) -> Completed:
    return complete(brief_from_text(text), library())


def situation(text: str, **known: float) -> Situation:
    done = completed(text)
    assumed = {entry.key for entry in done.assumptions}
    return prepare(done.brief, done.library, rulebook(), assumed=assumed, **known)


def quantities(
    where: Situation,
    system: str,
    mmol_l: float,
    *,
    osmolality_mosm_kg: float | None = None,
    frozen_drift_class: str | None = None,
) -> CandidateQuantities:
    """Make the system to the target pH with the excipients, without a tonicity fill."""
    background = dataclasses.replace(
        background_of(where.library, where.brief), agent=None, target_mosm_kg=None
    )
    t = where.brief.ph.measure_temperature_c
    record = where.library.systems[system]
    if system == "none":
        whole = mixture(
            where.library, background.materials_mmol_l, extras=background.extras
        )
    else:
        target = where.brief.ph.target
        whole = make(
            where.library, record, mmol_l, target, t, background, law=None
        ).mixture
    return quantities_of(
        whole,
        system,
        record.species,
        t,
        osmolality_mosm_kg=osmolality_mosm_kg,
        frozen_drift_class=frozen_drift_class,
    )


def quantities_of(
    whole: Mixture, system: str, species: Iterable[str], t: float, **known: object
) -> CandidateQuantities:
    """Describe a solved product at the temperature of measurement."""
    solution = whole.solve(t)
    litre = 1000.0 * float(whole.water_kg_l)
    forms: dict[str, dict[int, float]] = {}
    for particle in whole.dissolved(t, solution):
        if particle.component in library().species:
            amount = float(particle.molality_mol_kg) * litre
            forms.setdefault(particle.component, {})[particle.charge] = amount
    return CandidateQuantities(
        system=system,
        species=frozenset(species),
        ph={t: float(solution.ph)},
        measure_temperature_c=t,
        species_mmol_l={
            ladder.name: float(whole.totals_mol_kg[..., place]) * litre
            for place, ladder in enumerate(whole.ladders)
        },
        ions_mmol_l={n: float(m) * litre for n, m in whole.ions_mol_kg.items()},
        neutrals_mmol_l={n: float(m) * litre for n, m in whole.neutrals_mol_kg.items()},
        forms_mmol_l=forms,
        ionic_strength_mol_kg=float(solution.ionic_strength_mol_kg),
        capacity_mmol_l_ph=float(whole.capacity_mmol_l_ph(solution)),
        titratable_acidity_mmol_l=litre
        * float(whole.titrate(t, 7.4, STRONG_BASE).amount_mol_kg),
        **known,
    )


def sheet(where: Situation, system: str, mmol_l: float, **known: object) -> FactSheet:
    return candidate_facts(
        where, product_facts(where), quantities(where, system, mmol_l, **known)
    )


def judged(
    text: str, system: str, mmol_l: float = 10.0, **known: object
) -> Mapping[str, Finding]:
    """Findings by rule of a buffer in a brief."""
    where = situation(text)
    made = quantities(where, system, mmol_l, **known)
    facts = candidate_facts(where, product_facts(where), made)
    candidate = concerned(where.library, system, made.species, made.species_mmol_l)
    findings = screen(rulebook().rules, facts.values, candidate)
    return {finding.rule: finding for finding in findings}
