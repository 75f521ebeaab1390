"""``formbuf changes``: what differs between two results, and who moved and why."""

from __future__ import annotations

from typing import Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import FormatOption, JsonOption, OutputOption

app = command_app()


@app.command(
    "changes",
    epilog=examples(
        "formbuf shortlist examples/antibody.toml --json -o old.json",
        "formbuf changes old.json new.json",
    ),
)
def changes_command(
    old: Annotated[
        str, typer.Argument(metavar="OLD.json", help="Earlier result, JSON.")
    ],
    new: Annotated[str, typer.Argument(metavar="NEW.json", help="Later result, JSON.")],
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Compare two results of shortlist or rationale.

    Says what changed in brief, knowledge and versions, and which candidates moved and
    why.
    """
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    from formbuf.report.changes import compare, names_of
    from formbuf.report.changes_page import changes_page
    from formbuf.report.results_file import read_result

    before, after = read_result(old), read_result(new)
    emit(changes_page(compare(before, after), names_of(before, after)), target)
