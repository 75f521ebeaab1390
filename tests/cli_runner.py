"""Run the command line within the test, and catch what it says."""

from __future__ import annotations

import contextlib
import io
import json
import os
import subprocess
import sys
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any
from unittest import mock

from formbuf.cli.main import run

ROOT = Path(__file__).resolve().parent.parent
EXAMPLES = ROOT / "examples"


@dataclass(frozen=True)
class Done:
    """Exit code and streams of one run."""

    code: int
    out: str
    err: str

    def data(self) -> dict[str, Any]:
        """The JSON on standard output; NaN and infinity are refused."""
        found: dict[str, Any] = json.loads(self.out, parse_constant=_refuse)
        return found

    def one_error(self) -> str:
        """The only error, after checks that nothing else was said."""
        assert self.out == ""
        assert "Traceback" not in self.err
        lines = self.err.splitlines()
        assert sum(line.startswith("Error: ") for line in lines) == 1, self.err
        assert sum(line.startswith("Hint: ") for line in lines) <= 1, self.err
        assert lines[0].startswith("Error: ")
        return self.err


def _refuse(name: str) -> float:
    msg = f"JSON holds {name}"
    raise ValueError(msg)


def formbuf(*args: str, columns: int | None = 80, **environment: str) -> Done:
    """Run the command line in this process; standard output is no terminal."""
    values = {**environment}
    if columns is not None:
        values["COLUMNS"] = str(columns)
    out, err = io.StringIO(), io.StringIO()
    with (
        mock.patch.dict(os.environ, values),
        contextlib.redirect_stdout(out),
        contextlib.redirect_stderr(err),
    ):
        code = run(args)
    return Done(code, out.getvalue(), err.getvalue())


def process(
    *args: str, stdin: int = subprocess.DEVNULL, **environment: str
) -> subprocess.CompletedProcess[str]:
    """Run the command line as a process of its own."""
    return _interpreter("-m", "formbuf", *args, stdin=stdin, **environment)


def python(code: str, **environment: str) -> subprocess.CompletedProcess[str]:
    """Run some lines of Python as a process of its own."""
    return _interpreter("-c", code, stdin=None, **environment)


def _interpreter(
    *args: str, stdin: int | None, **environment: str
) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, *args],
        capture_output=True,
        text=True,
        check=False,
        stdin=stdin,
        cwd=ROOT,
        env=clean_environment(environment),
    )


def clean_environment(changes: Mapping[str, str]) -> dict[str, str]:
    """The environment without what changes how output looks, plus changes."""
    dropped = ("COLUMNS", "NO_COLOR", "TERM", "FORCE_COLOR")
    kept = {k: v for k, v in os.environ.items() if k not in dropped}
    return {**kept, "PYTHONPATH": str(ROOT), **changes}
