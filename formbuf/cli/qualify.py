"""``formbuf qualify``: the published checks, computed on this installation."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import (
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    open_library,
)

if TYPE_CHECKING:
    from formbuf.cli.emit import Target

app = command_app()


@app.command(
    "qualify",
    epilog=examples(
        "formbuf qualify",
        "formbuf qualify --record record.docx",
        "formbuf qualify --json -o record.json",
    ),
)
def qualify_command(
    record: Annotated[
        str | None,
        typer.Option(
            "--record",
            metavar="FILE",
            help="Write the record to be signed: .md, .docx or .json.",
        ),
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Compare this installation with published values and judge every group.

    Ends with exit code 1 where a group fails.
    """
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    to_sign = record_target(record)
    from formbuf.output.qualify_page import qualify_page, record_page
    from formbuf.qualify import qualify

    library = open_library(knowledge)
    result = qualify(library)
    if to_sign is not None:
        emit(record_page(result, library), to_sign)
    emit(qualify_page(result, library), target)
    if not result.passed:
        raise typer.Exit(1)


def record_target(record: str | None) -> Target | None:
    """Return where the record goes, None where none is asked for."""
    from formbuf.cli.emit import Target
    from formbuf.errors import UsageError

    if record is None:
        return None
    target = Target(None, False, record)
    if target.document() != "docx" and target.chosen() not in ("markdown", "json"):
        msg = f"--record: {record!r}, allowed a file that ends in .md, .docx or .json"
        raise UsageError(msg)
    target.check()
    return target
