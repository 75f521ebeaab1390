"""``formbuf batch-sheet``: what to weigh, in which order, what the meter must read."""

from __future__ import annotations

from typing import Annotated

import typer

from formbuf.cli.bench_options import (
    AddOption,
    AgentOption,
    Asked,
    BriefOption,
    ConcentrationOption,
    MeasureOption,
    OsmolalityOption,
    PhOption,
    PrepareOption,
    StoreOption,
    SystemOption,
    bench_of,
    check_form,
    named,
    pairs,
)
from formbuf.cli.frame import command_app, examples
from formbuf.cli.numbers import number
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
    "batch-sheet",
    epilog=examples(
        "formbuf batch-sheet examples/antibody.toml \\",
        "    --system histidine_hydrochloride --volume 10",
        "formbuf batch-sheet --system sodium_phosphate --concentration 50 --ph 7.4 \\",
        "    --volume 2 --prepare-at 20 --assay sodium_hydroxide=98 \\",
        "    --use disodium_hydrogen_phosphate_dihydrate",
    ),
)
def batch_sheet_command(
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
    volume: Annotated[
        str | None, typer.Option(metavar="L", help="Volume of the batch, L.")
    ] = None,
    mass: Annotated[
        str | None, typer.Option(metavar="KG", help="Mass of the batch instead, kg.")
    ] = None,
    right_at: Annotated[
        str | None,
        typer.Option(
            metavar="C", help="Temperature at which the target pH shall hold."
        ),
    ] = None,
    grade: Annotated[
        list[str] | None,
        typer.Option(
            metavar="MATERIAL=GRADE", help="Grade in hand; see `knowledge show grades`."
        ),
    ] = None,
    assay: Annotated[
        list[str] | None,
        typer.Option(metavar="MATERIAL=PERCENT", help="Assay of the grade in hand, %."),
    ] = None,
    moisture: Annotated[
        list[str] | None,
        typer.Option(
            metavar="MATERIAL=PERCENT", help="Water beyond water of crystallisation, %."
        ),
    ] = None,
    strength: Annotated[
        list[str] | None,
        typer.Option(metavar="MATERIAL=MOL_L", help="Strength of a titrant, mol/L."),
    ] = None,
    density: Annotated[
        list[str] | None,
        typer.Option(
            metavar="MATERIAL=KG_L", help="Density of a liquid in hand, kg/L."
        ),
    ] = None,
    use: Annotated[
        list[str] | None,
        typer.Option(metavar="MATERIAL", help="Hydrate in hand; may be repeated."),
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Work out a batch: what to weigh, the order of addition, what the meter must read.

    Two ways where there are two: acid and base forms together, or one form with strong
    titrant. A formula of the brief that lists materials is weighed as it is. Materials
    are named by their id.
    """
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
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
    )
    check_form(asked)
    check_size(volume, mass)
    in_hand = {
        "grades": named("--grade", grade),
        "assay_percent": pairs("--assay", assay),
        "water_percent": pairs("--moisture", moisture),
        "strength_mol_l": pairs("--strength", strength),
        "density_kg_l": pairs("--density", density),
    }
    size = number("--volume", volume), number("--mass", mass)
    right_at_c = number("--right-at", right_at)
    from formbuf.bench.batch_sheet import batch_sheet
    from formbuf.bench.grades import InHand
    from formbuf.output.batch_sheet_page import batch_sheet_page

    sheet = batch_sheet(
        bench_of(asked, open_library(knowledge)),
        volume_l=size[0],
        mass_kg=size[1],
        in_hand=InHand(**in_hand, hydrates=tuple(use or ())),  # type: ignore[arg-type]
        right_at_c=right_at_c,
    )
    emit(batch_sheet_page(sheet), target)


def check_size(volume: str | None, mass: str | None) -> None:
    """Refuse a batch without a size, or with two.

    Raises
    ------
    UsageError
        None or both of the options are given.
    """
    if volume is None and mass is None:
        msg = "neither --volume nor --mass is given, allowed one of the two"
        raise UsageError(
            msg, hint="Give the size of the batch, for example --volume 10."
        )
    if volume is not None and mass is not None:
        msg = "--mass is given beside --volume, allowed one of the two"
        raise UsageError(msg)
