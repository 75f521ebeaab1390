"""Identification, signatures, and the decision in short."""

from __future__ import annotations

from formbuf.report.content import (
    Block,
    Column,
    Items,
    Note,
    Paragraph,
    Section,
    SignatureTable,
    Spans,
    Text,
)
from formbuf.report.glance import glance
from formbuf.report.reading import Cursor, cite, link, spans
from formbuf.report.reversal import reversals
from formbuf.report.story import (
    Story,
    dosed,
    is_none,
    named,
    state_of,
    table,
)
from formbuf.report.words import CRITERIA, counted, spoken, word

ROLES = (
    "Author (formulation)",
    "Checker of inputs and calculations",
    "Analytical reviewer",
    "Regulatory writer",
    "Approver (quality assurance)",
)


def identification(story: Story) -> Section:
    """Return what identifies the report, and the fields to sign."""
    return Section(
        "identification",
        spans("Identification and scope"),
        (
            table(
                "t-identification",
                spans("Identification"),
                (Column("Item", width=2.0), Column("Entry", width=4.0)),
                [(spans(item), entry) for item, entry in _identity(story)],
            ),
            Paragraph(
                spans(
                    "This report sizes, screens and ranks buffer systems for one product "
                    "by calculation. It supports development; it does not replace "
                    "experiments, compendial tests, or medical, legal and regulatory "
                    "advice. Numbers in square brackets refer to ",
                    link("references"),
                    "; values that still need confirmation are listed in ",
                    link("confirm"),
                    ".",
                )
            ),
            SignatureTable(ROLES),
        ),
    )


def _identity(story: Story) -> list[tuple[str, Spans]]:
    """Return what tells this report from every other."""
    root, more = story.root, story.more
    rows: list[tuple[str, Spans]] = [
        ("Product", spans(root.quote("brief", "product", "name"))),
        ("Version", spans(root.quote("brief", "product", "version"))),
        ("Brief", spans(more.quote("origin", "brief_name"))),
        (
            "Checksum of the brief (SHA-256)",
            spans(more.quote("origin", "brief_sha256")),
        ),
        ("Program", spans("formbuf ", root.quote("formbuf_version"))),
        (
            "Data cut-off (version of the knowledge)",
            spans(root.quote("knowledge", "version")),
        ),
        (
            "Checksum of the knowledge (SHA-256)",
            spans(root.quote("knowledge", "sha256")),
        ),
    ]
    if root.get("knowledge", "overlay"):
        rows += [
            (
                "Tables of the user laid over it",
                spans(root.quote("knowledge", "overlay")),
            ),
            (
                "Checksum of these tables (SHA-256)",
                spans(root.quote("knowledge", "overlay_sha256")),
            ),
        ]
    seed = more.get("seed")
    rows += [
        (
            "Random seed",
            spans("none: nothing in this result is drawn at random")
            if seed is None
            else spans(more.plain("seed")),
        ),
        ("Command", spans(more.quote("origin", "command"))),
    ]
    if more.text("origin", "stamp"):
        rows.append(("Written", spans(more.quote("origin", "stamp"))))
    return rows


def summary(story: Story) -> Section:
    """Return the decision with what would reverse it."""
    lead = story.lead
    blocks: list[Block] = []
    if lead is None:
        blocks += _nobody(story)
    else:
        blocks += [
            Paragraph(_choice(story, lead)),
            Paragraph(_place(story, lead)),
            glance(story),
        ]
        blocks += _limits(story, lead)
        blocks.append(
            Paragraph(spans("The choice would be reversed, or has to be reopened, if"))
        )
        blocks.append(Items(tuple(reversals(story, lead))))
    return Section("summary", spans("Decision summary"), tuple(blocks))


def _choice(story: Story, lead: Cursor) -> Spans:
    ph = state_of(lead, "measure")
    at = (
        spans(story.brief.value("ph", "target", places=2))
        if ph is None
        else spans(ph.value("ph", places=2))
    )
    product = story.brief.text("product", "name")
    of = (
        spans(story.brief.quote("product", "name")) if product else spans("the product")
    )
    if is_none(lead):
        what = spans(Text("no added buffer", strong=True))
        made = spans(
            " with the pH set to ",
            at,
            " (measured at ",
            story.measure_c,
            ") by strong acid or base: what the drug itself buffers carries the loads",
        )
    else:
        what = spans(dosed(lead))
        made = spans(", at pH ", at, " as measured at ", story.measure_c)
        if lead.get("is_own_formula"):
            made = spans(", a formula given in the brief", made)
    return spans(
        "For ",
        of,
        " (",
        story.route,
        " route) the calculation puts forward ",
        what,
        made,
        ".",
    )


