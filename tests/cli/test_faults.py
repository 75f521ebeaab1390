"""What surrounds a run goes wrong: files, links, signals, streams, locale, limits.

Each case must end with a documented exit code and no traceback, and what was there
before must be as it was.
"""

from __future__ import annotations

import json
import os
import shutil
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, clean_environment, formbuf, process, python

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

ANTIBODY = EXAMPLES / "antibody.toml"
SMALL = '[product]\nroute = "nasal"\n[ph]\ntarget = 5.5\n'
QUICK = ("predict", "--add", "sodium_acetate_trihydrate=20", "--at", "25")
posix = pytest.mark.skipif(os.name == "nt", reason="needs POSIX")
DOCUMENTED = {0, 1, 2, 3, 4, 5}


def _check(path: Path, *more: str) -> int:
    done = formbuf("brief", "check", str(path), *more)
    assert "Traceback" not in done.err
    assert done.code in DOCUMENTED
    if done.code:
        assert done.one_error()
    return done.code


# --- files of every kind


@pytest.mark.parametrize(
    ("data", "code"),
    [
        (SMALL.replace("\n", "\r\n").encode(), 0),
        (b"\xef\xbb\xbf" + SMALL.encode(), 0),
        (SMALL.replace("\n", "\r").encode(), 3),
        (SMALL.encode("utf-16"), 3),
        (SMALL.encode("utf-32"), 3),
        (f'title = "Müller"\n{SMALL}'.encode("latin-1"), 3),
        (f'title = "Müller"\n{SMALL}'.encode(), 0),
        (b"", 3),
        (b"\n" * 1000, 3),
        (b"\0" * 1000, 3),
        (b"#" * 900_000 + b"\n" + SMALL.encode(), 0),
        (b"x" * 5_000_000, 3),
        (SMALL.encode() + b"[facts]\na = " + b"[" * 5000, 3),
        (SMALL.encode() + b"[facts]\na = " + b"[" * 90 + b"]" * 90, 3),
        (SMALL.encode() + b"".join(b"[a%d]\n" % i for i in range(20_000)), 3),
        (SMALL.encode() + b"[a" + b".a" * 20_000 + b"]\n", 3),
        (SMALL.encode() + b"[[storage]]\ntemperature_c = 5\n" * 20_000, 3),
        (b'[product]\nroute = "' + b"n" * 500_000 + b'"\n[ph]\ntarget = 5\n', 3),
        (b"target = " + b"9" * 100_000, 3),
    ],
    ids=range(19),
)
def test_briefs_of_every_encoding_and_size(
    data: bytes, code: int, tmp_path: Path
) -> None:
    path = tmp_path / "brief.toml"
    path.write_bytes(data)
    start = time.perf_counter()
    assert _check(path) == code
    assert time.perf_counter() - start < 5.0


@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"])
def test_tables_of_the_user_from_windows(mark: bytes, tmp_path: Path) -> None:
    head = b"species,route,level,usp_nf,ph_eur,jp,reason,level_basis,monograph_basis"
    row = b"histidine,nasal,limited,yes,yes,yes,own report 12,judgement,memory"
    (tmp_path / "precedent.csv").write_bytes(mark + head + b"\r\n" + row + b"\r\n")
    done = formbuf(
        "knowledge", "show", "precedent", "--json", "--knowledge", str(tmp_path)
    )
    assert done.code == 0
    assert sum(row["overlay"] for row in done.data()["rows"]) == 1


# --- directories and links


@posix
def test_a_brief_behind_links(tmp_path: Path) -> None:
    real = tmp_path / "real.toml"
    real.write_text(SMALL, "utf-8")
    link, second = tmp_path / "a.toml", tmp_path / "b.toml"
    link.symlink_to(real)
    second.symlink_to(link)
    assert _check(second) == 0
    real.unlink()
    assert _check(second) == 3
    real.symlink_to(second)
    assert _check(second) == 3


@posix
def test_a_result_written_through_a_link_leaves_the_link(tmp_path: Path) -> None:
    real, link = tmp_path / "real.json", tmp_path / "link.json"
    real.write_text("old", "utf-8")
    link.symlink_to(real)
    assert formbuf(*QUICK, "-o", str(link)).code == 0
    assert link.is_symlink()
    assert json.loads(real.read_text("utf-8"))["schema"] == "formbuf.predict/1"
    assert sorted(p.name for p in tmp_path.iterdir()) == ["link.json", "real.json"]


