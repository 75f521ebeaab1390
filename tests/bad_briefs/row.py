"""One broken brief, and short ways to write it down."""

from __future__ import annotations

from dataclasses import dataclass

GOOD_HEAD = '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n'  # lines 1 to 4


@dataclass(frozen=True)
class BadBrief:
    name: str
    text: str | bytes
    where: str
    words: tuple[str, ...] = ()
    hint: str = ""


def after_is_wrong(
    name: str, tail: str, where: str, *words: str, hint: str = ""
) -> BadBrief:
    """A good head with something wrong from line 5 on."""
    return BadBrief(name, GOOD_HEAD + tail, where, words, hint)


def ph_is_wrong(
    name: str, lines: str, where: str, *words: str, hint: str = ""
) -> BadBrief:
    """A brief whose [ph] table, from line 4 on, is wrong."""
    head = '[product]\nroute = "subcutaneous"\n[ph]\n'
    return BadBrief(name, head + lines, where, words, hint)


def route_is_wrong(
    name: str, lines: str, where: str, *words: str, hint: str = ""
) -> BadBrief:
    """A brief whose [product] table, from line 4 on, is wrong."""
    return BadBrief(name, f"[ph]\ntarget = 6.0\n[product]\n{lines}", where, words, hint)
