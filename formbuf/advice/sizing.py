"""How much buffer the loads ask for.

The required concentration is the smallest at which the buffer's own species carry
the acid load from the lowest release pH, and the base load from the highest, without
leaving the window at the measurement temperature and, at every liquid storage
temperature, without moving further from the unloaded pH than the window allows. What
water, drug and excipients carry is credited to the product without buffer.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.criteria_table import Settings
from formbuf.advice.loads import LoadBudget
from formbuf.advice.surroundings import Surroundings, made_in
from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.osmolality import OsmoticLaw
from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.composition import Mixture
from formbuf.product.product_brief import ProductBrief

Array = NDArray[np.float64]

GRID_POINTS = 10


@dataclass(frozen=True, slots=True)
class Sizing:
    """What a system must be to carry the loads.

    Attributes
    ----------
    required_mmol_l : float or None
        None where even the largest concentration considered does not carry them.
    limiting_load : str
        ``acid``, ``base`` or ``none`` (no load).
    limiting_temperature_c : float
        Temperature at which it is tightest.
    carried : ndarray, shape (grid,)
        Smallest ratio of what is carried to the load, by concentration.
    grid_mmol_l : ndarray, shape (grid,)
    """

    required_mmol_l: float | None
    limiting_load: str
    limiting_temperature_c: float
    carried: Array
    grid_mmol_l: Array

    def carried_at(self, concentration_mmol_l: float) -> float:
        """Share of the loads that a concentration carries (above 1: more than all)."""
        if not np.all(np.isfinite(self.carried)):
            return float("inf")
        logs = np.interp(
            np.log(concentration_mmol_l),
            np.log(self.grid_mmol_l),
            np.log(np.maximum(self.carried, 1e-12)),
        )
        inside = concentration_mmol_l >= self.grid_mmol_l[0]
        scale = 1.0 if inside else concentration_mmol_l / self.grid_mmol_l[0]
        return float(np.exp(logs) * scale)


@dataclass(frozen=True, slots=True)
class Windows:
    """Room on either side of the release pH, and the temperatures that count."""

    start_low: float
    start_high: float
    room_low: float
    room_high: float
    measure_c: float
    others_c: tuple[float, ...]


def windows_of(brief: ProductBrief, made_to_ph: float | None = None) -> Windows:
    """Return release extremes, room and liquid temperatures of a brief.

    ``made_to_ph`` is the pH of a formula that is what it is; the target if absent.
    """
    ph = brief.ph
    centre = ph.target if made_to_ph is None else made_to_ph
    low, high = centre - ph.release_tolerance, centre + ph.release_tolerance
    others = tuple(
        t
        for t in brief.liquid_storage_temperatures_c
        if abs(t - ph.measure_temperature_c) > 1e-9
    )
    return Windows(
        low, high, low - ph.low, ph.high - high, ph.measure_temperature_c, others
    )


def size(
    library: Library,
    system: System,
    brief: ProductBrief,
    loads: LoadBudget,
    surroundings: Surroundings,
    law: OsmoticLaw,
    settings: Settings,
) -> Sizing:
    """Size one system.

    Parameters
    ----------
    library : Library
    system : System
    brief : ProductBrief
    loads : LoadBudget
    surroundings : Surroundings
        See ``surroundings_of``.
    law : OsmoticLaw
    settings : Settings

    Returns
    -------
    Sizing
    """
    most = settings.number("sizing", "largest_considered_mmol_l")
    grid = np.geomspace(0.3, most, GRID_POINTS)
    windows = windows_of(brief)
    if not loads.has_load:
        everything = np.full(grid.shape, np.inf)
        return Sizing(0.0, "none", windows.measure_c, everything, grid)
    starts = np.array([windows.start_low, windows.start_high])
    recipe, measured = made_in(
        library,
        system,
        np.broadcast_to(grid[:, np.newaxis], (grid.size, 2)),
        np.broadcast_to(starts, (grid.size, 2)),
        windows.measure_c,
        surroundings,
        law,
    )
    own = [recipe.mixture.index(name) for name in system.species]
    own = [index for index in own if index >= 0]
    best = np.full(grid.shape, np.inf)
    where = np.full(grid.shape, windows.measure_c)
    which = np.full(grid.shape, "acid")
    for t in (windows.measure_c, *windows.others_c):
        start = measured if t == windows.measure_c else recipe.mixture.solve(t)
        low, high = _limits(start, t, windows)
        acid, base = _own_capacity(recipe.mixture, start, own, t, low, high)
        for label, carried, load in (
            ("acid", acid, loads.acid_mmol_l + loads.more_acid_mmol_l(low, t)),
            ("base", base, np.full(grid.shape, loads.base_mmol_l)),
        ):
            if not np.any(load > 0.0):
                continue
            ratio = carried / load
            tighter = ratio < best
            best = np.where(tighter, ratio, best)
            where = np.where(tighter, t, where)
            which = np.where(tighter, label, which)
    required, index = _crossing(grid, best)
    return Sizing(required, str(which[index]), float(where[index]), best, grid)


def carried_by(
    mixture: Mixture, species: tuple[str, ...], windows: Windows, loads: LoadBudget
) -> tuple[float, str, float]:
    """Share of the loads that the own species of a finished product carry.

    Parameters
    ----------
    mixture : Mixture
        A single state.
    species : tuple of str
        The buffer's own.
    windows : Windows
        Around the pH it has; see ``windows_of``.
    loads : LoadBudget

    Returns
    -------
    (share, load, temperature_c)
        The smallest share, negative where the pH lies beyond its window already, with
        the load and the temperature that set it; infinite without loads.
    """
    own = [k for k in map(mixture.index, species) if k >= 0]
    water = 1000.0 * float(mixture.water_kg_l)
    measured = float(mixture.solve(windows.measure_c).ph)
    tightest = (float("inf"), "none", windows.measure_c)
    for t in (windows.measure_c, *windows.others_c):
        move = float(mixture.solve(t).ph) - measured
        for label, load, titrant, start, way in (
            ("acid", loads.acid_mmol_l, STRONG_ACID, windows.start_low, -1.0),
            ("base", loads.base_mmol_l, STRONG_BASE, windows.start_high, 1.0),
        ):
            if load <= 0.0:
                continue
            room = windows.room_low if way < 0.0 else windows.room_high
            at = np.array([start, start + way * room]) + move
            if way < 0.0:
                load = load + float(loads.more_acid_mmol_l(at[1], t))
            held = mixture.titrate(t, at, titrant).charge_mol_kg[..., own].sum(axis=-1)
            share = -way * float(held[1] - held[0]) * water / load
            tightest = min(tightest, (share, label, t), key=lambda entry: entry[0])
    return tightest


def _limits(
    start: Solution, temperature_c: float, windows: Windows
) -> tuple[Array, Array]:
    """Limits of pH by concentration: the window, moved by the drift elsewhere."""
    if temperature_c == windows.measure_c:
        low = np.full(start.ph.shape[0], windows.start_low - windows.room_low)
        high = np.full(start.ph.shape[0], windows.start_high + windows.room_high)
    else:
        low = start.ph[:, 0] - windows.room_low
        high = start.ph[:, 1] + windows.room_high
    return low, high


def _own_capacity(
    mixture: Mixture,
    start: Solution,
    own: list[int],
    temperature_c: float,
    low: Array,
    high: Array,
) -> tuple[Array, Array]:
    """Acid and base [mmol/L] that the own species carry down to and up to a pH."""
    acid = mixture.titrate(
        temperature_c, np.stack([low, low], axis=-1), STRONG_ACID
    ).charge_mol_kg
    base = mixture.titrate(
        temperature_c, np.stack([high, high], axis=-1), STRONG_BASE
    ).charge_mol_kg
    before = start.charge_mol_kg[..., own].sum(axis=-1)
    after_acid = acid[..., own].sum(axis=-1)
    after_base = base[..., own].sum(axis=-1)
    water = 1000.0 * np.asarray(mixture.water_kg_l)
    return (
        ((after_acid - before) * water)[:, 0],
        ((before - after_base) * water)[:, 1],
    )


def _crossing(grid: Array, carried: Array) -> tuple[float | None, int]:
    """Return the concentration at which the ratio reaches one (log-log)."""
    rising = np.maximum.accumulate(np.maximum(carried, 1e-12))
    if rising[-1] < 1.0:
        return None, grid.size - 1
    index = int(np.argmax(rising >= 1.0))
    if index == 0:
        return float(grid[0] / rising[0]), 0
    x = np.log(rising[index - 1 : index + 1])
    y = np.log(grid[index - 1 : index + 1])
    share = -x[0] / (x[1] - x[0])
    return float(np.exp(y[0] + share * (y[1] - y[0]))), index


def proposed_mmol_l(
    required_mmol_l: float,
    ceiling_mmol_l: float,
    settings: Settings,
    *,
    large_volume: bool,
) -> float:
    """Round a requirement up to a figure that is weighed, within the ceiling.

    Parameters
    ----------
    required_mmol_l : float
        Required concentration [mmol/L].
    ceiling_mmol_l : float
        Ceiling of the route [mmol/L].
    settings : Settings
    large_volume : bool
        Whether 100 mL or more is given intravenously: no minimum then.

    Returns
    -------
    float
        Proposed concentration [mmol/L].
    """
    section = settings.table["sizing"]
    least = 0.0 if large_volume else float(section["minimum_mmol_l"])
    wanted = max(required_mmol_l, least)
    steps = [float(step) for step in section["weighable_mmol_l"]]
    rounded = next((s for s in steps if s >= wanted * (1.0 - 1e-6)), steps[-1])
    return min(rounded, ceiling_mmol_l)
