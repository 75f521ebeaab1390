"""Broken variants of files and command lines, from a seed: the same seed, the same case.

Bytes are flipped, cut, doubled and replaced; lines and values are exchanged for ones
that once broke a program somewhere.
"""

from __future__ import annotations

import random
import re

#: Pieces that break readers: numbers at the edge, encodings, quoting, nesting.
PIECES: tuple[bytes, ...] = (
    b"",
    b"\x00",
    b"\xff\xfe",
    b"\xef\xbb\xbf",
    b"\r\n",
    b"\r",
    b"\x1b[31m",
    b"\xc3\x28",
    b"\xe2\x80\xae",
    b"\xf0\x9f\xa7\xaa",
    "µ".encode("latin-1"),
    b"nan",
    b"inf",
    b"-inf",
    b"-0",
    b"1e999",
    b"1e-999",
    b"0x10",
    b"1_000",
    b"6,5",
    b"9" * 400,
    b"-273.16",
    b'"',
    b"'",
    b'"""',
    b"[[",
    b"]]",
    b"[" * 300,
    b"{",
    b"= =",
    b"#",
    b",",
    b";",
    b"\t",
    b"../../etc/passwd",
    b"=1+1",
    b"A" * 5000,
    b"true",
    b"2026-13-45",
    b"none",
    b"[product]",
    b"[[storage]]",
)
VALUES: tuple[str, ...] = (
    "0",
    "-1",
    "1e308",
    "1e-300",
    "nan",
    "inf",
    "99999999999999999999",
    '""',
    '" "',
    '"x"',
    '"none"',
    '"citrate"',
    '"sodium_phosphate"',
    "true",
    "[]",
    "[1, 2]",
    '["a", 1]',
    "{}",
    "{a = 1}",
    "1979-05-27",
    "-200.0",
    "7.0",
    "13.999",
    "1000",
    '"\\u202E"',
    "'\\'",
)


def bytes_of(data: bytes, rng: random.Random, most: int = 6) -> bytes:
    """Return data with a few of its bytes or lines changed."""
    for _ in range(rng.randint(1, most)):
        data = _one_change(data, rng)
        if len(data) > 200_000:
            data = data[:200_000]
    return data


def _one_change(data: bytes, rng: random.Random) -> bytes:
    at = rng.randint(0, len(data))
    to = min(len(data), at + rng.choice((1, 1, 2, 8, 60)))
    way = rng.randint(0, 8)
    if way == 0 and data:
        flipped = data[at - 1] ^ (1 << rng.randint(0, 7))
        return data[: at - 1] + bytes([flipped]) + data[at:] if at else data
    if way == 1:
        return data[:at] + data[to:]
    if way == 2:
        return data[:at]
    if way == 3:
        return data[:at] + data[at:to] * rng.randint(2, 30) + data[to:]
    if way in (4, 5):
        return data[:at] + rng.choice(PIECES) + data[at:]
    if way == 6:
        return data[:at] + rng.choice(PIECES) + data[to:]
    lines = data.split(b"\n")
    one, other = rng.randrange(len(lines)), rng.randrange(len(lines))
    if way == 7:
        lines[one], lines[other] = lines[other], lines[one]
    else:
        lines.insert(one, lines[other])
    return b"\n".join(lines)


def values_of(text: str, rng: random.Random, most: int = 2) -> str:
    """Return a TOML text with a few values, keys or tables exchanged; it mostly parses."""
    lines = text.split("\n")
    keys = [i for i, line in enumerate(lines) if re.match(r"\s*\w+\s*=", line)]
    for _ in range(rng.randint(1, most)):
        if not keys:
            break
        i = rng.choice(keys)
        key, _, value = lines[i].partition("=")
        way = rng.randint(0, 9)
        if way == 0:
            lines[i] = f"{key}= {rng.choice(VALUES)}"
        elif way <= 5:
            lines[i] = _number_changed(lines[i], rng)
        elif way <= 7:
            lines[i] = ""
        elif way == 8:
            other = lines[rng.choice(keys)].partition("=")[2]
            lines[i] = f"{key}={other}"
        else:
            lines[i] = f"{lines[rng.choice(keys)].partition('=')[0]}={value}"
    return "\n".join(lines)


def _number_changed(line: str, rng: random.Random) -> str:
    def other(match: re.Match[str]) -> str:
        value = float(match[0])
        factor = rng.choice(
            (0.0, -1.0, 0.01, 0.5, 0.8, 0.95, 1.05, 1.3, 2.0, 10.0, 1e3)
        )
        return f"{value * factor:g}"

    return re.sub(r"\d+\.?\d*", other, line, count=1)


def cells_of(text: str, rng: random.Random, most: int = 4) -> str:
    """Return a CSV text with a few cells exchanged or broken."""
    lines = text.split("\n")
    for _ in range(rng.randint(1, most)):
        i = rng.randrange(len(lines))
        cells = lines[i].split(",")
        j = rng.randrange(len(cells))
        choice = rng.choice((*VALUES, "a b", "x:1 y:2", "yes", "published", "", '"a'))
        cells[j] = choice if rng.random() < 0.7 else rng.choice(cells)
        lines[i] = ",".join(cells)
    return "\n".join(lines)
