"""The words that a report has for the words of briefs and tables."""

from __future__ import annotations

from collections.abc import Mapping

from formbuf.report.content import Spans, Text
from formbuf.report.reading import Cursor, spans

ROUTES: Mapping[str, str] = {
    "intravenous": "intravenous",
    "subcutaneous": "subcutaneous",
    "intramuscular": "intramuscular",
    "intradermal": "intradermal",
    "intra_articular": "intra-articular",
    "intravitreal": "intravitreal",
    "intracameral": "intracameral",
    "intrathecal_epidural": "intrathecal or epidural",
    "ophthalmic_topical": "topical ophthalmic",
    "otic": "otic",
    "nasal": "nasal",
    "inhalation": "inhalation",
    "irrigation": "irrigation",
    "oral_liquid": "oral",
    "topical": "topical",
}
FORMS: Mapping[str, str] = {
    "liquid": "solution",
    "frozen": "frozen solution",
    "dried": "freeze-dried product",
}
KINDS: Mapping[str, str] = {
    "antibody": "an antibody",
    "fusion_protein": "a fusion protein",
    "protein": "a protein",
    "peptide": "a peptide",
    "small_molecule": "a small molecule",
    "oligonucleotide": "an oligonucleotide",
    "vaccine": "a vaccine antigen",
    "vector": "a viral vector",
    "lipid_nanoparticle": "lipid nanoparticles",
    "none": "none (vehicle or placebo)",
}
STORAGE: Mapping[str, str] = {
    "measure": "measurement",
    "prepare": "preparation",
    "storage": "storage",
    "use": "use",
    "accelerated": "accelerated storage",
    "body": "body",
    "process": "process",
}
CONTAINERS: Mapping[str, str] = {
    "glass_vial": "glass vial",
    "glass_ampoule": "glass ampoule",
    "glass_syringe": "glass syringe",
    "glass_cartridge": "glass cartridge",
    "glass_bottle": "glass bottle",
    "plastic_vial": "plastic vial",
    "plastic_ampoule": "plastic ampoule",
    "plastic_syringe": "plastic syringe",
    "plastic_bottle": "plastic bottle",
    "plastic_dropper": "plastic dropper",
    "plastic_bag": "plastic bag",
    "tube": "tube",
}
POPULATIONS: Mapping[str, str] = {
    "adult": "adults",
    "elderly": "elderly patients",
    "adolescent": "adolescents",
    "child": "children",
    "infant": "infants",
    "neonate": "neonates",
}
EXPOSURES: Mapping[str, str] = {
    "closed": "closed to the air",
    "open": "open to the air",
    "headspace": "below a headspace",
}
BOOKS: Mapping[str, str] = {"usp_nf": "USP-NF", "ph_eur": "Ph. Eur.", "jp": "JP"}
FILINGS: Mapping[str, str] = {"other": "other"}
CRITERIA: Mapping[str, str] = {
    "capacity": "capacity",
    "temperature_drift": "temperature drift",
    "tonicity_share": "tonicity share",
    "frozen_drift": "freezing drift",
    "compatibility": "compatibility",
    "precedent": "precedent",
    "dose_burden": "dose burden",
}
#: The same for the head of a narrow column.
CRITERIA_SHORT: Mapping[str, str] = {
    "capacity": "Capacity",
    "temperature_drift": "Temp. drift",
    "tonicity_share": "Tonicity",
    "frozen_drift": "Freezing",
    "compatibility": "Compat.",
    "precedent": "Preced.",
    "dose_burden": "Dose",
}
SCREENS: Mapping[str, str] = {
    "precedent_avoid": "avoided on this route",
    "no_precedent": "no precedent",
    "ceiling": "ceiling of the route",
    "excluded": "excluded by the brief",
    "osmolality": "osmolality",
    "carbon_dioxide": "carbon dioxide",
    "storage_window": "storage window",
    "solubility": "solubility",
    "buffers_through_counter_ion": "buffers through its counter-ion",
    "ph_window": "pH window",
    "cannot_reach_ph": "pH cannot be reached",
}
#: Standings and outcomes of rules that a report calls otherwise than the result.
STANDINGS: Mapping[str, str] = {"not evaluable": "open"}
OUTCOMES: Mapping[str, str] = {
    "fired": "applies",
    "not fired": "does not apply",
    "not evaluable": "open",
}
SEVERITIES: Mapping[str, str] = {
    "exclude": "exclusion",
    "warn": "warning",
    "note": "note",
}
_NUMBERS = [
    "no",
    "one",
    "two",
    "three",
    "four",
    "five",
    "six",
    "seven",
    "eight",
    "nine",
    "ten",
    "eleven",
    "twelve",
]


def word(table: Mapping[str, str], key: str) -> str:
    """Return the word of a table, else the key with blanks."""
    return table.get(key, key.replace("_", " "))


def unit_words(unit: str) -> str:
    """Return a unit of the tables as a report writes it."""
    return {"C": "°C", "1/day": "per day"}.get(unit, unit)


def spoken(key: str) -> str:
    """Return an identifier as words: ``titratable_acidity`` -> ``titratable acidity``."""
    return key.replace("_", " ")


def counted(place: Cursor, singular: str, plural: str = "") -> Spans:
    """Return a count with its noun: ``one candidate``, ``15 candidates``."""
    number = int(place.number() or 0)
    noun = singular if number == 1 else (plural or f"{singular}s")
    if 0 <= number < len(_NUMBERS):
        return (Text(f"{_NUMBERS[number]} {noun}"),)
    return spans(place.plain(), f" {noun}")


def was(count: int) -> str:
    """Return ``was`` or ``were``."""
    return "was" if count == 1 else "were"
