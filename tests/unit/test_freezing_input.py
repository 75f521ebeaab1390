"""Shape and speed of freezing results, and what is said of questions that make no sense."""

from __future__ import annotations

import json
import time

import numpy as np
import pytest
from freezing_support import brine, contents, ladder, path

from formbuf.chemistry.freezing import freeze_path, unfrozen_ph
from formbuf.chemistry.freezing_network import ICE
from formbuf.chemistry.freezing_prepare import prepare
from formbuf.chemistry.freezing_records import FreezingContents, IonAmount
from formbuf.chemistry.freezing_trace import Trace
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.macro_ion import curve_through
from formbuf.errors import ConvergenceError, InputError

SALINE = {"phosphate": 0.01, "sodium": 0.15, "chloride": 0.15}


def test_the_result_is_plain_json_without_nan() -> None:
    run = path(SALINE, 7.4, [-1.0, -9.9, -15.0])
    text = json.dumps(run.to_dict(), allow_nan=False)
    back = json.loads(text)
    assert set(back) >= {"assumption", "points", "events", "notes"}
    assert set(back["points"][0]) >= {
        "temperature_c",
        "ph",
        "ice_fraction",
        "unfrozen_water_g_kg",
        "solids",
    }
    assert set(back["events"][0]) >= {"temperature_c", "event"}
    assert all(type(e.temperature_c) is float for e in run.events)


@pytest.mark.parametrize(
    ("temperatures_c", "words"),
    [
        ([5.0], "temperature 5 C, allowed -30 to 0"),
        ([-1.0, 0.1], "temperature 0.1 C"),
        ([-45.0], "temperature -45 C, allowed -30 to 0"),
        ([float("nan")], "temperature nan"),
        ([], "no temperature given"),
    ],
)
def test_temperatures_out_of_range(temperatures_c: list[float], words: str) -> None:
    with pytest.raises(InputError, match=words):
        path({"phosphate": 0.05}, 7.4, temperatures_c)


def test_bad_contents() -> None:
    one = ladder("phosphate")
    with pytest.raises(InputError, match="1 ladders but 2 totals"):
        FreezingContents((one,), (0.1, 0.2))
    with pytest.raises(InputError, match=r"phosphate -0\.1 mol/kg"):
        FreezingContents((one,), (-0.1,))
    with pytest.raises(InputError, match="sodium nan mol/kg"):
        FreezingContents(ions=(IonAmount("sodium", 1, float("nan")),))
    with pytest.raises(InputError, match="sodium stands twice"):
        FreezingContents(
            ions=(IonAmount("sodium", 1, 0.1), IonAmount("sodium", 1, 0.1))
        )
    with pytest.raises(InputError, match=r"ph 15\.0, allowed 0 to 14"):
        FreezingContents((one,), (0.1,), ph=15.0)
    with pytest.raises(InputError, match=r"prepare_temperature_c -5\.0"):
        FreezingContents((one,), (0.1,), prepare_temperature_c=-5.0)


def test_a_protein_is_left_to_the_caller() -> None:
    protein = Ladder.of_curve("protein", curve_through([4.0, 9.0], [10.0, -10.0]))
    with pytest.raises(InputError, match="protein is a protein or another macro-ion"):
        FreezingContents((protein,), (0.001,))


def test_bad_questions() -> None:
    with pytest.raises(InputError, match="assumption 'melting'"):
        path({"phosphate": 0.05}, 7.4, [-1.0], assumption="melting")  # type: ignore[arg-type]
    with pytest.raises(InputError, match="holds no solids"):
        freeze_path(contents({"phosphate": 0.05}, 7.4), [-1.0])
    with pytest.raises(InputError, match="exceeds its solubility"):
        freeze_path(
            contents({"phosphate": 0.6}, 9.0, prepare_temperature_c=5.0),
            [-1.0],
            brine=brine("sodium"),
        )
    with pytest.raises(InputError, match="mol/kg dissolved"):
        freeze_path(FreezingContents(), [-1.0], assumption="supersaturated")


def test_a_state_that_cannot_be_solved_is_named() -> None:
    prepared = prepare(
        contents({"phosphate": 0.05}, 7.4), brine("sodium"), with_solids=True
    )
    trace = Trace(prepared.net, prepared.state, [ICE], [])
    with pytest.raises(ConvergenceError, match=r"phosphate 0\.05.*phases ice"):
        trace.advance(20.0)


@pytest.mark.bench
def test_speed() -> None:
    mixture, model = contents({"phosphate": 0.05}, 7.4), brine("sodium")
    temperatures = np.linspace(-0.2, -20.0, 100)
    freeze_path(mixture, [-1.0], brine=model)
    start = time.perf_counter()
    freeze_path(mixture, temperatures, brine=model)
    one = time.perf_counter() - start
    names = ["citrate", "histidine", "acetate", "succinate", "tris", "glycine"]
    start = time.perf_counter()
    for name in names * 5:
        other = FreezingContents((ladder(name),), (0.02,), ph=6.0)
        freeze_path(other, temperatures[::10], assumption="supersaturated")
        unfrozen_ph(other, temperatures[::10])
    many = time.perf_counter() - start
    print(
        f"100 temperatures {one:.3f} s; 30 systems, 10 temperatures, twice {many:.3f} s"
    )

    assert one < 0.5
    assert many < 1.5
