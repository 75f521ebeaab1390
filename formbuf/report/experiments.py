"""Open points: the smallest experiment or look-up that settles each."""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple

from formbuf.report.content import Column, OpenPoint, Paragraph, Section, Spans, Text
from formbuf.report.reading import Cursor, joined, link, spans
from formbuf.report.story import Story, is_none, named, table


class Test(NamedTuple):
    """An experiment and what its outcome decides; ``about`` names the topic."""

    about: str
    experiment: str
    decides: str


#: The smallest experiment for each topic of the rules.
TESTS: Mapping[str, Test] = {
    "adducts": Test(
        "adducts with the drug",
        "Stress the product with and without the buffer at the accelerated condition; map "
        "the peptides or impurities by mass spectrometry.",
        "A mass shift only with the buffer speaks against it.",
    ),
    "adjuvant": Test(
        "the adjuvant",
        "Adsorb the antigen at the formula's pH and buffer level; measure the free antigen "
        "at once and after storage.",
        "Adsorption within its limits keeps the buffer.",
    ),
    "admixture": Test(
        "admixture",
        "Mix with each named diluent at the extremes of ratio and temperature; count "
        "particles and read pH for the in-use time.",
        "No new particles and a pH within limits name the diluent as compatible.",
    ),
    "capacity": Test(
        "capacity",
        "Titrate the finished product with strong acid and base to the limits of the "
        "window.",
        "The room found must exceed the load budget.",
    ),
    "chelation": Test(
        "chelation",
        "Measure the free metal or the activity of the drug with and without the buffer.",
        "A loss only with the buffer speaks against it.",
    ),
    "colloid": Test(
        "a drug held apart by charge",
        "Measure particle size and opalescence across the pH window and at the ionic "
        "strength of the formula.",
        "A size that does not move keeps pH and buffer.",
    ),
    "complexation": Test(
        "complexes with the drug",
        "Compare the degradation of the drug in the buffer and in a non-complexing one at "
        "equal pH and ionic strength.",
        "A difference speaks for or against the complex.",
    ),
    "container": Test(
        "the container",
        "Hold the real buffer in the real container to the end of shelf life or stressed; "
        "measure silicon, aluminium and boron, pH, and look for flakes.",
        "No flakes and a pH within limits keep container and buffer.",
    ),
    "drug_stability": Test(
        "stability of the drug",
        "Measure the rate of degradation at three buffer concentrations, pH and ionic "
        "strength kept; extrapolate to none.",
        "A slope that costs shelf life asks for less buffer or another.",
    ),
    "drying": Test(
        "drying",
        "Dry the formula; measure glass transition, residual moisture, cake and pH after "
        "reconstitution.",
        "A pH within the release limits and an intact cake keep the buffer.",
    ),
    "exposure": Test(
        "exposure of the patient",
        "Have the amount per dose and day assessed for the patients of the label.",
        "An amount above its limit asks for less buffer or another ion.",
    ),
    "freezing": Test(
        "freezing",
        "Freeze at the slowest and fastest rate; look for crystalline salt; thaw and test.",
        "No crystalline salt and unchanged quality keep the buffer.",
    ),
    "gelling": Test(
        "a gelling vehicle",
        "Measure viscosity before and after the buffer is added, and after storage.",
        "A viscosity within limits keeps the buffer.",
    ),
    "heat_sterilisation": Test(
        "heat sterilisation",
        "Sterilise the formula at the worst case; compare pH, colour, degradation and "
        "particles before and after.",
        "Changes within limits keep the process.",
    ),
    "impurity": Test(
        "impurities of the raw material",
        "Ask the supplier for the impurity profile; spike the worst case and stress.",
        "No effect at the worst case sets the limit of the raw material.",
    ),
    "oxidation": Test(
        "oxidation",
        "Stress with metal, peroxide, light and steel contact, with and without chelator; "
        "measure oxidation, colour and the surfactant.",
        "Oxidation only in the stressed arms sets limits for metals, light and contact.",
    ),
    "pain": Test(
        "pain at the site",
        "Compare tolerability at the site with a placebo of another buffer, or argue from "
        "precedent at this dose.",
        "A difference that patients notice asks for less buffer or another.",
    ),
    "precipitation": Test(
        "precipitation",
        "Hold the formula at the worst pH and at cold, room and body temperature for two "
        "days; count particles and inspect.",
        "No particles keep the buffer.",
    ),
    "preservative": Test(
        "the preservative",
        "Measure the content and the efficacy of the preservative in the formula at both "
        "ends of the pH window.",
        "Efficacy that passes at both ends keeps the buffer.",
    ),
    "process": Test(
        "the process",
        "Measure pH and buffer in the retentate or the bulk at the end of the step, at the "
        "final concentration.",
        "The offset found is corrected in the buffer that feeds the step.",
    ),
    "regulatory": Test(
        "the filing",
        "Look up the current lists and guidance for this route, dose and kind of filing.",
        "A listed amount confirms the precedent; none asks for a safety case.",
    ),
    "route_ph": Test(
        "pH on this route",
        "Argue the pH for the route from licensed products, or test tolerability.",
        "A precedent at this pH and capacity settles it.",
    ),
    "route_tissue": Test(
        "tolerance of the tissue",
        "Test local tolerance of the formula and of a placebo at the intended dose.",
        "Tolerance like that of the placebo keeps the buffer.",
    ),
    "self_buffering": Test(
        "buffering by the drug",
        "Titrate the product without buffer at its concentration across the window.",
        "Room above the load budget makes the buffer unnecessary.",
    ),
    "sugar": Test(
        "reaction with a sugar",
        "Store buffer, amine and sugar together at the accelerated condition; measure "
        "colour and glycation.",
        "No change keeps the combination.",
    ),
    "temperature": Test(
        "change of pH with temperature",
        "Measure the pH of the product at storage, room and body temperature.",
        "A stable drug over that range accepts the drift.",
    ),
}
_GENERAL = Test(
    "other matters",
    "Answer the questions of the table; where no data exist, compare the product with and "
    "without the buffer at the accelerated condition.",
    "No difference keeps the buffer.",
)


