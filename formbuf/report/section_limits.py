"""Limits of the models, what was set aside, and what needs confirmation."""

from __future__ import annotations

from collections.abc import Sequence

from formbuf.report.content import Block, Column, Items, Paragraph, Section, Spans
from formbuf.report.reading import Cursor, cite, joined, link, spans
from formbuf.report.section_drug import buffers_by_estimate
from formbuf.report.story import Story, named, table
from formbuf.report.words import unit_words


def limits(story: Story) -> Section:
    """Return what the models leave out, as far as it matters here."""
    items: list[Spans] = [
        spans(
            "Activity coefficients depend on charge and ionic strength alone; the model was "
            "checked up to 0.5 mol/kg. Specific ion effects on pH are left out."
        ),
        spans(
            "Ionization data are extrapolated below 0 °C and above 77 °C, and used nowhere "
            "below −20 °C."
        ),
        spans(
            "Complexes of calcium, magnesium, zinc and other metals with citrate, edetate "
            "or phosphate are not calculated."
        ),
        spans(
            "Capacity is given at fixed activity coefficients; with their feedback it is up "
            "to 7 % higher."
        ),
        spans(
            "Osmolality rests on coefficients fitted to freezing points; pairs of ions "
            "without data count as ideal beyond the Debye-Hückel part."
        ),
        spans(
            "Order and ties rest on first-order uncertainties of the inputs, not on draws."
            if not story.root.get("confidence")
            else "Chances hold for the uncertainties stated, which are judgement."
        ),
    ]
    kind = story.brief.text("drug", "kind")
    if kind in ("antibody", "fusion_protein", "protein"):
        items.append(
            spans(
                "What the protein binds or excludes is not calculated; what it buffers is "
                "an estimate (",
                link("need"),
                ").",
            )
            if buffers_by_estimate(story.brief.at("drug"))
            else spans(
                "What the protein binds or excludes is not calculated, and what it buffers "
                "is not known; only its volume counts."
            )
        )
    if story.is_cold:
        items.append(
            spans(
                "On freezing, paths are bounds: sodium and potassium phosphate with their "
                "chlorides only are quantified",
                cite(("kim_frederick_1988", "pitzer_mayorga_1973")),
                "; the state below the glass transition is arrested and not described.",
            )
        )
    items.append(
        spans(
            "Stability, tolerability and safety are not calculated. Precedent describes "
            "past use; it does not approve the present one."
        )
    )
    return Section("limits", spans("Limits of the models"), (Items(tuple(items)),))


def overrides(story: Story) -> Section:
    """Return every rule or screen that somebody set aside, by whom and why."""
    rows = [
        (
            spans(o.quote("rule")),
            spans(o.quote("system") if o.get("system") else "every candidate"),
            spans(o.quote("reason")),
            spans(o.quote("name")),
            spans(o.quote("date")),
            _met(story, o),
        )
        for o in story.brief.each("override")
    ]
    blocks: tuple[Block, ...]
    if rows:
        blocks = (
            table(
                "t-overrides",
                spans("Rules and screens set aside"),
                (
                    Column("Rule or screen", width=1.0),
                    Column("For", width=1.3),
                    Column("Reason", width=2.6),
                    Column("By", width=1.1),
                    Column("Date", width=0.9),
                    Column("Effect here", width=1.6),
                ),
                rows,
            ),
        )
    else:
        blocks = (Paragraph(spans("No rule or screen was set aside.")),)
    return Section("overrides", spans("Overrides"), blocks)


def _met(story: Story, o: Cursor) -> Spans:
    """Say whom an override concerned."""
    rule = o.text("rule")
    who = []
    for c in story.candidates:
        if o.get("system") not in (None, c.get("base_system"), c.get("system")):
            continue
        aside = any(s.get("id") == rule for s in c.each("screens_set_aside"))
        found = any(
            f.get("rule") == rule
            and f.get("overridden_by")
            and f.get("outcome") == "fired"
            for f in c.each("findings")
        )
        if aside or found:
            who.append(c)
    if not who:
        return spans("none: the rule does not apply")
    names = joined([spans(named(c)) for c in who])
    return spans("set aside for ", names)


def confirm(story: Story, cited: Sequence[str] = ()) -> Section:
    """Return every value that cannot be cited as it stands, and incomplete references.

    Parameters
    ----------
    story : Story
    cited : sequence of str
        Ids of the sources that the other sections cite.
    """
    rows = []
    for entry in story.more.each("to_confirm"):
        unit = entry.text("unit")
        rows.append(
            (
                spans(entry.quote("item")),
                spans(
                    entry.value("value", trim=True)
                    if entry.text("group") == "assumed for the brief"
                    and entry.number("value") is not None
                    else entry.plain("value"),
                    " " if unit else None,
                    unit_words(unit),
                ),
                spans(entry.text("basis")),
                spans(entry.quote("why")),
            )
        )
    return Section(
        "confirm",
        spans("Values to confirm before filing"),
        (
            Paragraph(
                spans(
                    "These values cannot be cited as they stand. Memory: recalled, not "
                    "looked up. Practice: custom of the trade without a source. Judgement: "
                    "set by the builders of the tables. Stated: from the author of the brief."
                )
            ),
            table(
                "t-confirm",
                spans(
                    "Values of basis memory, practice or judgement, and loads as stated"
                ),
                (
                    Column("Item", width=2.6),
                    Column("Value", width=1.4),
                    Column("Basis", width=0.9),
                    Column("Note", width=3.0),
                ),
                rows,
            )
            if rows
            else Paragraph(spans("There are none.")),
            *_incomplete(story, cited),
        ),
    )


def _incomplete(story: Story, cited: Sequence[str]) -> list[Block]:
    """Say which references lack an author or a title."""
    known = story.more.at("sources")
    found = [name for name in cited if known.get(name, "incomplete")]
    if not found:
        return []
    return [
        Paragraph(
            spans(
                "These entries of ",
                link("references"),
                " lack an author or a title and have to be completed before filing:",
                cite(found),
                ".",
            )
        )
    ]
