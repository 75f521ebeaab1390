"""What the dose burden counts: the buffer itself, not what it stands in."""

from __future__ import annotations

import numpy as np
import pytest

from formbuf import load_library
from formbuf.advice.draw_candidate import draw_candidate, prepare_draws
from formbuf.advice.draw_criteria import log_desirabilities
from formbuf.advice.sampling import Sampler
from formbuf.advice.shortlist import shortlist
from formbuf.product.brief import brief_from_mapping
from formbuf.product.composition import mixture
from formbuf.product.liquid import acidities_mmol_l

LIBRARY = load_library()
#: Acidity of a subcutaneous dose at which the burden reaches its floor [mmol].
LIMIT_MMOL = 0.05


def ranked(mg_ml, **changes):
    data = {
        "product": {"route": "subcutaneous"},
        "ph": {"target": 6.0, "low": 5.7, "high": 6.3, "release_tolerance": 0.1},
        "storage": [{"temperature_c": 5.0}],
        "dose": {"volume_ml": 1.0},
        "loads": {"acid_mmol_l": 0.2, "base_mmol_l": 0.2},
        "container": {"type": "plastic_vial", "gas_permeable": False},
        "tonicity": {"agent": "sucrose"},
        "drug": {
            "kind": "antibody",
            "concentration_mg_ml": mg_ml,
            "molar_mass_g_mol": 148000,
            "isoelectric_point": 8.4,
            "residues": {
                "histidine": 26,
                "aspartate": 56,
                "glutamate": 66,
                "lysine": 90,
                "arginine": 42,
            },
        },
        "candidate": [
            {"system": "histidine_hydrochloride", "concentration_mmol_l": 5.0},
            {"system": "histidine_hydrochloride", "concentration_mmol_l": 20.0},
        ],
    }
    return shortlist(brief_from_mapping(data | changes), LIBRARY)


def own(found, mmol_l):
    return next(
        c
        for c in found.candidates
        if c.is_own_formula and c.concentration_mmol_l == mmol_l
    )


def test_the_acidity_of_acetate_by_hand():
    """Henderson-Hasselbalch: of 30 mmol/L at pH 5.0 the acid left is taken up by 7.4.

    pKa 4.756 (Harned & Ehlers 1932); at the ionic strengths here, 0.02 and 0.03, pK' on
    the activity scale of pH is lower by 0.509 sqrt(I) / (1 + sqrt(I)), 0.064 and 0.075.
    """
    made = mixture(
        LIBRARY, {"acetic_acid_glacial": 11.0, "sodium_acetate_trihydrate": 19.0}
    )
    solution = made.solve(25.0)
    ph = float(solution.ph)

    def acid(pk, at):
        return 30.0 / (1.0 + 10.0 ** (at - pk))

    whole, part = acidities_mmol_l(made, 25.0, solution, {"acetate": 30.0})

    assert part == pytest.approx(
        acid(4.756 - 0.064, ph) - acid(4.756 - 0.075, 7.4), rel=0.01
    )
    assert whole == pytest.approx(part, rel=0.01)  # hardly a free hydrogen ion


def test_whole_and_own_differ_by_water_and_the_rest():
    """Charge balance: base = what every component gives up, and free H+ and OH-."""
    made = mixture(
        LIBRARY,
        {"acetic_acid_glacial": 20.0, "l_histidine": 10.0, "sodium_chloride": 100.0},
    )
    solution = made.solve(25.0)

    whole, _ = acidities_mmol_l(made, 25.0, solution, {})
    _, acetate = acidities_mmol_l(made, 25.0, solution, {"acetate": 20.0})
    _, histidine = acidities_mmol_l(made, 25.0, solution, {"histidine": 10.0})
    _, half = acidities_mmol_l(made, 25.0, solution, {"histidine": 5.0})
    water = 1000.0 * float(made.water_kg_l)
    free = float(solution.hydrogen_mol_kg - solution.hydroxide_mol_kg) * water

    assert whole == pytest.approx(acetate + histidine + free, abs=2e-3)
    assert half == pytest.approx(0.5 * histidine)
    assert acetate > 1.0
    assert histidine > 1.0


def test_an_alkaline_product_gives_a_negative_acidity():
    """Tris at pH 8.3 takes up acid on the way down to 7.4."""
    made = mixture(LIBRARY, {"tromethamine": 12.0, "tromethamine_hydrochloride": 10.0})
    whole, part = acidities_mmol_l(made, 25.0, made.solve(25.0), {"tris": 22.0})

    assert part == pytest.approx(whole, rel=0.01)
    assert part < -5.0


def test_the_drug_is_no_burden_of_the_buffer():
    """200 mg/mL of antibody hands over more than 20 mmol/L; the buffer's part stays."""
    without, with_drug = ranked(1.0), ranked(200.0)
    print(own(with_drug, 20.0).titratable_acidity_mmol_l, "mmol/L in all")

    assert own(with_drug, 20.0).titratable_acidity_mmol_l > 1.5 * (
        own(without, 20.0).titratable_acidity_mmol_l
    )
    for amount in (5.0, 20.0):
        burden = own(with_drug, amount).criteria["dose_burden"]
        bare = own(without, amount).criteria["dose_burden"]
        # Histidine, pK' about 6.1: half is protonated at 6.0, 5 % at 7.4.
        assert burden.value == pytest.approx(
            0.5 * amount / 1000.0 / LIMIT_MMOL, rel=0.15
        )
        assert burden.value == pytest.approx(bare.value, rel=0.08)
        assert "of the buffer's own species to pH 7.4" in burden.text
    assert own(with_drug, 5.0).criteria["dose_burden"].desirability > (
        own(with_drug, 20.0).criteria["dose_burden"].desirability + 0.15
    )


@pytest.mark.slow
def test_an_excipient_of_the_same_species_is_no_burden_of_the_buffer():
    """Histidine as a stabiliser is there with any buffer."""
    plain = own(ranked(1.0), 20.0).criteria["dose_burden"]
    mixed = own(
        ranked(1.0, excipient=[{"material": "l_histidine", "mmol_l": 40.0}]), 20.0
    )

    # Its base form must be protonated by the buffer, which then holds more acid.
    assert mixed.titratable_acidity_mmol_l > 2.0 * 10.0
    assert mixed.criteria["dose_burden"].value < 1.3 * plain.value


def test_the_product_without_buffer_has_no_burden():
    found = ranked(200.0)
    bare = next(c for c in found.candidates if c.system.id == "none")

    assert bare.criteria["dose_burden"].value == 0.0
    assert bare.titratable_acidity_mmol_l > 5.0


def test_draws_and_shortlist_weigh_the_same_burden():
    """The median of the drawn desirability is the one of the shortlist."""
    found = ranked(200.0)
    candidate = own(found, 20.0)
    draws = prepare_draws(found, Sampler(2500, 1))
    logs, _ = log_desirabilities(
        draws, found.settings, candidate, draw_candidate(draws, candidate)
    )
    nominal = candidate.criteria["dose_burden"].desirability

    assert np.exp(np.median(logs["dose_burden"])) == pytest.approx(nominal, rel=0.01)
