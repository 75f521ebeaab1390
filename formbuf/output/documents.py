"""Files of office programs: which ending means which, what it needs, how it is made."""

from __future__ import annotations

import importlib.util
from collections.abc import Mapping
from pathlib import PurePath
from typing import Literal, NamedTuple

from formbuf.errors import UsageError
from formbuf.output.page import Page

Kind = Literal["xlsx", "docx"]


class Needed(NamedTuple):
    """What a kind of file is, and the package that writes it."""

    noun: str
    module: str
    extra: str
    instead: str


NEEDED: Mapping[Kind, Needed] = {
    "xlsx": Needed("a workbook", "openpyxl", "xlsx", "csv"),
    "docx": Needed("a Word document", "docx", "", "md"),
}
ENDINGS: Mapping[str, Kind] = {".xlsx": "xlsx", ".docx": "docx"}


def kind_of(path: str) -> Kind | None:
    """Return the kind of office file that an ending means, None for other files."""
    return ENDINGS.get(PurePath(path).suffix.lower())


def require(kind: Kind) -> None:
    """Refuse a kind of file whose package is not installed.

    Raises
    ------
    UsageError
        With what to install, and which ending needs nothing.
    """
    needed = NEEDED[kind]
    if importlib.util.find_spec(needed.module) is None:
        msg = (
            f"--output: {needed.noun} needs the package {needed.module}, which is not "
            "installed"
        )
        what = f".[{needed.extra}]" if needed.extra else "."
        hint = (
            f"Run `pip install '{what}'` in the checkout, or give a file that ends in "
            f".{needed.instead}."
        )
        raise UsageError(msg, hint=hint)


def render(page: Page, kind: Kind) -> bytes:
    """Return a page as the bytes of an office file."""
    if kind == "xlsx":
        from formbuf.output.workbook import to_workbook

        return to_workbook(page)
    from formbuf.output.word import to_word

    return to_word(page.blocks())
