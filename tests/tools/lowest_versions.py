"""Print the lowest version that ``pyproject.toml`` allows of each dependency, as pins.

To prove the lower bounds, in a fresh environment::

    python tests/tools/lowest_versions.py xlsx test > lowest.txt
    python3.11 -m venv lowest && lowest/bin/pip install -r lowest.txt
    lowest/bin/pip install --no-deps .
    lowest/bin/python -m pytest -W ignore::DeprecationWarning

Names after the script are extras to pin as well.
"""

from __future__ import annotations

import re
import sys
import tomllib
from collections.abc import Iterable, Iterator
from pathlib import Path

REQUIREMENT = re.compile(r"([A-Za-z0-9_.-]+)(\[[^\]]*\])?\s*(?:>=\s*([0-9][\w.]*))?")
OWN = "formbuf"


def pins(extras: Iterable[str] = ()) -> Iterator[str]:
    """Yield ``name==version`` for the dependencies and those of some extras."""
    root = Path(__file__).resolve().parent.parent.parent
    project = tomllib.loads((root / "pyproject.toml").read_text("utf-8"))["project"]
    wanted = list(project["dependencies"])
    for extra in extras:
        wanted += project["optional-dependencies"][extra]
    for text in wanted:
        match = REQUIREMENT.match(text)
        if match is None or (match[1] != OWN and match[3] is None):
            msg = f"{text!r} has no lower bound"
            raise ValueError(msg)
        if match[1] != OWN:
            yield f"{match[1]}=={match[3]}"


if __name__ == "__main__":
    print("\n".join(dict.fromkeys(pins(sys.argv[1:]))))