def _place(story: Story, lead: Cursor) -> Spans:
    count = story.more.at("counts", "places")
    if count.number() == 1:
        place = spans(
            "It is the only candidate left to rank, with an overall desirability of ",
            lead.value("desirability", places=2),
            ". There is no back-up.",
        )
    else:
        place = spans(
            "It ranks first of ",
            counted(count, "place"),
            " (one for each buffering species and each formula of the brief) with an "
            "overall desirability of ",
            lead.value("desirability", places=2),
            ".",
        )
    backup = story.backup
    if backup is None:
        return place
    chance = lead.at("confidence", "ranks", "lead", "value")
    if chance.number() is not None:
        share = chance.value(percent=True, places=0)
        place = spans(
            place,
            " The lead comes first in ",
            share,
            " of the draws (",
            link("confidence"),
            ").",
        )
    tied = list(lead.get("tied_with") or ())
    second = spans(
        " The back-up is ",
        dosed(backup),
        " with ",
        backup.value("desirability", places=2),
        ".",
    )
    if not tied:
        return spans(
            place,
            second,
            " The lead is tied with no other candidate: within the uncertainty of the "
            "inputs its order with any other would flip in less than a quarter of "
            "cases.",
        )
    pronoun = "it" if len(tied) == 1 else "them"
    return spans(
        place,
        second,
        " Within the uncertainty of the inputs the lead cannot be told apart from ",
        story.names_of(tied),
        f"; the order between {pronoun} and the lead is not a finding.",
    )


def _limits(story: Story, lead: Cursor) -> list[Block]:
    """Say what pulls the lead down, and what it rests on."""
    blocks: list[Block] = []
    limiting = lead.text("limiting")
    if limiting:
        found = lead.at("criteria", limiting)
        blocks.append(
            Paragraph(
                spans(
                    f"What pulls the lead down most is {word(CRITERIA, limiting)} "
                    "(desirability ",
                    found.value("desirability", places=2),
                    "): ",
                    found.quote("text"),
                    cite(found.get("sources")),
                    ".",
                )
            )
        )
    else:
        blocks.append(
            Paragraph(
                spans("By no criterion does the lead fall short of full desirability.")
            )
        )
    blocks += _margin(story, lead)
    if story.root.get("loads", "all_default"):
        blocks.append(
            Note(
                spans(
                    "No acid or base load was stated. The concentrations rest on default "
                    "allowances (",
                    link("need"),
                    ") and move in proportion to the loads that are measured.",
                )
            )
        )
    return blocks


def _margin(story: Story, lead: Cursor) -> list[Block]:
    """Say so where the product carries the loads without the buffer of the lead."""
    bare = next((c for c in story.candidates if is_none(c)), None)
    share = None if bare is None else bare.number("carried_share")
    if bare is None or share is None or share < 1.0:
        return []
    if is_none(lead) or bare.get("rank") is not None:
        return []
    measured = story.brief.get("drug", "titration")
    return [
        Paragraph(
            spans(
                "By its measured titration" if measured else "By calculation",
                " the product carries ",
                bare.value("carried_share", digits=2),
                " times the load budget without an added buffer; the buffer is then a "
                "margin (",
                link("need"),
                ").",
            )
        )
    ]


def _nobody(story: Story) -> list[Block]:
    """Say that every candidate is dropped, and who came nearest."""
    misses = [story.of(key) for key in story.more.get("nearest_misses") or ()]
    rows = [
        (spans(named(c)), spans(screen.quote("text")))
        for c in misses
        if c is not None
        for screen in c.each("screened_out_by")
    ]
    bare = next((c for c in story.candidates if c.get("system") == "none"), None)
    share = bare.number("carried_share") if bare is not None else None
    stands = (
        bare is not None
        and bare.get("standing") in ("viable", "back-up")
        and (share is None or share >= 1.0)
    )
    first = (
        "No buffer is acceptable; the product without one stays viable."
        if stands
        else "No candidate is acceptable."
    )
    blocks: list[Block] = [
        Paragraph(
            spans(
                Text(first, strong=True),
                " Of ",
                counted(story.more.at("counts", "judged"), "candidate"),
                " judged, ",
                counted(story.more.at("counts", "dropped"), "is", "are"),
                " screened out (",
                link("candidates"),
                "). Without a change of the brief or a recorded override there is no "
                "buffer to design.",
            )
        )
    ]
    if rows:
        blocks.append(
            table(
                "t-misses",
                spans("Candidates that came nearest, and what screens them out"),
                (
                    Column("Candidate", width=2.0),
                    Column("Screened out because", width=5.0),
                ),
                rows,
            )
        )
    beside = [c for c in story.candidates if c.get("standing") == "not evaluable"]
    if beside:
        blocks.append(
            Paragraph(
                spans(
                    "The product without an added buffer could not be judged (",
                    link("need"),
                    f"); a {spoken('measured')} titration would decide it.",
                )
            )
        )
    return blocks
