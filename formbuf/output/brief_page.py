"""A checked brief to read, and as data."""

from __future__ import annotations

from typing import Any

from formbuf.output import serialise, words
from formbuf.output.leaves import leaves
from formbuf.output.page import (
    Block,
    Column,
    Grid,
    Heading,
    Page,
    Paragraph,
    number,
    section,
)
from formbuf.product.brief import Completed

BRIEF_SCHEMA = "formbuf.brief/1"


def brief_page(done: Completed, path: str) -> Page:
    """Return a completed brief as a page."""
    return Page(
        payload=lambda: brief_dict(done),
        records=lambda: [{"key": k, "value": v} for k, v in leaves(brief_dict(done))],
        blocks=lambda: blocks(done, path),
    )


def brief_dict(done: Completed) -> dict[str, Any]:
    """Return a completed brief as plain data."""
    return {
        **serialise.header(BRIEF_SCHEMA, done.library),
        "brief": serialise.plain(done.brief),
        "assumptions": serialise.plain(done.assumptions),
        "warnings": list(done.warnings),
    }


def blocks(done: Completed, path: str) -> list[Block]:
    """Return a completed brief as blocks to read."""
    brief = done.brief
    found: list[Block] = [
        Heading(words.title_of(brief), 1),
        Paragraph(f"{path}: no fault found.", strong=True),
    ]
    rows = tuple(
        (
            f"{s.temperature_c:g}",
            s.kind,
            s.state_at(),
            "" if s.hours is None else f"{s.hours:g}",
        )
        for s in brief.storage
    )
    columns = (number("C"), Column("Kind"), Column("State"), number("Hours"))
    found += section("Temperatures", Grid(columns, rows))
    found += section("Assumptions", words.assumptions_grid(done.assumptions))
    found += section("Warnings", words.warnings_items(done.warnings))
    return found
