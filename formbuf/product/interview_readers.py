"""Turn what a person types into values of a brief; what does not fit is told plainly."""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from typing import Any, TypeAlias

from formbuf.errors import InputError, nearest
from formbuf.product.vocabulary import MEANT

Value: TypeAlias = Any
Reader: TypeAlias = Callable[[str], Value]

YES_NO: Mapping[str, bool] = {
    "yes": True,
    "y": True,
    "true": True,
    "no": False,
    "n": False,
    "false": False,
}
#: How people say that none of a list applies.
NOTHING = frozenset({"none", "no", "nothing", "no one", "0"})
#: Units of an excipient as people write them, and the key of the brief.
AMOUNT_UNITS: Mapping[str, str] = {
    "mmol/l": "mmol_l",
    "mm": "mmol_l",
    "mg/ml": "mg_ml",
    "g/l": "g_l",
    "%": "percent_w_v",
    "%w/v": "percent_w_v",
    "percent": "percent_w_v",
}
#: A dash between two numbers, as in 2-8; before a number alone it is a sign.
_RANGE = re.compile(r"(?<=\d)(?:[-\u2013]|\s[-\u2013]\s)(?=\d)|\.\.")
_NUMBER = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)")
_WITH_UNIT = re.compile(
    r"(?P<number>[+-]?(?:\d+(?:\.\d*)?|\.\d+))\s*(?P<unit>[^\d\s.,+-].*)"
)
_EXCIPIENT = re.compile(r"(?P<name>.+?)[\s=]+(?P<amount>[\d.]+)\s*(?P<unit>[^\d.]+)")
_PKA = re.compile(r"(?P<kind>acid|base)\s*[:=]?\s*(?P<pka>[+-]?[\d.]+)", re.IGNORECASE)


def fault(what: str, allowed: str, hint: str = "") -> InputError:
    """Return the error of an answer that does not fit."""
    return InputError(f"{what}; allowed: {allowed}", hint=hint)


def _no_number(text: str, allowed: str) -> InputError:
    hint = "Decimals have a point: 6.5, not 6,5." if "," in text else ""
    return fault(f"{text!r} is no number", allowed, hint)


def number(text: str) -> float:
    """Return a plain decimal number."""
    bare = text.strip()
    if not _NUMBER.fullmatch(bare):
        raise _no_number(bare, "a number alone, such as 6.5")
    return float(bare)


def number_in(unit: str) -> Reader:
    """Return a reader of a number, alone or with this very unit behind it."""

    def read(text: str) -> float:
        match = _WITH_UNIT.fullmatch(text.strip())
        if match is None:
            return number(text)
        if match["unit"].casefold() != unit.casefold():
            msg = f"{text.strip()!r} is not in {unit}"
            raise fault(msg, f"a number in {unit}, such as 6.5")
        return float(match["number"])

    return read


def whole(text: str) -> int:
    """Return a whole number."""
    value = number(text)
    if value != int(value):
        raise fault(f"{text.strip()!r} is not whole", "a whole number")
    return int(value)


def yes_no(text: str) -> bool:
    """Return yes or no."""
    found = YES_NO.get(text.strip().casefold())
    if found is None:
        raise fault(f"{text.strip()!r} is neither yes nor no", "yes, no")
    return found


def plain(text: str) -> str:
    """Return a text on one line."""
    return " ".join(text.split())


def one_of(choices: Sequence[str]) -> Reader:
    """Return a reader of one name out of a list, or of its number in the list."""

    def read(text: str) -> str:
        return _choice(text, choices)

    return read


def some_of(choices: Sequence[str]) -> Reader:
    """Return a reader of several names out of a list, or ``none``."""

    def read(text: str) -> list[str]:
        if text.strip().casefold() in NOTHING:
            return ["none"]
        parts = [part for part in re.split(r"[,;]", text) if part.strip()]
        return list(dict.fromkeys(_choice(part, choices) for part in parts))

    return read


def _choice(text: str, choices: Sequence[str]) -> str:
    name = "_".join(text.strip().casefold().replace("-", " ").split())
    if name.isdecimal() and 1 <= int(name[:4]) <= len(choices):
        return choices[int(name[:4]) - 1]
    if name in choices:
        return name
    meant = MEANT.get(name, "")
    if meant in choices:
        return meant
    begun = [choice for choice in choices if name and choice.startswith(name)]
    if len(begun) == 1:
        return begun[0]
    near = begun or nearest(name, choices, 2)
    hint = f"Did you mean {' or '.join(near)}?" if near else ""
    allowed = f"a name of the list or its number, 1 to {len(choices)}"
    raise fault(f"{text.strip()!r} is not in the list", allowed, hint)


def numbers(text: str) -> list[float]:
    """Return numbers separated by blanks or semicolons, each once; 2-8 is two."""
    parts = re.split(r"[;\s]+|,\s+", _RANGE.sub(" ", text.strip()))
    kept = [
        part for part in parts if part and part.casefold() not in ("c", "and", "to")
    ]
    allowed = "numbers separated by blanks, as 5 25, or a range, as 2-8"
    if not kept:
        raise fault("there is no number", allowed)
    for part in kept:
        if not _NUMBER.fullmatch(part):
            raise _no_number(part, allowed)
    return list(dict.fromkeys(number(part) for part in kept))


def pair(text: str) -> tuple[float, float]:
    """Return a lower and an upper number."""
    found = numbers(text)
    if len(found) != 2 or found[0] >= found[1]:
        raise fault(f"{text.strip()!r} is no window", "two numbers, the lower first")
    return found[0], found[1]


def names(text: str) -> list[str]:
    """Return names separated by blanks or commas."""
    return list(dict.fromkeys(re.split(r"[,;\s]+", text.strip().casefold())))


def excipients(text: str) -> list[dict[str, Any]]:
    """Return materials with amounts, such as ``sucrose 8 %; methionine 10 mmol/L``."""
    found = []
    for part in re.split(r";|,(?!\d)", text):
        if not part.strip():
            continue
        match = _EXCIPIENT.fullmatch(part.strip())
        unit = "".join(match["unit"].casefold().split()) if match else ""
        if match is None or unit not in AMOUNT_UNITS:
            raise fault(
                f"{part.strip()!r} is no material with an amount",
                "name amount unit, as sucrose 8 %; units mmol/L, mg/mL, g/L, %",
            )
        name = match["name"].strip()
        found.append({"material": name, AMOUNT_UNITS[unit]: number(match["amount"])})
    if not found:
        raise fault("there is no material", "for example sucrose 8 %")
    return found


def pka_steps(text: str) -> list[dict[str, float]]:
    """Return the ladder of a molecule from its groups, as ``acid 4.3, base 9.1``.

    Each base carries a charge when protonated, each acid when not; the charge of the
    whole molecule follows from the order of the pK.
    """
    parts = [part for part in re.split(r"[,;]|\band\b", text) if part.strip()]
    groups = []
    for part in parts:
        match = _PKA.fullmatch(part.strip())
        if match is None:
            raise fault(
                f"{part.strip()!r} is no pK", "acid or base and a number: acid 4.3"
            )
        groups.append((number(match["pka"]), match["kind"].casefold()))
    if not groups:
        raise fault("there is no pK", "for example acid 4.3, base 9.1")
    top = sum(kind == "base" for _, kind in groups)
    return [
        {"pka": pka, "acid_charge": top - place}
        for place, (pka, _) in enumerate(sorted(groups))
    ]
