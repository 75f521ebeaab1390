"""What a user may change in a settings file: values of the same kind, under our keys."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import Any

from formbuf.errors import nearest


def setting_faults(
    ours: Mapping[str, Any], theirs: Mapping[str, Any], path: str = ""
) -> Iterator[str]:
    """Yield ``key: what, allowed`` for each setting of the user that fits none of ours.

    Parameters
    ----------
    ours, theirs : mapping
        As read from TOML.
    path : str
        Keys above, joined by dots.
    """
    for name, value in theirs.items():
        key = f"{path}.{name}" if path else name
        if name not in ours:
            near = nearest(name, ours) or list(ours)
            yield f"{key}: unknown setting, allowed {', '.join(near[:20])}"
            continue
        kept = ours[name]
        if isinstance(kept, Mapping):
            if isinstance(value, Mapping):
                yield from setting_faults(kept, value, key)
            else:
                yield f"{key}: {_kind(value)}, allowed a table"
        else:
            fault = _value_fault(kept, value)
            if fault:
                yield f"{key}: {fault}"


def _value_fault(kept: Any, value: Any) -> str:
    """Return what is wrong with one value beside ours; empty where nothing is."""
    if _kind(kept) != _kind(value):
        return f"{_kind(value)}, allowed {_kind(kept)}"
    if isinstance(value, list):
        faults = (_value_fault(kept[0], item) for item in value)
        if not value and kept:
            return "an empty list, allowed at least one entry"
        return next((fault for fault in faults if fault), "") if kept else ""
    if not _is_number(value):
        return ""
    if not math.isfinite(value) or abs(value) > 1e12:
        return f"{value} is out of range, allowed a finite number"
    if kept * value < 0 or (kept and not value):
        return f"{value:g}, allowed a number {'above' if kept > 0 else 'below'} 0"
    return ""


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _kind(value: Any) -> str:
    if _is_number(value):
        return "a number"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, bool):
        return "true or false"
    return "a list" if isinstance(value, list) else "a text"
