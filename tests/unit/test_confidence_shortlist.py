"""Confidence of a whole shortlist: what is promised of every result."""

from __future__ import annotations

import json

import numpy as np
import pytest
from confidence_support import brief, library, result

from formbuf.advice.chance_records import Chance
from formbuf.advice.confidence import with_confidence
from formbuf.advice.draw_candidate import draw_candidate, prepare_draws
from formbuf.advice.results import Candidate, Shortlist
from formbuf.advice.sampling import Sampler
from formbuf.advice.shortlist import shortlist
from formbuf.errors import InputError, UnknownNameError
from formbuf.output.confidence_page import confidence_rows, percent
from formbuf.output.serialise import shortlist_dict
from formbuf.output.shortlist_page import shortlist_page
from formbuf.output.writers import render

SILENT = {
    "weighing_relative": 0.0,
    "volume_relative": 0.0,
    "fill_temperature_k": 0.0,
    "meter_ph": 0.0,
    "reading_temperature_k": 0.0,
    "load_relative": 0.0,
    "activity_floor_ph": 0.0,
    "activity_slope_kg_mol": 0.0,
}


@pytest.fixture(scope="module")
def drawn() -> Shortlist:
    return with_confidence(result())


def _text(found: Shortlist) -> str:
    return json.dumps(shortlist_dict(found), allow_nan=False)


def _every_chance(found: Shortlist) -> list[Chance]:
    chances = []
    for c in found.candidates:
        k = c.confidence
        if k is None:
            continue
        for ranks in (k.ranks, k.ranks_around, k.ranks_any):
            chances += list(ranks.ranks) if ranks else []
        one = (k.within_at_release, k.within_at_end, k.carries_loads, k.over_head)
        chances += [x for x in one if x is not None]
        chances += [t.within_at_end for t in k.temperatures if t.within_at_end]
    return chances


def test_the_same_seed_gives_the_same_bytes(drawn: Shortlist) -> None:
    assert _text(with_confidence(result())) == _text(drawn)


def test_different_seeds_differ_within_the_stated_standard_error(
    drawn: Shortlist,
) -> None:
    other = with_confidence(result(), seed=2)
    pairs = list(zip(_every_chance(drawn), _every_chance(other), strict=True))
    ratios = np.array(
        [
            (a.value - b.value) / np.hypot(a.standard_error, b.standard_error)
            for a, b in pairs
        ]
    )
    print(f"{ratios.size} chances, rms {np.sqrt(np.mean(ratios**2)):.2f}")

    assert _text(other) != _text(drawn)
    assert ratios.size > 50
    # an even spread keeps below the error of independent draws, never far above
    assert np.max(np.abs(ratios)) < 4.0
    assert np.sqrt(np.mean(ratios**2)) < 1.2


def test_the_standard_error_is_at_most_a_hundredth(drawn: Shortlist) -> None:
    found = drawn.confidence
    assert found is not None

    assert all(c.standard_error <= 0.01 for c in _every_chance(drawn))
    assert found.largest_standard_error <= 0.01
    assert "0.010" in found.statement
    assert "2500 draws, seed 1" in found.statement


def test_the_antithetic_set_gives_the_same_chances(drawn: Shortlist) -> None:
    mirrored = with_confidence(result(), sampler=Sampler(2500, 1, mirrored=True))
    pairs = zip(_every_chance(drawn), _every_chance(mirrored), strict=True)

    for one, other in pairs:
        error = np.hypot(one.standard_error, other.standard_error)
        assert abs(one.value - other.value) < 4.0 * error


def test_a_candidate_draws_the_same_whoever_else_is_there(drawn: Shortlist) -> None:
    """Without sodium citrate, and in another order, the others keep every figure."""
    fewer = shortlist(brief(exclude=["sodium_citrate"]), library())
    alone = with_confidence(fewer).candidate("histidine_hydrochloride")
    among = drawn.candidate("histidine_hydrochloride")
    assert alone is not None
    assert among is not None
    assert alone.confidence is not None
    assert among.confidence is not None

    assert alone.confidence.temperatures == among.confidence.temperatures
    assert alone.confidence.within_at_end == among.confidence.within_at_end
    assert alone.confidence.required_mmol_l == among.confidence.required_mmol_l


