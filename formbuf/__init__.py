"""Choose and justify the buffer of a drug product."""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

__version__ = "0.1.0"

if TYPE_CHECKING:
    from formbuf.advice.shortlist import shortlist
    from formbuf.library import Library, load_library
    from formbuf.product.brief import Brief, read_brief

__all__ = ["Brief", "Library", "__version__", "load_library", "read_brief", "shortlist"]

_PLACES = {
    "Brief": "formbuf.product.brief",
    "Library": "formbuf.library",
    "load_library": "formbuf.library",
    "read_brief": "formbuf.product.brief",
    "shortlist": "formbuf.advice.shortlist",
}


def __getattr__(name: str) -> Any:
    """Resolve a public name on first use, so that ``import formbuf`` stays light."""
    if name in _PLACES:
        return getattr(importlib.import_module(_PLACES[name]), name)
    msg = f"module 'formbuf' has no attribute {name!r}"
    raise AttributeError(msg)


def __dir__() -> list[str]:
    return sorted(__all__)
