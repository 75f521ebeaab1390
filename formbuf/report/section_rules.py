"""The rule log: to whom each rule applies, and for whom it stays open."""

from __future__ import annotations

from formbuf.report.content import Block, Column, Paragraph, Section, Spans, Table
from formbuf.report.reading import Cursor, joined, parted, spans
from formbuf.report.story import Story, label_of, named, table
from formbuf.report.words import SEVERITIES, word

#: For each rule: a finding of it, who it applies to, who it stays open for.
Log = dict[str, tuple[Cursor, list[Cursor], list[Cursor]]]


def rule_log(story: Story) -> Section:
    """Return for each rule whom it applies to and for whom it stays open."""
    log: Log = {}
    quiet: dict[str, Cursor] = {}
    for c in story.candidates:
        for f in c.each("findings"):
            if f.get("outcome") == "not fired":
                quiet.setdefault(f.text("rule"), f)
                continue
            _, fired, unjudged = log.setdefault(f.text("rule"), (f, [], []))
            (fired if f.get("outcome") == "fired" else unjudged).append(c)
    blocks: list[Block] = [_table(story, log)] if log else []
    silent = [quiet[name] for name in sorted(quiet) if name not in log]
    if silent:
        names = joined([spans(f.quote("rule")) for f in silent])
        words = spans("Judged, and applying to no candidate: ", names, ".")
        blocks.append(Paragraph(words))
    if not blocks:
        blocks.append(Paragraph(spans("No rule concerned a candidate.")))
    return Section("rules", spans("Rule log"), tuple(blocks), annex=True)


def _table(story: Story, log: Log) -> Table:
    everyone = len([c for c in story.candidates if c.get("findings")])
    rows = []
    for name in sorted(log):
        first, fired, unjudged = log[name]
        rule = story.more.at("rules", name)
        favours = ", favours" if rule.get("favours") else None
        own = " (own rule)" if rule.get("overlay") else None
        rows.append(
            (
                spans(first.quote("rule")),
                spans(word(SEVERITIES, rule.text("severity")), favours),
                spans(rule.quote("title"), own),
                spans(rule.quote("condition")),
                _whom(fired, everyone),
                _whom(unjudged, everyone),
            )
        )
    return table(
        "t-rules",
        spans("Rules that apply or could not be judged"),
        (
            Column("Rule", width=0.6),
            Column("Severity", width=0.9),
            Column("Title", width=2.0),
            Column("Condition", width=2.0),
            Column("Applies to", width=1.5),
            Column("Open for", width=1.5),
        ),
        rows,
    )


def _whom(found: list[Cursor], everyone: int) -> Spans:
    if not found:
        return spans("-")
    if len(found) == everyone:
        return spans("all")
    return parted([spans(named(c)) for c in sorted(found, key=label_of)], ", ")
