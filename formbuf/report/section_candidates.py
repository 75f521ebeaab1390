"""Who was considered, what is known of each, and who is dropped and why."""

from __future__ import annotations

from formbuf.advice.wording import bare_standing
from formbuf.report.content import Block, Column, Items, Note, Paragraph, Section, Spans
from formbuf.report.reading import Cursor, link, sentence, spans
from formbuf.report.story import (
    Story,
    is_none,
    named,
    number,
    source_cell,
    sources_in,
    table,
)
from formbuf.report.words import BOOKS, SCREENS, STANDINGS, counted, word

_YES = {"yes": "yes", "no": "no", "partial": "partly", "unknown": "?"}


def candidates(story: Story) -> Section:
    """Return candidates, precedents, exclusions, and the formulas of the brief."""
    counts = story.more.at("counts")
    dropped = int(counts.number("dropped") or 0)
    parts = [_precedents(story)]
    if dropped:
        parts.append(_exclusions(story))
    parts += _own_formulas(story)
    parts += _remarks(story)
    line = spans(
        "The calculation judged ",
        counted(counts.at("judged"), "candidate"),
        ", the product without an added buffer among them. ",
    )
    if dropped:
        line = spans(
            line,
            _capital(counts, dropped),
            " screened out (",
            link("exclusions"),
            "). ",
        )
    else:
        line = spans(line, "None of them is screened out. ")
    line = spans(
        line,
        "Systems that differ only in their counter-ion share one place; the best of "
        "them stands for the others.",
    )
    return Section(
        "candidates",
        spans("Candidates and exclusions"),
        (Paragraph(line), _list(story)),
        tuple(parts),
        placement="3.2.P.2.1.2, excipients",
    )


def _capital(counts: Cursor, dropped: int) -> Spans:
    found = counted(counts.at("dropped"), "is", "are")
    first = found[0]
    if dropped <= 12 and hasattr(first, "text"):
        return spans(first.text[:1].upper() + first.text[1:])
    return found


def _standing(c: Cursor) -> str:
    standing = c.text("standing")
    if is_none(c) and c.get("rank") is None and standing != "screened out":
        return bare_standing(c.number("carried_share"), standing)
    return word(STANDINGS, standing)


def _list(story: Story) -> Block:
    rows = []
    for c in story.candidates:
        variant = c.get("variant_of")
        rank = spans(c.plain("rank")) if c.get("rank") is not None else spans("-")
        rows.append(
            (
                spans("– " if variant else None, named(c)),
                spans("-") if variant else rank,
                spans("variant" if variant else _standing(c)),
                spans("-") if is_none(c) else spans(c.value("required_mmol_l")),
                spans("-")
                if is_none(c)
                else spans(c.value("concentration_mmol_l", trim=True)),
                spans(c.value("ceiling_mmol_l", trim=True)),
            )
        )
    return table(
        "t-candidates",
        spans("Candidates, best first"),
        (
            Column("Candidate", width=2.6),
            number("Rank", 0.6),
            Column("Standing", width=1.2),
            number("Required, mmol/L", 1.1),
            number("Proposed, mmol/L", 1.1),
            number("Ceiling, mmol/L", 1.1),
        ),
        rows,
        [
            spans(
                "Required: concentration that carries the loads; a dash where none "
                "considered carries them. A dash before a name marks a variant of the "
                "system above it."
            )
        ],
    )


def _precedents(story: Story) -> Section:
    rows = []
    wanted = dict.fromkeys(
        s for c in story.candidates for s in c.get("species") or () if not is_none(c)
    )
    for species in wanted:
        entry = story.more.at("precedents", species)
        if not entry.get("level"):
            rows.append((spans(story.component(species)), *([spans("-")] * 6)))
            continue
        kind = entry.text("kind_level") or "none"
        rows.append(
            (
                spans(story.component(species)),
                spans(entry.text("level")),
                spans(kind if story.more.get("kind_counts") else "-"),
                _usual(entry),
                spans(entry.value("ceiling_mmol_l", trim=True)),
                spans(_books(entry)),
                source_cell(entry.get("source"), entry.text("level_basis")),
            )
        )
    books = " / ".join(BOOKS.values())
    return Section(
        "precedents",
        spans("Precedent"),
        (
            table(
                "t-precedents",
                spans(f"Precedent of each species on the {story.route} route"),
                (
                    Column("Species", width=1.5),
                    Column("On the route", width=1.1),
                    Column("This kind of product", width=1.1),
                    number("Usual, mmol/L", 0.9),
                    number("Ceiling, mmol/L", 0.9),
                    Column(f"Monograph {books}", width=1.3),
                    Column("Basis of the level", width=1.2),
                ),
                rows,
            ),
            Note(
                spans(
                    "Here “none” means none known to the compilers of the tables, not proof of "
                    "absence; ceilings are compilers' figures, not regulatory limits; ? "
                    "means not looked up. Check the current lists of inactive ingredients "
                    "and assessment reports on the day of filing."
                )
            ),
        ),
    )


