"""Options that several commands share, with one wording."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

if TYPE_CHECKING:
    from formbuf.library import Library

BriefArgument = Annotated[
    str, typer.Argument(metavar="BRIEF", help="Product brief, a TOML file.")
]
FormatOption = Annotated[
    str | None,
    typer.Option(
        "--format",
        metavar="FORMAT",
        help="table, json, csv or markdown; if absent, the ending of -o decides.",
    ),
]
JsonOption = Annotated[bool, typer.Option("--json", help="Short for --format json.")]
OutputOption = Annotated[
    str | None,
    typer.Option(
        "--output",
        "-o",
        metavar="FILE",
        help="Write to a file: .txt, .json, .csv, .md, .docx or .xlsx.",
    ),
]
KnowledgeOption = Annotated[
    str | None,
    typer.Option(
        "--knowledge",
        metavar="DIR",
        help="Directory with tables of your own, laid over ours.",
    ),
]
PrecedentOption = Annotated[
    str | None,
    typer.Option(
        "--precedent",
        metavar="FILE",
        help="Your copy of a regulator's list of inactive ingredients, CSV.",
    ),
]


def open_library(knowledge: str | None, precedent: str | None = None) -> Library:
    """Load the knowledge, with the user's tables and list of ingredients over it."""
    from formbuf.library import load_library

    library = load_library(None if knowledge is None else Path(knowledge))
    if precedent is None:
        return library
    from formbuf.library.inactive_ingredients import with_precedent_file

    return with_precedent_file(library, Path(precedent))
