"""Carbon dioxide in any product: closed, open to a gas, or shared with a headspace."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from formbuf.chemistry import gas
from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.chemistry.ionization import state_fractions
from formbuf.constants import GAS_CONSTANT_J_MOL_K, LN10, ZERO_CELSIUS_K
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.product.composition import Mixture, ladder_of
from formbuf.product.vocabulary import Exposure

#: Pressures between which the equilibrium with a headspace is looked for, Pa.
LEAST_PRESSURE_PA, MOST_PRESSURE_PA = 1e-6, 1e8
BISECTIONS = 60


@dataclass(frozen=True, slots=True)
class Exposed:
    """A product in equilibrium with what it meets.

    Attributes
    ----------
    exposure : {"closed", "open", "headspace"}
    temperature_c : float
    ph : float
    capacity_mmol_l_ph : float
        Of a closed portion; open to a gas the capacity of carbonate is unlimited and
        not counted.
    carbonate_mmol_l : float
        Carbon dioxide, bicarbonate and carbonate together in the solution.
    pressure_pa : float
        Carbon dioxide above it; without a headspace what it would build up.
    mixture : Mixture
        The solution with its carbonate, closed.
    """

    exposure: Exposure
    temperature_c: float
    ph: float
    capacity_mmol_l_ph: float
    carbonate_mmol_l: float
    pressure_pa: float
    mixture: Mixture


def expose(
    library: Library,
    mixed: Mixture,
    exposure: Exposure,
    *,
    temperature_c: float = 25.0,
    pressure_pa: float = 0.0,
    headspace_ratio: float = 0.0,
) -> Exposed:
    """Bring a product into equilibrium with carbon dioxide.

    Parameters
    ----------
    library : Library
    mixed : Mixture
        A single state; its own carbonate counts.
    exposure : {"closed", "open", "headspace"}
        Closed keeps the carbon the product has; open holds the gas at
        ``pressure_pa``; with a headspace the carbon of product and gas is shared.
    temperature_c : float
        Temperature [C], 0 to 60.
    pressure_pa : float
        Carbon dioxide of the gas, of the headspace before sharing [Pa].
    headspace_ratio : float
        Volume of gas over volume of solution, above 0, only with a headspace.

    Returns
    -------
    Exposed

    Raises
    ------
    InputError
        For a negative pressure, or a headspace without volume.
    """
    if not (np.isfinite(pressure_pa) and 0.0 <= pressure_pa <= MOST_PRESSURE_PA):
        msg = f"pressure of carbon dioxide of {pressure_pa:g} Pa, allowed 0 to 1e8"
        raise InputError(msg)
    if exposure == "headspace" and not 0.0 < headspace_ratio <= 1e4:
        msg = f"headspace ratio {headspace_ratio:g}, allowed above 0 to 10000"
        raise InputError(msg)
    whole = with_carbonate(library, mixed)
    if exposure == "open":
        return _open(whole, temperature_c, pressure_pa)
    if exposure == "closed":
        return _closed(whole, temperature_c)
    return _headspace(whole, temperature_c, pressure_pa, headspace_ratio)


def with_carbonate(library: Library, mixed: Mixture) -> Mixture:
    """Return the mixture with carbonate among its components, at zero if it has none."""
    if mixed.index(gas.CARBONATE) >= 0:
        return mixed
    zero = np.zeros((*mixed.totals_mol_kg.shape[:-1], 1))
    return replace(
        mixed,
        ladders=(*mixed.ladders, ladder_of(library.species[gas.CARBONATE])),
        totals_mol_kg=np.concatenate([mixed.totals_mol_kg, zero], axis=-1),
    )


def _with_total(whole: Mixture, carbonate_mol_kg: float) -> Mixture:
    totals = np.array(whole.totals_mol_kg, dtype=float)
    totals[..., whole.index(gas.CARBONATE)] = carbonate_mol_kg
    return replace(whole, totals_mol_kg=totals, open_components=())


def _total_under(
    whole: Mixture, temperature_c: float, pressure_pa: float
) -> tuple[float, float]:
    """Carbonate that a solution holds under a pressure [mol/kg], and its pH."""
    dissolved = float(gas.dissolved_mol_kg(pressure_pa, temperature_c))
    held = replace(_with_total(whole, dissolved), open_components=(gas.CARBONATE,))
    solution = held.solve(temperature_c)
    ladder = whole.ladders[whole.index(gas.CARBONATE)]
    first = state_fractions(
        ladder, solution.ph, temperature_c, solution.unit_charge_term
    )[..., 0]
    return dissolved / float(first), float(solution.ph)


def _result(
    exposure: Exposure, closed: Mixture, temperature_c: float, pressure_pa: float | None
) -> Exposed:
    solution = closed.solve(temperature_c)
    if pressure_pa is None:
        implied = gas.implied_pressure_pa(
            closed.ladders, closed.totals_mol_kg, temperature_c, solution
        )
        pressure_pa = float(implied)
    litre = 1000.0 * float(closed.water_kg_l)
    j = closed.index(gas.CARBONATE)
    beta = float(capacity_mol_kg_ph(solution)) * litre
    if exposure == "open":
        beta -= LN10 * float(solution.variance_mol_kg[..., j]) * litre
    return Exposed(
        exposure,
        temperature_c,
        float(solution.ph),
        beta,
        float(closed.totals_mol_kg[..., j]) * litre,
        pressure_pa,
        closed,
    )


def _closed(whole: Mixture, temperature_c: float) -> Exposed:
    return _result("closed", whole, temperature_c, None)


def _open(whole: Mixture, temperature_c: float, pressure_pa: float) -> Exposed:
    total, _ = _total_under(whole, temperature_c, pressure_pa)
    return _result("open", _with_total(whole, total), temperature_c, pressure_pa)


def _headspace(
    whole: Mixture, temperature_c: float, pressure_pa: float, ratio: float
) -> Exposed:
    """Bisect on the logarithm of pressure until no carbon is gained or lost."""
    litres_kg = ratio / float(whole.water_kg_l)
    kelvin = temperature_c + ZERO_CELSIUS_K
    per_pa = litres_kg / 1000.0 / (GAS_CONSTANT_J_MOL_K * kelvin)
    own = float(whole.totals_mol_kg[..., whole.index(gas.CARBONATE)])
    all_carbon = own + per_pa * pressure_pa
    if all_carbon <= 0.0:
        return _result("headspace", whole, temperature_c, 0.0)
    low, high = np.log(LEAST_PRESSURE_PA), np.log(MOST_PRESSURE_PA)
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        p = float(np.exp(middle))
        held, _ph = _total_under(whole, temperature_c, p)
        if held + per_pa * p < all_carbon:
            low = middle
        else:
            high = middle
    p = float(np.exp(0.5 * (low + high)))
    held, _ph = _total_under(whole, temperature_c, p)
    return _result("headspace", _with_total(whole, held), temperature_c, p)
