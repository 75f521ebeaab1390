"""Fit the osmotic coefficients of ``knowledge/osmotic.csv``; ``--write`` replaces it.

One coefficient per cation and anion, and one per uncharged solute, by weighted least
squares over the odd rows of each series in ``knowledge/checks/tonicity.csv``. A reading counts with
the resolution of its table (0.005 K) and 1 % together. Run from the checkout::

    PYTHONPATH=.:tests python tests/tools/fit_osmotic.py --write
"""

from __future__ import annotations

import csv
import io
import sys
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from osmotic_data import NOTHING, Point, isotonic_points, points

#: Highest osmolality of a row that is fitted [osmol/kg].
HIGHEST_ION = 0.6
HIGHEST_NEUTRAL = 1.2
RESOLUTION_OSMOL_KG = 0.005 / 1.86
RELATIVE_ERROR = 0.01
JUDGED_UNCERTAINTY = 0.02

COLUMNS = (
    "kind",
    "cation",
    "anion",
    "neutral",
    "coefficient_kg_mol",
    "uncertainty_kg_mol",
    "rows_fitted",
    "highest_osmol_kg",
    "rms_osmol_kg",
    "source",
    "locator",
    "basis",
    "note",
)
FREEZING = "crc_102"
AT_25_C = "osmotic coefficients at 25 C: the handbook has no freezing-point rows"

#: Series that are fitted: substance, source, coefficients it decides.
SERIES: tuple[tuple[str, str, tuple[tuple[str, ...], ...]], ...] = (
    ("Sodium chloride", FREEZING, (("sodium:1", "chloride:-1"),)),
    ("NaCl", "crc_smithsonian", (("sodium:1", "chloride:-1"),)),
    ("Potassium chloride", FREEZING, (("potassium:1", "chloride:-1"),)),
    ("KCl", "crc_smithsonian", (("potassium:1", "chloride:-1"),)),
    ("NH4Cl", "crc_smithsonian", (("ammonia:1", "chloride:-1"),)),
    ("Calcium chloride", FREEZING, (("calcium:2", "chloride:-1"),)),
    ("CaCl2", "crc_smithsonian", (("calcium:2", "chloride:-1"),)),
    ("Magnesium chloride", FREEZING, (("magnesium:2", "chloride:-1"),)),
    ("Hydrogen chloride", FREEZING, (("hydrogen:1", "chloride:-1"),)),
    ("HCl", "crc_smithsonian", (("hydrogen:1", "chloride:-1"),)),
    ("Sodium hydroxide", FREEZING, (("sodium:1", "hydroxide:-1"),)),
    ("NaH2PO4", "may_2011", (("sodium:1", "phosphate:-1"),)),
    ("KH2PO4", "may_2011", (("potassium:1", "phosphate:-1"),)),
    ("Sodium hydrogen phosphate", FREEZING, (("sodium:1", "phosphate:-2"),)),
    ("Potassium hydrogen phosphate", FREEZING, (("potassium:1", "phosphate:-2"),)),
    ("Sodium phosphate", FREEZING, (("sodium:1", "phosphate:-3"),)),
    ("Sodium citrate dihydrate", FREEZING, (("sodium:1", "citrate:-3"),)),
    (
        "sodium acetate",
        "robinson_stokes_1959 pitzer_mayorga_1973",
        (("sodium:1", "acetate:-1"),),
    ),
    ("Sodium hydrogen carbonate", FREEZING, (("sodium:1", "carbonate:-1"),)),
    ("Sodium carbonate", FREEZING, (("sodium:1", "carbonate:-2"),)),
    ("Potassium hydrogen carbonate", FREEZING, (("potassium:1", "carbonate:-1"),)),
    ("Potassium carbonate", FREEZING, (("potassium:1", "carbonate:-2"),)),
    ("Sodium sulfate", FREEZING, (("sodium:1", "sulfate:-2"),)),
    ("Ammonium sulfate", FREEZING, (("ammonia:1", "sulfate:-2"),)),
    (
        "Ethylenediaminetetraacetic acid, disodium salt, dihydrate",
        FREEZING,
        (("sodium:1", "edta:-2"),),
    ),
    ("Sucrose", FREEZING, (("sucrose",),)),
    ("Maltose", FREEZING, (("maltose",),)),
    ("D-Mannitol", FREEZING, (("mannitol",),)),
    ("D-Glucose", FREEZING, (("glucose",),)),
    ("1,2-Ethanediol", FREEZING, (("ethanediol",),)),
    ("Acetic acid", FREEZING, (("acetate:0",),)),
    ("Citric acid", FREEZING, (("citrate:0",),)),
    ("Phosphoric acid", FREEZING, (("phosphate:0",),)),
)
#: Solutes of which only one interpolated point is known.
ISOTONIC = {
    "Glycerol": ("glycerol",),
    "Tris(hydroxymethyl)methylamine": ("tris:0",),
}
#: Solutes without data that follow near relatives: key, relatives, reason.
RELATIVES = (
    ("trehalose", ("sucrose", "maltose"), "mean of two other disaccharides"),
    ("sorbitol", ("mannitol",), "as mannitol, its isomer"),
    ("propylene_glycol", ("ethanediol",), "as 1,2-ethanediol, the next lower glycol"),
)
#: Fitted only to support a judgement; not part of the table.
HELPERS = {("maltose",), ("ethanediol",)}
NOTES = {
    ("sodium:1", "phosphate:-1"): AT_25_C,
    ("potassium:1", "phosphate:-1"): AT_25_C,
    ("sodium:1", "acetate:-1"): AT_25_C + "; one row fitted, one held",
    ("glycerol",): "one interpolated isotonic concentration",
    ("tris:0",): (
        "one interpolated isotonic concentration; the handbook of excipients has 3.45 "
        "instead of 3.31 g/100 mL, which would be -0.15"
    ),
    ("sodium:1", "carbonate:-1"): (
        "freezing points lie below what osmotic coefficients at 25 C give (about 0)"
    ),
}
RECALLED = (
    {
        "kind": "neutral",
        "neutral": "glycine:0",
        "coefficient_kg_mol": "-0.085",
        "uncertainty_kg_mol": "0.040",
        "basis": "memory",
        "note": (
            "recalled activity coefficients at 25 C (0.92 at 0.5, 0.85 at 1 mol/kg); "
            "no freezing points found"
        ),
    },
)


