"""pH under acid, base and carbon dioxide: inverses, limits, and the figure."""

from __future__ import annotations

import numpy as np
import pytest
from bench_support import briefed, library, quick
from hypothesis import given, settings
from hypothesis import strategies as st

from formbuf.bench.challenge import base_to_ph_mmol_l, challenge, ph_after
from formbuf.bench.exposure import expose, with_carbonate
from formbuf.bench.setup import make_product
from formbuf.chemistry import gas
from formbuf.chemistry.equilibrium import solve
from formbuf.constants import GAS_CONSTANT_J_MOL_K, ZERO_CELSIUS_K
from formbuf.errors import InputError
from formbuf.output.challenge_figure import figure_bytes
from formbuf.product.composition import ladder_of, mixture

SYSTEMS = [
    "histidine_hydrochloride",
    "sodium_phosphate",
    "sodium_citrate",
    "tris + acetate",
]
PH = {"histidine_hydrochloride": 6.0, "sodium_phosphate": 7.0, "sodium_citrate": 5.5}


@pytest.mark.parametrize("system", SYSTEMS)
@given(added=st.floats(-4.0, 4.0), temperature_c=st.floats(2.0, 40.0))
@settings(max_examples=20, deadline=None)
def test_the_curve_and_its_inverse(
    system: str, added: float, temperature_c: float
) -> None:
    mixed = make_product(quick(system, 20.0, PH.get(system, 7.5))).mixture
    ph = float(ph_after(mixed, [added], temperature_c)[0])

    found = base_to_ph_mmol_l(mixed, ph, temperature_c)
    assert found == pytest.approx(added, abs=2e-6)


def test_going_to_a_ph_gets_there() -> None:
    found = challenge(quick("sodium_phosphate", 10.0, 7.0), to_ph=(6.5, 7.5))

    assert [p.ph for p in found.points] == pytest.approx([6.5, 7.0, 7.5], abs=1e-6)


def test_ph_rises_with_base_and_buffer_slows_it() -> None:
    found = challenge(quick("sodium_phosphate", 10.0, 7.0))
    ph = [p.ph for p in found.points]
    bare = [p.ph_unbuffered for p in found.points]

    assert np.all(np.diff(ph) > 0.0)
    assert np.all(np.diff(bare) > 0.0)
    assert ph[-1] - ph[0] < 0.3 * (bare[-1] - bare[0])


def test_the_window_is_used_up_where_it_says() -> None:
    """At the limits of the window the pH of the loaded product is the limit."""
    bench = quick("histidine_hydrochloride", 10.0, 6.0, storage_c=[5.0])
    found = challenge(bench)
    for room in found.rooms:
        ends = ph_after(
            found.made.mixture,
            [-room.acid_mmol_l, room.base_mmol_l],
            room.temperature_c,
        )
        assert ends.tolist() == pytest.approx([room.low_ph, room.high_ph], abs=1e-6)
    measured = next(r for r in found.rooms if "measure" in r.kinds)
    assert (measured.low_ph, measured.high_ph) == pytest.approx((5.5, 6.5))


def test_unbuffered_is_the_same_product_without_buffer() -> None:
    bench = quick(
        "sodium_phosphate",
        10.0,
        7.0,
        materials_mmol_l={"mannitol": 50.0},
        agent="sodium_chloride",
        target_mosm_kg=290.0,
    )
    found = challenge(bench, added_mmol_l=(1.0,))

    assert "mannitol" in found.unbuffered.materials_mmol_l
    assert not found.unbuffered.mixture.ladders
    start = next(p for p in found.points if p.added_mmol_l == 0.0)
    assert start.ph == pytest.approx(start.ph_unbuffered, abs=1e-6)


def test_a_protein_holds_the_ph_without_buffer() -> None:
    drug = (
        'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
        "isoelectric_point = 8.4\nnet_charge = 15\nnet_charge_ph = 6\n"
    )
    (_, after) = challenge(briefed(drug), added_mmol_l=(0.5,)).points

    assert after.ph_unbuffered < 6.2