def test_chances_of_the_ranks_sum_to_one(drawn: Shortlist) -> None:
    heads = [c.confidence for c in drawn.heads]
    for name in ("ranks", "ranks_around", "ranks_any"):
        table = np.array(
            [[x.value for x in getattr(k, name).ranks] for k in heads if k is not None]
        )

        assert table.shape == (len(heads), len(heads))
        assert table.sum(axis=0) == pytest.approx(1.0, abs=1e-9)
        assert table.sum(axis=1) == pytest.approx(1.0, abs=1e-9)


def test_candidates_keep_their_order_and_dropped_ones_have_no_confidence(
    drawn: Shortlist,
) -> None:
    assert [c.key for c in drawn.candidates] == [c.key for c in result().candidates]
    for c in drawn.candidates:
        assert (c.confidence is None) == (c.standing == "screened out")


def test_ties_come_from_the_flips(drawn: Shortlist) -> None:
    found = drawn.confidence
    assert found is not None
    expected = {
        frozenset((f.first, f.second))
        for f in found.flips
        if f.chance.value > found.tie_share
    }
    said = {frozenset((c.key, other)) for c in drawn.heads for other in c.tied_with}

    assert found.tie_share == 0.25
    assert said == expected


def test_the_verdict_says_how_often_the_lead_leads(drawn: Shortlist) -> None:
    lead = drawn.heads[0]
    assert lead.confidence is not None
    assert lead.confidence.ranks is not None
    share = 100.0 * lead.confidence.ranks.lead.value

    assert f"The lead comes first in {share:.0f} % of 2500 draws" in drawn.verdict
    assert drawn.verdict.startswith(f"Lead: {lead.concentration_mmol_l:g} mmol/L")


def test_intervals_hold_the_nominal_ph_and_nest(drawn: Shortlist) -> None:
    for c in drawn.ranked:
        assert c.confidence is not None
        for state, found in zip(c.states, c.confidence.temperatures, strict=True):
            ph = found.ph

            assert state.temperature_c == found.temperature_c
            assert ph.low_95 < state.ph < ph.high_95
            assert ph.low_95 < ph.low_90 < ph.low_50 < ph.median
            assert ph.median < ph.high_50 < ph.high_90 < ph.high_95


def test_a_tris_product_is_less_sure_cold_than_where_it_is_read() -> None:
    alkaline = shortlist(brief(ph={"target": 8.0}, require=["tris"]), library())
    tris = with_confidence(alkaline).candidate("tris_hydrochloride")
    assert tris is not None
    assert tris.confidence is not None
    cold, warm = tris.confidence.at(5.0), tris.confidence.at(25.0)
    assert cold is not None
    assert warm is not None

    assert cold.ph.median - warm.ph.median == pytest.approx(0.56, abs=0.05)
    assert cold.ph.deviation > warm.ph.deviation


def test_without_errors_nothing_is_left_to_chance() -> None:
    species = list(library().species)[:40]
    stated = {
        **SILENT,
        **{k: dict.fromkeys(species, 0.0) for k in ("pka", "dh_kj_mol", "dcp_j_mol_k")},
    }
    exact = shortlist(brief(uncertainty=stated), library())
    found = with_confidence(exact, draws=200).candidate("histidine_hydrochloride")
    assert found is not None
    assert found.confidence is not None
    k = found.confidence

    assert k.read_ph is not None
    assert k.read_ph.high_95 - k.read_ph.low_95 < 1e-6
    assert k.required_mmol_l is not None
    assert k.required_mmol_l.median == pytest.approx(found.required_mmol_l, rel=1e-5)
    assert k.carries_loads is not None
    assert k.carries_loads.value == 1.0
    assert k.within_at_end is not None
    assert k.within_at_end.value == 1.0


def _draw(found: Shortlist, key: str) -> tuple[Candidate, object]:
    candidate = found.candidate(key)
    assert candidate is not None
    return candidate, draw_candidate(prepare_draws(found, Sampler()), candidate)


