"""What the shortlist comes to, in one or two sentences, and what to be warned of."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence

from formbuf.advice.buffering_agent import buffering_agent_note
from formbuf.advice.case import Case
from formbuf.advice.ranking import NONE_ID
from formbuf.advice.results import Candidate
from formbuf.advice.wording import plain
from formbuf.library import Library

#: Kinds of drug whose particles count in the osmolality.
SMALL_KINDS = ("small_molecule", "peptide")
#: Titrant of the bare product from which it is the drug's [mmol/L].
WORTH_A_WORD = 1.0


def listed(names: Sequence[str]) -> str:
    """Join names as in a sentence."""
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"


def amount_and_name(candidate: Candidate) -> str:
    """Return amount and name of a candidate, the amount once."""
    amount = f"{candidate.concentration_mmol_l:g} mmol/L"
    if not candidate.concentration_mmol_l or amount in candidate.name:
        return candidate.name
    return f"{amount} {candidate.name}"


def verdict(candidates: Sequence[Candidate]) -> str:
    """Say which candidate leads, what it is tied with, and the back-up."""
    by_key = {c.key: c for c in candidates}
    heads = [c for c in candidates if c.rank is not None and c.variant_of is None]
    if not heads:
        return _without_heads(candidates)
    lead = heads[0]
    made = amount_and_name(lead)
    sentences = [f"Lead: {made}."]
    ties = [by_key[key].name for key in lead.tied_with]
    if ties:
        sentences[0] = f"Lead: {made}, tied within uncertainty with {listed(ties)}."
    backup = next((c for c in heads if c.standing == "back-up"), None)
    if backup is not None:
        sentences.append(f"Back-up: {amount_and_name(backup)}.")
    else:
        sentences.append("There is no back-up.")
    return " ".join(sentences)


def _without_heads(candidates: Sequence[Candidate]) -> str:
    """Say that no buffer is left, by what, and how the product without one stands."""
    bare = next((c for c in candidates if c.system.id == NONE_ID), None)
    dropped = [c for c in candidates if c.dropped_by and c is not bare]
    screened = "every buffer system is screened out"
    if dropped:
        count = Counter(name for c in dropped for name in {s.id for s in c.dropped_by})
        screen, times = count.most_common(1)[0]
        screened += f", most often by {screen} ({times} of {len(dropped)})"
    if bare is None or bare.dropped_by:
        return f"No candidate is acceptable: {screened}."
    note = f": {bare.notes[0]}" if bare.notes else ""
    is_open = bare.standing == "viable" and bare.carried_share is None
    if bare.standing == "not evaluable" or is_open:
        return (
            f"No buffer is acceptable: {screened}. Whether the product stands without "
            f"one is open{note}."
        )
    if bare.carried_share is not None and bare.carried_share < 1.0:
        return (
            f"No buffer is acceptable: {screened}. Nor is the product enough without "
            f"one{note}."
        )
    if bare.carried_share is not None and bare.standing == "back-up":
        note += "; to be confirmed by a titration"
    sentence = screened[0].upper() + screened[1:]
    return f"No added buffer stays viable{note}. {sentence}."


def warnings_of(case: Case, candidates: Sequence[Candidate]) -> tuple[str, ...]:
    """Return what a reader must know about the result as a whole."""
    found = precedent_file_warnings(case.library)
    stated = case.brief.loads
    if stated.acid_is_default and stated.base_is_default:
        found.append(
            "no acid or base load was stated: concentrations rest on default loads"
        )
    if not case.loads.has_load:
        found.append(_unloaded(case))
    found += _uncounted_drug(case)
    found += _excluded_but_brought(case)
    found += filter(None, (buffering_agent_note(case, candidates),))
    found += _osmolality_warnings(case, candidates)
    return tuple(found)


def _unloaded(case: Case) -> str:
    """Say that capacity is left out of the ranking, and what to size from instead."""
    least = f"{case.settings.number('sizing', 'minimum_mmol_l'):g} mmol/L at least"
    if case.brief.is_large_volume_intravenous:
        least = "the smallest that is weighed"
    return (
        "no load to carry: capacity does not tell the candidates apart and is left out of "
        f"the ranking; proposed is {least}, and the product without buffer is the one to "
        "beat; size from the acid or base that a batch without buffer takes up over "
        "shelf life ([loads])"
    )


def _uncounted_drug(case: Case) -> list[str]:
    """Say what of the drug is left out of account, or put in for want of a word."""
    drug = case.brief.drug
    found = []
    if (
        drug.kind in SMALL_KINDS
        and (drug.concentration_mg_ml or 0.0) > 0.0
        and drug.concentration_mmol_l is None
    ):
        found.append(
            f"{drug.concentration_mg_ml:g} mg/mL of drug without a molar mass: its "
            "particles are missing from the osmolality, and what fills it up is too "
            "much"
        )
    neutral = {k: v for k, v in case.bare_titrant_mmol_l.items() if v >= WORTH_A_WORD}
    if drug.pka and drug.counter_ion is None and neutral:
        material, mmol_l = max(neutral.items(), key=lambda row: row[1])
        name = case.library.find_material(material).name
        found.append(
            "no counter-ion of the drug is stated, so it is made up from the free acid "
            f"or base: {plain(mmol_l)} mmol/L of {name} goes to it, with a buffer or "
            "without; if it is weighed as a salt, state drug.counter_ion"
        )
    return found


def _excluded_but_brought(case: Case) -> list[str]:
    """Name what the brief excludes and the rest of the product brings all the same."""
    brief, library = case.brief, case.library
    rows = [(library.find_material(e.material), "excipient") for e in brief.excipient]
    if case.background.agent is not None:
        rows.append((library.find_material(case.background.agent), "tonicity agent"))
    found = [
        f"{name} is excluded by the brief, yet the {what} {material.name} brings it"
        for material, what in rows
        for name in (material.id, *material.contents)
        if name in brief.exclude
    ]
    if brief.drug.counter_ion in brief.exclude:
        found.append(
            f"{brief.drug.counter_ion} is excluded by the brief, yet it is the "
            "counter-ion of the drug"
        )
    return list(dict.fromkeys(found))


def _osmolality_warnings(case: Case, candidates: Sequence[Candidate]) -> list[str]:
    """Name the candidates whose whole product lies outside the osmolality limits."""
    limits = case.brief.tonicity
    low, high = limits.low_mosm_kg, limits.high_mosm_kg
    placed = [
        c for c in candidates if c.rank is not None and c.osmolality_mosm_kg is not None
    ]
    found = []
    for what, limit, outside in (
        ("above", high, [c for c in placed if _over(c, high)]),
        ("below", low, [c for c in placed if _under(c, low)]),
    ):
        if not outside or limit is None:
            continue
        values = sorted(c.osmolality_mosm_kg or 0.0 for c in outside)
        span = f"{values[0]:.0f}"
        if f"{values[-1]:.0f}" != span:
            span += f" to {values[-1]:.0f}"
        names = [c.name for c in outside]
        who = "every candidate" if len(outside) == len(placed) else listed(names)
        found.append(
            f"the whole product has {span} mosmol/kg, {what} the limit {limit:.0f}: "
            f"{who}"
        )
    return found


def _over(candidate: Candidate, high_mosm_kg: float | None) -> bool:
    value = candidate.osmolality_mosm_kg
    return value is not None and high_mosm_kg is not None and value > high_mosm_kg + 0.5


def _under(candidate: Candidate, low_mosm_kg: float | None) -> bool:
    value = candidate.osmolality_mosm_kg
    return value is not None and low_mosm_kg is not None and value < low_mosm_kg - 0.5


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
