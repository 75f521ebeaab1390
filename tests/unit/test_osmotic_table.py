"""The osmotic table is what its script makes of the published rows, and loads."""

from __future__ import annotations

import importlib.util
import sys
from pathlib import Path

import pytest
from reference_tables import library

from formbuf.errors import InputError
from formbuf.library import load_library
from formbuf.library.store import knowledge_root
from formbuf.product.osmotics import osmotic_law


def _script() -> object:
    path = Path(__file__).resolve().parent.parent / "tools" / "fit_osmotic.py"
    spec = importlib.util.spec_from_file_location("fit_osmotic", path)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules["fit_osmotic"] = module
    spec.loader.exec_module(module)
    return module


def test_refitting_reproduces_the_table() -> None:
    script = _script()
    kept = (knowledge_root() / "osmotic.csv").read_text(encoding="utf-8")

    assert script.render(script.table()) == kept  # type: ignore[attr-defined]


def test_the_law_has_the_pairs_of_common_products() -> None:
    law = osmotic_law(library())

    for pair in (
        ("sodium:1", "chloride:-1"),
        ("sodium:1", "phosphate:-1"),
        ("sodium:1", "phosphate:-2"),
        ("potassium:1", "phosphate:-1"),
        ("sodium:1", "citrate:-3"),
        ("sodium:1", "acetate:-1"),
    ):
        assert pair in law.pairs
    for solute in ("sucrose", "trehalose", "mannitol", "sorbitol", "glycerol"):
        assert 0.0 < law.neutrals[solute] < 0.2


def test_every_uncharged_solute_of_the_library_has_a_coefficient() -> None:
    assert set(library().neutrals) <= set(osmotic_law(library()).neutrals)


@pytest.mark.parametrize(
    ("row", "said"),
    [
        ("pair,sodium:2,chloride:-1,,0.1,0.1,,,,,,judgement,", "'sodium:2'"),
        ("pair,chloride:-1,sodium:1,,0.1,0.1,,,,,,judgement,", "'chloride:-1'"),
        ("pair,sodium,chloride:-1,,0.1,0.1,,,,,,judgement,", "'sodium'"),
        ("pair,sodium:1,phosphate:-7,,0.1,0.1,,,,,,judgement,", "'phosphate:-7'"),
        ("neutral,,,phosphate:-1,0.1,0.1,,,,,,judgement,", "'phosphate:-1'"),
        ("neutral,sodium:1,,sucrose,0.1,0.1,,,,,,judgement,", "one solute only"),
        ("pair,sodium:1,chloride:-1,sucrose,0.1,0.1,,,,,,judgement,", "no uncharged"),
        ("pair,sodium:1,chloride:-1,,nan,0.1,,,,,,judgement,", "coefficient_kg_mol"),
    ],
)
def test_broken_rows_of_an_overlay_are_named(
    tmp_path: Path, row: str, said: str
) -> None:
    header = (knowledge_root() / "osmotic.csv").read_text("utf-8").splitlines()[0]
    (tmp_path / "osmotic.csv").write_text(f"{header}\n{row}\n", encoding="utf-8")

    with pytest.raises(InputError, match=r"osmotic\.csv:2") as caught:
        osmotic_law(load_library(tmp_path))
    assert said in str(caught.value)
