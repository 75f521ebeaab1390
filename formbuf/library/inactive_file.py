"""Read a user's copy of a regulator's list of inactive ingredients.

A comma-separated file with one row per ingredient, route and dosage form. Headings
are compared without regard to case and signs, further columns are left alone. Words
for an amount that is not given (``NA``, ``ADJ PH`` ...) are accepted; anything else
that is no number is told as ``file:line:column``.
"""

from __future__ import annotations

import csv
import hashlib
import io
import re
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

from formbuf.errors import InputError

#: Larger files are refused [bytes].
LARGEST_BYTES = 50_000_000
#: Bad rows that are told before the rest is only counted.
MOST_TOLD = 25
LONGEST_SHOWN = 40

#: Headings under which a column may stand, in small letters with underscores.
HEADINGS: Mapping[str, tuple[str, ...]] = {
    "ingredient": ("ingredient_name", "ingredient", "inactive_ingredient"),
    "route": ("route", "route_of_administration"),
    "form": ("dosage_form", "form"),
    "cas": ("cas_number", "cas", "cas_no"),
    "unii": ("unii", "unii_code"),
    "amount": ("potency_amount", "maximum_potency_amount", "maximum_potency_per_unit"),
    "unit": ("potency_unit", "maximum_potency_unit"),
    "daily": ("maximum_daily_exposure", "maximum_daily_exposure_mde", "mde"),
    "daily_unit": (
        "maximum_daily_exposure_unit",
        "maximum_daily_exposure_unit_mde",
        "mde_unit",
    ),
}
REQUIRED = ("ingredient", "route", "amount", "unit")
#: What stands where no amount is given.
NOT_GIVEN = frozenset({"", "na", "n/a", "none", "adj ph", "adjph", "qs", "-"})
_NUMBER = re.compile(r"\d{1,9}(\.\d{0,12})?|\.\d{1,12}")
_CAS = re.compile(r"0*(\d{2,7})-?(\d{2})-?(\d)")
_PER = re.compile(r"([a-z]+)/(\d{0,6}(?:\.\d{1,6})?)([a-z]+)")
_GRAMS = {"g": 1.0, "gm": 1.0, "mg": 1e-3, "mcg": 1e-6, "ug": 1e-6, "µg": 1e-6}
_LITRES = {"l": 1.0, "ml": 1e-3}
_PERCENT_W_V = ("%w/v", "%", "percent", "%(w/v)", "w/v%")


@dataclass(frozen=True, slots=True)
class Listed:
    """One row of the file.

    Parameters
    ----------
    line : int
    ingredient, route, form, cas, unii : str
        As printed; ``cas`` with its signs and without leading zeros.
    grams_per_litre : float or None
        The highest concentration listed; None where there is none.
    grams_per_day : float or None
        The largest daily exposure listed.
    amount_text : str
        Amount and unit as printed.
    why_unused : str
        Why there is no concentration; empty where there is one.
    """

    line: int
    ingredient: str
    route: str
    form: str
    cas: str
    unii: str
    grams_per_litre: float | None
    grams_per_day: float | None
    amount_text: str
    why_unused: str


@dataclass(frozen=True, slots=True)
class InactiveFile:
    """The rows of the file, its name and its checksum."""

    path: str
    sha256: str
    rows: tuple[Listed, ...]


@dataclass(frozen=True, slots=True)
class PrecedentFile:
    """A user's copy of a regulator's list of inactive ingredients, and what it gave.

    Parameters
    ----------
    path : str
    sha256 : str
    rows : int
        Rows of the file.
    matched : int
        Rows whose CAS number or name is that of a material of ours.
    unmatched : int
    unused : mapping of str to int
        Matched rows that gave no figure, by the reason.
    replaced : int
        Precedents whose ceiling, daily amount or level comes from the file.
    """

    path: str
    sha256: str
    rows: int
    matched: int
    unmatched: int
    unused: Mapping[str, int]
    replaced: int


def read_inactive_file(path: Path) -> InactiveFile:
    """Read the file; every bad row is told at once.

    Parameters
    ----------
    path : Path

    Raises
    ------
    InputError
        If the file cannot be read, lacks a column, or holds a row that fits none; as
        ``file:line:column: what, allowed``.
    """
    data = _bytes(path)
    name = str(path)
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data[: error.start].count(b"\n") + 1
        msg = f"{name}:{line}:row: byte 0x{data[error.start]:02x} is not UTF-8"
        raise InputError(
            msg, hint="Save the file as CSV with UTF-8 as its encoding."
        ) from error
    faults: list[str] = []
    rows = tuple(_rows(text, name, faults))
    if faults:
        told = faults[:MOST_TOLD]
        if len(faults) > MOST_TOLD:
            told.append(f"{name}: and {len(faults) - MOST_TOLD} more rows like these")
        raise InputError("\n".join(told), hint="Mend the rows, or take them out.")
    if not rows:
        msg = f"{name}:1:row: no row follows the header, allowed at least one"
        raise InputError(msg)
    return InactiveFile(name, hashlib.sha256(data).hexdigest(), rows)


