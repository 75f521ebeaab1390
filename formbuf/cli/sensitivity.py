"""``formbuf sensitivity``: what would change the lead, and the map of the decision."""

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

app = command_app()


@app.command(
    "sensitivity",
    epilog=examples(
        "formbuf sensitivity examples/eye_drop.toml",
        "formbuf sensitivity examples/eye_drop.toml --reach 0.5 --figure map.svg",
    ),
)
def sensitivity_command(
    brief: BriefArgument,
    reach: Annotated[
        str | None,
        typer.Option(
            metavar="PH",
            help="Reach of the map either side of the target; 1 if absent.",
        ),
    ] = None,
    step: Annotated[
        str | None, typer.Option(metavar="PH", help="Step of the map; 0.1 if absent.")
    ] = None,
    figure: Annotated[
        str | None, typer.Option(metavar="FILE", help="Draw the map: .svg or .png.")
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Find the smallest changes of weights and requirements that change the lead.

    Judges the product some sixty times: half a minute or so. Also lead and back-up
    over the target pH, as a table and a figure.
    """
    from formbuf.cli.emit import Target, emit, say
    from formbuf.cli.freeze_thaw import check_figure
    from formbuf.cli.numbers import number
    from formbuf.cli.progress import Progress

    target = Target(format_, json_, output)
    check_figure(figure, output)
    target.check()
    wide, fine = number("--reach", reach), number("--step", step)
    from formbuf.advice.decision_map import (
        DEFAULT_REACH_PH,
        DEFAULT_STEP_PH,
        decision_map,
    )
    from formbuf.advice.requirement_changes import sensitivity
    from formbuf.advice.variations import Known
    from formbuf.output.sensitivity_page import sensitivity_page
    from formbuf.product.brief import complete, read_brief

    completed = complete(read_brief(brief), open_library(knowledge))
    known: Known = {}
    progress = Progress("targets of the map")
    try:
        chart = decision_map(
            completed,
            reach_ph=DEFAULT_REACH_PH if wide is None else wide,
            step_ph=DEFAULT_STEP_PH if fine is None else fine,
            progress=progress,
            known=known,
        )
        progress.close()
        progress = Progress("requirements")
        found = sensitivity(completed, progress=progress, known=known)
    finally:
        progress.close()
    if figure is not None:
        from formbuf.output.decision_figure import write_figure

        write_figure(chart, Path(figure))
        say(f"Wrote {figure}")
    emit(sensitivity_page(found, chart, completed.library), target)
