"""Rules against facts: what fired, what did not, and what could not be judged.

`screen` judges every rule that concerns a candidate. A rule may concern it through its
buffer or only through an excipient; in the second case, as with a product rule, the
finding says the same of every candidate and ranks nobody. An `Override` sets a finding
aside with a recorded reason: an exclusion then weighs as a warning, a warning as a
note, a note no more; it stays in the list.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

from formbuf.errors import nearest
from formbuf.library import Library
from formbuf.library.predicate_logic import Verdict, judge
from formbuf.library.rule_tables import ANY, ANY_BUFFER, Rule, Rulebook, Severity
from formbuf.library.rules import family_slug
from formbuf.library.vocabulary import FactMapping, FactValue, Scope
from formbuf.product.brief_messages import Fault, raise_faults, suggest
from formbuf.product.brief_origin import Location, Origin
from formbuf.product.product_parts import OverrideInfo

Outcome = Literal["fired", "not fired", "not evaluable"]
OUTCOMES: Mapping[bool | None, Outcome] = {
    True: "fired",
    False: "not fired",
    None: "not evaluable",
}
#: How heavy a finding weighs, worst first.
_WEIGHT: Mapping[Severity, int] = {"exclude": 3, "warn": 2, "note": 1}
_MILDER: Mapping[Severity, Severity | None] = {
    "exclude": "warn",
    "warn": "note",
    "note": None,
}
_NO_BUFFER = "none"
SEE_RULES = "See `formbuf knowledge show rules`."


@dataclass(frozen=True, slots=True)
class Concerned:
    """Names by which rules can mean a candidate.

    Parameters
    ----------
    system : str
    buffer : frozenset of str
        The system, its species and their families, ``any``, ``any_buffer``.
    others : frozenset of str
        Species that only excipients or the drug bring, and their families.
    """

    system: str
    buffer: frozenset[str]
    others: frozenset[str]


def concerned(
    library: Library,
    system: str,
    species: Iterable[str],
    dissolved: Iterable[str] = (),
) -> Concerned:
    """Return the names by which rules can mean a candidate.

    Parameters
    ----------
    library : Library
    system : str
        Id of the system, or a name of the user's for a list of materials.
    species : iterable of str
        Species that the buffer brings.
    dissolved : iterable of str
        All species dissolved, whoever brings them.
    """
    own = set(species)
    groups = {ANY} if system == _NO_BUFFER else {ANY, ANY_BUFFER}
    others = {name for name in dissolved if name in library.species} - own
    return Concerned(
        system=system,
        buffer=frozenset({system, *own, *_families(library, own), *groups}),
        others=frozenset({*others, *_families(library, others)}),
    )


def _families(library: Library, species: Iterable[str]) -> set[str]:
    return {
        family_slug(library.species[name].family)
        for name in species
        if name in library.species
    }


@dataclass(frozen=True, slots=True)
class Finding:
    """One rule judged for one candidate.

    Parameters
    ----------
    record : Rule
    truth : bool or None
        None where a missing fact decides.
    facts : mapping of str to value or MISSING
        What it was judged on.
    through_buffer : bool
        Whether it concerns the candidate through its buffer.
    likely : bool
        Whether the trigger is likely, for an exclusion that could not be judged.
    override : OverrideInfo or None
        Recorded reason to set it aside.
    """

    record: Rule
    truth: bool | None
    facts: FactMapping
    through_buffer: bool
    likely: bool
    override: OverrideInfo | None = None

    @property
    def rule(self) -> str:
        """Id of the rule."""
        return self.record.id

    @property
    def severity(self) -> Severity:
        """Severity as the table states it."""
        return self.record.severity

    @property
    def outcome(self) -> Outcome:
        """Outcome in words."""
        return OUTCOMES[self.truth]

    @property
    def text(self) -> str:
        """What the rule is about and what it leads to, in one line."""
        return f"{self.record.title}: {self.record.effect}"

    @property
    def basis(self) -> str:
        """How the rule is known."""
        return self.record.basis

    @property
    def source(self) -> str:
        """Ids of its sources and what else stands behind it."""
        return "; ".join(filter(None, (*self.record.sources, self.record.source_note)))

    @property
    def topic(self) -> str:
        """Topic within which only the worst finding counts."""
        return self.record.topic

    @property
    def scope(self) -> Scope:
        """``product`` where the finding says the same of every candidate."""
        return self.record.scope if self.through_buffer else "product"

    @property
    def verdict(self) -> Verdict:
        """Verdict with the facts it rests on."""
        return judge(self.record.condition, self.facts)

    @property
    def values(self) -> Mapping[str, FactValue]:
        """The facts that triggered or settled it, with their values."""
        return self.verdict.values

    @property
    def missing(self) -> tuple[str, ...]:
        """The facts without which it cannot be judged."""
        return self.verdict.missing

    @property
    def screens_out(self) -> bool:
        """Whether it drops the candidate."""
        return (
            self.truth is True
            and self.severity == "exclude"
            and self.scope == "candidate"
            and self.override is None
        )

    @property
    def weighs_as(self) -> Severity | None:
        """The severity that counts in the ranking; None where it counts nothing.

        Product findings, findings that speak for the candidate and rules that did
        not fire count nothing; an exclusion that cannot be judged counts as a warning
        where its trigger is likely.
        """
        if self.scope == "product" or self.record.favours:
            return None
        weight: Severity | None = None
        if self.truth is True:
            weight = self.severity
        elif self.truth is None and self.severity == "exclude" and self.likely:
            weight = "warn"
        return _MILDER[weight] if weight and self.override else weight


def screen(
    rules: Sequence[Rule],
    facts: FactMapping,
    candidate: Concerned,
    overrides: Sequence[OverrideInfo] = (),
) -> list[Finding]:
    """Judge the rules that concern a candidate.

    Parameters
    ----------
    rules : sequence of Rule
    facts : mapping of str to value or MISSING
        `FactSheet.values` of the candidate.
    candidate : Concerned
    overrides : sequence of OverrideInfo
        As `check_overrides` leaves them.

    Returns
    -------
    list of Finding
        In the order of the rules.
    """
    findings = []
    for rule in rules:
        through_buffer = not candidate.buffer.isdisjoint(rule.concerns)
        if not through_buffer and candidate.others.isdisjoint(rule.concerns):
            continue
        truth = rule.judge(facts)
        findings.append(
            Finding(
                record=rule,
                truth=truth,
                facts=facts,
                through_buffer=through_buffer,
                likely=truth is None and rule.likely(facts) is True,
                override=_override_of(rule, candidate, overrides),
            )
        )
    return findings


def _override_of(
    rule: Rule, candidate: Concerned, overrides: Sequence[OverrideInfo]
) -> OverrideInfo | None:
    for override in overrides:
        if override.rule == rule.id and override.system in (None, candidate.system):
            return override
    return None


def check_overrides(
    overrides: Sequence[OverrideInfo],
    rulebook: Rulebook,
    *,
    screens: Iterable[str] = (),
    systems: Iterable[str] = (),
    origin: Origin | None = None,
) -> None:
    """Refuse overrides that name no rule, say no reason or stand twice.

    Parameters
    ----------
    overrides : sequence of OverrideInfo
    rulebook : Rulebook
    screens : iterable of str
        Names of screens that are no rules and may be overridden too.
    systems : iterable of str
        Known systems; empty leaves ``system`` unchecked.
    origin : Origin, optional
        Where the brief was written, for file and line.

    Raises
    ------
    InputError
        All faults at once.
    """
    screen_names = sorted(screens)
    known = [rule.id for rule in rulebook.rules] + screen_names
    known_systems = set(systems)
    faults: list[Fault] = []
    seen: set[tuple[str, str | None]] = set()
    for index, override in enumerate(overrides):
        at: Location = ("override", index)
        if override.rule not in known:
            what = "is no rule or screen"
            named = ", ".join(screen_names)
            said = f"an id of rules.csv{f', or {named}' if named else ''}"
            near = nearest(override.rule.upper(), known, 1)
            hint = suggest(override.rule, known)
            if not hint:
                hint = f"Did you mean {near[0]!r}? {SEE_RULES}" if near else SEE_RULES
            faults.append(Fault((*at, "rule"), what, said, override.rule, hint))
        if known_systems and override.system not in (None, *known_systems):
            hint = suggest(override.system, sorted(known_systems))
            said = "a system, or none for all"
            faults.append(
                Fault((*at, "system"), "is no system", said, override.system, hint)
            )
        faults += [
            Fault((*at, name), "is empty", "a text", getattr(override, name))
            for name in ("reason", "name")
            if not getattr(override, name).strip()
        ]
        if (override.rule, override.system) in seen:
            what = "is overridden twice"
            faults.append(Fault((*at, "rule"), what, "once", override.rule))
        seen.add((override.rule, override.system))
    raise_faults(origin or Origin(), faults)


def worst_per_topic(
    findings: Iterable[Finding], *, carried_elsewhere: Iterable[str] = ()
) -> dict[str, Finding]:
    """Return the finding that weighs most in each topic.

    Parameters
    ----------
    findings : iterable of Finding
        Of one candidate.
    carried_elsewhere : iterable of str
        Criteria that already carry the weight of some findings, which are then left
        out, so that nothing is counted twice.
    """
    carriers = set(carried_elsewhere)
    worst: dict[str, tuple[int, Finding]] = {}
    for finding in findings:
        severity = finding.weighs_as
        if severity is None or finding.record.carried_by in carriers:
            continue
        weight = _WEIGHT[severity]
        if finding.topic not in worst or weight > worst[finding.topic][0]:
            worst[finding.topic] = (weight, finding)
    return {topic: finding for topic, (_, finding) in worst.items()}


def counts(findings: Iterable[Finding]) -> dict[str, int]:
    """Count fired findings by severity, and those that could not be judged."""
    found = {"exclude": 0, "warn": 0, "note": 0, "not evaluable": 0}
    for finding in findings:
        if finding.truth is True and not finding.record.favours:
            found[finding.severity] += 1
        elif finding.truth is None:
            found["not evaluable"] += 1
    return found


def common_findings(
    by_candidate: Mapping[str, Sequence[Finding]],
) -> frozenset[str]:
    """Return the rules that fire for every candidate and so rank nobody.

    Product rules that fired are among them. The product without buffer has no say in
    rules that concern buffers only. With a single buffer nothing is common but the
    product rules.
    """
    fired = {
        system: {finding.rule for finding in findings if finding.truth is True}
        for system, findings in by_candidate.items()
    }
    product = {
        finding.rule
        for findings in by_candidate.values()
        for finding in findings
        if finding.truth is True and finding.scope == "product"
    }
    buffers = [rules for system, rules in fired.items() if system != _NO_BUFFER]
    if len(buffers) < 2:
        return frozenset(product)
    shared = set.intersection(*buffers)
    if _NO_BUFFER in by_candidate:
        judged = {finding.rule for finding in by_candidate[_NO_BUFFER]}
        shared -= judged - fired[_NO_BUFFER]
    return frozenset(product | shared)
