"""The grid of a scan: axes of values, and the point that each number stands for."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass

from formbuf.errors import InputError

Value = float | str | bool

MOST_VALUES = 100_000
MOST_POINTS = 100_000_000
_FLAGS = {"true": True, "false": False}
FORM = "KEY=START:STOP:STEP or KEY=VALUE,VALUE,..."


@dataclass(frozen=True, slots=True)
class Axis:
    """One thing that is varied.

    Attributes
    ----------
    key : str
        Key of the brief, tables with a dot, or a name of its own.
    values : tuple
        Numbers, texts or yes and no, in order.
    """

    key: str
    values: tuple[Value, ...]


@dataclass(frozen=True, slots=True)
class Grid:
    """All combinations of the axes; the last axis runs fastest."""

    axes: tuple[Axis, ...]

    @property
    def size(self) -> int:
        """Number of points."""
        return math.prod(len(axis.values) for axis in self.axes)

    def point(self, index: int) -> dict[str, Value]:
        """Return the values of a point by key.

        Parameters
        ----------
        index : int
            0 to size - 1.
        """
        found: dict[str, Value] = {}
        for axis in reversed(self.axes):
            index, place = divmod(index, len(axis.values))
            found[axis.key] = axis.values[place]
        return {axis.key: found[axis.key] for axis in self.axes}


def parse_axis(text: str) -> Axis:
    """Read one axis.

    Parameters
    ----------
    text : str
        ``KEY=START:STOP:STEP`` (both ends count) or ``KEY=VALUE,VALUE,...``.

    Returns
    -------
    Axis

    Raises
    ------
    InputError
        When it has another form, or too many values.

    Examples
    --------
    >>> parse_axis("target_ph=5:6:0.5").values
    (5.0, 5.5, 6.0)
    >>> parse_axis("tonicity.agent=sucrose,trehalose").values
    ('sucrose', 'trehalose')
    """
    key, sign, given = text.partition("=")
    key, given = key.strip(), given.strip()
    if not sign or not key or not given:
        msg = f"--over: {text!r}, allowed {FORM}"
        raise InputError(msg)
    values = _stepped(text, given) if ":" in given else _listed(given)
    if len({(type(value), value) for value in values}) < len(values):
        msg = f"--over: {text!r} names a value twice, allowed each once"
        raise InputError(msg)
    return Axis(bracketed(key), values)


def dotted(key: str) -> str:
    """Return a key with the number of a list entry after a dot.

    Examples
    --------
    >>> dotted("storage[1].temperature_c"), dotted("storage.1.temperature_c")
    ('storage.1.temperature_c', 'storage.1.temperature_c')
    """
    return re.sub(r"\[(\d+)\]", r".\1", key)


def bracketed(key: str) -> str:
    """Return a key with the number of a list entry in brackets, as briefs report it.

    Examples
    --------
    >>> bracketed("storage.1.temperature_c"), bracketed("loads.acid_mmol_l")
    ('storage[1].temperature_c', 'loads.acid_mmol_l')
    """
    return re.sub(r"\.(\d+)(?=[.\[]|$)", r"[\1]", key)


def grid_of(axes: Sequence[Axis]) -> Grid:
    """Return the grid of some axes.

    Raises
    ------
    InputError
        Without an axis, with a key twice, or with too many points.
    """
    if not axes:
        msg = f"a scan needs at least one --over, allowed {FORM}"
        raise InputError(msg)
    keys = [axis.key for axis in axes]
    for key in keys:
        if keys.count(key) > 1:
            msg = f"--over: {key} is varied twice, allowed once"
            raise InputError(msg)
    grid = Grid(tuple(axes))
    if grid.size > MOST_POINTS:
        msg = f"the grid has {grid.size} points, allowed {MOST_POINTS}"
        raise InputError(msg, hint="Take wider steps, or several scans.")
    return grid


def _stepped(text: str, given: str) -> tuple[Value, ...]:
    parts = [_number(part) for part in given.split(":")]
    if len(parts) != 3 or any(part is None for part in parts):
        msg = f"--over: {text!r} is no range, allowed {FORM}"
        raise InputError(msg)
    start, stop, step = (float(part) for part in parts if part is not None)
    if step <= 0.0 or stop < start:
        msg = f"--over: {text!r}, allowed a stop from the start on and a step above 0"
        raise InputError(msg)
    count = math.floor((stop - start) / step + 1e-9) + 1
    if count > MOST_VALUES:
        msg = f"--over: {text!r} has {count} values, allowed {MOST_VALUES}"
        raise InputError(msg)
    return tuple(round(start + k * step, 10) for k in range(count))


def _listed(given: str) -> tuple[Value, ...]:
    found: list[Value] = []
    for part in given.split(","):
        word = part.strip()
        number = _number(word)
        if not word:
            msg = f"--over: an empty value in {given!r}, allowed {FORM}"
            raise InputError(msg)
        if word in _FLAGS:
            found.append(_FLAGS[word])
        else:
            found.append(word if number is None else number)
    return tuple(found)


def _number(text: str) -> float | None:
    try:
        value = float(text)
    except ValueError:
        return None
    return value if math.isfinite(value) else None
