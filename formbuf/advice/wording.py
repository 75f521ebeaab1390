"""Numbers in the sentences of findings and screens: three digits, no exponents."""

from __future__ import annotations

import math

#: Beyond these sizes a number is written with an exponent after all.
SMALLEST_PLAIN, LARGEST_PLAIN = 1e-3, 1e6
#: A share in percent below which its size tells nothing.
SMALLEST_PERCENT = 0.01


def plain(value: float, digits: int = 3) -> str:
    """Write a number as a person would, with so many significant digits.

    Parameters
    ----------
    value : float
    digits : int

    Examples
    --------
    >>> plain(1000.0), plain(66.46), plain(3184.2), plain(0.25)
    ('1000', '66.5', '3180', '0.25')
    """
    if value == 0.0 or not math.isfinite(value):
        return f"{value:g}"
    rounded = float(f"{value:.{digits - 1}e}")
    if SMALLEST_PLAIN <= abs(rounded) < LARGEST_PLAIN:
        return f"{rounded:.15g}"
    return f"{rounded:.{digits}g}"


def percent(share: float) -> str:
    """Write a share as a percentage; what is next to nothing is not spelt out.

    Examples
    --------
    >>> percent(0.074), percent(1.0), percent(5e-11)
    ('7.4 %', '100 %', 'less than 0.01 %')
    """
    value = 100.0 * share
    if abs(value) < SMALLEST_PERCENT:
        return "0 %" if value == 0.0 else f"less than {SMALLEST_PERCENT:g} %"
    return f"{plain(value)} %"


def bare_standing(carried_share: float | None) -> str:
    """Say of a product without buffer that is no choice by itself what it lacks."""
    return "open" if carried_share is None else "not enough by itself"
