"""Single draws of a candidate against the full calculation with the same inputs."""

from __future__ import annotations

import dataclasses
from typing import Any

import numpy as np
import pytest
from confidence_support import brief, library, silent, with_pka

from formbuf.advice.case import case_for
from formbuf.advice.draw_candidate import (
    CandidateDraws,
    Draws,
    draw_candidate,
    prepare_draws,
)
from formbuf.advice.results import Candidate, Shortlist
from formbuf.advice.sampling import Sampler
from formbuf.advice.shortlist import shortlist
from formbuf.advice.sizing import size
from formbuf.library import Library
from formbuf.product.brief import complete

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

SPECIES = (
    "histidine",
    "citrate",
    "phosphate",
    "acetate",
    "succinate",
    "tris",
    "borate",
)
LOADS = {"acid_mmol_l": 0.4, "base_mmol_l": 0.2}
GLASS = {"type": "glass_vial", "count_alkali": False}


def _draws(found: Shortlist, **pka: float) -> Draws:
    """Draws in which only some pKa are uncertain."""
    shared = prepare_draws(found, Sampler(2500, 1))
    model = with_pka(silent(*SPECIES), **pka)
    acid, base = found.loads.acid_mmol_l, found.loads.base_mmol_l
    return dataclasses.replace(
        shared,
        model=model,
        acid_mmol_l=np.full(2500, acid),
        base_mmol_l=np.full(2500, base),
    )


def _made(draws: Draws, candidate: Candidate) -> CandidateDraws:
    made = draw_candidate(draws, candidate)
    assert made is not None
    return made


def _shifted(species: str, by: float) -> Library:
    """The library with every pKa of a species moved."""
    known = library().species[species]
    steps = tuple(
        dataclasses.replace(s, pka=dataclasses.replace(s.pka, value=s.pka.value + by))
        for s in known.steps
    )
    moved = {**library().species, species: dataclasses.replace(known, steps=steps)}
    return dataclasses.replace(library(), species=moved)


def _candidate(found: Shortlist, key: str) -> Candidate:
    candidate = found.candidate(key)
    assert candidate is not None
    return candidate


@pytest.mark.parametrize("wanted", [-0.15, 0.1])
def test_the_required_amount_of_a_draw_is_that_of_a_new_sizing(wanted: float) -> None:
    """Acetate at pH 5.2: the draw nearest a shift of its pKa against sizing anew."""
    asked: Any = brief(ph={"target": 5.2}, loads=LOADS, container=GLASS)
    found = shortlist(asked, library())
    candidate = _candidate(found, "sodium_acetate")
    draws = _draws(found, acetate=0.1)
    made = _made(draws, candidate)
    shifts = 0.1 * draws.sampler.normal("acetate:1:pka")
    k = int(np.argmin(np.abs(shifts - wanted)))
    case = case_for(complete(asked, _shifted("acetate", float(shifts[k]))))
    again = size(
        case.library,
        candidate.system,
        case.brief,
        case.loads,
        case.surroundings,
        case.law,
        case.settings,
    )
    print(
        f"drawn {made.required_mmol_l[k]:.3f}, sized anew {again.required_mmol_l:.3f}"
    )

    assert made.required_mmol_l[k] == pytest.approx(again.required_mmol_l, rel=0.02)
    assert again.required_mmol_l != pytest.approx(candidate.required_mmol_l, rel=0.03)


def test_the_ph_of_a_draw_is_that_of_the_solver_with_the_same_pka() -> None:
    found = shortlist(brief(), library())
    candidate = _candidate(found, "sodium_citrate")
    draws = _draws(found, citrate=0.05)
    made = _made(draws, candidate)
    assert candidate.mixture is not None
    (ladder,) = candidate.mixture.ladders
    for k in (0, 700, 2499):
        shifts = [0.05 * draws.sampler.normal(f"citrate:{n}:pka")[k] for n in (1, 2, 3)]
        moved = dataclasses.replace(
            candidate.mixture,
            ladders=(
                dataclasses.replace(ladder, pka=tuple(np.array(ladder.pka) + shifts)),
            ),
        )

        assert made.ph[5.0][k] == pytest.approx(float(moved.solve(5.0).ph), abs=1e-8)


