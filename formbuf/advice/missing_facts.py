"""Which unsaid facts could change the standing of a candidate, worst first."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass

from formbuf.advice.screening import Finding
from formbuf.library.vocabulary import FactDefinition, Vocabulary

#: What an unsettled rule is worth: an exclusion can drop a candidate, a warning only
#: lowers it, a note changes nothing.
_STAKES = {"exclude": 3.0, "warn": 1.0, "note": 0.0}


@dataclass(frozen=True, slots=True)
class MissingFact:
    """One fact to ask for.

    Parameters
    ----------
    fact : FactDefinition
        With the question in plain words and the key of the brief that holds it.
    rules : tuple of str
        Rules it could settle.
    systems : tuple of str
        Candidates whose standing it could change.
    could_exclude : bool
        Whether one of the rules excludes.
    weight : float
        Sum of what is at stake; orders the list.
    """

    fact: FactDefinition
    rules: tuple[str, ...]
    systems: tuple[str, ...]
    could_exclude: bool
    weight: float


def missing_that_matter(
    by_candidate: Mapping[str, Sequence[Finding]],
    vocabulary: Vocabulary,
    *,
    contenders: Iterable[str] | None = None,
    limit: int = 5,
) -> list[MissingFact]:
    """Return the few missing facts that could change the standing of candidates.

    Parameters
    ----------
    by_candidate : mapping of str to sequence of Finding
        Findings of each candidate.
    vocabulary : mapping of str to FactDefinition
    contenders : iterable of str, optional
        Candidates worth asking about, for example those not screened out; all if
        absent.
    limit : int
        Most facts to return.

    Notes
    -----
    A rule counts where it could not be judged, concerns the buffer, and would weigh
    more than what already fired in its topic. Its stake is shared by the facts it
    lacks. A fact whose rules are open for every candidate alike changes no order, so
    only its exclusions count. Computed facts cannot be asked for and are left out.
    A fact that only arises from the answer to another one that is missing hands its
    stake to that one: without the kind of drug its groups are no question yet.
    """
    names = list(by_candidate) if contenders is None else list(contenders)
    weights: dict[str, float] = {}
    rules: dict[str, dict[str, None]] = {}
    systems: dict[str, dict[str, None]] = {}
    excluding: set[str] = set()
    for system in names:
        for finding in _open(by_candidate.get(system, ())):
            asked = [
                name
                for name in finding.missing
                if name in vocabulary and vocabulary[name].held_in != "computed"
            ]
            for name in asked:
                stake = _STAKES[finding.severity] / len(asked)
                weights[name] = weights.get(name, 0.0) + stake
                rules.setdefault(name, {})[finding.rule] = None
                systems.setdefault(name, {})[system] = None
                if finding.severity == "exclude":
                    excluding.add(name)
    for name in [n for n in weights if _waits_for(n, vocabulary, weights) != n]:
        first = _waits_for(name, vocabulary, weights)
        weights[first] += weights[name]
        rules[first] |= rules[name]
        systems[first] |= systems[name]
        if name in excluding:
            excluding.add(first)
    telling = [
        name
        for name in weights
        if (name in excluding or len(systems[name]) < len(names))
        and _waits_for(name, vocabulary, weights) == name
    ]
    telling.sort(key=lambda name: (name not in excluding, -weights[name], name))
    return [
        MissingFact(
            fact=vocabulary[name],
            rules=tuple(rules[name]),
            systems=tuple(systems[name]),
            could_exclude=name in excluding,
            weight=weights[name],
        )
        for name in telling[:limit]
    ]


def _waits_for(name: str, vocabulary: Vocabulary, asked: Collection[str]) -> str:
    """Return the question to answer before another one arises; itself if none."""
    for _ in range(len(asked)):
        words = re.findall(r"\w+", vocabulary[name].only_if)
        first = next((word for word in words if word in asked), None)
        if first is None:
            break
        name = first
    return name


def _open(findings: Sequence[Finding]) -> list[Finding]:
    """Return the unjudged findings that would weigh more than what fired already."""
    fired: dict[str, float] = {}
    for finding in findings:
        if finding.truth is True and finding.weighs_as is not None:
            stake = _STAKES[finding.weighs_as]
            fired[finding.topic] = max(fired.get(finding.topic, 0.0), stake)
    return [
        finding
        for finding in findings
        if finding.truth is None
        and finding.scope == "candidate"
        and not finding.record.favours
        and finding.override is None
        and _STAKES[finding.severity] > fired.get(finding.topic, 0.0)
    ]
