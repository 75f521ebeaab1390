"""Wording that the messages of several commands share."""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from formbuf.errors import UsageError


def listed(names: Sequence[str]) -> str:
    """Return names as in a sentence: a, b and c."""
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"


def check_needed(given: Mapping[str, object], hint: str) -> None:
    """Refuse a quick form that lacks an option it needs.

    Parameters
    ----------
    given : mapping of str to object
        The options needed; None or empty where not given.
    hint : str
        What to give.

    Raises
    ------
    UsageError
        With every option that is not given.
    """
    absent = [name for name, value in given.items() if value is None or value == ()]
    if absent:
        verb = "is" if len(absent) == 1 else "are"
        msg = f"no brief, and {listed(absent)} {verb} not given"
        raise UsageError(msg, hint=hint)
