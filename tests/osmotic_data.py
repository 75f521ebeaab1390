"""The published osmolalities of the checkout; see `formbuf.qualify.osmotic_points`."""

from __future__ import annotations

from collections.abc import Iterable

from reference_tables import library

from formbuf.qualify import osmotic_points
from formbuf.qualify.osmotic_points import NOTHING, Point

__all__ = ["NOTHING", "Point", "isotonic_points", "points"]


def points(
    *, sources: str = "", substances: Iterable[str] = (), quantity: str = ""
) -> list[Point]:
    """Rows with a composition per kilogram of water, in the order of the table."""
    return osmotic_points.points(
        library(), sources=sources, substances=substances, quantity=quantity
    )


def isotonic_points(substances: Iterable[str]) -> list[Point]:
    """Concentrations that freeze at -0.52 C, interpolated in the same tables."""
    return osmotic_points.isotonic_points(library(), substances)
