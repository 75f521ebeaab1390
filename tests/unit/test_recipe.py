"""Making a system to a pH: materials, water, tonicity agent."""

from __future__ import annotations

import numpy as np
import pytest

from formbuf import load_library
from formbuf.errors import InputError
from formbuf.product.composition import Extra, ladder_of, mixture, volume_ml_mol
from formbuf.product.osmotics import osmotic_law
from formbuf.product.recipe import Background, make, pieces, titrant_of, weighed

LIBRARY = load_library()
LAW = osmotic_law(LIBRARY)
BARE = Background()
BUFFERS = [s for s in LIBRARY.systems.values() if s.role == "buffer"]


@pytest.mark.parametrize("system", BUFFERS, ids=lambda s: s.id)
@pytest.mark.parametrize("ph", [4.0, 6.0, 7.4, 9.0])
def test_the_composition_found_reads_the_wanted_ph(system, ph):
    """Solved forwards from the weighed materials, the target comes back."""
    recipe = make(LIBRARY, system, np.array([2.0, 50.0]), ph, 25.0, BARE, LAW)

    back = mixture(LIBRARY, dict(recipe.buffer_mmol_l)).solve(25.0)
    assert back.ph == pytest.approx(ph, abs=1e-3)


@pytest.mark.parametrize("system", BUFFERS, ids=lambda s: s.id)
def test_no_material_is_negative_and_the_total_is_as_asked(system):
    """Amounts are not negative; the buffering species sum to the concentration."""
    recipe = make(LIBRARY, system, np.array([5.0, 80.0]), 6.0, 25.0, BARE, LAW)

    total = 0.0
    for key, amount in recipe.buffer_mmol_l.items():
        assert np.all(amount >= 0.0)
        contents = LIBRARY.find_material(key).contents
        first = system.species[0]
        total = total + contents.get(first, 0.0) * amount
        if system.id == "citrate_phosphate":
            total = total + contents.get("phosphate", 0.0) * amount
    assert total == pytest.approx([5.0, 80.0], rel=1e-9)


def test_the_agent_fills_to_the_target():
    """Sucrose and sodium chloride bring the whole product to 290 mosmol/kg."""
    system = LIBRARY.systems["sodium_phosphate"]
    for agent in ("sucrose", "sodium_chloride", "mannitol"):
        background = Background({}, (), agent, 290.0)
        recipe = make(LIBRARY, system, 20.0, 7.0, 25.0, background, LAW)
        solution = recipe.mixture.solve(25.0)
        osmol = recipe.mixture.osmolality(25.0, solution, LAW).osmolality_mosm_kg
        assert osmol == pytest.approx(290.0, abs=0.1)
        assert solution.ph == pytest.approx(7.0, abs=1e-3)


def test_nothing_is_filled_where_there_is_no_room():
    """A buffer above the target keeps its osmolality and takes no agent."""
    system = LIBRARY.systems["sodium_phosphate"]
    background = Background({}, (), "sucrose", 290.0)
    recipe = make(LIBRARY, system, 200.0, 7.4, 25.0, background, LAW)

    assert float(recipe.fill_mmol_l) == 0.0


def test_solutes_take_up_water():
    """100 mg/mL protein (0.73 mL/g, practice) leaves 0.924 kg of water per litre."""
    protein = Extra("drug", None, 0.0, 100.0, 0.73)
    mixed = mixture(LIBRARY, {"sodium_chloride": 10.0}, extras=(protein,))

    assert float(mixed.water_kg_l) == pytest.approx(0.99705 * (1 - 0.0732), abs=5e-4)
    assert float(mixed.ions_mol_kg["sodium"]) == pytest.approx(0.01 / 0.924, rel=2e-3)


def test_crystal_water_takes_up_no_room_of_its_own():
    """The volume of trehalose dihydrate is that of its sugar."""
    dihydrate = LIBRARY.find_material("trehalose_dihydrate")
    anhydrous = LIBRARY.find_material("trehalose_anhydrous")

    assert volume_ml_mol(LIBRARY, dihydrate) == pytest.approx(
        volume_ml_mol(LIBRARY, anhydrous), rel=1e-3
    )


def test_two_species_share_the_exchange():
    """Histidine acetate is set with acetic acid alone, which buffers too."""
    system = LIBRARY.systems["histidine_acetate"]
    recipe = make(LIBRARY, system, 20.0, 6.0, 25.0, BARE, LAW)

    assert set(recipe.buffer_mmol_l) == {"l_histidine", "acetic_acid_glacial"}


def test_borax_brings_four_boron():
    """The exchange of boric acid for borax keeps the boron."""
    system = LIBRARY.systems["sodium_borate"]
    exchange = next(p for p in pieces(LIBRARY, system) if np.isfinite(p.limit))
    titrant = titrant_of(LIBRARY, exchange.added)

    assert titrant.components == {}
    assert titrant.charge == pytest.approx(0.5)


def test_a_calcium_complex_is_refused():
    """Edetate calcium disodium is a complex that the solver does not model."""
    with pytest.raises(InputError, match="edetate_calcium_disodium"):
        mixture(LIBRARY, {"edetate_calcium_disodium_anhydrous": 1.0})


def test_metals_with_binders_are_said():
    """Calcium beside citrate leaves a note."""
    mixed = mixture(
        LIBRARY, {"calcium_chloride_dihydrate": 2.0, "trisodium_citrate_dihydrate": 5.0}
    )
    assert "not modelled" in mixed.notes[0]


def test_solutes_may_not_fill_the_bottle():
    """1.2 kg of sucrose per litre leaves too little water."""
    with pytest.raises(InputError, match="take up"):
        mixture(LIBRARY, {"sucrose": 3500.0})


def test_weighed_masses_use_the_hydrate():
    """10 mmol of the heptahydrate weigh 2.68 g (IUPAC weights)."""
    ((_, _, mass),) = weighed(
        LIBRARY, {"disodium_hydrogen_phosphate_heptahydrate": 10.0}
    )
    assert mass == pytest.approx(2.6806, abs=1e-3)


def test_ladders_keep_unknown_enthalpies_unknown():
    """Meglumine has no enthalpy in the tables: it stays unknown, not zero."""
    assert ladder_of(LIBRARY.species["meglumine"]).has_unknown_enthalpy
    assert not ladder_of(LIBRARY.species["tris"]).has_unknown_enthalpy
