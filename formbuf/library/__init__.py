"""The knowledge of the tool: typed records with their sources, and their audit."""

from __future__ import annotations

from formbuf.library.inhouse import with_rows
from formbuf.library.library import Library
from formbuf.library.loader import load_library
from formbuf.library.records import (
    BASES,
    SOURCELESS,
    Association,
    Basis,
    CarbonDioxideValue,
    Conflict,
    Crosscheck,
    Diluent,
    GlassAlkali,
    Ion,
    IonizationStep,
    KindPrecedent,
    Material,
    Neutral,
    PartialVolume,
    Precedent,
    Quantity,
    RouteLimit,
    SideChain,
    Solubility,
    Source,
    Species,
    System,
    WaterProperty,
)
from formbuf.library.tables import Column, Row, Schema

__all__ = [
    "BASES",
    "SOURCELESS",
    "Association",
    "Basis",
    "CarbonDioxideValue",
    "Column",
    "Conflict",
    "Crosscheck",
    "Diluent",
    "GlassAlkali",
    "Ion",
    "IonizationStep",
    "KindPrecedent",
    "Library",
    "Material",
    "Neutral",
    "PartialVolume",
    "Precedent",
    "Quantity",
    "RouteLimit",
    "Row",
    "Schema",
    "SideChain",
    "Solubility",
    "Source",
    "Species",
    "System",
    "WaterProperty",
    "load_library",
    "with_rows",
]
