"""The freezing paths: balances, complementarity, invariance, events."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest
from freezing_support import DSP, MSP, brine, contents, ladder, path

from formbuf.chemistry.freezing import freeze_path, thaw_path, unfrozen_ph
from formbuf.chemistry.freezing_prepare import prepare
from formbuf.chemistry.freezing_records import (
    Assumption,
    FreezingContents,
    FreezingPath,
)
from formbuf.constants import WATER_MOLAR_MASS_KG_MOL

SALINE = {"phosphate": 0.01, "sodium": 0.15, "chloride": 0.15}
SUGAR = {"phosphate": 0.05, "sucrose": 0.25}
DOWN = (-0.3, -0.6, -1.0, -2.0, -4.0, -7.0, -9.0)
BOTH: tuple[Assumption, ...] = ("crystallising", "supersaturated")


def _ph(run: FreezingPath, i: int = 0) -> float:
    ph = run.points[i].ph
    assert ph is not None
    return ph


@pytest.mark.parametrize("assumption", BOTH)
@pytest.mark.parametrize(
    ("amounts", "model"),
    [
        ({"phosphate": 0.05}, "sodium"),
        (SALINE, "sodium"),
        (SUGAR, "sodium"),
        ({"phosphate": 0.08}, "potassium"),
    ],
)
def test_water_and_components_are_conserved(
    amounts: dict[str, float], model: str, assumption: Assumption
) -> None:
    solids = {s.id: s for s in brine(model).solids}
    run = path(amounts, 7.2, DOWN, model=model, assumption=assumption)
    totals = dict(amounts)
    totals[run.titrant] = totals.get(run.titrant, 0.0) + run.titrant_mol_kg
    for point in run.points:
        assert point.unfrozen_water_g_kg is not None
        assert point.ice_fraction is not None
        w = point.unfrozen_water_g_kg / 1000.0
        water = w + point.ice_fraction
        for name, amount in point.solids.items():
            water += solids[name].waters * amount * WATER_MOLAR_MASS_KG_MOL
        assert water == pytest.approx(1.0, abs=1e-9)
        for name, total in totals.items():
            held = w * point.liquid_mol_kg[name] + sum(
                solids[s].components.get(name, 0.0) * x for s, x in point.solids.items()
            )
            assert held == pytest.approx(total, abs=1e-9)


@pytest.mark.parametrize(("amounts", "ph"), [({"phosphate": 0.05}, 7.4), (SALINE, 7.4)])
def test_amounts_and_saturation_are_complementary(
    amounts: dict[str, float], ph: float
) -> None:
    run = path(amounts, ph, np.linspace(-0.2, -20.0, 60))
    for point in run.points:
        for name, log_ratio in point.saturation.items():
            amount = point.solids.get(name, 0.0)
            assert amount >= 0.0
            assert log_ratio <= 1e-9
            assert amount * abs(log_ratio) < 1e-9


def test_charge_is_balanced_in_every_liquid() -> None:
    mixture = contents(SALINE, 7.4)
    net = prepare(mixture, brine("sodium"), with_solids=True).net
    run = freeze_path(mixture, DOWN, brine=brine("sodium"))
    for point in run.points:
        m = np.array([point.species_mol_kg[name] for name in net.species])
        assert float(net.charges @ m) == pytest.approx(0.0, abs=1e-9 * float(m.sum()))


def test_start_does_not_matter_with_ice_and_one_salt() -> None:
    # two components and water, ice and one salt: pH is a function of temperature
    at = (-2.5, -4.0, -8.0)
    starts = [(0.02, 7.4), (0.1, 7.4), (0.1, 6.2), (0.008, 6.8)]
    runs = [path({"phosphate": c}, ph, at) for c, ph in starts]
    for i, t in enumerate(at):
        found = [_ph(run, i) for run in runs]
        print(f"{t} C: {', '.join(f'{x:.4f}' for x in found)}")
        assert max(found) - min(found) < 0.02
        for run in runs:
            assert run.points[i].solids.keys() == {DSP}


@pytest.mark.parametrize("assumption", BOTH)
def test_without_ice_nothing_changes(assumption: Assumption) -> None:
    mixture = contents({"phosphate": 0.1}, 7.4)
    run = freeze_path(
        mixture, [-0.1, -0.3], assumption=assumption, brine=brine("sodium")
    )
    still = unfrozen_ph(mixture, [-0.1, -0.3], brine=brine("sodium"))
    for point, ph in zip(run.points, still, strict=True):
        assert point.state == "liquid"
        assert point.ice_fraction == 0.0
        assert point.unfrozen_water_g_kg == pytest.approx(1000.0, abs=1e-6)
        assert point.ph == pytest.approx(ph, abs=1e-9)
    assert run.event("first ice") is None


@pytest.mark.parametrize(
    "amounts", [{"phosphate": 0.05}, SALINE, SUGAR, {"sodium": 0.15, "chloride": 0.15}]
)
@pytest.mark.parametrize("assumption", BOTH)
def test_thawing_runs_the_path_backwards(
    amounts: dict[str, float], assumption: Assumption
) -> None:
    at = (-0.7, -1.5, -4.0, -8.0, -12.0, -19.0)
    ph = 7.4 if "phosphate" in amounts else None
    mixture = contents(amounts, ph)
    model = brine("sodium")
    down = freeze_path(mixture, at, assumption=assumption, brine=model).points
    up = thaw_path(mixture, at, assumption=assumption, brine=model)
    for cold, warm in zip(down, reversed(up), strict=True):
        assert warm.temperature_c == cold.temperature_c
        assert warm.state == cold.state
        assert warm.ice_fraction == pytest.approx(cold.ice_fraction, abs=1e-9)
        if cold.ph is None:
            assert warm.ph is None
        else:
            assert warm.ph == pytest.approx(cold.ph, abs=1e-7)
        for name, amount in cold.solids.items():
            assert warm.solids.get(name, 0.0) == pytest.approx(amount, abs=1e-9)


def test_the_last_salt_ends_the_liquid_and_ph_is_undefined() -> None:
    run = path({"phosphate": 0.05}, 7.4, [-9.0, -10.0, -15.0])
    names = [(e.event, e.solid) for e in run.events]
    assert names == [
        ("first ice", ""),
        ("onset", DSP),
        ("onset", MSP),
        ("eutectic", ""),
        ("no liquid", ""),
    ]
    above, below, deep = run.points
    assert above.ph is not None
    assert below.ph is None
    assert below.state == deep.state == "no liquid"
    assert below.unfrozen_water_g_kg == 0.0
    assert sum(below.solids.values()) == pytest.approx(0.05, abs=1e-9)
    extension = {p.temperature_c: p for p in run.metastable}
    assert extension.keys() == {-10.0, -15.0}
    assert extension[-10.0].ph == pytest.approx(3.76, abs=0.05)
    assert any("held back" in note for note in run.notes)


def test_exactly_stoichiometric_salts_end_at_their_own_eutectic() -> None:
    for amounts in (
        {"sodium": 0.2, "phosphate": 0.1},
        {"sodium": 0.1, "phosphate": 0.1},
    ):
        run = freeze_path(contents(amounts), [-12.0], brine=brine("sodium"))
        assert run.points[0].state == "no liquid"
        held = sum(run.points[0].solids.values())
        assert held == pytest.approx(0.1, abs=1e-9)


def test_almost_stoichiometric_salt_keeps_a_trace_of_liquid() -> None:
    run = freeze_path(
        contents({"sodium": 0.19999, "phosphate": 0.1}), [-5.0], brine=brine("sodium")
    )
    left = run.points[0].unfrozen_water_g_kg
    assert left is not None
    assert 0.0 < left < 0.05


def test_supersaturated_path_forms_no_solid_but_says_when_it_could() -> None:
    run = path({"phosphate": 0.05}, 7.4, DOWN, assumption="supersaturated")
    assert all(not p.solids for p in run.points)
    event = run.event("supersaturated", DSP)
    onset = path({"phosphate": 0.05}, 7.4, DOWN).event("onset", DSP)
    assert event is not None
    assert onset is not None
    assert event.temperature_c == pytest.approx(onset.temperature_c, abs=1e-6)
    assert run.points[-1].saturation[DSP] > 1.0


def test_sugar_keeps_more_liquid_and_less_shift() -> None:
    bare = path({"phosphate": 0.05}, 7.4, [-5.0])
    sweet = path(SUGAR, 7.4, [-5.0])
    assert (sweet.points[0].unfrozen_water_g_kg or 0.0) > 5.0 * (
        bare.points[0].unfrozen_water_g_kg or 1.0
    )
    assert _ph(sweet) > _ph(bare) + 1.0


def test_chloride_keeps_more_liquid_and_less_shift() -> None:
    assert _ph(path(SALINE, 7.4, [-10.0]), 0) > 5.0


def test_no_ph_below_the_limit_of_extrapolation() -> None:
    run = path(SALINE, 7.4, [-19.0, -20.0, -20.5, -25.0])
    assert [p.ph is None for p in run.points] == [False, False, True, True]
    assert run.points[2].ice_fraction is not None
    event = run.event("pK extrapolation limit")
    assert event is not None
    assert event.temperature_c == -20.0
    assert unfrozen_ph(contents(SALINE, 7.4), [-25.0], brine=brine("sodium")) == (None,)


def test_below_the_glass_transition_the_state_is_arrested() -> None:
    mixture = contents(SUGAR, 7.4, glass_transition_c=-8.0)
    run = freeze_path(
        mixture, [-5.0, -8.0, -12.0], assumption="supersaturated", brine=brine("sodium")
    )
    assert run.event("glass transition") is not None
    _, at, below = run.points
    assert at.ph is not None
    assert below.ph is None
    assert below.state == "glass"
    assert below.ice_fraction == at.ice_fraction


def test_the_order_of_temperatures_is_kept() -> None:
    mixed = path(SALINE, 7.4, [-9.0, -1.0, -4.0])
    sorted_run = path(SALINE, 7.4, [-1.0, -4.0, -9.0])
    assert [p.temperature_c for p in mixed.points] == [-9.0, -1.0, -4.0]
    assert _ph(mixed, 0) == pytest.approx(_ph(sorted_run, 2), abs=1e-8)


def test_points_do_not_depend_on_what_else_is_asked() -> None:
    alone = path({"phosphate": 0.05}, 7.4, [-7.0])
    among = path({"phosphate": 0.05}, 7.4, np.linspace(-0.1, -7.0, 40))
    assert _ph(alone) == pytest.approx(_ph(among, 39), abs=1e-8)


def test_a_prepared_ph_is_met_and_composition_gives_it_back() -> None:
    run = path({"phosphate": 0.05}, 7.4, [-1.0])
    assert run.ph_prepared == pytest.approx(7.4, abs=1e-9)
    same = freeze_path(
        contents({"phosphate": 0.05, "sodium": run.titrant_mol_kg}),
        [-1.0],
        brine=brine("sodium"),
    )
    assert same.ph_prepared == pytest.approx(7.4, abs=1e-8)
    assert same.titrant == ""


def test_trimming_changes_the_ion_that_is_there() -> None:
    full = {"phosphate": 0.05, "sodium": 0.0896, "chloride": 0.0}
    mixture = contents(full, 7.4)
    trimmed = FreezingContents(
        mixture.ladders, mixture.totals_mol_kg, mixture.ions, ph=7.4, trim=True
    )
    run = freeze_path(trimmed, [-1.0], brine=brine("sodium"))
    assert run.titrant == "sodium"
    assert run.titrant_mol_kg == pytest.approx(-0.0002, abs=3e-4)
    acid = freeze_path(
        contents({**full, "sodium": 0.12}, 7.4), [-1.0], brine=brine("sodium")
    )
    assert acid.titrant == "chloride"
    assert acid.titrant_mol_kg > 0.0


def test_buffers_of_any_ladder_freeze_without_brine_parameters() -> None:
    for name, ph in (
        ("citrate", 6.0),
        ("histidine", 6.0),
        ("tris", 8.0),
        ("borate", 9.0),
    ):
        mixture = FreezingContents((ladder(name),), (0.02,), ph=ph)
        run = freeze_path(mixture, DOWN, assumption="supersaturated")
        assert run.ph_prepared == pytest.approx(ph, abs=1e-9)
        assert all(p.ph is not None and p.state == "frozen" for p in run.points)
        assert any("Guentelberg" in note for note in run.notes)


def test_a_salt_without_buffer_freezes_too() -> None:
    run = freeze_path(
        contents({"sodium": 0.15, "chloride": 0.15}),
        [-5.0, -22.0],
        brine=brine("sodium"),
    )
    assert run.points[0].ice_fraction == pytest.approx(0.897, abs=0.003)
    assert run.points[1].state == "no liquid"


def test_the_model_says_where_it_ends() -> None:
    # KH2PO4 beyond 5 mol/kg: its osmotic coefficient falls faster than molality rises
    run = path(
        {"phosphate": 0.008},
        5.7,
        [-5.0, -12.0],
        model="potassium",
        assumption="supersaturated",
    )
    event = run.event("outside model")
    assert event is not None
    assert -12.0 < event.temperature_c < -5.0
    assert run.points[0].ph is not None
    assert run.points[1].ph is None
    assert run.points[1].state == "outside model"


def test_random_mixtures_end_in_a_consistent_path() -> None:
    rng = np.random.default_rng(3)
    for _ in range(12):
        amounts = {
            "phosphate": float(10 ** rng.uniform(-2.5, -0.7)),
            "sodium": float(10 ** rng.uniform(-3.0, -0.3)),
            "sucrose": float(10 ** rng.uniform(-2.0, -0.2)),
        }
        amounts["chloride"] = amounts["sodium"]
        ph = float(rng.uniform(5.0, 8.5))
        run = path(amounts, ph, [-1.5, -6.0, -13.0, -20.0])
        water = [p.unfrozen_water_g_kg for p in run.points]
        assert all(a >= b for a, b in pairwise(water) if a and b)
        for point in run.points:
            assert point.ph is None or 0.0 < point.ph < 12.0
            assert all(x <= 1e-8 for x in point.saturation.values())
