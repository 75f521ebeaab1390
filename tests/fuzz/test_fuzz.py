"""Broken briefs, tables, lists, titrations and command lines: never a traceback.

Twenty thousand broken inputs are run by hand (``-m by_hand``); the everyday run takes a
few hundred.
Each prints its counts by kind and exit code.
"""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest
from cli_runner import ROOT, clean_environment
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from reference_tables import library

from formbuf.errors import FormbufError
from formbuf.product.brief import brief_from_mapping, brief_schema, complete

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="needs POSIX signals")
MEMORY_MB = 500
EVERYDAY, CHUNK = 500, 2000


def _fuzz(seed: int, count: int, folder: Path) -> dict[str, Any]:
    done = subprocess.run(
        [
            sys.executable,
            str(Path(__file__).parent / "worker.py"),
            str(seed),
            str(count),
            str(folder),
        ],
        capture_output=True,
        text=True,
        check=False,
        cwd=ROOT,
        env=clean_environment({}),
    )
    assert done.returncode == 0, done.stderr[-3000:]
    report: dict[str, Any] = json.loads(done.stdout)
    for kind, codes in report["codes"].items():
        print(f"{kind:30s} {codes}")
    print(
        f"seed {seed}: {report['cases']} cases, slowest {report['slowest_s']} s, "
        f"{report['memory_mb']} MB, {len(report['failures'])} failures"
    )
    return report


def _is_clean(report: dict[str, Any], count: int) -> None:
    for failure in report["failures"]:
        print(failure["kind"], failure["args"], failure["fault"])
    assert not report["failures"]
    assert report["cases"] == count
    assert report["slowest_s"] < 5.0
    assert report["memory_mb"] < MEMORY_MB
    codes = {int(code) for counts in report["codes"].values() for code in counts}
    assert {0, 2, 3} <= codes, "the cases are too tame, or too wild"


def test_broken_inputs_everyday(tmp_path: Path) -> None:
    _is_clean(_fuzz(1, EVERYDAY, tmp_path), EVERYDAY)


@pytest.mark.by_hand
@pytest.mark.parametrize("seed", range(100, 110))
def test_twenty_thousand_broken_inputs(seed: int, tmp_path: Path) -> None:
    _is_clean(_fuzz(seed, CHUNK, tmp_path), CHUNK)


# --- briefs as data, by hypothesis


def _keys(schema: dict[str, Any]) -> list[str]:
    found = set(schema.get("properties", {}))
    for part in schema.get("$defs", {}).values():
        found |= set(part.get("properties", {}))
    return sorted(found)


KEYS = st.one_of(st.sampled_from(_keys(brief_schema())), st.text(max_size=8))
SCALARS = st.one_of(
    st.none(),
    st.booleans(),
    st.integers(-(10**20), 10**20),
    st.floats(),
    st.text(max_size=12),
    st.dates(),
    st.sampled_from(["nasal", "liquid", "antibody", "sucrose", "citrate", "none"]),
)
DATA = st.recursive(
    SCALARS,
    lambda inner: st.one_of(
        st.lists(inner, max_size=3), st.dictionaries(KEYS, inner, max_size=4)
    ),
    max_leaves=12,
)
TOP = sorted(brief_schema()["properties"])


def _read_or_told(data: dict[str, Any]) -> None:
    """Complete a brief, or meet an error with a message; anything else is a bug."""
    try:
        complete(brief_from_mapping(data), library())
    except FormbufError as caught:
        error = caught
    else:
        return
    assert error.message
    assert error.exit_code == 3


@given(st.dictionaries(st.sampled_from(TOP), DATA, max_size=5))
@settings(max_examples=300, deadline=None, suppress_health_check=[HealthCheck.too_slow])
def test_any_data_is_a_brief_or_a_told_fault(data: dict[str, Any]) -> None:
    sound = {"product": {"route": "nasal"}, "ph": {"target": 6.0}}
    for given_ in (data, {**sound, **data}):
        _read_or_told(given_)


@given(st.lists(st.tuples(KEYS, SCALARS), max_size=6), st.sampled_from(TOP))
@settings(max_examples=300, deadline=None)
def test_any_table_of_a_brief_is_read_or_told(
    pairs: list[tuple[str, Any]], table: str
) -> None:
    data: dict[str, Any] = {"product": {"route": "nasal"}, "ph": {"target": 6.0}}
    for shape in (dict(pairs), [dict(pairs)]):
        _read_or_told({**data, table: shape})
