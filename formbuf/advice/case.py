"""Everything that judging one candidate of a brief needs, gathered once."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from formbuf.advice.criteria_table import Settings, settings_for
from formbuf.advice.evaluate import NO_TITRANT
from formbuf.advice.loads import LoadBudget, load_budget
from formbuf.advice.surroundings import Surroundings, surroundings_of
from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.library.rule_tables import Rulebook
from formbuf.library.rules import load_rulebook
from formbuf.product.background import background_of, drug_capacity_mmol_l_ph
from formbuf.product.brief import Completed
from formbuf.product.fact_values import Situation
from formbuf.product.facts import FactSheet, prepare, product_facts
from formbuf.product.osmotics import osmotic_law
from formbuf.product.product_brief import ProductBrief
from formbuf.product.recipe import Background, make


@dataclass(frozen=True)
class Case:
    """A brief with what follows from it for every candidate.

    Attributes
    ----------
    library : Library
    brief : ProductBrief
    settings : Settings
    loads : LoadBudget
    law : OsmoticLaw
    background : Background
        Excipients, drug and tonicity agent.
    surroundings : Surroundings
        The same as a buffer is sized in it.
    rulebook : Rulebook
    situation : Situation
    facts : FactSheet
        Facts of the product that rules and limits test.
    thorough : bool
        Whether candidates that a screen dropped are assessed on freezing too.
    bare_titrant_mmol_l : mapping of material to float
        Strong acid or base that brings the product without buffer to its pH [mmol/L];
        no burden of a buffer.
    """

    library: Library
    brief: ProductBrief
    settings: Settings
    loads: LoadBudget
    law: OsmoticLaw
    background: Background
    surroundings: Surroundings
    rulebook: Rulebook
    situation: Situation
    facts: FactSheet
    thorough: bool = False
    bare_titrant_mmol_l: Mapping[str, float] = field(default_factory=dict)


def case_for(completed: Completed, *, thorough: bool = False) -> Case:
    """Gather the case of a completed brief."""
    library, brief = completed.library, completed.brief
    law = osmotic_law(library)
    background = background_of(library, brief)
    book = load_rulebook(library)
    assumed = {entry.key for entry in completed.assumptions}
    situation = prepare(
        brief,
        library,
        book,
        assumed=assumed,
        drug_capacity_mmol_l_ph=drug_capacity_mmol_l_ph(library, brief),
    )
    return Case(
        library,
        brief,
        settings_for(library, brief),
        load_budget(library, brief),
        law,
        background,
        surroundings_of(background, library, law),
        book,
        situation,
        product_facts(situation),
        thorough,
        _bare_titrant_mmol_l(library, brief, background, law),
    )


def _bare_titrant_mmol_l(
    library: Library, brief: ProductBrief, background: Background, law: OsmoticLaw
) -> Mapping[str, float]:
    bare = replace(background, agent=None, target_mosm_kg=None)
    at = brief.ph.measure_temperature_c
    try:
        made = make(
            library, library.systems["none"], 1.0, brief.ph.target, at, bare, law
        )
    except InputError:  # out of reach without a buffer: nothing is shared
        return NO_TITRANT
    return {key: float(mmol_l) for key, mmol_l in made.buffer_mmol_l.items()}


def considered_systems(case: Case) -> list[System]:
    """Systems to judge: buffers, roles asked for, and what the brief requires.

    The mixture of two species that each are systems of their own (citrate with
    phosphate) is left out unless required; ``shortlist`` adds it where neither
    species alone carries the loads.
    """
    roles = {"buffer", *case.brief.consider_roles}
    wanted = set(case.brief.require)
    own = {c.system for c in case.brief.candidate if c.system}
    found = []
    for system in case.library.systems.values():
        required = system.id in wanted or bool(wanted & set(system.species))
        if system.role == "none" or is_mixture(case.library, system):
            if system.id in wanted:
                found.append(system)
            continue
        if system.role in roles or required or system.overlay:
            found.append(system)
    return [s for s in found if s.id != "none" or s.id in own]


def is_mixture(library: Library, system: System) -> bool:
    """Whether a system shares its total between two species that buffer alone too."""
    if len(system.species) != 2 or system.acid_material is None:
        return False
    acid = library.find_material(system.acid_material)
    return system.species[0] in acid.contents
