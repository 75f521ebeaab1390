"""Reading the result: every number and text comes with the place it was read at.

A `Cursor` stands at one place of the JSON-ready result. `Cursor.value` and
`Cursor.quote` return spans that carry the JSON pointer of what they show, so that a
section never types a number.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any, TypeAlias

from formbuf.output.figures import decimals, plainly, significant
from formbuf.report.content import (
    NO_BREAK,
    Cite,
    Link,
    Quote,
    Span,
    Spans,
    Text,
    Value,
    clean,
)

Piece: TypeAlias = "str | Span | Spans | None"
Key: TypeAlias = "str | int"

#: Places whose texts stand as the user wrote them.
_OF_THE_USER = ("/brief", "/rationale/origin")
#: What stands where there is no value.
NOTHING: Spans = (Text("-"),)
#: A temperature as the tables and findings write it: 5 C, -40 C, 2-8 C, per C.
_DEGREES = re.compile(r"(\d|\b[Pp]er) C(?![\w-])")
_PER_DEGREE = re.compile(r"(?<=\d)/C(?![\w-])")
_BELOW_ZERO = re.compile(rf"(?<![\w.)])-(?=\d+(?:\.\d+)?{NO_BREAK}°C)")
_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")


@dataclass(frozen=True, slots=True)
class Cursor:
    """One place of the result.

    Parameters
    ----------
    data : any
        What stands there.
    path : str
        JSON pointer (RFC 6901) of the place; empty for the whole.
    """

    data: Any
    path: str = ""

    def at(self, *keys: Key) -> Cursor:
        """Return a place further in; nothing (None) where a key is missing."""
        here, path = self.data, self.path
        for key in keys:
            path = f"{path}/{escape(str(key))}"
            here = _step(here, key)
        return Cursor(here, path)

    def each(self, *keys: Key) -> list[Cursor]:
        """Return the places of a list, or of the values of a mapping."""
        place = self.at(*keys)
        if isinstance(place.data, Mapping):
            return [place.at(key) for key in place.data]
        return [place.at(i) for i in range(len(place.data or ()))]

    def get(self, *keys: Key) -> Any:
        """Return what stands further in; None where a key is missing."""
        return self.at(*keys).data

    def text(self, *keys: Key) -> str:
        """Return a text; empty where there is none."""
        found = self.get(*keys)
        return "" if found is None else str(found)

    def number(self, *keys: Key) -> float | None:
        """Return a number; None where there is none."""
        found = self.get(*keys)
        if isinstance(found, bool) or not isinstance(found, int | float):
            return None
        return float(found)

    def numbers(self, *keys: Key) -> list[float]:
        """Return the numbers of a list."""
        return [float(x) for x in self.get(*keys) or ()]

    def value(
        self,
        *keys: Key,
        unit: str = "",
        places: int | None = None,
        digits: int = 3,
        sign: bool = False,
        percent: bool = False,
        trim: bool = False,
    ) -> Span:
        """Return a number as it is printed; a dash where there is none.

        Parameters
        ----------
        *keys : str or int
            Way to the number from here.
        unit : str
            Shown after the digits.
        places : int, optional
            Fixed decimals; else significant digits, ``digits`` of them.
        sign : bool
            Whether a positive number bears its sign.
        percent : bool
            Whether a share is shown as a percentage.
        trim : bool
            Whether zeros at the end of decimals are left out: 5, not 5.00.
        """
        place = self.at(*keys)
        number = place.number()
        if number is None:
            return Text("-")
        shown = 100.0 * number if percent else number
        if places is None:
            digits_text = significant(shown, digits)
            if sign and shown > 0.0:
                digits_text = f"+{digits_text}"
        else:
            digits_text = decimals(shown, places, sign=sign)
        if trim and "." in digits_text and "e" not in digits_text:
            digits_text = digits_text.rstrip("0").rstrip(".")
        return Value(typeset(digits_text), number, "%" if percent else unit, place.path)

    def plain(self, *keys: Key, unit: str = "") -> Span:
        """Return any scalar as a person would write it; a dash where there is none."""
        place = self.at(*keys)
        number = place.number()
        if number is not None:
            return Value(typeset(f"{number:.12g}"), number, unit, place.path)
        if place.data is None or place.data in ("", [], {}):
            return Text("-")
        if isinstance(place.data, bool):
            return Text(plainly(place.data))
        if isinstance(place.data, Sequence) and not isinstance(place.data, str):
            return Quote(clean(", ".join(plainly(x) for x in place.data)), place.path)
        return Quote(clean(str(place.data)), place.path)

    def quote(self, *keys: Key) -> Span:
        """Return a text of the result; a dash where it is empty."""
        place = self.at(*keys)
        shown = clean(str(place.data)) if place.data not in (None, "") else ""
        if not place.path.startswith(_OF_THE_USER):
            shown = degrees(shown)
        return Quote(shown, place.path) if shown else Text("-")


def typeset(digits: str) -> str:
    r"""Return digits with a true minus, and powers of ten as such.

    Examples
    --------
    >>> typeset("-1.50"), typeset("2.28e-05")
    ('−1.50', '2.28\xa0×\xa010⁻⁵')
    """
    mantissa, _, exponent = digits.partition("e")
    shown = mantissa.replace("-", "\u2212")
    if not exponent:
        return shown
    power = str(int(exponent)).translate(_RAISED)
    return f"{shown}{NO_BREAK}×{NO_BREAK}10{power}"


def degrees(text: str) -> str:
    r"""Return a text with its temperatures as a report writes them.

    Examples
    --------
    >>> degrees("3 at -40 C, 4.5 to 2-8 C, -0.02 per C"), degrees("vitamin C")
    ('3 at −40\xa0°C, 4.5 to 2-8\xa0°C, -0.02 per\xa0°C', 'vitamin C')
    """
    told = _PER_DEGREE.sub("/°C", _DEGREES.sub(f"\\1{NO_BREAK}°C", text))
    return _BELOW_ZERO.sub("\u2212", told)


def escape(key: str) -> str:
    """Return a key as a token of a JSON pointer."""
    return key.replace("~", "~0").replace("/", "~1")


def resolve(data: Any, path: str) -> Any:
    """Return what stands at a JSON pointer.

    Raises
    ------
    KeyError
        If nothing stands there.
    """
    here = data
    for token in path.split("/")[1:]:
        key = token.replace("~1", "/").replace("~0", "~")
        if isinstance(here, Mapping):
            here = here[key]
        elif isinstance(here, list):
            here = here[int(key)]
        else:
            raise KeyError(path)
    return here


def _step(here: Any, key: Key) -> Any:
    if isinstance(here, Mapping):
        return here.get(key)
    if isinstance(here, list) and isinstance(key, int) and key < len(here):
        return here[key]
    return None


def spans(*pieces: Piece) -> Spans:
    """Join texts and spans; plain text is wording of the report.

    Examples
    --------
    >>> spans("a ", (Text("b"),), None)
    (Text(text='a ', strong=False), Text(text='b', strong=False))
    """
    found: list[Span] = []
    for piece in pieces:
        if piece is None or piece == "":
            continue
        if isinstance(piece, str):
            found.append(Text(piece))
        elif isinstance(piece, tuple):
            found += piece
        else:
            found.append(piece)
    return tuple(found)


def strong(text: str) -> Span:
    """Return wording that is set off."""
    return Text(text, strong=True)


def cite(sources: Iterable[str] | str | None, *, spaced: bool = True) -> Span | None:
    """Return a citation of sources by id; None without any."""
    ids = (sources,) if isinstance(sources, str) else tuple(sources or ())
    kept = tuple(dict.fromkeys(s for s in ids if s))
    return Cite(kept, spaced) if kept else None


def link(target: str) -> Span:
    """Return a mention of a section, table or figure."""
    return Link(target)


def joined(parts: Sequence[Spans], last: str = " and ") -> Spans:
    """Join parts as in a sentence: a, b and c.

    Examples
    --------
    >>> "".join(s.text for s in joined([spans("a"), spans("b"), spans("c")]))
    'a, b and c'
    """
    found: list[Span] = []
    for position, part in enumerate(parts):
        if position:
            found.append(Text(last if position == len(parts) - 1 else ", "))
        found += part
    return tuple(found)


def parted(parts: Iterable[Spans], by: str = "; ") -> Spans:
    """Join parts by a mark."""
    found: list[Span] = []
    for part in parts:
        if found and part:
            found.append(Text(by))
        found += part
    return tuple(found)


def bare(span: Span) -> Span:
    """Return a number without its unit, where a heading says it."""
    return replace(span, unit="") if isinstance(span, Value) else span


def capital(text: str) -> str:
    """Return a text with its first letter large; words such as pH stay as they are.

    Examples
    --------
    >>> capital("one"), capital("pH 6"), capital("l-histidine")
    ('One', 'pH 6', 'L-histidine')
    """
    return text if text[1:2].isupper() else text[:1].upper() + text[1:]


def sentence(place: Cursor) -> Spans:
    """Return a remark of the result as a sentence: a capital first, a stop last."""
    text = degrees(clean(str(place.data or "")))
    if not text:
        return ()
    stop = "" if text.endswith((".", "!", "?")) else "."
    return spans(Quote(capital(text), place.path), stop)
