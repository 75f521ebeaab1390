"""Reads the published checks and prints what was found beside what was published.

The checks stand in ``knowledge/checks/``; each row has its source and status. Tests
print a table of residuals (``pytest -rP`` shows it) and then compare.
"""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass
from functools import cache

from formbuf.library import Library, load_library
from formbuf.library.store import knowledge_root
from formbuf.product.composition import Mixture, mixture

#: The scale of Soerensen reads about this much below the modern one.
SOERENSEN_OFFSET = 0.04

Check = Mapping[str, str]


@dataclass(frozen=True)
class Residual:
    """One published value and what the tool finds for it."""

    label: str
    published: float
    found: float
    source: str
    status: str

    @property
    def miss(self) -> float:
        return self.found - self.published


@cache
def library() -> Library:
    """The knowledge of the checkout."""
    return load_library()


@cache
def checks(name: str) -> tuple[Check, ...]:
    """All rows of one table of checks."""
    text = (knowledge_root() / "checks" / name).read_text(encoding="utf-8")
    return tuple(csv.DictReader(io.StringIO(text)))


def select(name: str, **wanted: str) -> list[Check]:
    """Rows of one table whose columns hold exactly the wanted texts."""
    rows = [
        row
        for row in checks(name)
        if all(row[column] == value for column, value in wanted.items())
    ]
    assert rows, f"{name} has no row with {wanted}"
    return rows


def sources(row: Check) -> str:
    """Sources of a row as short references."""
    names = row["sources"].split()
    known = library().sources
    found = [known[n] for n in names]
    return "; ".join(f"{s.authors or s.title} {s.year}".strip() for s in found)


def composition(row: Check) -> dict[str, float]:
    """Materials of a row in the unit of its column ``composition_unit``."""
    pairs = (part.split("=") for part in row["composition"].split())
    return {material: float(amount) for material, amount in pairs}


def mixture_of(row: Check) -> Mixture:
    """The solution of a row, ready to be solved."""
    basis = "water" if row["composition_unit"] == "mmol_kg_water" else "solution"
    return mixture(library(), composition(row), basis=basis)


def temperature_c(row: Check) -> float:
    """Temperature of a row; 25 C where none is printed."""
    return float(row["temperature_c"] or 25.0)


def show(title: str, residuals: Sequence[Residual], digits: int = 3) -> str:
    """Print the residuals as a table; return its last line, the summary."""
    print(f"\n{title}")
    width = max((len(r.label) for r in residuals), default=0)
    for r in residuals:
        print(
            f"  {r.label:<{width}}  published {r.published:>10.{digits}f}  "
            f"found {r.found:>10.{digits}f}  miss {r.miss:+.{digits}f}  "
            f"[{r.status}] {r.source}"
        )
    line = summary(residuals, digits)
    print(f"  {line}")
    return line


def summary(residuals: Sequence[Residual], digits: int = 3) -> str:
    """Count, mean and largest difference in one line."""
    misses = [r.miss for r in residuals]
    worst = max(residuals, key=lambda r: abs(r.miss))
    return (
        f"{len(misses)} values, mean {sum(misses) / len(misses):+.{digits}f}, "
        f"largest {worst.miss:+.{digits}f} ({worst.label})"
    )


def largest(residuals: Iterable[Residual]) -> float:
    """Largest absolute difference."""
    return max(abs(r.miss) for r in residuals)


def mean(residuals: Sequence[Residual]) -> float:
    """Mean difference, with its sign."""
    return sum(r.miss for r in residuals) / len(residuals)


def groups(rows: Iterable[Check], *columns: str) -> Iterator[tuple[str, ...]]:
    """Distinct values of the columns, in the order of the table."""
    yield from dict.fromkeys(tuple(row[c] for c in columns) for row in rows)
