"""Nested data as rows of path and value, for CSV and for settings."""

from __future__ import annotations

from typing import Any


def leaves(data: Any, path: str = "") -> list[tuple[str, Any]]:
    """Return every scalar of nested data with its path, ``states[0].ph``.

    Examples
    --------
    >>> leaves({"a": [1, {"b": None}], "c": []})
    [('a[0]', 1), ('a[1].b', None), ('c', None)]
    """
    if isinstance(data, dict) and data:
        return [
            leaf
            for key, value in data.items()
            for leaf in leaves(value, f"{path}.{key}" if path else str(key))
        ]
    if isinstance(data, list) and data:
        return [
            leaf
            for place, value in enumerate(data)
            for leaf in leaves(value, f"{path}[{place}]")
        ]
    return [(path, None if isinstance(data, dict | list) else data)]
