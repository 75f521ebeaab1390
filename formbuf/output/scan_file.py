"""Write a scan row by row, and go on where an earlier run of the same scan stopped.

Each row begins with the mark of its scan and the number of its point. A rerun reads
both, drops the last point (it may be incomplete) and appends from there. Nothing but
the current rows is kept in memory.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Callable, Iterable, Mapping, Sequence
from pathlib import Path
from types import TracebackType
from typing import Any, BinaryIO

from formbuf.errors import OutputError
from formbuf.output.writers import csv_cell

MARK, POINT = "run", "point"


def mark_of(what: Mapping[str, Any]) -> str:
    """Return the mark of a scan: ten characters that its settings decide.

    Parameters
    ----------
    what : mapping
        Plain data; everything that changes a row must be in it.
    """
    text = json.dumps(what, sort_keys=True, allow_nan=False)
    return hashlib.blake2b(text.encode(), digest_size=5).hexdigest()


class ScanFile:
    """A CSV file that grows by points, or a stream of text.

    Parameters
    ----------
    path : Path or None
        None hands every text to ``put`` instead, which cannot be gone on with.
    columns : sequence of str
        Without the mark and the point.
    mark : str
        Of the scan.
    put : callable
        Takes text where there is no file.

    Raises
    ------
    OutputError
        The file holds something else, or cannot be written.
    """

    def __init__(
        self,
        path: Path | None,
        columns: Sequence[str],
        mark: str,
        put: Callable[[str], None],
    ) -> None:
        self.path = path
        self._put = put
        self.mark = mark
        self.columns = tuple(columns)
        #: Point to begin with; above 0 where an earlier run is gone on with.
        self.start = 0
        self._stream: BinaryIO | None = None
        header = self._line([MARK, POINT, *self.columns])
        if path is None:
            self._write(header)
            return
        try:
            kept = self._resume(path, header)
            self._stream = path.open("r+b" if kept is not None else "wb")
            if kept is None:
                self._write(header)
            else:
                self._stream.truncate(kept)
                self._stream.seek(kept)
        except OSError as error:
            if isinstance(error, OutputError):
                raise
            raise self._failure(error) from error

    def __enter__(self) -> ScanFile:
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        error: BaseException | None,
        trace: TracebackType | None,
    ) -> None:
        self.close()

    def close(self) -> None:
        """Write what is left and close the file."""
        if self._stream is not None:
            stream, self._stream = self._stream, None
            try:
                stream.close()
            except OSError as error:
                raise self._failure(error) from error

    def add(self, point: int, rows: Iterable[Mapping[str, Any]]) -> None:
        """Append the rows of one point."""
        lines = [
            self._line([self.mark, point, *(row[name] for name in self.columns)])
            for row in rows
        ]
        self._write("".join(lines))

    def add_columns(self, first: int, columns: Mapping[str, Any]) -> None:
        """Append one row per entry of equally long columns, from a point on."""
        texts = [_texts(columns[name]) for name in self.columns]
        lines = [
            f"{self.mark},{first + k},{','.join(row)}\n"
            for k, row in enumerate(zip(*texts, strict=True))
        ]
        self._write("".join(lines))

    def _line(self, cells: Sequence[object]) -> str:
        return ",".join(_quoted(csv_cell(cell)) for cell in cells) + "\n"

    def _write(self, text: str) -> None:
        if self.path is None:
            self._put(text)
            return
        if self._stream is not None:
            try:
                self._stream.write(text.encode())
            except OSError as error:
                raise self._failure(error) from error

    def _resume(self, path: Path, header: str) -> int | None:
        """Return where to go on in an existing file; None for a new one."""
        if not path.exists() or path.stat().st_size == 0:
            return None
        wanted = header.encode()
        with path.open("rb") as stream:
            if stream.readline() != wanted:
                msg = f"{path}: holds something else than this scan, allowed a new file"
                raise OutputError(msg, hint="Name another file, or remove this one.")
            kept = last_start = stream.tell()
            last = -1
            for line in stream:
                mark, _, rest = line.partition(b",")
                number = rest.partition(b",")[0]
                if mark.decode("ascii", "replace") != self.mark and line[-1:] == b"\n":
                    msg = (
                        f"{path}: holds another scan ({mark.decode(errors='replace')}, "
                        f"this is {self.mark}), allowed the same brief, axes and options"
                    )
                    raise OutputError(
                        msg, hint="Name another file, or remove this one."
                    )
                if line[-1:] != b"\n" or not number.isdigit():
                    break
                if int(number) != last:
                    last, last_start = int(number), kept
                kept += len(line)
        self.start = max(last, 0)
        return last_start

    def _failure(self, error: OSError) -> OutputError:
        reason = error.strerror or str(error)
        return OutputError(f"{self.path}: cannot be written ({reason})")


def _quoted(text: str) -> str:
    if any(mark in text for mark in ',"\n'):
        return '"' + text.replace('"', '""') + '"'
    return text


def _texts(values: Any) -> list[str]:
    """Return a column as texts; what is not a number is an empty cell."""
    plain = values.tolist() if hasattr(values, "tolist") else values
    return [
        value if isinstance(value, str) else "" if value != value else repr(value)
        for value in plain
    ]
