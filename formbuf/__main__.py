"""``formbuf`` and ``python -m formbuf``: the entry, quiet also while it is loading."""

from __future__ import annotations

import sys

EXIT_INTERRUPTED = 130


def start() -> int:
    """Run the command line; an interruption while it is loading is quiet, too."""
    try:
        from formbuf.cli.main import run

        return run()
    except KeyboardInterrupt:
        sys.stderr.write("Interrupted.\n")
        return EXIT_INTERRUPTED


if __name__ == "__main__":
    sys.exit(start())
