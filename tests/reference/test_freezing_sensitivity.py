"""What each choice behind the freezing results does, by leaving it out or in.

Our own fits and the parameters that were set aside are rows marked ``derived`` or
without ``used_in`` in ``knowledge/freezing``; the effect of each is printed here.
"""

from __future__ import annotations

import pytest
from freezing_support import (
    DKP,
    DSP,
    brine,
    contents,
    path,
    refitted,
    with_changes,
)

from formbuf.chemistry.freezing import freeze_path
from formbuf.chemistry.freezing_records import Brine, FreezingPath
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.pitzer import Coefficient, Pair, PitzerSet

#: H2PO4 with HPO4, fitted to the composition of the sodium ternary eutectic.
FITTED_THETA = {("phosphate[-1]", "phosphate[-2]"): -0.27}
DOWN = (-0.5, -1.0, -2.0, -5.0, -10.0, -15.0, -20.0)


def _set(model: str) -> PitzerSet:
    parameters = brine(model).parameters
    assert parameters is not None
    return parameters


def _run(
    amounts: dict[str, float], ph: float, model: str, with_brine: Brine, at_c: float
) -> FreezingPath:
    return path(amounts, ph, [at_c], model=model, with_brine=with_brine)


def _ph(run: FreezingPath) -> float:
    point = run.metastable[0] if run.metastable else run.points[0]
    assert point.ph is not None
    return point.ph


def _eutectic(model: str, with_brine: Brine) -> tuple[float, float]:
    run = path({"phosphate": 0.1}, 7.0, [-22.0], model=model, with_brine=with_brine)
    event = run.event("eutectic")
    assert event is not None
    assert event.ph is not None
    return event.temperature_c, event.ph


def test_fitted_theta_and_why_it_is_left_out() -> None:
    # measured 5.1 +/- 0.1 at -10 C (Gomez et al. 2001, 8 mmol/L, pH 5.7)
    changed = refitted("sodium", with_changes(_set("sodium"), theta=FITTED_THETA))
    plain = _eutectic("sodium", brine("sodium"))
    fitted = _eutectic("sodium", changed)
    high = [
        path(
            {"phosphate": 0.008},
            5.7,
            [-10.0],
            assumption="supersaturated",
            with_brine=b,
        ).points[0]
        for b in (brine("sodium"), changed)
    ]
    assert high[0].ph is not None
    assert high[1].ph is not None
    print(
        f"ternary eutectic {plain[0]:.2f} C pH {plain[1]:.2f} without theta, "
        f"{fitted[0]:.2f} C pH {fitted[1]:.2f} with -0.27; supersaturated path of "
        f"8 mmol/L pH 5.7 at -10 C: {high[0].ph:.2f} without, {high[1].ph:.2f} with"
    )

    assert abs(fitted[1] - plain[1]) < 0.05
    assert high[0].ph > 5.0
    assert high[1].ph < 4.4


def test_anchored_constant_of_dipotassium_phosphate() -> None:
    found = {}
    for enthalpy in (0.0, 15.0, 30.0):
        model = refitted(
            "potassium", _set("potassium"), enthalpies_kj_mol={DKP: enthalpy}
        )
        found[enthalpy] = _eutectic("potassium", model)
        print(
            f"enthalpy {enthalpy:g} kJ/mol: potassium ternary {found[enthalpy][0]:.2f} C, "
            f"pH {found[enthalpy][1]:.2f}"
        )
    without = Brine(
        "no K2HPO4.6H2O",
        _set("potassium"),
        tuple(s for s in brine("potassium").solids if s.id != DKP),
    )
    run = path({"phosphate": 0.1}, 7.0, [-16.7], model="potassium", with_brine=without)
    print(f"left out: pH at -16.7 C {run.points[0].ph or 0.0:.2f}, still liquid")

    assert abs(found[0.0][0] - found[30.0][0]) < 0.3
    assert abs(found[0.0][1] - found[30.0][1]) < 0.05
    assert run.event("eutectic") is None


