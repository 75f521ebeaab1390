"""What ``formbuf freeze-thaw`` shows: keys of its JSON, rows, words, files, exit code."""

from __future__ import annotations

import csv
import io
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, clean_environment, formbuf, process

QUICK = (
    *("freeze-thaw", "--system", "sodium_phosphate"),
    *("--concentration", "50", "--ph", "7.4", "--to", "-10"),
)
ANTIBODY = ("freeze-thaw", str(EXAMPLES / "antibody.toml"))
KEYS = [
    "schema",
    "formbuf_version",
    "knowledge",
    "asked",
    "brief",
    "assumptions",
    "units",
    "systems",
    "paths",
    "observations",
    "left_out",
    "warnings",
]
SYSTEM_KEYS = [
    "system",
    "name",
    "base_system",
    "concentration_mmol_l",
    "composition",
    "tonicity_fill",
    "sugar_percent_w_v",
    "standing",
    "rank",
    "variant_of",
    "measure_temperature_c",
    "ph_before",
    "liquid_states",
    "class",
    "counted_class",
    "counted_because",
    "basis",
    "reason",
    "sources",
    "quantified",
    "shift",
    "cooling_shift",
    "where_samples_fall",
    "where_sources",
    "published_change",
    "verdict",
    "thawing",
    "volatile_share",
    "notes",
]
POINT_KEYS = {"temperature_c", "ph", "ice_fraction", "unfrozen_water_g_kg", "solids"}


def test_json_of_the_quick_form() -> None:
    data = formbuf(*QUICK, "--format", "json").data()
    assert list(data) == KEYS
    assert data["schema"] == "formbuf.freeze_thaw/1"
    assert list(data["systems"][0]) == SYSTEM_KEYS
    assert data["systems"][0]["class"] == "severe"
    assert [p["assumption"] for p in data["paths"]] == [
        "crystallising",
        "supersaturated",
    ]
    for path in data["paths"]:
        assert path["system"] == "sodium_phosphate"
        assert {"temperature_c", "event"} <= set(path["events"][0])
        assert all(set(point) >= POINT_KEYS for point in path["points"])
        assert path["points"][-1]["temperature_c"] == -10.0
    first = data["observations"][0]
    assert first["source"] == "gomez_2001"
    assert first["ph_frozen"] == 4.2
    assert first["asked"]["sodium_phosphate"] == pytest.approx(0.0, abs=1e-6)


def test_json_of_a_brief_is_the_shortlist() -> None:
    data = formbuf(*ANTIBODY, "--json").data()
    assert list(data) == KEYS
    shortlist = formbuf("shortlist", ANTIBODY[1], "--json").data()
    ranked = [c["system"] for c in shortlist["candidates"] if c["rank"] is not None]
    assert [s["system"] for s in data["systems"]] == ranked
    assert data["asked"]["lowest_c"] == -40.0
    assert min(data["asked"]["temperatures_c"]) == -20.0
    assert any("-40 C" in note for note in data["systems"][0]["notes"])
    ids = [o["id"] for o in data["observations"]]
    assert len(ids) == len(set(ids))


def test_rows_of_csv() -> None:
    done = formbuf(*QUICK, "--format", "csv")
    rows = list(csv.DictReader(io.StringIO(done.out)))
    assert {row["path"] for row in rows} == {
        "liquid",
        "crystallising",
        "supersaturated",
        "metastable",
    }
    gone = [row for row in rows if row["state"] == "no liquid"]
    assert [row["ph"] for row in gone] == [""]
    assert all(row["class"] == "severe" for row in rows)


@pytest.mark.parametrize("args", [QUICK, ANTIBODY], ids=["quick", "brief"])
def test_tables_fit_eighty_columns(args: tuple[str, ...]) -> None:
    done = formbuf(*args)
    assert done.code == 0, done.err
    assert max(map(len, done.out.splitlines())) <= 80
    assert "disodium_hydrogen_phosphate" not in done.out
    for words in ("Thawing", "Where real samples fall", "Published", "Sources"):
        assert words in done.out


