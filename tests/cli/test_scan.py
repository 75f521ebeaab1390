"""``formbuf scan`` and ``--draws``: rows, going on after a stop, refusals."""

from __future__ import annotations

import csv
import io
import json
import tracemalloc
from pathlib import Path

import pytest

from formbuf.advice import sampling
from formbuf.advice.case import case_for
from formbuf.advice.scan_grid import Grid, grid_of, parse_axis
from formbuf.advice.scan_states import state_scan
from formbuf.cli import progress, quick
from formbuf.cli.main import run
from formbuf.errors import InputError
from formbuf.library import load_library
from formbuf.product.brief import brief_from_options, complete

BRIEF = """
[product]
route = "subcutaneous"
[ph]
target = 6.0
low = 5.7
high = 6.3
[[storage]]
temperature_c = 5
[tonicity]
agent = "sucrose"
"""


@pytest.fixture
def brief(tmp_path: Path) -> str:
    path = tmp_path / "brief.toml"
    path.write_text(BRIEF, encoding="utf-8")
    return str(path)


def _rows(text: str) -> list[dict[str, str]]:
    return list(csv.DictReader(io.StringIO(text)))


def test_axes_of_ranges_and_lists() -> None:
    assert parse_axis("target_ph=5:6:0.25").values == (5.0, 5.25, 5.5, 5.75, 6.0)
    assert parse_axis("a.b = 1, x,true").values == (1.0, "x", True)
    assert parse_axis("k=0.1:0.3:0.1").values == (0.1, 0.2, 0.3)


@pytest.mark.parametrize(
    "text",
    [
        "target_ph",
        "=5",
        "k=",
        "k=5:4:1",
        "k=1:2:0",
        "k=1:2",
        "k=1,,2",
        "k=1,1",
        "k=a:b:c",
    ],
)
def test_axes_that_are_refused(text: str) -> None:
    with pytest.raises(InputError, match="--over"):
        parse_axis(text)


def test_the_last_axis_runs_fastest() -> None:
    grid = grid_of([parse_axis("a=1,2"), parse_axis("b=3,4,5")])

    assert grid.size == 6
    assert [tuple(grid.point(k).values()) for k in range(3)] == [
        (1.0, 3.0),
        (1.0, 4.0),
        (1.0, 5.0),
    ]


@pytest.mark.parametrize("axes", [[], ["a=1", "a=2"], ["a=1:99999:1", "b=1:99999:1"]])
def test_grids_that_are_refused(axes: list[str]) -> None:
    with pytest.raises(InputError):
        grid_of([parse_axis(text) for text in axes])


def test_a_scan_has_one_row_per_point_and_place(
    brief: str, capsys: pytest.CaptureFixture[str]
) -> None:
    axes = ["--over", "target_ph=5.8,6.2", "--over", "loads.acid_mmol_l=0.1,0.3"]

    assert run(["scan", brief, *axes, "--top", "1"]) == 0
    captured = capsys.readouterr()
    rows = _rows(captured.out)
    heads = [r for r in rows if not r["variant_of"]]

    assert captured.err == ""
    assert [(r["point"], r["target_ph"], r["loads.acid_mmol_l"]) for r in heads] == [
        ("0", "5.8", "0.1"),
        ("1", "5.8", "0.3"),
        ("2", "6.2", "0.1"),
        ("3", "6.2", "0.3"),
    ]
    assert {r["run"] for r in rows} == {rows[0]["run"]}
    for row in heads:
        assert row["rank"] == "1"
        assert float(row["ph"]) == pytest.approx(float(row["target_ph"]), abs=1e-4)


@pytest.mark.slow
def test_a_point_of_a_scan_is_the_shortlist_of_its_brief(
    brief: str, capsys: pytest.CaptureFixture[str]
) -> None:
    run(["scan", brief, "--over", "target_ph=6.0", "--draws", "200", "--top", "1"])
    row = _rows(capsys.readouterr().out)[0]
    run(["shortlist", brief, "--draws", "200", "--json"])
    data = json.loads(capsys.readouterr().out)
    lead = data["candidates"][0]

    assert row["system"] == lead["system"]
    assert float(row["desirability"]) == lead["desirability"]
    assert float(row["lead_chance"]) == lead["confidence"]["ranks"]["lead"]["value"]
    assert (
        float(row["within_at_end_chance"])
        == (lead["confidence"]["within_at_end"]["value"])
    )


