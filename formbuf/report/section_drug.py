"""What is known of the drug substance, and what the section still owes."""

from __future__ import annotations

from formbuf.report.content import Block, Column, Note, Paragraph, Section, Spans
from formbuf.report.reading import Cursor, joined, link, parted, spans
from formbuf.report.story import Story, number, table
from formbuf.report.words import KINDS, spoken, word


def drug(story: Story) -> Section:
    """Return what is known of the drug, and what this section still needs."""
    d = story.brief.at("drug")
    kind = d.text("kind")
    blocks: list[Block] = [Paragraph(_drug_line(d, kind))]
    steps = d.each("pka")
    if steps:
        blocks.append(
            table(
                "t-drug",
                spans("Ionization of the drug as stated"),
                (
                    number("pKa"),
                    Column("Charge of the acid", "right"),
                    number("Enthalpy, kJ/mol"),
                    number("Heat capacity, J/(mol K)"),
                ),
                [
                    (
                        spans(s.plain("pka")),
                        spans(s.value("acid_charge", places=0, sign=True)),
                        spans(s.plain("dh_kj_mol")),
                        spans(s.plain("dcp_j_mol_k")),
                    )
                    for s in steps
                ],
                _unknown_enthalpy(steps),
            )
        )
    blocks += _titration(d, kind)
    if kind != "none":
        blocks.append(
            Paragraph(
                spans(
                    "Owed here before filing: the pH-rate profile, solubility against pH, "
                    "and the sensitivities (metals, oxygen, light, nucleophiles) from "
                    "which the pH window of ",
                    link("requirements"),
                    " follows. The calculation takes the window as given.",
                )
            )
        )
    return Section(
        "drug",
        spans("Needs of the drug substance"),
        tuple(blocks),
        placement="3.2.P.2.1.1, drug substance",
    )


def _drug_line(d: Cursor, kind: str) -> Spans:
    if kind == "none":
        return spans("The product holds no drug.")
    name = spans(d.quote("name"), ", ") if d.get("name") else None
    parts: list[Spans] = []
    if d.get("concentration_mg_ml") is not None:
        parts.append(spans("at ", d.plain("concentration_mg_ml", unit="mg/mL")))
    if d.get("concentration_mmol_l") is not None:
        unit = d.value("concentration_mmol_l", unit="mmol/L")
        parts.append(spans("that is " if parts else "at ", unit))
    if d.get("molar_mass_g_mol") is not None:
        parts.append(spans("molar mass ", d.plain("molar_mass_g_mol", unit="g/mol")))
    if d.get("isoelectric_point") is not None:
        parts.append(spans("isoelectric point ", d.plain("isoelectric_point")))
    if d.get("counter_ion"):
        parts.append(spans("counter-ion ", d.quote("counter_ion")))
    groups = d.get("groups") or []
    line = spans(
        "The drug is ",
        name,
        word(KINDS, kind),
        ", " if parts else None,
        parted(parts, ", "),
        ".",
    )
    if groups:
        places = [spans(spoken(str(group))) for group in groups]
        line = spans(line, " Groups that rules ask for: ", joined(places), ".")
    return line


def _unknown_enthalpy(steps: list[Cursor]) -> list[Spans]:
    if all(s.get("dh_kj_mol") is not None for s in steps):
        return []
    return [
        spans("Where no enthalpy is stated the pKa of the drug is taken as constant.")
    ]


def _titration(d: Cursor, kind: str) -> list[Block]:
    readings = d.each("titration")
    if readings:
        return [
            table(
                "t-titration",
                spans("Measured titration of the product without buffer"),
                (number("pH"), number("Strong base added, mmol/L")),
                [
                    (spans(r.plain("ph")), spans(r.plain("base_mmol_l")))
                    for r in readings
                ],
            )
        ]
    if kind == "none" or d.get("pka"):
        return []
    known = _estimated_from(d)
    if known:
        return [
            Note(
                spans(
                    f"What the drug itself buffers is estimated from {known}; a titration "
                    "of the product without buffer should confirm it (",
                    link("need"),
                    ").",
                )
            )
        ]
    return [
        Note(
            spans(
                "Neither pKa values nor a titration of the product without buffer are "
                "given: what the drug itself buffers counts as nothing."
            )
        )
    ]


def _estimated_from(d: Cursor) -> str:
    """Say what tells how the drug binds protons, the best first; empty if nothing."""
    if d.get("titration_mmol_g") and d.get("concentration_mg_ml"):
        return "its titration per gram"
    if not d.get("concentration_mmol_l"):
        return ""
    if d.get("residues"):
        return "its ionisable groups"
    if d.get("net_charge") is not None:
        return "its isoelectric point and net charge"
    return ""


def buffers_by_estimate(d: Cursor) -> bool:
    """Whether what a protein buffers is known, from whatever the brief says of it."""
    return bool(d.get("titration") or d.get("pka") or _estimated_from(d))
