"""Find the line of every key of a TOML text.

`tomllib` gives values without their places. This scanner walks the same grammar
(headers, dotted and quoted keys, nested lists and inline tables, all four kinds of
string, comments) and notes where each key and each list entry begins. It interprets
no value. On a text that `tomllib` refuses it stops where it no longer follows; what
it saw until then, including keys set twice, is kept.
"""

from __future__ import annotations

import tomllib
from bisect import bisect_right
from dataclasses import dataclass, field

from formbuf.product.brief_origin import Location

#: Longest dotted key that is followed; a brief has four parts at most.
DEEPEST_KEY = 40
_BLANK = " \t"
_LINE_END = "\r\n"
_BARE_STOP = frozenset(" \t\r\n=.[]{},#\"'")


@dataclass(slots=True)
class LineIndex:
    """Lines of the keys of one text.

    Attributes
    ----------
    lines : dict of location to int
        First line on which the key stands, counted from 1.
    repeated : list of (location, first line, second line)
        Keys and tables set twice, in the order met.
    complete : bool
        Whether the scanner followed the text to its end.
    """

    lines: dict[Location, int] = field(default_factory=dict)
    repeated: list[tuple[Location, int, int]] = field(default_factory=list)
    complete: bool = True


class _LostError(Exception):
    """The text is not what the grammar asks for here."""


def index_lines(text: str) -> LineIndex:
    """Return the line of every key, table and list entry of a TOML text."""
    scanner = _Scanner(text)
    try:
        scanner.document()
    except (_LostError, RecursionError):
        scanner.index.complete = False
    return scanner.index


class _Scanner:
    """One walk over a text; ``position`` only ever grows, so every loop ends."""

    def __init__(self, text: str) -> None:
        self.text = text
        self.position = 0
        self.index = LineIndex()
        self.entries: dict[Location, int] = {}
        self.declared: set[Location] = set()
        self.starts = [0]
        for offset, character in enumerate(text):
            if character == "\n":
                self.starts.append(offset + 1)

    def document(self) -> None:
        table: Location = ()
        while self._skip_to_content():
            if self._peek() == "[":
                table = self._header()
            else:
                self._pair(table)

    def _peek(self) -> str:
        return self.text[self.position : self.position + 1]

    def _expect(self, character: str) -> None:
        if self._peek() != character:
            raise _LostError
        self.position += 1

    def _note(self, location: Location, offset: int) -> int:
        line = bisect_right(self.starts, offset)
        self.index.lines.setdefault(location, line)
        return line

    def _declare(self, location: Location, offset: int) -> None:
        """Note a key or header that may be set once only."""
        line = self._note(location, offset)
        if location in self.declared:
            first = self.index.lines[location]
            self.index.repeated.append((location, first, line))
        self.declared.add(location)

    def _skip_blanks(self) -> None:
        while self._peek() and self._peek() in _BLANK:
            self.position += 1

    def _skip_to_content(self) -> bool:
        """Pass blanks, line ends and comments; return whether anything follows."""
        while character := self._peek():
            if character in _BLANK or character in _LINE_END:
                self.position += 1
            elif character == "#":
                end = self.text.find("\n", self.position)
                self.position = len(self.text) if end < 0 else end
            else:
                return True
        return False

    def _resolve(self, keys: list[str]) -> Location:
        """Return the location of header keys, entering the last entry of each list."""
        location: Location = ()
        for key in keys:
            location += (key,)
            if location in self.entries:
                location += (self.entries[location] - 1,)
        return location

    def _header(self) -> Location:
        self._expect("[")
        is_list = self._peek() == "["
        if is_list:
            self._expect("[")
        at = self.position
        keys = self._keys()
        self._expect("]")
        if is_list:
            self._expect("]")
        for depth in range(1, len(keys)):
            self._note(self._resolve(keys[:depth]), at)
        location = (*self._resolve(keys[:-1]), keys[-1])
        if is_list:
            count = self.entries.get(location, 0)
            self.entries[location] = count + 1
            self._note(location, at)
            location += (count,)
        self._declare(location, at)
        return location

    def _keys(self) -> list[str]:
        """Read a dotted key."""
        keys: list[str] = []
        while True:
            self._skip_blanks()
            keys.append(self._key())
            self._skip_blanks()
            if self._peek() != ".":
                return keys
            if len(keys) == DEEPEST_KEY:
                raise _LostError
            self.position += 1

    def _key(self) -> str:
        start = self.position
        if self._peek() in {'"', "'"}:
            self._string()
            quoted = self.text[start : self.position]
            try:
                return str(next(iter(tomllib.loads(f"{quoted} = 0"))))
            except tomllib.TOMLDecodeError as error:
                raise _LostError from error
        while self._peek() and self._peek() not in _BARE_STOP:
            self.position += 1
        if self.position == start:
            raise _LostError
        return self.text[start : self.position]

    def _pair(self, table: Location) -> None:
        at = self.position
        keys = self._keys()
        location = table
        for key in keys[:-1]:
            location += (key,)
            self._note(location, at)
        location += (keys[-1],)
        self._declare(location, at)
        self._expect("=")
        self._skip_blanks()
        self._value(location)

    def _value(self, location: Location) -> None:
        character = self._peek()
        if character == "[":
            self._list(location)
        elif character == "{":
            self._inline_table(location)
        elif character in {'"', "'"}:
            self._string()
        else:
            start = self.position
            while self._peek() and self._peek() not in "\r\n,]}#":
                self.position += 1
            if not self.text[start : self.position].strip():
                raise _LostError

    def _list(self, location: Location) -> None:
        self._expect("[")
        entry = 0
        while self._skip_to_content():
            if self._peek() == "]":
                self.position += 1
                return
            self._note((*location, entry), self.position)
            self._value((*location, entry))
            entry += 1
            self._skip_to_content()
            if self._peek() != "]":
                self._expect(",")
        raise _LostError

    def _inline_table(self, location: Location) -> None:
        self._expect("{")
        while self._skip_to_content():
            if self._peek() == "}":
                self.position += 1
                return
            self._pair(location)
            self._skip_to_content()
            if self._peek() != "}":
                self._expect(",")
        raise _LostError

    def _string(self) -> None:
        """Pass a string of any of the four kinds."""
        quote = self._peek()
        many = self.text.startswith(quote * 3, self.position)
        self.position += 3 if many else 1
        while character := self._peek():
            if character == "\\" and quote == '"':
                self.position += 2
            elif not many and character in _LINE_END:
                raise _LostError
            elif character != quote:
                self.position += 1
            elif not many:
                self.position += 1
                return
            elif self.text.startswith(quote * 3, self.position):
                self.position += 3
                # Up to two quotes may stand before the closing three.
                for _ in range(2):
                    if self._peek() == quote:
                        self.position += 1
                return
            else:
                self.position += 1
        raise _LostError
