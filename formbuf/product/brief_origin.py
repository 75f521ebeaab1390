"""Where a brief came from: its file and lines, or the options of a command."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

#: Where in a brief something stands: keys and, in lists, positions from zero.
Location = tuple[str | int, ...]


def key_path(location: Location) -> str:
    """Return a location as a dotted path; list positions count from 1.

    Examples
    --------
    >>> key_path(("storage", 1, "temperature_c"))
    'storage[2].temperature_c'
    """
    path = ""
    for part in location:
        if isinstance(part, int):
            path += f"[{part + 1}]"
        else:
            path += f".{part}" if path else part
    return path


@dataclass(frozen=True, slots=True)
class Origin:
    """The place a brief was written in; all origins compare equal.

    Parameters
    ----------
    name : str
        File as the user gave it, or ``"brief"``.
    lines : mapping of location to int
        Line of every key, counted from 1.
    options : mapping of location to str
        Command-line option of every key, for the quick form.
    """

    name: str = field(default="brief", compare=False)
    lines: Mapping[Location, int] = field(default_factory=dict, compare=False)
    options: Mapping[Location, str] = field(default_factory=dict, compare=False)

    def line(self, location: Location) -> int | None:
        """Return the line of a key, or of the nearest table around it."""
        for length in range(len(location), 0, -1):
            found = self.lines.get(location[:length])
            if found is not None:
                return found
        return None

    def where(self, location: Location) -> str:
        """Return ``FILE: key.path (line N)``, or the option that set the key."""
        for length in range(len(location), 0, -1):
            option = self.options.get(location[:length])
            if option is not None:
                return option
        path = key_path(location) or "top of the file"
        line = self.line(location)
        return f"{self.name}: {path}" + (f" (line {line})" if line else "")
