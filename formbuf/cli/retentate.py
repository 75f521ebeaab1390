"""``formbuf retentate``: a protein solution after diafiltration."""

from __future__ import annotations

from collections.abc import Mapping
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
from formbuf.cli.wording import check_needed
from formbuf.errors import UsageError

app = command_app()


@app.command(
    "retentate",
    epilog=examples(
        "formbuf retentate examples/antibody_bulk.toml \\",
        "    --system histidine_hydrochloride",
        "formbuf retentate --system histidine_hydrochloride --concentration 20 \\",
        "    --ph 6.0 --charge 20 --protein-mg-ml 150 --molar-mass 148000",
    ),
)
def retentate_command(
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
    charge: Annotated[
        str | None,
        typer.Option(metavar="CHARGE", help="Net charge of the protein, fixed."),
    ] = None,
    protein_mg_ml: Annotated[
        str | None, typer.Option(metavar="MG_ML", help="Protein in the retentate.")
    ] = None,
    molar_mass: Annotated[
        str | None, typer.Option(metavar="G_MOL", help="Molar mass of the protein.")
    ] = None,
    at: Annotated[
        str | None,
        typer.Option(metavar="C", help="Temperature; where measured if absent."),
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Show the retentate of a buffer, and the buffer to a wanted retentate.

    Donnan equilibrium with the volume of the protein excluded. The first table takes
    the system, strength and pH as the diafiltration buffer, the second as the
    retentate wanted.
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
    protein_options = {
        "--charge": number("--charge", charge),
        "--protein-mg-ml": number("--protein-mg-ml", protein_mg_ml),
        "--molar-mass": number("--molar-mass", molar_mass),
    }
    check_protein(brief, protein_options)
    temperature_c = number("--at", at)
    from formbuf.bench import retained
    from formbuf.bench.retentate import diafiltration_buffer, retentate
    from formbuf.output.retentate_page import retentate_page

    bench = bench_of(asked, open_library(knowledge))
    if brief is None:
        z, mg_ml, mass = (float(v or 0.0) for v in protein_options.values())
        protein = retained.protein_from_options(
            bench.library, charge=z, mg_ml=mg_ml, molar_mass_g_mol=mass
        )
        bench = retained.with_protein(bench, protein)
    protein = retained.protein_of(bench)
    found = (
        retentate(bench, protein, temperature_c=temperature_c),
        diafiltration_buffer(bench, temperature_c=temperature_c),
    )
    emit(retentate_page(*found), target)


def check_protein(brief: str | None, given: Mapping[str, float | None]) -> None:
    """Refuse a protein given twice or half.

    Raises
    ------
    UsageError
        Options of the protein beside a brief, or one of them absent without.
    """
    named = [option for option, value in given.items() if value is not None]
    if brief is not None and named:
        msg = f"{named[0]} is given beside the brief {brief}, allowed one or the other"
        raise UsageError(msg, hint="Describe the protein under [drug].")
    if brief is None:
        check_needed(given, "Give --charge, --protein-mg-ml and --molar-mass.")
