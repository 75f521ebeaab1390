"""Net charge of a protein (or any macro-ion) as a function of pH.

Two descriptions: groups of like sites, which act on each other through the net charge
only (Linderstroem-Lang's picture; independent of each other without its work term, see
``macro_work``), and a curve through measured points. Both are apparent: they hold on
the pH scale at the ionic strength of the product and do not move with it; a macro-ion
counts neither in the ionic strength nor (its counter-ions do both) as more than one
particle.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.constants import LN10
from formbuf.errors import ConvergenceError

Array = NDArray[np.float64]

#: Enthalpy of ionization of the groups of a protein by the pH at which they titrate:
#: carboxyls, imidazole, amines (judgement, from the free amino acids). Between the
#: points it rises evenly, so that a curve moved by it stays monotone.
HEAT_PH = (4.0, 6.5, 9.5)
HEAT_KJ_MOL = (3.5, 29.5, 43.4)
#: pK and enthalpy of the step by which a curve learns the temperature.
CURVE_PKA, CURVE_DH_KJ_MOL = 0.0, 1.0
#: Steps allowed for the charge of groups that act on each other, and the last step at
#: which it counts as found, per group; the error left is of the order of its square.
WORK_CAP = 100
WORK_STEP_TOLERANCE = 1e-9
#: Largest shift of pK for which powers of ten are taken; beyond, all groups are full.
SHIFT_LIMIT = 250.0


@dataclass(frozen=True, slots=True)
class Sites:
    """A number of like proton-binding groups of one macro-ion.

    Attributes
    ----------
    count : float
        Groups per macro-ion.
    acid_charge : int
        Charge of a group with its proton: 1 for amines, 0 for carboxyls.
    """

    count: float
    acid_charge: int


@dataclass(frozen=True, slots=True)
class ChargeCurve:
    """Net charge per macro-ion through points, as a monotone cubic.

    Attributes
    ----------
    ph : tuple of float
        Rising.
    charge : tuple of float
        Falling, charges per macro-ion.
    slope : tuple of float
        dz/dpH at the points, not positive. Outside the points the charge is taken to
        stay as it is at the nearest one.
    """

    ph: tuple[float, ...]
    charge: tuple[float, ...]
    slope: tuple[float, ...]


def curve_through(ph: ArrayLike, charge: ArrayLike) -> ChargeCurve:
    """Return the monotone cubic through points.

    Parameters
    ----------
    ph : array_like, shape (points,)
        Strictly rising, two points or more.
    charge : array_like, shape (points,)
        Not rising [charges per macro-ion].

    Returns
    -------
    ChargeCurve

    Raises
    ------
    ValueError
        When the points are too few or not monotone; callers check first.

    References
    ----------
    Fritsch & Butland 1984, SIAM J. Sci. Stat. Comput. 5, 300 (harmonic means of the
    secants; memory).
    """
    x, y = np.asarray(ph, dtype=float), np.asarray(charge, dtype=float)
    if x.size < 2 or x.shape != y.shape:
        msg = "a curve needs two points or more, as many charges as pH values"
        raise ValueError(msg)
    h = np.diff(x)
    if not (np.all(h > 0.0) and np.all(np.diff(y) <= 0.0)):
        msg = "a curve needs rising pH and falling charge"
        raise ValueError(msg)
    secant = np.diff(y) / h
    slope = np.empty_like(x)
    slope[0], slope[-1] = _end_slope(h, secant), _end_slope(h[::-1], secant[::-1])
    before, after = secant[:-1], secant[1:]
    w1, w2 = 2.0 * h[1:] + h[:-1], h[1:] + 2.0 * h[:-1]
    flat = (before == 0.0) | (after == 0.0)
    with np.errstate(divide="ignore", invalid="ignore"):
        mean = (w1 + w2) / (w1 / before + w2 / after)
    slope[1:-1] = np.where(flat, 0.0, mean)
    return ChargeCurve(
        tuple(float(v) for v in x),
        tuple(float(v) for v in y),
        tuple(float(v) for v in slope),
    )


def _end_slope(h: Array, secant: Array) -> float:
    """Three-point slope at the first point, kept monotone."""
    if secant.size == 1:
        return float(secant[0])
    slope = ((2.0 * h[0] + h[1]) * secant[0] - h[0] * secant[1]) / (h[0] + h[1])
    if slope >= 0.0:
        return 0.0
    return float(max(slope, 3.0 * secant[0]))


def curve_charge(
    curve: ChargeCurve, ph: ArrayLike, shift_per_kj: ArrayLike = 0.0
) -> tuple[Array, Array]:
    """Charge of a curve and its variance equivalent.

    Parameters
    ----------
    curve : ChargeCurve
    ph : array_like, shape (...)
    shift_per_kj : array_like, shape (...)
        Change of pK from 25 C for an enthalpy of 1 kJ/mol; 0 at 25 C. The curve moves
        by it times the enthalpy of the groups that usually titrate at each pH.

    Returns
    -------
    tuple of (ndarray, ndarray), shape (...)
        Net charge, and -(dz/dpH)/ln 10, which is what a variance of charge is for
        groups; zero outside the points.
    """
    x = np.asarray(curve.ph)
    y, d = np.asarray(curve.charge), np.asarray(curve.slope)
    at = np.asarray(ph, dtype=float)
    kappa = np.asarray(shift_per_kj, dtype=float)
    wanted = at - kappa * np.interp(at, HEAT_PH, HEAT_KJ_MOL)
    inside = np.clip(wanted, x[0], x[-1])
    k = np.clip(np.searchsorted(x, inside, side="right") - 1, 0, x.size - 2)
    h = x[k + 1] - x[k]
    s = (inside - x[k]) / h
    secant = (y[k + 1] - y[k]) / h
    c = (3.0 * secant - 2.0 * d[k] - d[k + 1]) / h
    b = (d[k] + d[k + 1] - 2.0 * secant) / (h * h)
    run = s * h
    charge: Array = y[k] + run * (d[k] + run * (c + run * b))
    slope = d[k] + run * (2.0 * c + run * 3.0 * b)
    slope = np.where((wanted < x[0]) | (wanted > x[-1]), 0.0, np.minimum(slope, 0.0))
    rate = 1.0 - kappa * _heat_slope(at)
    variance: Array = -slope * rate / LN10
    return charge, variance


def _heat_slope(ph: Array) -> Array:
    """Return the slope of the enthalpy profile [kJ/mol per pH]."""
    steps = np.diff(HEAT_KJ_MOL) / np.diff(HEAT_PH)
    slope: Array = np.zeros(np.shape(ph))
    for low, high, step in zip(HEAT_PH[:-1], HEAT_PH[1:], steps, strict=True):
        slope = np.where((ph >= low) & (ph < high), step, slope)
    return slope


def sites_charge(
    sites: tuple[Sites, ...],
    step_k: tuple[Array, ...],
    u: Array,
    work: float = 0.0,
) -> tuple[Array, Array]:
    """Net charge of the groups of a macro-ion and its variance.

    Parameters
    ----------
    sites : tuple of Sites
    step_k : tuple of ndarray
        Ionization constant of each kind of group where the net charge is zero.
    u : ndarray, shape (...)
        10^pH.
    work : float
        w of ``macro_work``, 0 or more; 0 for independent groups.

    Returns
    -------
    tuple of (ndarray, ndarray), shape (...)
        Charge Z, and -(dZ/dpH)/ln 10.

    Raises
    ------
    ConvergenceError
        When the charge is not found within the cap.

    Notes
    -----
    Z = f(pH + (2 w / ln 10) Z) with f of independent groups, which falls with pH: one
    root, between 0 and f(pH). Its slope gives b / (1 + 2 w b) for the variance, where
    b is that of independent groups of the same charge.
    """
    charge, variance = _independent(sites, step_k, u)
    if work == 0.0:
        return charge, variance
    low, high = np.minimum(charge, 0.0), np.maximum(charge, 0.0)
    tolerance = WORK_STEP_TOLERANCE * (1.0 + sum(site.count for site in sites))
    at = charge / (1.0 + 2.0 * work * variance)
    before = np.full(np.shape(at), np.inf)
    for _ in range(WORK_CAP):
        shift = np.clip((2.0 * work / LN10) * at, -SHIFT_LIMIT, SHIFT_LIMIT)
        charge, variance = _independent(sites, step_k, u * 10.0**shift)
        gap, rate = at - charge, 1.0 + 2.0 * work * variance
        step = -gap / rate
        size = np.abs(step)
        if np.all(size <= tolerance):
            return at + step, variance / rate
        low, high = np.where(gap < 0.0, at, low), np.where(gap > 0.0, at, high)
        trial = at + step
        good = (trial >= low) & (trial <= high)
        good &= (size <= 0.5 * before) | (size <= tolerance)
        at = np.where(good, trial, 0.5 * (low + high))
        before = np.where(good, size, np.inf)
    msg = (
        f"the charge of a macro-ion of {sum(site.count for site in sites):g} groups did "
        f"not converge in {WORK_CAP} steps with w = {work:g}"
    )
    raise ConvergenceError(msg, hint="check the groups and molar mass of the protein")


def _independent(
    sites: tuple[Sites, ...], step_k: tuple[Array, ...], u: Array
) -> tuple[Array, Array]:
    """Net charge of independent groups and its variance."""
    charge, variance = np.zeros(np.shape(u)), np.zeros(np.shape(u))
    for site, constant in zip(sites, step_k, strict=True):
        ratio = u * constant
        lost = ratio / (1.0 + ratio)
        charge = charge + site.count * (site.acid_charge - lost)
        variance = variance + site.count * lost / (1.0 + ratio)
    return charge, variance


def lowest_charge(sites: tuple[Sites, ...], curve: ChargeCurve | None) -> float:
    """Lowest net charge that a macro-ion can carry."""
    if curve is not None:
        return curve.charge[-1]
    return sum(site.count * (site.acid_charge - 1) for site in sites)
