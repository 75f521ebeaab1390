"""The knowledge as one object: records by name, and further tables on demand."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any, TypeVar

from formbuf.errors import InputError, UnknownNameError
from formbuf.library import build, build_small, schemas
from formbuf.library.inactive_file import PrecedentFile
from formbuf.library.records import (
    CarbonDioxideValue,
    Conflict,
    Diluent,
    GlassAlkali,
    Ion,
    KindPrecedent,
    Material,
    Neutral,
    PartialVolume,
    Precedent,
    RouteLimit,
    SideChain,
    Source,
    Species,
    System,
    WaterProperty,
)
from formbuf.library.store import Store, TableFaults
from formbuf.library.tables import Row, Schema

_Record = TypeVar("_Record")


@dataclass(frozen=True, slots=True, eq=False)
class Library:
    """The knowledge that every calculation rests on; its records cannot be changed.

    Parameters
    ----------
    version : str
        Version of our tables.
    sha256 : str
        Checksum of our tables, names and contents.
    overlay : Path or None
        Directory of the user's tables that lie on top.
    overlay_sha256 : str
        Checksum of the overlay, empty without one.
    species, materials, systems, ions, neutrals, sources : mapping
        Records by id.
    precedents : mapping
        By ``(species, route)``.
    kind_precedents, glass_alkali : tuple
    route_limits, partial_volumes, diluents, side_chains, carbon_dioxide : mapping
        By route, solute, id, group and quantity.
    store : Store
        Reads further tables on demand.
    precedent_file : PrecedentFile or None
        The user's list of inactive ingredients that lies over the precedents.
    """

    version: str
    sha256: str
    overlay: Path | None
    overlay_sha256: str
    species: Mapping[str, Species]
    materials: Mapping[str, Material]
    systems: Mapping[str, System]
    ions: Mapping[str, Ion]
    neutrals: Mapping[str, Neutral]
    sources: Mapping[str, Source]
    precedents: Mapping[tuple[str, str], Precedent]
    kind_precedents: tuple[KindPrecedent, ...]
    route_limits: Mapping[str, RouteLimit]
    glass_alkali: tuple[GlassAlkali, ...]
    partial_volumes: Mapping[str, PartialVolume]
    carbon_dioxide: Mapping[str, CarbonDioxideValue]
    diluents: Mapping[str, Diluent]
    side_chains: Mapping[str, SideChain]
    store: Store = field(repr=False)
    precedent_file: PrecedentFile | None = None

    def __repr__(self) -> str:
        over = "" if self.overlay is None else f", with {self.overlay} over it"
        return (
            f"<Library {self.version}: {len(self.species)} species, "
            f"{len(self.materials)} materials, {len(self.systems)} systems, sha256 "
            f"{self.sha256[:12]}{over}>"
        )

    def get_species(self, name: str, *, where: str = "") -> Species:
        """Return a species by id, or raise `UnknownNameError`."""
        return _lookup(self.species, "species", name, where)

    def get_system(self, name: str, *, where: str = "") -> System:
        """Return a buffer system by id, or raise `UnknownNameError`."""
        return _lookup(self.systems, "system", name, where)

    def source(self, name: str) -> Source:
        """Return a source by id, or raise `UnknownNameError`."""
        return _lookup(self.sources, "source", name, "")

    def find_material(self, text: str, *, where: str = "") -> Material:
        """Return the one material that an id, a formula or a name stands for.

        Parameters
        ----------
        text : str
            Exact id, else a formula, a name or a sugar or polyol that only one
            material has; names are compared without regard to case.
        where : str, optional
            File and key in which the text stands, for the message.

        Raises
        ------
        UnknownNameError
            If nothing fits; the hint names the nearest ids.
        InputError
            If several materials fit; all are named.
        """
        material = self.materials.get(text)
        if material is not None:
            return material
        wanted = text.strip().casefold()
        formula = _plain_formula(text)
        found = [
            entry
            for entry in self.materials.values()
            if entry.name.casefold() == wanted
            or (entry.formula and _plain_formula(entry.formula) == formula)
            or (wanted in self.neutrals and set(entry.contents) == {wanted})
        ]
        if len(found) == 1:
            return found[0]
        if found:
            place = f"{where}: " if where else ""
            names = ", ".join(entry.id for entry in found)
            message = f"{place}{text!r} fits several materials, allowed one of {names}"
            raise InputError(message, hint="Name the material by its id.")
        bringing = [
            e.id
            for e in self.materials.values()
            if wanted in {*e.contents} & {*self.species}
        ]
        if bringing:
            place = f"{where}: " if where else ""
            message = (
                f"{place}{text!r} is a species, not a material, allowed one that brings "
                f"it: {', '.join(bringing)}"
            )
            raise InputError(message, hint="Name what is weighed.")
        names_too = (
            e.name
            for e in self.materials.values()
            if e.name.casefold().replace(" ", "_") not in self.materials
        )
        known = dict.fromkeys([*self.materials, *names_too])
        raise UnknownNameError("material", text, known, where=where)

    def read_table(self, schema: Schema) -> tuple[Row, ...]:
        """Return the rows of a table described by the caller, overlay applied.

        Each table is read and checked once. References (``Column.refers_to``) to
        the tables read at load are checked; so is that a value has a source where
        its basis asks for one.

        Raises
        ------
        KnowledgeError
            If a row of ours is broken; every fault as ``file:line:column``.
        InputError
            If a row of the overlay is broken.
        """
        faults = TableFaults()
        rows = self.store.rows(schema, faults)
        if schema.name not in self.store.checked:
            build.check_references(schema, rows, self._keys(), faults)
            faults.raise_if_any()
            self.store.checked.add(schema.name)
        return rows

    def check_table(self, name: str) -> tuple[Row, ...]:
        """Return the rows of a table of published checks by its short name.

        See `formbuf.library.check_schemas` for the names and the columns.
        """
        from formbuf.library.check_schemas import CHECKS

        schema = CHECKS.get(name)
        if schema is None:
            raise UnknownNameError("table of checks", name, CHECKS)
        return self.read_table(schema)

    def settings(self, name: str) -> Mapping[str, Any]:
        """Return a TOML file of the knowledge, the overlay's keys on top.

        The tables are shared between callers, who must leave them as they are.
        """
        return self.store.toml(name)

    @property
    def criteria(self) -> Mapping[str, Any]:
        """Weights and anchors of the ranking, ``criteria.toml``."""
        return self.settings("criteria.toml")

    @property
    def defaults(self) -> Mapping[str, Any]:
        """Assumptions used where the brief says nothing, ``defaults.toml``."""
        return self.settings("defaults.toml")

    @property
    def water_properties(self) -> tuple[WaterProperty, ...]:
        """Properties of water with their sources, read on demand."""
        rows = self.read_table(schemas.WATER_PROPERTIES)
        return build_small.build_water_properties(rows)

    @property
    def conflicts(self) -> tuple[Conflict, ...]:
        """Where a second look found another value, read on demand."""
        return build_small.build_conflicts(self.read_table(schemas.CONFLICTS))

    def _keys(self) -> Mapping[str, set[str]]:
        return {
            "sources.csv": set(self.sources),
            "species.csv": set(self.species),
            "materials.csv": set(self.materials),
            "systems.csv": set(self.systems),
            "routes.csv": set(self.route_limits),
            "ions.csv": set(self.ions),
            "neutrals.csv": set(self.neutrals),
            schemas.SPECIES_OR_NONE: {*self.species, "none"},
            "components": {*self.species, *self.ions, *self.neutrals},
        }


def _plain_formula(text: str) -> str:
    return text.strip().replace("·", ".").replace("*", ".").replace(" ", "")


def _lookup(table: Mapping[str, _Record], kind: str, name: str, where: str) -> _Record:
    record = table.get(name)
    if record is None:
        raise UnknownNameError(kind, name, table, where=where)
    return record
