"""Solubility constants of the salts and acids that may crystallise on freezing.

ln K = A + B/T is fitted to solubilities in pure water with the activity model that
will use it, so that errors of the model at saturation largely cancel. A solid
without solubilities in the cold may be anchored instead: its constant is set so
that ice and solid meet at a published temperature, with an assumed enthalpy.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.freezing_network import ICE, Network
from formbuf.chemistry.freezing_prepare import dissolve
from formbuf.chemistry.freezing_records import (
    Brine,
    FreezingContents,
    IonAmount,
    Solid,
)
from formbuf.chemistry.freezing_state import State
from formbuf.chemistry.freezing_trace import Trace
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.pitzer import PitzerSet
from formbuf.constants import GAS_CONSTANT_J_MOL_K, ZERO_CELSIUS_K
from formbuf.errors import InputError

Array = NDArray[np.float64]

#: Solution that is frozen to find the ice-saturated liquid of one salt, mol/kg.
_DILUTE_MOL_KG = 0.1


@dataclass(frozen=True, slots=True)
class Solubility:
    """One measured solubility: temperature [C] and molality of saturation [mol/kg]."""

    temperature_c: float
    molality_mol_kg: float


@dataclass(frozen=True, slots=True)
class Fit:
    """ln K = A + B/T of one solid in one activity model.

    Attributes
    ----------
    solid : Solid
        With its constants set.
    residuals : ndarray
        Of ln K at the rows of the fit.
    """

    solid: Solid
    residuals: Array

    @property
    def enthalpy_kj_mol(self) -> float:
        """Enthalpy of dissolution that the slope stands for [kJ/mol]."""
        return -self.solid.ln_k[1] * GAS_CONSTANT_J_MOL_K / 1000.0


@dataclass(frozen=True, slots=True)
class Surroundings:
    """What a solid's components are, and in which model they are dissolved."""

    parameters: PitzerSet | None
    ladders: Mapping[str, Ladder]
    ion_charges: Mapping[str, int]


def fit_solubility(
    solid: Solid, rows: Sequence[Solubility], around: Surroundings
) -> Fit:
    """Fit ln K to solubilities in pure water.

    Parameters
    ----------
    solid : Solid
        Its ``ln_k`` is ignored.
    rows : sequence of Solubility
        Two or more temperatures.
    around : Surroundings

    Returns
    -------
    Fit

    Raises
    ------
    InputError
        With fewer than two temperatures.
    """
    if len({row.temperature_c for row in rows}) < 2:
        msg = (
            f"{solid.id}: {len(rows)} solubility rows, allowed two temperatures or more"
        )
        raise InputError(msg)
    x = np.array([1.0 / (row.temperature_c + ZERO_CELSIUS_K) for row in rows])
    y = np.array([ln_product(solid, row, around) for row in rows])
    slope = float(np.sum((x - x.mean()) * (y - y.mean())) / np.sum((x - x.mean()) ** 2))
    intercept = float(y.mean() - slope * x.mean())
    fitted = replace(solid, ln_k=(intercept, slope))
    return Fit(fitted, y - intercept - slope * x)


def ln_product(solid: Solid, row: Solubility, around: Surroundings) -> float:
    """Return ln of the activity product of a solution of the solid in pure water."""
    net = _water_with(solid, row.molality_mol_kg, around)
    return _product(solid, net, dissolve(net, row.temperature_c))


def anchor_solubility(
    solid: Solid,
    eutectic_c: float,
    enthalpy_kj_mol: float,
    around: Surroundings,
) -> Fit:
    """Set ln K so that ice and solid coexist at a published temperature.

    Parameters
    ----------
    solid : Solid
    eutectic_c : float
        Published eutectic of solid and ice [C].
    enthalpy_kj_mol : float
        Assumed enthalpy of dissolution [kJ/mol].
    around : Surroundings

    Returns
    -------
    Fit
        With one residual, zero by construction.
    """
    net = _water_with(solid, _DILUTE_MOL_KG, around)
    trace = Trace(net, dissolve(net, 0.0), [], [])
    trace.advance(eutectic_c)
    if trace.active != [ICE]:
        msg = f"{solid.id}: no ice at {eutectic_c:g} C in a dilute solution"
        raise InputError(msg)
    value = _product(solid, net, trace.state)
    slope = -1000.0 * enthalpy_kj_mol / GAS_CONSTANT_J_MOL_K
    intercept = value - slope / (eutectic_c + ZERO_CELSIUS_K)
    return Fit(replace(solid, ln_k=(intercept, slope)), np.zeros(1))


def _water_with(solid: Solid, molality: float, around: Surroundings) -> Network:
    ladders: list[Ladder] = []
    totals: list[float] = []
    ions: list[IonAmount] = []
    for name, count in solid.components.items():
        if name in around.ladders:
            ladders.append(around.ladders[name])
            totals.append(count * molality)
        elif name in around.ion_charges:
            ions.append(IonAmount(name, around.ion_charges[name], count * molality))
        else:
            msg = f"{solid.id}: component {name!r} is neither a ladder nor an ion"
            raise InputError(msg)
    contents = FreezingContents(tuple(ladders), tuple(totals), tuple(ions))
    return Network(contents, Brine("pure water", around.parameters))


def _product(solid: Solid, net: Network, state: State) -> float:
    activity = state.ln_m + state.ln_gamma
    total = solid.waters * state.ln_water_activity
    for name, count in solid.states.items():
        total += count * float(activity[net.index[name]])
    return total
