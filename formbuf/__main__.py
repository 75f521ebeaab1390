"""``python -m formbuf``: the same as the ``formbuf`` command."""

from __future__ import annotations

import sys

from formbuf.cli.main import run

if __name__ == "__main__":
    sys.exit(run())
