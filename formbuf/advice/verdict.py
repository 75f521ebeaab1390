"""What the shortlist comes to, in one or two sentences, and what to be warned of."""

from __future__ import annotations

from collections.abc import Sequence

from formbuf.advice.case import Case
from formbuf.advice.results import Candidate
from formbuf.library import Library


def listed(names: Sequence[str]) -> str:
    """Join names as in a sentence."""
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"


def verdict(candidates: Sequence[Candidate]) -> str:
    """Say which candidate leads, what it is tied with, and the back-up."""
    by_key = {c.key: c for c in candidates}
    heads = [c for c in candidates if c.rank is not None and c.variant_of is None]
    if not heads:
        return "No candidate is acceptable: every system is screened out."
    lead = heads[0]
    made = (
        f"{lead.concentration_mmol_l:g} mmol/L {lead.name}"
        if lead.concentration_mmol_l
        else lead.name
    )
    sentences = [f"Lead: {made}."]
    ties = [by_key[key].name for key in lead.tied_with]
    if ties:
        sentences[0] = f"Lead: {made}, tied within uncertainty with {listed(ties)}."
    backup = next((c for c in heads if c.standing == "back-up"), None)
    if backup is not None:
        sentences.append(
            f"Back-up: {backup.concentration_mmol_l:g} mmol/L {backup.name}."
        )
    else:
        sentences.append("There is no back-up.")
    return " ".join(sentences)


def warnings_of(case: Case, candidates: Sequence[Candidate]) -> tuple[str, ...]:
    """Return what a reader must know about the result as a whole."""
    found = precedent_file_warnings(case.library)
    if case.loads.all_default:
        found.append(
            "no acid or base load was stated: concentrations rest on default loads"
        )
    top = [c for c in candidates if c.rank == 1]
    high = case.brief.tonicity.high_mosm_kg
    for c in top:
        osmol = c.osmolality_mosm_kg
        if osmol is not None and high is not None and osmol > high:
            found.append(
                f"{c.name}: the whole product has {osmol:.0f} mosmol/kg, allowed "
                f"{high:.0f}"
            )
    return tuple(found)


def precedent_file_warnings(library: Library) -> list[str]:
    """Say what came of a list of inactive ingredients that the user gave."""
    listed = library.precedent_file
    if listed is None:
        return []
    text = (
        f"{listed.path}: {listed.matched} of {listed.rows} rows are materials of ours, "
        f"{listed.unmatched} are not; {listed.replaced} precedents rest on the file"
    )
    if listed.unused:
        reasons = ", ".join(f"{count} {why}" for why, count in listed.unused.items())
        text += f"; matched but not used: {reasons}"
    return [text]
