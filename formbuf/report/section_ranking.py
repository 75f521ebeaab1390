"""How the candidates were ranked, what limits each, and how firm the order is."""

from __future__ import annotations

from formbuf.report.content import (
    Block,
    Column,
    Figure,
    Note,
    Paragraph,
    Section,
    Spans,
)
from formbuf.report.figures import criteria_figure
from formbuf.report.reading import cite, joined, link, spans
from formbuf.report.story import Story, label_of, named, number, table
from formbuf.report.words import CRITERIA, CRITERIA_SHORT, word


def ranking(story: Story) -> Section | None:
    """Return method, scores, ties and sensitivity; None where nobody is ranked."""
    heads = story.heads
    if not heads:
        return None
    blocks: list[Block] = [Paragraph(_method(story)), _anchors(story), _scores(story)]
    if len(story.finalists) > 1:
        blocks.append(_figure(story))
    blocks += [_limits(story), Paragraph(_ties(story))]
    blocks.append(
        Note(
            spans(
                "Desirabilities order candidates for one brief. They are no measure of "
                "quality and cannot be compared between briefs."
            )
        )
    )
    parts = (_sensitivity(story),) if len(heads) > 1 else ()
    return Section(
        "ranking",
        spans("Ranking"),
        tuple(blocks),
        tuple(parts),
        placement="3.2.P.2.2.1, formulation development",
    )


def _criteria(story: Story) -> list[str]:
    """Criteria that apply to this brief, in their order."""
    used = {name for c in story.heads for name in c.get("criteria")}
    return [name for name in CRITERIA if name in used]


def _method(story: Story) -> Spans:
    ranking = story.root.at("ranking")
    return spans(
        "Each criterion turns a calculated quantity or a class into a desirability between ",
        ranking.plain("floor_value"),
        " and one, by a straight or logarithmic line between two anchors",
        cite(("harrington_1965", "derringer_1980")),
        ". The overall desirability is their weighted geometric mean; a criterion that does "
        "not apply to the brief is left out for every candidate. Zero belongs to the "
        "screens alone. "
        "Weights and anchors are those of the tables unless the brief sets its own.",
    )


def _anchors(story: Story) -> Block:
    ranking = story.root.at("ranking")
    own_weights = story.brief.get("ranking", "weights") or {}
    own_anchors = story.brief.get("ranking", "anchors") or {}
    rows = []
    for name in _criteria(story):
        anchors = ranking.at("anchors", name)
        if anchors.data is None:
            ends = (spans("by class"), spans("by class"), spans("-"))
        else:
            unit = {"1": "share", "pH": "pH"}.get(
                anchors.text("unit"), anchors.text("unit")
            )
            floor = (
                spans("ceiling of the route")
                if anchors.get("floor") is None
                else spans(anchors.plain("floor"))
            )
            ends = (
                spans(anchors.plain("full")),
                floor,
                spans(unit, ", logarithmic" if anchors.text("scale") == "log" else ""),
            )
        setter = [
            label
            for label, own in (("weight", own_weights), ("anchors", own_anchors))
            if name in own
        ]
        rows.append(
            (
                spans(word(CRITERIA, name)),
                spans(ranking.at("weights", name).plain()),
                *ends,
                spans(f"brief ({' and '.join(setter)})" if setter else "tables"),
            )
        )
    return table(
        "t-anchors",
        spans("Criteria, weights and anchors"),
        (
            Column("Criterion", width=1.6),
            number("Weight", 0.8),
            number("Full desirability at", 1.2),
            number("Floor at", 1.2),
            Column("Unit and scale", width=1.5),
            Column("Set by", width=1.2),
        ),
        rows,
    )


