"""Turn the rows of the smaller tables into records: precedent, routes, water."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from types import MappingProxyType

from formbuf.library.build import basis_of, quantity
from formbuf.library.records import (
    CarbonDioxideValue,
    Conflict,
    Diluent,
    GlassAlkali,
    KindPrecedent,
    PartialVolume,
    Precedent,
    Quantity,
    RouteLimit,
    SideChain,
    WaterProperty,
)
from formbuf.library.tables import Row

_BODIES = ("usp_nf", "ph_eur", "jp")


def build_precedents(rows: Iterable[Row]) -> Mapping[tuple[str, str], Precedent]:
    """Return the precedents by species and route."""
    found = {
        (row.text("species"), row.text("route")): Precedent(
            species=row.text("species"),
            route=row.text("route"),
            level=row.text("level"),
            usual_low_mmol_l=row.number("usual_low_mmol_l"),
            usual_high_mmol_l=row.number("usual_high_mmol_l"),
            ceiling_mmol_l=row.number("ceiling_mmol_l"),
            monographs=MappingProxyType({body: row.text(body) for body in _BODIES}),
            monograph_note=row.text("monograph_note"),
            usual_forms=row.text("usual_forms"),
            reason=row.text("reason"),
            source=row.text("source"),
            level_basis=basis_of(row, "level_basis"),
            concentration_basis=(
                basis_of(row, "concentration_basis")
                if row.text("concentration_basis")
                else None
            ),
            monograph_basis=basis_of(row, "monograph_basis"),
            locator=row.text("locator"),
            overlay=row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_kind_precedents(rows: Iterable[Row]) -> tuple[KindPrecedent, ...]:
    """Return how usual each species is for each kind of product."""
    return tuple(
        KindPrecedent(
            kind=row.text("kind"),
            route_group=row.text("route_group"),
            species=row.text("species"),
            level=row.text("level"),
            basis=basis_of(row),
            source=row.text("source"),
            note=row.text("note"),
            overlay=row.overlay,
        )
        for row in rows
    )


def build_route_limits(rows: Iterable[Row]) -> Mapping[str, RouteLimit]:
    """Return the limits by route."""
    found = {
        row.text("route"): RouteLimit(
            route=row.text("route"),
            ph_low=row.figure("ph_low"),
            ph_high=row.figure("ph_high"),
            osmolality_low_mosm_kg=row.number("osmolality_low_mosm_kg"),
            osmolality_high_mosm_kg=row.number("osmolality_high_mosm_kg"),
            usual_volume_ml=row.number("usual_volume_ml"),
            source=row.text("source"),
            basis=basis_of(row),
            locator=row.text("locator"),
            note=row.text("note"),
            overlay=row.overlay,
            usual_volume_is=row.text("usual_volume_is"),
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_glass_alkali(rows: Iterable[Row]) -> tuple[GlassAlkali, ...]:
    """Return the surface-test limits by rising fill volume."""
    found = [
        GlassAlkali(
            fill_volume_above_ml=row.figure("fill_volume_above_ml"),
            fill_volume_to_ml=row.number("fill_volume_to_ml"),
            limit_ml_0p01m_hcl_per_100ml=row.figure("limit_ml_0p01m_hcl_per_100ml"),
            alkali_mmol_l=quantity(row, "alkali_mmol_l", "mmol/L"),
            note=row.text("note"),
            overlay=row.overlay,
        )
        for row in rows
    ]
    return tuple(sorted(found, key=lambda entry: entry.fill_volume_above_ml))


def build_partial_volumes(rows: Iterable[Row]) -> Mapping[str, PartialVolume]:
    """Return the partial specific volumes by solute."""
    found = {
        row.text("solute"): PartialVolume(
            row.text("solute"), quantity(row, "volume_ml_g", "mL/g"), row.overlay
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_carbon_dioxide(rows: Iterable[Row]) -> Mapping[str, CarbonDioxideValue]:
    """Return the carbon dioxide values by name."""
    found = {
        row.text("quantity"): CarbonDioxideValue(
            row.text("quantity"),
            quantity(row, "value", row.text("unit")),
            row.number("temperature_c"),
            row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_diluents(rows: Iterable[Row]) -> Mapping[str, Diluent]:
    """Return the diluents by id."""
    found = {
        row.text("id"): Diluent(
            id=row.text("id"),
            name=row.text("name"),
            contents_mmol_l=MappingProxyType(dict(row.counts("contents_mmol_l"))),
            ph_low=row.figure("ph_low"),
            ph_high=row.figure("ph_high"),
            basis=basis_of(row),
            source=row.text("source"),
            note=row.text("note"),
            overlay=row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_side_chains(rows: Iterable[Row]) -> Mapping[str, SideChain]:
    """Return the ionizable groups of proteins by name."""
    found = {
        row.text("group"): SideChain(
            group=row.text("group"),
            residue=row.text("residue"),
            acid_charge=row.integer("acid_charge"),
            pk_model_peptide=_pk(row, "pk_model_peptide"),
            pk_folded_average=_pk(row, "pk_folded_average"),
            note=row.text("note"),
            overlay=row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)


def _pk(row: Row, column: str) -> Quantity:
    return Quantity(
        value=row.figure(column),
        unit="1",
        source=row.text(f"{column}_source"),
        locator="",
        basis=basis_of(row),
    )


def build_water_properties(rows: Iterable[Row]) -> tuple[WaterProperty, ...]:
    """Return the values and coefficients for water in the order of the table."""
    return tuple(
        WaterProperty(
            quantity=row.text("quantity"),
            temperature_c=row.number("temperature_c"),
            value=quantity(row, "value", row.text("unit")),
            recommended=row.flag("recommended"),
            overlay=row.overlay,
        )
        for row in rows
    )


def build_conflicts(rows: Iterable[Row]) -> tuple[Conflict, ...]:
    """Return the second looks in the order of the table."""
    return tuple(
        Conflict(
            table=row.text("table"),
            row_key=row.text("row_key"),
            column=row.text("column"),
            old_value=row.text("old_value"),
            found_value=row.text("found_value"),
            unit=row.text("unit"),
            source=row.text("source"),
            verdict=row.text("verdict"),
            note=row.text("note"),
            overlay=row.overlay,
        )
        for row in rows
    )
