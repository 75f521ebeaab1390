"""Chances, weights, shares and ties: against what is known of them exactly."""

from __future__ import annotations

import math
from statistics import NormalDist

import numpy as np
import pytest
from confidence_support import result
from hypothesis import given
from hypothesis import strategies as st

from formbuf.advice.criteria_table import Anchors
from formbuf.advice.desirability import geometric_mean, scaled
from formbuf.advice.draw_criteria import overall, scaled_log
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
from formbuf.advice.sampling import Sampler
from formbuf.advice.variance_shares import first_order_share, quantity_shares
from formbuf.advice.weight_changes import weight_changes

SAMPLER = Sampler(2500, 1)


def _scores(*means: float, spread: float = 0.1) -> np.ndarray:
    return np.stack(
        [m + spread * SAMPLER.normal(f"score {k}") for k, m in enumerate(means)]
    )


def test_chances_of_the_ranks_sum_to_one_both_ways() -> None:
    found = rank_chances(_scores(-0.1, -0.15, -0.2, -0.9))

    for one in found:
        assert sum(c.value for c in one.ranks) == pytest.approx(1.0, abs=1e-12)
    for rank in range(4):
        total = sum(one.ranks[rank].value for one in found)
        assert total == pytest.approx(1.0, abs=1e-12)
    assert [one.lead.value for one in found] == [one.ranks[0].value for one in found]


def test_a_chance_is_that_of_the_normal_distribution() -> None:
    """Two independent normal scores: the second wins with Phi(-gap / (s sqrt 2))."""
    scores = _scores(0.0, -0.1)
    expected = NormalDist().cdf(-0.1 / (0.1 * math.sqrt(2.0)))
    (flip,) = flips(["a", "b"], scores)

    assert flip.chance.value == pytest.approx(expected, abs=3 * 0.01)
    assert rank_chances(scores)[1].lead.value == flip.chance.value


def test_expected_loss_is_zero_for_who_always_leads() -> None:
    found = rank_chances(np.array([[0.0, 0.0], [math.log(0.5), math.log(0.25)]]))

    assert found[0].expected_loss == 0.0
    assert found[1].expected_loss == pytest.approx((0.5 + 0.75) / 2)


def test_equal_scores_rank_in_the_order_given() -> None:
    found = rank_chances(np.zeros((3, 10)))

    assert [one.ranks[k].value for k, one in enumerate(found)] == [1.0, 1.0, 1.0]


def test_the_order_of_candidates_does_not_matter() -> None:
    scores = _scores(-0.1, -0.15, -0.2)
    forward, backward = rank_chances(scores), rank_chances(scores[::-1])

    for one, other in zip(forward, reversed(backward), strict=True):
        assert one == other


