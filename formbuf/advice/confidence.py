"""How sure a shortlist is: intervals, chances, and what they rest on.

Draws over everything that is uncertain, through the vectorised solver: the constants
of ionization, the activity model, weighing and reading, the loads, the drug, and the
judged criteria. The proposed compositions stay as they are; what is drawn is how they
turn out and how they would rank.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.chance_records import Chance, Flip, RankChances
from formbuf.advice.confidence_records import (
    CandidateConfidence,
    Confidence,
    TemperatureConfidence,
    interval,
)
from formbuf.advice.draw_candidate import (
    CandidateDraws,
    Draws,
    draw_candidate,
    prepare_draws,
)
from formbuf.advice.draw_criteria import log_desirabilities
from formbuf.advice.draw_inputs import Input
from formbuf.advice.rank_chances import (
    any_weights,
    chance,
    flips,
    rank_chances,
    score_table,
    tied,
    weights_around,
)
from formbuf.advice.results import Candidate, Shortlist
from formbuf.advice.sampling import DEFAULT_DRAWS, DEFAULT_SEED, Sampler
from formbuf.advice.variance_shares import QuantityShares, quantity_shares
from formbuf.advice.verdict import verdict
from formbuf.advice.weight_changes import weight_changes

Array = NDArray[np.float64]


@dataclass(frozen=True)
class DrawnCandidate:
    """A candidate with its draws; ``logs`` are ln desirabilities by criterion."""

    candidate: Candidate
    made: CandidateDraws | None
    logs: Mapping[str, Array]
    inputs: Mapping[str, Input]


def with_confidence(
    result: Shortlist,
    *,
    draws: int = DEFAULT_DRAWS,
    seed: int = DEFAULT_SEED,
    sampler: Sampler | None = None,
) -> Shortlist:
    """Add intervals and chances to a shortlist; ties and verdict then rest on them.

    Parameters
    ----------
    result : Shortlist
        As from ``formbuf.shortlist``.
    draws : int
        100 to 1,000,000; at 2,500 the standard error of a chance is at most 0.01.
    seed : int
        The same seed gives the same figures, bit by bit.
    sampler : Sampler, optional
        In place of draws and seed.

    Returns
    -------
    Shortlist
        The same candidates in the same order, with ``confidence`` set on the
        shortlist and on every candidate that can be drawn.

    Raises
    ------
    InputError
        For a count or seed that is not allowed, or a stated uncertainty of something
        that does not exist.
    """
    shared = prepare_draws(result, sampler or Sampler(draws, seed))
    drawn = {
        c.key: _drawn(shared, result, c)
        for c in result.candidates
        if c.standing != "screened out"
    }
    heads = [drawn[c.key] for c in result.heads]
    places = _places(shared, result, heads)
    found_flips = flips([d.candidate.key for d in heads], places.scores)
    share = shared.model.number("tie_share")
    partners = tied(found_flips, share)
    records = {
        key: _record(shared, result, one, places, drawn) for key, one in drawn.items()
    }
    candidates = tuple(
        replace(
            c,
            tied_with=partners.get(c.key, ()) if c.variant_of is None else (),
            confidence=records.get(c.key),
        )
        for c in result.candidates
    )
    worst = max(
        (c.standard_error for c in _chances(records.values(), found_flips)), default=0.0
    )
    count = shared.sampler.count
    confidence = Confidence(
        count,
        shared.sampler.seed,
        shared.model.preparation,
        worst,
        share,
        found_flips,
        _shares(shared, result, heads, places),
        weight_changes([d.candidate for d in heads], result.settings.weights),
        shared.model.figures,
        f"{count} draws, seed {shared.sampler.seed}: the standard error of a chance is "
        f"at most {worst:.3f}",
    )
    return replace(
        result,
        candidates=candidates,
        confidence=confidence,
        verdict=_verdict(candidates, confidence),
    )


def _drawn(shared: Draws, result: Shortlist, candidate: Candidate) -> DrawnCandidate:
    made = draw_candidate(shared, candidate)
    logs, inputs = log_desirabilities(shared, result.settings, candidate, made)
    return DrawnCandidate(
        candidate, made, logs, {**(made.inputs if made else {}), **inputs}
    )


@dataclass(frozen=True)
class _Places:
    """Scores of the heads at the given weights, and their ranks over the draws."""

    scores: Array
    given: Mapping[str, RankChances]
    around: Mapping[str, RankChances]
    any: Mapping[str, RankChances]


def _places(
    shared: Draws, result: Shortlist, heads: Sequence[DrawnCandidate]
) -> _Places:
    sampler = shared.sampler
    count = sampler.count
    keys = [d.candidate.key for d in heads]
    logs = [d.logs for d in heads]
    if not heads:
        return _Places(np.zeros((0, count)), {}, {}, {})
    names = list(dict.fromkeys(name for one in logs for name in one))
    weights = {name: result.settings.weights[name] for name in names}
    concentration = shared.model.number("weight_concentration")
    scores = score_table(logs, weights, count)
    near = score_table(logs, weights_around(sampler, weights, concentration), count)
    far = score_table(logs, any_weights(sampler, names), count)
    given, around, every = (
        dict(zip(keys, rank_chances(table), strict=True))
        for table in (scores, near, far)
    )
    return _Places(scores, given, around, every)


def _record(
    shared: Draws,
    result: Shortlist,
    one: DrawnCandidate,
    places: _Places,
    drawn: Mapping[str, DrawnCandidate],
) -> CandidateConfidence:
    candidate, made = one.candidate, one.made
    key = candidate.key
    over = None
    head = drawn.get(candidate.variant_of or "")
    if head is not None:
        pair = score_table(
            [one.logs, head.logs], result.settings.weights, shared.sampler.count
        )
        over = chance(pair[0] > pair[1])
    ranks = (places.given.get(key), places.around.get(key), places.any.get(key))
    if made is None:
        return CandidateConfidence(
            (), None, None, None, None, None, None, None, *ranks, over
        )
    every = np.all(np.stack(list(made.within_end.values())), axis=0)
    size = candidate.concentration_mmol_l
    has_place = bool(candidate.criteria) and size > 0.0
    return CandidateConfidence(
        tuple(
            TemperatureConfidence(
                s.temperature_c,
                s.kinds,
                interval(made.ph[s.temperature_c]),
                chance(made.within_end[s.temperature_c])
                if s.temperature_c in made.within_end
                else None,
            )
            for s in candidate.states
        ),
        interval(made.read_ph),
        chance(made.within_release),
        chance(every),
        chance(made.required_mmol_l <= size * (1.0 + 1e-9)) if has_place else None,
        interval(made.required_mmol_l) if has_place else None,
        interval(made.capacity_mmol_l_ph),
        interval(made.osmolality_mosm_kg),
        *ranks,
        over,
    )


def _chances(
    records: Iterable[CandidateConfidence], found: Iterable[Flip]
) -> Iterator[Chance]:
    """Every chance that is reported."""
    for record in records:
        for ranks in (record.ranks, record.ranks_around, record.ranks_any):
            if ranks is not None:
                yield from ranks.ranks
        single = (
            record.within_at_release,
            record.within_at_end,
            record.carries_loads,
            record.over_head,
            *(t.within_at_end for t in record.temperatures),
        )
        yield from (one for one in single if one is not None)
    for flip in found:
        yield flip.chance


def _shares(
    shared: Draws, result: Shortlist, heads: Sequence[DrawnCandidate], places: _Places
) -> tuple[QuantityShares, ...]:
    """Return what the pH of the lead and its distance from the back-up come from."""
    found: list[QuantityShares] = []
    if not heads:
        return ()
    lead = heads[0]
    sampler = shared.sampler
    at = result.brief.ph.measure_temperature_c
    if lead.made is not None:
        inputs = lead.made.inputs
        ph = lead.made.ph
        text = f"pH of {lead.candidate.name} as read at release, {at:g} C"
        found.append(quantity_shares(text, lead.made.read_ph, inputs, sampler))
        stored = [t for t in result.brief.liquid_storage_temperatures_c if t in ph]
        far = max(stored, key=lambda t: abs(t - at), default=at)
        if far != at:
            text = f"pH of {lead.candidate.name} at {far:g} C"
            found.append(quantity_shares(text, ph[far], inputs, sampler))
    if len(heads) > 1:
        backup = heads[1]
        text = f"{lead.candidate.name} over {backup.candidate.name} (ln desirability)"
        both = {**lead.inputs, **backup.inputs}
        gap = places.scores[0] - places.scores[1]
        found.append(quantity_shares(text, gap, both, sampler))
    return tuple(found)


def _verdict(candidates: Sequence[Candidate], confidence: Confidence) -> str:
    """Say the verdict with how often the lead leads."""
    said = verdict(candidates)
    placed = [
        (c, c.confidence.ranks)
        for c in candidates
        if c.confidence is not None and c.confidence.ranks is not None
    ]
    if len(placed) < 2:
        return said
    lead, ranks = placed[0]
    share = 100.0 * ranks.lead.value
    said = f"{said} The lead comes first in {share:.0f} % of {confidence.draws} draws"
    best, most = max(placed, key=lambda pair: pair[1].lead.value)
    if best.key != lead.key:
        said += f", {best.name} in {100.0 * most.lead.value:.0f} %"
    return f"{said}."
