"""The inverse problem: what brings a mixture to a given pH.

At a known ionic strength the charge balance is linear in the amount of titrant,
so that the amount is explicit; only the ionic strength is iterated, by Newton's
method after one substitution. A titrant is anything with a composition: a strong
acid or base, a weak acid such as acetic acid, or the exchange of one buffer form for
the other.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import activity
from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.batch import Balance, Batch, balance, prepare
from formbuf.chemistry.equilibrium import PH_HIGH, PH_LOW
from formbuf.chemistry.ionization import Ladder
from formbuf.constants import LN10
from formbuf.errors import ConvergenceError, InputError

Array = NDArray[np.float64]

ITERATION_CAP = 100
#: Relative step of the root of ionic strength at which the amount counts as settled.
TOLERANCE = 1e-10
#: Share of the squared charges below which their sum is rounding: where titrant is
#: taken away until hardly an ion is left, the ionic strength is a small difference.
ROUNDING = 1e-14
#: Charge per mole of titrant below which it moves nothing.
LEAST_CHARGE = 1e-9


@dataclass(frozen=True, slots=True)
class Titrant:
    """What one mole of titrant brings.

    Attributes
    ----------
    charge : float
        Sum of z over its strong ions (sodium hydroxide +1, hydrochloric acid -1).
    charge2 : float
        Sum of z^2 over its strong ions.
    components : dict of str to float
        Moles of each ionising component it brings (may be negative in an exchange).
    """

    charge: float
    charge2: float
    components: dict[str, float]


STRONG_BASE = Titrant(1.0, 1.0, {})
STRONG_ACID = Titrant(-1.0, 1.0, {})


@dataclass(frozen=True, slots=True)
class Titration:
    """Amounts of titrant that reach a pH.

    Attributes
    ----------
    amount_mol_kg : ndarray, shape (...)
        Moles of titrant per kg of water; negative means taken away.
    ionic_strength_mol_kg : ndarray, shape (...)
    charge_mol_kg : ndarray, shape (..., components)
        Sum of z m of each component of the mixture at the pH reached, without what
        the titrant brings.
    """

    amount_mol_kg: Array
    ionic_strength_mol_kg: Array
    charge_mol_kg: Array


def titrant_for_ph(
    ladders: Sequence[Ladder],
    totals_mol_kg: ArrayLike,
    strong_charge_mol_kg: ArrayLike,
    strong_charge2_mol_kg: ArrayLike,
    temperature_c: ArrayLike,
    ph: ArrayLike,
    titrant: Titrant,
    *,
    open_components: Sequence[str] = (),
    model: ActivityModel = "guggenheim",
    pk_shift: Mapping[str, ArrayLike] | None = None,
) -> Titration:
    """Amount of titrant that gives a mixture the stated pH.

    Parameters
    ----------
    ladders, totals_mol_kg, strong_charge_mol_kg, strong_charge2_mol_kg, temperature_c
        As for ``formbuf.chemistry.equilibrium.solve``; the mixture without titrant.
    ph : array_like, shape (...)
        Wanted pH (conventional activity scale) at ``temperature_c``, 0 to 14.
    titrant : Titrant
        It must not bring a component that forms aggregates.
    open_components, model, pk_shift
        As for ``solve``.

    Returns
    -------
    Titration

    Raises
    ------
    InputError
        When the pH lies outside -2 to 16, the titrant does not change the charge at
        this pH, or it brings an aggregating, open or unknown component; and as for
        ``solve``.
    ConvergenceError
        When the ionic strength does not settle within the cap.
    """
    wanted = np.asarray(ph, dtype=float)
    if not np.all(np.isfinite(wanted)) or np.any(
        (wanted < PH_LOW) | (wanted > PH_HIGH)
    ):
        msg = f"wanted pH must lie between {PH_LOW:g} and {PH_HIGH:g}"
        raise InputError(msg)
    batch, shape = prepare(
        ladders,
        totals_mol_kg,
        strong_charge_mol_kg,
        strong_charge2_mol_kg,
        np.asarray(temperature_c, dtype=float) + 0.0 * wanted,
        open_components=open_components,
        model=model,
        pk_shift=pk_shift,
    )
    unit = _one_mole(batch, titrant)
    flat_ph = np.broadcast_to(wanted, shape).reshape(batch.size)
    root = np.sqrt(0.5 * batch.strong_charge2) + 0.05
    for count in range(ITERATION_CAP):
        at = balance(batch, flat_ph, root)
        amount, double_ionic, d_double = _amount(at, unit, titrant, flat_ph, root)
        denominator = 1.0 + activity.ION_SIZE_FACTOR * root
        d_slope = (LN10 * batch.a_slope) / (denominator * denominator)
        gap = root * root - 0.5 * double_ionic
        step = gap / np.maximum(2.0 * root - 0.5 * d_slope * d_double, 0.2 * root)
        moves = np.abs(step) > TOLERANCE * (0.05 + root)
        if not np.any(moves & (np.abs(gap) > ROUNDING * at.double_ionic)):
            columns = [part.charge for part in at.sums]
            charges = (
                np.stack(columns, axis=-1) if columns else np.zeros((batch.size, 0))
            )
            return Titration(
                amount.reshape(shape),
                (root * root).reshape(shape),
                charges.reshape((*shape, len(columns))),
            )
        following = np.sqrt(0.5 * double_ionic) if count == 0 else root - step
        root = np.maximum(following, 0.2 * root)
    msg = (
        f"the amount of titrant did not settle in {ITERATION_CAP} steps "
        f"(last change of the root of ionic strength {np.abs(step).max():.1e})"
    )
    raise ConvergenceError(msg, hint="the wanted pH may need more titrant than exists")


def _one_mole(batch: Batch, titrant: Titrant) -> Batch | None:
    """Return a batch with one mole of each component the titrant brings, or None."""
    names = [e.ladder.name for e in batch.equilibria]
    for name, share in titrant.components.items():
        if name not in names:
            msg = f"the titrant brings {name!r}, which the mixture does not list"
            raise InputError(msg)
        eq = batch.equilibria[names.index(name)]
        if share and (eq.ladder.aggregates or eq.is_open):
            msg = f"{name!r} forms aggregates or is open, so it cannot be in a titrant"
            raise InputError(msg)
    keep = [k for k, name in enumerate(names) if titrant.components.get(name)]
    if not keep:
        return None
    zero = np.zeros(batch.size)
    return Batch(
        tuple(batch.equilibria[k] for k in keep),
        [np.full(batch.size, titrant.components[names[k]]) for k in keep],
        zero,
        zero,
        batch.kw,
        batch.a_slope,
        zero,
        zero,
    )


def _amount(
    at: Balance, unit: Batch | None, titrant: Titrant, ph: Array, root: Array
) -> tuple[Array, Array, Array]:
    """Amount that closes the balance, sum of z^2 m, and its derivative by ln(10^D)."""
    per_mole: Array = np.full(ph.shape, float(titrant.charge))
    per_mole2: Array = np.full(ph.shape, float(titrant.charge2))
    d_mole, d_mole2 = np.zeros(ph.shape), np.zeros(ph.shape)
    if unit is not None:
        for part in balance(unit, ph, root).sums:
            per_mole += part.charge
            per_mole2 += part.charge2
            d_mole += part.cov
            d_mole2 += part.var2
    if np.any(np.abs(per_mole) < LEAST_CHARGE):
        msg = "the titrant does not change the charge at this pH"
        raise InputError(msg, hint="choose another titrant or another pH")
    amount = -at.charge / per_mole
    d_amount = -(at.cov_positive - at.cov_negative + amount * d_mole) / per_mole
    double_ionic = np.maximum(at.double_ionic + amount * per_mole2, 0.0)
    d_double = at.var2 + d_amount * per_mole2 + amount * d_mole2
    return amount, double_ionic, d_double