@pytest.mark.parametrize(("acid", "base"), [(0.5, 0.0), (0.0, 0.5), (3.0, 3.0)])
def test_the_end_of_shelf_life_is_the_product_with_its_load(
    acid: float, base: float
) -> None:
    """At 5 C the window moves with the drift; either load alone must keep within."""
    found = shortlist(
        brief(
            loads={"acid_mmol_l": acid, "base_mmol_l": base},
            container=GLASS,
            candidate=[{"system": "sodium_citrate", "concentration_mmol_l": 8.0}],
        ),
        library(),
    )
    own = next(c for c in found.candidates if c.is_own_formula)
    made = _made(_draws(found), own)
    mixed, ph = own.mixture, found.brief.ph
    assert mixed is not None
    for t in (25.0, 5.0):
        drift = float(mixed.solve(t).ph - mixed.solve(25.0).ph)
        water = 1000.0 * float(mixed.water_kg_l)
        ends = [
            float(mixed.with_ion("chloride", -1, acid / water).solve(t).ph) - drift,
            float(mixed.with_ion("potassium", 1, base / water).solve(t).ph) - drift,
        ]
        inside = all(ph.low <= end <= ph.high for end in ends)
        print(f"{t:g} C: {ends[0]:.3f} and {ends[1]:.3f}, inside {inside}")

        assert np.all(made.within_end[t] == inside)


def test_a_stated_storage_window_counts_as_it_is() -> None:
    """Tris at 5 C reads half a unit higher: outside a window of its own there."""
    window = {"target": 8.0, "low": 7.7, "high": 8.3}
    free = shortlist(brief(ph=window, require=["tris"]), library())
    bound = shortlist(
        brief(
            ph={**window, "storage_low": 7.7, "storage_high": 8.3},
            require=["tris"],
            override=[
                {
                    "rule": "storage_window",
                    "reason": "kept here for comparison",
                    "name": "A. Tester",
                    "date": "2026-01-31",
                }
            ],
        ),
        library(),
    )
    for found, expected in ((free, True), (bound, False)):
        made = _made(_draws(found), _candidate(found, "tris_hydrochloride"))

        assert bool(made.within_end[5.0].any()) == expected


def test_groups_of_a_protein_change_what_it_buffers_not_where_it_sits() -> None:
    found = shortlist(
        brief(
            drug={
                "kind": "antibody",
                "concentration_mg_ml": 100.0,
                "molar_mass_g_mol": 148000.0,
                "residues": {"histidine": 26, "aspartate": 60, "glutamate": 70},
            }
        ),
        library(),
    )
    candidate = _candidate(found, "histidine_hydrochloride")
    quiet, loud = (
        dataclasses.replace(
            _draws(found), model=silent(*SPECIES, protein_group_pka=spread)
        )
        for spread in (0.0, 0.3)
    )
    still, made = _made(quiet, candidate), _made(loud, candidate)

    assert any(ladder.is_macro_ion for ladder in candidate.mixture.ladders)  # type: ignore[union-attr]
    assert made.ph[25.0].std() < 0.01
    assert made.capacity_mmol_l_ph.std() > 0.01 * still.capacity_mmol_l_ph.mean()
    assert still.capacity_mmol_l_ph.std() == pytest.approx(0.0, abs=1e-9)


def test_osmolality_spreads_as_the_osmotic_model_expects() -> None:
    found = shortlist(brief(), library())
    candidate = _candidate(found, "sodium_citrate")
    draws = _draws(found)
    made = _made(draws, candidate)
    mixed = candidate.mixture
    assert mixed is not None
    expected = mixed.osmolality(25.0, mixed.solve(25.0), draws.law)

    assert made.osmolality_mosm_kg.mean() == pytest.approx(
        candidate.osmolality_mosm_kg, rel=1e-4
    )
    assert made.osmolality_mosm_kg.std() == pytest.approx(
        float(expected.expected_error_mosm_kg), rel=1e-6
    )


def test_loads_spread_about_their_median() -> None:
    found = shortlist(brief(loads={"acid_mmol_l": 0.4}, container=GLASS), library())
    shared = prepare_draws(found, Sampler(2500, 1))

    assert np.median(shared.acid_mmol_l) == pytest.approx(0.4, rel=1e-3)
    assert np.log(shared.acid_mmol_l).std() == pytest.approx(0.25, rel=1e-3)
    assert np.log(shared.base_mmol_l).std() == pytest.approx(0.5, rel=1e-3)
    assert {"load:acid over shelf life", "load:base over shelf life"} == set(
        shared.load_inputs
    )


def test_a_product_without_anything_to_solve_is_not_drawn() -> None:
    found = shortlist(brief(drug={"kind": "none"}), library())
    arm = _candidate(found, "none")

    assert draw_candidate(_draws(found), arm) is None
