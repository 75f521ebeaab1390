"""One interface for every format, and files written whole or not at all.

JSON and CSV are written as they are: no terminal library touches them. In CSV, a
text that a spreadsheet would take for a formula is made inert by an apostrophe in
front of it.
"""

from __future__ import annotations

import csv
import io
import json
import os
import tempfile
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any, Literal, get_args

from formbuf.errors import OutputError, UsageError, nearest
from formbuf.output.page import NARROW, Page

Format = Literal["table", "json", "csv", "markdown"]
FORMATS: tuple[Format, ...] = get_args(Format)
#: Format meant by the ending of a file.
ENDINGS: Mapping[str, Format] = {
    ".json": "json",
    ".csv": "csv",
    ".md": "markdown",
    ".markdown": "markdown",
    ".txt": "table",
}
_FORMULA_STARTS = ("=", "+", "-", "@", "\t", "\n")


def as_format(text: str) -> Format:
    """Return the format of a name.

    Raises
    ------
    UsageError
        For a name that is no format.
    """
    for known in FORMATS:
        if text == known:
            return known
    near = nearest(text, FORMATS, 1)
    hint = f"Did you mean {near[0]}?" if near else ""
    if text in ("xlsx", "docx"):
        hint = f"It is written to a file only: -o FILE.{text}."
    msg = f"--format: unknown format {text!r}, allowed {', '.join(FORMATS)}"
    raise UsageError(msg, hint=hint)


def render(page: Page, format_: Format, *, width: int = NARROW) -> str:
    """Return a page as text in one format, without colour.

    Parameters
    ----------
    page : Page
    format_ : {"table", "json", "csv", "markdown"}
    width : int
        Width of the table in characters.
    """
    if format_ == "table":
        from formbuf.output.tables import to_text

        return to_text(page.blocks(), width)
    writers: dict[str, Callable[[Page], str]] = {
        "json": to_json,
        "csv": to_csv,
        "markdown": _to_markdown,
    }
    return writers[format_](page)


def to_json(page: Page) -> str:
    """Return the data of a page as JSON text; full precision, plain ASCII."""
    return json_text(page.payload())


def json_text(data: Mapping[str, Any]) -> str:
    """Return data as JSON text.

    Raises
    ------
    ValueError
        For a number that is not finite, which JSON does not know.
    """
    return json.dumps(data, indent=2, allow_nan=False) + "\n"


def to_csv(page: Page) -> str:
    """Return the rows of a page as CSV text with one header row; LF line ends."""
    rows = list(page.records())
    stream = io.StringIO(newline="")
    writer = csv.writer(stream, lineterminator="\n")
    if rows:
        names = list(rows[0])
        writer.writerow([csv_cell(name) for name in names])
        for row in rows:
            writer.writerow([csv_cell(row[name]) for name in names])
    return stream.getvalue()


def csv_cell(value: object) -> str:
    """Return a value as the text of a cell that no spreadsheet runs as a formula.

    Examples
    --------
    >>> csv_cell(-0.5), csv_cell("=1+1"), csv_cell("-40"), csv_cell(None)
    ('-0.5', "'=1+1", '-40', '')
    """
    if value is None:
        return ""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, float):
        return repr(value)
    if isinstance(value, list | tuple):
        return csv_cell("; ".join(csv_cell(item) for item in value))
    text = str(value).replace("\r\n", "\n").replace("\r", "\n")
    if text.startswith(_FORMULA_STARTS) and not _is_number(text):
        return f"'{text}"
    return text


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return text.isascii() and text.strip() == text


def _to_markdown(page: Page) -> str:
    from formbuf.output.markdown import to_markdown

    return to_markdown(page.blocks())


def write_file(path: Path, text: str) -> None:
    """Write a text file whole: beside it first, then in its place.

    Parameters
    ----------
    path : Path
        Replaced if it exists; a link is followed.
    text : str

    Raises
    ------
    OutputError
        The file could not be written (no such folder, no permission, disk full); what
        was there before is untouched.
    """
    write_bytes(path, text.encode("utf-8"))


def write_bytes(path: Path, data: bytes) -> None:
    """Write a file whole; see `write_file`."""
    temporary: str | None = None
    try:
        if path.exists() and not path.is_file():
            if path.is_dir():
                msg = f"{path}: is a directory, allowed a file"
                raise OutputError(msg)
            path.write_bytes(data)  # a device or a pipe is written to as it is
            return
        target = path.resolve() if path.is_symlink() else path
        if target.exists() and not os.access(target, os.W_OK):
            msg = f"{path}: cannot be written (the file is read-only)"
            raise OutputError(msg, hint="What was there before is untouched.")
        handle, temporary = tempfile.mkstemp(
            prefix=f".{target.name[:40]}.", suffix=".part", dir=target.parent
        )
        with os.fdopen(handle, "wb") as stream:
            stream.write(data)
            stream.flush()
            os.fsync(stream.fileno())
        _copy_mode(target, Path(temporary))
        Path(temporary).replace(target)
        temporary = None
    except (OSError, ValueError, RuntimeError) as error:
        if isinstance(error, OutputError):
            raise
        reason = getattr(error, "strerror", None) or str(error)
        shown = str(path) if str(path).isprintable() else repr(str(path))
        msg = f"{shown}: cannot be written ({reason})"
        raise OutputError(msg, hint="What was there before is untouched.") from error
    finally:
        if temporary is not None:
            Path(temporary).unlink(missing_ok=True)


def _copy_mode(target: Path, temporary: Path) -> None:
    """Give the new file the permissions of the old one, or those usual for a file."""
    if target.exists():
        temporary.chmod(target.stat().st_mode & 0o777)
        return
    mask = os.umask(0)
    os.umask(mask)
    temporary.chmod(0o666 & ~mask)
