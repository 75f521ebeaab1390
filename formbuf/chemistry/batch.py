"""A batch of states as flat arrays, and its charge balance at trial values."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import activity
from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.ionization import Ladder, log10_aggregate_constants, pk_at
from formbuf.chemistry.moments import (
    Equilibrium,
    Sums,
    component_sums,
    least_charge,
    step_ratios,
)
from formbuf.chemistry.water import pkw
from formbuf.constants import EXTRAPOLATION_LIMIT_C, LIQUID_HIGH_C, LN10
from formbuf.errors import InputError

Array = NDArray[np.float64]

#: Largest amount or charge that the solver takes, mol/kg; water itself is 55.5.
AMOUNT_LIMIT_MOL_KG = 1000.0
#: Steps of one ladder, and range of pK, that double precision carries over all pH.
STEP_LIMIT = 14
PK_LIMIT = 25.0


@dataclass(slots=True)
class Batch:
    """Flat arrays of one call: states along the first axis (length n or 1).

    ``positive_shift`` and ``negative_shift`` are the parts of the strong-ion charge,
    less the lowest charge of the components, on either side of the balance [mol/kg].
    """

    equilibria: tuple[Equilibrium, ...]
    totals: list[Array]
    strong_charge: Array
    strong_charge2: Array
    kw: Array
    a_slope: Array
    positive_shift: Array
    negative_shift: Array

    @property
    def size(self) -> int:
        """Number of states."""
        return int(self.strong_charge.shape[0])

    @property
    def ladders(self) -> tuple[Ladder, ...]:
        """The ladders in order."""
        return tuple(e.ladder for e in self.equilibria)

    def take(self, rows: slice | NDArray[np.intp]) -> Batch:
        """Return the batch of the selected states."""
        if isinstance(rows, slice) and rows.start == 0 and rows.stop >= self.size:
            return self

        def pick(values: Array) -> Array:
            return values if values.shape[0] == 1 else values[rows]

        return Batch(
            tuple(
                Equilibrium(
                    e.ladder,
                    tuple(pick(k) for k in e.step_k),
                    tuple(pick(k) for k in e.aggregate_k),
                    e.is_open,
                )
                for e in self.equilibria
            ),
            [t[rows] for t in self.totals],
            self.strong_charge[rows],
            self.strong_charge2[rows],
            pick(self.kw),
            pick(self.a_slope),
            self.positive_shift[rows],
            self.negative_shift[rows],
        )


@dataclass(slots=True)
class Balance:
    """Charge balance and ionic strength of a batch at trial values.

    ``positive`` counts the protons above the least protonated states, ``negative``
    the rest; their difference is ``charge`` [mol/kg]. ``var_*`` and ``cov_*`` are
    their derivatives by pH and by D over ln 10, as positive numbers for pH.
    """

    charge: Array
    positive: Array
    negative: Array
    double_ionic: Array
    var_positive: Array
    var_negative: Array
    cov_positive: Array
    cov_negative: Array
    var2: Array
    hydrogen: Array
    hydroxide: Array
    sums: list[Sums]


def prepare(
    ladders: Sequence[Ladder],
    totals_mol_kg: ArrayLike,
    strong_charge_mol_kg: ArrayLike,
    strong_charge2_mol_kg: ArrayLike,
    temperature_c: ArrayLike,
    *,
    open_components: Sequence[str] = (),
    model: ActivityModel = "guggenheim",
    pk_shift: Mapping[str, ArrayLike] | None = None,
) -> tuple[Batch, tuple[int, ...]]:
    """Flatten and broadcast the inputs of a call; return the batch and its shape.

    ``pk_shift`` holds, by component, what is added to its pK in each state, shape
    (..., steps); the constants of aggregates move with the first step.

    Raises
    ------
    InputError
        On a shape that does not fit, an amount that is negative, not finite or above
        1000 mol/kg, a temperature outside -20 to 121 C, an unusable ladder, a pK
        beyond 25 either way, or an open component that is not listed.
    """
    totals = np.asarray(totals_mol_kg, dtype=float)
    if totals.ndim == 0 or totals.shape[-1] != len(ladders):
        msg = f"totals need a last axis of {len(ladders)} components, got shape {totals.shape}"
        raise InputError(msg)
    unknown = set(open_components) - {one.name for one in ladders}
    if unknown:
        msg = f"open components that the mixture does not list: {sorted(unknown)}"
        raise InputError(msg)
    charge, charge2, t = (
        np.asarray(x, dtype=float)
        for x in (strong_charge_mol_kg, strong_charge2_mol_kg, temperature_c)
    )
    try:
        shape = np.broadcast_shapes(
            totals.shape[:-1], charge.shape, charge2.shape, t.shape
        )
    except ValueError:
        msg = (
            "shapes do not fit together: totals "
            f"{totals.shape[:-1]}, charge {charge.shape}, squared charge "
            f"{charge2.shape}, temperature {t.shape}"
        )
        raise InputError(msg) from None
    _check_amounts("component totals", totals, 0.0)
    _check_amounts("strong-ion charge", charge, -AMOUNT_LIMIT_MOL_KG)
    _check_amounts("strong-ion squared charge", charge2, 0.0)
    is_even = _check_temperature(t)
    n = int(np.prod(shape, dtype=int))
    flat_t = t.reshape(-1)[:1] if is_even else np.broadcast_to(t, shape).reshape(n)
    wide = np.broadcast_to(totals, (*shape, len(ladders))).reshape(n, len(ladders))
    shifts = {
        name: _flat_shift(name, values, shape)
        for name, values in (pk_shift or {}).items()
    }
    equilibria = tuple(
        _equilibrium(one, flat_t, one.name in open_components, shifts.get(one.name))
        for one in ladders
    )
    columns = [np.ascontiguousarray(wide[:, j]) for j in range(len(ladders))]
    flat_charge = np.broadcast_to(charge, shape).reshape(n)
    excess = flat_charge
    for eq, amount in zip(equilibria, columns, strict=True):
        lowest = least_charge(eq.ladder)
        if lowest and not eq.is_open:
            excess = excess + lowest * amount
    kw, a_slope = _water(flat_t, model)
    return Batch(
        equilibria,
        columns,
        flat_charge,
        np.broadcast_to(charge2, shape).reshape(n),
        kw,
        a_slope,
        np.maximum(excess, 0.0),
        np.maximum(-excess, 0.0),
    ), shape


def _check_amounts(label: str, values: Array, low: float) -> None:
    """Refuse what is not finite or outside ``low`` to the limit."""
    if values.size and not (
        values.min() >= low and values.max() <= AMOUNT_LIMIT_MOL_KG
    ):
        ok = (values >= low) & (values <= AMOUNT_LIMIT_MOL_KG)
        worst = float(values[~ok].flat[0])
        msg = f"{label} of {worst:g} mol/kg: allowed are {low:g} to {AMOUNT_LIMIT_MOL_KG:g}"
        raise InputError(msg)


def _check_temperature(t: Array) -> bool:
    """Refuse what lies outside; return whether all states have one temperature."""
    if not t.size:
        return False
    low, high = t.min(), t.max()
    if not (low >= EXTRAPOLATION_LIMIT_C and high <= LIQUID_HIGH_C):
        ok = (t >= EXTRAPOLATION_LIMIT_C) & (t <= LIQUID_HIGH_C)
        msg = (
            f"temperature of {float(t[~ok].flat[0]):g} C: allowed are "
            f"{EXTRAPOLATION_LIMIT_C:g} to {LIQUID_HIGH_C:g}"
        )
        raise InputError(msg)
    return bool(low == high)


def _water(t: Array, model: ActivityModel) -> tuple[Array, Array]:
    """Return Kw and the Debye-Hueckel slope at flat temperatures."""
    if t.size == 1:
        return _water_at(float(t[0]), model)
    return 10.0 ** -pkw(t), activity.slope(t, model)


@lru_cache(maxsize=512)
def _water_at(t: float, model: ActivityModel) -> tuple[Array, Array]:
    flat = np.array([t])
    return _frozen(10.0 ** -pkw(flat)), _frozen(activity.slope(flat, model))


def _flat_shift(name: str, values: ArrayLike, shape: tuple[int, ...]) -> Array:
    """Return the shifts of one component as (states, steps)."""
    given = np.asarray(values, dtype=float)
    n = int(np.prod(shape, dtype=int))
    try:
        wide = np.broadcast_to(given, (*shape, given.shape[-1]))
    except (ValueError, IndexError):
        msg = f"pK shifts of {name} have shape {given.shape}, allowed {shape} and steps"
        raise InputError(msg) from None
    return wide.reshape(n, given.shape[-1])


def _equilibrium(
    ladder: Ladder, t: Array, is_open: bool, shift: Array | None
) -> Equilibrium:
    if shift is not None:
        return _constants(ladder, t, is_open, shift)
    if t.size == 1:
        return _equilibrium_at(ladder, float(t[0]), is_open)
    return _constants(ladder, t, is_open)


@lru_cache(maxsize=4096)
def _equilibrium_at(ladder: Ladder, t: float, is_open: bool) -> Equilibrium:
    return _constants(ladder, np.array([t]), is_open)


def _constants(
    ladder: Ladder, t: Array, is_open: bool, shift: Array | None = None
) -> Equilibrium:
    """Constants of one ladder at flat temperatures."""
    pks = pk_at(ladder, t)
    if shift is not None:
        if shift.shape[-1] != pks.shape[-1]:
            msg = (
                f"{ladder.name}: {shift.shape[-1]} pK shifts for {pks.shape[-1]} steps"
            )
            raise InputError(msg)
        pks = pks + shift
    if pks.shape[-1] > STEP_LIMIT:
        msg = f"{ladder.name} has {pks.shape[-1]} steps: allowed are {STEP_LIMIT}"
        raise InputError(msg, hint="give distant groups as components of their own")
    if not np.all(np.abs(pks) <= PK_LIMIT):
        msg = f"{ladder.name}: every pK must lie between {-PK_LIMIT:g} and {PK_LIMIT:g}"
        raise InputError(msg)
    if is_open and ladder.top_charge > 0:
        msg = f"{ladder.name} cannot be open to a gas: its first state is charged"
        raise InputError(msg)
    aggregates: tuple[Array, ...] = ()
    if ladder.aggregates and not is_open:
        logs = log10_aggregate_constants(ladder, t)
        if shift is not None:
            charges = [a.charge for a in ladder.aggregates]
            logs = logs + shift[..., :1] * np.asarray(charges, dtype=float)
        formed = 10.0**logs
        aggregates = tuple(_frozen(formed[..., k]) for k in range(formed.shape[-1]))
    constants = 10.0**-pks
    steps = tuple(_frozen(constants[..., k]) for k in range(constants.shape[-1]))
    return Equilibrium(ladder, steps, aggregates, is_open)


def _frozen(values: Array) -> Array:
    """Return a contiguous array that a cache may hand out more than once."""
    kept: Array = np.ascontiguousarray(values)
    kept.flags.writeable = False
    return kept


def balance(batch: Batch, ph: Array, root: Array) -> Balance:
    """Evaluate charge balance, ionic strength and their derivatives at trial values.

    Parameters
    ----------
    batch : Batch
    ph : ndarray, shape (states,)
    root : ndarray, shape (states,)
        Square root of the ionic strength.

    Returns
    -------
    Balance
    """
    g = np.exp(LN10 * activity.unit_charge_term(batch.a_slope, root))
    u = np.exp(LN10 * ph)
    hydrogen = g / u
    hydroxide = batch.kw * u * g
    positive = hydrogen + batch.positive_shift
    negative = hydroxide + batch.negative_shift
    var_positive, cov_positive = hydrogen, hydrogen
    var_negative, cov_negative = hydroxide, hydroxide
    var2 = hydrogen + hydroxide
    double_ionic = batch.strong_charge2 + var2
    ratios = step_ratios(u, g, batch.ladders)
    sums: list[Sums] = []
    for eq, amount in zip(batch.equilibria, batch.totals, strict=True):
        part = component_sums(eq, amount, u, g, ratios)
        if eq.is_open:
            negative = negative - part.charge
            var_negative = var_negative + part.var
            cov_negative = cov_negative - part.cov
        else:
            positive = positive + part.held
            var_positive = var_positive + part.var
            cov_positive = cov_positive + part.cov
        double_ionic += part.charge2
        var2 = var2 + part.var2
        sums.append(part)
    return Balance(
        positive - negative,
        positive,
        negative,
        double_ionic,
        var_positive,
        var_negative,
        cov_positive,
        cov_negative,
        var2,
        hydrogen,
        hydroxide,
        sums,
    )
