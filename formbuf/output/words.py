"""Words that several outputs share: titles, names of criteria, the caution."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from formbuf.advice.wording import bare_standing, criterion_name
from formbuf.output.figures import decimals, plainly, significant
from formbuf.output.page import Column, Grid, Items, number

if TYPE_CHECKING:
    from formbuf.advice.results import Candidate, Shortlist
    from formbuf.product.product_brief import ProductBrief
    from formbuf.product.product_parts import Assumption

__all__ = [
    "CAUTION",
    "OUTCOME_WORDS",
    "SEVERITY_WORDS",
    "assumptions_grid",
    "composition_grid",
    "criterion_name",
    "finding_words",
    "is_against",
    "listed",
    "made",
    "ph_words",
    "standing_words",
    "title_of",
    "warnings_items",
]

CAUTION = (
    "A calculation aid: measured values, compendia, local rules and qualified staff "
    "decide."
)

#: What came of a rule and how heavy it is, in words; the data keep their own.
OUTCOME_WORDS = {
    "fired": "applies",
    "not fired": "does not apply",
    "not evaluable": "open",
}
SEVERITY_WORDS = {"exclude": "exclusion", "warn": "warning", "note": "note"}


def title_of(brief: ProductBrief) -> str:
    """Return product, target pH, window, route and form in one line."""
    ph, product = brief.ph, brief.product
    name = product.name or brief.title or "Product"
    version = f", version {product.version}" if product.version else ""
    route = product.route.replace("_", " ")
    return (
        f"{name}{version}: pH {ph.target:.2f}, window {ph.low:.2f} to {ph.high:.2f} at "
        f"{ph.measure_temperature_c:g} C, {route}, {product.form}"
    )


def standing_words(candidate: Candidate) -> str:
    """Return the standing of a candidate, with its place where it has one.

    The product without a buffer stays in view whatever it carries; here it is said
    whether that is enough. It takes a place only where its titration was measured.
    """
    if candidate.rank is None:
        if candidate.system.id == "none" and candidate.standing != "screened out":
            return bare_standing(candidate.carried_share, candidate.standing)
        return candidate.standing
    return f"{candidate.standing}, place {candidate.rank}"


def made(candidate: Candidate) -> str:
    """Return amount and name of a candidate: 10 mmol/L sodium phosphate."""
    amount = f"{candidate.concentration_mmol_l:g} mmol/L"
    if not candidate.concentration_mmol_l or amount in candidate.name:
        return candidate.name
    return f"{amount} {candidate.name}"


def listed(names: Sequence[str]) -> str:
    """Join names as in a sentence."""
    if len(names) < 2:
        return "".join(names)
    return f"{', '.join(names[:-1])} and {names[-1]}"


def is_against(finding: Any) -> bool:
    """Whether a finding speaks against its candidate: it applies, or could exclude."""
    if getattr(getattr(finding, "record", None), "favours", False):
        return False
    if finding.outcome == "fired":
        return True
    return bool(finding.outcome == "not evaluable" and finding.severity == "exclude")


def finding_words(finding: Any) -> str:
    """Return one finding in a sentence or two, with what came of it and what lacks."""
    head = SEVERITY_WORDS.get(finding.severity, finding.severity)
    if finding.outcome != "fired":
        head = f"{head}, {OUTCOME_WORDS.get(finding.outcome, finding.outcome)}"
    said = finding.text
    record = getattr(finding, "record", None)
    if record is not None:
        said = f"{record.title}. {record.effect}"
    text = f"{head}: {said} ({finding.rule}, {finding.basis})"
    missing = getattr(finding, "missing", ())
    if missing and finding.outcome == "not evaluable":
        text += f"; not known: {', '.join(missing)}"
    override = getattr(finding, "override", None)
    if override is not None:
        text += f"; set aside by {override.name}, {override.date}: {override.reason}"
    return text


def composition_grid(result: Shortlist, candidates: Sequence[Candidate]) -> Grid:
    """Return what each candidate is made of, the tonicity agent included."""
    rows = []
    for c in candidates:
        lines = [(w, "") for w in c.composition]
        lines += [(c.tonicity_fill, " (fills osmolality)")] if c.tonicity_fill else []
        for position, (weighed, note) in enumerate(lines):
            material = result.library.materials[weighed.material]
            rows.append(
                (
                    made(c) if position == 0 else "",
                    f"{material.name}{note}",
                    significant(weighed.mmol_l, 4),
                    significant(weighed.g_l, 4),
                )
            )
    return Grid(
        (Column("System"), Column("Material"), number("mmol/L"), number("g/L")),
        tuple(rows),
    )


def assumptions_grid(assumptions: Sequence[Assumption]) -> Grid:
    """Return every value that was not stated, with its basis."""
    rows = tuple(
        (
            row.key,
            _assumed(row),
            row.basis,
            row.reason,
        )
        for row in assumptions
    )
    columns = (
        Column("Not stated", keep=True),
        Column("Taken as", keep=True),
        Column("Basis", keep=True),
        Column("Reason", from_width=100),
    )
    return Grid(columns, rows)


def _assumed(row: Assumption) -> str:
    """Return an assumed value with its unit; a pressure to three digits."""
    if row.unit == "Pa" and isinstance(row.value, float):
        return f"{significant(row.value)} Pa"
    return f"{plainly(row.value)} {row.unit}".strip()


def warnings_items(warnings: Sequence[str]) -> Items:
    """Return warnings as a list, each once."""
    return Items(tuple(dict.fromkeys(warnings)))


def ph_words(value: float | None, *, sign: bool = False) -> str:
    """Return a pH or a difference of pH with two decimals."""
    return decimals(value, 2, sign=sign)
