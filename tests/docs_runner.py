"""Run the commands of a Markdown page and compare what they print.

Commands stand in fenced ``console`` blocks after a ``$``; the lines below are their
output. A line of three dots stands for any number of lines. The commands of one page
run one after the other in a folder that holds a copy of the examples.
"""

from __future__ import annotations

import os
import re
import shlex
import shutil
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

from cli_runner import EXAMPLES, formbuf

DOTS = "..."
FENCE = re.compile(r"^```console\n(.*?)^```$", re.MULTILINE | re.DOTALL)


@dataclass
class Command:
    """One command of a page and the output that the page shows."""

    line: str
    shown: list[str] = field(default_factory=list)

    @property
    def args(self) -> list[str]:
        """The words after the name of the program."""
        name, *rest = shlex.split(self.line)
        assert name == "formbuf", f"{self.line}: only formbuf is run"
        return rest


def commands(text: str) -> list[Command]:
    """Every command of a page, in order."""
    found: list[Command] = []
    for block in FENCE.findall(text):
        lines = iter(block.splitlines())
        for line in lines:
            if line.startswith("$ "):
                found.append(Command(_whole(line[2:], lines)))
            else:
                assert found, f"output without a command: {line}"
                found[-1].shown.append(line.rstrip())
    return found


def _whole(line: str, lines: Iterator[str]) -> str:
    """Join a command that goes on after a backslash."""
    while line.endswith("\\"):
        line = line[:-1] + next(lines).strip()
    return line


def prepare(folder: Path) -> None:
    """Put a copy of the examples into a folder and go there."""
    shutil.copytree(EXAMPLES, folder / "examples")
    os.chdir(folder)


def printed(command: Command) -> list[str]:
    """Run a command; its output and then what it said, line by line."""
    done = formbuf(*command.args, columns=80)
    assert "Traceback" not in done.err, done.err
    assert done.code in (0, 1, 2, 3), (command.line, done.err)
    return [line.rstrip() for line in (done.out + done.err).splitlines()]


def difference(shown: list[str], found: list[str]) -> str:
    """What is shown but not printed, empty where the page is true."""
    parts = _parts(shown)
    at = 0
    for number, part in enumerate(parts):
        if not part:
            continue
        starts = range(at, len(found) - len(part) + 1)
        if number == 0:
            starts = range(1)
        place = next((i for i in starts if found[i : i + len(part)] == part), None)
        if place is None:
            return "\n".join(["shown:", *part, "printed:", *found[:200]])
        at = place + len(part)
    if shown and shown[-1] != DOTS and at != len(found):
        return "\n".join(["printed, but not shown:", *found[at : at + 20]])
    return ""


def _parts(shown: list[str]) -> list[list[str]]:
    parts: list[list[str]] = [[]]
    for line in shown:
        if line == DOTS:
            parts.append([])
        else:
            parts[-1].append(line)
    return parts
