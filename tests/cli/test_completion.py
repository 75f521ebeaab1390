"""What a press of the tabulator offers, and how long it takes."""

from __future__ import annotations

import subprocess
import sys
import time
from collections.abc import Iterator
from typing import Any

import pytest
from cli_runner import ROOT, clean_environment, python

from formbuf.cli import main
from formbuf.cli.complete import BY_METAVAR, first_column, tables
from formbuf.cli.registry import COMMANDS
from formbuf.library import load_library
from formbuf.library.store import knowledge_root

PROGRAM = (
    "import sys; from formbuf.__main__ import start; sys.argv[0] = 'formbuf'; start()"
)
#: What needs no names: numbers, files, free text.
FREE = {
    *("BRIEF", "[BRIEF]", "FILE", "DIR", "NEW.json", "OLD.json", "TOPIC", "[TOPIC]"),
    *("C", "CHARGE", "G_MOL", "KG", "L", "MG_ML", "ML", "MMOL_L", "MOSM_KG", "N"),
    *("PA", "PERCENT", "PH", "RATIO", "SEED", "TIMES", "KEY=RANGE"),
}


def _offered(words: str, shell: str = "bash", **more: str) -> list[str]:
    count = len(words.split()) - (not words.endswith(" "))
    asked = {
        "_FORMBUF_COMPLETE": f"complete_{shell}",
        "COMP_WORDS": words,
        "COMP_CWORD": str(count),
        "_TYPER_COMPLETE_ARGS": words,
        **more,
    }
    done = subprocess.run(
        [sys.executable, "-c", PROGRAM],
        capture_output=True,
        text=True,
        check=False,
        cwd=ROOT,
        env=clean_environment(asked),
    )
    assert done.stderr == ""
    return done.stdout.split()


def test_systems() -> None:
    assert _offered("formbuf explain x hist") == [
        s for s in load_library().systems if s.startswith("hist")
    ]


def test_materials_with_an_amount() -> None:
    assert "sucrose=" in _offered("formbuf predict --add suc")


@pytest.mark.parametrize(
    ("words", "name"),
    [
        ("formbuf sho", "shortlist"),
        ("formbuf shortlist --ro", "--route"),
        ("formbuf shortlist --route na", "nasal"),
        ("formbuf shortlist --form ", "frozen"),
        ("formbuf shortlist --drug-kind anti", "antibody"),
        ("formbuf shortlist --tonicity-agent su", "sucrose"),
        ("formbuf shortlist x --format j", "json"),
        ("formbuf knowledge sh", "show"),
        ("formbuf knowledge show io", "ionization"),
        ("formbuf knowledge show species tri", "tris"),
        ("formbuf knowledge sources gold", "goldberg_2002"),
        ("formbuf batch-sheet --system sodium_ph", "sodium_phosphate"),
        ("formbuf dilute --into glu", "glucose_5"),
    ],
)
def test_names(words: str, name: str) -> None:
    assert name in _offered(words)


@pytest.mark.parametrize("shell", ["bash", "zsh", "fish"])
def test_every_shell(shell: str) -> None:
    more = {"_TYPER_COMPLETE_FISH_ACTION": "get-args"} if shell == "fish" else {}
    assert "histidine_hydrochloride" in " ".join(
        _offered("formbuf explain x hist", shell, **more)
    )


def test_files_are_left_to_the_shell() -> None:
    assert _offered("formbuf shortlist ex") == []


def test_nothing_heavy_is_imported() -> None:
    code = (
        "import os, sys\n"
        "from formbuf.cli.main import run\n"
        "os.environ.update(_FORMBUF_COMPLETE='complete_bash', COMP_CWORD='3',\n"
        "    COMP_WORDS='formbuf explain x hist')\n"
        "run([])\n"
        "print('LOADED', *sys.modules)\n"
    )
    done = python(code)
    loaded = done.stdout.partition("LOADED ")[2].split()
    assert loaded
    assert not {"numpy", "scipy", "pandas", "rich.console"} & set(loaded)
    assert not [name for name in loaded if name.startswith("formbuf.library")]


def test_the_tables_are_those_of_the_library() -> None:
    assert str(tables()) == str(knowledge_root())
    assert first_column("species.csv") == list(load_library().species)
    assert first_column("no_such.csv") == []


def _metavars(command: Any) -> Iterator[str]:
    for below in getattr(command, "commands", {}).values():
        yield from _metavars(below)
    for param in command.params:
        if param.metavar:
            yield str(param.metavar)


@pytest.mark.parametrize("name", COMMANDS)
def test_every_option_is_completed_or_free(name: str) -> None:
    group: Any = main.typer.main.get_command(main.app)
    command = group.get_command(None, name)
    for metavar in _metavars(command):
        assert metavar in BY_METAVAR or metavar in FREE, metavar


@pytest.mark.bench
@pytest.mark.parametrize(
    "words", ["formbuf explain x hist", "formbuf predict --add s", "formbuf sh"]
)
def test_it_takes_less_than_a_quarter_of_a_second(words: str) -> None:
    best = 9.9
    for _ in range(5):
        start = time.perf_counter()
        _offered(words)
        best = min(best, time.perf_counter() - start)
    print(f"{words}: {best:.3f} s")
    assert best < 0.25
