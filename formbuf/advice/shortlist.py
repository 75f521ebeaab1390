"""The main job: a brief in, a ranked and explained shortlist out."""

from __future__ import annotations

from formbuf.advice.candidates import judge_system
from formbuf.advice.case import Case, case_for, considered_systems, is_mixture
from formbuf.advice.compatibility import with_compatibility
from formbuf.advice.missing_facts import missing_that_matter
from formbuf.advice.none_arm import SYSTEM_ID, judge_none
from formbuf.advice.own_formula import judge_own
from formbuf.advice.ranking import rank
from formbuf.advice.results import Candidate, Shortlist
from formbuf.advice.screening import check_overrides
from formbuf.advice.screens import SCREENS
from formbuf.advice.verdict import verdict, warnings_of
from formbuf.library import Library
from formbuf.product.brief import Brief, complete
from formbuf.product.product_parts import CandidateInfo

__all__ = ["Shortlist", "shortlist"]


def shortlist(brief: Brief, library: Library, *, thorough: bool = False) -> Shortlist:
    """Size, screen and rank every acceptable buffer system for a product.

    Parameters
    ----------
    brief : Brief
        As returned by ``formbuf.read_brief``.
    library : Library
        As returned by ``formbuf.load_library``.
    thorough : bool
        Assess candidates that a screen dropped on freezing too, for an explanation.

    Returns
    -------
    Shortlist
        Every candidate with its numbers, the dropped ones too.

    Raises
    ------
    InputError
        When the brief names something that does not exist or cannot be used.
    ConvergenceError
        When an equilibrium is not solved within its cap.

    Notes
    -----
    Desirability: Derringer & Suich 1980, J. Qual. Technol. 12, 214.
    """
    completed = complete(brief, library)
    case = case_for(completed, thorough=thorough)
    check_overrides(
        case.brief.override,
        case.rulebook,
        screens=SCREENS,
        systems=case.library.systems,
        origin=brief.origin,
    )
    judged, shared = with_compatibility(case, judge_all(case))
    ranked = rank(judged, case.settings)
    return Shortlist(
        case.brief,
        completed.assumptions,
        case.library,
        case.settings,
        case.loads,
        ranked,
        verdict(ranked),
        (*completed.warnings, *warnings_of(case, ranked)),
        shared,
        tuple(
            missing_that_matter(
                {c.key: c.findings for c in ranked if c.findings},
                case.rulebook.vocabulary,
                contenders=[c.key for c in ranked if c.standing != "screened out"],
            )
        ),
    )


def judge_all(case: Case) -> list[Candidate]:
    """Judge the arm without buffer, every considered system, and the own formulas."""
    judged = [judge_none(case)]
    systems = considered_systems(case)
    judged += [judge_system(case, system) for system in systems]
    judged += _mixtures(case, judged)
    judged += [judge_own(case, own) for own in case.brief.candidate if not _bare(own)]
    return judged


def _bare(own: CandidateInfo) -> bool:
    """Whether a formula of the brief is the product without buffer, judged anyway."""
    return own.system == SYSTEM_ID


def _mixtures(case: Case, judged: list[Candidate]) -> list[Candidate]:
    """Mixtures of two buffers where neither alone carries the loads."""
    able = {
        species
        for c in judged
        if c.required_mmol_l is not None
        and c.ceiling_mmol_l is not None
        and c.required_mmol_l <= c.ceiling_mmol_l
        for species in c.system.species
    }
    done = {c.system.id for c in judged}
    return [
        judge_system(case, system)
        for system in case.library.systems.values()
        if system.role == "buffer"
        and system.id not in done
        and is_mixture(case.library, system)
        and not able & set(system.species)
    ]
