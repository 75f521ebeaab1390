"""The ion-interaction equations: published coefficients, an oracle, thermodynamics."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from freezing_support import brine
from reference_tables import library

from formbuf.chemistry.pitzer import (
    PitzerModel,
    PitzerSet,
    osmotic_coefficient,
    temperature_factors,
)
from formbuf.chemistry.pitzer_mixing import electrostatic_integral
from formbuf.errors import InputError
from formbuf.product.freezing_data import pitzer_set, state_names
from formbuf.qualify.brines import SALTS

MIXED = ["hydrogen", "hydroxide", "sodium", "potassium", "chloride"]
MIXED += ["phosphate[-1]", "phosphate[-2]", "phosphate[-3]", "sucrose"]
MIXED_CHARGES = [1, -1, 1, 1, -1, -1, -2, -3, 0]
MIXED_MOLALITIES = np.array([1e-2, 1e-2, 3.1, 0.6, 1.3, 1.2, 0.6, 0.01, 0.8])


def _salt(parameters: PitzerSet, name: str) -> tuple[PitzerModel, np.ndarray]:
    cation, anion, charge = SALTS[name]
    model = PitzerModel(parameters, [cation, anion], [1, charge])
    return model, np.array([-float(charge), 1.0])


def _phi(parameters: PitzerSet, name: str, molality: float) -> float:
    model, counts = _salt(parameters, name)
    m = molality * counts
    _, ln_water = model.evaluate(m, 25.0)
    return float(osmotic_coefficient(ln_water, m))


def _mean_gamma(parameters: PitzerSet, name: str, molality: float) -> float:
    model, counts = _salt(parameters, name)
    ln_gamma, _ = model.evaluate(molality * counts, 25.0)
    return float(np.exp(counts @ ln_gamma / counts.sum()))


def _mixed_model(model: str) -> PitzerModel:
    return PitzerModel(
        brine(model).parameters or PitzerSet("none", ()),
        MIXED,
        MIXED_CHARGES,
        {"sucrose": 0.1},
    )


@pytest.mark.parametrize(
    ("salt", "molality", "published"),
    [
        # Robinson & Stokes 1959, App. 8, memory
        ("NaCl", 0.1, 0.778),
        ("NaCl", 1.0, 0.657),
        ("NaCl", 3.0, 0.714),
        ("NaCl", 5.0, 0.874),
        ("KCl", 0.1, 0.770),
        ("KCl", 1.0, 0.604),
        ("KCl", 3.0, 0.569),
        ("HCl", 0.1, 0.796),
        ("HCl", 1.0, 0.809),
        ("HCl", 3.0, 1.316),
        ("NaH2PO4", 0.1, 0.744),
        ("NaH2PO4", 0.5, 0.563),
        ("NaH2PO4", 1.0, 0.468),
        ("NaH2PO4", 2.0, 0.371),
        ("KH2PO4", 0.1, 0.731),
        ("KH2PO4", 0.5, 0.529),
        ("KH2PO4", 1.0, 0.421),
    ],
)
def test_mean_activity_coefficients(
    salt: str, molality: float, published: float
) -> None:
    parameters = brine("sodium").parameters
    assert parameters is not None
    found = _mean_gamma(parameters, salt, molality)
    print(f"{salt} {molality:g}: published {published}, found {found:.4f}")

    assert found == pytest.approx(published, abs=0.011)


def test_the_two_phosphate_sets_agree_where_both_were_measured() -> None:
    one, other = brine("sodium").parameters, brine("potassium").parameters
    assert one is not None
    assert other is not None
    for salt in ("NaH2PO4", "KH2PO4", "Na2HPO4", "K2HPO4"):
        for m in (0.1, 0.3, 0.5):
            gap = _phi(one, salt, m) - _phi(other, salt, m)
            print(f"{salt} {m:g} mol/kg: phi differs by {gap:+.4f}")
            assert abs(gap) < 0.012


@pytest.mark.parametrize("model", ["sodium", "potassium"])
@pytest.mark.parametrize("temperature_c", [25.0, 0.0, -15.0])
def test_gibbs_duhem(model: str, temperature_c: float) -> None:
    # sum m_i d ln a_i + (1/M_w) d ln a_w = 0 at constant temperature
    pitzer = _mixed_model(model)
    rng = np.random.default_rng(7)
    for _ in range(5):
        change = 1e-5 * rng.normal(size=len(MIXED)) * MIXED_MOLALITIES
        low, high = MIXED_MOLALITIES - change, MIXED_MOLALITIES + change
        gamma_low, water_low = pitzer.evaluate(low, temperature_c)
        gamma_high, water_high = pitzer.evaluate(high, temperature_c)
        solutes = MIXED_MOLALITIES @ (gamma_high - gamma_low + np.log(high / low))
        water = (water_high - water_low) / 0.018015
        assert solutes + water == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize("model", ["sodium", "potassium"])
def test_cross_derivatives_are_equal(model: str) -> None:
    # d ln gamma_i / d m_j = d ln gamma_j / d m_i: one excess energy behind all
    pitzer = _mixed_model(model)
    n, step = len(MIXED), 1e-5
    derivatives = np.empty((n, n))
    for j in range(n):
        high, low = MIXED_MOLALITIES.copy(), MIXED_MOLALITIES.copy()
        high[j] += step * high[j]
        low[j] -= step * low[j]
        up, _ = pitzer.evaluate(high, -5.0)
        down, _ = pitzer.evaluate(low, -5.0)
        derivatives[:, j] = (up - down) / (high[j] - low[j])
    scale = 1.0 + np.abs(derivatives)

    assert np.max(np.abs(derivatives - derivatives.T) / scale) < 2e-5


def test_a_batch_is_its_states_one_by_one() -> None:
    pitzer = _mixed_model("sodium")
    states = MIXED_MOLALITIES * np.linspace(0.1, 1.5, 6)[:, np.newaxis]
    together, water = pitzer.evaluate(states, -3.0)
    for state, gamma, ln_water in zip(states, together, water, strict=True):
        alone, alone_water = pitzer.evaluate(state, -3.0)
        assert np.allclose(gamma, alone, rtol=0.0, atol=1e-13)
        assert float(ln_water) == pytest.approx(float(alone_water), abs=1e-14)


def test_a_neutral_solute_follows_its_osmotic_law() -> None:
    pitzer = PitzerModel(PitzerSet("none", ()), ["sucrose"], [0], {"sucrose": 0.1})
    _, ln_water = pitzer.evaluate([2.0], -4.0)

    assert float(osmotic_coefficient(ln_water, [2.0])) == pytest.approx(1.2, abs=1e-12)


def test_infinite_dilution() -> None:
    pitzer = _mixed_model("sodium")
    gamma, ln_water = pitzer.evaluate(1e-10 * MIXED_MOLALITIES, 25.0)

    assert np.all(np.abs(gamma) < 1e-3)
    assert float(ln_water) == pytest.approx(0.0, abs=1e-10)


def test_temperature_form_gives_the_25_c_value_at_25_c() -> None:
    assert np.allclose(temperature_factors(25.0), [1, 0, 0, 0, 0, 0], atol=1e-15)
    parameters = brine("sodium").parameters
    assert parameters is not None
    # Marion & Kargel 2008: a0 of NaCl
    model, _ = _salt(parameters, "NaCl")
    assert model.at(25.0).beta0[0, 1] == pytest.approx(0.076276, abs=1e-12)
    assert model.at(-20.0).beta0[0, 1] < model.at(25.0).beta0[0, 1]


@pytest.mark.parametrize("x", [0.1, 0.3, 0.99, 1.01, 2.3, 5.0, 10.0, 50.0, 200.0])
def test_electrostatic_integral_against_quadrature(x: float) -> None:
    # Pitzer 1975, J. Solution Chem. 4, 249: J(x) = (1/x) integral of
    # (1 + q + q^2/2 - exp q) y^2 dy, q = -(x/y) exp(-y)
    from scipy.integrate import quad

    def integrand(y: float) -> float:
        q = -(x / y) * np.exp(-y)
        return float((1.0 + q + 0.5 * q * q - np.exp(q)) * y * y)

    pieces = itertools.pairwise((1e-10, 0.02, 0.2, 1.0, 3.0, 10.0, 60.0))
    total = sum(quad(integrand, a, b, epsabs=1e-12, limit=200)[0] for a, b in pieces)
    j, slope = electrostatic_integral(x)
    near, _ = electrostatic_integral(x * (1.0 + 1e-5))
    far, _ = electrostatic_integral(x * (1.0 - 1e-5))

    assert float(j) == pytest.approx(total / x, rel=2e-6)
    assert float(slope) == pytest.approx(float(near - far) / 2e-5, rel=1e-5)


def test_unsymmetrical_mixing_matters_and_only_between_unequal_charges() -> None:
    bare = PitzerSet("none", ())
    equal = PitzerModel(bare, ["sodium", "chloride", "bromide"], [1, -1, -1])
    unequal = PitzerModel(bare, ["sodium", "chloride", "sulfate"], [1, -1, -2])
    m = np.array([1.0, 0.5, 0.5])
    one, _ = equal.evaluate(m, 25.0)
    assert float(one[1]) == pytest.approx(float(one[2]), abs=1e-14)
    two, _ = unequal.evaluate(np.array([1.5, 0.5, 0.5]), 25.0)
    assert abs(float(two[2]) - 4.0 * float(two[1])) > 0.05


def test_names_and_charges_must_match() -> None:
    with pytest.raises(InputError, match="2 species but 1 charges"):
        PitzerModel(PitzerSet("none", ()), ["sodium", "chloride"], [1])


def test_one_set_of_phosphate_per_brine() -> None:
    # Kim & Frederick 1988 for sodium, Pitzer & Mayorga 1973 for potassium
    states = state_names(library())
    sodium, limits = pitzer_set(library(), "sodium", states)
    potassium, _ = pitzer_set(library(), "potassium", states)
    beta0 = {
        (p.cation, p.anion, name): p.beta0.terms[0]
        for name, parameters in (("KF", sodium), ("PM", potassium))
        for p in parameters.pairs
    }
    assert beta0["sodium", "phosphate[-2]", "KF"] == -0.02266
    assert beta0["potassium", "phosphate[-2]", "KF"] == 0.043
    assert beta0["sodium", "phosphate[-2]", "PM"] == -0.058275
    assert beta0["potassium", "phosphate[-2]", "PM"] == 0.02475
    # the phosphate ion, a trace, is by Kim & Frederick in both
    assert beta0["potassium", "phosphate[-3]", "PM"] == 0.3422
    assert limits == {
        "phosphate[-1]": 6.5,
        "phosphate[-2]": 2.0,
        "phosphate[-3]": 0.8,
    }


@pytest.mark.parametrize("model", ["sodium", "potassium"])
def test_against_a_public_speciation_code(model: str) -> None:
    """Same parameters put into PHREEQC's own Pitzer equations, 25 C, mixtures."""
    from phreeqc_pitzer import activities

    parameters = brine(model).parameters
    assert parameters is not None
    rng = np.random.default_rng(11)
    worst = 0.0
    for _ in range(12):
        sodium, potassium, chloride, phosphate = rng.uniform(0.1, 2.5, 4)
        result = activities(parameters, sodium, potassium, chloride, phosphate)
        if result is None:
            continue
        names = [n for n in result.molality if result.molality[n] > 0.0]
        charges = [result.charge[n] for n in names]
        pitzer = PitzerModel(parameters, names, charges)
        m = np.array([result.molality[n] for n in names])
        ln_gamma, ln_water = pitzer.evaluate(m, 25.0)
        theirs = np.array([result.ln_gamma[n] for n in names])
        # single-ion scales differ by z times a constant
        z = np.array(charges, dtype=float)
        shift = (ln_gamma - theirs)[names.index("sodium")]
        gap = float(np.max(np.abs(ln_gamma - theirs - z * shift)))
        worst = max(worst, gap, abs(float(ln_water) - np.log(result.water_activity)))
    print(f"{model}: largest difference in ln gamma or ln a_w {worst:.2e}")

    assert 0.0 < worst < 1e-3
