"""Runs that are interrupted, killed, or write the same file: whole results or old ones."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, ROOT, clean_environment

ANTIBODY = EXAMPLES / "antibody.toml"
pytestmark = pytest.mark.slow
posix = pytest.mark.skipif(os.name == "nt", reason="needs POSIX")


@posix
@pytest.mark.parametrize("tenths", range(9))
def test_ctrl_c_at_any_moment_leaves_the_old_output(
    tenths: int, tmp_path: Path
) -> None:
    place = tmp_path / "out.json"
    place.write_text("old", "utf-8")
    running = subprocess.Popen(
        [sys.executable, "-m", "formbuf", "shortlist", str(ANTIBODY), "-o", str(place)],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
        cwd=ROOT,
        env=clean_environment({}),
    )
    time.sleep(0.05 + 0.1 * tenths)
    running.send_signal(signal.SIGINT)
    _, err = running.communicate(timeout=30)
    text = place.read_text("utf-8")
    if running.returncode == 0 or text != "old":
        assert json.loads(text)["schema"] == "formbuf.shortlist/1"
    if running.returncode:
        assert running.returncode in (130, -signal.SIGINT), err
        if "formbuf/" in err:  # else the interpreter itself was still starting
            assert "Traceback" not in err
    assert [p.name for p in tmp_path.iterdir()] == ["out.json"]


@posix
def test_killed_in_the_middle_of_writing_the_old_output_stays(tmp_path: Path) -> None:
    place = tmp_path / "out.txt"
    place.write_text("old", "utf-8")
    code = (
        "import os, signal, sys\n"
        "from pathlib import Path\n"
        "from formbuf.output import writers\n"
        "os.fsync = lambda _: os.kill(os.getpid(), signal.SIGKILL)\n"
        "writers.write_file(Path(sys.argv[1]), 'new' * 100000)\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code, str(place)],
        check=False,
        cwd=ROOT,
        env=clean_environment({}),
    )
    assert done.returncode == -signal.SIGKILL
    assert place.read_text("utf-8") == "old"


def test_runs_that_write_one_file_leave_one_whole_result(tmp_path: Path) -> None:
    place = tmp_path / "out.json"
    running = [
        subprocess.Popen(
            [
                sys.executable,
                "-m",
                "formbuf",
                "predict",
                "--add",
                f"sucrose={amount}",
                "-o",
                str(place),
            ],
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            cwd=ROOT,
            env=clean_environment({}),
        )
        for amount in (1, 10, 100, 1000)
    ]
    for one in running:
        _, err = one.communicate(timeout=60)
        assert one.returncode == 0, err
    data = json.loads(place.read_text("utf-8"))
    assert data["composition"][0]["mmol_l"] in (1, 10, 100, 1000)
    assert [p.name for p in tmp_path.iterdir()] == ["out.json"]
