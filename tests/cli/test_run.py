"""The frame of the command line: outcomes, streams, helps, and a closed pipe."""

from __future__ import annotations

import os
import pty
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest
from cli_runner import EXAMPLES, ROOT, clean_environment, formbuf, process

import formbuf as package
from formbuf.cli import emit, frame, main, predict
from formbuf.cli.registry import COMMANDS
from formbuf.errors import ConvergenceError, KnowledgeError, OutputError

WATER = ("predict", "--add", "sucrose=100")


def test_version() -> None:
    done = formbuf("--version")
    assert (done.code, done.out, done.err) == (
        0,
        f"formbuf {package.__version__}\n",
        "",
    )


def test_python_m_formbuf() -> None:
    done = process("--version")
    assert (done.returncode, done.stdout) == (0, f"formbuf {package.__version__}\n")


@pytest.mark.parametrize("flag", ["-h", "--help"])
def test_help_lists_every_command(flag: str) -> None:
    done = formbuf(flag)
    assert done.code == 0
    assert done.err == ""
    for name, entry in COMMANDS.items():
        assert f"  {name}" in done.out
        assert entry.help in done.out
    assert "Exit codes: 0 done, 1 no acceptable candidate" in " ".join(done.out.split())


def test_without_arguments_the_help_is_the_answer() -> None:
    done = formbuf()
    assert done.code == 2
    assert done.out == ""
    assert "Commands:" in done.err


#: Commands that ask a person; what they write is named as an argument.
ASKING = [("brief", "new")]


def _paths() -> list[tuple[str, ...]]:
    """Every command, sub-commands too."""
    found: list[tuple[str, ...]] = []
    group: Any = main.typer.main.get_command(main.app)
    for name in COMMANDS:
        command = group.get_command(None, name)
        below = getattr(command, "commands", None)
        found += [(name, sub) for sub in below] if below else [(name,)]
    return found


@pytest.mark.parametrize("path", _paths(), ids="-".join)
def test_every_command_has_a_help_with_an_example(path: tuple[str, ...]) -> None:
    done = formbuf(*path, "-h")
    assert done.code == 0
    assert done.out.startswith(f"Usage: formbuf {' '.join(path)} ")
    assert "Examples:" in done.out
    example = done.out.split("Examples:")[1]
    assert f"formbuf {' '.join(path)}" in example
    assert all(len(line) <= 80 for line in done.out.splitlines())


@pytest.mark.parametrize("path", [p for p in _paths() if p not in ASKING], ids="-".join)
def test_every_command_writes_to_a_file(path: tuple[str, ...]) -> None:
    assert "-o, --output FILE" in formbuf(*path, "-h").out


@pytest.mark.parametrize("name", ["knowledge", "brief"])
def test_a_group_without_a_command_shows_its_help(name: str) -> None:
    done = formbuf(name)
    assert done.code == 2
    assert "Commands:" in done.err


@pytest.mark.parametrize(
    ("error", "code", "said"),
    [
        (OutputError("x: cannot be written"), 3, "Error: x: cannot be written\n"),
        (KnowledgeError(["a:1:b: c"], hint="mend"), 4, "Error: a:1:b: c\nHint: mend\n"),
        (ConvergenceError("not solved"), 5, "Error: not solved\n"),
    ],
)
def test_errors_are_told_once_with_their_exit_code(
    monkeypatch: pytest.MonkeyPatch, error: Exception, code: int, said: str
) -> None:
    _fail(monkeypatch, error)
    done = formbuf(*WATER)
    assert (done.code, done.err) == (code, said)


def test_a_bug_keeps_its_traceback(monkeypatch: pytest.MonkeyPatch) -> None:
    _fail(monkeypatch, ZeroDivisionError("planted"))
    done = formbuf(*WATER)
    assert done.code == 70
    assert "Traceback" in done.err
    assert "ZeroDivisionError: planted" in done.err
    assert "bug in formbuf" in done.err


def test_an_interrupted_run(monkeypatch: pytest.MonkeyPatch) -> None:
    _fail(monkeypatch, KeyboardInterrupt())
    done = formbuf(*WATER)
    assert done.code == 130
    assert "Traceback" not in done.err


def _fail(monkeypatch: pytest.MonkeyPatch, error: BaseException) -> None:
    def fail(*_: object) -> None:
        raise error

    monkeypatch.setattr(predict, "open_library", fail)


@pytest.mark.skipif(os.name == "nt", reason="signals of another kind")
def test_control_c_ends_a_process_quietly() -> None:
    code = (
        "import sys, time\n"
        "from formbuf.cli import main, predict\n"
        "def wait(*_):\n"
        "    print('ready', flush=True)\n"
        "    time.sleep(60)\n"
        "predict.open_library = wait\n"
        "sys.exit(main.run(['predict', '--add', 'sucrose=1']))\n"
    )
    running = subprocess.Popen(
        [sys.executable, "-c", code],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        cwd=ROOT,
        env=clean_environment({}),
    )
    assert running.stdout is not None
    assert running.stdout.readline() == "ready\n"
    running.send_signal(signal.SIGINT)
    _, err = running.communicate(timeout=30)
    assert running.returncode == 130
    assert "Traceback" not in err


