"""The liquid at the preparation temperature, before any ice.

Where the contents state a pH, the amount of titrant ion that gives it is found with
the activity model of the path, so that the path starts at the stated pH.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.freezing_network import Network
from formbuf.chemistry.freezing_records import Brine, FreezingContents, state_name
from formbuf.chemistry.freezing_state import (
    State,
    saturation,
    solve_state,
    solve_titrant,
)
from formbuf.constants import LN10
from formbuf.errors import InputError

Array = NDArray[np.float64]

#: Below this the little that is dissolved goes into ice as much as into liquid, mol/kg.
SMALLEST_DISSOLVED_MOL_KG = 1e-5
_FIXED_POINT_CAP = 200
_BISECTION_CAP = 60
_PH_LOW, _PH_HIGH = -1.0, 15.0
_SMALLEST_MOL_KG = 1e-300


@dataclass(frozen=True, slots=True)
class Prepared:
    """The mixture as prepared, before cooling.

    Attributes
    ----------
    net : Network
        With the titrant among its totals.
    state : State
    titrant : str
        Ion that was adjusted; empty where the contents were taken as they are.
    titrant_mol_kg : float
        Change of its amount [mol/kg].
    """

    net: Network
    state: State
    titrant: str
    titrant_mol_kg: float


def prepare(contents: FreezingContents, brine: Brine, *, with_solids: bool) -> Prepared:
    """Return the liquid at the preparation temperature, titrated to its pH.

    Raises
    ------
    InputError
        When a salt that may crystallise does not dissolve there, or next to nothing
        is dissolved at all.
    """
    t = contents.prepare_temperature_c
    dissolved = sum(contents.totals_mol_kg)
    dissolved += sum(x.mol_kg for x in contents.ions)
    dissolved += sum(x.mol_kg for x in contents.neutrals)
    if dissolved < SMALLEST_DISSOLVED_MOL_KG:
        msg = (
            f"freezing contents: {dissolved:.1e} mol/kg dissolved, allowed "
            f"{SMALLEST_DISSOLVED_MOL_KG:g} or more"
        )
        raise InputError(msg)
    if contents.ph is None:
        net = Network(contents, brine, with_solids=with_solids)
        prepared = Prepared(net, dissolve(net, t), "", 0.0)
    else:
        prepared = _titrate(contents, brine, contents.ph, with_solids=with_solids)
    _refuse_undissolved(prepared, t)
    return prepared


def let_solids_form(
    liquid: Prepared, contents: FreezingContents, brine: Brine
) -> Prepared:
    """Return a liquid prepared without solids with those of its brine let form.

    Saves solving it again; raises as `prepare` does.
    """
    charge = dict((contents.base_ion, contents.acid_ion)).get(liquid.titrant)
    ion = None if charge is None else (liquid.titrant, charge)
    net = Network(contents, brine, extra_ion=ion, with_solids=True)
    net.totals = liquid.net.totals.copy()
    state = replace(liquid.state, amounts=np.zeros(len(net.phases)))
    prepared = replace(liquid, net=net, state=state)
    _refuse_undissolved(prepared, contents.prepare_temperature_c)
    return prepared


def _refuse_undissolved(prepared: Prepared, t: float) -> None:
    net = prepared.net
    excess = saturation(net, prepared.state)
    for i, solid in enumerate(net.solids, start=1):
        if excess[i] > 0.0:
            msg = (
                f"freezing contents: {solid.formula} exceeds its solubility at the "
                f"preparation temperature {t:g} C (ion-activity product "
                f"{np.exp(excess[i]):.2f} times the solubility product), allowed 1"
            )
            raise InputError(msg)


def dissolve(net: Network, temperature_c: float) -> State:
    """Return the liquid of a mixture at a temperature, no other phase present."""
    return solve_state(net, first_guess(net, temperature_c, None), [], temperature_c)


def first_guess(net: Network, temperature_c: float, ph: float | None) -> State:
    """Return a start for the unfrozen mixture from ideal-solution fractions.

    Parameters
    ----------
    net : Network
    temperature_c : float
    ph : float or None
        Where known; otherwise found by bisection on the charge.
    """
    n = len(net.species)
    ideal = np.zeros(n)
    if ph is None:
        low, high = _PH_LOW, _PH_HIGH
        for _ in range(_BISECTION_CAP):
            middle = 0.5 * (low + high)
            charge = net.charges @ _speciate(net, temperature_c, middle, ideal)
            low, high = (middle, high) if charge > 0.0 else (low, middle)
        ph = 0.5 * (low + high)
    m = np.maximum(_speciate(net, temperature_c, ph, ideal), _SMALLEST_MOL_KG)
    amounts = np.zeros(len(net.phases))
    return State(temperature_c, np.log(m), 0.0, amounts, np.zeros(n), 0.0)


def _titrate(
    contents: FreezingContents, brine: Brine, ph: float, *, with_solids: bool
) -> Prepared:
    """Find the titrant ion that gives the prepared pH, and its amount."""
    t = contents.prepare_temperature_c
    plain = Network(contents, brine, with_solids=with_solids)
    need = _charge_needed(plain, t, ph)
    ion = _adjusted_ion(contents, plain, need)
    net = Network(contents, brine, extra_ion=ion, with_solids=with_solids)
    row = net.components.index(ion[0])
    start = float(net.totals[row])
    net.totals[row] = max(start + need / ion[1], 1e-9)
    state, total = solve_titrant(net, first_guess(net, t, ph), ph, row)
    net.totals[row] = total
    return Prepared(net, state, ion[0], total - start)


def _adjusted_ion(
    contents: FreezingContents, plain: Network, need: float
) -> tuple[str, int]:
    """Return the ion whose amount is changed to close the charge balance."""
    if contents.trim:
        totals = dict(zip(plain.components, plain.totals, strict=True))
        for name, charge in (contents.base_ion, contents.acid_ion):
            if totals.get(name, 0.0) + need / charge > 0.0 and name in totals:
                return name, charge
    return contents.base_ion if need > 0.0 else contents.acid_ion


def _charge_needed(net: Network, temperature_c: float, ph: float) -> float:
    """Return the strong-ion charge that the pH asks for beyond the given ions.

    Fixed-point iteration on the activity coefficients of the buffer species; only
    the sign and a start for Newton's method are taken from it.
    """
    m = np.exp(first_guess(net, temperature_c, ph).ln_m)
    need = 0.0
    for _ in range(_FIXED_POINT_CAP):
        ln_gamma, _ = net.activity.evaluate(m, temperature_c)
        new = np.maximum(_speciate(net, temperature_c, ph, ln_gamma), _SMALLEST_MOL_KG)
        change = -float(net.charges @ new)
        m = np.sqrt(m * new)
        if abs(change - need) < 1e-9:
            break
        need = change
    return need


def _speciate(net: Network, temperature_c: float, ph: float, ln_gamma: Array) -> Array:
    """Return molalities at a pH with given activity coefficients; 1 kg of water."""
    ln_k, _ = net.constants(temperature_c)
    totals = dict(zip(net.components, net.totals, strict=True))
    m = np.array([float(totals.get(name, 0.0)) for name in net.species])
    m[0] = np.exp(-LN10 * ph - ln_gamma[0])
    m[1] = np.exp(ln_k[0] + LN10 * ph - ln_gamma[1])
    row = 1
    for ladder in net.ladders:
        members = [net.index[state_name(ladder.name, z)] for z in ladder.charges]
        ln_share = np.zeros(len(members))
        for k, (upper, lower) in enumerate(pairwise(members)):
            step = ln_k[row] + LN10 * ph + ln_gamma[upper] - ln_gamma[lower]
            ln_share[k + 1] = ln_share[k] + step
            row += 1
        share = np.exp(ln_share - ln_share.max())
        m[members] = totals[ladder.name] * share / share.sum()
        for aggregate in ladder.aggregates:
            m[net.index[aggregate.name]] = 1e-12 * totals[ladder.name]
            row += 1
    return m
