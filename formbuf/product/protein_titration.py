"""Read a measured titration curve: mmol of base per gram of protein against pH."""

from __future__ import annotations

from itertools import pairwise
from pathlib import Path

from formbuf.errors import InputError
from formbuf.library.tables import Column, Faults, Row, Schema, read_table

SIZE_LIMIT_BYTES = 1_000_000
SCHEMA = Schema(
    "titration",
    (
        Column("ph", "number", required=True, low=0, high=14),
        Column("mmol_g", "number", required=True, low=-50, high=50),
    ),
    (),
)


def read_titration(path: Path, *, where: str = "") -> tuple[tuple[float, float], ...]:
    """Read a titration from a CSV file with the columns ``ph`` and ``mmol_g``.

    Parameters
    ----------
    path : Path
        UTF-8, at most 1 MB.
    where : str
        Key that names the file, for the message.

    Returns
    -------
    tuple of (float, float)
        pH and strong base added [mmol per gram of protein] (negative: acid), rising.

    Raises
    ------
    InputError
        Where the file cannot be read, a column is missing, a number is none, or the
        readings do not rise; every fault as ``file:line:column``.
    """
    place = f"{where}: " if where else ""
    try:
        with path.open("rb") as stream:
            data = stream.read(SIZE_LIMIT_BYTES + 1)
    except OSError as error:
        reason = error.strerror or "cannot be read"
        msg = f"{place}titration file {str(path)!r}: {reason}"
        raise InputError(
            msg, hint="Give the path from the folder of the brief."
        ) from error
    if len(data) > SIZE_LIMIT_BYTES:
        msg = f"{place}titration file {str(path)!r} is larger than 1 MB"
        raise InputError(msg)
    faults = Faults()
    rows = read_table(data, SCHEMA, faults, file=path.name)
    if not faults:
        _check_rising(rows, path.name, faults)
    if faults:
        hint = "The file holds the columns ph,mmol_g: base added per gram, rising."
        raise InputError(place + "\n".join(faults.lines), hint=hint)
    return tuple((row.figure("ph"), row.figure("mmol_g")) for row in rows)


def _check_rising(rows: tuple[Row, ...], file: str, faults: Faults) -> None:
    if len(rows) < 2:
        faults.add(
            f"{file}:{len(rows) + 1}:ph", "fewer than two points, allowed 2 or more"
        )
    for before, after in pairwise(rows):
        if after.figure("ph") <= before.figure("ph"):
            what = f"pH {after.figure('ph'):g} does not rise, allowed rising pH"
            faults.add(after.where("ph"), what)
        if after.figure("mmol_g") < before.figure("mmol_g"):
            what = (
                f"{after.figure('mmol_g'):g} falls below "
                f"{before.figure('mmol_g'):g} while pH rises, allowed rising base"
            )
            faults.add(after.where("mmol_g"), what)
