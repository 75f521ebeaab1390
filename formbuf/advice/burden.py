"""What a dose brings of each substance, against the limits of the tables."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from formbuf.advice.case import Case
from formbuf.advice.evaluate import Product
from formbuf.advice.results import Exposure
from formbuf.library.rule_tables import DoseLimit

#: Substances of the dose burden, besides titratable acidity.
COUNTED = ("sodium", "potassium", "phosphate")
ACIDITY = "titratable_acidity"


def limited(case: Case, rows: tuple[Exposure, ...]) -> tuple[Exposure, ...]:
    """Set the exposures of a whole product against the strictest limit that applies."""
    return tuple(_against(case, row, _strictest(case, row)) for row in rows)


def _strictest(case: Case, row: Exposure) -> DoseLimit | None:
    """Limit of which the product takes the largest share."""
    found = [
        limit
        for limit in case.rulebook.limits(row.substance, case.facts.values)
        if limit.per in ("dose", "day") and limit.value > 0.0 and limit.use != "burden"
    ]
    return max(
        found,
        key=lambda limit: (_amount(row, limit) or 0.0) / limit.value,
        default=None,
    )


def own_burden(case: Case, product: Product) -> tuple[Exposure, ...]:
    """Count what the buffer's own materials bring per dose, and titratable acidity."""
    litres = case.brief.dose.volume_ml / 1000.0
    content: dict[str, float] = dict.fromkeys(COUNTED, 0.0)
    for key, mmol_l in product.own_mmol_l.items():
        for component, count in case.library.find_material(key).contents.items():
            if component in content:
                content[component] += count * mmol_l
    content[ACIDITY] = abs(product.titratable_acidity_mmol_l)
    rows = []
    for substance, mmol_l in content.items():
        amount = mmol_l * litres
        row = Exposure(substance, amount, amount * case.brief.dose.per_day, None, None)
        limit = case.rulebook.burden_limit(substance, "dose", case.facts.values)
        rows.append(_against(case, row, limit))
    return tuple(rows)


def _against(case: Case, row: Exposure, limit: DoseLimit | None) -> Exposure:
    amount = None if limit is None else _amount(row, limit)
    if limit is None or amount is None:
        return row
    return replace(
        row,
        limit=limit.value,
        limit_unit=f"{limit.unit} per {limit.per}",
        limit_share=amount / limit.value,
        limit_basis=limit.basis,
        limit_source=limit.sources[0] if limit.sources else "",
        limit_use=limit.use,
    )


def _amount(row: Exposure, limit: DoseLimit) -> float | None:
    amounts: Mapping[tuple[str, str], float | None] = {
        ("dose", "mmol"): row.mmol_dose,
        ("day", "mmol"): row.mmol_day,
        ("dose", "mg"): row.mg_dose,
        ("day", "mg"): row.mg_day,
    }
    return amounts.get((limit.per, limit.unit))
