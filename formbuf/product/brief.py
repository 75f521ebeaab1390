"""The product brief: what a formulator says about a product, checked and completed.

`read_brief` reads a TOML file, `brief_from_options` takes the options of the quick
form; both return a `Brief`, as written. `complete` compares its names with the
library, fills what is not stated and returns a `ProductBrief` with the list of
assumptions. What each key may hold is in `brief_tables` and `brief_model`.
"""

from __future__ import annotations

from formbuf.product.brief_check import check_against_library
from formbuf.product.brief_defaults import Completed, complete
from formbuf.product.brief_model import Brief
from formbuf.product.brief_origin import Origin
from formbuf.product.brief_read import (
    brief_from_mapping,
    brief_from_options,
    brief_from_text,
    brief_schema,
    read_brief,
)
from formbuf.product.product_brief import ProductBrief
from formbuf.product.product_parts import Assumption

__all__ = [
    "Assumption",
    "Brief",
    "Completed",
    "Origin",
    "ProductBrief",
    "brief_from_mapping",
    "brief_from_options",
    "brief_from_text",
    "brief_schema",
    "check_against_library",
    "complete",
    "read_brief",
]
