"""Records of screening rules, fact derivations and dose limits, and their tables.

``facts.csv`` says what can be tested, ``rules.csv`` what is concluded from it,
``dose_limits.csv`` how much of a substance a dose or a day may bring.
`formbuf.library.rules` reads them.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal, cast

from formbuf.library.predicate_logic import Judge
from formbuf.library.predicates import Condition
from formbuf.library.records import BASES, Basis
from formbuf.library.tables import Column, Schema
from formbuf.library.vocabulary import (
    FACT_TYPES,
    SILENCES,
    FactMapping,
    FactValue,
    Scope,
    Vocabulary,
)

Severity = Literal["exclude", "warn", "note"]
ThresholdBasis = Literal["published", "compiler", "mixed", "qualitative"]
LimitUse = Literal["label", "safety", "burden"]
LimitPer = Literal["dose", "day", "kg_dose", "kg_day", "kg_h", "litre"]

SEVERITIES: tuple[Severity, ...] = ("exclude", "warn", "note")
THRESHOLD_BASES = ("published", "compiler", "mixed", "qualitative")
LIMIT_USES: tuple[LimitUse, ...] = ("label", "safety", "burden")
LIMIT_PERS: tuple[LimitPer, ...] = (
    "dose",
    "day",
    "kg_dose",
    "kg_day",
    "kg_h",
    "litre",
)
TRIGGERS = (
    "admixture",
    "container",
    "drug",
    "excipient",
    "patient",
    "process",
    "regulatory",
    "route",
    "storage",
)
#: What a rule is about; the worst finding of each topic counts, not their number.
TOPICS = (
    "adducts",
    "adjuvant",
    "admixture",
    "capacity",
    "chelation",
    "colloid",
    "complexation",
    "container",
    "drug_stability",
    "drying",
    "exposure",
    "freezing",
    "gelling",
    "heat_sterilisation",
    "impurity",
    "oxidation",
    "pain",
    "precipitation",
    "preservative",
    "process",
    "regulatory",
    "route_ph",
    "route_tissue",
    "self_buffering",
    "sugar",
    "temperature",
)
#: Criteria that may already carry the weight of a finding, so that it is not counted
#: twice under compatibility.
CARRIERS = (
    "capacity",
    "temperature_drift",
    "frozen_drift",
    "precedent",
    "dose_burden",
)
#: Words in ``concerns`` that stand for groups of candidates.
ANY = "any"
ANY_BUFFER = "any_buffer"

FACTS = Schema(
    "facts.csv",
    (
        Column("fact", "id", required=True),
        Column("kind", required=True, choices=FACT_TYPES),
        Column("unit"),
        Column("choices", "ids"),
        Column("low", "number"),
        Column("high", "number"),
        Column("scope", required=True, choices=("product", "candidate")),
        Column("question", required=True),
        Column("held_in", required=True),
        Column("only_if"),
        Column("otherwise"),
        Column("silence", required=True, choices=SILENCES),
        Column("inferred_from"),
        Column("basis", choices=BASES),
        Column("note"),
    ),
    ("fact",),
)
RULES = Schema(
    "rules.csv",
    (
        Column("rule", required=True),
        Column("title", required=True),
        Column("concerns", "ids", required=True),
        Column("topic", required=True, choices=TOPICS),
        Column("kind", "ids", required=True),
        Column("scope", required=True, choices=("product", "candidate")),
        Column("severity", required=True, choices=SEVERITIES),
        Column("condition", required=True),
        Column("likely", required=True),
        Column("favours", "flag", required=True),
        Column("carried_by", choices=CARRIERS),
        Column("effect", required=True),
        Column("magnitude"),
        Column("mitigation"),
        Column("sources", "ids", refers_to="sources.csv"),
        Column("source_note"),
        Column("basis", required=True, choices=BASES),
        Column("threshold_basis", required=True, choices=THRESHOLD_BASES),
        Column("note"),
        Column("mended"),
    ),
    ("rule",),
)
DOSE_LIMITS = Schema(
    "dose_limits.csv",
    (
        Column("limit", "id", required=True),
        Column("substance", "id", required=True),
        Column("per", required=True, choices=LIMIT_PERS),
        Column("value", "number", required=True, low=0.0, high=1e6),
        Column("unit", required=True, choices=("mmol", "mg", "ug")),
        Column("use", required=True, choices=LIMIT_USES),
        Column("applies_if", required=True),
        Column("meaning", required=True),
        Column("sources", "ids", refers_to="sources.csv"),
        Column("source_note"),
        Column("basis", required=True, choices=BASES),
        Column("note"),
    ),
    ("limit",),
)


@dataclass(frozen=True, slots=True)
class Derivation:
    """How a fact gets its value where the brief does not hold it.

    Parameters
    ----------
    only_if : Judge or None
        Whether the fact is asked at all.
    otherwise : value or None
        Value where it is not; None leaves it missing.
    yes_when, no_when : Judge or None
        Conditions on other facts that settle a yes_no fact.
    contains, members : tuple of str
        Components whose presence or amount settles the fact, or that enter a set.
    computed : bool
        Whether a function of `formbuf.product` computes it.
    """

    only_if: Judge | None = None
    otherwise: FactValue | None = None
    yes_when: Judge | None = None
    no_when: Judge | None = None
    contains: tuple[str, ...] = ()
    members: tuple[str, ...] = ()
    computed: bool = False


@dataclass(frozen=True, slots=True)
class Rule:
    """One screening rule: when it fires, on whom, and what follows.

    Parameters
    ----------
    id, title : str
    concerns : tuple of str
        Species, systems or families; ``any`` or ``any_buffer``.
    topic : str
        Findings of one topic count once, by the worst.
    kinds : tuple of str
        Kinds of trigger: drug, excipient, process, ...
    scope : {"product", "candidate"}
        A product rule says the same of every candidate and ranks nobody.
    severity : {"exclude", "warn", "note"}
    text : str
        The condition as written.
    condition : Condition
    judge, likely : Judge
        Compiled condition; whether the trigger is likely where it cannot be judged.
    favours : bool
        Whether the finding speaks for the candidate.
    carried_by : str
        Criterion that already carries the weight; empty for none.
    effect, magnitude, mitigation : str
    sources : tuple of str
        Ids of sources.
    source_note : str
        What stands behind it besides them.
    basis, threshold_basis : str
    note, mended : str
    overlay : bool
        Whether it comes from a user's own tables.
    """

    id: str
    title: str
    concerns: tuple[str, ...]
    topic: str
    kinds: tuple[str, ...]
    scope: Scope
    severity: Severity
    text: str
    condition: Condition = field(repr=False)
    judge: Judge = field(repr=False, compare=False)
    likely: Judge = field(repr=False, compare=False)
    favours: bool
    carried_by: str
    effect: str
    magnitude: str
    mitigation: str
    sources: tuple[str, ...]
    source_note: str
    basis: Basis
    threshold_basis: ThresholdBasis
    note: str
    mended: str
    overlay: bool = False


@dataclass(frozen=True, slots=True)
class DoseLimit:
    """How much of a substance a dose, a day or a litre may bring, and what it means.

    ``use`` says what for: ``label`` a statement in the leaflet, ``safety`` a limit,
    ``burden`` the end of the scale of the dose-burden criterion.
    """

    id: str
    substance: str
    per: LimitPer
    value: float
    unit: str
    use: LimitUse
    applies: Judge = field(repr=False, compare=False)
    applies_text: str
    meaning: str
    sources: tuple[str, ...]
    source_note: str
    basis: Basis
    note: str
    overlay: bool = False


@dataclass(frozen=True, slots=True, eq=False)
class Rulebook:
    """The facts vocabulary with its derivations, the rules and the dose limits.

    Parameters
    ----------
    vocabulary : mapping of str to FactDefinition
    derivations : mapping of str to Derivation
    order : tuple of str
        Facts in an order in which each follows those it is derived from.
    rules : tuple of Rule
    dose_limits : tuple of DoseLimit
    """

    vocabulary: Vocabulary
    derivations: Mapping[str, Derivation]
    order: tuple[str, ...]
    rules: tuple[Rule, ...]
    dose_limits: tuple[DoseLimit, ...]

    def limits(
        self, substance: str, facts: FactMapping, *, use: LimitUse | None = None
    ) -> tuple[DoseLimit, ...]:
        """Return the limits of a substance that apply under the facts of a product."""
        return tuple(
            limit
            for limit in self.dose_limits
            if limit.substance == substance
            and use in (None, limit.use)
            and limit.applies(facts) is True
        )

    def burden_limit(
        self, substance: str, per: LimitPer, facts: FactMapping
    ) -> DoseLimit | None:
        """Return the limit at which a substance counts as a full burden, or None.

        Where several apply, the smallest stands.
        """
        found = [
            limit
            for limit in self.limits(substance, facts, use="burden")
            if limit.per == per
        ]
        return min(found, key=lambda limit: limit.value, default=None)


def as_basis(text: str) -> Basis:
    """Return a basis that the table reader has checked."""
    return cast("Basis", text)