def _scores(story: Story) -> Block:
    names = _criteria(story)
    rows = []
    for c in story.candidates:
        if c.get("rank") is None:
            continue
        cells = [
            spans(c.at("criteria", name).value("desirability", places=2))
            if c.get("criteria", name) is not None
            else spans("-")
            for name in names
        ]
        rows.append(
            (
                spans("– " if c.get("variant_of") else None, named(c)),
                *cells,
                spans(c.value("desirability", places=2)),
            )
        )
    columns = [Column("Candidate", width=2.4)]
    columns += [number(CRITERIA_SHORT[name], 0.9) for name in names]
    columns.append(number("Overall", 0.9))
    return table("t-scores", spans("Desirabilities, best first"), columns, rows)


def _figure(story: Story) -> Block:
    names = _criteria(story)
    rows = [
        (
            label_of(c),
            [c.number("criteria", name, "desirability") for name in names],
        )
        for c in story.finalists
    ]
    labels = [CRITERIA[name] for name in names]
    svg, png = criteria_figure(labels, rows)
    best = ", ".join(name for name, _ in rows)
    return Figure(
        "f-criteria",
        spans("Criteria of the finalists side by side; one is best"),
        "Dot chart. One row for each criterion, one mark for each finalist, from the "
        f"floor on the left to full desirability on the right. Finalists: {best}. The "
        "values stand in the table above.",
        svg,
        png,
    )


def _limits(story: Story) -> Block:
    rows = []
    for c in story.heads:
        name = c.text("limiting")
        if not name:
            rows.append((spans(named(c)), spans("none"), spans("-")))
            continue
        found = c.at("criteria", name)
        rows.append(
            (
                spans(named(c)),
                spans(word(CRITERIA, name)),
                spans(found.quote("text"), cite(found.get("sources"))),
            )
        )
    return table(
        "t-limits",
        spans("What pulls each candidate down most"),
        (
            Column("Candidate", width=1.8),
            Column("Criterion", width=1.2),
            Column("Finding", width=4.2),
        ),
        rows,
    )


def _ties(story: Story) -> Spans:
    pairs = []
    seen: set[frozenset[str]] = set()
    for c in story.heads:
        for other in c.get("tied_with") or ():
            pair = frozenset((c.text("system"), other))
            if pair not in seen:
                seen.add(pair)
                pairs.append(spans(named(c), " with ", story.name_of(other)))
    if not pairs:
        if len(story.heads) == 1:
            return spans("With a single place there is nothing to be tied.")
        return spans(
            "No two neighbours are tied: each difference is larger than what the "
            "uncertainty of the inputs can turn round."
            if len(story.heads) > 2
            else "The two are not tied: their difference is larger than what the "
            "uncertainty of the inputs can turn round."
        )
    how = (
        "Ties, that is pairs whose order flips in more than a quarter of the draws: "
        if story.root.get("confidence")
        else "Ties, that is pairs whose order could flip in more than a quarter of cases "
        "when the inputs vary within their uncertainty (first order): "
    )
    return spans(how, joined(pairs), ". Ties hold between pairs only.")


def _sensitivity(story: Story) -> Section:
    rows = []
    for row in story.more.each("sensitivity", "weights"):
        level = spans(row.value("level_at", digits=2))
        rows.append(
            (
                spans(word(CRITERIA, row.text("criterion"))),
                spans(row.plain("weight")),
                story.name_of(row.text("without"))
                if row.get("without")
                else spans("-"),
                story.name_of(row.text("doubled")),
                level,
            )
        )
    backup = story.backup
    who = spans(named(backup)) if backup is not None else spans("the back-up")
    return Section(
        "sensitivity",
        spans("How firm the order is"),
        (
            Paragraph(
                spans(
                    "One weight is changed at a time, the others are kept. The last "
                    "column gives the weight at which ",
                    who,
                    " draws level with the lead; a dash means that no weight does it (",
                    link("confirm"),
                    " lists the weights as judgement).",
                )
            ),
            table(
                "t-sensitivity",
                spans("Who leads when one weight changes"),
                (
                    Column("Criterion", width=1.6),
                    number("Weight", 0.7),
                    Column("First without it", width=1.9),
                    Column("First with twice its weight", width=1.9),
                    number("Level at weight", 1.0),
                ),
                rows,
            ),
        ),
    )
