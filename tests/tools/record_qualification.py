"""Write ``formbuf/qualify/record.json`` from what the checkout computes now.

Run it after a meant change of data or chemistry, and look at the difference::

    PYTHONPATH=. python tests/tools/record_qualification.py
"""

from __future__ import annotations

from pathlib import Path

import formbuf
from formbuf.library import load_library
from formbuf.qualify.record import NAME, as_text
from formbuf.qualify.run import all_groups


def main() -> None:
    library = load_library()
    text = as_text(library, all_groups(library, {}))
    place = Path(formbuf.__file__).parent / "qualify" / NAME
    place.write_text(text, encoding="utf-8", newline="")
    print(f"wrote {place.name}: {len(text)} characters")


if __name__ == "__main__":
    main()
