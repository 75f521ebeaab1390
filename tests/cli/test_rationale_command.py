"""``formbuf rationale`` and ``formbuf changes`` as a user calls them."""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, ROOT, clean_environment, formbuf
from report_support import docx_blocks, html_blocks, markdown_blocks

from formbuf.cli.registry import COMMANDS
from formbuf.errors import EXIT_INPUT, EXIT_NO_CANDIDATE, EXIT_USAGE

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

ENZYME = str(EXAMPLES / "enzyme.toml")
SECONDS_COLD = 4.0
NO_CANDIDATE = """
exclude = ["phosphate", "citrate", "tris", "histidine", "acetate", "succinate",
  "borate", "glycine", "carbonate", "glutamate", "lactate", "malate", "tartrate"]
[product]
route = "subcutaneous"
[ph]
target = 6.0
[drug]
kind = "antibody"
"""


def test_both_commands_are_listed() -> None:
    assert {"rationale", "changes"} <= set(COMMANDS)


def test_all_forms_in_one_run_say_the_same(tmp_path: Path) -> None:
    files = [tmp_path / f"r{ending}" for ending in (".html", ".docx", ".md", ".json")]
    options = [part for f in files for part in ("-o", str(f))]
    done = formbuf("rationale", ENZYME, *options)
    assert done.code == 0, done.err
    assert done.out == ""
    assert done.err.splitlines() == [f"Wrote {f}" for f in files]
    html = files[0].read_text(encoding="utf-8")
    assert html_blocks(html) == docx_blocks(files[1].read_bytes())
    assert html_blocks(html) == markdown_blocks(files[2].read_text(encoding="utf-8"))
    data = json.loads(files[3].read_text(encoding="utf-8"))
    assert data["schema"] == "formbuf.rationale/1"
    assert data["rationale"]["origin"]["command"] == "formbuf rationale enzyme.toml"


def test_without_a_file_markdown_goes_to_standard_output() -> None:
    done = formbuf("rationale", ENZYME)
    assert done.code == 0
    assert done.err == ""
    assert done.out.startswith("**DRAFT - unsigned**\n\n# Rationale")


def test_the_same_run_gives_the_same_bytes_and_a_timestamp_only_if_asked(
    tmp_path: Path,
) -> None:
    texts = []
    for name in ("a", "b"):
        path = tmp_path / f"{name}.md"
        assert formbuf("rationale", ENZYME, "-o", str(path)).code == 0
        texts.append(path.read_bytes())
    assert texts[0] == texts[1]
    stamped = formbuf("rationale", ENZYME, "--timestamp").out
    year = time.strftime("%Y-")
    assert f"| Written | {year}" in stamped
    assert "| Written |" not in texts[0].decode()


def test_draws_and_seed_are_reported() -> None:
    done = formbuf("rationale", ENZYME, "--draws", "200", "--seed", "7")
    assert done.code == 0
    assert "| Random seed | 7 |" in done.out
    assert "--draws 200 --seed 7" in done.out
    assert "Confidence" in done.out


def test_no_candidate_ends_with_one_and_still_reports(tmp_path: Path) -> None:
    brief = tmp_path / "brief.toml"
    brief.write_text(NO_CANDIDATE, encoding="utf-8")
    done = formbuf("rationale", str(brief))
    assert done.code == EXIT_NO_CANDIDATE
    assert "No candidate is acceptable." in done.out


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        (
            ["-o", "report.pdf"],
            EXIT_USAGE,
            "'.pdf', allowed .html, .docx, .md or .json",
        ),
        (["-o", "report"], EXIT_USAGE, "no ending"),
        (["-o", "report.htlm"], EXIT_USAGE, "Did you mean .html?"),
        (["-o", " "], EXIT_USAGE, "the file name is empty"),
        (["--against", "missing.json"], EXIT_INPUT, "missing.json: cannot be read"),
        (["--draws", "3"], EXIT_USAGE, "--draws: 3, allowed"),
        (["--seed", "3"], EXIT_USAGE, "--seed is given without --draws"),
    ],
)
def test_what_cannot_be_done_is_told(
    arguments: list[str], code: int, words: str
) -> None:
    done = formbuf("rationale", ENZYME, *arguments)
    assert done.code == code
    assert words in done.one_error()


def test_a_missing_brief_is_told() -> None:
    done = formbuf("rationale", "no_such_brief.toml")
    assert done.code == EXIT_INPUT
    assert "no_such_brief.toml" in done.one_error()