@dataclass(frozen=True)
class Fitted:
    """One coefficient with what it rests on."""

    key: tuple[str, ...]
    value: float
    uncertainty: float
    rows: int
    highest: float
    rms: float
    sources: tuple[str, ...]
    locator: str


def fit() -> dict[tuple[str, ...], Fitted]:
    """Fit all coefficients together; series share them through hydrolysis."""
    chosen: list[tuple[Point, tuple[str, ...]]] = []
    for substance, source, keys in SERIES:
        for point in points(sources=source, substances=[substance]):
            limit = HIGHEST_NEUTRAL if len(keys[0]) == 1 else HIGHEST_ION
            if point.is_fitted and point.observed_osmol_kg <= limit:
                chosen += [(point, key) for key in keys]
    for point in isotonic_points(ISOTONIC):
        chosen.append((point, ISOTONIC[point.substance]))
    keys = list(dict.fromkeys(key for _, key in chosen))
    values, errors = _solve([p for p, _ in chosen], keys)
    found = {}
    for key, value, error in zip(keys, values, errors, strict=True):
        own = [p for p, k in chosen if k == key]
        misses = [_predict(p, keys, values) - p.observed_osmol_kg for p in own]
        found[key] = Fitted(
            key,
            float(value),
            float(error),
            len(own),
            max(p.observed_osmol_kg for p in own),
            float(np.sqrt(np.mean(np.square(misses)))),
            tuple(dict.fromkeys(n for p in own for n in p.row.ids("sources"))),
            _locator(own),
        )
    return found


