"""The audit above the library: every table described, constants equal, rules alive."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from formbuf.bench import knowledge_audit
from formbuf.bench.knowledge_audit import audit_all, constant_faults, table_schemas
from formbuf.chemistry.gas import HenryLaw
from formbuf.library import Library, load_library
from formbuf.library.loader import open_library
from formbuf.library.store import Store, knowledge_root


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    target = tmp_path / "knowledge"
    shutil.copytree(Path(str(knowledge_root())), target)
    return target


def _library(folder: Path) -> Library:
    return open_library(Store(folder))


def _edit(path: Path, old: str, new: str) -> None:
    text = path.read_text(encoding="utf-8")
    assert old in text
    path.write_text(text.replace(old, new, 1), encoding="utf-8")


def test_the_knowledge_has_no_fault() -> None:
    assert audit_all(load_library()) == []


def test_every_table_is_described() -> None:
    names = {n for n, _ in load_library().store.files() if n.endswith(".csv")}
    assert names == set(table_schemas())


def test_a_table_that_nobody_describes_is_a_fault(folder: Path) -> None:
    (folder / "extra.csv").write_text("a,b\n1,2\n")
    assert "extra.csv:1:file: no description of this table is known" in audit_all(
        _library(folder)
    )


def test_a_changed_constant_is_a_fault(folder: Path) -> None:
    _edit(folder / "water_properties.csv", "0.39862804062", "0.39862804063")
    faults = constant_faults(_library(folder))
    assert len(faults) == 1
    assert faults[0].startswith("water_properties.csv:")
    assert "osmotic_slope_chebyshev_00 is 0.39862804063" in faults[0]


def test_a_changed_gas_constant_is_a_fault(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(knowledge_audit.gas, "CARBON_DIOXIDE", HenryLaw(3.3e-4, 2500.0))
    faults = constant_faults(load_library())
    assert len(faults) == 1
    assert "henry_temperature_coefficient" in faults[0]


def test_a_broken_table_read_on_demand_is_a_fault(folder: Path) -> None:
    _edit(folder / "osmotic.csv", "pair,", "pear,")
    faults = audit_all(_library(folder))
    assert any(f.startswith("osmotic.csv:") and "pear" in f for f in faults)


def test_a_missing_default_is_a_fault(folder: Path) -> None:
    _edit(folder / "defaults.toml", "basis = ", "base = ")
    faults = audit_all(_library(folder))
    assert any(fault.startswith("defaults.toml:") for fault in faults)
