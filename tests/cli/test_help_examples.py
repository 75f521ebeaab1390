"""Every example in the help of a command runs."""

from __future__ import annotations

import shlex
import shutil
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from cli_runner import formbuf
from docs_runner import prepare

from formbuf.cli import main
from formbuf.cli.registry import COMMANDS
from formbuf.library.store import knowledge_root

#: Examples that ask a person; the dialogue has its own tests.
ASKING = ("brief", "new")
#: Examples that take more than a few seconds.
LONG = (
    "--draws 2500",
    "formbuf scan",
    "formbuf sensitivity",
    "formbuf qualify",
    "formbuf rationale",
    "formbuf changes",
    "--figure",
)


def _commands(
    command: Any, path: tuple[str, ...]
) -> Iterator[tuple[tuple[str, ...], Any]]:
    below = getattr(command, "commands", {})
    if not below:
        yield path, command
    for name, one in below.items():
        yield from _commands(one, (*path, name))


def _examples() -> Iterator[Any]:
    group: Any = main.typer.main.get_command(main.app)
    lines = [((), main.app.info.epilog)]
    for name in COMMANDS:
        command = group.get_command(None, name)
        lines += [(p, c.epilog) for p, c in _commands(command, (name,))]
    seen = set()
    for path, epilog in lines:
        text = str(epilog or "").replace("\\\n", " ")
        for line in text.splitlines():
            words = " ".join(line.split())
            if words.startswith("formbuf ") and words not in seen and path != ASKING:
                seen.add(words)
                marks = [pytest.mark.slow] if any(x in words for x in LONG) else []
                yield pytest.param(words, id=words[:60], marks=marks)


@pytest.mark.parametrize("line", list(_examples()))
def test_the_example_runs(
    line: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    prepare(tmp_path)
    _own_tables(tmp_path / "my_tables")
    _two_results(line)
    done = formbuf(*shlex.split(line)[1:])
    assert done.code == 0, done.err
    assert "Traceback" not in done.err
    for place in _written(line):
        assert (tmp_path / place).stat().st_size > 0, place


def _own_tables(folder: Path) -> None:
    folder.mkdir()
    shutil.copy(Path(str(knowledge_root())) / "ions.csv", folder / "ions.csv")


def _two_results(line: str) -> None:
    """Make the results that an example compares with."""
    written = _written(line)
    for word in shlex.split(line):
        if word.endswith(".json") and word not in written:
            formbuf("shortlist", "examples/eye_drop.toml", "-o", word)


def _written(line: str) -> list[str]:
    words = shlex.split(line)
    options = ("-o", "--output", "--figure", "--record")
    return [words[i + 1] for i, word in enumerate(words) if word in options]


def test_there_is_an_example_of_every_command() -> None:
    shown = {p.values[0].split()[1] for p in _examples()}
    assert shown == set(COMMANDS)
