"""Any result as plain data: no numpy, no dates, no number that is not finite."""

from __future__ import annotations

import dataclasses
import datetime as dt
import json
from pathlib import Path
from types import MappingProxyType, SimpleNamespace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from formbuf import __version__
from formbuf.library import load_library
from formbuf.output.leaves import leaves
from formbuf.output.serialise import finding_dict, frozen_dict, header, plain

_PLAIN = st.recursive(
    st.none() | st.booleans() | st.integers() | st.text() | st.floats(),
    lambda inner: (
        st.lists(inner, max_size=3)
        | st.dictionaries(st.text(max_size=5), inner, max_size=3)
    ),
    max_leaves=10,
)


@dataclasses.dataclass(frozen=True, slots=True)
class _Record:
    ph: float
    names: tuple[str, ...]


class _Own:
    def to_dict(self) -> dict[str, object]:
        return {"x": np.float64(1.5), "y": {2.0}}


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        (np.float64(6.0), 6.0),
        (np.int64(3), 3),
        (np.bool_(True), True),
        (np.array([[1.0, np.nan]]), [[1.0, None]]),
        (float("inf"), None),
        (float("nan"), None),
        (_Record(6.0, ("a", "b")), {"ph": 6.0, "names": ["a", "b"]}),
        (_Own(), {"x": 1.5, "y": [2.0]}),
        (MappingProxyType({1: dt.date(2026, 1, 31)}), {"1": "2026-01-31"}),
        (frozenset({"b", "a"}), ["a", "b"]),
        (Path("a") / "b", str(Path("a") / "b")),
        ((x for x in (1, 2)), [1, 2]),
    ],
)
def test_plain(value: object, expected: object) -> None:
    found = plain(value)
    assert found == expected
    json.dumps(found, allow_nan=False)


@given(_PLAIN)
def test_plain_data_is_always_json(value: object) -> None:
    json.dumps(plain(value), allow_nan=False)


def test_what_has_no_plain_form_is_refused() -> None:
    with pytest.raises(TypeError, match="no plain form for object"):
        plain(object())


def test_header_names_the_knowledge() -> None:
    library = load_library()
    found = header("formbuf.x/1", library)
    assert found == {
        "schema": "formbuf.x/1",
        "formbuf_version": __version__,
        "knowledge": {
            "version": library.version,
            "sha256": library.sha256,
            "overlay": None,
            "overlay_sha256": None,
            "precedent_file": None,
            "overlay_changes": [],
        },
    }


def test_a_finding_with_the_six_keys_is_enough() -> None:
    six = {
        "rule": "R001",
        "severity": "warn",
        "outcome": "fired",
        "text": "x",
        "basis": "practice",
        "source": "",
    }
    found = finding_dict(SimpleNamespace(**six))
    assert {name: found[name] for name in six} == six
    assert found["overridden_by"] is None


def test_frozen_spreads_its_assessment() -> None:
    frozen = SimpleNamespace(
        assessment=_Own(), counted_class="moderate", remark="", sugar_percent=5.0
    )
    found = frozen_dict(frozen)
    assert found == {
        "x": 1.5,
        "y": [2.0],
        "counted_class": "moderate",
        "remark": "",
        "sugar_percent_w_v": 5.0,
    }
    assert frozen_dict(None) is None


def test_leaves_keep_every_value() -> None:
    data = {"a": {"b": [1, [2, {"c": None}]]}, "d": [], "e": {}}
    assert leaves(data) == [
        ("a.b[0]", 1),
        ("a.b[1][0]", 2),
        ("a.b[1][1].c", None),
        ("d", None),
        ("e", None),
    ]