def test_a_point_that_fails_says_so_and_the_scan_goes_on(
    brief: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["scan", brief, "--over", "target_ph=6.0,14.5", "--top", "1"]) == 0
    rows = _rows(capsys.readouterr().out)

    assert rows[0]["error"] == ""
    assert "allowed 1 to 13" in rows[-1]["error"]
    assert rows[-1]["system"] == ""


def test_an_axis_that_no_brief_has_is_refused(
    brief: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["scan", brief, "--over", "loads.nonsense=1,2"]) == 3
    captured = capsys.readouterr()

    assert captured.out == ""
    assert "loads.nonsense" in captured.err


@pytest.mark.parametrize(
    ("args", "code", "text"),
    [
        ([], 2, "--over is not given, allowed at least one"),
        (["--over", "target_ph=5:6"], 3, "is no range"),
        (["--over", "target_ph=6", "--top", "0"], 2, "--top"),
        (["--over", "target_ph=6", "--seed", "1"], 2, "--seed"),
        (["--over", "target_ph=6", "--draws", "5"], 2, "--draws"),
        (["--over", "storage.2.temperature_c=5", "--top", "1"], 3, "allowed 1 to 1"),
        (["--over", "target_ph=6", "--system", "tris", "--top", "1"], 2, "--system"),
        (["--over", "target_ph=6", "--system", "nobody"], 3, "unknown system"),
        (["--over", "ph.low=5", "--system", "sodium_citrate"], 3, "ph.low"),
        (["--over", "target_ph=6", "-o", " "], 2, "--output"),
    ],
)
def test_refusals(
    brief: str,
    args: list[str],
    code: int,
    text: str,
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert run(["scan", brief, *args]) == code
    captured = capsys.readouterr()

    assert captured.out == ""
    assert text in captured.err


STATES = (
    "--system",
    "sodium_citrate",
    "--over",
    "target_ph=5:6:0.25",
    "--over",
    "concentration_mmol_l=5,20",
    "--over",
    "temperature_c=5,25",
    "--over",
    "load_mmol_l=-1:1:0.5",
)


@pytest.mark.parametrize("share", [0.0, 0.3, 0.61, 0.97, 1.0])
def test_a_scan_goes_on_where_it_stopped(
    brief: str, tmp_path: Path, share: float, capsys: pytest.CaptureFixture[str]
) -> None:
    whole, part = tmp_path / "whole.csv", tmp_path / "part.csv"
    run(["scan", brief, *STATES, "-o", str(whole)])
    data = whole.read_bytes()
    header = data.index(b"\n") + 1
    part.write_bytes(data[: header + int(share * (len(data) - header))])
    capsys.readouterr()

    assert run(["scan", brief, *STATES, "-o", str(part)]) == 0
    captured = capsys.readouterr()

    assert part.read_bytes() == data
    assert captured.out == ""
    assert ("Going on" in captured.err) == (share > 0.0)


@pytest.mark.slow
def test_a_scan_of_shortlists_goes_on_too(brief: str, tmp_path: Path) -> None:
    whole, part = tmp_path / "whole.csv", tmp_path / "part.csv"
    axes = ["--over", "target_ph=5.8:6.2:0.2", "--top", "2"]
    run(["scan", brief, *axes, "-o", str(whole)])
    data = whole.read_bytes()
    part.write_bytes(data[: int(0.6 * len(data))])
    run(["scan", brief, *axes, "-o", str(part)])

    assert part.read_bytes() == data


@pytest.mark.parametrize(
    "content", ["something else\n", "run,point,target_ph\nabc,0,5\n"]
)
def test_a_file_that_is_no_scan_is_left_alone(
    brief: str, tmp_path: Path, content: str, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "notes.csv"
    file.write_text(content, encoding="utf-8")

    assert run(["scan", brief, *STATES, "-o", str(file)]) == 3
    assert file.read_text(encoding="utf-8") == content
    assert "holds something else" in capsys.readouterr().err


def test_another_scan_is_not_gone_on_with(
    brief: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    file = tmp_path / "states.csv"
    run(["scan", brief, *STATES, "-o", str(file)])
    data = file.read_bytes()
    other = [*STATES[:-1], "load_mmol_l=-1:1:0.25"]

    assert run(["scan", brief, *other, "-o", str(file)]) == 3
    assert file.read_bytes() == data
    assert "holds another scan" in capsys.readouterr().err


def test_a_file_that_cannot_be_written_is_an_error(
    brief: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["scan", brief, *STATES, "-o", str(tmp_path / "no" / "x.csv")]) == 3
    assert "cannot be written" in capsys.readouterr().err


def test_states_read_the_target_and_rise_with_the_load(
    brief: str, capsys: pytest.CaptureFixture[str]
) -> None:
    run(["scan", brief, *STATES])
    rows = _rows(capsys.readouterr().out)
    unloaded = [r for r in rows if float(r["load_mmol_l"]) == 0.0]
    for row in unloaded:
        if row["temperature_c"] == "25.0":
            target = float(row["target_ph"])
            # the volume that the titrant takes up is settled in two passes
            assert float(row["ph"]) == pytest.approx(target, abs=1e-4)

    assert len(rows) == 5 * 2 * 2 * 5
    assert [r["point"] for r in rows] == [str(k) for k in range(len(rows))]
    by_load = {float(r["load_mmol_l"]): float(r["ph"]) for r in rows[:5]}
    assert [by_load[x] for x in sorted(by_load)] == sorted(by_load.values())


def _large(count: int) -> Grid:
    return grid_of(
        [
            parse_axis("target_ph=5:6.5:0.05"),
            parse_axis("concentration_mmol_l=5:30:1"),
            parse_axis(f"load_mmol_l=-1:1:{2.0 / count}"),
        ]
    )


def test_memory_does_not_grow_with_the_grid() -> None:
    library = load_library()
    completed = complete(brief_from_options(ph=6.0, route="subcutaneous"), library)
    case = case_for(completed)
    peaks = []
    for count in (20, 200):
        scan = state_scan(case, [library.systems["sodium_citrate"]], _large(count))
        tracemalloc.start()
        for _ in scan.chunks():
            pass
        peaks.append(tracemalloc.get_traced_memory()[1])
        tracemalloc.stop()
    print(f"peaks {peaks[0] / 1e6:.1f} and {peaks[1] / 1e6:.1f} MB")

    assert peaks[1] < 1.5 * peaks[0]


def test_draws_of_the_shortlist(brief: str, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["shortlist", brief, "--draws", "500", "--seed", "4"]) == 0
    shown = capsys.readouterr().out

    assert "500 draws, seed 4" in shown
    assert "What to measure to be surer" in shown


@pytest.mark.parametrize(
    ("args", "text"),
    [
        (["--draws", "99"], "allowed 100 to 1000000"),
        (["--draws", "500", "--seed", "-1"], "--seed"),
        (["--seed", "3"], "without --draws"),
    ],
)
def test_draws_that_are_refused(
    brief: str, args: list[str], text: str, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["shortlist", brief, *args]) == 2
    assert text in capsys.readouterr().err


def test_sensitivity_refuses_before_it_computes(
    brief: str, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["sensitivity", brief, "--figure", str(tmp_path / "map.gif")]) == 2
    assert run(["sensitivity", brief, "--step", "0"]) == 3
    assert "allowed a step" in capsys.readouterr().err


class _Terminal(io.StringIO):
    def isatty(self) -> bool:
        return True


@pytest.mark.parametrize("terminal", [True, False])
def test_progress_shows_on_a_terminal_and_after_a_second_only(
    terminal: bool, monkeypatch: pytest.MonkeyPatch
) -> None:
    stream = _Terminal() if terminal else io.StringIO()
    now = [100.0]
    monkeypatch.setattr(progress.sys, "stderr", stream)
    monkeypatch.setattr(progress.time, "monotonic", lambda: now[0])
    shown = progress.Progress("points")
    now[0] += 0.9
    shown(1, 4)
    early = stream.getvalue()
    now[0] += 1.1
    shown(2, 4)
    late = stream.getvalue()
    shown.close()

    assert early == ""
    assert ("2 of 4 points, 2 s left" in late) == terminal
    assert (stream.getvalue() == "") == (not terminal)


def test_limits_of_draws_are_those_of_the_sampler() -> None:
    assert quick.FEWEST_DRAWS == sampling.FEWEST_DRAWS
    assert quick.MOST_DRAWS == sampling.MOST_DRAWS
    assert quick.LARGEST_SEED == sampling.LARGEST_SEED