def ask_open_rules(
    story: Story, listed: list[tuple[str, tuple[Cursor, list[str]]]]
) -> None:
    """Keep one open point for each topic of rules that could not be judged."""
    topics: dict[str, list[Cursor]] = {}
    for _, (finding, _who) in listed:
        if finding.get("severity") != "note":
            topics.setdefault(finding.text("topic"), []).append(finding)
    for topic, findings in topics.items():
        test = TESTS.get(topic, _GENERAL)
        excluding = any(f.get("severity") == "exclude" for f in findings)
        names = joined([spans(f.quote("rule")) for f in findings])
        story.add(
            OpenPoint(
                f"rule-{topic}",
                spans(
                    f"On {test.about}, ",
                    "rules " if len(findings) > 1 else "rule ",
                    names,
                    " could not be judged for lead or back-up (",
                    link("compatibility-open"),
                    ").",
                ),
                spans(
                    "First answer the questions listed there. If doubt remains: ",
                    test.experiment,
                ),
                spans(test.decides),
                1 if excluding else 2,
            )
        )


def ask_fired(story: Story) -> None:
    """Keep one open point for each topic in which a warning fired for the lead."""
    lead = story.lead
    if lead is None:
        return
    topics: dict[str, list[Cursor]] = {}
    for f in lead.each("findings"):
        rule = story.more.at("rules", f.text("rule"))
        if f.get("outcome") != "fired" or f.get("severity") == "note":
            continue
        if rule.get("favours") or f.get("topic") in ("freezing", "self_buffering"):
            continue
        topics.setdefault(f.text("topic"), []).append(f)
    for topic, findings in topics.items():
        test = TESTS.get(topic, _GENERAL)
        names = joined([spans(f.quote("rule")) for f in findings])
        many = len(findings) > 1
        place = "compatibility"
        story.add(
            OpenPoint(
                f"fired-{topic}",
                spans(
                    f"On {test.about}, ",
                    "rules " if many else "rule ",
                    names,
                    " apply" if many else " applies",
                    " to the lead (",
                    link(place),
                    ").",
                ),
                spans(test.experiment),
                spans(test.decides),
                2,
            )
        )


