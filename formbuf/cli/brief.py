"""``formbuf brief``: ask for a brief, check one, or print the schema of the file."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import (
    BriefArgument,
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    open_library,
)

app = command_app("Write a product brief by questions, check one, or print its schema.")


@app.command(
    "new", epilog=examples("formbuf brief new", "formbuf brief new nasal_spray.toml")
)
def new_command(
    brief: Annotated[
        str, typer.Argument(metavar="BRIEF", help="File to write.")
    ] = "brief.toml",
    knowledge: KnowledgeOption = None,
) -> None:
    """Ask for a brief in plain words and write it.

    Asks only what matters for the product; "?" explains, "back" goes back, an empty
    line means unknown. Needs a terminal.
    """
    import sys

    from formbuf.cli import brief_new
    from formbuf.cli.emit import output_width, put

    path = Path(brief)
    brief_new.require_terminal(sys.stdin, sys.stdout)
    brief_new.refuse_existing(path)
    brief_new.hold_interview(
        open_library(knowledge),
        path,
        brief_new.terminal_ask,
        lambda text: put(brief_new.wrapped_text(text, output_width(sys.stdout))),
    )


@app.command("check", epilog=examples("formbuf brief check examples/antibody.toml"))
def check_command(
    brief: BriefArgument,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Check a brief and show what is assumed where it says nothing."""
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    from formbuf.advice.case import case_for
    from formbuf.advice.screening import check_overrides
    from formbuf.advice.screens import SCREENS
    from formbuf.output.brief_page import brief_page
    from formbuf.product.brief import complete, read_brief

    read = read_brief(brief)
    done = complete(read, open_library(knowledge))
    case = case_for(done)
    check_overrides(
        case.brief.override,
        case.rulebook,
        screens=SCREENS,
        systems=case.library.systems,
        origin=read.origin,
    )
    emit(brief_page(done, brief), target)


@app.command(
    "schema",
    epilog=examples(
        "formbuf brief schema",
        "formbuf brief schema -o brief.schema.json",
    ),
)
def schema_command(output: OutputOption = None) -> None:
    """Print the JSON Schema of a brief file.

    Editors that know it check a brief while it is typed.
    """
    from formbuf.cli.emit import Target, put, say
    from formbuf.output.writers import json_text, write_file
    from formbuf.product.brief import brief_schema

    Target(None, False, output).check()
    text = json_text(brief_schema())
    if output is None:
        put(text)
        return
    write_file(Path(output), text)
    say(f"Wrote {output}")
