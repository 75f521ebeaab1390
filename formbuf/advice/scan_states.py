"""pH, ionic strength and capacity of chosen systems over a grid, many states at once.

A recipe (system, target pH, concentration) is made in the product of the brief at its
measurement temperature, then solved at every temperature and under every load. All
recipes of a chunk go through the solver together.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.case import Case
from formbuf.advice.scan_grid import Axis, Grid
from formbuf.chemistry import equilibrium
from formbuf.chemistry.capacity import capacity_mol_kg_ph
from formbuf.errors import InputError
from formbuf.library.records import System
from formbuf.product.composition import Mixture
from formbuf.product.recipe import make

Array = NDArray[np.float64]
#: Columns of one length by name.
Chunk = dict[str, Array | list[str]]

#: Axes of a recipe and of a state, in the order in which they run.
RECIPE_KEYS = ("target_ph", "concentration_mmol_l")
STATE_KEYS = ("temperature_c", "load_mmol_l")
DEFAULT_CONCENTRATION_MMOL_L = 10.0
#: States solved together; more recipes than this are never held.
CHUNK = 16384
MOST_STATES = 200_000
COLUMNS = (
    "system",
    *RECIPE_KEYS,
    *STATE_KEYS,
    "ph",
    "ionic_strength_mol_kg",
    "capacity_mmol_l_ph",
)


@dataclass(frozen=True)
class StateScan:
    """A scan of states.

    Attributes
    ----------
    case : Case
        The product in which the recipes are made.
    systems : tuple of System
    axes : mapping of key to tuple of float
        All four, in the order of ``RECIPE_KEYS`` and ``STATE_KEYS``.
    """

    case: Case
    systems: tuple[System, ...]
    axes: dict[str, tuple[float, ...]]

    @property
    def size(self) -> int:
        """Number of states."""
        return len(self.systems) * math.prod(len(v) for v in self.axes.values())

    def chunks(self, start: int = 0) -> Iterator[tuple[int, Chunk]]:
        """Yield (first state, columns) from a state on.

        Columns are arrays or lists of one length by the names of ``COLUMNS``; a recipe
        that cannot be made has NaN.
        """
        states = math.prod(len(self.axes[key]) for key in STATE_KEYS)
        recipes = self.size // states // len(self.systems)
        step = max(CHUNK // states, 1)
        for position, system in enumerate(self.systems):
            for first in range(0, recipes, step):
                numbers = np.arange(first, min(first + step, recipes))
                begin = (position * recipes + first) * states
                end = begin + numbers.size * states
                if end <= start:
                    continue
                skip = max(start - begin, 0)
                yield begin + skip, self._chunk(system, numbers, skip)

    def _chunk(self, system: System, numbers: NDArray[np.intp], skip: int) -> Chunk:
        targets, amounts = (np.asarray(self.axes[key]) for key in RECIPE_KEYS)
        target = targets[numbers // amounts.size]
        amount = amounts[numbers % amounts.size]
        t, load = (np.asarray(self.axes[key]) for key in STATE_KEYS)
        shape = (numbers.size, t.size, load.size)
        found = _solved(self.case, system, target, amount, t, load)
        values: dict[str, Array] = {
            "target_ph": target[:, None, None],
            "concentration_mmol_l": amount[:, None, None],
            "temperature_c": t[None, :, None],
            "load_mmol_l": load[None, None, :],
            "ph": found[0],
            "ionic_strength_mol_kg": found[1],
            "capacity_mmol_l_ph": found[2],
        }
        columns: Chunk = {
            key: np.broadcast_to(value, shape).reshape(-1)[skip:]
            for key, value in values.items()
        }
        count = math.prod(shape) - skip
        return {"system": [system.id] * count, **columns}


def state_scan(case: Case, systems: Sequence[System], grid: Grid | None) -> StateScan:
    """Return a scan of states; axes that are not given have one value.

    Raises
    ------
    InputError
        For an axis or a value that states do not have.
    """
    axes = {axis.key: axis for axis in (grid.axes if grid else ())}
    known = (*RECIPE_KEYS, *STATE_KEYS)
    for key in axes:
        if key not in known:
            msg = f"--over: {key} with --system, allowed {', '.join(known)}"
            raise InputError(msg)
    brief = case.brief
    usual = {
        "target_ph": brief.ph.target,
        "concentration_mmol_l": DEFAULT_CONCENTRATION_MMOL_L,
        "temperature_c": brief.ph.measure_temperature_c,
        "load_mmol_l": 0.0,
    }
    values = {key: _numbers(axes.get(key), usual[key]) for key in known}
    if not systems or any(not s.species for s in systems):
        msg = "--system: a scan of states needs systems that buffer"
        raise InputError(msg)
    if min(values["concentration_mmol_l"]) <= 0.0:
        msg = "--over: concentration_mmol_l must be above 0"
        raise InputError(msg)
    states = math.prod(len(values[key]) for key in STATE_KEYS)
    if states > MOST_STATES:
        msg = f"{states} temperatures and loads of one recipe, allowed {MOST_STATES}"
        raise InputError(msg)
    return StateScan(case, tuple(systems), values)


def _numbers(axis: Axis | None, usual: float) -> tuple[float, ...]:
    if axis is None:
        return (usual,)
    for value in axis.values:
        if isinstance(value, bool) or not isinstance(value, float):
            msg = f"--over: {axis.key} of {value!r}, allowed numbers"
            raise InputError(msg)
    return tuple(float(value) for value in axis.values)


def _solved(
    case: Case, system: System, target: Array, amount: Array, t: Array, load: Array
) -> tuple[Array, Array, Array]:
    """pH, ionic strength and capacity, shape (recipes, temperatures, loads)."""
    try:
        mixed = make(
            case.library,
            system,
            amount,
            target,
            case.brief.ph.measure_temperature_c,
            case.background,
            case.law,
        ).mixture
    except InputError:
        if target.size == 1:
            nothing = np.full((1, t.size, load.size), np.nan)
            return nothing, nothing, nothing
        half = target.size // 2
        parts = [
            _solved(case, system, target[one], amount[one], t, load)
            for one in (slice(None, half), slice(half, None))
        ]
        ph, ionic, capacity = (
            np.concatenate([part[k] for part in parts]) for k in range(3)
        )
        return ph, ionic, capacity
    columns = [_at(mixed, float(one), load) for one in t]
    ph, ionic, capacity = (
        np.stack([column[k] for column in columns], axis=1) for k in range(3)
    )
    return ph, ionic, capacity


def _at(
    mixed: Mixture, temperature_c: float, load: Array
) -> tuple[Array, Array, Array]:
    """Solve every recipe under every load at one temperature."""
    water = np.asarray(mixed.water_kg_l)[:, None]
    added = load[None, :] / 1000.0 / water
    solution = equilibrium.solve(
        mixed.ladders,
        mixed.totals_mol_kg[:, None, :],
        mixed.strong_charge_mol_kg[:, None] + added,
        mixed.strong_charge2_mol_kg[:, None] + np.abs(added),
        temperature_c,
        open_components=mixed.open_components,
    )
    capacity = 1000.0 * capacity_mol_kg_ph(solution) * water
    return solution.ph, solution.ionic_strength_mol_kg, capacity
