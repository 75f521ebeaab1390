"""The tables as installed: sound, as recorded, and leading to the recorded choices.

No published value stands behind these cases: they show that this installation holds
the tables of its version and draws the same conclusions from them.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from formbuf.advice.shortlist import shortlist
from formbuf.bench.knowledge_audit import audit_all, table_schemas
from formbuf.library import Library
from formbuf.library.tables import Row
from formbuf.product.brief import brief_from_options
from formbuf.qualify.records import Case, Group

TABLES = "tables"
CHOICES = "shortlists"
SOURCE = "record of this version"
#: Largest difference of a desirability, and of a concentration [mmol/L].
CHOICE_LIMIT = 1e-4

#: Briefs whose shortlists are compared with the record: the usual kinds of product.
BRIEFS: Mapping[str, Mapping[str, Any]] = {
    "subcutaneous antibody pH 6.0": {
        "ph": 6.0,
        "route": "subcutaneous",
        "store": (5.0, -40.0),
        "drug_kind": "antibody",
        "drug_mg_ml": 50.0,
        "tonicity_agent": "sucrose",
    },
    "intravenous small molecule pH 4.5": {
        "ph": 4.5,
        "route": "intravenous",
        "store": (25.0,),
        "drug_kind": "small_molecule",
    },
    "one-litre infusion pH 7.4": {
        "ph": 7.4,
        "route": "intravenous",
        "store": (25.0,),
        "drug_kind": "small_molecule",
        "volume_ml": 1000.0,
    },
    "eye drop pH 7.2": {
        "ph": 7.2,
        "route": "ophthalmic_topical",
        "store": (25.0,),
        "drug_kind": "small_molecule",
    },
    "freeze-dried protein pH 7.0": {
        "ph": 7.0,
        "route": "intravenous",
        "store": (5.0,),
        "form": "dried",
        "drug_kind": "protein",
        "drug_mg_ml": 5.0,
    },
}


def groups(library: Library, record: Mapping[str, Any]) -> Iterator[Group]:
    """Yield the audit, the tables and the shortlists.

    Parameters
    ----------
    library : Library
    record : mapping
        Digests of the tables under ``tables`` and choices under ``choices``.
    """
    yield audited(library)
    yield as_recorded(library, record.get("tables", {}))
    for title in BRIEFS:
        yield choices(library, title, record.get("choices", {}).get(title, {}))


def audited(library: Library) -> Group:
    """Return the faults that the audit of the tables finds, by table."""
    faults = audit_all(library)
    count = dict.fromkeys(table_names(library), 0)
    for line in faults:
        name = next((n for n in count if line.startswith(f"{n}:") or n in line), "")
        count[name or "other"] = count.get(name or "other", 0) + 1
    cases = tuple(
        Case(name, 0.0, float(number), 0.0, "own audit", "derived")
        for name, number in count.items()
    )
    title = "audit: references, charges, masses, rules, coded constants"
    return Group("tables audit", TABLES, title, "faults", cases, digits=0)


def as_recorded(library: Library, recorded: Mapping[str, str]) -> Group:
    """Return whether each table holds what was recorded; 1 where it does not."""
    found = digests(library)
    cases = tuple(
        Case(
            name,
            0.0,
            float(found.get(name) != recorded.get(name)),
            0.0,
            SOURCE,
            "derived",
        )
        for name in dict.fromkeys([*recorded, *found])
    )
    title = "content of each table as recorded"
    return Group("tables content", TABLES, title, "differences", cases, digits=0)


def choices(library: Library, title: str, recorded: Mapping[str, float]) -> Group:
    """Return desirability and concentration of every candidate beside the record.

    A candidate that is screened out, or that only one side knows, counts as 0.
    """
    found = chosen(library, BRIEFS[title])
    cases = tuple(
        Case(
            label,
            recorded.get(label, 0.0),
            found.get(label, 0.0),
            CHOICE_LIMIT,
            SOURCE,
            "derived",
        )
        for label in dict.fromkeys([*found, *recorded])
    )
    return Group(f"shortlist {title}", CHOICES, title, "as said", cases, digits=4)


def chosen(library: Library, options: Mapping[str, Any]) -> dict[str, float]:
    """Return desirability and concentration [mmol/L] of the candidates of a brief."""
    result = shortlist(brief_from_options(**options), library)
    found = {}
    for candidate in result.candidates:
        found[f"{candidate.key} desirability"] = candidate.desirability or 0.0
        found[f"{candidate.key} mmol/L"] = candidate.concentration_mmol_l
    return found


def table_names(library: Library) -> list[str]:
    """Return the names of our tables, settings included."""
    return [name for name, _ in library.store.files() if name != "VERSION"]


def digests(library: Library, names: Iterable[str] = ()) -> dict[str, str]:
    """Return a checksum of what each table holds, an overlay applied.

    Parameters
    ----------
    library : Library
    names : iterable of str
        Tables wanted; empty takes all.
    """
    described = table_schemas()
    found = {}
    for name in names or table_names(library):
        if name in described:
            held: Any = [_cells(row) for row in library.read_table(described[name])]
        elif name.endswith(".toml"):
            held = library.settings(name)
        else:
            continue
        text = json.dumps(held, sort_keys=True, default=str)
        found[name] = hashlib.sha256(text.encode("utf-8")).hexdigest()[:16]
    return found


def _cells(row: Row) -> list[Any]:
    return [
        dict(value) if isinstance(value, Mapping) else value
        for value in row.values.values()
    ]
