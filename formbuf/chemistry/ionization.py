"""Ladders of protonation states and their pK at any temperature.

A ladder is one ionising component: its states from the most to the least
protonated, the pK of each step at 25 C and zero ionic strength, and the enthalpy
and heat capacity of ionization that carry the pK to other temperatures.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import macro_ion
from formbuf.chemistry.macro_ion import ChargeCurve, Sites
from formbuf.constants import (
    GAS_CONSTANT_J_MOL_K,
    LN10,
    REFERENCE_TEMPERATURE_K,
    ZERO_CELSIUS_K,
)

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Aggregate:
    """A product that holds several units of one component, such as a polyborate.

    Attributes
    ----------
    name : str
    units : int
        Units of the component in one aggregate, 2 or more.
    charge : int
    log10_k : float
        log10 of the constant of ``units x (neutral monomer) = aggregate +
        (-charge) H+ (+ water)`` at 25 C and I = 0, mol/kg scale.
    """

    name: str
    units: int
    charge: int
    log10_k: float


@dataclass(frozen=True, slots=True)
class Ladder:
    """The protonation states of one component.

    Attributes
    ----------
    name : str
    top_charge : int
        Charge of the most protonated state; each step lowers it by one.
    pka : tuple of float
        pK of each step at 25 C, I = 0, from the most acid step on.
    dh_kj_mol : tuple of float
        Enthalpy of ionization per step at 25 C [kJ/mol]; NaN where unknown.
    dcp_j_mol_k : tuple of float
        Heat capacity of ionization per step [J/(mol K)]; 0 where unknown.
    aggregates : tuple of Aggregate
        Products of several units; empty for almost every component.
    sites : tuple of Sites
        For a macro-ion: its groups, one per entry of ``pka``, whose pK is that of a
        molecule without net charge.
    curve : ChargeCurve or None
        For a macro-ion known by its titration curve; ``pka`` is then that of a step
        of 1 kJ/mol, by which the curve learns the temperature (``of_curve``).
    work : float
        For a macro-ion with ``sites``: electrostatic work factor w, see
        ``formbuf.chemistry.macro_work``; 0 for independent groups.
    """

    name: str
    top_charge: int
    pka: tuple[float, ...]
    dh_kj_mol: tuple[float, ...]
    dcp_j_mol_k: tuple[float, ...]
    aggregates: tuple[Aggregate, ...] = ()
    sites: tuple[Sites, ...] = ()
    curve: ChargeCurve | None = None
    work: float = 0.0

    def __post_init__(self) -> None:
        """Keep the steps as tuples, whatever sequence they came in."""
        for name in ("pka", "dh_kj_mol", "dcp_j_mol_k", "aggregates", "sites"):
            object.__setattr__(self, name, tuple(getattr(self, name)))

    @classmethod
    def of_curve(cls, name: str, curve: ChargeCurve) -> Ladder:
        """Return a macro-ion that is known by a curve."""
        heat = (macro_ion.CURVE_DH_KJ_MOL,)
        return cls(name, 0, (macro_ion.CURVE_PKA,), heat, (0.0,), curve=curve)

    @property
    def is_macro_ion(self) -> bool:
        """Whether it is a protein or the like; see ``formbuf.chemistry.macro_ion``."""
        return bool(self.sites) or self.curve is not None

    @property
    def charges(self) -> tuple[int, ...]:
        """Charge of each state, from the most to the least protonated.

        A macro-ion counts as one uncharged particle here; its net charge is that of
        the solved mixture.
        """
        if self.is_macro_ion:
            return (0,)
        return tuple(range(self.top_charge, self.top_charge - len(self.pka) - 1, -1))

    @property
    def has_unknown_enthalpy(self) -> bool:
        """Whether any step lacks an enthalpy of ionization."""
        return self.curve is not None or any(
            np.isnan(value) for value in self.dh_kj_mol
        )


def pk_shift(
    dh_kj_mol: ArrayLike, dcp_j_mol_k: ArrayLike, temperature_c: ArrayLike
) -> Array:
    """Change of pK from 25 C to another temperature.

    Parameters
    ----------
    dh_kj_mol : array_like
        Enthalpy of ionization at 25 C [kJ/mol].
    dcp_j_mol_k : array_like
        Heat capacity of ionization [J/(mol K)].
    temperature_c : array_like
        Temperature [C]; broadcast against the other two. Rests on data from
        about 0 to 60 C; below 0 C an extrapolation.

    Returns
    -------
    ndarray
        pK(T) - pK(25 C) [-].

    Notes
    -----
    ln K(T) = ln K0 - (dH/R)(1/T - 1/T0) + (dCp/R)(T0/T - 1 + ln(T/T0)).

    References
    ----------
    Goldberg, Kishore & Lennen 2002, J. Phys. Chem. Ref. Data 31, 231.
    """
    kelvin = np.asarray(temperature_c, dtype=float) + ZERO_CELSIUS_K
    ratio = REFERENCE_TEMPERATURE_K / kelvin
    heat = (1000.0 * np.asarray(dh_kj_mol, dtype=float) / GAS_CONSTANT_J_MOL_K) * (
        1.0 / kelvin - 1.0 / REFERENCE_TEMPERATURE_K
    )
    capacity = (np.asarray(dcp_j_mol_k, dtype=float) / GAS_CONSTANT_J_MOL_K) * (
        ratio - 1.0 - np.log(ratio)
    )
    shift: Array = (heat - capacity) / LN10
    return shift


def pk_at(ladder: Ladder, temperature_c: ArrayLike) -> Array:
    """Return the pK of every step of a ladder at the given temperatures, I = 0.

    A step without an enthalpy keeps its 25 C value; who shows the result says
    that its temperature answer is unknown.

    Parameters
    ----------
    ladder : Ladder
    temperature_c : array_like, shape (...)
        Temperature [C].

    Returns
    -------
    ndarray, shape (..., steps)
        pK [-].
    """
    t = np.asarray(temperature_c, dtype=float)
    pka, dh, dcp = _step_values(ladder)
    return pka + pk_shift(dh, dcp, t[..., np.newaxis])


@lru_cache(maxsize=1024)
def _step_values(ladder: Ladder) -> tuple[Array, Array, Array]:
    """Return pK, enthalpy and heat capacity of the steps, zero where unknown."""
    values = (ladder.pka, ladder.dh_kj_mol, ladder.dcp_j_mol_k)
    pka, dh, dcp = (np.asarray(x, dtype=float) for x in values)
    for x in (dh, dcp):
        x[np.isnan(x)] = 0.0
    for x in (pka, dh, dcp):
        x.flags.writeable = False
    return pka, dh, dcp


def pk_slope_per_k(ladder: Ladder, temperature_c: float = 25.0) -> Array:
    """Slope of each pK with temperature [1/K]; NaN where the enthalpy is unknown.

    Parameters
    ----------
    ladder : Ladder
    temperature_c : float
        Temperature [C].

    Returns
    -------
    ndarray, shape (steps,)
        dpK/dT = -dH(T) / (ln 10 R T^2).
    """
    kelvin = temperature_c + ZERO_CELSIUS_K
    dh = 1000.0 * np.asarray(ladder.dh_kj_mol, dtype=float) + np.asarray(
        ladder.dcp_j_mol_k, dtype=float
    ) * (kelvin - REFERENCE_TEMPERATURE_K)
    slope: Array = -dh / (LN10 * GAS_CONSTANT_J_MOL_K * kelvin**2)
    return slope


def log10_aggregate_constants(ladder: Ladder, temperature_c: ArrayLike) -> Array:
    """log10 of the formation constants of the aggregates at the given temperatures.

    The reaction that releases no proton (neutral monomers plus as many singly
    charged ones as the aggregate has charges) is taken as independent of
    temperature; the published constant then moves with the first pK. That is a
    judgement: the borax standard (0.04 mol/kg of boron, 0 to 50 C) is met within
    0.017 so and within 0.015 with a constant that does not move at all, while the
    two differ by 0.17 in pH for 0.3 mol/kg of boron at pH 6.5 and 5 C.

    Parameters
    ----------
    ladder : Ladder
        Its first state is the neutral monomer.
    temperature_c : array_like, shape (...)
        Temperature [C].

    Returns
    -------
    ndarray, shape (..., aggregates)
    """
    t = np.asarray(temperature_c, dtype=float)
    shift = pk_at(ladder, t)[..., 0] - ladder.pka[0]
    constants = [a.log10_k + a.charge * shift for a in ladder.aggregates]
    return np.stack(np.broadcast_arrays(*constants), axis=-1)


def state_fractions(
    ladder: Ladder,
    ph: ArrayLike,
    temperature_c: ArrayLike,
    unit_charge_term: ArrayLike,
) -> Array:
    """Fractions of a component in each monomeric state at a given pH.

    Parameters
    ----------
    ladder : Ladder
    ph : array_like, shape (...)
        pH on the activity scale.
    temperature_c : array_like, shape (...)
        Temperature [C].
    unit_charge_term : array_like, shape (...)
        D of the activity model; 0 for I = 0.

    Returns
    -------
    ndarray, shape (..., states)
        From the most to the least protonated state; each row sums to one.
        Aggregates are left out.
    """
    ph, t, d = np.broadcast_arrays(
        np.asarray(ph, dtype=float),
        np.asarray(temperature_c, dtype=float),
        np.asarray(unit_charge_term, dtype=float),
    )
    if ladder.is_macro_ion:
        return np.ones((*ph.shape, 1))
    charges = np.asarray(ladder.charges, dtype=float)
    pks = pk_at(ladder, t)
    steps = ph[..., np.newaxis] - pks + (1.0 - 2.0 * charges[:-1]) * d[..., np.newaxis]
    logs = np.concatenate(
        [np.zeros((*ph.shape, 1)), np.cumsum(steps, axis=-1)], axis=-1
    )
    weights = 10.0 ** (logs - logs.max(axis=-1, keepdims=True))
    fractions: Array = weights / weights.sum(axis=-1, keepdims=True)
    return fractions
