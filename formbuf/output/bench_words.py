"""Words and data that the pages of the bench share."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from formbuf.bench.setup import Bench
from formbuf.output import serialise

#: What a temperature stands for, where the word of the data is no noun.
KIND_WORDS = {"measure": "measurement", "prepare": "preparation"}


def made_words(bench: Bench) -> str:
    """Return strength and system: 20 mmol/L histidine hydrochloride."""
    if bench.system.role == "none":
        return bench.system.name
    if bench.given_mmol_l is not None:
        return f"{bench.system.name} (own formula)"
    return f"{bench.concentration_mmol_l:g} mmol/L {bench.system.name}"


def target_words(bench: Bench) -> str:
    """Return the target with its temperature: pH 6.00 at 25 C.

    An own formula of materials reads what it reads: its target is called that.
    """
    what = "pH" if bench.given_mmol_l is None else "target pH"
    return f"{what} {bench.target_ph:.2f} at {bench.measure_temperature_c:g} C"


def kinds_words(kinds: tuple[str, ...]) -> str:
    """Return what a temperature stands for, in words."""
    return ", ".join(KIND_WORDS.get(kind, kind) for kind in kinds)


def bench_dict(bench: Bench) -> dict[str, Any]:
    """Return what a bench works on as plain data."""
    background = bench.background
    return {
        "system": bench.system.id,
        "concentration_mmol_l": bench.concentration_mmol_l,
        "target_ph": bench.target_ph,
        "low_ph": bench.low_ph,
        "high_ph": bench.high_ph,
        "measure_temperature_c": bench.measure_temperature_c,
        "prepare_temperature_c": bench.prepare_temperature_c,
        "temperatures_c": [
            {"temperature_c": t, "kinds": list(kinds)}
            for t, kinds in bench.temperatures_c.items()
        ],
        "formula_mmol_l": plain_amounts(bench.given_mmol_l),
        "excipients_mmol_l": dict(background.materials_mmol_l),
        "tonicity_agent": background.agent,
        "target_mosm_kg": background.target_mosm_kg,
        "drug_mmol_l": sum(extra.mmol_l for extra in background.extras) or None,
        "dose_volume_ml": bench.dose_volume_ml,
    }


def plain_amounts(given: Mapping[str, float] | None) -> dict[str, float] | None:
    """Return the materials of an own formula as plain data; None for a system."""
    return None if given is None else dict(given)


def materials_list(bench: Bench, materials_mmol_l: dict[str, float]) -> list[Any]:
    """Return materials with mmol/L and g/L as plain data."""
    return [
        {
            "material": key,
            "mmol_l": mmol_l,
            "g_l": mmol_l
            * bench.library.find_material(key).molar_mass_g_mol.value
            / 1000.0,
        }
        for key, mmol_l in materials_mmol_l.items()
    ]


def head(schema: str, bench: Bench) -> dict[str, Any]:
    """Return the keys with which a result of the bench begins."""
    return {**serialise.header(schema, bench.library), "inputs": bench_dict(bench)}
