"""Briefs from the table of what makers of licensed products chose, and their tally.

A plausibility check of the order, never a training set: no weight, anchor or table is
fitted to it. Source of each row: ``knowledge/checks/licensed_choices.csv``.
"""

from __future__ import annotations

import csv
import dataclasses
from collections import Counter
from pathlib import Path
from typing import Any

from formbuf.advice.shortlist import Shortlist, shortlist
from formbuf.chemistry.ionization import pk_at
from formbuf.library import Library
from formbuf.product.brief import brief_from_mapping
from formbuf.product.composition import ladder_of

TABLE = Path(__file__).parent.parent / "knowledge" / "checks" / "licensed_choices.csv"
KINDS = {
    "mab": "antibody",
    "fusion": "fusion_protein",
    "lnp": "lipid_nanoparticle",
}
FORMS = {"liquid": "liquid", "frozen": "frozen", "lyophilised": "dried"}
ROUTES = {"intrathecal": "intrathecal_epidural"}
FAR_FROM_PK = 1.2


@dataclasses.dataclass(frozen=True)
class Outcome:
    """Where the maker's species came out for one product."""

    id: str
    species: str
    position: int | None
    is_tied: bool
    distance_to_pk: float
    reasons: str


def rows() -> list[dict[str, str]]:
    """Rows whose maker added a buffer."""
    with TABLE.open(encoding="utf-8", newline="") as file:
        found = list(csv.DictReader(file))
    return [r for r in found if r["buffer_species"] not in ("", "none")]


def brief_of(row: dict[str, str]) -> Any:
    """Turn a row into a brief; what it does not hold is left to the defaults."""
    form = FORMS[row["form"]]
    ph: dict[str, float] = {"target": float(row["ph"])}
    if row["ph_low"] and row["ph_high"]:
        low, high = float(row["ph_low"]), float(row["ph_high"])
        room = min(ph["target"] - low, high - ph["target"])
        if room > 0.0:
            ph |= {"low": low, "high": high}
            if room <= 0.1:
                ph["release_tolerance"] = round(room / 2.0, 3)
    drug: dict[str, Any] = {"kind": KINDS.get(row["modality"], row["modality"])}
    if row["drug_mg_ml"]:
        drug["concentration_mg_ml"] = float(row["drug_mg_ml"])
    return brief_from_mapping(
        {
            "product": {
                "route": ROUTES.get(row["route"], row["route"]),
                "form": form,
            },
            "ph": ph,
            "drug": drug,
            "storage": [
                {"temperature_c": float(row["storage_c"]), "state": form},
            ],
        }
    )


def outcome_of(row: dict[str, str], result: Shortlist) -> Outcome:
    """Place of the maker's species among the heads of a shortlist."""
    species = row["buffer_species"]
    heads = result.heads
    places = [k for k, head in enumerate(heads) if species in head.system.species[:1]]
    steps = pk_at(ladder_of(result.library.species[species]), 25.0)
    distance = float(min(abs(steps - float(row["ph"]))))
    if not places:
        dropped = [c for c in result.candidates if species in c.system.species[:1]]
        reasons = "; ".join(
            f"{c.key}: {', '.join(s.text for s in c.dropped_by)}" for c in dropped
        )
        said = reasons or "no buffer system: its role is another, on request only"
        return Outcome(row["id"], species, None, False, distance, said)
    place = places[0]
    tied = place == 0 or heads[0].key in heads[place].tied_with
    return Outcome(row["id"], species, place + 1, tied, distance, "")


def without_top_tier(library: Library) -> Library:
    """Return the library with ``usual`` lowered to ``established`` in the kind table."""
    return dataclasses.replace(
        library,
        kind_precedents=tuple(
            dataclasses.replace(r, level="established") if r.level == "usual" else r
            for r in library.kind_precedents
        ),
    )


def tally(outcomes: list[Outcome]) -> dict[str, float]:
    """Shares of first, first or tied, top three and screened out."""
    n = len(outcomes)
    count: Counter[str] = Counter()
    for o in outcomes:
        count["first"] += o.position == 1
        count["first or tied"] += o.is_tied
        count["top three"] += o.position is not None and o.position <= 3
        count["screened out"] += o.position is None
    return {key: count[key] / n for key in count}


def run(library: Library) -> list[Outcome]:
    """Judge every row."""
    return [outcome_of(r, shortlist(brief_of(r), library)) for r in rows()]