def test_series_are_limited() -> None:
    bench = quick("sodium_phosphate", 10.0, 7.0)
    with pytest.raises(InputError, match="allowed -2000"):
        challenge(bench, added_mmol_l=(1e6,))
    with pytest.raises(InputError, match="pH 15"):
        challenge(bench, to_ph=(15.0,))
    with pytest.raises(InputError, match="at most"):
        challenge(bench, added_mmol_l=tuple(np.linspace(-1, 1, 600)))


@pytest.mark.parametrize("kind", ["svg", "png"])
def test_the_same_challenge_gives_the_same_figure(kind: str) -> None:
    found = challenge(quick("sodium_phosphate", 10.0, 7.0), temperatures_c=(25.0, 5.0))

    first = figure_bytes(found, kind)
    assert first == figure_bytes(found, kind)
    assert first.startswith(b"<?xml" if kind == "svg" else b"\x89PNG")


# ------------------------------------------------------------------ carbon dioxide


def test_water_under_air_has_the_ph_everybody_knows() -> None:
    water = mixture(library(), {})
    found = expose(library(), water, "open", pressure_pa=41.7)

    assert found.ph == pytest.approx(5.61, abs=0.01)


def test_open_agrees_with_the_solver_of_open_components() -> None:
    mixed = make_product(quick("sodium_bicarbonate", 25.0, 7.8)).mixture
    found = expose(library(), mixed, "open", pressure_pa=5000.0)
    ladder = ladder_of(library().species["carbonate"])
    dissolved = float(gas.dissolved_mol_kg(5000.0, 25.0))
    solution = solve(
        (ladder,),
        [dissolved],
        mixed.strong_charge_mol_kg,
        mixed.strong_charge2_mol_kg,
        25.0,
        open_components=("carbonate",),
    )

    assert found.ph == pytest.approx(float(solution.ph), abs=1e-7)


def test_closed_changes_nothing() -> None:
    mixed = make_product(quick("histidine_hydrochloride", 10.0, 6.0)).mixture
    found = expose(library(), mixed, "closed")

    assert found.ph == pytest.approx(6.0, abs=1e-6)
    assert found.carbonate_mmol_l == 0.0


@pytest.mark.parametrize("system", ["sodium_bicarbonate", "tris_hydrochloride"])
@pytest.mark.parametrize("ratio", [0.05, 1.0, 20.0])
def test_a_headspace_keeps_the_carbon(system: str, ratio: float) -> None:
    mixed = make_product(quick(system, 25.0, 8.0)).mixture
    own = with_carbonate(library(), mixed)
    before = 1000.0 * float(own.totals_mol_kg[..., own.index("carbonate")])
    before *= float(mixed.water_kg_l)
    found = expose(
        library(), mixed, "headspace", pressure_pa=2000.0, headspace_ratio=ratio
    )
    per_pa = ratio / (GAS_CONSTANT_J_MOL_K * (25.0 + ZERO_CELSIUS_K))

    assert found.carbonate_mmol_l + per_pa * found.pressure_pa == pytest.approx(
        before + per_pa * 2000.0, rel=1e-9
    )
    assert float(found.mixture.solve(25.0).ph) == pytest.approx(found.ph)


def test_a_headspace_lies_between_closed_and_open() -> None:
    mixed = make_product(quick("sodium_bicarbonate", 25.0, 7.5)).mixture
    closed = expose(library(), mixed, "closed").ph
    open_ = expose(library(), mixed, "open", pressure_pa=42.0).ph
    small, large = (
        expose(
            library(), mixed, "headspace", pressure_pa=42.0, headspace_ratio=ratio
        ).ph
        for ratio in (1e-6, 1e4)
    )

    assert small == pytest.approx(closed, abs=1e-4)
    assert closed < large < open_
    assert large == pytest.approx(open_, abs=0.1)


def test_exposures_that_cannot_be() -> None:
    mixed = make_product(quick("sodium_phosphate", 10.0, 7.0)).mixture
    with pytest.raises(InputError, match="headspace ratio 0"):
        expose(library(), mixed, "headspace", pressure_pa=42.0)
    with pytest.raises(InputError, match="-1 Pa"):
        expose(library(), mixed, "open", pressure_pa=-1.0)
    with pytest.raises(InputError, match="nan"):
        expose(library(), mixed, "open", pressure_pa=float("nan"))
