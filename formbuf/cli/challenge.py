"""``formbuf challenge``: pH under added acid, base and carbon dioxide."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from formbuf.cli.bench_options import (
    AddOption,
    AgentOption,
    Asked,
    BriefOption,
    ConcentrationOption,
    HighOption,
    LowOption,
    MeasureOption,
    OsmolalityOption,
    PhOption,
    PrepareOption,
    StoreOption,
    SystemOption,
    bench_of,
    check_form,
)
from formbuf.cli.frame import command_app, examples
from formbuf.cli.numbers import number, numbers
from formbuf.cli.options import (
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    open_library,
)

app = command_app()


@app.command(
    "challenge",
    epilog=examples(
        "formbuf challenge examples/antibody.toml \\",
        "    --system histidine_hydrochloride --figure challenge.svg",
        "formbuf challenge --system sodium_phosphate --concentration 10 --ph 7.0 \\",
        "    --added -2 --added 2 --at 25 --at 5",
        "formbuf challenge --system sodium_citrate --concentration 10 --ph 6 \\",
        "    --to-ph 5 --headspace 0.5",
    ),
)
def challenge_command(
    brief: BriefOption = None,
    system: SystemOption = None,
    concentration: ConcentrationOption = None,
    ph: PhOption = None,
    add: AddOption = None,
    tonicity_agent: AgentOption = None,
    osmolality: OsmolalityOption = None,
    store: StoreOption = None,
    prepare_at: PrepareOption = None,
    measure_at: MeasureOption = None,
    low: LowOption = None,
    high: HighOption = None,
    added: Annotated[
        list[str] | None,
        typer.Option(
            metavar="MMOL_L", help="Strong base, minus for acid; may be repeated."
        ),
    ] = None,
    to_ph: Annotated[
        list[str] | None,
        typer.Option(metavar="PH", help="Go to this pH instead; may be repeated."),
    ] = None,
    at: Annotated[
        list[str] | None,
        typer.Option(metavar="C", help="Temperature; where measured if absent."),
    ] = None,
    carbon_dioxide: Annotated[
        str | None,
        typer.Option(
            metavar="PA", help="Pressure of carbon dioxide, Pa; of air if absent."
        ),
    ] = None,
    headspace: Annotated[
        str | None,
        typer.Option(
            metavar="RATIO", help="Closed headspace: gas over solution, by volume."
        ),
    ] = None,
    figure: Annotated[
        str | None, typer.Option(metavar="FILE", help="Draw it: .svg or .png.")
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Show pH under strong acid and base, beside the same product without buffer.

    Without --added or --to-ph, a series up to 1.5 times the acid and base that use up
    the window. Also what uses up the window at each temperature, and pH in contact
    with carbon dioxide.
    """
    from formbuf.cli.emit import Target, emit, say
    from formbuf.cli.freeze_thaw import check_figure

    target = Target(format_, json_, output)
    check_figure(figure, output)
    target.check()
    asked = Asked(
        brief,
        system,
        concentration,
        ph,
        add or (),
        tonicity_agent,
        osmolality,
        store or (),
        prepare_at,
        measure_at,
        low,
        high,
    )
    check_form(asked)
    series = {
        "added_mmol_l": numbers("--added", added),
        "to_ph": numbers("--to-ph", to_ph),
        "temperatures_c": numbers("--at", at),
    }
    pressure = number("--carbon-dioxide", carbon_dioxide)
    ratio = number("--headspace", headspace)
    from formbuf.bench.challenge import challenge
    from formbuf.output.challenge_page import challenge_page

    result = challenge(
        bench_of(asked, open_library(knowledge)),
        **series,
        air_pressure_pa=pressure,
        headspace_ratio=ratio,
    )
    if figure is not None:
        from formbuf.output.challenge_figure import write_figure

        write_figure(result, Path(figure))
        say(f"Wrote {figure}")
    emit(challenge_page(result), target)
