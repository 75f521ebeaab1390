"""Broken briefs: each row is a whole file with one mistake, and what must be said.

``where`` must stand right after the file at the start of the message; ``words`` must
occur in it and ``hint`` in its hint. Rows of `NAMES` need the library.
"""

from bad_briefs.files import FILES, KEYS
from bad_briefs.names import BAD_OPTIONS, NAMES
from bad_briefs.parts import PARTS
from bad_briefs.row import GOOD_HEAD, BadBrief
from bad_briefs.values import VALUES

BAD_BRIEFS = [*FILES, *KEYS, *VALUES, *PARTS, *NAMES]

__all__ = [
    "BAD_BRIEFS",
    "BAD_OPTIONS",
    "FILES",
    "GOOD_HEAD",
    "NAMES",
    "PARTS",
    "VALUES",
    "BadBrief",
]
