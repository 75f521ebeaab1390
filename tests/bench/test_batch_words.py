"""What a batch sheet and a challenge tell the operator: steps, cautions, names, notes."""

from __future__ import annotations

import pytest
from bench_support import ANTIBODY, ANTIBODY_MASS_G_MOL, briefed, quick

from formbuf.bench.batch_records import BatchSheet, WaySheet
from formbuf.bench.batch_sheet import batch_sheet
from formbuf.bench.challenge import challenge
from formbuf.bench.grades import InHand
from formbuf.output.batch_sheet_page import batch_sheet_page
from formbuf.output.writers import render

UNCOUNTED = "the columns without buffer are those of water and excipients"


def _sheet(hand: InHand | None = None) -> BatchSheet:
    bench = quick("sodium_phosphate", 50.0, 7.4, prepare_temperature_c=20.0)
    return batch_sheet(bench, volume_l=2.0, in_hand=hand)


def _titrated(sheet: BatchSheet) -> WaySheet:
    (way,) = [w for w in sheet.ways if any(x.role == "titrant" for x in w.lines)]
    return way


def test_who_follows_the_steps_is_not_told_to_stop() -> None:
    """The tenth held back is more than the allowance: adding it is no mistake."""
    way = _titrated(_sheet(InHand(assay_percent={"sodium_hydroxide": 98.0})))
    (titrant,) = [line for line in way.lines if line.role == "titrant"]
    assert 0.1 * titrant.weigh_g > way.allowance.base_g
    reading = next(r.ph for r in way.readings if "prepare" in r.kinds)
    (step,) = [s for s in way.steps if s.startswith("Add the rest of the ")]
    assert f"until the pH reads {reading:.2f} at 20 C" in step
    assert "If the total differs from the amount worked out" in step
    assert not any("points to a mistake" in s for s in way.steps)


def test_without_a_titrant_the_ph_is_set_within_the_allowance() -> None:
    (way,) = [w for w in _sheet().ways if all(x.role == "buffer" for x in w.lines)]
    assert any("points to a mistake" in s for s in way.steps)
    assert not any(s.startswith("Add the rest") for s in way.steps)
    said = " ".join(way.cautions)
    assert "1 mol/L hydrochloric acid: irritant" in said
    assert "1 mol/L sodium hydroxide: corrosive" in said


@pytest.mark.parametrize(
    ("assay", "words"),
    [(98.0, "add to cold water in portions"), (49.0, "much heat on dilution")],
)
def test_an_assay_of_your_own_keeps_the_caution(assay: float, words: str) -> None:
    """Of pellets, or of the solution of 50 %, whichever assay is nearer (grades.csv)."""
    sheet = _sheet(InHand(assay_percent={"sodium_hydroxide": assay}))
    for way in sheet.ways:
        (caution,) = [c for c in way.cautions if "strongly corrosive" in c]
        assert words in caution


def test_undiluted_titrant_is_kept_from_a_protein() -> None:
    drug = (
        'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
        "isoelectric_point = 8.4\nnet_charge = 15\nnet_charge_ph = 6\n"
    )
    hand = InHand(grades={"sodium_hydroxide": "sodium_hydroxide_pellets"})
    bench = briefed(drug, "sodium_phosphate")
    strong = batch_sheet(bench, volume_l=2.0, in_hand=hand).ways[0].cautions
    usual = batch_sheet(bench, volume_l=2.0).ways[0].cautions
    assert any("damages a protein" in c for c in strong)
    assert not any("damages a protein" in c for c in usual)


def test_materials_go_by_their_names() -> None:
    text = render(batch_sheet_page(_sheet()), "table", width=200)
    assert "sodium dihydrogen phosphate anhydrous" in text
    assert "sodium_dihydrogen_phosphate" not in text
    assert "meter compensation set 2 K too high" in text
    assert "preparation" in text


def test_a_protein_that_is_not_counted_is_told() -> None:
    notes = challenge(briefed('kind = "antibody"\nconcentration_mg_ml = 50\n')).notes
    assert any(UNCOUNTED in n and "its protein buffers" in n for n in notes)


def test_what_is_counted_is_not_told_as_missing() -> None:
    residues = ", ".join(f"{k} = {v}" for k, v in ANTIBODY.items())
    drug = (
        'kind = "antibody"\nconcentration_mg_ml = 50\n'
        f"molar_mass_g_mol = {ANTIBODY_MASS_G_MOL}\nresidues = {{ {residues} }}\n"
    )
    for bench in (briefed(drug), quick("sodium_phosphate", 10.0, 7.0)):
        assert not any(UNCOUNTED in n for n in challenge(bench).notes)