@posix
def test_a_result_written_into_a_circle_of_links(tmp_path: Path) -> None:
    one, other = tmp_path / "one.json", tmp_path / "other.json"
    one.symlink_to(other)
    other.symlink_to(one)
    done = formbuf(*QUICK, "-o", str(one))
    assert done.code == 3
    assert "cannot be written" in done.one_error()


@posix
@pytest.mark.parametrize(
    "make",
    [
        lambda p: [(p / c).symlink_to(p) for c in "abcde"],
        lambda p: (p / "up").symlink_to(p.parent),
        lambda p: os.mkfifo(p / "species.csv"),
        lambda p: (p / "species.csv").mkdir(),
        lambda p: (p / "species.csv").symlink_to("/dev/zero"),
        lambda p: (p / "species.csv").symlink_to("/no/such/file"),
        lambda p: (p / "species.csv").write_bytes(b"a" * 30_000_000),
        lambda p: (p / "criteria.toml").write_bytes(b"a = " + b"[" * 100_000),
        lambda p: (p / "criteria.toml").write_bytes(b"\n" * 1_900_000),
        lambda p: (p / "species.csv").write_bytes(b"\n" * 1_900_000),
        lambda p: (p / "species.csv").write_bytes(b"," * 1_900_000),
        lambda p: [(p / f"{i}.csv").touch() for i in range(1500)],
        lambda p: (p / "no" / "such").mkdir(parents=True),
    ],
    ids=range(13),
)
def test_overlays_that_are_none(make: Callable[[Path], object], tmp_path: Path) -> None:
    over = tmp_path / "over"
    over.mkdir()
    make(over)
    start = time.perf_counter()
    done = formbuf("knowledge", "list", "--knowledge", str(over))
    assert time.perf_counter() - start < 5.0
    assert "Traceback" not in done.err
    assert done.code in (0, 3)


@posix
@pytest.mark.parametrize("folder", ["/", "/usr", "/dev", "/proc"])
def test_a_whole_system_is_no_overlay(folder: str) -> None:
    start = time.perf_counter()
    done = formbuf("knowledge", "list", "--knowledge", folder)
    assert time.perf_counter() - start < 5.0
    assert done.code == 3
    assert len(done.err) < 20_000


@posix
@pytest.mark.parametrize("source", ["/dev/zero", "/dev/urandom", "/dev/null", "/"])
def test_devices_as_input(source: str) -> None:
    assert _check(Path(source)) == 3
    for option in ("--precedent", "--knowledge"):
        done = formbuf("shortlist", str(ANTIBODY), option, source)
        assert done.code in (0, 3), option
        assert "Traceback" not in done.err


@posix
def test_a_folder_that_may_not_be_written(tmp_path: Path) -> None:
    if os.geteuid() == 0:
        pytest.skip("the superuser may write everywhere")
    tmp_path.chmod(0o500)
    try:
        done = formbuf(*QUICK, "-o", str(tmp_path / "x.json"))
        assert done.code == 3
        assert "cannot be written" in done.one_error()
    finally:
        tmp_path.chmod(0o700)


@posix
def test_a_working_directory_that_is_gone(tmp_path: Path) -> None:
    gone = tmp_path / "gone"
    gone.mkdir()
    code = (
        f"import os, shutil, sys; os.chdir({str(gone)!r}); "
        f"shutil.rmtree({str(gone)!r}); from formbuf.__main__ import start; "
        f"sys.argv = ['formbuf', *{QUICK!r}]; sys.exit(start())"
    )
    done = python(code)
    assert done.returncode == 0, done.stderr
    assert "Traceback" not in done.stderr


def test_a_working_directory_is_left_alone(tmp_path: Path) -> None:
    done = subprocess.run(
        [sys.executable, "-m", "formbuf", "shortlist", str(ANTIBODY), "--json"],
        capture_output=True,
        text=True,
        check=False,
        cwd=tmp_path,
        env=clean_environment({"PYTHONDONTWRITEBYTECODE": "1"}),
    )
    assert done.returncode == 0
    assert list(tmp_path.iterdir()) == []


