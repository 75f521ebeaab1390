"""Follow a freeze-concentrated mixture along temperature, phase by phase.

Between events the set of phases is fixed and each state is solved from the last.
A phase enters where it becomes saturated and leaves where its amount reaches zero,
so that amount >= 0, saturation <= 0 and their product zero hold at every state.
Works downwards (freezing) and upwards (thawing) alike.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from formbuf.chemistry.freezing_network import ICE, Network
from formbuf.chemistry.freezing_records import FreezingEvent
from formbuf.chemistry.freezing_state import (
    State,
    saturation,
    solve_onset,
    solve_state,
    watched_saturation,
)
from formbuf.constants import WATER_MOLAR_MASS_KG_MOL
from formbuf.errors import ConvergenceError

Array = NDArray[np.float64]

#: Longest step along temperature once there is ice, and in liquid alone, K.
LONGEST_STEP_K = 5.0
LONGEST_LIQUID_STEP_K = 100.0
#: Shortest step tried before giving up, K.
SHORTEST_STEP_K = 1e-4
STEP_CAP = 4000
EVENT_CAP = 60
BISECTION_CAP = 60
#: Saturation and amount that count as zero.
_SATURATION_ZERO = 1e-9
_AMOUNT_ZERO = 1e-13
#: A liquid smaller than this is gone, kg per kg of initial water.
SMALLEST_LIQUID_KG = 1e-9
_EXACT = 1e-9
#: Farthest that a start is carried on, in steps as long as the last.
_FARTHEST_CARRIED = 3.0
#: How closely the end of a trace is found, K.
_REFUSAL_STEP_K = 0.01


@dataclass(slots=True)
class Trace:
    """A mixture on its way along temperature.

    Attributes
    ----------
    net : Network
    state : State
        Last solved state.
    active : list of int
        Phases present.
    events : list of FreezingEvent
    gone_at_c : float or None
        Temperature at which the last liquid froze.
    banned : set of int
        Phases held back although saturated.
    outside_at_c : float or None
        Temperature at which a state without parameters ended the trace.
    before : State or None
        The solved state before the last, with the same phases.
    """

    net: Network
    state: State
    active: list[int]
    events: list[FreezingEvent]
    gone_at_c: float | None = None
    banned: frozenset[int] = frozenset()
    outside_at_c: float | None = None
    before: State | None = None

    def advance(self, target_c: float) -> None:
        """Carry the mixture to a temperature; stops early where the liquid ends.

        Raises
        ------
        ConvergenceError
            When a state cannot be solved within the caps.
        """
        for _ in range(EVENT_CAP):
            if self.gone_at_c is not None or self.outside_at_c is not None:
                return
            violated, trial = self._march(target_c)
            if not violated:
                return
            self._next_event(violated, trial)
            self.before = None
        msg = (
            f"more than {EVENT_CAP} phase changes between {self.state.temperature_c:.2f} "
            f"and {target_c:.2f} C, allowed {EVENT_CAP}"
        )
        raise ConvergenceError(msg)

    def _march(self, target_c: float) -> tuple[list[int], State]:
        """Step with fixed phases until the target or the first violated phase."""
        longest = LONGEST_STEP_K if self.active else LONGEST_LIQUID_STEP_K
        step = longest
        for _ in range(STEP_CAP):
            gap = target_c - self.state.temperature_c
            if abs(gap) < 1e-12:
                return [], self.state
            length = min(abs(gap), step)
            goal = self.state.temperature_c + float(np.copysign(length, gap))
            if length == abs(gap):
                goal = target_c
            try:
                start = self._carried_on(goal)
                trial = solve_state(self.net, start, self.active, goal)
            except ConvergenceError:
                step = 0.5 * length
                if step < SHORTEST_STEP_K:
                    raise
                continue
            if self.net.is_refused(trial.ln_m):
                step = 0.5 * length
                if step < _REFUSAL_STEP_K:
                    self.outside_at_c = self.state.temperature_c
                    return [], self.state
                continue
            violated = self.violated(trial)
            if violated:
                return violated, trial
            self._watch(trial)
            self.before, self.state = self.state, trial
            step = min(2.0 * step, longest)
            if np.exp(trial.ln_w) < SMALLEST_LIQUID_KG:
                self._vanish(trial, trial.amounts)
                return [], trial
        msg = f"no end after {STEP_CAP} temperature steps, allowed {STEP_CAP}"
        raise ConvergenceError(msg)

    def _carried_on(self, goal_c: float) -> State:
        """Carry the last two states on to a temperature, to start Newton's method.

        A molality follows the depression of the freezing point about as a power of it.
        """
        now, before = self.state, self.before
        if before is None or not self.active:
            return now
        at = [-t for t in (before.temperature_c, now.temperature_c, goal_c)]
        if min(at) <= 0.0 or at[0] == at[1]:
            return now
        share = float(np.log(at[2] / at[1]) / np.log(at[1] / at[0]))
        if abs(share) > _FARTHEST_CARRIED:
            return now
        return replace(
            now,
            ln_m=now.ln_m + share * (now.ln_m - before.ln_m),
            ln_w=now.ln_w + share * (now.ln_w - before.ln_w),
            amounts=now.amounts + share * (now.amounts - before.amounts),
        )

    def violated(self, state: State) -> list[int]:
        """Return phases that are saturated but absent, or present below zero."""
        excess = saturation(self.net, state)
        return [
            p
            for p in range(len(self.net.phases))
            if p not in self.banned
            and (
                state.amounts[p] < -_AMOUNT_ZERO
                if p in self.active
                else excess[p] > _SATURATION_ZERO
            )
        ]

    def _next_event(self, violated: list[int], trial: State) -> None:
        """Find the first of the violations and change the set of phases there."""
        direction = np.sign(trial.temperature_c - self.state.temperature_c)
        found = [(self._locate(p, trial), p) for p in violated]
        at, phase = min(found, key=lambda pair: direction * pair[0].temperature_c)
        self._watch(at)
        name = self.net.phases[phase]
        if phase in self.active:
            self.active = [p for p in self.active if p != phase]
            label = "last ice" if phase == ICE else "dissolved"
            self._note(at, label, name)
            self.state = at
            return
        label = "first ice" if phase == ICE else "onset"
        self._note(at, label, name)
        self.active = [*self.active, phase]
        self.state = at
        self._check_invariant()

    def _locate(self, phase: int, trial: State) -> State:
        """Return the state at which a phase is just saturated and absent."""
        others = [p for p in self.active if p != phase]
        low = min(trial.temperature_c, self.state.temperature_c) - 1e-6
        high = max(trial.temperature_c, self.state.temperature_c) + 1e-6
        for guess in (trial, self.state):
            amounts = guess.amounts.copy()
            amounts[phase] = 0.0
            try:
                at = solve_onset(
                    self.net, replace(guess, amounts=amounts), others, phase
                )
            except ConvergenceError:
                continue
            if low <= at.temperature_c <= high:
                return at
        return self._bisect(phase, trial)

    def _bisect(self, phase: int, trial: State) -> State:
        good, bad = self.state, trial.temperature_c
        for _ in range(BISECTION_CAP):
            middle = 0.5 * (good.temperature_c + bad)
            state = solve_state(self.net, good, self.active, middle)
            if phase in self.violated(state):
                bad = middle
            else:
                good = state
            if abs(good.temperature_c - bad) < 1e-9:
                break
        amounts = good.amounts.copy()
        amounts[phase] = 0.0
        return replace(good, amounts=amounts)

    def note_watched_at_start(self) -> None:
        """Note watched solids that are saturated before anything is cooled."""
        if self.net.watched:
            excess = watched_saturation(self.net, self.state)
            for solid, value in zip(self.net.watched, excess, strict=True):
                if value > 0.0:
                    self._note(self.state, "supersaturated", solid.id)

    def _watch(self, trial: State) -> None:
        """Note where a watched solid passes saturation between two states."""
        if not self.net.watched:
            return
        before = watched_saturation(self.net, self.state)
        after = watched_saturation(self.net, trial)
        crossed = [i for i in range(len(before)) if before[i] <= 0.0 < after[i]]
        found = []
        for i in crossed:
            try:
                at = solve_onset(self.net, trial, self.active, -1 - i)
            except ConvergenceError:
                at = trial
            found.append((at, self.net.watched[i].id))
        for at, name in sorted(found, key=lambda pair: -pair[0].temperature_c):
            self._note(at, "supersaturated", name)

    def _check_invariant(self) -> None:
        """Let the liquid, or a phase, be used up where the phases can hold it all."""
        net = self.net
        liquid = np.exp(self.state.ln_w)
        content = liquid * (net.counts @ np.exp(self.state.ln_m))
        bulk = np.append(content, liquid / WATER_MOLAR_MASS_KG_MOL)
        scale = np.where(bulk > 0.0, bulk, 1.0)
        matrix = np.vstack(
            [net.phase_counts[self.active].T, net.phase_waters[self.active]]
        )
        share, *_ = np.linalg.lstsq(
            matrix / scale[:, np.newaxis], bulk / scale, rcond=None
        )
        miss = np.max(np.abs(matrix @ share - bulk) / scale)
        if miss > _EXACT:
            return
        now = self.state.amounts[self.active]
        with np.errstate(divide="ignore", invalid="ignore"):
            lasts = np.where(share < 0.0, now / -share, np.inf)
        first = int(np.argmin(lasts))
        used = min(float(lasts[first]), 1.0)
        amounts = self.state.amounts.copy()
        if liquid * (1.0 - used) < SMALLEST_LIQUID_KG:
            amounts[self.active] = np.maximum(now + share, 0.0)
            self._note(self.state, "eutectic", "")
            self._vanish(self.state, amounts)
            return
        amounts[self.active] += used * share
        lost = self.active[first]
        amounts[lost] = 0.0
        self.active = [p for p in self.active if p != lost]
        self.state = replace(
            self.state, ln_w=float(np.log(liquid * (1.0 - used))), amounts=amounts
        )
        self._note(self.state, "dissolved", net.phases[lost])

    def _vanish(self, state: State, amounts: Array) -> None:
        self._note(state, "no liquid", "")
        self.gone_at_c = state.temperature_c
        self.state = replace(state, amounts=amounts)

    def _note(self, at: State, event: str, phase: str) -> None:
        solid = "" if phase == "ice" else phase
        self.events.append(FreezingEvent(at.temperature_c, event, at.ph, solid))
