"""``formbuf brief new``: the dialogue, scripted and on a terminal of its own."""

from __future__ import annotations

import os
import select
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest
from cli_runner import ROOT, clean_environment, formbuf
from reference_tables import library

from formbuf.cli import brief_new
from formbuf.errors import UsageError

NASAL = [
    "spray of X",
    "?",
    "nose job",
    "nasal",
    "back",
    "nasal",
    "5,5",
    "5.5",
    "liquid",
    "small_molecule",
    "5 6",
    "25",
    "plastic_bottle",
    "",
    "adult",
    "0.2",
    "2",
]


class Played:
    """A user with a list of lines, and what was said to it."""

    def __init__(self, *lines: str) -> None:
        self.lines: Iterator[str] = iter(lines)
        self.said: list[str] = []

    def ask(self, prompt: str) -> str:
        assert prompt == brief_new.PROMPT
        try:
            return next(self.lines)
        except StopIteration:
            raise EOFError from None

    @property
    def heard(self) -> str:
        return "\n".join(self.said)


def _hold(path: Path, *lines: str) -> Played:
    user = Played(*lines)
    brief_new.hold_interview(library(), path, user.ask, user.said.append)
    return user


def test_a_nasal_spray(tmp_path: Path) -> None:
    path = tmp_path / "spray.toml"
    user = _hold(path, *NASAL, "done", "done")
    assert "not in the list" in user.heard
    assert "Decimals have a point" in user.heard
    assert "The route decides" in user.heard
    assert user.said[-1].endswith(f"Next: formbuf shortlist {path}")
    done = formbuf("brief", "check", str(path))
    assert done.code == 0
    result = formbuf("shortlist", str(path), "--json")
    assert result.code == 0
    assert result.data()["brief"]["product"]["route"] == "nasal"


def test_facts_that_could_change_the_order_are_asked_last(tmp_path: Path) -> None:
    path = tmp_path / "spray.toml"
    user = _hold(path, *NASAL, *[""] * 6, "ester, 10", "yes", "1", *[""] * 10)
    assert "could change the order" in user.heard
    text = path.read_text("utf-8")
    assert "[facts]" in text
    assert 'groups = ["ester", "thiol"]' in text.partition("[facts]")[0]
    assert "multidose = true" in text
    assert formbuf("brief", "check", str(path)).code == 0


def test_done_needs_route_and_ph(tmp_path: Path) -> None:
    path = tmp_path / "x.toml"
    user = _hold(path, "done", "", "nasal", "done", "5.5", "done", "done")
    assert user.heard.count("needs at least the route and the target pH") == 2
    assert path.exists()


def test_back_at_the_first_question(tmp_path: Path) -> None:
    user = _hold(tmp_path / "x.toml", "back", "", "nasal", "6", "done", "done")
    assert "This is the first question." in user.heard


def test_answers_that_end_early_write_nothing(tmp_path: Path) -> None:
    path = tmp_path / "x.toml"
    with pytest.raises(UsageError, match="answers ended"):
        _hold(path, "", "nasal", "6")
    assert not path.exists()


def test_an_existing_file_is_left_alone(tmp_path: Path) -> None:
    path = tmp_path / "x.toml"
    path.write_text("mine", "utf-8")
    with pytest.raises(UsageError, match="already there"):
        brief_new.refuse_existing(path)
    link = tmp_path / "link.toml"
    link.symlink_to(tmp_path / "nowhere")
    with pytest.raises(UsageError, match="already there"):
        brief_new.refuse_existing(link)


def test_a_folder_that_is_not_there_is_told_before_the_first_question(
    tmp_path: Path,
) -> None:
    with pytest.raises(UsageError, match="no folder"):
        brief_new.refuse_existing(tmp_path / "no" / "x.toml")


def test_what_an_answer_is_taken_as_is_said(tmp_path: Path) -> None:
    user = _hold(tmp_path / "x.toml", "", "nose", "6", "1", "done", "done")
    assert "(taken as nasal)" in user.heard
    assert "(taken as liquid)" in user.heard


def test_without_a_terminal_it_refuses() -> None:
    done = formbuf("brief", "new", "x.toml")
    assert done.code == 2
    assert "needs a terminal" in done.one_error()


@pytest.mark.skipif(sys.platform == "win32", reason="needs a pseudo-terminal")
def test_on_a_terminal(tmp_path: Path) -> None:
    path = tmp_path / "spray.toml"
    heard, code = _on_terminal(path, [*NASAL, "done", "done"])
    assert code == 0, heard
    assert f"Wrote {path}" in heard.replace("\r\n", "")
    assert formbuf("brief", "check", str(path)).code == 0


@pytest.mark.skipif(sys.platform == "win32", reason="needs a pseudo-terminal")
def test_ctrl_c_leaves_without_a_file(tmp_path: Path) -> None:
    path = tmp_path / "spray.toml"
    heard, code = _on_terminal(path, NASAL[:4], interrupt=True)
    assert code == 130, heard
    assert "Traceback" not in heard
    assert not path.exists()


def _on_terminal(
    path: Path, lines: list[str], *, interrupt: bool = False
) -> tuple[str, int]:
    """Run the command on a terminal and type lines whenever it asks."""
    import pty

    master, slave = pty.openpty()
    # where the tests themselves run in the background, the signal would be ignored
    code = (
        "import signal, sys\n"
        "signal.signal(signal.SIGINT, signal.default_int_handler)\n"
        "from formbuf.cli.main import run\n"
        f"sys.exit(run(['brief', 'new', {str(path)!r}]))\n"
    )
    process = subprocess.Popen(
        [sys.executable, "-c", code],
        stdin=slave,
        stdout=slave,
        stderr=slave,
        cwd=ROOT,
        env=clean_environment({"TERM": "dumb"}),
    )
    os.close(slave)
    heard = ""
    try:
        for line in [*lines, ""]:
            heard += _until_asked(master)
            if not line and interrupt:
                time.sleep(0.5)  # the prompt stands before the read has begun
                process.send_signal(signal.SIGINT)
                break
            if process.poll() is None:
                os.write(master, f"{line}\n".encode())
        heard += _until_asked(master, end=True)
        return heard, process.wait(timeout=20)
    finally:
        process.kill()
        process.wait()
        os.close(master)


def _until_asked(master: int, *, end: bool = False) -> str:
    """Read until the prompt stands, or until nothing more comes."""
    heard = b""
    limit = time.monotonic() + 20.0
    while time.monotonic() < limit:
        ready, _, _ = select.select([master], [], [], 20.0)
        if not ready:
            break
        try:
            part = os.read(master, 4096)
        except OSError:
            break
        if not part:
            break
        heard += part
        if heard.endswith(b"> ") and not end:
            break
    return heard.decode("utf-8", "replace")
