"""``formbuf`` and ``python -m formbuf``: the entry, quiet also while it is loading."""

from __future__ import annotations

import gc
import sys

EXIT_INTERRUPTED = 130
#: Objects made between two searches for garbage; what a command makes lives to its
#: end, so that Python's 700 cost 3 % of the time of a `shortlist`.
GARBAGE_THRESHOLD = 50_000


def start() -> int:
    """Run the command line; an interruption while it is loading is quiet, too."""
    gc.set_threshold(GARBAGE_THRESHOLD)
    try:
        from formbuf.cli.main import run

        return run()
    except KeyboardInterrupt:
        sys.stderr.write("Interrupted.\n")
        return EXIT_INTERRUPTED


if __name__ == "__main__":
    sys.exit(start())
