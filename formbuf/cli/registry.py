"""Every command: its module and its line in the help. A module is imported on use.

The module holds ``app = command_app()`` with the command (or its sub-commands); see
`formbuf.cli.frame`.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import NamedTuple


class Entry(NamedTuple):
    """Where a command lives, and what its line in the help says."""

    module: str
    help: str


#: In the order in which the help lists them.
COMMANDS: Mapping[str, Entry] = {
    "shortlist": Entry("formbuf.cli.shortlist", "Rank buffers for a product."),
    "explain": Entry("formbuf.cli.explain", "Show everything behind one candidate."),
    "sensitivity": Entry("formbuf.cli.sensitivity", "Find what would change the lead."),
    "scan": Entry("formbuf.cli.scan", "Evaluate a grid of briefs as CSV."),
    "freeze-thaw": Entry("formbuf.cli.freeze_thaw", "Compare systems on freezing."),
    "rationale": Entry("formbuf.cli.rationale", "Write the report."),
    "changes": Entry("formbuf.cli.changes", "Compare two results."),
    "predict": Entry("formbuf.cli.predict", "Predict pH and more of a composition."),
    "batch-sheet": Entry("formbuf.cli.batch_sheet", "Work out what to weigh."),
    "challenge": Entry("formbuf.cli.challenge", "Show pH under acid and base."),
    "dilute": Entry("formbuf.cli.dilute", "Show a product in an infusion fluid."),
    "retentate": Entry("formbuf.cli.retentate", "Show a protein after diafiltration."),
    "brief": Entry("formbuf.cli.brief", "Write, check or describe a brief."),
    "knowledge": Entry("formbuf.cli.knowledge", "Look into the tables and audit them."),
    "qualify": Entry("formbuf.cli.qualify", "Qualify this installation."),
    "guide": Entry("formbuf.cli.guide", "Show short pages to learn it from."),
}

#: Pages of the guide in the order in which they are read, and what each is about.
TOPICS = {
    "getting-started": "from nothing to a shortlist in a few minutes",
    "shortlist": "reading a shortlist",
    "model": "the model and its limits",
    "freezing": "frozen and dried products",
    "report": "the rationale and the record",
    "own-data": "your own data: species, tables, titrations, lists",
    "troubleshooting": "when something is refused",
}
