"""Load the knowledge from its tables, with a user's tables on top."""

from __future__ import annotations

import functools
from collections.abc import Mapping
from pathlib import Path

from formbuf.errors import InputError
from formbuf.library import build, build_small, schemas
from formbuf.library.library import Library
from formbuf.library.store import Store, TableFaults, knowledge_root


@functools.cache
def load_library(overlay: Path | None = None) -> Library:
    """Load the knowledge, with a user's tables on top.

    Parameters
    ----------
    overlay : Path, optional
        Directory with tables of the same names; a row there replaces ours of the
        same key, or is added.

    Raises
    ------
    KnowledgeError
        If a table of ours is missing or broken; every fault at once.
    InputError
        If the overlay does not exist or a table in it is broken.
    """
    if overlay is not None and not Path(overlay).is_dir():
        message = f"overlay {str(overlay)!r} is no directory, allowed a directory"
        raise InputError(message)
    return open_library(
        Store(knowledge_root(), None if overlay is None else Path(overlay))
    )


def open_library(store: Store) -> Library:
    """Load the knowledge that a store reads; see `load_library`."""
    faults = TableFaults()
    for line in store.unknown_overlay_files():
        faults.overlay.lines.append(line)
    tables = {schema.name: store.rows(schema, faults) for schema in schemas.EAGER}
    faults.raise_if_any()
    keys = _table_keys(tables)
    for schema in schemas.EAGER:
        build.check_references(schema, tables[schema.name], keys, faults)
    species = build.build_species(tables, faults)
    faults.raise_if_any()
    store.checked.update(tables)
    library = Library(
        version=store.version(),
        sha256=store.sha256(),
        overlay=store.overlay,
        overlay_sha256=store.overlay_sha256(),
        species=species,
        materials=build.build_materials(tables),
        systems=build.build_systems(tables["systems.csv"]),
        ions=build.build_ions(tables["ions.csv"]),
        neutrals=build.build_neutrals(tables["neutrals.csv"]),
        sources=build.build_sources(tables["sources.csv"]),
        precedents=build_small.build_precedents(tables["precedent.csv"]),
        kind_precedents=build_small.build_kind_precedents(tables["kind_precedent.csv"]),
        route_limits=build_small.build_route_limits(tables["routes.csv"]),
        glass_alkali=build_small.build_glass_alkali(tables["glass_alkali.csv"]),
        partial_volumes=build_small.build_partial_volumes(
            tables["partial_volumes.csv"]
        ),
        carbon_dioxide=build_small.build_carbon_dioxide(tables["carbon_dioxide.csv"]),
        diluents=build_small.build_diluents(tables["diluents.csv"]),
        side_chains=build_small.build_side_chains(tables["side_chains.csv"]),
        store=store,
    )
    if store.overlay is not None:
        _check_overlay(library, tables)
    return library


def _check_overlay(library: Library, tables: build.Tables) -> None:
    """Raise if rows of the user disagree with themselves or with ours."""
    from formbuf.library.audit import check_limits, check_materials

    faults = TableFaults()
    check_materials(library, tables["materials.csv"], faults)
    check_limits(library, faults)
    # ours are sound by themselves: what does not fit now, the user's rows brought
    faults.overlay.lines += faults.ours.lines
    faults.ours.lines.clear()
    faults.raise_if_any()


def _table_keys(tables: build.Tables) -> Mapping[str, set[str]]:
    keys = {
        schema.name: {row.text(schema.key[0]) for row in tables[schema.name]}
        for schema in (
            schemas.SOURCES,
            schemas.SPECIES,
            schemas.IONS,
            schemas.NEUTRALS,
            schemas.MATERIALS,
            schemas.SYSTEMS,
            schemas.ROUTES,
        )
    }
    keys[schemas.SPECIES_OR_NONE] = keys["species.csv"] | {"none"}
    keys["components"] = keys["species.csv"] | keys["ions.csv"] | keys["neutrals.csv"]
    return keys
