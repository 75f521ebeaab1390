"""Checks of entries of a brief that need more of the knowledge than names: facts, ends.

They give faults with their place in the file, so that a wrong answer in ``[facts]`` or
an anchor the wrong way round is told like any other key.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from formbuf.library import Library
from formbuf.library.rules import load_rulebook
from formbuf.product.brief_messages import Fault, suggest
from formbuf.product.brief_model import Brief
from formbuf.product.brief_origin import Location
from formbuf.product.fact_answers import allowed, fits
from formbuf.product.vocabulary import ROUTE_GROUPS

FACTS_HINT = "See `formbuf knowledge show facts`."


def entry_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield answers that fit no fact, ends the wrong way round, formulas named twice.

    Parameters
    ----------
    brief : Brief
    library : Library
        With the brief's own rows.
    """
    yield from _fact_faults(brief, library)
    yield from _anchor_order_faults(brief, library)
    seen: set[str] = set()
    for index, row in enumerate(brief.candidate):
        name = (row.name or "").casefold()
        if name and name in seen:
            at: Location = ("candidate", index, "name")
            yield Fault(at, "is given twice", "a name of its own", row.name)
        seen.add(name)


def _fact_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    if not brief.facts and not brief.drug.groups:
        return
    vocabulary = load_rulebook(library).vocabulary
    held = [name for name, f in vocabulary.items() if f.held_in.startswith("facts.")]
    for name, answer in brief.facts.items():
        at: Location = ("facts", name)
        fact = vocabulary.get(name)
        if fact is None:
            hint = suggest(name, sorted(held))
            said = "a fact that a rule tests"
            yield Fault(
                at,
                "no rule tests this fact",
                said,
                answer,
                f"{hint} {FACTS_HINT}".strip(),
            )
        elif fact.held_in == "computed":
            yield Fault(at, "is computed", "nothing here", answer)
        elif not fact.held_in.startswith("facts."):
            yield Fault(at, f"is held in {fact.held_in}", "only there", answer)
        elif not fits(fact, answer):
            yield Fault(
                at, "does not fit", allowed(fact), *_shown(answer, fact.choices)
            )
    groups = vocabulary.get("drug_groups")
    for index, group in enumerate(brief.drug.groups):
        if brief.drug.groups == ("none",):
            break
        if groups is not None and group not in groups.choices:
            at = ("drug", "groups", index)
            hint = suggest(group, sorted(groups.choices))
            yield Fault(at, "does not fit", ", ".join(groups.choices), group, hint)


def _shown(answer: Any, choices: tuple[str, ...]) -> tuple[Any, str]:
    """Return what of an answer to show, and what was meant by it."""
    given = answer if isinstance(answer, list) else [answer]
    wrong = [one for one in given if one not in choices]
    one = wrong[0] if choices and wrong else answer
    return one, suggest(one, sorted(choices)) if choices else ""


def _anchor_order_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield ends of which the floor is not beyond the full desirability."""
    ours: Mapping[str, Any] = library.criteria["anchors"]
    group = ROUTE_GROUPS.get(brief.product.route)
    for name, anchor in brief.ranking.anchors.items():
        entry = ours.get(name)
        if entry is None:
            continue
        vehicle = entry.get("vehicle", {})
        if group in vehicle.get("route_groups", ()):
            entry = {**entry, **vehicle}
        full = entry["full"] if anchor.full is None else anchor.full
        floor = entry.get("floor") if anchor.floor is None else anchor.floor
        if floor is None or floor > full or anchor.full == anchor.floor:
            continue
        key, value = ("floor", floor) if anchor.floor is not None else ("full", full)
        bound = f"above full, {full:g}" if key == "floor" else f"below floor, {floor:g}"
        at: Location = ("ranking", "anchors", name, key)
        yield Fault(at, "is the wrong way round, since less is better", bound, value)
