"""Systems of any two species: forms, ratio, and the brief that names them."""

from __future__ import annotations

import numpy as np
import pytest
from bench_support import library, quick

from formbuf.advice.shortlist import shortlist
from formbuf.bench.batch_sheet import batch_sheet
from formbuf.bench.setup import make_product
from formbuf.errors import InputError, UnknownNameError
from formbuf.product.brief import brief_from_text, complete
from formbuf.product.pairs import pair_system, species_forms, system_named

#: Pairs as people name them, a pH within their reach, and their forms.
PAIRS = {
    "histidine + acetate": (5.5, "acetic_acid_glacial", "l_histidine"),
    "tris+acetate": (7.5, "acetic_acid_glacial", "tromethamine"),
    "citrate + phosphate": (
        5.0,
        "citric_acid_monohydrate",
        "disodium_hydrogen_phosphate_heptahydrate",
    ),
    "phosphate + citrate": (
        5.0,
        "citric_acid_monohydrate",
        "disodium_hydrogen_phosphate_heptahydrate",
    ),
    "acetate + citrate": (5.0, "citric_acid_monohydrate", "sodium_acetate_trihydrate"),
    "histidine + tris": (
        7.5,
        "l_histidine_monohydrochloride_monohydrate",
        "tromethamine",
    ),
    "tris + borate": (8.3, "boric_acid", "tromethamine"),
    "mes + imidazole": (6.5, "mes_monohydrate", "imidazole"),
    "sodium_citrate + potassium_phosphate": (
        6.0,
        "citric_acid_monohydrate",
        "dipotassium_hydrogen_phosphate",
    ),
}


@pytest.mark.parametrize("text", PAIRS)
def test_forms_and_ratio_of_a_pair(text: str) -> None:
    ph, acid, base = PAIRS[text]
    system = pair_system(library(), text)
    bench = quick(text, 30.0, ph)
    made = make_product(bench)
    sheet = batch_sheet(bench, volume_l=1.0)

    assert (system.acid_material, system.base_material) == (acid, base)
    assert float(made.mixture.solve(25.0).ph) == pytest.approx(ph, abs=1e-6)
    totals = [
        sum(
            library().find_material(key).contents.get(species, 0.0) * amount
            for key, amount in made.buffer_mmol_l.items()
        )
        for species in system.species
    ]
    assert sum(totals) == pytest.approx(30.0, rel=1e-6)
    assert sum(sheet.mole_ratio.values()) == pytest.approx(1.0)


def test_the_ratio_moves_with_the_ph() -> None:
    shares = []
    for ph in (4.5, 5.5, 6.5):
        sheet = batch_sheet(quick("histidine + acetate", 20.0, ph), volume_l=1.0)
        shares.append(sheet.mole_ratio["histidine"])

    assert np.all(np.diff(shares) > 0.05)


def test_beyond_both_stocks_a_titrant_goes_on() -> None:
    made = make_product(quick("citrate + phosphate", 20.0, 1.8))

    assert "hydrochloric_acid" in made.buffer_mmol_l
    assert float(made.mixture.solve(25.0).ph) == pytest.approx(1.8, abs=1e-6)


def test_many_strengths_at_once_where_one_is_beyond_the_stocks() -> None:
    from formbuf.product.osmotics import osmotic_law
    from formbuf.product.recipe import Background, make

    recipe = make(
        library(),
        pair_system(library(), "citrate + phosphate"),
        [1.0, 10.0, 80.0],
        [2.0, 5.0, 9.5],
        25.0,
        Background(),
        osmotic_law(library()),
    )

    assert recipe.mixture.solve(25.0).ph.tolist() == pytest.approx([2.0, 5.0, 9.5])


@pytest.mark.parametrize("species", sorted(library().species))
def test_forms_of_every_species_reach_from_acid_to_base(species: str) -> None:
    forms = species_forms(library(), species)
    if forms is None:
        return
    contents = {species} | set(library().ions)
    assert set(forms.acid.contents) <= contents
    assert set(forms.base.contents) <= contents


@pytest.mark.parametrize(
    ("text", "error", "words"),
    [
        ("histidine +", InputError, "does not name two species"),
        ("a + b + c", InputError, "does not name two species"),
        ("citrate + citrate", InputError, "the same species twice"),
        ("histidin + acetate", UnknownNameError, "unknown species 'histidin'"),
        ("glucose + acetate", UnknownNameError, "unknown species 'glucose'"),
        ("phosphate", InputError, "is a species, allowed one of its systems"),
        ("sodium_phosphat", UnknownNameError, "unknown system"),
    ],
)
def test_names_that_make_no_system(text: str, error: type, words: str) -> None:
    with pytest.raises(error, match=words.replace("'", ".")):
        system_named(library(), text)


BRIEF = (
    '{top}[product]\nroute = "subcutaneous"\n[ph]\ntarget = 5.5\n'
    "[tonicity]\nfill = false\n"
    '[[candidate]]\nsystem = "histidine+acetate"\nconcentration_mmol_l = 20\n'
)


def test_a_brief_names_pairs() -> None:
    brief = brief_from_text(BRIEF.format(top='require = ["citrate + phosphate"]\n'))
    candidates = shortlist(brief, library()).candidates
    found = {c.key: c for c in candidates}
    (own,) = [c for c in candidates if c.is_own_formula]

    assert found["citrate + phosphate"].concentration_mmol_l > 0.0
    assert {w.material for w in own.composition} == {
        "acetic_acid_glacial",
        "l_histidine",
    }
    assert sum(w.mmol_l for w in own.composition) == pytest.approx(20.0, rel=1e-6)


@pytest.mark.parametrize(
    ("name", "words"),
    [
        ("histidine + acetat", "unknown species 'acetat'"),
        ("citrate + citrate", "the same species twice"),
        ("a + b + c", "is no system and no pair"),
        ("Histidine + acetate", "is no system and no pair"),
    ],
)
def test_broken_pairs_of_a_brief(name: str, words: str) -> None:
    with pytest.raises(InputError) as caught:
        complete(
            brief_from_text(BRIEF.format(top=f'require = ["{name}"]\n')), library()
        )
    assert words in str(caught.value)
    assert "require[1] (line 1)" in str(caught.value)