def _solve(
    chosen: Sequence[Point], keys: Sequence[tuple[str, ...]]
) -> tuple[np.ndarray, np.ndarray]:
    """Weighted least squares; errors grow with a scatter above the stated one."""
    observed = np.array([p.observed_osmol_kg for p in chosen])
    bare = np.array([p.osmolality(NOTHING) for p in chosen])
    design = np.array([[p.weights().get(key, 0.0) for key in keys] for p in chosen])
    sigma = np.hypot(RESOLUTION_OSMOL_KG, RELATIVE_ERROR * observed)
    scaled, target = design / sigma[:, None], (observed - bare) / sigma
    normal = np.linalg.inv(scaled.T @ scaled)
    values = normal @ (scaled.T @ target)
    freedom = max(len(chosen) - len(keys), 1)
    scatter = float(np.sum((scaled @ values - target) ** 2)) / freedom
    return values, np.sqrt(np.diag(normal) * max(scatter, 1.0))


def _predict(
    point: Point, keys: Sequence[tuple[str, ...]], values: np.ndarray
) -> float:
    weights = point.weights()
    total = point.osmolality(NOTHING)
    for key, value in zip(keys, values, strict=True):
        total += weights.get(key, 0.0) * float(value)
    return total


def _locator(own: Sequence[Point]) -> str:
    names = list(dict.fromkeys(p.substance for p in own))
    kind = own[0].row.text("quantity").replace("_", " ")
    rows = ", odd rows" if kind != "isotonic concentration" else ""
    return f"{kind}: {' and '.join(names)}{rows}"


def table() -> list[dict[str, str]]:
    """Rows of ``knowledge/osmotic.csv``, sorted."""
    fitted = fit()
    rows = [_row(one) for key, one in fitted.items() if key not in HELPERS]
    for name, relatives, reason in RELATIVES:
        found = [fitted[relative,].value for relative in relatives]
        rows.append(
            {
                "kind": "neutral",
                "neutral": name,
                "coefficient_kg_mol": f"{np.mean(found):.3f}",
                "uncertainty_kg_mol": f"{JUDGED_UNCERTAINTY:.3f}",
                "basis": "judgement",
                "note": reason,
            }
        )
    rows += RECALLED
    whole = [{column: row.get(column, "") for column in COLUMNS} for row in rows]
    return sorted(
        whole, key=lambda r: (r["kind"], r["anion"], r["cation"], r["neutral"])
    )


def _row(one: Fitted) -> dict[str, str]:
    pair = len(one.key) == 2
    also = f"with {' '.join(one.sources[1:])}" if one.sources[1:] else ""
    return {
        "kind": "pair" if pair else "neutral",
        "cation": one.key[0] if pair else "",
        "anion": one.key[1] if pair else "",
        "neutral": "" if pair else one.key[0],
        "coefficient_kg_mol": f"{one.value:.4f}",
        "uncertainty_kg_mol": f"{one.uncertainty:.4f}",
        "rows_fitted": str(one.rows),
        "highest_osmol_kg": f"{one.highest:.3f}",
        "rms_osmol_kg": f"{one.rms:.4f}",
        "source": one.sources[0],
        "locator": one.locator,
        "basis": "derived",
        "note": "; ".join(note for note in (NOTES.get(one.key, ""), also) if note),
    }


def render(rows: Iterable[dict[str, str]]) -> str:
    """The table as CSV text."""
    out = io.StringIO()
    writer = csv.DictWriter(out, COLUMNS, lineterminator="\n")
    writer.writeheader()
    writer.writerows(rows)
    return out.getvalue()


def main(arguments: Sequence[str]) -> None:
    text = render(table())
    if "--write" in arguments:
        root = Path(__file__).resolve().parent.parent.parent
        (root / "knowledge" / "osmotic.csv").write_text(
            text, encoding="utf-8", newline=""
        )
    else:
        print(text, end="")


if __name__ == "__main__":
    main(sys.argv[1:])