def test_slope_calibrated_to_the_dipotassium_liquidus() -> None:
    constant = Coefficient.constant
    slope = Coefficient((0.02475, 0.0, 0.0, -0.0009926, 0.0, 0.0))
    pair = Pair(
        "potassium", "phosphate[-2]", slope, constant(1.27425), constant(0.016387)
    )
    changed = refitted("potassium", with_changes(_set("potassium"), pairs=[pair]))
    plain, sloped = (
        _eutectic("potassium", brine("potassium")),
        _eutectic("potassium", changed),
    )
    print(
        f"potassium ternary {plain[0]:.2f} C pH {plain[1]:.2f} without the slope, "
        f"{sloped[0]:.2f} C pH {sloped[1]:.2f} with it"
    )

    assert abs(sloped[0] - plain[0]) < 0.3
    assert 0.1 < sloped[1] - plain[1] < 0.2


def test_published_slopes_of_potassium_dihydrogen_phosphate() -> None:
    # Silvester & Pitzer 1978: 25 C derivatives, carried to -3 C as straight lines
    pair = Pair(
        "potassium",
        "phosphate[-1]",
        Coefficient((-0.0678, 0.0, 0.0, 0.0006045, 0.0, 0.0)),
        Coefficient((-0.1042, 0.0, 0.0, 0.00286, 0.0, 0.0)),
        Coefficient((0.0, 0.0, 0.0, -0.0001011, 0.0, 0.0)),
    )
    changed = refitted("potassium", with_changes(_set("potassium"), pairs=[pair]))
    amounts = {"potassium": 0.1, "phosphate": 0.1}
    ends = []
    for model in (brine("potassium"), changed):
        run = freeze_path(contents(amounts), [-5.0], brine=model)
        event = run.event("eutectic")
        assert event is not None
        ends.append(event.temperature_c)
    print(
        f"KH2PO4 eutectic {ends[0]:.2f} C without, {ends[1]:.2f} C with (-2.7 published)"
    )

    assert abs(ends[0] + 2.7) < abs(ends[1] + 2.7)


def test_phosphoric_acid_terms_of_dilute_solutions() -> None:
    # Pitzer & Silvester 1976: H3PO4 with H2PO4, K, H; Hershey et al. 1989 with Na
    terms = {
        ("phosphate[-1]", "phosphate[0]"): -0.4,
        ("phosphate[0]", "potassium"): -0.07,
        ("hydrogen", "phosphate[0]"): 0.29,
        ("phosphate[0]", "sodium"): 0.075,
    }
    changed = refitted("sodium", with_changes(_set("sodium"), lambdas=terms))
    liquids = []
    for model in (brine("sodium"), changed):
        end, _ = _eutectic("sodium", model)
        run = path({"phosphate": 0.1}, 7.0, [end + 1e-3], with_brine=model)
        liquids.append(run.points[0].species_mol_kg["phosphate[0]"])
    print(
        f"H3PO4 at the sodium ternary: {liquids[0]:.3f} without, {liquids[1]:.3f} with"
    )

    assert liquids[0] < 0.05
    assert liquids[1] > 0.2


def test_phosphate_ion_terms_beyond_their_range() -> None:
    # Pitzer & Mayorga 1973: K3PO4 measured to 0.7 mol/kg; C_phi -0.26 instead of the
    # -0.09 of Kim & Frederick 1988 that both brines use for this trace ion
    constant = Coefficient.constant
    pair = Pair(
        "potassium",
        "phosphate[-3]",
        constant(0.37293),
        constant(3.972),
        constant(-0.26038),
    )
    shares = []
    for parameters in (
        _set("potassium"),
        with_changes(_set("potassium"), pairs=[pair]),
    ):
        model = Brine("without refusal", parameters)
        run = freeze_path(
            contents({"potassium": 0.2, "phosphate": 0.1}),
            [-10.0],
            assumption="supersaturated",
            brine=model,
        )
        species = run.points[0].species_mol_kg
        total = run.points[0].liquid_mol_kg["phosphate"]
        shares.append(species["phosphate[-3]"] / total)
    print(
        f"PO4 share of a K2HPO4 brine at -10 C: {shares[0]:.3f}, {shares[1]:.3f} with"
    )

    assert shares[0] < 0.005
    assert shares[1] > 3.0 * shares[0]


