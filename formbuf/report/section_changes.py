"""What changed since an earlier result, as an annex and as a page of its own."""

from __future__ import annotations

from formbuf.report.content import Block, Column, Paragraph, Section, Spans
from formbuf.report.reading import Cursor, parted, spans
from formbuf.report.story import Story, number, table
from formbuf.report.words import CRITERIA, OUTCOMES, SCREENS, STANDINGS, word

_AMOUNTS = {
    "required_mmol_l": "required concentration, mmol/L",
    "concentration_mmol_l": "proposed concentration, mmol/L",
}
_VERSIONS = {
    "formbuf_version": "program",
    "knowledge.version": "knowledge",
    "knowledge.sha256": "checksum of the knowledge",
    "knowledge.overlay_sha256": "checksum of the user's tables",
}


def changes_section(story: Story) -> Section | None:
    """Return the annex on changes; None where no earlier result was given."""
    place = story.more.at("changes")
    if place.data is None:
        return None
    blocks: list[Block] = []
    for key, title, caption in (
        ("versions", "versions", "Program and knowledge"),
        ("brief", "keys of the brief", "Brief"),
        ("ranking", "weights, anchors and loads", "Weights, anchors and loads"),
        (
            "rules",
            "rules that hold for every candidate",
            "Rules alike for every candidate",
        ),
    ):
        if place.get(key):
            blocks.append(_values(place.each(key), f"t-changes-{key}", caption))
        else:
            blocks.append(Paragraph(spans(f"No change in {title}.")))
    blocks.append(Paragraph(_places(story, place)))
    if place.get("moved"):
        blocks.append(_moved(place))
    else:
        blocks.append(Paragraph(spans("No candidate moved.")))
    return Section(
        "changes", spans("Changes since the earlier result"), tuple(blocks), annex=True
    )


def _values(rows: list[Cursor], id_: str, caption: str) -> Block:
    return table(
        id_,
        spans(f"Changes: {caption}"),
        (
            Column("Key", width=2.2),
            Column("Before", width=2.2),
            Column("Now", width=2.2),
        ),
        [
            (
                spans(_VERSIONS[r.text("key")])
                if r.text("key") in _VERSIONS
                else spans(r.quote("key")),
                spans(r.plain("old")),
                spans(r.plain("new")),
            )
            for r in rows
        ],
    )


def _places(story: Story, place: Cursor) -> Spans:
    words = []
    for key, noun in (("lead", "lead"), ("backup", "back-up")):
        change = place.at(key)
        if change.data is None:
            words.append(spans(f"The {noun} is the same."))
            continue
        old, new = change.get("old"), change.get("new")
        before = story.name_of(old) if old else spans("none")
        after = story.name_of(new) if new else spans("none")
        words.append(spans(f"The {noun} was ", before, " and is now ", after, "."))
    return parted(words, " ")


def _moved(place: Cursor) -> Block:
    rows = [
        (
            spans(m.quote("name")),
            _stand(m, "old"),
            _stand(m, "new"),
            spans(
                m.value("old_desirability", places=2),
                " → ",
                m.value("new_desirability", places=2),
            ),
            _reasons(m),
        )
        for m in place.each("moved")
    ]
    return table(
        "t-changes-moved",
        spans("Candidates that moved, or differ in what is proposed"),
        (
            Column("Candidate", width=1.6),
            Column("Before", width=1.1),
            Column("Now", width=1.1),
            number("Desirability", 1.1),
            Column("Why", width=3.2),
        ),
        rows,
    )


def _stand(m: Cursor, which: str) -> Spans:
    standing = word(STANDINGS, m.text(f"{which}_standing"))
    if not standing:
        return spans("not considered")
    if m.get(f"{which}_rank") is None:
        return spans(standing)
    return spans(m.plain(f"{which}_rank"), f", {standing}")


def _reasons(m: Cursor) -> Spans:
    return parted([_reason(r) for r in m.each("reasons")]) or spans("the others moved")


def _reason(r: Cursor) -> Spans:
    kind, _, name = r.text("what").partition(" ")
    if kind == "criterion":
        return spans(
            f"{word(CRITERIA, name)} ",
            r.value("old", places=2),
            " → ",
            r.value("new", places=2),
        )
    if kind == "screen":
        shown = word(SCREENS, name)
        if r.get("new"):
            return spans(f"now screened out ({shown}): ", r.quote("new"))
        return spans(f"no longer screened out ({shown})")
    if kind == "rule":
        return spans(
            r.quote("what"), ": ", _outcome(r, "old"), " → ", _outcome(r, "new")
        )
    label = _AMOUNTS.get(kind, kind)
    return spans(
        f"{label} ", r.value("old", trim=True), " → ", r.value("new", trim=True)
    )


def _outcome(r: Cursor, key: str) -> str:
    return word(OUTCOMES, r.text(key)) if r.get(key) else "not judged"
