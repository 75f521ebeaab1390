"""Briefs as short texts, completed, and what had to be assumed for them."""

from __future__ import annotations

from typing import Any

from formbuf.library import Library
from formbuf.product.brief import (
    Completed,
    brief_from_options,
    brief_from_text,
    complete,
)

HEAD = '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n'
DRIED = HEAD.replace('"\n[ph]', '"\nform = "dried"\n[ph]')
WITHOUT_SUCROSE = 'exclude = ["sucrose"]\n' + HEAD + '[drug]\nkind = "antibody"\n'


def completed_text(text: str, library: Library) -> Completed:
    """The completed brief of a text."""
    return complete(brief_from_text(text), library)


def quick_brief(library: Library, **options: Any) -> Completed:
    """The completed brief of quick options, pH 6 where none is given."""
    return complete(brief_from_options(**({"ph": 6.0} | options)), library)


def assumed_values(found: Completed) -> dict[str, Any]:
    """The value of every assumption, by key."""
    return {row.key: row.value for row in found.assumptions}
