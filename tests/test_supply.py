"""What is shipped and what it does behind the back: nothing.

The wheel and the source archive hold what is listed here, the same source gives the
same bytes, no run opens a socket, and every dependency has a lower bound.
"""

from __future__ import annotations

import hashlib
import os
import re
import shutil
import subprocess
import sys
import tarfile
import tomllib
import zipfile
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, ROOT, clean_environment

#: Long: left out of the everyday run.
pytestmark = pytest.mark.slow

SOURCES = ("formbuf", "knowledge", "tests", "examples")
TOP = ("README.md", "DEVELOPERS.md", "LICENSE", "pyproject.toml")
NOT_SHIPPED = ("__pycache__", ".pyc", ".part", ".orig", ".log", ".DS_Store")


# --- no network


COMMANDS = [
    ["shortlist", str(EXAMPLES / "antibody.toml"), "--json"],
    ["explain", str(EXAMPLES / "antibody.toml"), "none"],
    [
        *("freeze-thaw", "--system", "sodium_phosphate", "--concentration", "50"),
        *("--ph", "7.4", "--to", "-5"),
    ],
    ["predict", "--add", "sucrose=1"],
    ["brief", "check", str(EXAMPLES / "antibody.toml")],
    ["brief", "schema"],
    ["knowledge", "sources"],
    ["knowledge", "check"],
    ["rationale", str(EXAMPLES / "eye_drop.toml"), "-o", "report.html"],
]


def test_no_run_opens_a_socket(tmp_path: Path) -> None:
    code = (
        "import socket, sys\n"
        "def refuse(*_, **__):\n"
        "    raise AssertionError('a socket was opened')\n"
        "socket.socket.__init__ = refuse\n"
        "socket.create_connection = socket.getaddrinfo = refuse\n"
        "socket.gethostbyname = socket.gethostname = refuse\n"
        "from formbuf.cli.main import run\n"
        f"for args in {COMMANDS!r}:\n"
        "    code = run(args)\n"
        "    if code:\n"
        "        sys.exit(f'{args}: exit code {code}')\n"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        check=False,
        cwd=tmp_path,
        env=clean_environment({}),
    )
    assert done.returncode == 0, done.stderr[-2000:]
    assert [p.name for p in tmp_path.iterdir()] == ["report.html"]


def test_the_package_names_no_host_and_starts_no_program() -> None:
    """No module that could reach out is imported, no address is written."""
    reaching = re.compile(
        r"^\s*(?:import|from)\s+(?:urllib|http|socket|ssl|ftplib|smtplib|requests|"
        r"subprocess|multiprocessing|asyncio)\b",
        re.MULTILINE,
    )
    for path in (ROOT / "formbuf").rglob("*.py"):
        text = path.read_text("utf-8")
        assert not reaching.search(text), path


# --- dependencies


def test_every_dependency_has_a_lower_bound_and_no_upper_one() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["project"]
    wanted = list(project["dependencies"])
    for extra in project["optional-dependencies"].values():
        wanted += extra
    for text in wanted:
        assert re.fullmatch(r"[\w-]+(>=[\d.]+)|formbuf\[[\w,]+\]", text), text


def test_what_is_imported_is_what_is_declared() -> None:
    project = tomllib.loads((ROOT / "pyproject.toml").read_text("utf-8"))["project"]
    declared = {re.split(r"[>=\[]", d)[0] for d in project["dependencies"]}
    declared |= {"openpyxl"}  # the extra for workbooks
    names = {"docx": "python-docx"}
    imported = set()
    for path in (ROOT / "formbuf").rglob("*.py"):
        for line in path.read_text("utf-8").splitlines():
            match = re.match(r"\s*(?:from|import)\s+([a-z_0-9]+)[\s.]", line + " ")
            if match and match[1] not in sys.stdlib_module_names:
                imported.add(names.get(match[1], match[1]))
    imported -= {"formbuf", "pydantic_core"}
    assert imported <= declared
    assert declared - imported <= {"pandas"} - imported


