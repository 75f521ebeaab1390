"""``formbuf freeze-thaw``: pH on freezing and thawing, of a brief or a composition."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.numbers import number, numbers
from formbuf.cli.options import (
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    open_library,
)
from formbuf.cli.wording import check_needed
from formbuf.errors import UsageError

if TYPE_CHECKING:
    from formbuf.advice.freeze_thaw_results import FreezeThaw
    from formbuf.library import Library

app = command_app()

#: Endings of a figure file.
FIGURE_ENDINGS = (".svg", ".png")
#: Further solutes by option: material and the unit of the amount.
SOLUTES: Mapping[str, tuple[str, str]] = {
    "--nacl": ("sodium_chloride", "mmol_l"),
    "--kcl": ("potassium_chloride", "mmol_l"),
    "--sucrose": ("sucrose", "percent_w_v"),
    "--trehalose": ("trehalose_dihydrate", "percent_w_v"),
}


@app.command(
    "freeze-thaw",
    epilog=examples(
        "formbuf freeze-thaw examples/antibody.toml --figure freezing.svg",
        "formbuf freeze-thaw --system sodium_phosphate --concentration 50 \\",
        "    --ph 7.4 --to -10",
        "formbuf freeze-thaw --system sodium_phosphate --concentration 10 \\",
        "    --ph 7.4 --to -20 --nacl 137 --sucrose 5 --at 37 --at -4",
    ),
)
def freeze_thaw_command(
    brief: Annotated[
        str | None,
        typer.Argument(metavar="BRIEF", help="Product brief, a TOML file."),
    ] = None,
    system: Annotated[
        str | None, typer.Option(metavar="SYSTEM", help="Buffer system.")
    ] = None,
    concentration: Annotated[
        str | None, typer.Option(metavar="MMOL_L", help="Total of the buffer, mmol/L.")
    ] = None,
    ph: Annotated[
        str | None, typer.Option(metavar="PH", help="Target pH, as set at 25 C.")
    ] = None,
    to: Annotated[
        str | None,
        typer.Option(
            metavar="C",
            help="Coldest temperature, -30 to 0; -20 if absent. pH is computed to -20.",
        ),
    ] = None,
    nacl: Annotated[
        str | None, typer.Option(metavar="MMOL_L", help="Sodium chloride, mmol/L.")
    ] = None,
    kcl: Annotated[
        str | None,
        typer.Option(
            "--kcl",
            "--potassium-chloride",
            "--potassium",
            metavar="MMOL_L",
            help="Potassium chloride, mmol/L.",
        ),
    ] = None,
    sucrose: Annotated[
        str | None, typer.Option(metavar="PERCENT", help="Sucrose, % w/v.")
    ] = None,
    trehalose: Annotated[
        str | None,
        typer.Option(metavar="PERCENT", help="Trehalose dihydrate, % w/v."),
    ] = None,
    at: Annotated[
        list[str] | None,
        typer.Option(metavar="C", help="Further temperature; may be repeated."),
    ] = None,
    figure: Annotated[
        str | None,
        typer.Option(metavar="FILE", help="Draw pH against temperature: .svg or .png."),
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Compare pH on freezing and thawing with what was measured.

    Takes a BRIEF and compares every system of its shortlist, or one composition:
    --system, --concentration and --ph. Gives two bounds, with and without salts
    crystallising, a class, and the published observations.
    """
    from formbuf.cli.emit import Target, emit, say

    target = Target(format_, json_, output)
    check_figure(figure, output)
    target.check()
    given = {
        "--nacl": nacl,
        "--kcl": kcl,
        "--sucrose": sucrose,
        "--trehalose": trehalose,
    }
    quick = {"--system": system, "--concentration": concentration, "--ph": ph}
    check_form(brief, {**quick, **given})
    amounts = {option: number(option, text) for option, text in given.items()}
    mmol_l, target_ph = number("--concentration", concentration), number("--ph", ph)
    to_c, at_c = number("--to", to), numbers("--at", at)
    library = open_library(knowledge)
    if brief is not None:
        result = _of_brief(brief, library, to_c, at_c)
    else:
        result = _of_composition(
            library, system, mmol_l, target_ph, to_c, amounts, at_c
        )
    from formbuf.output.freeze_thaw_page import freeze_thaw_page

    if figure is not None and result.systems:
        from formbuf.output.freeze_thaw_figure import write_figure

        write_figure(result, Path(figure))
        say(f"Wrote {figure}")
    elif figure is not None:
        say(f"{figure} is not written: there is nothing to draw")
    emit(freeze_thaw_page(result), target)
    if not result.systems and not result.left_out:
        from formbuf.errors import EXIT_NO_CANDIDATE

        raise typer.Exit(EXIT_NO_CANDIDATE)


def check_figure(figure: str | None, output: str | None) -> None:
    """Refuse a figure file that cannot be drawn, before anything is computed."""
    if figure is None:
        return
    if Path(figure).suffix.lower() not in FIGURE_ENDINGS:
        allowed = " or ".join(FIGURE_ENDINGS)
        msg = f"--figure: {figure!r} has no ending of a figure, allowed {allowed}"
        raise UsageError(msg)
    if output is not None and Path(figure) == Path(output):
        msg = f"--figure and --output both name {figure}, allowed two files"
        raise UsageError(msg)


def check_form(brief: str | None, given: Mapping[str, str | None]) -> None:
    """Refuse a mixture of both forms, or too little of either.

    Raises
    ------
    UsageError
        Both forms, or an option that the quick form needs is not given.
    """
    named = [option for option, value in given.items() if value is not None]
    if brief is not None:
        if named:
            msg = f"{named[0]} is given beside the brief {brief}, allowed one or the other"
            raise UsageError(msg, hint=f"Set it in {brief}, or leave the brief out.")
        return
    needed = ("--system", "--concentration", "--ph")
    check_needed(
        {option: given[option] for option in needed},
        "Give a brief file, or --system, --concentration and --ph.",
    )


def _of_brief(
    path: str, library: Library, to_c: float | None, at_c: tuple[float, ...]
) -> FreezeThaw:
    from formbuf.advice.freeze_thaw import compare_freezing
    from formbuf.product.brief import read_brief

    return compare_freezing(read_brief(path), library, to_c=to_c, at_c=at_c)


def _of_composition(
    library: Library,
    system: str | None,
    concentration: float | None,
    ph: float | None,
    to_c: float | None,
    amounts: Mapping[str, float | None],
    at_c: tuple[float, ...],
) -> FreezeThaw:
    from formbuf.advice.freeze_thaw import freeze_composition
    from formbuf.advice.freeze_thaw_results import ACCIDENT_C, QuickQuestion

    assert system is not None
    assert concentration is not None
    assert ph is not None
    added = {
        option: (*SOLUTES[option], amount)
        for option, amount in amounts.items()
        if amount is not None
    }
    question = QuickQuestion(
        system,
        concentration,
        ph,
        ACCIDENT_C if to_c is None else to_c,
        added,
    )
    return freeze_composition(question, library, at_c=at_c)
