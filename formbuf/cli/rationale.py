"""``formbuf rationale``: the report on a brief, for review and for a dossier."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import BriefArgument, KnowledgeOption, open_library

if TYPE_CHECKING:
    from formbuf.report.report import Form

app = command_app()


@app.command(
    "rationale",
    epilog=examples(
        "formbuf rationale examples/antibody.toml -o rationale.html",
        "formbuf rationale examples/antibody.toml -o rationale.docx --draws 2500",
        "formbuf rationale examples/antibody.toml -o rationale.md --against old.json",
    ),
)
def rationale_command(
    brief: BriefArgument,
    output: Annotated[
        list[str] | None,
        typer.Option(
            "--output",
            "-o",
            metavar="FILE",
            help="File ending in .html, .docx, .md or .json; may be repeated.",
        ),
    ] = None,
    against: Annotated[
        str | None,
        typer.Option(
            "--against",
            metavar="OLD.json",
            help="Earlier result (JSON); what changed since becomes an annex.",
        ),
    ] = None,
    timestamp: Annotated[
        bool,
        typer.Option(
            "--timestamp", help="Print date and time; else the same input, same bytes."
        ),
    ] = False,
    draws: Annotated[
        str | None,
        typer.Option(
            metavar="N", help="Draw every uncertain input N times (2500 is usual)."
        ),
    ] = None,
    seed: Annotated[
        str | None,
        typer.Option(metavar="SEED", help="Start of the draws, a whole number."),
    ] = None,
    knowledge: KnowledgeOption = None,
) -> None:
    """Write the rationale for the choice of buffer: a draft for review, unsigned.

    Without -o the Markdown form goes to standard output. Ends with exit code 1 where
    no candidate is acceptable; the report says why.
    """
    from formbuf.cli.emit import put, say
    from formbuf.cli.numbers import whole
    from formbuf.cli.quick import check_draws
    from formbuf.report.report import form_of

    wanted: list[tuple[str, Form]] = [(path, form_of(path)) for path in output or ()]
    count, start = check_draws(whole("--draws", draws), whole("--seed", seed))
    from formbuf.advice.shortlist import shortlist
    from formbuf.errors import EXIT_NO_CANDIDATE
    from formbuf.output.writers import write_bytes
    from formbuf.product.brief import read_brief
    from formbuf.report.assemble import document
    from formbuf.report.data import origin_of, rationale_dict
    from formbuf.report.report import write_form
    from formbuf.report.results_file import read_result

    old = None if against is None else read_result(against)
    origin = origin_of(
        brief, stamp=_now() if timestamp else "", draws=count, seed=start
    )
    result = shortlist(read_brief(brief), open_library(knowledge))
    if count is not None:
        from formbuf.advice.confidence import with_confidence

        result = with_confidence(result, draws=count, seed=start)
    data = rationale_dict(result, origin, old)
    report = document(data)
    for path, form in wanted:
        write_bytes(Path(path), write_form(report, data, form))
        say(f"Wrote {path}")
    if not wanted:
        put(write_form(report, data, "markdown").decode("utf-8"))
    if not result.heads:
        raise typer.Exit(EXIT_NO_CANDIDATE)


def _now() -> str:
    """Return date and time with the zone, to the minute."""
    import datetime as dt

    return dt.datetime.now().astimezone().strftime("%Y-%m-%d %H:%M %z")