def _usual(entry: Cursor) -> Spans:
    low, high = entry.get("usual_low_mmol_l"), entry.get("usual_high_mmol_l")
    if low is None and high is None:
        return spans("-")
    if low is None or low == high:
        return spans(entry.value("usual_high_mmol_l", trim=True))
    if high is None:
        return spans("from ", entry.value("usual_low_mmol_l", trim=True))
    return spans(
        entry.value("usual_low_mmol_l", trim=True),
        " to ",
        entry.value("usual_high_mmol_l", trim=True),
    )


def _books(entry: Cursor) -> str:
    books = entry.get("monographs") or {}
    return " / ".join(_YES.get(str(books.get(key)), "?") for key in BOOKS)


def _exclusions(story: Story) -> Section:
    rows = []
    for c in story.dropped:
        for position, screen in enumerate(c.each("screened_out_by")):
            rows.append(
                (
                    spans(named(c)) if position == 0 else spans("– further reason"),
                    _screen_name(story, screen),
                    spans(screen.quote("text")),
                    source_cell(
                        sources_in(screen.text("source")), screen.text("basis")
                    ),
                )
            )
    return Section(
        "exclusions",
        spans("Exclusions"),
        (
            table(
                "t-exclusions",
                spans("Candidates screened out, with rule, value and source"),
                (
                    Column("Candidate", width=1.5),
                    Column("Screen", width=1.2),
                    Column("Finding with value and limit", width=4.0),
                    Column("Basis and source", width=1.2),
                ),
                rows,
            ),
        ),
    )


def _screen_name(story: Story, screen: Cursor) -> Spans:
    name = screen.text("id")
    if name in SCREENS:
        return spans(word(SCREENS, name))
    return spans("rule ", screen.quote("id"))


def _own_formulas(story: Story) -> list[Section]:
    own = [c for c in story.candidates if c.get("is_own_formula")]
    if not own:
        return []
    return [
        Section(
            "own",
            spans("Formulas given in the brief"),
            (
                Paragraph(
                    spans(
                        "A formula of the brief is judged as it is: it is never resized."
                    )
                ),
                Items(tuple(_own(c) for c in own)),
            ),
        )
    ]


def _own(c: Cursor) -> Spans:
    made = [spans("“", named(c), "”: ")]
    share = c.number("carried_share")
    if share is not None and share >= 1.0:
        made.append(
            spans("it carries ", c.value("carried_share", digits=2), " times the loads")
        )
    elif share is not None:
        made.append(
            spans(
                "it carries ",
                c.value("carried_share", percent=True, places=0),
                " of the loads",
            )
        )
    else:
        made.append(spans("no load is set against it"))
    reasons = c.each("screened_out_by")
    if reasons:
        made.append(spans("; it is screened out: "))
        for position, screen in enumerate(reasons):
            made += [spans("; ")] if position else []
            made.append(spans(screen.quote("text")))
    else:
        made.append(
            spans(
                "; place ",
                c.plain("rank"),
                ", overall desirability ",
                c.value("desirability", places=2),
            )
        )
    made.append(spans("."))
    return tuple(span for part in made for span in part)


def _remarks(story: Story) -> list[Section]:
    items: list[Spans] = []
    for c in story.candidates:
        if is_none(c) or c.get("standing") == "screened out":
            continue
        items += [
            spans(named(c), ": ", sentence(c.at("notes", i)))
            for i in range(len(c.get("notes") or ()))
        ]
    if not items:
        return []
    return [
        Section(
            "remarks", spans("Remarks on single candidates"), (Items(tuple(items)),)
        )
    ]
