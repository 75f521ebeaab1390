"""Bring drug, excipients and own formulas of a brief to the library's terms."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from types import MappingProxyType

from formbuf.product.brief_filler import Filler
from formbuf.product.brief_model import Brief, Candidate
from formbuf.product.product_parts import (
    AnchorInfo,
    CandidateInfo,
    DrugInfo,
    DrugStep,
    ExcipientInfo,
    RankingInfo,
    TitrationPerGram,
    TitrationReading,
)
from formbuf.product.protein_sequence import (
    Chain,
    count_groups,
    molar_mass_of,
    paired_cysteines,
    read_sequence,
)
from formbuf.product.protein_titration import read_titration

_AMOUNT_UNITS = {
    "mmol_l": "mmol/L",
    "mg_ml": "mg/mL",
    "g_l": "g/L",
    "percent_w_v": "% w/v",
}
_G_L_PER_UNIT = {"mg_ml": 1.0, "g_l": 1.0, "percent_w_v": 10.0}


def complete_excipients(filler: Filler) -> tuple[ExcipientInfo, ...]:
    """Return every excipient in mmol/L and g/L of the material as weighed."""
    found: list[ExcipientInfo] = []
    for row in filler.brief.excipient:
        material = filler.library.find_material(row.material)
        molar_mass = material.molar_mass_g_mol.value
        unit = next(key for key in _AMOUNT_UNITS if getattr(row, key) is not None)
        amount = float(getattr(row, unit))
        if unit == "mmol_l":
            mmol_l, g_l = amount, amount * molar_mass / 1000.0
        else:
            g_l = amount * _G_L_PER_UNIT[unit]
            mmol_l = g_l / molar_mass * 1000.0
        info = ExcipientInfo(material.id, mmol_l, g_l, amount, _AMOUNT_UNITS[unit])
        found.append(info)
    return tuple(found)


def complete_drug(filler: Filler) -> DrugInfo:
    """Return the drug with both concentrations where the molar mass is known."""
    drug = filler.brief.drug
    mass, amount = drug.concentration_mg_ml, drug.concentration_mmol_l
    residues, molar_mass = _protein(filler)
    if molar_mass is not None and mass is not None:
        amount = mass / molar_mass * 1000.0
    elif molar_mass is not None and amount is not None:
        mass = amount * molar_mass / 1000.0
    per_mole = drug.counter_ion_per_mole
    if per_mole is None:
        needed = drug.counter_ion is not None
        per_mole = float(filler.take("drug.counter_ion_per_mole")) if needed else 0.0
    steps = sorted(drug.pka, key=lambda step: step.pka)
    return DrugInfo(
        kind=filler.kind,
        name=drug.name or "",
        concentration_mg_ml=mass,
        concentration_mmol_l=amount,
        molar_mass_g_mol=molar_mass,
        isoelectric_point=drug.isoelectric_point,
        counter_ion=drug.counter_ion,
        counter_ion_per_mole=per_mole,
        groups=drug.groups or (("none",) if "groups" in drug.model_fields_set else ()),
        pka=tuple(
            DrugStep(step.pka, step.acid_charge, step.dh_kj_mol, step.dcp_j_mol_k)
            for step in steps
        ),
        titration=tuple(
            TitrationReading(point.ph, point.base_mmol_l) for point in drug.titration
        ),
        net_charge=drug.net_charge,
        net_charge_ph=drug.net_charge_ph,
        residues=MappingProxyType(residues),
        titration_mmol_g=_titration_file(filler),
    )


def _protein(filler: Filler) -> tuple[dict[str, float], float | None]:
    """Return the groups of a protein and the molar mass, from its chains if given."""
    drug, origin = filler.brief.drug, filler.brief.origin
    if not drug.chain:
        return dict(drug.residues), drug.molar_mass_g_mol
    chains = [
        Chain(
            read_sequence(
                row.sequence, where=origin.where(("drug", "chain", index, "sequence"))
            ),
            row.copies,
        )
        for index, row in enumerate(drug.chain)
    ]
    bonds = drug.disulfides
    if bonds is None:
        bonds = paired_cysteines(chains)
        reason = "every cysteine with a partner, an odd one free"
        filler.assume("drug.disulfides", float(bonds), "", "judgement", reason)
    groups = count_groups(chains, bonds, where=origin.where(("drug", "disulfides")))
    molar_mass = drug.molar_mass_g_mol
    if molar_mass is None:
        molar_mass = round(molar_mass_of(chains, bonds), 1)
        reason = "from the sequence; glycans are left out"
        filler.assume("drug.molar_mass_g_mol", molar_mass, "g/mol", "derived", reason)
    return groups, molar_mass


def _titration_file(filler: Filler) -> tuple[TitrationPerGram, ...]:
    name = filler.brief.drug.titration_file
    if name is None:
        return ()
    origin = filler.brief.origin
    path = Path(origin.name).parent / name
    readings = read_titration(path, where=origin.where(("drug", "titration_file")))
    return tuple(TitrationPerGram(ph, mmol_g) for ph, mmol_g in readings)


def complete_candidates(filler: Filler) -> tuple[CandidateInfo, ...]:
    """Return the user's own formulas with material ids."""

    def materials(row: Mapping[str, float]) -> Mapping[str, float]:
        amounts: dict[str, float] = {}
        for name, mmol_l in row.items():
            found = filler.library.find_material(name)
            amounts[found.id] = amounts.get(found.id, 0.0) + mmol_l
        return MappingProxyType(amounts)

    def named(row: Candidate) -> str:
        known = filler.library.systems.get(row.system or "")
        what = known.name if known is not None else row.system or ""
        return row.name or f"{what}, {row.concentration_mmol_l or 0:g} mmol/L"

    return tuple(
        CandidateInfo(
            name=named(row),
            system=row.system,
            concentration_mmol_l=row.concentration_mmol_l,
            materials=materials(row.materials),
        )
        for row in filler.brief.candidate
    )


def complete_ranking(brief: Brief) -> RankingInfo:
    """Return the weights and anchors the brief sets."""
    ranking = brief.ranking
    anchors = {
        name: AnchorInfo(anchor.full, anchor.floor)
        for name, anchor in ranking.anchors.items()
    }
    weights = MappingProxyType(dict(ranking.weights))
    return RankingInfo(weights=weights, anchors=MappingProxyType(anchors))
