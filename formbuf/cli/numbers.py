"""Numbers from the command line, with a message that names option and value."""

from __future__ import annotations

from collections.abc import Sequence

from formbuf.errors import InputError


def number(option: str, text: str | None) -> float | None:
    """Return the number that an option was given; None where it was not.

    Whether it is finite and in range is checked by who uses it.

    Raises
    ------
    InputError
        For a text that is no number.
    """
    if text is None:
        return None
    try:
        return float(text)
    except ValueError:
        raise _no_number(option, text, "a number") from None


def numbers(option: str, texts: Sequence[str] | None) -> tuple[float, ...]:
    """Return the numbers of an option that may be repeated."""
    found = (number(option, text) for text in texts or ())
    return tuple(value for value in found if value is not None)


def whole(option: str, text: str | None) -> int | None:
    """Return the whole number that an option was given; None where it was not."""
    if text is None:
        return None
    try:
        return int(text)
    except ValueError:
        raise _no_number(option, text, "a whole number") from None


def _no_number(option: str, text: str, allowed: str) -> InputError:
    hint = "Decimals have a point: 6.0, not 6,0." if "," in text else ""
    msg = f"{option}: must be {allowed}, value {text!r}"
    return InputError(msg, hint=hint)