# --- environment


@pytest.mark.parametrize(
    "changes",
    [
        {"HOME": "/no/such/home", "XDG_CACHE_HOME": "/no/such", "TMPDIR": "/no/such"},
        {"HOME": ""},
        {"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0"},
        {"LC_ALL": "POSIX", "LANG": ""},
        {"LC_ALL": "de_DE.UTF-8", "LC_NUMERIC": "de_DE.UTF-8"},
        {"LC_ALL": "xx_XX.nonsense"},
        {"TZ": "Pacific/Kiritimati"},
        {"TZ": "nonsense/zone"},
        {"PYTHONIOENCODING": "latin-1"},
        {"PYTHONHASHSEED": "12345"},
        {"TERM": "dumb", "NO_COLOR": "1"},
        {"COLUMNS": "not a number"},
    ],
    ids=lambda c: " ".join(f"{k}={v}" for k, v in c.items()),
)
def test_the_environment_changes_no_result(changes: dict[str, str]) -> None:
    args = (*QUICK, "--add", "acetic_acid_glacial=10", "--at", "5", "--json")
    usual = process(*args)
    other = process(*args, **changes)
    assert (other.returncode, other.stderr) == (0, "")
    assert other.stdout == usual.stdout


@pytest.mark.parametrize("width", ["1", "20", "40", "79", "10000"])
@pytest.mark.parametrize("args", [("shortlist", str(ANTIBODY)), QUICK], ids=["s", "p"])
def test_any_width_of_the_terminal(width: str, args: tuple[str, ...]) -> None:
    done = formbuf(*args, columns=None, COLUMNS=width)
    assert done.code == 0
    room = max(int(width), 60)
    assert max(len(line) for line in done.out.splitlines()) <= room


@pytest.mark.skipif(shutil.which("localedef") is None, reason="no locale compiler")
def test_a_locale_with_a_decimal_comma(tmp_path: Path) -> None:
    """Whatever a host program has set, numbers have a point, in and out."""
    name = "de_DE.UTF-8"
    made = ["localedef", "-c", "-i", "de_DE", "-f", "UTF-8", str(tmp_path / name)]
    subprocess.run(made, check=False, capture_output=True)
    code = (
        f"import locale, sys; locale.setlocale(locale.LC_ALL, {name!r})\n"
        "assert locale.localeconv()['decimal_point'] == ','\n"
        f"from formbuf.cli.main import run; sys.exit(run({[*QUICK, '--json']!r}))\n"
    )
    done = python(code, LOCPATH=str(tmp_path))
    assert done.returncode == 0, done.stderr
    assert json.loads(done.stdout) == formbuf(*QUICK, "--json").data()


# --- memory and stray files


@posix
def test_too_little_memory_is_told_or_enough() -> None:
    """A shortlist runs within 500 MB of resident memory."""
    code = (
        "import resource, sys\n"
        "from formbuf.cli.main import run\n"
        f"code = run(['shortlist', {str(ANTIBODY)!r}, '--json'])\n"
        "mb = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024\n"
        "sys.stderr.write(f'{mb:.0f}')\n"
        "sys.exit(code)\n"
    )
    done = python(code)
    assert done.returncode == 0
    print(f"resident memory of a shortlist: {done.stderr} MB")
    assert int(done.stderr) < 500


def test_nothing_but_the_asked_for_file_is_written(tmp_path: Path) -> None:
    home, work = tmp_path / "home", tmp_path / "work"
    home.mkdir()
    work.mkdir()
    shutil.copy(ANTIBODY, work / "brief.toml")
    done = subprocess.run(
        [sys.executable, "-m", "formbuf", "shortlist", "brief.toml", "-o", "out.csv"],
        capture_output=True,
        text=True,
        check=False,
        cwd=work,
        env=clean_environment(
            {
                "HOME": str(home),
                "TMPDIR": str(home),
                "XDG_CACHE_HOME": str(home / "cache"),
                "PYTHONDONTWRITEBYTECODE": "1",
            }
        ),
    )
    assert done.returncode == 0, done.stderr
    assert list(home.iterdir()) == []
    assert sorted(p.name for p in work.iterdir()) == ["brief.toml", "out.csv"]
