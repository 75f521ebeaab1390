"""What a run imports, counted rather than timed, so that helps stay quick."""

from __future__ import annotations

import subprocess
import sys

import pytest
from cli_runner import ROOT, clean_environment

HEAVY = {
    "numpy",
    "scipy",
    "pandas",
    "matplotlib",
    "jinja2",
    "docx",
    "openpyxl",
    "rich.table",
    "rich.console",
}
#: Typer itself imports pydantic when it builds the options of a command.
VALIDATION = {"pydantic", "pydantic_core"}
COMPUTING = {
    "scipy",
    "pandas",
    "matplotlib",
    "jinja2",
    "docx",
    "openpyxl",
}


def _loaded(*args: str) -> set[str]:
    code = (
        "import sys\n"
        "from formbuf.cli.main import run\n"
        f"run({list(args)!r})\n"
        "sys.stderr.write('\\nLOADED ' + ' '.join(sys.modules))\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=True,
        cwd=ROOT,
        env=clean_environment({}),
    )
    return set(done.stderr.rpartition("LOADED ")[2].split())


@pytest.mark.parametrize("args", [("--help",), ("--version",), ()])
def test_the_frame_imports_no_heavy_module(args: tuple[str, ...]) -> None:
    loaded = _loaded(*args)
    assert not loaded & (HEAVY | VALIDATION)
    assert not {name for name in loaded if name.startswith("formbuf.library")}


@pytest.mark.parametrize(
    "command",
    [
        ("shortlist",),
        ("explain",),
        ("predict",),
        ("brief", "check"),
        ("knowledge", "show"),
    ],
)
def test_the_help_of_a_command_imports_no_heavy_module(
    command: tuple[str, ...],
) -> None:
    loaded = _loaded(*command, "--help")
    assert not loaded & HEAVY
    assert not {name for name in loaded if name.startswith("formbuf.library")}


@pytest.mark.parametrize(
    "args",
    [
        ("shortlist", "examples/antibody.toml"),
        ("explain", "examples/antibody.toml", "none", "--json"),
        ("predict", "--add", "sucrose=1"),
        ("knowledge", "check"),
    ],
)
def test_a_run_imports_nothing_it_does_not_need(args: tuple[str, ...]) -> None:
    assert not _loaded(*args) & COMPUTING


def test_a_mistyped_command_imports_no_heavy_module() -> None:
    assert not _loaded("shortlst") & HEAVY


def test_a_mistake_of_usage_is_found_before_anything_is_loaded() -> None:
    assert "numpy" not in _loaded("shortlist", "x.toml", "--format", "xml")


def test_the_budget_sees_what_is_there() -> None:
    assert "numpy" in _loaded("predict", "--add", "sucrose=1")