def test_chloride_phosphate_mixing_terms() -> None:
    # Hershey, Fernandez & Millero 1989; Pitzer & Silvester 1976
    names = ("chloride", "phosphate[-1]"), ("chloride", "phosphate[-2]")
    triples = (
        ("chloride", "phosphate[-1]", "sodium"),
        ("chloride", "phosphate[-2]", "sodium"),
    )
    bare = with_changes(
        _set("sodium"), theta=dict.fromkeys(names, 0.0), psi=dict.fromkeys(triples, 0.0)
    )
    amounts = {"phosphate": 0.01, "sodium": 0.15, "chloride": 0.15}
    with_terms = _ph(_run(amounts, 7.4, "sodium", brine("sodium"), -10.0))
    without = _ph(_run(amounts, 7.4, "sodium", refitted("sodium", bare), -10.0))
    print(f"saline phosphate at -10 C: pH {with_terms:.2f} with, {without:.2f} without")

    assert 0.01 < abs(with_terms - without) < 0.5


def test_the_other_set_of_phosphate_parameters() -> None:
    # sodium phosphate by Pitzer & Mayorga 1973 instead of Kim & Frederick 1988
    one = _ph(_run({"phosphate": 0.05}, 7.4, "sodium", brine("sodium"), -10.0))
    other = _ph(_run({"phosphate": 0.05}, 7.4, "sodium", brine("potassium"), -10.0))
    print(f"sodium phosphate at -10 C: pH {one:.2f}, by the other set {other:.2f}")

    assert abs(one - other) < 0.1


def test_solubility_of_disodium_phosphate_ten_percent_up() -> None:
    # conflicting tables differ by 5 to 20 % at 10 and 20 C
    raised = Brine(
        "raised",
        _set("sodium"),
        tuple(
            type(s)(
                s.id,
                s.formula,
                s.states,
                s.components,
                s.waters,
                (s.ln_k[0] + 3.0 * 0.0953, s.ln_k[1]) if s.id == DSP else s.ln_k,
            )
            for s in brine("sodium").solids
        ),
    )
    low = _ph(_run({"phosphate": 0.05}, 7.4, "sodium", brine("sodium"), -10.0))
    high = _ph(_run({"phosphate": 0.05}, 7.4, "sodium", raised, -10.0))
    print(f"-10 C: pH {low:.2f}, with the solubility 10 % up {high:.2f}")

    assert 0.05 < high - low < 0.2


@pytest.mark.parametrize(
    ("label", "dh_kj_mol", "dcp_j_mol_k", "largest"),
    # step 2 of phosphoric acid: 3.6 in the review, 4.05 from emf; no heat capacity;
    # no temperature dependence at all
    [("emf", 4.05, -230.0, 0.1), ("no dCp", 3.6, 0.0, 0.2), ("25 C", 0.0, 0.0, 0.3)],
)
def test_temperature_dependence_of_pk2(
    label: str, dh_kj_mol: float, dcp_j_mol_k: float, largest: float
) -> None:
    base = contents({"phosphate": 0.05}, 7.4)
    ladder = base.ladders[0]
    changed = Ladder(
        ladder.name,
        ladder.top_charge,
        ladder.pka,
        (ladder.dh_kj_mol[0], dh_kj_mol, ladder.dh_kj_mol[2]),
        (ladder.dcp_j_mol_k[0], dcp_j_mol_k, ladder.dcp_j_mol_k[2]),
    )
    low = _ph(freeze_path(base, [-10.0], brine=brine("sodium")))
    other = type(base)((changed,), base.totals_mol_kg, ph=7.4)
    high = _ph(freeze_path(other, [-10.0], brine=brine("sodium")))
    print(f"{label}: pH at -10 C {high:.2f} against {low:.2f}")

    assert 0.0 < abs(high - low) < largest


def test_extended_debye_hueckel_form_beside_the_brine_model() -> None:
    worst = 0.0
    for ph in (6.5, 7.4, 8.0):
        one = path({"phosphate": 0.1}, ph, DOWN, assumption="supersaturated").points
        other = freeze_path(
            contents({"phosphate": 0.1}, ph), DOWN, assumption="supersaturated"
        ).points
        for a, b in zip(one, other, strict=True):
            assert a.ph is not None
            assert b.ph is not None
            worst = max(worst, abs(a.ph - b.ph))
    print(
        f"sodium phosphate, no crystallisation, to -20 C: apart by at most {worst:.2f}"
    )

    assert worst < 0.2