def test_a_missing_folder_is_told(tmp_path: Path) -> None:
    done = formbuf("rationale", ENZYME, "-o", str(tmp_path / "none" / "r.html"))
    assert done.code == EXIT_INPUT
    assert "No such file or directory" in done.err
    assert "Traceback" not in done.err


def test_a_folder_in_the_way_is_told(tmp_path: Path) -> None:
    (tmp_path / "r.html").mkdir()
    done = formbuf("rationale", ENZYME, "-o", str(tmp_path / "r.html"))
    assert done.code == EXIT_INPUT
    assert "is a directory" in done.err


@pytest.mark.parametrize("ending", [".html", ".docx", ".md"])
def test_a_full_disk_leaves_the_old_file(
    ending: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / f"r{ending}"
    path.write_text("as it was", encoding="utf-8")

    def full(_handle: int) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    done = formbuf("rationale", ENZYME, "-o", str(path))
    assert done.code == EXIT_INPUT
    assert "No space left on device" in done.one_error()
    assert path.read_text(encoding="utf-8") == "as it was"
    assert [p.name for p in tmp_path.iterdir()] == [path.name]


def test_a_read_only_file_is_left(tmp_path: Path) -> None:
    path = tmp_path / "r.html"
    path.write_text("as it was", encoding="utf-8")
    path.chmod(0o444)
    if os.access(path, os.W_OK):
        pytest.skip("the user of this run may write everywhere")
    done = formbuf("rationale", ENZYME, "-o", str(path))
    assert done.code == EXIT_INPUT
    assert "read-only" in done.one_error()


def test_an_interrupted_run_leaves_the_old_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "r.html"
    path.write_text("as it was", encoding="utf-8")

    def interrupted(*_: object) -> bytes:
        raise KeyboardInterrupt

    monkeypatch.setattr("formbuf.report.report.write_form", interrupted)
    done = formbuf("rationale", ENZYME, "-o", str(path))
    assert done.code == 130
    assert path.read_text(encoding="utf-8") == "as it was"


def test_a_missing_package_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "docx", None)
    done = formbuf("rationale", ENZYME, "-o", "r.docx")
    assert done.code == EXIT_USAGE
    error = done.one_error()
    assert "needs the package docx" in error
    assert "formbuf[report]" in error


def test_changes_of_two_files(tmp_path: Path) -> None:
    old, new = tmp_path / "old.json", tmp_path / "new.json"
    assert formbuf("shortlist", ENZYME, "--json", "-o", str(old)).code == 0
    text = Path(ENZYME).read_text(encoding="utf-8")
    brief = tmp_path / "brief.toml"
    brief.write_text(text.replace("target = 7.0", "target = 6.8"), encoding="utf-8")
    assert formbuf("rationale", str(brief), "-o", str(new)).code == 0
    done = formbuf("changes", str(old), str(new), columns=120)
    assert done.code == 0
    assert "ph.target" in done.out
    data = formbuf("changes", str(old), str(new), "--json").data()
    assert data["schema"] == "formbuf.changes/1"
    assert {"key": "ph.target", "old": 7.0, "new": 6.8} in data["brief"]
    rows = formbuf("changes", str(old), str(new), "--format", "csv").out.splitlines()
    assert rows[0] == "kind,system,key,old,new"
    assert "brief,,ph.target,7.0,6.8" in rows
    report = formbuf("rationale", str(brief), "--against", str(old))
    assert "Changes since the earlier result" in report.out


def test_changes_of_what_is_no_result(tmp_path: Path) -> None:
    done = formbuf("changes", ENZYME, ENZYME)
    assert done.code == EXIT_INPUT
    assert "is no JSON" in done.one_error()


@pytest.mark.bench
def test_three_forms_of_an_example_take_under_four_seconds_cold(tmp_path: Path) -> None:
    best = 1e9
    for _ in range(5):
        options = [
            p for e in ("html", "docx", "md") for p in ("-o", f"{tmp_path}/r.{e}")
        ]
        start = time.perf_counter()
        subprocess.run(
            [sys.executable, "-m", "formbuf", "rationale", ENZYME, *options],
            check=True,
            capture_output=True,
            cwd=ROOT,
            env=clean_environment({}),
        )
        best = min(best, time.perf_counter() - start)
    print(f"\nthree forms, cold: {best:.2f} s of {SECONDS_COLD:g} s allowed")
    assert best < SECONDS_COLD