def test_loads_move_ph_as_the_solver_says() -> None:
    """Heavy acid makes leaving the window certain; none makes staying certain."""
    heavy = shortlist(
        brief(
            loads={"acid_mmol_l": 5.0, "base_mmol_l": 0.0},
            candidate=[{"system": "sodium_citrate", "concentration_mmol_l": 5.0}],
            container={"type": "glass_vial", "count_alkali": False},
        ),
        library(),
    )
    own = next(c for c in heavy.candidates if c.is_own_formula)
    _, made = _draw(heavy, own.key)

    assert made is not None
    assert not any(v.any() for v in made.within_end.values())  # type: ignore[attr-defined]


def test_an_adjusted_preparation_takes_the_pka_out_of_the_reading() -> None:
    weighed = shortlist(brief(uncertainty={"pka": {"histidine": 0.1}}), library())
    adjusted = shortlist(
        brief(uncertainty={"pka": {"histidine": 0.1}, "preparation": "adjusted"}),
        library(),
    )
    spreads = []
    for found in (weighed, adjusted):
        drawn = with_confidence(found).candidate("histidine_hydrochloride")
        assert drawn is not None
        assert drawn.confidence is not None
        assert drawn.confidence.read_ph is not None
        spreads.append(drawn.confidence.read_ph.deviation)

    assert spreads[0] > 0.1
    # end point, and a meter and a temperature at preparation and again at release
    assert spreads[1] < 0.06


def test_what_to_measure_names_the_largest_share_first(drawn: Shortlist) -> None:
    found = drawn.confidence
    assert found is not None
    texts = [q.quantity for q in found.shares]

    assert len(texts) == 3
    assert "as read at release, 25 C" in texts[0]
    assert "at 5 C" in texts[1]
    assert "over" in texts[2]
    for quantity in found.shares:
        shares = [one.share for one in quantity.inputs]

        assert shares == sorted(shares, reverse=True)
        assert sum(shares) + quantity.rest == pytest.approx(1.0, abs=0.05)
        assert all(one.advice for one in quantity.inputs)


def test_an_uncertainty_of_an_unknown_species_is_refused() -> None:
    wrong = shortlist(brief(uncertainty={"pka": {"histidin": 0.1}}), library())

    with pytest.raises(UnknownNameError, match="histidin"):
        with_confidence(wrong)


@pytest.mark.parametrize(
    ("table", "text"),
    [
        ({"meter_ph": -0.1}, "meter_ph"),
        ({"preparation": "guessed"}, "preparation"),
        ({"pka": {"tris": 5.0}}, "tris"),
        ({"nonsense": 1.0}, "nonsense"),
    ],
)
def test_an_uncertainty_that_is_not_allowed_is_refused(
    table: dict[str, object], text: str
) -> None:
    with pytest.raises(InputError, match=text):
        brief(uncertainty=table)


@pytest.mark.parametrize("format_", ["table", "markdown", "csv", "json"])
def test_every_format_shows_it(drawn: Shortlist, format_: str) -> None:
    text = render(shortlist_page(drawn), format_)  # type: ignore[arg-type]
    without = render(shortlist_page(result()), format_)  # type: ignore[arg-type]
    word = {"csv": "lead_chance", "json": '"confidence"'}.get(format_, "Confidence")

    assert word in text
    assert word not in without


def test_rows_for_a_report_have_one_entry_per_candidate(drawn: Shortlist) -> None:
    rows = confidence_rows(drawn)

    assert [r["system"] for r in rows] == [
        c.key for c in drawn.candidates if c.confidence is not None
    ]
    assert rows[0]["ph_low_95_at_5_c"] < rows[0]["ph_high_95_at_5_c"]
    assert confidence_rows(result()) == []


@pytest.mark.parametrize(
    ("value", "shown"),
    [(0.0, "0"), (0.001, "<1"), (0.5, "50"), (0.999, ">99"), (1.0, "100")],
)
def test_chances_never_round_to_certainty(value: float, shown: str) -> None:
    assert percent(Chance(value, 0.0)) == shown
