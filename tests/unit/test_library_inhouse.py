"""In-house species and materials given as mappings: added, marked, checked."""

from __future__ import annotations

import pytest

from formbuf.errors import InputError
from formbuf.library import (
    Library,
    load_library,
    with_rows,
)


@pytest.fixture(scope="module")
def library() -> Library:
    return load_library()


# --- in-house rows

GLYCOLATE = {
    "id": "glycolate",
    "name": "glycolic acid",
    "pka": [{"pka": 3.83, "acid_charge": 0, "dh_kj_mol": 0.1, "uncertainty": 0.02}],
    "source": "own titration, report 12",
}
GLYCOLIC_ACID = {
    "id": "glycolic_acid",
    "name": "glycolic acid",
    "contents": {"glycolate": 1},
    "molar_mass_g_mol": 76.051,
    "formula": "C2H4O3",
}


def test_in_house_rows_are_added_and_marked(library: Library) -> None:
    own = with_rows(library, species=[GLYCOLATE], materials=[GLYCOLIC_ACID])

    step = own.get_species("glycolate").steps[0]
    assert step.pka.value == 3.83
    assert step.pka.uncertainty == 0.02
    assert step.dcp_j_mol_k is None
    assert own.source(step.pka.source).title == "own titration, report 12"
    assert own.find_material("glycolic acid").contents == {"glycolate": 1.0}
    assert own.get_species("glycolate").overlay
    assert own.materials["glycolic_acid"].overlay
    assert "glycolate" not in library.species


@pytest.mark.parametrize(
    ("species", "materials", "words"),
    [
        ([{"id": "x"}], [], "species[1].pka: missing"),
        ([{**GLYCOLATE, "pka": []}], [], "species[1].pka: empty"),
        ([{**GLYCOLATE, "pk": 1}], [], "species[1]: unknown key 'pk'"),
        (
            [{**GLYCOLATE, "pka": [{"pka": "4", "acid_charge": 0}]}],
            [],
            "species[1].pka[1].pka: '4' is not a number",
        ),
        (
            [{**GLYCOLATE, "pka": [{"pka": float("nan"), "acid_charge": 0}]}],
            [],
            "species[1].pka[1].pka: nan is not a number",
        ),
        (
            [{**GLYCOLATE, "pka": [{"pka": 4, "acid_charge": 0.5}]}],
            [],
            "acid_charge: 0.5 is not whole",
        ),
        (
            [
                {
                    **GLYCOLATE,
                    "pka": [
                        {"pka": 4, "acid_charge": 0},
                        {"pka": 5, "acid_charge": -2},
                    ],
                }
            ],
            [],
            "species[1].pka[2].acid_charge: -2 after 0, allowed -1",
        ),
        (
            [
                {
                    **GLYCOLATE,
                    "pka": [
                        {"pka": 4, "acid_charge": 0},
                        {"pka": 3, "acid_charge": -1},
                    ],
                }
            ],
            [],
            "species[1].pka[2].pka: 3 after 4",
        ),
        ([], [GLYCOLIC_ACID], "material[1].contents: unknown component 'glycolate'"),
        (
            [GLYCOLATE],
            [{**GLYCOLIC_ACID, "molar_mass_g_mol": 77.0}],
            "material[1].molar_mass_g_mol: 77 is not the mass of C2H4O3",
        ),
        (
            [GLYCOLATE],
            [{**GLYCOLIC_ACID, "contents": {"glycolate": -1}}],
            "material[1].contents.glycolate: -1 is not positive",
        ),
        (
            [GLYCOLATE],
            [{**GLYCOLIC_ACID, "contents": {}}],
            "material[1].contents: empty",
        ),
        (
            [GLYCOLATE],
            [{**GLYCOLIC_ACID, "formula": "C2H4Oo3"}],
            "material[1].formula: 'Oo'",
        ),
    ],
)
def test_in_house_rows_are_checked(
    library: Library, species: list[dict], materials: list[dict], words: str
) -> None:
    with pytest.raises(InputError) as caught:
        with_rows(library, species=species, materials=materials)

    assert words in caught.value.message
    assert caught.value.exit_code == 3
