"""Numbers in the sentences of findings and screens: three digits, no exponents."""

from __future__ import annotations

import math
import re

#: Beyond these sizes a number is written with an exponent after all.
SMALLEST_PLAIN, LARGEST_PLAIN = 1e-3, 1e6
#: A share in percent below which its size tells nothing.
SMALLEST_PERCENT = 0.01
#: Names of criteria where the key itself would not be said so.
CRITERION_NAMES = {"frozen_drift": "freezing drift"}
#: First words of a sentence that keep their capital within one.
PROPER = ("Donnan", "Maillard", "Michael", "Schiff")


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


def criterion_name(key: str) -> str:
    """Return the name of a criterion as people say it, the report too."""
    return CRITERION_NAMES.get(key, key.replace("_", " "))


def lower_first(text: str) -> str:
    """Write the start of a sentence as within one; names and formulas keep their case.

    Examples
    --------
    >>> lower_first("Rapid oxidation"), lower_first("CO2 escapes"), lower_first("A gel")
    ('rapid oxidation', 'CO2 escapes', 'a gel')
    >>> lower_first("Donnan effect"), lower_first("Fe(III) salts"), lower_first("N-acyl")
    ('Donnan effect', 'Fe(III) salts', 'N-acyl')
    """
    found = re.match(r"(?:[A-Z][a-z]+|A)(?=[ ,;:./-]|$)", text)
    if found is None or found.group() in PROPER:
        return text
    return text[0].lower() + text[1:]


def upper_first(text: str) -> str:
    """Write a phrase as the start of a sentence; pH and pK keep their case.

    Examples
    --------
    >>> upper_first("the liquid"), upper_first("pH falls"), upper_first("pKa is low")
    ('The liquid', 'pH falls', 'pKa is low')
    """
    if text.startswith(("pH", "pK")):
        return text
    return f"{text[:1].upper()}{text[1:]}"


def bare_standing(carried_share: float | None, standing: str = "viable") -> str:
    """Say of a product without an added buffer whether it holds its pH by itself.

    It is no candidate beside the others: it has no place, and is not called a back-up.

    Parameters
    ----------
    carried_share : float or None
        Share of the loads that the product carries without a buffer; None where that
        is not known, or where no load is expected.
    standing : str
        Of the candidate without a buffer, which tells those two apart.

    Examples
    --------
    >>> bare_standing(None), bare_standing(0.4), bare_standing(1.0)
    ('open', 'not enough by itself', 'enough by calculation, to be confirmed by a titration')
    >>> bare_standing(3.0, "lead")
    'enough by its measured titration'
    """
    if standing == "lead":
        return "enough by its measured titration"
    if standing == "not evaluable":
        return "open"
    if carried_share is None:
        return "open" if standing == "viable" else "no load to carry"
    if carried_share >= 1.0:
        return "enough by calculation, to be confirmed by a titration"
    return "not enough by itself"
