"""``formbuf shortlist``: the main job, from a brief or from a few options."""

from __future__ import annotations

from typing import Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import (
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    PrecedentOption,
    open_library,
)

app = command_app()


@app.command(
    "shortlist",
    epilog=examples(
        "formbuf shortlist examples/antibody.toml",
        "formbuf shortlist examples/antibody.toml --top 3 --format csv -o best.csv",
        "formbuf shortlist examples/antibody.toml --draws 2500",
        "formbuf shortlist --ph 6.0 --route subcutaneous --store 5 --store -40 \\",
        "    --drug-kind antibody --drug-mg-ml 50 --tonicity-agent sucrose",
    ),
)
def shortlist_command(
    brief: Annotated[
        str | None,
        typer.Argument(metavar="BRIEF", help="Product brief, a TOML file."),
    ] = None,
    ph: Annotated[str | None, typer.Option(metavar="PH", help="Target pH.")] = None,
    route: Annotated[
        str | None, typer.Option(metavar="ROUTE", help="Route of administration.")
    ] = None,
    store: Annotated[
        list[str] | None,
        typer.Option(
            metavar="C", help="Storage temperature, degrees Celsius; may be repeated."
        ),
    ] = None,
    form: Annotated[
        str | None, typer.Option(metavar="FORM", help="liquid, frozen or dried.")
    ] = None,
    drug_kind: Annotated[
        str | None, typer.Option(metavar="KIND", help="antibody, peptide, ...")
    ] = None,
    drug_mg_ml: Annotated[
        str | None, typer.Option(metavar="MG_ML", help="Drug concentration, mg/mL.")
    ] = None,
    tonicity_agent: Annotated[
        str | None,
        typer.Option(
            metavar="MATERIAL",
            help="Material that fills up to the osmolality aimed at.",
        ),
    ] = None,
    volume_ml: Annotated[
        str | None, typer.Option(metavar="ML", help="Dose volume, mL.")
    ] = None,
    top: Annotated[
        str | None, typer.Option(metavar="N", help="Show the best N places only.")
    ] = None,
    draws: Annotated[
        str | None,
        typer.Option(
            metavar="N",
            help="Draw every uncertain input N times (2500 is usual): intervals, "
            "chances, and ties that rest on them. Off by default.",
        ),
    ] = None,
    seed: Annotated[
        str | None,
        typer.Option(metavar="SEED", help="Start of the draws, a whole number."),
    ] = None,
    knowledge: KnowledgeOption = None,
    precedent: PrecedentOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Size, screen and rank buffers for a product.

    Takes a BRIEF, or the quick form: --ph and --route, and what else is known.
    Ends with exit code 1 where no candidate is acceptable.
    """
    from formbuf.cli.emit import Target, emit
    from formbuf.cli.numbers import number, numbers, whole
    from formbuf.cli.quick import brief_or_options, check_draws, check_top

    target = Target(format_, json_, output)
    target.check()
    places = check_top(whole("--top", top))
    count, start = check_draws(whole("--draws", draws), whole("--seed", seed))
    read = brief_or_options(
        brief,
        {
            "ph": number("--ph", ph),
            "route": route,
            "store": numbers("--store", store),
            "form": form,
            "drug_kind": drug_kind,
            "drug_mg_ml": number("--drug-mg-ml", drug_mg_ml),
            "tonicity_agent": tonicity_agent,
            "volume_ml": number("--volume-ml", volume_ml),
        },
    )
    from formbuf.advice.shortlist import shortlist
    from formbuf.errors import EXIT_NO_CANDIDATE
    from formbuf.output.shortlist_page import shortlist_page

    result = shortlist(read, open_library(knowledge, precedent))
    if count is not None:
        from formbuf.advice.confidence import with_confidence

        result = with_confidence(result, draws=count, seed=start)
    emit(shortlist_page(result, top=places), target)
    if not result.heads:
        raise typer.Exit(EXIT_NO_CANDIDATE)
