"""Numbers as text for people: fixed digits, no exponents where none are needed."""

from __future__ import annotations

import math

#: What stands where there is no value.
ABSENT = "-"
#: Beyond these sizes a number is written with an exponent.
SMALLEST_PLAIN, LARGEST_PLAIN = 1e-4, 1e6


def decimals(value: float | None, count: int, *, sign: bool = False) -> str:
    """Write a number with a fixed count of decimals; ``-`` where there is none.

    Parameters
    ----------
    value : float or None
    count : int
        Decimals.
    sign : bool
        Whether a positive number bears its sign.

    Examples
    --------
    >>> decimals(6.0, 2), decimals(-0.0001, 2, sign=True), decimals(None, 1)
    ('6.00', '0.00', '-')
    """
    if value is None or not math.isfinite(value):
        return ABSENT
    text = f"{value:+.{count}f}" if sign else f"{value:.{count}f}"
    return text[1:] if text[0] in "+-" and not text.strip("+-0.") else text


def significant(value: float | None, digits: int = 3) -> str:
    """Write a number with a fixed count of significant digits.

    Examples
    --------
    >>> significant(5.0), significant(24.6789), significant(0.00123), significant(1500)
    ('5.00', '24.7', '0.00123', '1500')
    """
    if value is None or not math.isfinite(value):
        return ABSENT
    if value == 0.0:
        return "0"
    rounded = float(f"{value:.{digits - 1}e}")
    if not SMALLEST_PLAIN <= abs(rounded) < LARGEST_PLAIN:
        return f"{rounded:.{digits - 1}e}"
    before = math.floor(math.log10(abs(rounded))) + 1
    return f"{rounded:.{max(digits - before, 0)}f}"


def plainly(value: object) -> str:
    """Write any scalar as a person would: 5, 0.2, yes, sucrose.

    Examples
    --------
    >>> plainly(5.0), plainly(True), plainly(None), plainly(0.20000000000000001)
    ('5', 'yes', '-', '0.2')
    """
    if value is None or value == "":
        return ABSENT
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return f"{value:.6g}"
    if isinstance(value, list | tuple | set | frozenset):
        return ", ".join(plainly(item) for item in value) or ABSENT
    return str(value)


def counted(count: int, one: str, many: str = "") -> str:
    """Write a count with its noun in the right number.

    Examples
    --------
    >>> counted(1, "row"), counted(0, "row"), counted(2, "known miss", "known misses")
    ('1 row', '0 rows', '2 known misses')
    """
    return f"{count} {one if count == 1 else many or one + 's'}"
