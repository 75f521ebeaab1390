"""What the screening rules say of the product, of the lead and of the back-up."""

from __future__ import annotations

from formbuf.report.content import Block, Column, Note, Paragraph, Section, Spans
from formbuf.report.experiments import ask_open_rules
from formbuf.report.reading import Cursor, link, parted, sentence, spans
from formbuf.report.story import Story, named, source_cell, table
from formbuf.report.words import SEVERITIES, word


def compatibility(story: Story) -> Section:
    """Return the findings that apply and those that could not be judged."""
    blocks: list[Block] = [
        Paragraph(
            spans(
                "Each rule tests facts of the product and of the candidate. It applies, does "
                "not apply, or stays open because a fact is missing. An exclusion "
                "screens a candidate out; a warning or a note lowers its compatibility by the "
                "worst finding of all topics. Findings that hold for every candidate do not "
                "change the order and stand apart. The full log is ",
                link("rules"),
                ".",
            )
        )
    ]
    parts = [*_product(story)]
    for label, c in zip(("lead", "back-up"), story.first_two, strict=False):
        parts.append(_candidate(story, c, label))
    if story.first_two:
        parts += _open(story)
    blocks.append(
        Note(
            spans(
                "A rule that does not apply is no proof of compatibility; a much-studied "
                "buffer has more rules than a little-known one."
            )
        )
    )
    return Section(
        "compatibility",
        spans("Compatibility"),
        tuple(blocks),
        tuple(parts),
        placement="3.2.P.2.1.2 and 3.2.P.2.6",
    )


def fired(c: Cursor) -> list[Cursor]:
    """Return the findings of a candidate that fired."""
    return [f for f in c.each("findings") if f.get("outcome") == "fired"]


def _product(story: Story) -> list[Section]:
    common = story.root.each("product_findings")
    if not common:
        return []
    return [
        Section(
            "compatibility-product",
            spans("Findings that hold whatever the buffer"),
            (
                _findings(
                    story,
                    common,
                    "t-product-findings",
                    spans("Findings of the product"),
                ),
            ),
        )
    ]


def _candidate(story: Story, c: Cursor, label: str) -> Section:
    common = {f.text("rule") for f in story.root.each("product_findings")}
    found = [f for f in fired(c) if f.text("rule") not in common]
    slug = label.replace("-", "")
    blocks: list[Block]
    if found:
        caption = spans(f"Findings of the {label}: ", named(c))
        blocks = [_findings(story, found, f"t-findings-{slug}", caption)]
    else:
        blocks = [
            Paragraph(
                spans(
                    f"No rule applies to the {label}",
                    " besides those of the product." if common else ".",
                )
            )
        ]
    return Section(
        f"compatibility-{slug}", spans(f"Findings of the {label}"), tuple(blocks)
    )


def _findings(story: Story, findings: list[Cursor], id_: str, caption: Spans) -> Block:
    rows = []
    for f in findings:
        rule = story.more.at("rules", f.text("rule"))
        rows.append(
            (
                spans(f.quote("rule")),
                _weight(rule, f),
                _finding(rule, f),
                spans(rule.quote("mitigation")),
                source_cell(
                    rule.get("sources"), f"{rule.text('basis')}{_threshold(rule)}"
                ),
            )
        )
    return table(
        id_,
        caption,
        (
            Column("Rule", width=0.6),
            Column("Severity", width=0.9),
            Column("Finding", width=3.4),
            Column("What to do", width=2.2),
            Column("Basis and source", width=1.1),
        ),
        rows,
    )


def _weight(rule: Cursor, f: Cursor) -> Spans:
    if rule.get("favours"):
        return spans("speaks for it")
    words = word(SEVERITIES, f.text("severity"))
    if f.get("overridden_by"):
        return spans(f"{words}, set aside")
    return spans(words)


def _threshold(rule: Cursor) -> str:
    kind = rule.text("threshold_basis")
    return {
        "compiler": ", threshold of the tables",
        "mixed": ", threshold partly of the tables",
    }.get(kind, "")


def _finding(rule: Cursor, f: Cursor) -> Spans:
    words = spans(rule.quote("title"), ": ", rule.quote("effect"), ".")
    if rule.get("magnitude"):
        words = spans(words, " ", sentence(rule.at("magnitude")))
    judged = _values(f)
    return spans(words, " Judged on ", judged, ".") if judged else words


def _values(f: Cursor) -> Spans:
    parts = []
    for name, value in (f.get("values") or {}).items():
        place = f.at("values", name)
        shown = (
            place.value(digits=3, trim=True)
            if isinstance(value, int | float) and not isinstance(value, bool)
            else place.plain()
        )
        parts.append(spans(f"{name} = ", shown))
    return parted(parts, "; ")


def _open(story: Story) -> list[Section]:
    """Rules of lead and back-up that a missing fact keeps open."""
    open_: dict[str, tuple[Cursor, list[str]]] = {}
    for label, c in zip(("lead", "back-up"), story.first_two, strict=False):
        for f in c.each("findings"):
            rule = story.more.at("rules", f.text("rule"))
            if f.get("outcome") == "not evaluable" and not rule.get("favours"):
                open_.setdefault(f.text("rule"), (f, []))[1].append(label)
    if not open_:
        return [
            Section(
                "compatibility-open",
                spans("Findings that could not be judged"),
                (Paragraph(spans("Every rule could be judged for lead and back-up.")),),
            )
        ]
    order = {"exclude": 0, "warn": 1, "note": 2}
    listed = sorted(
        open_.items(),
        key=lambda item: (order.get(item[1][0].text("severity"), 3), item[0]),
    )
    rows = []
    for name, (f, who) in listed:
        rule = story.more.at("rules", name)
        rows.append(
            (
                spans(f.quote("rule")),
                spans(word(SEVERITIES, f.text("severity"))),
                spans(" and ".join(who)),
                spans(rule.quote("title"), ": ", rule.quote("effect")),
                _questions(rule, f),
            )
        )
    ask_open_rules(story, listed)
    return [
        Section(
            "compatibility-open",
            spans("Findings that could not be judged"),
            (
                table(
                    "t-open-findings",
                    spans("Rules that a missing fact keeps open"),
                    (
                        Column("Rule", width=0.6),
                        Column("Severity", width=0.9),
                        Column("For", width=0.9),
                        Column("What is at stake", width=3.0),
                        Column("Question to answer", width=2.8),
                    ),
                    rows,
                ),
            ),
        )
    ]


def _questions(rule: Cursor, f: Cursor) -> Spans:
    asked = [spans(q.quote("question")) for q in rule.each("questions")]
    return parted(asked, " ") or spans(f.plain("missing"))
