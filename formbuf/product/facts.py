"""The facts of a product and of a candidate, from the brief and the calculation.

A fact takes its value from the first of these that has one: the answer in ``[facts]``
or the key of the brief that holds it; the value it has where it is not asked
(``only_if``); a computation; an inference from excipients or other facts; what silence
means. `FactSheet.origins` says which. Nothing is guessed: what none of them gives is
`MISSING`.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import dataclass, field
from typing import Any, Literal

from formbuf.library import Library
from formbuf.library.fact_rows import LISTED
from formbuf.library.rule_tables import Derivation, Rulebook
from formbuf.library.vocabulary import (
    MISSING,
    FactDefinition,
    FactValue,
    Missing,
)
from formbuf.product.fact_answers import read_answers
from formbuf.product.fact_values import (
    CANDIDATE_COMPUTED,
    PRODUCT_COMPUTED,
    Situation,
)
from formbuf.product.product_brief import ProductBrief
from formbuf.product.quantities import CandidateQuantities

Origin = Literal[
    "given", "brief", "not asked", "computed", "inferred", "silence", "missing"
]
#: Values that the completed brief assumes and that rules must still treat as unsaid:
#: an assumed kind of drug says nothing about its chemistry, an assumed container
#: nothing about glass or about gas that passes its wall.
ASSUMED_IS_SILENCE = frozenset(
    {"container.type", "container.gas_permeable", "drug.kind"}
)
#: Digits kept of a computed number.
SIGNIFICANT_DIGITS = 9


@dataclass(frozen=True, slots=True)
class FactSheet:
    """Facts by name, with how each is known.

    Parameters
    ----------
    values : mapping of str to value or MISSING
    origins : mapping of str to Origin
    """

    values: Mapping[str, FactValue | Missing]
    origins: Mapping[str, Origin] = field(default_factory=dict)

    @property
    def missing(self) -> tuple[str, ...]:
        """The facts that nobody has given."""
        return tuple(n for n, value in self.values.items() if value is MISSING)


def prepare(
    brief: ProductBrief,
    library: Library,
    rulebook: Rulebook,
    *,
    assumed: Collection[str] = (),
    drug_capacity_mmol_l_ph: float | None = None,
) -> Situation:
    """Check the answers of a brief against the vocabulary.

    Raises
    ------
    InputError
        If an answer names no fact or does not fit it; all faults at once.
    """
    answers = read_answers(brief.facts, brief.drug.groups, rulebook.vocabulary)
    return Situation(
        brief, library, rulebook, answers, frozenset(assumed), drug_capacity_mmol_l_ph
    )


def product_facts(situation: Situation) -> FactSheet:
    """Return the facts that all candidates share."""
    values: dict[str, FactValue | Missing] = {}
    origins: dict[str, Origin] = {}
    materials = _dissolved_by_the_brief(situation)
    for name in situation.rulebook.order:
        fact = situation.rulebook.vocabulary[name]
        if fact.scope != "product":
            continue
        derivation = situation.rulebook.derivations[name]
        found = _given(situation, fact) or _not_asked(derivation, values)
        if found is None:
            found = _derived(situation, fact, derivation, values, materials)
        values[name], origins[name] = found or _silent(fact, values)
    return FactSheet(values, origins)


def candidate_facts(
    situation: Situation, product: FactSheet, quantities: CandidateQuantities
) -> FactSheet:
    """Return the facts of one candidate together with those of the product."""
    values = dict(product.values)
    origins = dict(product.origins)
    book = situation.rulebook
    for name in book.order:
        fact = book.vocabulary[name]
        if fact.scope != "candidate":
            continue
        derivation = book.derivations[name]
        given = _given(situation, fact)
        found = given or _not_asked(derivation, values)
        if found is None and name in CANDIDATE_COMPUTED:
            value = CANDIDATE_COMPUTED[name](situation, quantities, values)
            found = (value, "computed") if value is not MISSING else None
        if derivation.contains and (found is None or found is given):
            found = _contained(derivation, quantities, found)
        value, origins[name] = found or _silent(fact, values)
        values[name] = _tidy(value)
    return FactSheet(values, origins)


def _tidy(value: FactValue | Missing) -> FactValue | Missing:
    """Round off what a solver leaves behind, so that pH 6 does not count as below 6."""
    if isinstance(value, float):
        return float(f"{value:.{SIGNIFICANT_DIGITS}g}")
    return value


_Found = tuple[FactValue | Missing, Origin]


def _given(situation: Situation, fact: FactDefinition) -> _Found | None:
    """Return the answer of the user, or what another key of the brief holds."""
    if fact.name in situation.answers:
        value = situation.answers[fact.name]
        return value, "given" if value is not MISSING else "missing"
    key = fact.held_in
    if key == "computed" or key.startswith("facts."):
        return None
    if key in ASSUMED_IS_SILENCE and key in situation.assumed:
        return None
    held: Any = situation.brief
    for part in key.split("."):
        held = getattr(held, part)
    if held is None or held == ():
        return None
    if fact.kind == "number":
        return float(held), "brief"
    return held, "brief"


def _not_asked(
    derivation: Derivation, values: Mapping[str, FactValue | Missing]
) -> _Found | None:
    if derivation.only_if is None or derivation.only_if(values) is not False:
        return None
    if derivation.otherwise is None:
        return MISSING, "missing"
    return derivation.otherwise, "not asked"


def _derived(
    situation: Situation,
    fact: FactDefinition,
    derivation: Derivation,
    values: Mapping[str, FactValue | Missing],
    materials: frozenset[str],
) -> _Found | None:
    if derivation.yes_when is not None and derivation.yes_when(values) is True:
        return True, "inferred"
    if derivation.no_when is not None and derivation.no_when(values) is True:
        return False, "inferred"
    if derivation.contains and not materials.isdisjoint(derivation.contains):
        return True, "inferred"
    members = materials.intersection(derivation.members)
    if members:
        return frozenset(members), "inferred"
    if fact.name in PRODUCT_COMPUTED:
        value = PRODUCT_COMPUTED[fact.name](situation, values)
        return (value, "computed") if value is not MISSING else None
    return None


def _contained(
    derivation: Derivation, quantities: CandidateQuantities, found: _Found | None
) -> _Found | None:
    """Return the amount in the whole solution, or the user's figure if larger."""
    amount = sum(quantities.component_mmol_l(name) for name in derivation.contains)
    if found is not None and found[0] is MISSING and amount <= 0.0:
        return found
    if found is not None and isinstance(found[0], float) and found[0] >= amount:
        return found
    return (float(amount), "computed") if amount > 0.0 or found else None


def _silent(
    fact: FactDefinition, values: Mapping[str, FactValue | Missing]
) -> tuple[FactValue | Missing, Origin]:
    """Return what it means that the brief says nothing."""
    silence = fact.silence
    if silence.endswith("_if_listed") and values.get(LISTED) is not True:
        return MISSING, "missing"
    if silence == "unknown":
        return MISSING, "missing"
    if fact.kind == "yes_no":
        return False, "silence"
    if fact.kind == "number":
        return 0.0, "silence"
    return (frozenset() if fact.kind == "set" else "none"), "silence"


def _dissolved_by_the_brief(situation: Situation) -> frozenset[str]:
    """Return the components of the excipients and of the tonicity agent."""
    brief = situation.brief
    names = [entry.material for entry in brief.excipient]
    if brief.tonicity.agent is not None and brief.tonicity.fill:
        names.append(brief.tonicity.agent)
    found: set[str] = set()
    for name in names:
        found.update(situation.library.find_material(name).contents)
    if brief.drug.counter_ion is not None:
        found.add(brief.drug.counter_ion)
    return frozenset(found)
