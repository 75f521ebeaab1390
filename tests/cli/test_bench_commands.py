"""The commands of the bench: both forms, every format, and what they must not say."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, formbuf

ANTIBODY = str(EXAMPLES / "antibody.toml")
BULK = str(EXAMPLES / "antibody_bulk.toml")
PHOSPHATE = ("--system", "sodium_phosphate", "--concentration", "50", "--ph", "7.4")
HISTIDINE = (
    "--system",
    "histidine_hydrochloride",
    "--concentration",
    "20",
    "--ph",
    "6",
)
PROTEIN = ("--charge", "20", "--protein-mg-ml", "150", "--molar-mass", "148000")

COMMANDS = {
    "batch_sheet": ("batch-sheet", *PHOSPHATE, "--volume", "2"),
    "batch_sheet_brief": (
        "batch-sheet",
        ANTIBODY,
        "--system",
        "histidine_hydrochloride",
        "--volume",
        "2",
    ),
    "challenge": ("challenge", *PHOSPHATE),
    "challenge_brief": ("challenge", ANTIBODY, "--system", "histidine + acetate"),
    "dilute": ("dilute", *PHOSPHATE, "--into", "glucose_5"),
    "dilute_brief": (
        "dilute",
        ANTIBODY,
        "--system",
        "sodium_citrate",
        "--into",
        "sodium_chloride_0p9",
    ),
    "retentate": ("retentate", *HISTIDINE, *PROTEIN),
    "retentate_brief": ("retentate", BULK, "--system", "histidine_hydrochloride"),
}
SCHEMAS = {
    "batch_sheet": "formbuf.batch_sheet/1",
    "challenge": "formbuf.challenge/1",
    "dilute": "formbuf.dilution/1",
    "retentate": "formbuf.retentate/1",
}


@pytest.mark.parametrize("name", COMMANDS)
def test_json(name: str) -> None:
    done = formbuf(*COMMANDS[name], "--json")
    data = done.data()

    assert done.code == 0, done.err
    assert data["schema"] == SCHEMAS[name.removesuffix("_brief")]
    assert data["knowledge"]["sha256"]
    assert data["inputs"]["system"]


@pytest.mark.parametrize("name", COMMANDS)
def test_csv_has_rows_of_one_shape(name: str) -> None:
    done = formbuf(*COMMANDS[name], "--format", "csv")
    rows = list(csv.reader(io.StringIO(done.out)))

    assert done.code == 0
    assert len(rows) > 2
    assert len({len(row) for row in rows}) == 1
    if name.startswith("batch"):
        assert rows[0][-4:] == ["lot", "weighed", "by", "checked"]
        assert {cell for row in rows[1:] for cell in row[-4:]} == {""}


@pytest.mark.parametrize("name", COMMANDS)
def test_tables_fit_their_width(name: str) -> None:
    done = formbuf(*COMMANDS[name], columns=80)

    assert done.code == 0
    assert max(len(line) for line in done.out.splitlines()) <= 80
    assert "qualified staff" in done.out.replace("\n", " ")


@pytest.mark.parametrize("name", COMMANDS)
def test_markdown(name: str) -> None:
    done = formbuf(*COMMANDS[name], "--format", "markdown")

    assert done.code == 0
    assert done.out.startswith("# ")


def test_a_brief_proposes_the_concentration_of_its_shortlist() -> None:
    name = "histidine_hydrochloride"
    shortlist = formbuf("shortlist", ANTIBODY, "--json").data()
    (entry,) = [c for c in shortlist["candidates"] if c["system"] == name]
    sheet = formbuf(
        "batch-sheet", ANTIBODY, "--system", name, "--volume", "1", "--json"
    ).data()
    lines = {line["material"]: line for line in sheet["ways"][0]["lines"]}

    assert sheet["inputs"]["concentration_mmol_l"] == entry["concentration_mmol_l"]
    for row in entry["composition"]:
        assert lines[row["material"]]["mmol_l"] == pytest.approx(
            row["mmol_l"], rel=1e-6
        )
        assert lines[row["material"]]["weigh_g"] == pytest.approx(row["g_l"], rel=1e-6)


def test_the_formula_of_a_brief_by_its_name() -> None:
    name = "histidine hydrochloride, 20 mmol/L"
    data = formbuf(
        "batch-sheet", ANTIBODY, "--system", name, "--volume", "1", "--json"
    ).data()

    assert data["inputs"]["concentration_mmol_l"] == 20.0


def test_quick_form_and_brief_form_are_one_calculation(tmp_path: Path) -> None:
    brief = tmp_path / "brief.toml"
    brief.write_text(
        '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 7.4\nlow = 6.9\nhigh = 7.9\n'
        '[tonicity]\nfill = false\n[drug]\nkind = "none"\n'
    )
    system = ("--system", "sodium_phosphate", "--concentration", "50")
    one = formbuf("challenge", str(brief), *system, "--json").data()
    other = formbuf("challenge", *PHOSPHATE, "--json").data()

    assert one["points"] == other["points"]


def test_figure(tmp_path: Path) -> None:
    file = tmp_path / "challenge.svg"
    done = formbuf("challenge", *PHOSPHATE, "--figure", str(file))

    assert done.code == 0
    assert file.read_text().startswith("<?xml")
    assert f"Wrote {file}" in done.err


def test_a_headspace_is_shown() -> None:
    data = formbuf("challenge", *PHOSPHATE, "--headspace", "0.5", "--json").data()

    assert [row["exposure"] for row in data["carbon_dioxide"]] == [
        "closed",
        "open",
        "headspace",
    ]


def test_retentate_says_that_nothing_public_tests_it() -> None:
    done = formbuf(*COMMANDS["retentate"])

    assert "No public numbers were found" in done.out.replace("\n", " ")
    (forward, backward) = formbuf(*COMMANDS["retentate"], "--json").data()["directions"]
    assert forward["retentate_ph"] > forward["buffer_ph"]
    assert backward["buffer_ph"] < backward["retentate_ph"] == pytest.approx(6.0)


def test_a_sheet_of_an_autoclaved_product_ends_at_the_hottest_temperature() -> None:
    """The slope of pH at 121 C is taken from below: the equilibria end there."""
    brief = str(EXAMPLES / "ampoule.toml")
    done = formbuf(
        "batch-sheet", brief, "--system", "sodium_citrate", "--volume", "1", "--json"
    )
    assert done.code == 0, done.err
    hottest = done.data()["ways"][0]["readings"][-1]
    assert hottest["temperature_c"] == 121.0
    assert 0.0 < hottest["slope_per_k"] < 0.02


def test_a_batch_without_room_for_water_is_refused() -> None:
    full = ("--concentration", "10", "--ph", "14", "--volume", "1")
    done = formbuf("batch-sheet", "--system", "sodium_citrate", *full)
    assert done.code == 3
    assert "takes up more than the batch of 1 L" in done.err
    thick = ("--concentration", "900", "--ph", "7.4", "--volume", "1")
    done = formbuf("batch-sheet", "--system", "sodium_phosphate", *thick)
    assert done.code == 0, done.err
    assert "of the batch is water to add" in " ".join(done.out.split())


def test_a_target_that_is_passed_without_any_agent_is_told() -> None:
    made = ("--concentration", "100", "--ph", "6", "--volume", "1")
    asked = ("--osmolality", "100", "--tonicity-agent", "sucrose")
    done = formbuf("batch-sheet", "--system", "sodium_citrate", *made, *asked)
    assert "above the 100 aimed at: none is added" in " ".join(done.out.split())


def test_what_the_brief_excludes_is_named_on_the_sheet(tmp_path: Path) -> None:
    path = tmp_path / "brief.toml"
    text = Path(ANTIBODY).read_text("utf-8")
    path.write_text('exclude = ["hydrochloric_acid"]\n' + text, "utf-8")
    made = ("--system", "histidine_hydrochloride", "--volume", "1")
    said = "the brief excludes what this sheet uses: hydrochloric acid"
    assert said in " ".join(formbuf("batch-sheet", str(path), *made).out.split())
    assert said not in " ".join(formbuf("batch-sheet", ANTIBODY, *made).out.split())


def test_a_formula_outside_its_window_is_told_before_it_is_challenged(
    tmp_path: Path,
) -> None:
    path = tmp_path / "brief.toml"
    path.write_text(
        '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n[[candidate]]\n'
        'name = "A"\nmaterials = { citric_acid_monohydrate = 5, '
        "trisodium_citrate_dihydrate = 5 }\n",
        "utf-8",
    )
    done = formbuf("challenge", str(path), "--system", "A")
    assert done.code == 0, done.err
    assert "outside 5.70 to 6.30, before anything is added" in " ".join(
        done.out.split()
    )
