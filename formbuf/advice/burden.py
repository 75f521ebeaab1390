"""What a dose brings of each substance, against the limits of the tables."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from formbuf.advice.case import Case
from formbuf.advice.criteria import ACIDITY
from formbuf.advice.evaluate import Product, content_mmol_l
from formbuf.advice.results import Exposure
from formbuf.library.rule_tables import DoseLimit

#: Substances of the dose burden, besides titratable acidity.
COUNTED = ("sodium", "potassium", "phosphate")


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
    """Count what the buffer itself brings per dose, acidity included.

    Of the acidity only what the charge of its own species changes by up to (or down
    to) pH 7.4: what water, drug and excipients take up is there with any buffer.
    """
    litres = case.brief.dose.volume_ml / 1000.0
    content = content_mmol_l(case.library, product.own_mmol_l, COUNTED)
    content[ACIDITY] = abs(product.own_acidity_mmol_l)
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