@pytest.mark.parametrize("count", [2500, 10_000])
def test_standard_errors_are_those_of_a_count(count: int) -> None:
    half = chance(np.arange(count) < count // 2)
    never = chance(np.zeros(count, dtype=bool))

    assert half.standard_error == pytest.approx(0.5 / math.sqrt(count), rel=1e-3)
    assert half.standard_error <= 0.01
    assert never.value == 0.0
    assert 0.0 < never.standard_error < 1.0 / count


def test_ties_are_pairs_that_flip_in_more_than_a_quarter_of_draws() -> None:
    found = flips(["a", "b", "c"], _scores(0.0, -0.05, -0.5))
    partners = tied(found, 0.25)

    assert {(f.first, f.second) for f in found} == {("a", "b"), ("a", "c"), ("b", "c")}
    assert partners == {"a": ("b",), "b": ("a",), "c": ()}


def test_ties_need_not_pass_on() -> None:
    partners = tied(flips(["a", "b", "c"], _scores(0.0, -0.09, -0.18)), 0.25)

    assert partners == {"a": ("b",), "b": ("a", "c"), "c": ("b",)}


def test_any_weights_are_uniform_on_the_simplex() -> None:
    """Each of three normalised weights has mean 1/3 and variance 1/18."""
    drawn = any_weights(SAMPLER, ("a", "b", "c"))
    stacked = np.stack(list(drawn.values()))
    shares = stacked / stacked.sum(axis=0)

    assert shares.mean(axis=1) == pytest.approx(1 / 3, abs=0.01)
    assert shares.var(axis=1) == pytest.approx(1 / 18, rel=0.06)
    assert np.mean(shares[0] > 0.5) == pytest.approx(0.25, abs=0.03)


def test_weights_around_the_given_keep_their_mean_and_zero() -> None:
    given_weights = {"a": 2.0, "b": 1.0, "c": 1.0, "d": 0.0}
    drawn = weights_around(SAMPLER, given_weights, 24.0)
    stacked = np.stack(list(drawn.values()))
    shares = stacked / stacked.sum(axis=0)
    p = np.array([0.5, 0.25, 0.25])

    assert shares.mean(axis=1)[:3] == pytest.approx(p, abs=0.01)
    assert shares.std(axis=1)[:3] == pytest.approx(np.sqrt(p * (1 - p) / 25), rel=0.06)
    assert np.all(shares[3] == 0.0)


def test_the_score_is_the_weighted_geometric_mean() -> None:
    values = {"capacity": 0.9, "precedent": 0.4, "drift": 1.0}
    weights = {"capacity": 1.0, "precedent": 2.0, "drift": 0.5, "other": 7.0}
    logs = {name: np.full(3, math.log(v)) for name, v in values.items()}

    assert np.exp(overall(logs, weights, 3)) == pytest.approx(
        geometric_mean(values, weights)
    )
    assert score_table([logs, logs], weights, 3).shape == (2, 3)


@given(
    value=st.floats(0.0, 100.0),
    full=st.floats(0.01, 5.0),
    width=st.floats(0.1, 50.0),
    scale=st.sampled_from(["linear", "log"]),
)
def test_desirabilities_of_draws_are_those_of_single_values(
    value: float, full: float, width: float, scale: str
) -> None:
    anchors = Anchors(full, full + width, scale, "1")  # type: ignore[arg-type]
    drawn = scaled_log(np.array([value]), anchors, full + width, 0.05)

    assert math.exp(drawn[0]) == pytest.approx(
        scaled(value, anchors, full + width, 0.05), rel=1e-9
    )


def test_a_value_without_end_is_at_the_floor() -> None:
    anchors = Anchors(5.0, 50.0, "log", "mmol/L")

    assert math.exp(scaled_log(np.array([np.inf]), anchors, 50.0, 0.05)[0]) == (
        pytest.approx(0.05)
    )


def test_shares_of_a_sum_are_those_of_its_terms() -> None:
    """y = 3 a + 2 b + c: shares 9/14, 4/14 and 1/14."""
    y = 3 * SAMPLER.normal("a") + 2 * SAMPLER.normal("b") + SAMPLER.normal("c")
    inputs = {n: Input(n, n, "", 1.0, "1") for n in ("c", "a", "b", "nothing")}
    found = quantity_shares("y", y, inputs, SAMPLER)
    shares = {one.name: one.share for one in found.inputs}

    assert list(shares) == ["a", "b", "c"]
    assert shares["a"] == pytest.approx(9 / 14, abs=0.03)
    assert shares["b"] == pytest.approx(4 / 14, abs=0.03)
    assert shares["c"] == pytest.approx(1 / 14, abs=0.03)
    assert found.rest < 0.05


def test_shares_see_what_is_not_linear_and_leave_interplay_to_the_rest() -> None:
    a, b = SAMPLER.normal("a"), SAMPLER.normal("b")

    assert first_order_share(a * a, SAMPLER.order("a")) > 0.9
    assert first_order_share(a * b, SAMPLER.order("a")) < 0.05
    assert first_order_share(np.ones(2500), SAMPLER.order("a")) == 0.0


def test_at_the_weight_needed_lead_and_rival_are_level() -> None:
    shortlist = result()
    weights = shortlist.settings.weights
    found = weight_changes(shortlist.heads, weights)
    moved = [w for w in found if w.needed is not None]

    assert {w.criterion for w in found} == set(shortlist.heads[0].criteria)
    assert moved
    for one in moved:
        changed = {**weights, one.criterion: one.needed}
        lead, rival = shortlist.heads[0], shortlist.candidate(one.new_lead or "")
        assert rival is not None
        values = [
            geometric_mean(
                {n: c.desirability for n, c in who.criteria.items()},
                changed,  # type: ignore[arg-type]
            )
            for who in (lead, rival)
        ]
        assert values[0] == pytest.approx(values[1], rel=1e-9)


def test_no_smaller_change_of_a_weight_changes_the_lead() -> None:
    shortlist = result()
    weights = shortlist.settings.weights
    for one in weight_changes(shortlist.heads, weights):
        if one.needed is None:
            continue
        middle = weights[one.criterion] + 0.99 * (one.needed - weights[one.criterion])
        changed = {**weights, one.criterion: middle}
        best = max(
            shortlist.heads,
            key=lambda c: geometric_mean(
                {n: x.desirability for n, x in c.criteria.items()}, changed
            ),
        )
        assert best.key == shortlist.heads[0].key
