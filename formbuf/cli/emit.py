"""Send a page where it belongs: standard output or a file, in one format."""

from __future__ import annotations

import os
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, TextIO

from formbuf.errors import OutputError, UsageError, nearest
from formbuf.output import documents
from formbuf.output.page import NARROW
from formbuf.output.writers import (
    ENDINGS,
    Format,
    as_format,
    render,
    write_bytes,
    write_file,
)

if TYPE_CHECKING:
    from formbuf.output.page import Page

#: Width of a table in a file [characters].
FILE_WIDTH = 120
LARGEST_WIDTH = 10000
#: Endings of a file that say what is written, as they are named to people.
OUTPUT_ENDINGS = (".txt", ".json", ".csv", ".md", ".docx", ".xlsx")
#: Exit code of a program whose reader went away (128 plus the signal).
EXIT_CLOSED_PIPE = 141


@dataclass(frozen=True, slots=True)
class Target:
    """Where to write and how, as asked on the command line.

    Parameters
    ----------
    format : str or None
        As given; None lets the ending of the file decide, else a table.
    json : bool
        Short for the format ``json``.
    output : str or None
        File, or standard output.
    """

    format: str | None = None
    json: bool = False
    output: str | None = None

    def chosen(self) -> Format:
        """Return the format.

        Raises
        ------
        UsageError
            For an unknown format, or ``--json`` beside another one.
        """
        named = None if self.format is None else as_format(self.format)
        if self.json:
            if named not in (None, "json"):
                msg = f"--json is given beside --format {named}, allowed one of them"
                raise UsageError(msg)
            return "json"
        if named is not None:
            return named
        if self.output is not None:
            return ENDINGS.get(Path(self.output).suffix.lower(), "table")
        return "table"

    def document(self) -> documents.Kind | None:
        """Return the kind of office file that the ending of the file asks for."""
        if self.output is None or self.format is not None or self.json:
            return None
        return documents.kind_of(self.output)

    def check(self) -> None:
        """Refuse what cannot be used before anything is computed."""
        self.chosen()
        if self.output is not None and not self.output.strip():
            msg = "--output: the file name is empty, allowed a file"
            raise UsageError(msg)
        self._check_ending()
        document = self.document()
        if document is not None:
            documents.require(document)

    def _check_ending(self) -> None:
        """Refuse an ending that says no format, unless the format is said besides.

        A name without an ending takes a table; so does a pipe or a device.
        """
        if self.output is None or self.format is not None or self.json:
            return
        path = Path(self.output)
        ending = path.suffix
        if not ending or ending.lower() in (*ENDINGS, *documents.ENDINGS):
            return
        if path.exists() and not path.is_file() and not path.is_dir():
            return
        near = nearest(ending.lower(), OUTPUT_ENDINGS, 1)
        hint = (
            f"Did you mean {near[0]}?" if near else "Or name the format with --format."
        )
        allowed = f"{', '.join(OUTPUT_ENDINGS[:-1])} or {OUTPUT_ENDINGS[-1]}"
        msg = f"--output: {self.output} has {ending!r}, allowed {allowed}"
        raise UsageError(msg, hint=hint)


def emit(page: Page, target: Target) -> None:
    """Write a page.

    Raises
    ------
    OutputError
        The file could not be written.
    """
    chosen = target.chosen()
    document = target.document()
    if target.output is not None and document is not None:
        write_bytes(Path(target.output), documents.render(page, document))
        say(f"Wrote {target.output}")
        return
    if target.output is not None:
        write_file(Path(target.output), render(page, chosen, width=FILE_WIDTH))
        say(f"Wrote {target.output}")
        return
    if chosen == "table":
        _show_table(page)
        return
    put(render(page, chosen))


def _show_table(page: Page) -> None:
    from formbuf.output import tables

    if not sys.stdout:  # closed before the program began
        return
    bold = tables.can_be_bold(sys.stdout)
    put(tables.to_text(page.blocks(), output_width(sys.stdout), bold=bold))


def output_width(stream: TextIO) -> int:
    """Width of a table [characters]: ``COLUMNS``, else the terminal's, else 80."""
    text = os.environ.get("COLUMNS", "")
    if text.isascii() and text.isdigit() and 0 < int(text[:9]) <= LARGEST_WIDTH:
        return int(text)
    try:
        return os.get_terminal_size(stream.fileno()).columns or NARROW
    except (OSError, ValueError):
        return NARROW


def put(text: str, stream: TextIO | None = None) -> None:
    """Write text to standard output; a reader that went away ends the run quietly.

    Raises
    ------
    OutputError
        What stands behind standard output takes no more, for example a full disk.
    """
    stream = stream or sys.stdout
    if not stream:  # closed before the program began
        return
    try:
        try:
            stream.write(text)
        except UnicodeEncodeError:
            encoding = stream.encoding or "ascii"
            stream.write(text.encode(encoding, "replace").decode(encoding))
        stream.flush()
    except BrokenPipeError:
        leave_quietly()
    except OSError as error:
        _silence(stream)
        msg = f"standard output: cannot be written ({error.strerror})"
        raise OutputError(msg) from error


def say(text: str) -> None:
    """Write a line to standard error, where it disturbs no data."""
    put(f"{text}\n", sys.stderr)


def leave_quietly() -> None:
    """End the run without a word, since nobody reads any more."""
    _silence(sys.stdout, sys.stderr)
    raise SystemExit(EXIT_CLOSED_PIPE)


def _silence(*streams: TextIO) -> None:
    """Let whatever is still to come on a stream go nowhere."""
    null = os.open(os.devnull, os.O_WRONLY)
    for stream in streams:
        try:
            os.dup2(null, stream.fileno())
        except (AttributeError, OSError, ValueError):
            continue