def ask_ties(story: Story) -> None:
    """Keep an open point where the lead is tied."""
    lead = story.lead
    tied = list(lead.get("tied_with") or ()) if lead is not None else []
    if lead is None or not tied:
        return
    story.add(
        OpenPoint(
            "tie",
            spans(
                named(lead),
                " and ",
                story.names_of(tied),
                " cannot be told apart by the calculation (",
                link("ranking"),
                ").",
            ),
            spans(
                "Put the tied formulas side by side on a short stability study of the "
                "product at the accelerated condition, at equal pH, tonicity and ionic "
                "strength."
            ),
            spans(
                "The one with the slower degradation leads; without a difference, supply "
                "and precedent decide."
            ),
            1,
        )
    )


def ask_precedent(story: Story) -> None:
    """Keep the look-up of precedent where it rests on recollection."""
    names = [
        name
        for c in story.first_two
        if not is_none(c)
        for name in c.get("species") or ()
        if story.more.text("precedents", name, "level_basis") != "published"
        or story.more.text("precedents", name, "concentration_basis") != "published"
    ]
    if not names:
        return
    shown = joined([spans(story.component(n)) for n in dict.fromkeys(names)])
    story.add(
        OpenPoint(
            "precedent",
            spans(
                "Level or concentrations of precedent rest on recollection for ",
                shown,
                " (",
                link("precedents"),
                ").",
            ),
            spans(
                "Look up the amount for this route in the current list of inactive "
                "ingredients and in assessment reports; note the day."
            ),
            spans(
                "A listed amount at or above the exposure of the design confirms it; a "
                "smaller one asks for a safety case or less buffer."
            ),
            2,
        )
    )


def ask_notes(story: Story) -> None:
    """Keep what the calculation says it could not judge for the lead."""
    lead = story.lead
    if lead is None:
        return
    for i, note in enumerate(lead.get("notes") or ()):
        if "not evaluable" not in str(note):
            continue
        story.add(
            OpenPoint(
                f"note-{i}",
                spans(lead.quote("notes", i), "."),
                spans(
                    "Hold the formula at the coldest storage temperature for a week, with "
                    "a seed crystal in one arm; inspect."
                ),
                spans("No crystals settle the point."),
                2,
            )
        )


def experiments(story: Story) -> Section | None:
    """Return the open points with their experiments; None without a lead."""
    if story.lead is None:
        return None
    ask_ties(story)
    ask_fired(story)
    ask_precedent(story)
    ask_notes(story)
    points = sorted(story.points, key=lambda p: p.weight)
    words = {
        1: "could overturn the choice",
        2: "could change the formula",
        3: "confirms",
    }
    rows: list[tuple[Spans, ...]] = [
        (
            spans(point.statement),
            spans(words[point.weight]),
            point.experiment,
            point.decides,
            (Text("not yet done"),),
        )
        for point in points
    ]
    return Section(
        "experiments",
        spans("Experiments to confirm"),
        (
            Paragraph(
                spans(
                    "Each open point is tied to the smallest experiment or look-up that "
                    "settles it, the weightiest first. Stability batches follow ICH Q1A(R2)"
                    " once the formula is fixed."
                )
            ),
            table(
                "t-experiments",
                spans("Open points and what settles them"),
                (
                    Column("Open point", width=2.3),
                    Column("Weight", width=0.9),
                    Column("Experiment", width=2.8),
                    Column("What the outcome decides", width=2.0),
                    Column("Study, result", width=0.9),
                ),
                rows,
            ),
        ),
        placement="3.2.P.2.2.3 and 3.2.P.8",
    )
