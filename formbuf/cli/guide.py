"""``formbuf guide``: short pages to learn it from."""

from __future__ import annotations

import re
import sys
from collections.abc import Iterator
from importlib.resources import files
from typing import Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import OutputOption
from formbuf.cli.registry import TOPICS

app = command_app()


@app.command("guide", epilog=examples("formbuf guide", "formbuf guide getting-started"))
def guide_command(
    topic: Annotated[
        str | None, typer.Argument(metavar="TOPIC", help="Page to show.")
    ] = None,
    output: OutputOption = None,
) -> None:
    """Show a short page; without a topic, list them."""
    from pathlib import Path

    from formbuf.cli.emit import Target, put, say

    Target(None, False, output).check()
    text = listing() if topic is None else readable(page(topic))
    if output is None:
        put(text)
        return
    from formbuf.output.writers import write_file

    write_file(Path(output), text if topic is None else page(topic))
    say(f"Wrote {output}")


def page(topic: str) -> str:
    """Return a page as Markdown.

    Raises
    ------
    UnknownNameError
        There is no page of this name.
    """
    from formbuf.errors import UnknownNameError

    name = topic.casefold().replace(" ", "-").replace("_", "-")
    if name not in TOPICS:
        raise UnknownNameError("topic", topic, TOPICS, where="TOPIC")
    place = files("formbuf").joinpath("guide", f"{name}.md")
    return place.read_text(encoding="utf-8")


def listing() -> str:
    """Return the list of pages."""
    from formbuf.cli.emit import output_width
    from formbuf.output.tables import LEAST_WIDTH, wrapped

    width = max(map(len, TOPICS))
    room = max(output_width(sys.stdout), LEAST_WIDTH)
    lines = wrapped("Pages of the guide, in the order in which they are read:", room)
    lines.append("")
    for name, about in TOPICS.items():
        first, *rest = wrapped(about, room - width - 4)
        lines.append(f"  {name:<{width}}  {first}")
        lines += [" " * (width + 4) + text for text in rest]
    lines += ["", "Show one with `formbuf guide TOPIC`."]
    return "\n".join(lines) + "\n"


def readable(markdown: str) -> str:
    """Return a page without the marks that a terminal does not need."""
    return "\n".join(_lines(markdown)).strip("\n") + "\n"


def _lines(markdown: str) -> Iterator[str]:
    fenced = False
    for line in markdown.splitlines():
        if line.startswith("```"):
            fenced = not fenced
        elif fenced:
            yield f"    {line}".rstrip()
        elif line.startswith("#"):
            title = line.lstrip("#").strip()
            yield title
            yield ("=" if line.startswith("# ") else "-") * len(title)
        else:
            yield re.sub(r"\*\*(.+?)\*\*", r"\1", line)
