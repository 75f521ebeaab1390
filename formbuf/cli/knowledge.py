"""``formbuf knowledge``: look into the tables, their sources, and audit them."""

from __future__ import annotations

from typing import Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import (
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    open_library,
)

app = command_app("Look into the tables of knowledge and audit them.")


@app.command("list", epilog=examples("formbuf knowledge list"))
def list_command(
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """List the tables."""
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    from formbuf.bench.knowledge_audit import table_schemas
    from formbuf.output.knowledge_page import tables_page

    emit(tables_page(open_library(knowledge), table_schemas()), target)


@app.command(
    "show",
    epilog=examples(
        "formbuf knowledge show species",
        "formbuf knowledge show ionization histidine",
        "formbuf knowledge show precedent --format csv -o precedent.csv",
    ),
)
def show_command(
    table: Annotated[str, typer.Argument(metavar="TABLE", help="Name of a table.")],
    row: Annotated[
        str | None,
        typer.Argument(metavar="ROW", help="Show the rows of this key only."),
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Show the rows of a table."""
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    from formbuf.bench.knowledge_audit import table_schemas
    from formbuf.output.knowledge_page import table_page, view, with_computed

    library = open_library(knowledge)
    shown = view(library, table, table_schemas())
    if shown.name == "species.csv":
        from formbuf.bench.species_properties import computed_columns

        shown = with_computed(shown, computed_columns(library))
    emit(table_page(library, shown, row), target)


@app.command(
    "sources",
    epilog=examples(
        "formbuf knowledge sources",
        "formbuf knowledge sources goldberg_2002",
    ),
)
def sources_command(
    source: Annotated[
        str | None,
        typer.Argument(metavar="SOURCE", help="Show one source and where it is used."),
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """List the works from which the values come."""
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    from formbuf.bench.knowledge_audit import table_schemas
    from formbuf.output.knowledge_page import sources_page, uses_of

    library = open_library(knowledge)
    uses = () if source is None else uses_of(library, source, table_schemas())
    emit(sources_page(library, source, uses), target)


@app.command(
    "check",
    epilog=examples(
        "formbuf knowledge check",
        "formbuf knowledge check --knowledge my_tables",
    ),
)
def check_command(
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Audit every table.

    Each fault is told as file:line:column; the exit code is then 4.
    """
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    from formbuf.bench.knowledge_audit import audit_all, table_schemas
    from formbuf.errors import EXIT_KNOWLEDGE, KnowledgeError
    from formbuf.output.knowledge_page import check_page

    library = open_library(knowledge)
    faults = audit_all(library)
    if faults and target.chosen() == "table":
        raise KnowledgeError(faults)
    schemas = table_schemas()
    rows = (
        sum(len(library.read_table(s)) for s in schemas.values()) if not faults else 0
    )
    emit(check_page(library, faults, len(schemas), rows), target)
    if faults:
        raise typer.Exit(EXIT_KNOWLEDGE)
