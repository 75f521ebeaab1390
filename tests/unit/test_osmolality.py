"""Osmolality, ice and the room that water has."""

from __future__ import annotations

import numpy as np
import pytest

from formbuf.chemistry import osmolality as osmolality_module
from formbuf.chemistry.osmolality import (
    EXPECTED_ERROR_FITTED,
    OsmoticLaw,
    freezing_point_c,
    osmolality,
    osmolality_at_freezing_mosm_kg,
    water_kg_l,
)
from formbuf.chemistry.speciation import Particle
from formbuf.errors import ConvergenceError, InputError

NOTHING = OsmoticLaw({}, {})


def _salt(molality: float) -> list[Particle]:
    m = np.asarray(molality)
    return [Particle("sodium", 1, m), Particle("chloride", -1, m)]


def test_a_sugar_without_coefficient_is_ideal() -> None:
    found = osmolality([], {"sucrose": 0.3}, 25.0, NOTHING)

    assert float(found.osmolality_mosm_kg) == pytest.approx(300.0)


def test_a_sugar_with_a_coefficient() -> None:
    found = osmolality([], {"sucrose": 0.3}, 25.0, OsmoticLaw({}, {"sucrose": 0.1}))

    assert float(found.osmolality_mosm_kg) == pytest.approx(309.0)


def test_an_uncharged_state_follows_its_own_coefficient() -> None:
    law = OsmoticLaw({}, {"acetate:0": -0.05})
    found = osmolality([Particle("acetate", 0, np.asarray(0.2))], {}, 25.0, law)

    assert float(found.osmolality_mosm_kg) == pytest.approx(198.0)


def test_a_pair_coefficient_adds_its_product() -> None:
    law = OsmoticLaw({("sodium:1", "chloride:-1"): 0.02}, {})
    bare = osmolality(_salt(0.15), {}, 0.0, NOTHING)
    found = osmolality(_salt(0.15), {}, 0.0, law)
    added = float(found.osmolality_mosm_kg - bare.osmolality_mosm_kg)

    assert added == pytest.approx(1000.0 * np.log(10.0) * 0.02 * 0.15**2)


def test_pairs_without_data_are_named_and_widen_the_error() -> None:
    law = OsmoticLaw({("sodium:1", "chloride:-1"): 0.02}, {})
    known = osmolality(_salt(0.15), {}, 0.0, law)
    more = [*_salt(0.15), Particle("citrate", -2, np.asarray(0.05))]
    unknown = osmolality(more, {}, 0.0, law)

    assert known.unfitted_pairs == ()
    assert unknown.unfitted_pairs == (("sodium:1", "citrate:-2"),)
    assert float(known.expected_error_mosm_kg) == pytest.approx(
        EXPECTED_ERROR_FITTED * float(known.osmolality_mosm_kg)
    )
    assert float(unknown.expected_error_mosm_kg) > float(known.expected_error_mosm_kg)


def test_traces_are_not_named() -> None:
    found = osmolality(
        [*_salt(0.15), Particle("citrate", -2, np.asarray(0.001))],
        {},
        0.0,
        OsmoticLaw({("sodium:1", "chloride:-1"): 0.02}, {}),
    )

    assert found.unfitted_pairs == ()


def test_arrays_of_states() -> None:
    m = np.linspace(0.0, 0.3, 7)
    found = osmolality(
        [Particle("sodium", 1, m), Particle("chloride", -1, m)], {"x": m}, 0.0, NOTHING
    )

    assert found.osmolality_mosm_kg.shape == (7,)
    assert found.osmolality_mosm_kg[0] == 0.0
    assert np.all(np.diff(found.osmolality_mosm_kg) > 0.0)


def test_freezing_point_and_osmolality_are_inverse() -> None:
    osmol = np.array([0.0, 10.0, 290.0, 1500.0, 8000.0])
    t = freezing_point_c(osmol)

    assert osmolality_at_freezing_mosm_kg(t) == pytest.approx(osmol, abs=1e-5)
    assert t[2] == pytest.approx(-0.54, abs=0.005)


@pytest.mark.parametrize("value", [-1.0, 1e6, float("nan")])
def test_impossible_osmolalities_are_refused(value: float) -> None:
    with pytest.raises(InputError, match="osmolality must lie"):
        freezing_point_c(value)


def test_no_convergence_is_an_error(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(osmolality_module, "FREEZING_CAP", 1)
    with pytest.raises(ConvergenceError, match="no freezing point"):
        freezing_point_c(5000.0)


def test_water_of_a_dilute_solution() -> None:
    assert float(water_kg_l(0.0)) == pytest.approx(0.99705, abs=1e-5)
    assert float(water_kg_l(73.0, 20.0)) == pytest.approx(0.99821 * 0.927, abs=1e-4)


@pytest.mark.parametrize("volume", [-1.0, 1000.0, float("nan")])
def test_solutes_that_leave_no_water_are_refused(volume: float) -> None:
    with pytest.raises(InputError, match="mL per litre"):
        water_kg_l(volume)