# --- wheel and source archive


def _copy(folder: Path) -> Path:
    """Copy what belongs to the project, with other times of change."""
    for name in SOURCES:
        shutil.copytree(
            ROOT / name,
            folder / name,
            ignore=shutil.ignore_patterns("__pycache__", ".*"),
            copy_function=shutil.copyfile,
        )
    for name in TOP:
        shutil.copyfile(ROOT / name, folder / name)
    return folder


def _build(folder: Path, kind: str) -> Path:
    pytest.importorskip("hatchling")
    done = subprocess.run(
        [sys.executable, "-m", "hatchling", "build", "-t", kind, "-d", "dist"],
        capture_output=True,
        text=True,
        check=False,
        cwd=folder,
        env={**os.environ, "SOURCE_DATE_EPOCH": "1700000000"},
    )
    assert done.returncode == 0, done.stderr
    (found,) = (folder / "dist").iterdir()
    return found


@pytest.fixture(scope="module")
def built(tmp_path_factory: pytest.TempPathFactory) -> dict[str, Path]:
    folders = {kind: tmp_path_factory.mktemp(kind) for kind in ("wheel", "sdist")}
    return {kind: _build(_copy(folder), kind) for kind, folder in folders.items()}


def _files(folder: str, *endings: str) -> set[str]:
    return {
        path.relative_to(ROOT).as_posix()
        for path in (ROOT / folder).rglob("*")
        if path.is_file()
        and "__pycache__" not in path.parts
        and (not endings or path.suffix in endings)
    }


def test_the_wheel_holds_the_package_and_its_tables(built: dict[str, Path]) -> None:
    names = set(zipfile.ZipFile(built["wheel"]).namelist())
    package = {n for n in names if n.startswith("formbuf/")}
    information = names - package
    tables = {
        n.replace("knowledge/", "formbuf/_knowledge/", 1) for n in _files("knowledge")
    }
    assert package == _files("formbuf") | tables
    assert {re.sub(r"^formbuf-[\d.]+\.dist-info/", "", n) for n in information} == {
        "METADATA",
        "RECORD",
        "WHEEL",
        "entry_points.txt",
        "licenses/LICENSE",
    }
    assert not [n for n in names if any(part in n for part in NOT_SHIPPED)]
    for needed in ("py.typed", "qualify/record.json", "_knowledge/species.csv"):
        assert f"formbuf/{needed}" in names


def test_the_source_archive_holds_what_a_release_needs(built: dict[str, Path]) -> None:
    with tarfile.open(built["sdist"]) as archive:
        names = {n.partition("/")[2] for n in archive.getnames()}
    expected = set(TOP)
    for folder in SOURCES:
        expected |= _files(folder)
    extra = names - expected
    assert extra <= {"PKG-INFO", ".gitignore"}
    missing = {n for n in expected - names if "/." not in n}
    assert not missing


def test_the_same_source_gives_the_same_wheel(
    built: dict[str, Path], tmp_path: Path
) -> None:
    again = _build(_copy(tmp_path), "wheel")
    one, other = (
        hashlib.sha256(p.read_bytes()).hexdigest() for p in (built["wheel"], again)
    )
    assert one == other


def test_the_wheel_runs_from_anywhere(built: dict[str, Path], tmp_path: Path) -> None:
    """From the zipped wheel itself, far from the checkout."""
    code = (
        f"import sys; sys.path.insert(0, {str(built['wheel'])!r}); "
        "from formbuf.cli.main import run; "
        "sys.exit(run(['predict', '--add', 'sucrose=1', '--json']))"
    )
    environment = clean_environment({})
    environment.pop("PYTHONPATH")
    done = subprocess.run(
        [sys.executable, "-I", "-c", code],
        capture_output=True,
        text=True,
        check=False,
        cwd=tmp_path,
        env=environment,
    )
    assert done.returncode == 0, done.stderr
    assert '"schema": "formbuf.predict/1"' in done.stdout
