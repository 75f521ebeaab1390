"""Write what the commands of the pages print now into the pages; look at the difference.

Of each output as many lines are kept as the page shows: those from the beginning, or
after three dots those from the first line that is still the same::

    PYTHONPATH=.:tests python tests/tools/update_docs.py README.md formbuf/guide/*.md
"""

from __future__ import annotations

import sys
import tempfile
from pathlib import Path

from docs_runner import DOTS, FENCE, Command, commands, prepare, printed


def main(paths: list[str]) -> None:
    home = Path.cwd()
    for name in paths:
        page = (home / name).resolve()
        with tempfile.TemporaryDirectory() as folder:
            prepare(Path(folder))
            text = page.read_text("utf-8")
            new = text
            for command in commands(text):
                new = _replaced(new, command, printed(command))
            page.write_text(new, "utf-8", newline="")
            print(f"{name}: {'changed' if new != text else 'as it was'}")


def _replaced(text: str, command: Command, found: list[str]) -> str:
    old = "\n".join(command.shown)
    parts = [[]]
    for line in command.shown:
        if line == DOTS:
            parts.append([])
        else:
            parts[-1].append(line)
    fresh: list[list[str]] = []
    for number, part in enumerate(parts):
        start = 0
        if number and part:
            start = next((i for i, f in enumerate(found) if f == part[0]), -1)
            if start < 0:
                print(f"  not found: {part[0]!r} in {command.line}")
                start, found = 0, part
        fresh.append(found[start : start + len(part)])
    lines: list[str] = []
    for number, part in enumerate(fresh):
        lines += [DOTS] if number else []
        lines += part
    if not command.shown:
        return text
    for block in FENCE.findall(text):
        if f"$ {' '.join(command.line.split()[:4])}" in block and old in block:
            return text.replace(block, block.replace(old, "\n".join(lines), 1), 1)
    return text


if __name__ == "__main__":
    main(sys.argv[1:])
