"""What would reverse the decision, as far as the calculation can tell."""

from __future__ import annotations

from formbuf.report.content import Spans
from formbuf.report.reading import Cursor, joined, link, parted, spans
from formbuf.report.story import Story, counted_class, is_none
from formbuf.report.words import CRITERIA, word

#: Bases of a class on freezing that a measurement may overturn.
UNSETTLED = ("memory", "practice", "judgement")
#: Most weights named one by one.
MOST_WEIGHTS = 3


def reversals(story: Story, lead: Cursor) -> list[Spans]:
    """Return the conditions, each as the end of a sentence that begins with "if"."""
    found = [*_loads(story, lead)]
    found += _open_exclusions(lead, story)
    found += _weights(story, lead)
    found += _freezing(story, lead)
    found += _precedent(story, lead)
    if is_none(lead):
        found.append(
            spans(
                "a batch without buffer drifts in a stability study by more than the "
                "window allows;"
            )
        )
    found.append(
        spans(
            "stability, tolerability or compatibility data of the product contradict it "
            "(",
            link("experiments"),
            ").",
        )
    )
    return found


def _loads(story: Story, lead: Cursor) -> list[Spans]:
    factor = story.more.at("sensitivity", "load_factor")
    ceiling = story.more.at("sensitivity", "ceiling_factor")
    amount = factor.number()
    if amount is None:
        return []
    if amount < 1.0:
        return [
            spans(
                "the full loads of the budget arise: as proposed it carries ",
                factor.value(percent=True, places=0),
                " of them;",
            )
        ]
    start = spans(
        "the loads exceed ",
        factor.value(digits=3),
        " times the budget (more buffer is needed then",
    )
    most = ceiling.number()
    if most is not None and most > amount:
        start = spans(
            start,
            "; at about ",
            ceiling.value(digits=2),
            " times the budget the need reaches the ceiling of the route",
        )
    return [spans(start, ");")]


def _open_exclusions(lead: Cursor, story: Story) -> list[Spans]:
    """Exclusions that a missing answer could bring to bear on the lead."""
    found = []
    for finding in lead.each("findings"):
        if (
            finding.get("outcome") != "not evaluable"
            or finding.get("scope") != "candidate"
        ):
            continue
        if finding.get("severity") != "exclude" or finding.get("overridden_by"):
            continue
        rule = story.more.at("rules", finding.text("rule"))
        if rule.get("favours"):
            continue
        questions = [
            spans("“", q.quote("question"), "”") for q in rule.each("questions")
        ]
        asked = parted(questions, " ") if questions else spans("an open fact")
        found.append(
            spans(
                "rule ",
                finding.quote("rule"),
                " (",
                rule.quote("title"),
                ") turns out to apply; it depends on the answer to ",
                asked,
                ";",
            )
        )
    return found


def _weights(story: Story, lead: Cursor) -> list[Spans]:
    """Criteria whose weight decides the first place."""
    own = lead.text("system")
    backup = story.backup
    rows = story.more.each("sensitivity", "weights")
    dropped: dict[str, list[str]] = {}
    for row in rows:
        without = row.text("without")
        level = row.number("level_at")
        if without == story.root.text("backup") and level is not None:
            continue  # told below by the weight at which the two draw level
        if without and without != own:
            dropped.setdefault(without, []).append(row.text("criterion"))
    found = []
    for key, names in dropped.items():
        criteria = joined([spans(word(CRITERIA, name)) for name in names], " or ")
        found.append(
            spans(
                "no weight is given to ",
                criteria,
                ": ",
                story.name_of(key),
                " would then come first;",
            )
        )
    moved = []
    for row in rows:
        level, weight = row.number("level_at"), row.number("weight")
        if level is None or weight is None or not 0.0 < level < 4.0 * max(weight, 0.25):
            continue
        side = "above" if level > weight else "below"
        if level == weight:
            continue
        moved.append(
            (
                abs(level - weight),
                spans(
                    f"the weight of {word(CRITERIA, row.text('criterion'))} is set {side} ",
                    row.value("level_at", digits=2),
                    " (now ",
                    row.value("weight", digits=2, trim=True),
                    ")",
                ),
            )
        )
    moved.sort(key=lambda pair: pair[0])
    if moved and backup is not None:
        shown = [text for _, text in moved[:MOST_WEIGHTS]]
        found.append(
            spans(joined(shown, ", or "), ": the back-up would then overtake the lead;")
        )
    return found


def _freezing(story: Story, lead: Cursor) -> list[Spans]:
    if not story.is_cold or lead.get("frozen") is None:
        return []
    counted = counted_class(lead)
    return [
        spans(
            f"a measurement shows the change of pH on freezing to be worse than {counted}, "
            "the class it is ranked by (",
            link("freezing"),
            ");",
        )
    ]


def _precedent(story: Story, lead: Cursor) -> list[Spans]:
    recalled = [
        name
        for name in lead.get("species") or ()
        if story.more.text("precedents", name, "level_basis") in UNSETTLED
    ]
    if not recalled or is_none(lead):
        return []
    return [
        spans(
            "the precedent of ",
            joined([spans(story.component(name)) for name in recalled]),
            f" on the {story.route} route, which rests on recollection, is not confirmed "
            "by the current lists of authorities;",
        )
    ]
