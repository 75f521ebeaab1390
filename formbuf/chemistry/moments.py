"""Sums over the states of a ladder that the solver and the capacity need.

With u = 10^pH and g = 10^D the weight of a state of charge z is proportional to
u^(-z) g^(z^2), so that every derivative of charge and ionic strength is a
variance or covariance of z and z^2 over the states. That holds for any number of
overlapping steps. Aggregates (several units in one product) and a component held
at a fixed activity (carbon dioxide open to a gas) need one more term each.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry import macro_ion
from formbuf.chemistry.ionization import Ladder
from formbuf.errors import ConvergenceError

Array = NDArray[np.float64]

#: Newton steps allowed for the free monomer of an aggregating component.
MONOMER_CAP = 80


@dataclass(frozen=True, slots=True)
class Sums:
    """Sums of one component over its states, each of shape (states,), in mol/kg.

    Attributes
    ----------
    held : ndarray
        Sum of z m above the lowest charge that the component can carry: the protons
        it holds. For an open component the plain sum of z m.
    charge, charge2 : ndarray
        Sum of z m and of z^2 m.
    var, cov, var2 : ndarray
        Amount times Var(z), Cov(z, z^2) and Var(z^2), corrected for aggregates.
    """

    held: Array
    charge: Array
    charge2: Array
    var: Array
    cov: Array
    var2: Array


@dataclass(frozen=True, slots=True)
class Equilibrium:
    """Constants of one ladder at the temperatures of a batch.

    Attributes
    ----------
    ladder : Ladder
    step_k : tuple of ndarray
        K of each step, shape (states,) or (1,).
    aggregate_k : tuple of ndarray
        Formation constants of the aggregates, same shapes.
    is_open : bool
        Whether the amount given is the fixed molality of the first state.
    """

    ladder: Ladder
    step_k: tuple[Array, ...]
    aggregate_k: tuple[Array, ...]
    is_open: bool


@lru_cache(maxsize=1024)
def least_charge(ladder: Ladder) -> float:
    """Lowest charge that one unit of a component can carry, aggregates included."""
    if ladder.is_macro_ion:
        return macro_ion.lowest_charge(ladder.sites, ladder.curve)
    per_unit = [a.charge / a.units for a in ladder.aggregates]
    return min([float(ladder.charges[-1]), *per_unit])


@lru_cache(maxsize=1024)
def charge_powers(ladder: Ladder) -> Array:
    """Rows 1, y, z^2, y^2, y z^2 and z^4 over the states; y is z above the lowest."""
    z = np.asarray(ladder.charges, dtype=float)
    y = z - z[-1]
    rows: Array = np.stack([np.ones_like(z), y, z**2, y**2, y * z**2, z**4])
    rows.flags.writeable = False
    return rows


def step_ratios(u: Array, g: Array, ladders: Iterable[Ladder]) -> dict[int, Array]:
    """Products u g^(1 - 2 z) that carry the weight of a state of charge z to the next.

    Parameters
    ----------
    u, g : ndarray, shape (states,)
        10^pH and 10^D.
    ladders : iterable of Ladder

    Returns
    -------
    dict of int to ndarray
        Keyed by the charge z of the acid of a step.
    """
    charges = {z for ladder in ladders for z in ladder.charges[:-1]}
    ratios: dict[int, Array] = {}
    if not charges:
        return ratios
    square: Array = g * g
    value: Array = u * g
    for z in range(0, min(charges) - 1, -1):
        if z < 0:
            value = value * square
        if z in charges:
            ratios[z] = value
    if max(charges) > 0:
        value = u / g
        for z in range(1, max(charges) + 1):
            if z > 1:
                value = value / square
            if z in charges:
                ratios[z] = value
    return ratios


def state_weights(eq: Equilibrium, ratios: dict[int, Array]) -> Array:
    """Weights of the monomeric states relative to the first.

    Parameters
    ----------
    eq : Equilibrium
    ratios : dict
        From ``step_ratios``.

    Returns
    -------
    ndarray, shape (states of the ladder, states of the batch)
    """
    charge = eq.ladder.top_charge
    size = ratios[charge].shape[0]
    weights: Array = np.empty((len(eq.step_k) + 1, size))
    weights[0] = 1.0
    for k, constant in enumerate(eq.step_k):
        step = weights[k + 1]
        np.multiply(ratios[charge - k], constant, out=step)
        if k:
            step *= weights[k]
    return weights


def component_sums(
    eq: Equilibrium, amount: Array, u: Array, g: Array, ratios: dict[int, Array]
) -> Sums:
    """Charge sums of one component and their derivatives.

    Parameters
    ----------
    eq : Equilibrium
    amount : ndarray, shape (states,)
        Total molality of the component [mol/kg], or the fixed molality of its
        first state where ``eq.is_open``.
    u, g : ndarray, shape (states,)
        10^pH and 10^D.
    ratios : dict
        From ``step_ratios``.

    Returns
    -------
    Sums
    """
    if eq.ladder.is_macro_ion:
        return _macro_ion_sums(eq, amount, u)
    weights = state_weights(eq, ratios)
    if eq.is_open:
        return _open_sums(eq, amount, weights)
    if eq.ladder.aggregates:
        return _aggregating_sums(eq, amount, u, g, weights)
    sums = charge_powers(eq.ladder) @ weights
    means = sums[1:]
    means /= sums[0]
    amounts = means * amount
    held, charge2 = amounts[0], amounts[1]
    mean, mean2 = means[0], means[1]
    lowest = float(eq.ladder.charges[-1])
    return Sums(
        held,
        held + lowest * amount if lowest else held,
        charge2,
        amounts[2] - held * mean,
        amounts[3] - held * mean2,
        amounts[4] - charge2 * mean2,
    )


def _macro_ion_sums(eq: Equilibrium, amount: Array, u: Array) -> Sums:
    """Return the sums of a macro-ion: apparent pK, no part in the ionic strength."""
    if eq.ladder.curve is not None:
        charge, variance = macro_ion.curve_charge(
            eq.ladder.curve, np.log10(u), -np.log10(eq.step_k[0])
        )
    else:
        charge, variance = macro_ion.sites_charge(
            eq.ladder.sites, eq.step_k, u, eq.ladder.work
        )
    zero = np.zeros(np.shape(u))
    total = amount * charge
    held = total - least_charge(eq.ladder) * amount
    return Sums(held, total, zero, amount * variance, zero, zero)


def _open_sums(eq: Equilibrium, amount: Array, weights: Array) -> Sums:
    z = np.asarray(eq.ladder.charges, dtype=float)
    charge, charge2, cubed, fourth = (
        amount * (row @ weights) for row in (z, z**2, z**3, z**4)
    )
    return Sums(charge, charge, charge2, charge2, cubed, fourth)


def free_monomer(
    eq: Equilibrium, amount: Array, u: Array, g: Array, weights: Array
) -> tuple[Array, list[Array]]:
    """Molality of the first state, and of each aggregate, of an aggregating component.

    Parameters
    ----------
    eq : Equilibrium
    amount, u, g : ndarray, shape (states,)
        As for ``component_sums``.
    weights : ndarray, shape (states of the ladder, states)
        From ``state_weights``.

    Returns
    -------
    tuple of (ndarray, list of ndarray)

    Raises
    ------
    ConvergenceError
        When the mass balance is not met within the cap.
    """
    total_weight: Array = weights.sum(axis=0)
    units = [a.units for a in eq.ladder.aggregates]
    factors = [
        k * u ** (-a.charge) * g ** (a.charge**2)
        for k, a in zip(eq.aggregate_k, eq.ladder.aggregates, strict=True)
    ]
    free = amount / total_weight
    with np.errstate(divide="ignore", over="ignore"):
        for f, n in zip(factors, units, strict=True):
            free = np.minimum(free, (amount / (n * f)) ** (1.0 / n))
    gap = np.zeros_like(free)
    for _ in range(MONOMER_CAP):
        parts = [f * free**n for f, n in zip(factors, units, strict=True)]
        mass = free * total_weight
        slope = mass.copy()
        for n, p in zip(units, parts, strict=True):
            mass += n * p
            slope += n * n * p
        gap = mass - amount
        if np.all(np.abs(gap) <= 1e-14 * amount + 1e-300):
            return free, parts
        share = np.divide(gap, slope, out=np.zeros_like(gap), where=slope > 0.0)
        free = free * (1.0 - share)
    worst = int(np.argmax(np.abs(gap)))
    msg = (
        f"the aggregates of {eq.ladder.name} did not converge in {MONOMER_CAP} steps "
        f"at {float(amount[worst]):.4g} mol/kg"
    )
    raise ConvergenceError(msg, hint="check the amount of this component")


def _aggregating_sums(
    eq: Equilibrium, amount: Array, u: Array, g: Array, weights: Array
) -> Sums:
    free, parts = free_monomer(eq, amount, u, g, weights)
    lowest = least_charge(eq.ladder)
    held, s1, s2, s3, s4, n2, nz, nz2 = (np.zeros_like(u) for _ in range(8))
    rows = [(1, z, free * w) for z, w in zip(eq.ladder.charges, weights, strict=True)]
    rows += [
        (a.units, a.charge, p) for a, p in zip(eq.ladder.aggregates, parts, strict=True)
    ]
    for n, z, m in rows:
        held += (z - n * lowest) * m
        n2 += n * n * m
        if z:
            s1 += z * m
            s2 += z**2 * m
            s3 += z**3 * m
            s4 += z**4 * m
            nz += n * z * m
            nz2 += n * z * z * m
    inverse = np.divide(1.0, n2, out=np.zeros_like(n2), where=n2 > 0.0)
    return Sums(
        held,
        s1,
        s2,
        s2 - nz * nz * inverse,
        s3 - nz * nz2 * inverse,
        s4 - nz2 * nz2 * inverse,
    )
