"""Acid-base equilibrium of any mixture: composition and temperature to pH, and back.

Unknowns of one state are pH and the root of the ionic strength; the equations are
electroneutrality, as the logarithm of positive over negative charge, and the
definition of ionic strength. Their derivatives are variances over the protonation
states, so that Newton's method converges quadratically, and in the logarithm it
does so from far away too. A bracket keeps pH honest, and a nested bisection, which
cannot fail, catches what Newton's method does not. All states of a call are solved
together in cache-sized chunks.

Left out: complexes of calcium, magnesium or zinc, ion pairs, and the activity of
water (taken as one).
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import activity
from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.batch import Balance, Batch, balance, prepare
from formbuf.chemistry.ionization import Ladder
from formbuf.constants import LN10
from formbuf.errors import ConvergenceError

Array = NDArray[np.float64]

PH_LOW, PH_HIGH = -2.0, 16.0
TOLERANCE_MOL_KG = 1e-9
#: Largest Newton step at which a state counts as solved; the error left is of the
#: order of its square.
STEP_TOLERANCE = 1e-10
#: Newton steps within a chunk; what is left of all chunks then goes on together.
EARLY_CAP = 8
NEWTON_CAP = 60
#: Newton steps after which solved states are looked for.
LOOK_FROM = 3
#: Longest step of pH, and the step below which Newton's method is left alone.
LONGEST_STEP = 3.0
SMALL_STEP = 0.1
BISECTION_CAP = 62
#: States solved together, so that the arrays of one chunk stay in the cache.
CHUNK = 8192
#: The bracket on pH was taken at trial ionic strengths; its ends may lie this far off
#: (five times the largest D, the shift of the third pK of an acid).
BRACKET_MARGIN = 1.75


@dataclass(frozen=True, slots=True)
class Solution:
    """Solved states; every array has the leading shape of the call.

    Attributes
    ----------
    ph : ndarray, shape (...)
        -log10 of the conventional hydrogen-ion activity.
    ionic_strength_mol_kg : ndarray, shape (...)
    unit_charge_term : ndarray, shape (...)
        D; log10 gamma = -z^2 D.
    hydrogen_mol_kg, hydroxide_mol_kg : ndarray, shape (...)
        Molalities of H+ and OH-.
    charge_mol_kg : ndarray, shape (..., components)
        Sum of z m of each component.
    charge2_mol_kg : ndarray, shape (..., components)
        Sum of z^2 m of each component.
    variance_mol_kg : ndarray, shape (..., components)
        Amount times the variance of charge: the component's share of the buffer
        capacity divided by ln 10.
    residual_mol_kg : ndarray, shape (...)
        What is left of the charge balance.
    iterations : int
        Largest number of Newton steps any state took.
    """

    ph: Array
    ionic_strength_mol_kg: Array
    unit_charge_term: Array
    hydrogen_mol_kg: Array
    hydroxide_mol_kg: Array
    charge_mol_kg: Array
    charge2_mol_kg: Array
    variance_mol_kg: Array
    residual_mol_kg: Array
    iterations: int


def solve(
    ladders: Sequence[Ladder],
    totals_mol_kg: ArrayLike,
    strong_charge_mol_kg: ArrayLike,
    strong_charge2_mol_kg: ArrayLike,
    temperature_c: ArrayLike,
    *,
    open_components: Sequence[str] = (),
    model: ActivityModel = "guggenheim",
    pk_shift: Mapping[str, ArrayLike] | None = None,
) -> Solution:
    """Solve electroneutrality for the pH of any number of mixtures at once.

    Parameters
    ----------
    ladders : sequence of Ladder, length J
        The ionising components; may be empty (strong ions and water only).
    totals_mol_kg : array_like, shape (..., J)
        Total molality of each component [mol/kg water], 0 to about 1. For a
        component named in ``open_components``: the fixed molality of its first
        (most protonated) state, for example dissolved carbon dioxide.
    strong_charge_mol_kg : array_like, shape (...)
        Sum of z m over the strong ions [mol/kg], for example sodium minus chloride.
    strong_charge2_mol_kg : array_like, shape (...)
        Sum of z^2 m over the strong ions [mol/kg], their part of 2 I.
    temperature_c : array_like, shape (...)
        Temperature [C], -20 to 121; ionization data rest on 0 to 60.
    open_components : sequence of str
        Components in exchange with a gas.
    model : {"guggenheim", "ideal"}
        Activity model.
    pk_shift : mapping of str to array_like, shape (..., steps), optional
        What is added to the pK of a component in each state, for draws of its
        uncertainty; the constants of aggregates move with the first step.

    Returns
    -------
    Solution

    Raises
    ------
    InputError
        On shapes that do not fit, amounts that are negative, not finite or above
        1000 mol/kg, a temperature outside -20 to 121 C, or an unusable ladder.
    ConvergenceError
        When a state is not solved to 1e-9 in pH and 1e-9 mol/kg in charge.

    Notes
    -----
    Van Slyke 1922, J. Biol. Chem. 52, 525, in its general variance form gives the
    derivatives; activity as in ``formbuf.chemistry.activity``.
    """
    batch, shape = prepare(
        ladders,
        totals_mol_kg,
        strong_charge_mol_kg,
        strong_charge2_mol_kg,
        temperature_c,
        open_components=open_components,
        model=model,
        pk_shift=pk_shift,
    )
    found = _Found.empty(batch.size, len(batch.equilibria))
    late: list[NDArray[np.intp]] = []
    for start in range(0, batch.size, CHUNK):
        rows = np.arange(start, min(start + CHUNK, batch.size))
        late.append(_newton(batch, rows, found, EARLY_CAP, from_start=True))
    rest = np.concatenate(late) if late else np.arange(0)
    if rest.size:
        rest = _newton(batch, rest, found, NEWTON_CAP, from_start=False)
    if rest.size:
        work = batch.take(rest)
        ph, root = _bisect(work)
        found.store(rest, ph, root, balance(work, ph, root))
    return found.solution(batch, shape)


@dataclass(slots=True)
class _Found:
    """Results of a batch while it is being solved; states along the last axis."""

    ph: Array
    root: Array
    hydrogen: Array
    hydroxide: Array
    residual: Array
    charge: Array
    charge2: Array
    variance: Array
    iterations: int

    @classmethod
    def empty(cls, n: int, components: int) -> _Found:
        """Return room for the results of ``n`` states."""
        ph, root, hydrogen, hydroxide, residual = (np.empty(n) for _ in range(5))
        charge, charge2, variance = (np.empty((components, n)) for _ in range(3))
        return cls(
            ph, root, hydrogen, hydroxide, residual, charge, charge2, variance, 0
        )

    def store(
        self, rows: NDArray[np.intp], ph: Array, root: Array, at: Balance
    ) -> None:
        """Keep the balance of solved states."""
        span = _as_slice(rows)
        self.ph[span], self.root[span] = ph, root
        self.hydrogen[span], self.hydroxide[span] = at.hydrogen, at.hydroxide
        self.residual[span] = at.charge
        for j, part in enumerate(at.sums):
            self.charge[j, span] = part.charge
            self.charge2[j, span] = part.charge2
            self.variance[j, span] = part.var

    def solution(self, batch: Batch, shape: tuple[int, ...]) -> Solution:
        """Give the results the shape of the call."""
        d = np.asarray(activity.unit_charge_term(batch.a_slope, self.root))

        def wide(values: Array) -> Array:
            return np.moveaxis(values.reshape((values.shape[0], *shape)), 0, -1)

        return Solution(
            self.ph.reshape(shape),
            (self.root * self.root).reshape(shape),
            d.reshape(shape),
            self.hydrogen.reshape(shape),
            self.hydroxide.reshape(shape),
            wide(self.charge),
            wide(self.charge2),
            wide(self.variance),
            self.residual.reshape(shape),
            self.iterations,
        )


def _as_slice(rows: NDArray[np.intp]) -> slice | NDArray[np.intp]:
    """Return a slice where the rows are an unbroken run, which is much quicker."""
    first, last = int(rows[0]), int(rows[-1])
    return slice(first, last + 1) if last - first + 1 == rows.size else rows


def _newton(
    batch: Batch, rows: NDArray[np.intp], found: _Found, cap: int, *, from_start: bool
) -> NDArray[np.intp]:
    """Newton's method in pH and root of ionic strength; return the rows left over.

    States are stored as soon as their next step is below the tolerance. What a first
    pass leaves goes on with a bracket on pH, and a step that does not shrink halves it.
    The strong ions alone give the least ionic strength.
    """
    work = batch.take(_as_slice(rows))
    if from_start:
        ph, root = _first_guess(work)
    else:
        ph, root = found.ph[rows], found.root[rows]
    floor = np.sqrt(0.5 * work.strong_charge2)
    low, high = np.full(rows.size, PH_LOW), np.full(rows.size, PH_HIGH)
    before = np.full(rows.size, PH_HIGH)
    for step in range(1, cap + 1):
        at = balance(work, ph, root)
        d_ph, d_root = _newton_step(work, at, root)
        if step >= LOOK_FROM:
            done = (np.abs(d_ph) <= STEP_TOLERANCE) & (
                np.abs(at.charge) <= 0.1 * TOLERANCE_MOL_KG
            )
            done &= np.abs(d_root) <= STEP_TOLERANCE * (1e-3 + root)
            solved = np.count_nonzero(done)
            if 2 * solved > done.size:
                found.iterations = max(found.iterations, step)
                found.store(rows, ph, root, at)
                if solved == done.size:
                    return rows[:0]
                keep = np.flatnonzero(~done)
                rows, work = rows[keep], work.take(keep)
                ph, root, low, high = ph[keep], root[keep], low[keep], high[keep]
                d_ph, d_root = d_ph[keep], d_root[keep]
                floor, before = floor[keep], before[keep]
                at.charge = at.charge[keep]
        d_ph = np.minimum(np.maximum(d_ph, -LONGEST_STEP), LONGEST_STEP)
        if from_start:
            ph = np.minimum(np.maximum(ph + d_ph, PH_LOW), PH_HIGH)
        else:
            acid = at.charge > 0.0
            low, high = np.where(acid, ph, low), np.where(acid, high, ph)
            trial, size = ph + d_ph, np.abs(d_ph)
            good = (trial > low - BRACKET_MARGIN) & (trial < high + BRACKET_MARGIN)
            good &= (size <= 0.5 * before) | (size <= SMALL_STEP)
            ph = np.where(good, trial, 0.5 * (low + high))
            before = np.where(good, size, PH_HIGH)
        root = np.maximum(np.maximum(root + d_root, 0.2 * root), floor)
    found.ph[rows], found.root[rows] = ph, root
    return rows


def _first_guess(batch: Batch) -> tuple[Array, Array]:
    """Start values: for one component, the pH at which its mean charge balances."""
    n = batch.strong_charge.shape[0]
    carried = batch.strong_charge2.copy()
    if len(batch.equilibria) != 1 or batch.equilibria[0].is_open:
        return np.full(n, 7.0), np.sqrt(0.5 * carried) + 0.01
    eq, amount = batch.equilibria[0], batch.totals[0]
    if eq.ladder.is_macro_ion:
        return np.full(n, 7.0), np.sqrt(0.5 * carried) + 0.01
    steps = len(eq.step_k)
    lost = eq.ladder.top_charge + batch.strong_charge / np.maximum(amount, 1e-12)
    lost = np.clip(lost, 1e-3, steps - 1e-3)
    carried += np.minimum(batch.strong_charge**2 / np.maximum(amount, 1e-12), 10.0)
    root = np.sqrt(0.5 * carried) + 1e-3
    d = activity.unit_charge_term(batch.a_slope, root)
    ph = np.zeros(n)
    for k, constant in enumerate(eq.step_k):
        share = np.clip(lost - k, 1e-3, 1.0 - 1e-3)
        charge = eq.ladder.top_charge - k
        at_step = np.log10(share / (1.0 - share) / constant) + (2 * charge - 1) * d
        ph = np.where((lost >= k) & (lost <= k + 1), at_step, ph)
    return ph, root


def _newton_step(batch: Batch, at: Balance, root: Array) -> tuple[Array, Array]:
    """Newton step for ln(positive / negative) = 0 and I = sum z^2 m / 2."""
    denominator = 1.0 + activity.ION_SIZE_FACTOR * root
    d_slope = (LN10 * batch.a_slope) / (denominator * denominator)
    value = np.log(at.positive / at.negative)
    gap = root * root - 0.5 * at.double_ionic
    by_ph = at.var_positive / at.positive + at.var_negative / at.negative
    by_root = at.cov_positive / at.positive - at.cov_negative / at.negative
    by_root *= d_slope
    ionic_by_ph = 0.5 * (at.cov_positive - at.cov_negative)
    twice = 2.0 * root
    ionic_by_root = np.maximum(twice - (0.5 * d_slope) * at.var2, 0.1 * twice)
    product = by_ph * ionic_by_root
    determinant = np.maximum(product + by_root * ionic_by_ph, 0.05 * product)
    d_ph = (value * ionic_by_root - by_root * gap) / (LN10 * determinant)
    d_root = (by_ph * gap + ionic_by_ph * value) / -determinant
    return d_ph, d_root


def _bisect(batch: Batch) -> tuple[Array, Array]:
    """Nested bisection: outer on D, inner on pH; raises when it cannot close."""
    n = batch.strong_charge.shape[0]
    a_slope = np.broadcast_to(batch.a_slope, (n,))
    d_low, d_high = np.zeros(n), a_slope / activity.ION_SIZE_FACTOR
    ph = np.full(n, 7.0)
    root = np.zeros(n)
    for _ in range(BISECTION_CAP):
        d = 0.5 * (d_low + d_high)
        root = d / np.maximum(a_slope - activity.ION_SIZE_FACTOR * d, 1e-300)
        root = np.where(a_slope > 0.0, root, 0.0)
        ph = _bisect_ph(batch, root)
        implied = np.sqrt(0.5 * balance(batch, ph, root).double_ionic)
        grow = activity.unit_charge_term(a_slope, implied) > d
        d_low = np.where(grow, d, d_low)
        d_high = np.where(grow, d_high, d)
    at = balance(batch, ph, root)
    root = np.where(a_slope > 0.0, root, np.sqrt(0.5 * at.double_ionic))
    bad = ~(np.abs(at.charge) <= TOLERANCE_MOL_KG)
    if bad.any():
        worst = int(np.argmax(np.where(bad, np.abs(at.charge), -1.0)))
        amounts = ", ".join(
            f"{e.ladder.name} {t[worst]:.4g}"
            for e, t in zip(batch.equilibria, batch.totals, strict=True)
        )
        msg = (
            f"pH not solved: {amounts} mol/kg, strong-ion charge "
            f"{batch.strong_charge[worst]:.4g} mol/kg; charge left over "
            f"{at.charge[worst]:.2e} mol/kg, allowed {TOLERANCE_MOL_KG:g}"
        )
        raise ConvergenceError(msg, hint="check the amounts of acid and base")
    return ph, root


def _bisect_ph(batch: Batch, root: Array) -> Array:
    n = root.shape[0]
    low, high = np.full(n, PH_LOW), np.full(n, PH_HIGH)
    for _ in range(BISECTION_CAP):
        middle = 0.5 * (low + high)
        acid = balance(batch, middle, root).charge > 0.0
        low = np.where(acid, middle, low)
        high = np.where(acid, high, middle)
    result: Array = 0.5 * (low + high)
    return result
