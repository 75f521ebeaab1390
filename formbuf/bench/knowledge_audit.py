"""Audit of the whole knowledge, with what only upper layers can compare.

`formbuf.library.audit` goes through the tables; here every table on disk is read
through its description, every rule must be able to fire, the defaults and the ranking
must serve a brief, and the constants typed into the chemistry must be those of the
tables.
"""

from __future__ import annotations

import functools
from collections.abc import Callable, Iterable, Mapping

from formbuf.advice.criteria_table import settings_for
from formbuf.advice.error_model import UNCERTAINTY
from formbuf.bench.grades import GRADES
from formbuf.chemistry import activity, gas, water
from formbuf.errors import InputError, KnowledgeError
from formbuf.library import Library, schemas
from formbuf.library.audit import audit
from formbuf.library.check_schemas import CHECKS
from formbuf.library.rule_check import rule_faults
from formbuf.library.rule_tables import DOSE_LIMITS, FACTS, RULES
from formbuf.library.rules import load_rulebook
from formbuf.library.tables import Schema
from formbuf.product import freezing_schemas
from formbuf.product.brief import brief_from_options, complete
from formbuf.product.osmotics import OSMOTIC, osmotic_law
from formbuf.product.protein import ENTHALPIES

RELATIVE_TOLERANCE = 1e-12


def table_schemas() -> Mapping[str, Schema]:
    """Return the description of every table of ours by its name."""
    described: Iterable[Schema] = (
        *schemas.EAGER,
        *schemas.LAZY,
        FACTS,
        RULES,
        DOSE_LIMITS,
        OSMOTIC,
        ENTHALPIES,
        UNCERTAINTY,
        GRADES,
        freezing_schemas.STATES,
        freezing_schemas.PITZER,
        freezing_schemas.SOLIDS,
        freezing_schemas.SOLUBILITY,
        freezing_schemas.CONSTANTS,
        freezing_schemas.PHASE_POINTS,
        freezing_schemas.OBSERVATIONS,
        freezing_schemas.CLASS_TABLE,
        *CHECKS.values(),
    )
    return {schema.name: schema for schema in described}


def audit_all(library: Library) -> list[str]:
    """Return every fault of the knowledge as ``file:line:column: what, allowed``.

    Parameters
    ----------
    library : Library
        As loaded; an overlay is audited with it.
    """
    described = table_schemas()
    faults = []
    for name, _ in library.store.files():
        if not name.endswith(".csv"):
            continue
        if name not in described:
            faults.append(f"{name}:1:file: no description of this table is known")
            continue
        faults += _faults_of(functools.partial(library.read_table, described[name]))
    faults += audit(library)
    faults += _faults_of(lambda: osmotic_law(library))
    faults += _faults_of(lambda: _try_brief(library))
    faults += _faults_of(lambda: load_rulebook(library))
    if not faults:
        book = load_rulebook(library)
        faults += rule_faults(book.rules, book.vocabulary)
    faults += constant_faults(library)
    return list(dict.fromkeys(faults))


def _faults_of(read: Callable[[], object]) -> list[str]:
    """Return the faults that reading something meets."""
    try:
        read()
    except KnowledgeError as error:
        return list(error.faults)
    except InputError as error:
        return error.message.splitlines()
    return []


def _try_brief(library: Library) -> None:
    """Complete a brief and read the ranking for it, defaults and all."""
    done = complete(brief_from_options(ph=7.0, route="intravenous"), library)
    settings_for(library, done.brief)


def constant_faults(library: Library) -> list[str]:
    """Return where a constant typed into the chemistry is not that of its table."""
    rows = library.read_table(schemas.WATER_PROPERTIES)
    tabled = {
        row.text("quantity"): row for row in rows if row.number("temperature_c") is None
    }
    faults = []
    for name, typed in typed_constants().items():
        row = tabled.get(name)
        if row is None:
            faults.append(f"water_properties.csv:1:quantity: {name} is missing")
        elif not _same(row.figure("value"), typed):
            faults.append(
                f"{row.where('value')}: {name} is {row.figure('value')!r}, the "
                f"calculation uses {typed!r}"
            )
    law = gas.CARBON_DIOXIDE
    for name, typed in (
        ("henry_solubility", law.solubility_mol_m3_pa),
        ("henry_temperature_coefficient", law.temperature_coefficient_k),
    ):
        value = library.carbon_dioxide[name].value.value
        if not _same(value, typed):
            faults.append(
                f"carbon_dioxide.csv:{name}:value: {value!r}, the calculation uses "
                f"{typed!r}"
            )
    return faults


def _same(one: float, other: float) -> bool:
    return abs(one - other) <= RELATIVE_TOLERANCE * max(abs(one), abs(other))


def typed_constants() -> dict[str, float]:
    """Return the constants of the chemistry by their names in the table of water."""
    found = {
        f"osmotic_slope_chebyshev_{k:02d}": value
        for k, value in enumerate(water.OSMOTIC_SLOPE_CHEBYSHEV)
    }
    found["iapws_r11_07_n"] = float(water.PKW_N)
    found["iapws_r11_07_molar_mass_g_mol"] = water.PKW_MOLAR_MASS_G_MOL
    for name, values in (
        ("alpha", water.PKW_ALPHA),
        ("beta", water.PKW_BETA),
        ("gamma", water.PKW_GAMMA),
    ):
        found |= {f"iapws_r11_07_{name}{k}": v for k, v in enumerate(values)}
    found["activity_size_parameter"] = activity.ION_SIZE_FACTOR
    return found