def test_the_quick_form_takes_further_solutes_and_temperatures() -> None:
    done = formbuf(
        *("freeze-thaw", "--system", "sodium_phosphate", "--concentration", "10"),
        *("--ph", "7.4", "--nacl", "137", "--potassium", "2.7", "--sucrose", "5"),
        *("--trehalose", "1", "--at", "37", "--at", "-4.2", "--json"),
    )
    data = done.data()
    held = {path["assumption"]: path for path in data["paths"]}
    assert data["asked"]["lowest_c"] == -20.0
    assert -4.2 in data["asked"]["temperatures_c"]
    assert 37.0 in [p["temperature_c"] for p in data["systems"][0]["liquid_states"]]
    assert data["systems"][0]["sugar_percent_w_v"] == pytest.approx(6.0)
    assert held["crystallising"]["error_ph"] == 0.5  # both cations
    same = formbuf(
        *("freeze-thaw", "--system", "sodium_phosphate", "--concentration", "10"),
        *("--ph", "7.4", "--nacl", "137", "--kcl", "2.7", "--sucrose", "5"),
        *("--trehalose", "1", "--at", "37", "--at", "-4.2", "--json"),
    )
    assert same.out == done.out


def test_title_names_what_is_frozen() -> None:
    done = formbuf(*QUICK, "--nacl", "150", "--sucrose", "5")
    head = " ".join(done.out.splitlines()[:2])
    assert "50 mmol/L sodium phosphate" in head
    assert "150 mmol/L sodium chloride and 5 % w/v sucrose" in head


def test_markdown_shows_all_columns() -> None:
    done = formbuf(*QUICK, "--format", "markdown")
    assert done.out.startswith("# 50 mmol/L sodium phosphate")
    assert "Ionic strength" in done.out


@pytest.mark.parametrize("ending", ["svg", "png", "SVG"])
def test_a_figure_is_written(ending: str, tmp_path: Path) -> None:
    path = tmp_path / f"freezing.{ending}"
    done = formbuf(*QUICK, "--figure", str(path), "--json")
    assert done.code == 0
    assert done.err == f"Wrote {path}\n"
    start = b"\x89PNG" if ending == "png" else b"<?xml"
    assert path.read_bytes().startswith(start)
    assert done.data()["schema"] == "formbuf.freeze_thaw/1"


@pytest.mark.slow
def test_a_figure_and_a_table_in_files(tmp_path: Path) -> None:
    figure, table = tmp_path / "a.svg", tmp_path / "a.md"
    done = formbuf(*ANTIBODY, "--figure", str(figure), "-o", str(table))
    assert done.code == 0
    assert done.out == ""
    assert table.read_text(encoding="utf-8").startswith("# On freezing")
    assert b"<svg" in figure.read_bytes()


def test_no_acceptable_candidate_ends_with_one(tmp_path: Path) -> None:
    brief = tmp_path / "brief.toml"
    brief.write_text(
        'exclude = ["acetate", "citrate", "phosphate", "histidine", "succinate",'
        '"tris", "glycine", "lactate", "malate", "tartrate", "glutamate",'
        '"carbonate", "borate"]\n'
        '[product]\nroute = "intravenous"\nform = "frozen"\n'
        '[ph]\ntarget = 7\n[drug]\nkind = "antibody"\n',
        encoding="utf-8",
    )
    shortlist = formbuf("shortlist", str(brief))
    assert shortlist.code == 1
    done = formbuf("freeze-thaw", str(brief), "--figure", str(tmp_path / "a.svg"))
    assert done.code == 1
    assert "nothing to draw" in done.err
    assert not (tmp_path / "a.svg").exists()


@dataclass(frozen=True)
class Bad:
    """A command line, its exit code, and what must be said about it."""

    name: str
    args: tuple[str, ...]
    code: int
    words: tuple[str, ...]


