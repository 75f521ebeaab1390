"""``formbuf dilute``: a product in an infusion fluid."""

from __future__ import annotations

from typing import Annotated

import typer

from formbuf.cli.bench_options import (
    AddOption,
    AgentOption,
    Asked,
    BriefOption,
    ConcentrationOption,
    DoseOption,
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
from formbuf.errors import UsageError

app = command_app()


@app.command(
    "dilute",
    epilog=examples(
        "formbuf dilute examples/antibody.toml --system histidine_hydrochloride \\",
        "    --into sodium_chloride_0p9 --fold 10 --fold 100",
        "formbuf dilute --system sodium_citrate --concentration 20 --ph 6 \\",
        "    --into glucose_5 --dose-ml 5",
    ),
)
def dilute_command(
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
    dose_ml: DoseOption = None,
    into: Annotated[
        str | None,
        typer.Option(metavar="DILUENT", help="Diluent; see `knowledge show diluents`."),
    ] = None,
    fold: Annotated[
        list[str] | None,
        typer.Option(
            metavar="TIMES", help="Dilution factor, 10 for 1 in 10; may be repeated."
        ),
    ] = None,
    at: Annotated[
        str | None,
        typer.Option(metavar="C", help="Temperature; where measured if absent."),
    ] = None,
    open_to_air: Annotated[
        bool, typer.Option("--open", help="The dilution stands open to the air.")
    ] = False,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Show pH, capacity and osmolality on dilution, with the acidity of the diluent.

    Each dilution thrice: the diluent at either end of its pH range, and with the carbon
    dioxide of the air alone.
    """
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    if into is None:
        msg = "--into is not given, allowed a diluent"
        raise UsageError(msg, hint="See `formbuf knowledge show diluents`.")
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
        dose_ml=dose_ml,
    )
    check_form(asked)
    folds = numbers("--fold", fold)
    temperature_c = number("--at", at)
    from formbuf.bench.dilution import USUAL_FOLDS, dilute
    from formbuf.output.dilution_page import dilution_page

    result = dilute(
        bench_of(asked, open_library(knowledge)),
        into,
        folds=folds or USUAL_FOLDS,
        temperature_c=temperature_c,
        exposure="open" if open_to_air else "closed",
    )
    emit(dilution_page(result), target)
