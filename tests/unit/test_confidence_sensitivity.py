"""What would change the lead, and the map of the decision."""

from __future__ import annotations

import dataclasses
import json
import math

import pytest
from confidence_support import brief, library

from formbuf.advice.decision_map import DecisionMap, decision_map
from formbuf.advice.requirement_changes import Sensitivity, sensitivity
from formbuf.advice.shortlist import shortlist
from formbuf.advice.variations import (
    Variation,
    heads_of,
    ranked_with,
    with_ceilings,
)
from formbuf.errors import InputError
from formbuf.output.decision_figure import contenders, figure_bytes
from formbuf.output.sensitivity_page import sensitivity_page
from formbuf.output.writers import render
from formbuf.product.brief import Completed, complete

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow


@pytest.fixture(scope="module")
def completed() -> Completed:
    return complete(brief(drug={"kind": "small_molecule"}), library())


@pytest.fixture(scope="module")
def chart(completed: Completed) -> DecisionMap:
    return decision_map(completed, reach_ph=0.4, step_ph=0.2)


def test_moving_nothing_is_the_shortlist(completed: Completed) -> None:
    plain = shortlist(brief(drug={"kind": "small_molecule"}), library())
    ranked = ranked_with(completed, Variation())

    assert [(c.key, c.desirability) for c in ranked] == [
        (c.key, c.desirability) for c in plain.candidates
    ]


def test_a_moved_target_is_the_brief_with_that_target(completed: Completed) -> None:
    moved = ranked_with(completed, Variation(target_shift_ph=0.5))
    stated = brief(
        drug={"kind": "small_molecule"}, ph={"target": 6.5, "low": 6.2, "high": 6.8}
    )
    again = shortlist(stated, library())

    assert [c.key for c in moved] == [c.key for c in again.candidates]
    assert heads_of(moved)[0].desirability == pytest.approx(
        again.heads[0].desirability, rel=1e-9
    )


def test_ceilings_are_those_of_every_species_times_the_factor() -> None:
    doubled = with_ceilings(library(), 2.0)
    for key, row in library().precedents.items():
        if row.ceiling_mmol_l is not None:
            assert doubled.precedents[key].ceiling_mmol_l == 2.0 * row.ceiling_mmol_l


def test_more_load_asks_for_more_buffer(completed: Completed) -> None:
    one = heads_of(ranked_with(completed, Variation()))[0]
    more = ranked_with(completed, Variation(acid_factor=3.0, base_factor=3.0))
    same = next(c for c in more if c.key == one.key)

    assert same.required_mmol_l is not None
    assert one.required_mmol_l is not None
    assert same.required_mmol_l == pytest.approx(3.0 * one.required_mmol_l, rel=0.1)


def test_the_map_goes_both_ways_and_holds_the_brief_itself(
    completed: Completed, chart: DecisionMap
) -> None:
    here = next(p for p in chart.points if p.target_ph == chart.target_ph)
    lead = heads_of(ranked_with(completed, Variation()))[0]

    assert [p.target_ph for p in chart.points] == [5.6, 5.8, 6.0, 6.2, 6.4]
    assert here.lead is not None
    assert (here.lead.system, here.lead.desirability) == (lead.key, lead.desirability)
    assert here.backup is not None
    assert here.backup.desirability <= here.lead.desirability


def test_the_map_stops_at_the_ends_of_the_scale() -> None:
    low = complete(brief(ph={"target": 1.5, "low": 1.2, "high": 1.8}), library())
    found = decision_map(low, reach_ph=1.0, step_ph=0.5)

    assert [p.target_ph for p in found.points] == [1.0, 1.5, 2.0, 2.5]


@pytest.mark.parametrize(("reach", "step"), [(1.0, 0.0), (0.1, 0.2), (1.0, 0.001)])
def test_maps_that_are_refused(completed: Completed, reach: float, step: float) -> None:
    with pytest.raises(InputError, match="allowed a step"):
        decision_map(completed, reach_ph=reach, step_ph=step)


def test_a_figure_of_the_map_is_the_same_twice_and_names_the_leads(
    chart: DecisionMap,
) -> None:
    svg = figure_bytes(chart, "svg")

    assert svg == figure_bytes(chart, "svg")
    assert figure_bytes(chart, "png").startswith(b"\x89PNG")
    for name in contenders(chart).values():
        assert name.split()[0] in svg.decode()


def test_a_map_without_candidates_can_be_drawn(chart: DecisionMap) -> None:
    empty = dataclasses.replace(
        chart, points=tuple(dataclasses.replace(p, places=()) for p in chart.points)
    )

    assert b"none" in figure_bytes(empty, "svg")


@pytest.mark.slow
def test_the_lead_changes_where_it_is_said_to(
    completed: Completed, chart: DecisionMap
) -> None:
    found = sensitivity(completed)
    lead = heads_of(ranked_with(completed, Variation()))[0]
    changes = [r for r in found.requirements if r.needed is not None]

    assert found.lead == lead.key
    assert changes
    for change in found.requirements:
        for beyond in (False, True):
            now = _lead_at(completed, change.requirement, change, beyond=beyond)
            if change.needed is None:
                assert now == lead.key
            else:
                assert (now != lead.key) == beyond
    _show_every_format(found, chart)


def _lead_at(
    completed: Completed, name: str, change: object, *, beyond: bool
) -> str | None:
    """Lead just before a change (or at its limit), or just beyond it."""
    needed, value = change.needed, change.value  # type: ignore[attr-defined]
    at = change.limit if needed is None else needed  # type: ignore[attr-defined]
    if name == "target_ph":
        shift = at - value
        if needed is not None and not beyond:
            shift -= math.copysign(0.011, shift)
        variation = Variation(target_shift_ph=shift)
    else:
        log = math.log(at / value)
        if needed is not None and not beyond:
            log -= math.copysign(0.031, log)
        key = {"acid_load": "acid", "base_load": "base"}.get(name, "ceiling")
        variation = Variation(**{f"{key}_factor": math.exp(log)})
    heads = heads_of(ranked_with(completed, variation))
    return heads[0].key if heads else None


def _show_every_format(found: Sensitivity, chart: DecisionMap) -> None:
    page = sensitivity_page(found, chart, library())
    data = json.loads(render(page, "json"))

    assert data["schema"] == "formbuf.sensitivity/1"
    assert len(data["decision_map"]["points"]) == len(chart.points)
    assert found.lead_name in render(page, "table")
    assert "| Target pH |" in render(page, "markdown")
    assert render(page, "csv").count("\n") == 1 + sum(
        len(p.places) for p in chart.points
    )
