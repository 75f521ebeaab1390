"""Useful pH ranges and slopes are computed from the ionization data, not typed in."""

from __future__ import annotations

from formbuf import load_library
from formbuf.bench.species_properties import computed_columns

COMPUTED = computed_columns(load_library())


def test_every_species_has_its_columns():
    """No species is left out, and none has an empty range."""
    assert set(COMPUTED) == set(load_library().species)
    assert all(row["useful_ph"] for row in COMPUTED.values())


def test_a_lone_pk_is_useful_one_unit_either_side():
    """`practice`: tris, pK 8.07, serves from about 7.1 to 9.1."""
    assert COMPUTED["tris"]["useful_ph"] == "7.1 to 9.1"


def test_overlapping_steps_merge():
    """Citrate (3.13, 4.76, 6.40) serves without a gap from 2.1 to 7.4."""
    assert COMPUTED["citrate"]["useful_ph"] == "2.1 to 7.4"


def test_slopes_follow_the_enthalpy():
    """Tris -0.028 per K (Goldberg 2002: 47.45 kJ/mol); an unknown one is said."""
    assert COMPUTED["tris"]["pka_slope_per_k"] == "-0.0279"
    assert COMPUTED["meglumine"]["pka_slope_per_k"] == "unknown"
