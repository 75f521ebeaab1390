"""Solve one state of a freeze-concentrated mixture by Newton's method.

Unknowns are the logarithms of the molalities and of the liquid water, and the
amount of every phase that is present; where wanted also the temperature at which a
phase appears, or the amount of titrant that gives a pH. The derivatives of the
activity coefficients are taken by differences, all in one evaluation.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.freezing_network import Network
from formbuf.constants import LN10, WATER_MOLAR_MASS_KG_MOL
from formbuf.errors import ConvergenceError

Array = NDArray[np.float64]

#: Largest scaled residual of a solved state.
TOLERANCE = 1e-11
ITERATION_CAP = 80
#: Largest change of a logarithm in one step.
_LARGEST_STEP = 1.5
_LN_STEP = 1e-6
_KELVIN_STEP = 1e-3
_LARGEST_LN_MOLALITY = 4.5
_FOLD_STEEPNESS = 30.0


@dataclass(frozen=True, slots=True)
class State:
    """A solved state.

    Attributes
    ----------
    temperature_c : float
    ln_m : ndarray, shape (n,)
        Natural log of the molality of each species.
    ln_w : float
        Natural log of the liquid water [kg per kg of initial water].
    amounts : ndarray, shape (p,)
        Each phase [mol per kg of initial water]; zero where absent.
    ln_gamma : ndarray, shape (n,)
    ln_water_activity : float
    """

    temperature_c: float
    ln_m: Array
    ln_w: float
    amounts: Array
    ln_gamma: Array
    ln_water_activity: float

    @property
    def ph(self) -> float:
        """-log10 of the activity of the hydrogen ion."""
        return -float(self.ln_m[0] + self.ln_gamma[0]) / LN10


def saturation(net: Network, state: State) -> Array:
    """Return ln of activity product over constant of each phase, ice first."""
    _, ln_k = net.constants(state.temperature_c)
    activity = state.ln_m + state.ln_gamma
    return (
        net.phase_states @ activity + net.phase_waters * state.ln_water_activity - ln_k
    )


def watched_saturation(net: Network, state: State) -> Array:
    """Return the same for solids that are only watched."""
    activity = state.ln_m + state.ln_gamma
    result: Array = (
        net.watched_states @ activity
        + net.watched_waters * state.ln_water_activity
        - net.watched_ln_k(state.temperature_c)
    )
    return result


def solve_state(
    net: Network, guess: State, active: list[int], temperature_c: float
) -> State:
    """Return the state at a temperature with the given phases present.

    Parameters
    ----------
    net : Network
    guess : State
        Where to start, usually the state a little warmer.
    active : list of int
        Phases present, as indices into ``net.phases``.
    temperature_c : float

    Raises
    ------
    ConvergenceError
        When the equations are not solved to 1e-11 within 80 steps.
    """
    return _Newton(net, guess, active, temperature_c).run()


def solve_onset(net: Network, guess: State, active: list[int], phase: int) -> State:
    """Return the state at the temperature where a phase is just saturated.

    ``phase`` is not among ``active``; a negative number -1 - i means watched solid i.
    """
    return _Newton(net, guess, active, guess.temperature_c, onset=phase).run()


def solve_titrant(
    net: Network, guess: State, ph: float, component: int
) -> tuple[State, float]:
    """Return the state of a pH and the amount of titrant ion that gives it.

    Only liquid is present; ``component`` is the row of the titrant ion.
    """
    newton = _Newton(net, guess, [], guess.temperature_c, ph=ph, titrant=component)
    state = newton.run()
    return state, float(newton.free)


def at_fold(net: Network, state: State, active: list[int]) -> bool:
    """Return whether a solved state stands at the end of its branch.

    There the composition runs away with temperature: the relative change of a
    molality per relative change of the freezing-point depression exceeds 30, where
    ordinary freeze-concentration has 1 to 3. The activity model, not the solver,
    ends at such a point.
    """
    try:
        warmer = solve_state(net, state, active, state.temperature_c + _KELVIN_STEP)
    except ConvergenceError:
        return False
    steepest = float(np.max(np.abs(warmer.ln_m - state.ln_m))) / _KELVIN_STEP
    return steepest * max(-state.temperature_c, 0.05) > _FOLD_STEEPNESS


class _Newton:
    """One solution; keeps the arrays that do not change between steps."""

    def __init__(
        self,
        net: Network,
        guess: State,
        active: list[int],
        temperature_c: float,
        *,
        onset: int | None = None,
        ph: float | None = None,
        titrant: int | None = None,
    ) -> None:
        self.net = net
        self.active = active
        self.onset, self.ph, self.titrant = onset, ph, titrant
        self.temperature_c = temperature_c
        self.u = guess.ln_m.copy()
        self.v = guess.ln_w
        self.x = guess.amounts[active].copy()
        self.free = 0.0
        if titrant is not None:
            self.free = float(np.exp(self.v) * (net.counts[titrant] @ np.exp(self.u)))
        self.n, self.k = len(net.species), len(net.components)
        self.r, self.p = len(net.reactions), len(active)
        self.extra = onset is not None or titrant is not None
        self.scale = np.maximum(net.totals, 1e-9)
        self._perturb = np.exp(_LN_STEP * np.eye(self.n))

    def run(self) -> State:
        """Iterate to the solution."""
        worst = np.inf
        for _ in range(ITERATION_CAP):
            ln_gamma, ln_water, d_gamma, d_water = self._activities()
            residual = self._residual(ln_gamma, ln_water, self.temperature_c)
            worst = float(np.max(np.abs(residual)))
            if worst < TOLERANCE:
                return self._state(ln_gamma, ln_water)
            if not np.isfinite(worst):
                break
            jacobian = self._jacobian(ln_gamma, ln_water, d_gamma, d_water, residual)
            try:
                step = np.linalg.solve(jacobian, -residual)
            except np.linalg.LinAlgError:
                break
            if not np.all(np.isfinite(step)):
                break
            self._move(np.asarray(step, dtype=float))
        raise ConvergenceError(self._describe(worst))

    def _activities(self) -> tuple[Array, float, Array, Array]:
        m = np.exp(self.u)
        batch = np.vstack([m, m * self._perturb])
        ln_gamma, ln_water = self.net.activity.evaluate(batch, self.temperature_c)
        d_gamma = (ln_gamma[1:] - ln_gamma[0]).T / _LN_STEP
        d_water = (ln_water[1:] - ln_water[0]) / _LN_STEP
        return ln_gamma[0], float(ln_water[0]), d_gamma, d_water

    def _residual(
        self, ln_gamma: Array, ln_water: float, temperature_c: float
    ) -> Array:
        net = self.net
        m, w = np.exp(self.u), np.exp(self.v)
        ln_k, ln_phase = net.constants(temperature_c)
        activity = self.u + ln_gamma
        totals = net.totals.copy()
        if self.titrant is not None:
            totals[self.titrant] = self.free
        mass = w * (net.counts @ m) + self.x @ net.phase_counts[self.active] - totals
        charge = net.charges @ m / (np.abs(net.charges) @ m)
        water = (
            w + WATER_MOLAR_MASS_KG_MOL * (net.phase_waters[self.active] @ self.x) - 1.0
        )
        excess = net.phase_states @ activity + net.phase_waters * ln_water - ln_phase
        parts = [
            mass / self.scale,
            net.reactions @ activity + net.waters * ln_water - ln_k,
            [charge, water],
            excess[self.active],
        ]
        if self.onset is not None:
            parts.append(
                [self._onset_excess(activity, ln_water, excess, temperature_c)]
            )
        if self.ph is not None:
            parts.append([activity[0] + LN10 * self.ph])
        return np.concatenate(parts)

    def _onset_excess(
        self, activity: Array, ln_water: float, excess: Array, temperature_c: float
    ) -> float:
        assert self.onset is not None
        if self.onset >= 0:
            return float(excess[self.onset])
        i = -1 - self.onset
        return float(
            self.net.watched_states[i] @ activity
            + self.net.watched_waters[i] * ln_water
            - self.net.watched_ln_k(temperature_c)[i]
        )

    def _jacobian(
        self,
        ln_gamma: Array,
        ln_water: float,
        d_gamma: Array,
        d_water: Array,
        residual: Array,
    ) -> Array:
        net, n, k, r, p = self.net, self.n, self.k, self.r, self.p
        size = n + 1 + p + int(self.extra)
        jacobian = np.zeros((size, size))
        m, w = np.exp(self.u), np.exp(self.v)
        held = net.counts * m
        jacobian[:k, :n] = w * held / self.scale[:, np.newaxis]
        jacobian[:k, n] = w * held.sum(axis=1) / self.scale
        jacobian[:k, n + 1 : n + 1 + p] = (
            net.phase_counts[self.active].T / self.scale[:, np.newaxis]
        )
        d_activity = np.eye(n) + d_gamma
        jacobian[k : k + r, :n] = net.reactions @ d_activity + np.outer(
            net.waters, d_water
        )
        size_sum = float(np.abs(net.charges) @ m)
        charge = float(net.charges @ m) / size_sum
        jacobian[k + r, :n] = (
            (net.charges - charge * np.abs(net.charges)) * m / size_sum
        )
        jacobian[k + r + 1, n] = w
        jacobian[k + r + 1, n + 1 : n + 1 + p] = (
            WATER_MOLAR_MASS_KG_MOL * net.phase_waters[self.active]
        )
        rows = slice(k + r + 2, k + r + 2 + p)
        jacobian[rows, :n] = net.phase_states[self.active] @ d_activity + np.outer(
            net.phase_waters[self.active], d_water
        )
        if self.onset is not None:
            states, waters = (
                (net.phase_states[self.onset], net.phase_waters[self.onset])
                if self.onset >= 0
                else (
                    net.watched_states[-1 - self.onset],
                    net.watched_waters[-1 - self.onset],
                )
            )
            jacobian[-1, :n] = states @ d_activity + waters * d_water
            warmer = self.temperature_c + _KELVIN_STEP
            gamma, water = net.activity.evaluate(m, warmer)
            shifted = self._residual(gamma, float(water), warmer)
            jacobian[:, -1] = (shifted - residual) / _KELVIN_STEP
        if self.titrant is not None:
            jacobian[-1, :n] = d_activity[0]
            jacobian[self.titrant, -1] = -1.0 / self.scale[self.titrant]
        return jacobian

    def _move(self, step: Array) -> None:
        n, p = self.n, self.p
        largest = float(np.max(np.abs(step[: n + 1])))
        share = min(1.0, _LARGEST_STEP / largest) if largest > 0.0 else 1.0
        if self.onset is not None and abs(step[-1]) * share > 3.0:
            share = 3.0 / abs(float(step[-1]))
        self.u = np.minimum(self.u + share * step[:n], _LARGEST_LN_MOLALITY)
        self.v = min(self.v + share * float(step[n]), 1.0)
        self.x = self.x + share * step[n + 1 : n + 1 + p]
        if self.onset is not None:
            self.temperature_c = float(
                np.clip(self.temperature_c + share * step[-1], -39.0, 60.0)
            )
        if self.titrant is not None:
            self.free += share * float(step[-1])

    def _state(self, ln_gamma: Array, ln_water: float) -> State:
        amounts = np.zeros(len(self.net.phases))
        amounts[self.active] = self.x
        return State(
            self.temperature_c, self.u, float(self.v), amounts, ln_gamma, ln_water
        )

    def _describe(self, worst: float) -> str:
        phases = ", ".join(self.net.phases[i] for i in self.active) or "none"
        totals = ", ".join(
            f"{name} {total:.4g}"
            for name, total in zip(self.net.components, self.net.totals, strict=True)
        )
        return (
            f"freeze-concentrate not solved at {self.temperature_c:.3f} C: "
            f"{totals} mol/kg, phases {phases}, liquid water {np.exp(self.v):.3g} "
            f"kg/kg; residual {worst:.1e}, allowed {TOLERANCE:g}"
        )
