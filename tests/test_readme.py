"""What README shows is what the program prints."""

from __future__ import annotations

import re
import shlex
import subprocess
import sys
from pathlib import Path

import pytest
from cli_runner import clean_environment

ROOT = Path(__file__).parent.parent
README = (ROOT / "README.md").read_text(encoding="utf-8")
BLOCKS = re.findall(r"```console\n\$ (formbuf [^\n]+)\n(.*?)```", README, re.DOTALL)
PYTHON = re.findall(r"```python\n(.*?)```", README, re.DOTALL)


def _run(*args: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, *args],
        capture_output=True,
        text=True,
        check=False,
        cwd=ROOT,
        env=clean_environment({"COLUMNS": "80"}),
    )


def test_there_is_something_to_check() -> None:
    assert BLOCKS
    assert PYTHON


@pytest.mark.parametrize(("command", "shown"), BLOCKS, ids=[b[0] for b in BLOCKS])
def test_outputs_are_real(command: str, shown: str) -> None:
    done = _run("-m", "formbuf", *shlex.split(command)[1:])
    assert done.returncode == 0, done.stderr
    if shown.endswith("...\n"):
        assert done.stdout.startswith(shown.removesuffix("...\n"))
    else:
        assert done.stdout == shown


@pytest.mark.parametrize("code", PYTHON)
def test_the_python_lines_run(code: str) -> None:
    done = _run("-c", code)
    assert done.returncode == 0, done.stderr
    assert done.stdout.startswith("Lead: ")


def test_every_command_is_named() -> None:
    from formbuf.cli.registry import COMMANDS

    assert not [name for name in COMMANDS if name not in README]


def test_the_two_commands_stand_first() -> None:
    """One runs the main job on an example, one the tests; both set everything up."""
    first, second = re.findall(r"^    (python3 -m venv .+)$", README, re.MULTILINE)[:2]
    assert "shortlist examples/antibody.toml" in first
    assert "pytest" in second
