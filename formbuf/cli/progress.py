"""A line on standard error that says how far a long command is."""

from __future__ import annotations

import sys
import time

#: Nothing is shown before this [s], and not more often than that.
SILENT_S, EVERY_S = 1.0, 0.2


class Progress:
    """Shows how far work has come, on a terminal and after a second only.

    Parameters
    ----------
    what : str
        What is counted, in the plural.
    start : int
        What was done before.
    """

    def __init__(self, what: str, start: int = 0) -> None:
        self.what = what
        self.start = start
        self._began = time.monotonic()
        self._last = 0.0
        self._shown = 0
        self._is_on = sys.stderr.isatty()

    def __call__(self, done: int, total: int) -> None:
        """Show that ``done`` of ``total`` are done."""
        now = time.monotonic()
        if not self._is_on or now - self._began < SILENT_S:
            return
        if done < total and now - self._last < EVERY_S:
            return
        self._last = now
        fresh = done - self.start
        left = ""
        if fresh > 0 and done < total:
            seconds = (now - self._began) / fresh * (total - done)
            left = f", {seconds:.0f} s left"
        text = f"{done} of {total} {self.what}{left}"
        sys.stderr.write(f"\r{text:<{self._shown}}")
        sys.stderr.flush()
        self._shown = len(text)

    def close(self) -> None:
        """Remove the line."""
        if self._shown:
            sys.stderr.write(f"\r{' ' * self._shown}\r")
            sys.stderr.flush()
            self._shown = 0