def _bytes(path: Path) -> bytes:
    try:
        if not path.is_file():
            what = "is a directory" if path.is_dir() else "no such file"
            msg = f"--precedent: {str(path)!r}: {what}, allowed a CSV file"
            raise InputError(msg)
        if path.stat().st_size > LARGEST_BYTES:
            msg = (
                f"{path}: {path.stat().st_size / 1e6:.0f} MB, allowed up to "
                f"{LARGEST_BYTES / 1e6:.0f} MB"
            )
            raise InputError(msg)
        return path.read_bytes()
    except (OSError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        reason = getattr(error, "strerror", None) or str(error)
        msg = f"--precedent: {str(path)!r}: cannot be read ({reason})"
        raise InputError(msg) from error


def _rows(text: str, name: str, faults: list[str]) -> Iterator[Listed]:
    reader = csv.reader(io.StringIO(text, newline=""), strict=True)
    line = 1
    try:
        header = next(reader, [])
        places = _places(header, name, faults)
        line = reader.line_num + 1
        for cells in reader:
            if places and any(cell.strip() for cell in cells):
                row = _row(cells, len(header), places, f"{name}:{line}", line, faults)
                if row is not None:
                    yield row
            line = reader.line_num + 1
    except csv.Error as error:
        faults.append(
            f"{name}:{line}:row: cannot be split into cells ({error}), allowed "
            "comma-separated cells with closed quotes"
        )


def _places(header: list[str], name: str, faults: list[str]) -> dict[str, int]:
    """Return where each known column stands; empty where one is missing or doubled."""
    found: dict[str, int] = {}
    sound = True
    for place, heading in enumerate(header):
        plain = re.sub(r"[^a-z0-9]+", "_", heading.strip().casefold()).strip("_")
        key = next((k for k, known in HEADINGS.items() if plain in known), None)
        if key in found:
            faults.append(f"{name}:1:{_shown(heading)}: column stands twice")
            sound = False
        elif key is not None:
            found[key] = place
    for key in REQUIRED:
        if key not in found:
            allowed = " or ".join(HEADINGS[key])
            faults.append(f"{name}:1:header: no column {key}, allowed {allowed}")
            sound = False
    return found if sound else {}


def _row(
    cells: list[str],
    width: int,
    places: Mapping[str, int],
    where: str,
    line: int,
    faults: list[str],
) -> Listed | None:
    if len(cells) != width:
        what = f"{len(cells)} cells, allowed {width} as in the header"
        faults.append(f"{where}:row: {what}")
        return None
    text = {key: " ".join(cells[place].split()) for key, place in places.items()}
    found = len(faults)
    faults += [
        f"{where}:{key}: empty, allowed a text"
        for key in ("ingredient", "route")
        if not text[key]
    ]
    cas = text.get("cas", "")
    if cas.casefold() in NOT_GIVEN:
        cas = ""
    elif cas:
        cas, what = cas_number(cas)
        if what:
            faults.append(f"{where}:cas: {what}")
    amount = _amount(text["amount"], f"{where}:amount", faults)
    daily = _amount(text.get("daily", ""), f"{where}:daily", faults)
    if len(faults) > found:
        return None
    concentration, why = _concentration(amount, text["unit"])
    grams = _GRAMS.get(_plain(text.get("daily_unit", "")))
    return Listed(
        line,
        text["ingredient"],
        text["route"],
        text.get("form", ""),
        cas,
        text.get("unii", ""),
        concentration,
        None if daily is None or grams is None else daily * grams,
        f"{text['amount']} {text['unit']}".strip(),
        why,
    )


def cas_number(text: str) -> tuple[str, str]:
    """Return a CAS number in its usual form, and what is wrong with it.

    Its last digit checks the others: the sum of the digits before it, each times its
    place from the right, ends in it.

    Examples
    --------
    >>> cas_number("0000077929"), cas_number("77-92-9")
    (('77-92-9', ''), ('77-92-9', ''))
    >>> cas_number("77-92-8")[1]
    "'77-92-8' does not check, allowed a CAS number as 77-92-9"
    """
    match = _CAS.fullmatch(text)
    if match is None:
        return "", f"{_shown(text)!r}, allowed a CAS number as 77-92-9"
    body, middle, check = match.groups()
    body = body.lstrip("0")
    digits = f"{body}{middle}"
    total = sum(n * int(d) for n, d in enumerate(reversed(digits), start=1))
    if total % 10 != int(check):
        return "", f"{text!r} does not check, allowed a CAS number as 77-92-9"
    return f"{body}-{middle}-{check}", ""


def _amount(text: str, where: str, faults: list[str]) -> float | None:
    if text.casefold() in NOT_GIVEN:
        return None
    if not _NUMBER.fullmatch(text):
        faults.append(
            f"{where}: {_shown(text)!r} is no number, allowed a decimal of 0 or more, "
            "or NA"
        )
        return None
    return float(text)


def _concentration(amount: float | None, unit: str) -> tuple[float | None, str]:
    """Return grams per litre, or why there are none."""
    if amount is None:
        return None, "no concentration listed"
    factor = grams_per_litre_of(unit)
    if factor is None:
        return None, "unit is no mass per volume"
    if amount <= 0.0:
        return None, "concentration listed as zero"
    return amount * factor, ""


def grams_per_litre_of(unit: str) -> float | None:
    """Return the factor from a unit to g/L; None for a unit that is none.

    Examples
    --------
    >>> grams_per_litre_of("mg/1mL"), grams_per_litre_of("% w/v")
    (1.0, 10.0)
    >>> grams_per_litre_of("mg") is None
    True
    """
    plain = _plain(unit)
    if plain in _PERCENT_W_V:
        return 10.0
    match = _PER.fullmatch(plain)
    if match is None:
        return None
    mass, volume = _GRAMS.get(match[1]), _LITRES.get(match[3])
    count = float(match[2]) if match[2] else 1.0
    if mass is None or volume is None or count <= 0.0:
        return None
    return mass / (count * volume)


def _plain(unit: str) -> str:
    return "".join(unit.casefold().split())


def _shown(text: str) -> str:
    return text if len(text) <= LONGEST_SHOWN else f"{text[:LONGEST_SHOWN]}..."
