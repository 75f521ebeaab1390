"""Say what looks unusual in a completed brief, or is left out of account."""

from __future__ import annotations

from collections.abc import Iterator

from formbuf.library import Library
from formbuf.product.product_brief import ProductBrief


def notices(brief: ProductBrief, library: Library) -> tuple[str, ...]:
    """Return one sentence for each thing a reader of the results should know."""
    return (
        *_route_notices(brief, library),
        *_drug_notices(brief, library),
        *_storage_notices(brief),
        *_overlay_notices(library),
    )


def _route_notices(brief: ProductBrief, library: Library) -> Iterator[str]:
    route = brief.product.route
    limits = library.route_limits.get(route)
    if limits is None:
        return
    target = brief.ph.target
    if not limits.ph_low <= target <= limits.ph_high:
        yield (
            f"target pH {target:g} lies outside {limits.ph_low:g} to "
            f"{limits.ph_high:g}, the usual range of route {route} ({limits.basis})"
        )
    aimed = brief.tonicity.target_mosm_kg
    low, high = limits.osmolality_low_mosm_kg, limits.osmolality_high_mosm_kg
    if aimed is None or low is None or high is None:
        return
    if not low <= aimed <= high:
        yield (
            f"target osmolality {aimed:g} lies outside {low:g} to {high:g} "
            f"mosmol/kg, the usual range of route {route} ({limits.basis})"
        )


def _drug_notices(brief: ProductBrief, library: Library) -> Iterator[str]:
    drug = brief.drug
    if drug.pka and drug.concentration_mmol_l is None:
        yield (
            "drug.pka is given without a concentration: what the drug buffers is "
            "left out of account"
        )
    if drug.counter_ion and drug.concentration_mmol_l is None:
        yield (
            "drug.counter_ion is given without a concentration: it is left out of "
            "account"
        )
    if drug.is_protein and drug.charge_known_from is None:
        yield (
            "what the protein itself buffers is not known: give a measured titration "
            "(drug.titration_file or [[drug.titration]]), its chains or residues, or a "
            "net charge, with its concentration, to have it counted"
        )
    if drug.charge_known_from not in {None, "pka"}:
        yield from _charge_notices(brief, library)
    if drug.titration:
        first, last = drug.titration[0].ph, drug.titration[-1].ph
        if first > brief.ph.low or last < brief.ph.high:
            yield (
                f"the titration reaches from pH {first:g} to {last:g} and does not "
                f"cover the window {brief.ph.low:g} to {brief.ph.high:g}"
            )


def _charge_notices(brief: ProductBrief, library: Library) -> tuple[str, ...]:
    # read only where needed: reading a brief does without the arrays of the chemistry
    from formbuf.product.background import drug_extra, nominal_ionic_strength_mol_kg
    from formbuf.product.drug_charge import charge_notes

    extra = drug_extra(library, brief)
    ions = extra.ions_mmol_l if extra is not None else {}
    return charge_notes(brief.drug, ions, nominal_ionic_strength_mol_kg(library, brief))


def _storage_notices(brief: ProductBrief) -> Iterator[str]:
    stored = [entry.state_at() for entry in brief.storage if entry.kind == "storage"]
    if brief.product.form == "liquid" and stored and "liquid" not in stored:
        yield (
            "the form is liquid but every storage temperature is frozen or dried; "
            'state form = "frozen" or "dried", or add the liquid storage'
        )


def _overlay_notices(library: Library) -> Iterator[str]:
    if library.overlay is not None:
        # read only where needed: it brings the descriptions of all tables
        from formbuf.product.overlay_changes import overlay_notice

        yield overlay_notice(library)
    own = [
        row.id
        for table in (library.species, library.materials, library.systems)
        for row in table.values()
        if row.overlay
    ]
    if own:
        yield f"in-house values are used for {', '.join(own)}"
