"""The calculated design of lead and back-up."""

from __future__ import annotations

from formbuf.constants import ACTIVITY_LIMIT_MOL_KG
from formbuf.report.candidate_tables import (
    composition,
    osmolality,
    preparation,
    species,
    states,
)
from formbuf.report.content import (
    Block,
    Figure,
    Note,
    OpenPoint,
    Paragraph,
    Section,
    Spans,
)
from formbuf.report.figures import Series, Window, capacity_figure, temperature_figure
from formbuf.report.reading import Cursor, link, spans
from formbuf.report.section_dose import exposure
from formbuf.report.story import (
    Story,
    is_none,
    label_of,
    named,
)

#: Drift from which the pH at another temperature is worth measuring, pH.
WORTH_MEASURING_PH = 0.1


def design(story: Story) -> Section | None:
    """Return the comparison of the finalists, then lead and back-up in detail."""
    if not story.first_two:
        return None
    parts = []
    for label, candidate in zip(("Lead", "Back-up"), story.first_two, strict=False):
        parts.append(_one(story, candidate, label))
    blocks: list[Block] = [Paragraph(_basis(story)), *_capacity(story)]
    blocks += _temperature(story)
    _ask_ph(story)
    return Section(
        "design",
        spans("Calculated design"),
        tuple(blocks),
        tuple(parts),
        placement="3.2.P.2.2.3, physicochemical and biological properties",
    )


def _basis(story: Story) -> Spans:
    return spans(
        "Composition is fixed at preparation; pH, ionic strength, capacity and osmolality "
        "follow from the equations and constants of ",
        link("constants"),
        ". pH means the conventional activity scale of the pH standards. All that buffers "
        "counts: buffer, drug, excipients and water. Calculated values support a design; "
        "measured pH governs.",
    )


def _capacity(story: Story) -> list[Block]:
    curves = story.more.at("curves", "capacity")
    series = []
    for one in curves.each("series"):
        candidate = story.of(one.text("system"))
        if candidate is None:
            continue
        series.append(
            Series(
                _with_amount(candidate),
                curves.numbers("ph"),
                one.numbers("capacity_mmol_l_ph"),
                is_none(candidate),
            )
        )
    if not series:
        return []
    window = _window(story)
    at = f"{curves.number('temperature_c'):g} °C"
    svg, png = capacity_figure(series, window, at)
    names = ", ".join(one.name for one in series)
    return [
        Figure(
            "f-capacity",
            spans("Capacity of the product against pH for the finalists"),
            f"Line chart of buffer capacity against pH. Lines: {names}. The pH window is "
            "shaded and the target marked by a line. The capacity at the target stands in "
            "the tables of this section.",
            svg,
            png,
        )
    ]


def _with_amount(candidate: Cursor) -> str:
    """Return the name with the concentration, for the legend."""
    amount = candidate.number("concentration_mmol_l")
    if is_none(candidate) or candidate.get("is_own_formula") or amount is None:
        return label_of(candidate)
    return f"{label_of(candidate)}, {amount:.3g} mmol/L"


def _window(story: Story) -> Window:
    ph = story.brief.at("ph")
    return Window(
        ph.number("low") or 0.0, ph.number("high") or 14.0, ph.number("target") or 7.0
    )


def _temperature(story: Story) -> list[Block]:
    curves = story.more.at("curves", "temperature")
    series = []
    for one in curves.each("series"):
        candidate = story.of(one.text("system"))
        if candidate is not None and not is_none(candidate):
            series.append(
                Series(
                    label_of(candidate),
                    curves.numbers("temperature_c"),
                    one.numbers("ph"),
                )
            )
    if not series:
        return []
    low, high = min(series[0].x), max(series[0].x)
    storage = sorted(
        {
            t
            for state in story.first_two[0].each("states")
            for t in [state.number("temperature_c")]
            if t is not None
            and "storage" in (state.get("kinds") or ())
            and low <= t <= high
        }
    )
    measured = story.brief.number("ph", "measure_temperature_c") or 25.0
    svg, png = temperature_figure(series, _window(story), measured, storage)
    names = ", ".join(one.name for one in series)
    return [
        Figure(
            "f-temperature",
            spans("pH of the product against temperature, composition fixed"),
            f"Line chart of pH against temperature. Lines: {names}. The pH window at "
            "measurement is shaded; lines mark the temperatures of measurement and of "
            "liquid storage. The values at these temperatures stand in the tables of "
            "this section.",
            svg,
            png,
        )
    ]


def _one(story: Story, c: Cursor, label: str) -> Section:
    slug = "lead" if label == "Lead" else "backup"
    blocks: list[Block] = [composition(story, c, slug)]
    if c.get("states"):
        blocks += [states(c, slug), Paragraph(preparation(c))]
    blocks += [*species(story, c, slug), Paragraph(osmolality(story, c))]
    blocks += exposure(story, c, slug)
    blocks += _cautions(c)
    return Section(
        f"design-{slug}",
        spans(f"{label}: ", named(c)),
        tuple(blocks),
    )


def _cautions(c: Cursor) -> list[Block]:
    strengths = [s.number("ionic_strength_mol_kg") or 0.0 for s in c.each("states")]
    if any(x > ACTIVITY_LIMIT_MOL_KG for x in strengths):
        return [
            Note(
                spans(
                    "The ionic strength lies above the range in which the activity model "
                    "was checked; the pH is an estimate."
                )
            )
        ]
    return []


def _ask_ph(story: Story) -> None:
    lead = story.lead
    if lead is None:
        return
    if is_none(lead):
        story.add(
            OpenPoint(
                "no-buffer",
                spans(
                    "That the product holds its pH without a buffer rests on what the "
                    "drug buffers (",
                    link("need"),
                    ").",
                ),
                spans(
                    "Put a batch without buffer and one with the least of the back-up side "
                    "by side on stability at the storage and the accelerated condition; "
                    "measure pH and quality."
                ),
                spans(
                    "A pH within the window to the end keeps the product without buffer; a "
                    "drift beyond it moves the choice to the back-up."
                ),
                1,
            )
        )
        return
    drift = lead.number("ph_drift") or 0.0
    story.add(
        OpenPoint(
            "ph-made",
            spans(
                "The pH, capacity and osmolality of the lead are calculated (",
                link("design-lead"),
                ").",
            ),
            spans(
                "Weigh the lead as tabulated, with the drug; measure pH",
                " at the temperature of measurement and at every storage temperature, "
                if abs(drift) >= WORTH_MEASURING_PH
                else " at the temperature of measurement, ",
                "the osmolality, and the acid and base to the limits of the window.",
            ),
            spans(
                "Agreement within the release tolerance confirms the sheet; a larger "
                "difference points to the drug, to a hydrate or to the electrode, and the "
                "measured values replace the calculated ones."
            ),
            3,
        )
    )