PHOSPHATE = ("--system", "sodium_phosphate")
BAD = [
    Bad(
        "nothing",
        ("freeze-thaw",),
        2,
        ("--system, --concentration and --ph are not given",),
    ),
    Bad("above_freezing", (*QUICK[:-1], "5"), 3, ("--to: 5 C", "above freezing")),
    Bad("below_data", (*QUICK[:-1], "-60"), 3, ("-60 C is below the data", "-30 to 0")),
    Bad("no_number", (*QUICK[:-1], "nan"), 3, ("--to", "-30 to 0")),
    Bad(
        "no_concentration",
        ("freeze-thaw", *PHOSPHATE, "--ph", "7.4", "--to", "-10"),
        2,
        ("no brief, and --concentration is not given",),
    ),
    Bad(
        "no_ph",
        ("freeze-thaw", *PHOSPHATE, "--concentration", "50"),
        2,
        ("no brief, and --ph is not given",),
    ),
    Bad(
        "unknown_system",
        ("freeze-thaw", "--system", "sodium_phosfate", *QUICK[3:]),
        3,
        ("unknown system", "'sodium_phosfate'", "'sodium_phosphate'"),
    ),
    Bad(
        "species",
        ("freeze-thaw", "--system", "phosphate", *QUICK[3:]),
        3,
        ("is a species", "potassium_phosphate"),
    ),
    Bad(
        "negative_concentration",
        ("freeze-thaw", *PHOSPHATE, "--concentration", "-5", "--ph", "7"),
        3,
        ("--concentration", "value -5", "above 0"),
    ),
    Bad("negative_salt", (*QUICK, "--nacl", "-1"), 3, ("--nacl", "-1", "0 to")),
    Bad("too_much_sugar", (*QUICK, "--sucrose", "101"), 3, ("--sucrose", "101", "100")),
    Bad("ph_range", (*QUICK[:6], "15"), 3, ("--ph", "15", "1 to 13")),
    Bad("figure_pdf", (*QUICK, "--figure", "a.pdf"), 2, ("a.pdf", ".svg or .png")),
    Bad("figure_bare", (*QUICK, "--figure", "a"), 2, ("--figure", ".svg or .png")),
    Bad(
        "figure_is_output",
        (*QUICK, "--figure", "a.svg", "-o", "a.svg"),
        2,
        ("--figure and --output",),
    ),
    Bad(
        "figure_folder",
        (*QUICK, "--figure", "/no-such-folder/a.svg"),
        3,
        ("cannot be written",),
    ),
    Bad("both_forms", (*ANTIBODY, "--ph", "7"), 2, ("--ph is given beside",)),
    Bad("brief_to", (*ANTIBODY, "--to", "3"), 3, ("--to: 3 C", "above freezing")),
    Bad("at", (*QUICK, "--at", "200"), 3, ("--at: 200 C", "-30 to")),
    Bad("format", (*QUICK, "--format", "xml"), 2, ("xml", "table, json")),
    Bad("no_file", ("freeze-thaw", "none.toml"), 3, ("there is no such file",)),
    Bad(
        "no_buffer",
        ("freeze-thaw", "--system", "none", *QUICK[3:]),
        3,
        ("holds no buffer",),
    ),
    Bad(
        "too_concentrated",
        ("freeze-thaw", *PHOSPHATE, "--concentration", "2000", "--ph", "7.4"),
        3,
        ("exceeds its solubility",),
    ),
]


@pytest.mark.parametrize("bad", BAD, ids=lambda bad: bad.name)
def test_bad_lines_say_what_is_allowed(bad: Bad) -> None:
    done = formbuf(*bad.args)
    assert done.code == bad.code, done.err
    said = done.one_error()
    for words in bad.words:
        assert words in said


def test_no_plotting_interface_is_imported() -> None:
    code = (
        "import sys\n"
        "from formbuf.cli.main import run\n"
        f"run({list(QUICK)!r})\n"
        "sys.exit('matplotlib' in sys.modules or 'scipy' in sys.modules)\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        check=False,
        env=clean_environment({}),
    )
    assert done.returncode == 0


@pytest.mark.slow
def test_a_figure_needs_no_plotting_interface(tmp_path: Path) -> None:
    line = [*QUICK, "--figure", str(tmp_path / "a.svg")]
    code = (
        "import sys\n"
        "from formbuf.cli.main import run\n"
        f"run({line!r})\n"
        "sys.exit('matplotlib.pyplot' in sys.modules)\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        check=False,
        env=clean_environment({}),
    )
    assert done.returncode == 0
    assert (tmp_path / "a.svg").exists()


def test_the_help_shows_examples() -> None:
    done = process("freeze-thaw", "--help")
    assert done.returncode == 0
    assert "--figure" in done.stdout
    assert "formbuf freeze-thaw examples/antibody.toml" in done.stdout