@pytest.mark.skipif(os.name == "nt", reason="pipes of another kind")
def test_a_closed_pipe_is_quiet() -> None:
    running = subprocess.Popen(
        [sys.executable, "-m", "formbuf", "knowledge", "show", "sources"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=ROOT,
        env=clean_environment({}),
    )
    assert running.stdout is not None
    assert running.stderr is not None
    running.stdout.close()
    err = running.stderr.read()
    running.stderr.close()
    assert running.wait(timeout=60) == emit.EXIT_CLOSED_PIPE
    assert err == b""


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no full device")
def test_a_full_disk_behind_standard_output() -> None:
    with Path("/dev/full").open("w") as full:
        done = subprocess.run(
            [sys.executable, "-m", "formbuf", *WATER],
            stdout=full,
            stderr=subprocess.PIPE,
            text=True,
            check=False,
            cwd=ROOT,
            env=clean_environment({}),
        )
    assert done.returncode == 3
    assert done.stderr.startswith("Error: standard output: cannot be written (No space")
    assert "Traceback" not in done.stderr


@pytest.mark.skipif(os.name == "nt", reason="no such shell")
@pytest.mark.parametrize("closed", [">&-", "2>&-"])
def test_a_stream_that_was_closed_before(closed: str) -> None:
    line = f'"{sys.executable}" -m formbuf {" ".join(WATER)} {closed}'
    done = subprocess.run(
        ["sh", "-c", line],
        capture_output=True,
        text=True,
        check=False,
        cwd=ROOT,
        env=clean_environment({}),
    )
    assert done.returncode == 0
    assert "Traceback" not in done.stderr


def _at_a_terminal(*args: str, columns: int = 100, **environment: str) -> str:
    """What a command writes to a pseudo terminal of a width."""
    ours, theirs = pty.openpty()
    import fcntl
    import struct
    import termios

    fcntl.ioctl(theirs, termios.TIOCSWINSZ, struct.pack("HHHH", 50, columns, 0, 0))
    running = subprocess.Popen(
        [sys.executable, "-m", "formbuf", *args],
        stdout=theirs,
        stderr=subprocess.PIPE,
        stdin=subprocess.DEVNULL,
        cwd=ROOT,
        env=clean_environment({"TERM": "xterm-256color", **environment}),
    )
    os.close(theirs)
    written = b""
    end = time.monotonic() + 60
    while time.monotonic() < end:
        try:
            piece = os.read(ours, 4096)
        except OSError:
            break
        if not piece:
            break
        written += piece
    os.close(ours)
    assert running.stderr is not None
    running.stderr.close()
    assert running.wait(timeout=60) == 0
    return written.decode()


@pytest.mark.skipif(os.name == "nt", reason="no pseudo terminal")
def test_a_terminal_gets_bold_headings_and_its_own_width() -> None:
    text = _at_a_terminal("knowledge", "show", "species", columns=70)
    assert text.startswith("\x1b[1m")
    assert max(len(line) for line in text.splitlines()[1:]) <= 70


@pytest.mark.skipif(os.name == "nt", reason="no pseudo terminal")
@pytest.mark.parametrize("setting", [{"NO_COLOR": "1"}, {"TERM": "dumb"}])
def test_a_terminal_may_refuse_bold(setting: dict[str, str]) -> None:
    text = _at_a_terminal("knowledge", "show", "species", **setting)
    assert "\x1b" not in text


@pytest.mark.parametrize(
    ("columns", "width"),
    [("", 80), ("120", 120), ("abc", 80), ("0", 80), ("-5", 80), ("99999999999", 80)],
)
def test_a_pipe_has_the_width_of_columns_or_80(columns: str, width: int) -> None:
    done = formbuf("knowledge", "show", "sources", columns=None, COLUMNS=columns)
    longest = max(len(line) for line in done.out.splitlines())
    assert width - 10 < longest <= width
    assert "\x1b" not in done.out


@pytest.mark.parametrize("encoding", ["ascii", "cp1252", "utf-8"])
@pytest.mark.parametrize("format_", ["table", "json", "csv", "markdown"])
def test_any_encoding_of_the_terminal_will_do(encoding: str, format_: str) -> None:
    done = process(
        "knowledge", "show", "sources", "--format", format_, PYTHONIOENCODING=encoding
    )
    assert done.returncode == 0, done.stderr
    assert done.stderr == ""


def test_data_goes_to_standard_output_alone() -> None:
    done = formbuf(*WATER, "--json")
    assert done.err == ""
    assert done.data()["schema"] == "formbuf.predict/1"


def test_a_file_is_named_on_standard_error(tmp_path: Path) -> None:
    path = tmp_path / "out.json"
    done = formbuf(*WATER, "-o", str(path))
    assert (done.code, done.out, done.err) == (0, "", f"Wrote {path}\n")
    assert path.read_text().startswith('{\n  "schema": "formbuf.predict/1"')


def test_a_file_that_cannot_be_written(tmp_path: Path) -> None:
    done = formbuf(*WATER, "-o", str(tmp_path / "nowhere" / "out.json"))
    assert done.code == 3
    assert "out.json: cannot be written" in done.one_error()


def test_completion_lists_commands_without_importing_them() -> None:
    code = (
        "import sys\n"
        "from formbuf.cli import main\n"
        "main.run()\n"
        "sys.stderr.write(' '.join(sys.modules))\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=False,
        cwd=ROOT,
        env=clean_environment(
            {
                "_FORMBUF_COMPLETE": "complete_bash",
                "COMP_WORDS": "formbuf s",
                "COMP_CWORD": "1",
            }
        ),
    )
    assert "shortlist" in done.stdout.split()
    assert "numpy" not in done.stderr.split()


def test_examples_exist() -> None:
    assert len(list(EXAMPLES.glob("*.toml"))) >= 4


def test_example_lines_are_kept_as_they_are() -> None:
    assert frame.examples("a", "  b") == "\b\nExamples:\n  a\n    b"
