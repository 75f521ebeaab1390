"""Put the sections of a result together into one document."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from formbuf.report.content import (
    Cite,
    Document,
    Figure,
    Link,
    Reference,
    Section,
    Spans,
    Table,
    clean,
    every_section,
    spans_of,
)
from formbuf.report.experiments import experiments
from formbuf.report.reading import degrees, spans
from formbuf.report.section_annexes import (
    constants,
    input_record,
    references,
    reproducibility,
)
from formbuf.report.section_batch import batch
from formbuf.report.section_brief import requirements
from formbuf.report.section_candidates import candidates
from formbuf.report.section_changes import changes_section
from formbuf.report.section_compatibility import compatibility
from formbuf.report.section_confidence import confidence
from formbuf.report.section_design import design
from formbuf.report.section_drug import drug
from formbuf.report.section_freezing import freezing
from formbuf.report.section_front import identification, summary
from formbuf.report.section_limits import confirm, limits, overrides
from formbuf.report.section_need import need
from formbuf.report.section_process import control, process
from formbuf.report.section_ranking import ranking
from formbuf.report.section_rules import rule_log
from formbuf.report.story import Story

TITLE = "Rationale for the choice of buffer"
STATUS = "DRAFT - unsigned"
#: Stands behind a reference without an author or a title.
INCOMPLETE = " [reference incomplete: complete before filing]"


def document(data: Mapping[str, Any]) -> Document:
    """Return the report of a result.

    Parameters
    ----------
    data : mapping
        As `formbuf.report.data.rationale_dict` returns it.

    Returns
    -------
    Document
    """
    story = Story(data)
    found = [
        identification(story),
        summary(story),
        requirements(story),
        drug(story),
        need(story),
        candidates(story),
        ranking(story),
        design(story),
        freezing(story),
        confidence(story),
        compatibility(story),
        experiments(story),
        process(story),
        control(story),
        limits(story),
        overrides(story),
        batch(story),
        constants(story),
        rule_log(story),
        input_record(story),
        changes_section(story),
        references(),
        reproducibility(story),
    ]
    told = [s for s in found if s is not None and not s.is_empty]
    annexes = next(i for i, s in enumerate(told) if s.annex)
    told.insert(annexes, confirm(story, cited(tuple(told))))
    sections = numbered(told)
    sections = _known_links(sections)
    root = story.root
    return Document(
        title=TITLE,
        subject=_subject(story),
        story=spans(root.quote("brief", "title")) if root.get("brief", "title") else (),
        status=STATUS,
        footer=f"formbuf {data['formbuf_version']}, knowledge {data['knowledge']['version']}",
        sections=sections,
        labels=labels(sections),
        references=_references(data, sections),
        open_points=tuple(story.points),
        stamp=clean(str(data["rationale"]["origin"].get("stamp") or "")),
    )


def _subject(story: Story) -> Spans:
    """Return name and version of the product."""
    product = story.brief.at("product")
    if not product.get("name"):
        return spans("Product without a name")
    version = (
        spans(", version ", product.quote("version")) if product.get("version") else ()
    )
    return spans(product.quote("name"), version)


def numbered(sections: list[Section]) -> tuple[Section, ...]:
    """Return sections with their numbers; annexes get letters."""
    found = []
    count, letter = 0, 0
    for section in sections:
        if section.annex:
            number = chr(ord("A") + letter)
            letter += 1
        else:
            count += 1
            number = str(count)
        parts = tuple(
            replace(part, number=f"{number}.{i}", annex=section.annex)
            for i, part in enumerate(
                (p for p in section.sections if not p.is_empty), start=1
            )
        )
        found.append(replace(section, number=number, sections=parts))
    return tuple(found)


def labels(sections: tuple[Section, ...]) -> dict[str, str]:
    """Return how sections, tables and figures are mentioned."""
    found: dict[str, str] = {}
    tables = figures = 0
    for section in every_section(sections):
        kind = "annex" if section.annex else "section"
        found[section.id] = f"{kind} {section.number}"
        for block in section.blocks:
            if isinstance(block, Table):
                tables += 1
                found[block.id] = f"Table {tables}"
            elif isinstance(block, Figure):
                figures += 1
                found[block.id] = f"Figure {figures}"
    return found


def _known_links(sections: tuple[Section, ...]) -> tuple[Section, ...]:
    """Refuse links to what is not there: a fault of the sections, told at once."""
    known = labels(sections)
    missing = sorted(
        {
            span.target
            for section in every_section(sections)
            for block in section.blocks
            for span in spans_of(block)
            if isinstance(span, Link) and span.target not in known
        }
    )
    if missing:
        msg = f"the report links to what it does not hold: {', '.join(missing)}"
        raise LookupError(msg)
    return sections


def _references(
    data: Mapping[str, Any], sections: tuple[Section, ...]
) -> tuple[Reference, ...]:
    """Return the works that are cited, numbered in the order of first mention."""
    known = data["rationale"]["sources"]
    order = [name for name in cited(sections) if name in known]
    return tuple(
        Reference(
            number,
            name,
            degrees(clean(str(known[name]["text"]))),
            clean(str(known[name]["doi"])),
            f"/rationale/sources/{name}",
            INCOMPLETE if known[name]["incomplete"] else "",
        )
        for number, name in enumerate(order, start=1)
    )


def cited(sections: tuple[Section, ...]) -> list[str]:
    """Return the ids of the sources that sections cite, in the order of mention."""
    order: dict[str, None] = {}
    for section in every_section(sections):
        for block in section.blocks:
            for span in spans_of(block):
                if isinstance(span, Cite):
                    order.update(dict.fromkeys(span.sources))
    return list(order)
