"""What a press of the tabulator offers: names from the tables, by what is asked for.

Every press is a new process, so only the first column of one table is read, and
nothing of the library is imported.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Callable, Iterator, Mapping
from importlib.resources import files
from importlib.resources.abc import Traversable
from pathlib import Path
from typing import Any

Names = Callable[[Any], Iterator[str]]

#: Formats, bases and units that options take.
FORMATS = ("table", "json", "csv", "markdown")
AMOUNT_UNITS = ("mmol/L", "g/L", "mmol/kg", "g/kg")


def tables() -> Traversable:
    """Return the directory of the tables, of the package or of the checkout."""
    packaged = files("formbuf").joinpath("_knowledge")
    if packaged.is_dir():
        return packaged
    return Path(__file__).resolve().parent.parent.parent / "knowledge"


def first_column(table: str) -> list[str]:
    """Return the first cell of each row of a table, each once."""
    place = tables().joinpath(*table.split("/"))
    if not place.is_file():
        return []
    rows = csv.reader(io.StringIO(place.read_text(encoding="utf-8"), newline=""))
    next(rows, None)
    return list(dict.fromkeys(row[0] for row in rows if row))


def _column(table: str, ending: str = "") -> Names:
    return lambda _: (f"{name}{ending}" for name in first_column(table))


def _fixed(*names: str) -> Names:
    return lambda _: iter(names)


def _systems(_: Any) -> Iterator[str]:
    yield from first_column("systems.csv")


def _table_names(_: Any) -> Iterator[str]:
    yield from _names_below(tables(), "")


def _names_below(root: Traversable, prefix: str) -> Iterator[str]:
    for entry in sorted(root.iterdir(), key=lambda e: e.name):
        name = f"{prefix}{entry.name}"
        if entry.is_dir():
            yield from _names_below(entry, f"{name}/")
        elif name.endswith((".csv", ".toml")):
            yield name.rpartition(".")[0]


def _rows(context: Any) -> Iterator[str]:
    table = str(context.params.get("table") or "")
    yield from first_column(table if table.endswith(".csv") else f"{table}.csv")


def _topics(_: Any) -> Iterator[str]:
    from formbuf.cli.registry import TOPICS

    yield from TOPICS


def _vocabulary(name: str) -> Names:
    def names(_: Any) -> Iterator[str]:
        from typing import get_args

        from formbuf.product import vocabulary

        yield from get_args(getattr(vocabulary, name))

    return names


#: What an option or argument takes, as its help shows it, and the names it may have.
BY_METAVAR: Mapping[str, Names] = {
    "SYSTEM": _systems,
    "MATERIAL": _column("materials.csv"),
    "MATERIAL=AMOUNT": _column("materials.csv", "="),
    "MATERIAL=MMOL_L": _column("materials.csv", "="),
    "MATERIAL=MOL_L": _column("materials.csv", "="),
    "MATERIAL=PERCENT": _column("materials.csv", "="),
    "MATERIAL=KG_L": _column("materials.csv", "="),
    "MATERIAL=GRADE": _column("materials.csv", "="),
    "SPECIES": _column("species.csv"),
    "DILUENT": _column("diluents.csv"),
    "ROUTE": _column("routes.csv"),
    "FORM": _vocabulary("Form"),
    "KIND": _vocabulary("DrugKind"),
    "TABLE": _table_names,
    "ROW": _rows,
    "SOURCE": _column("sources.csv"),
    "TOPIC": _topics,
    "FORMAT": _fixed(*FORMATS),
    "BASIS": _fixed("solution", "molal"),
    "UNIT": _fixed(*AMOUNT_UNITS),
}


def attach(command: Any) -> None:
    """Give every option and argument of a command the names it may take."""
    for below in getattr(command, "commands", {}).values():
        attach(below)
    for param in command.params:
        names = BY_METAVAR.get(str(param.metavar or ""))
        if names is not None:
            param._custom_shell_complete = _completer(names)


def _completer(names: Names) -> Callable[[Any, Any, str], list[str]]:
    def complete(context: Any, _param: Any, incomplete: str) -> list[str]:
        return [name for name in names(context) if name.startswith(incomplete)]

    return complete
