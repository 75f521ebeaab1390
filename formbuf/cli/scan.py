"""``formbuf scan``: the same product over a grid of what the brief says."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import BriefArgument, KnowledgeOption, open_library

if TYPE_CHECKING:
    from formbuf.advice.scan import ShortlistScan
    from formbuf.advice.scan_grid import Grid
    from formbuf.advice.scan_states import StateScan
    from formbuf.library import Library
    from formbuf.product.brief import Brief

app = command_app()


@app.command(
    "scan",
    epilog=examples(
        "formbuf scan examples/antibody.toml --over target_ph=5:7:0.1 -o scan.csv",
        "formbuf scan examples/antibody.toml --over target_ph=5.5,6,6.5 \\",
        "    --over loads.acid_mmol_l=0.1:0.5:0.1 --draws 2500 --top 2 -o scan.csv",
        "formbuf scan examples/antibody.toml --system histidine_hydrochloride \\",
        "    --over target_ph=5:7:0.02 --over concentration_mmol_l=5:50:1 \\",
        "    --over temperature_c=5,25,40 --over load_mmol_l=-2:2:0.1 -o states.csv",
    ),
)
def scan_command(
    brief: BriefArgument,
    over: Annotated[
        list[str] | None,
        typer.Option(
            metavar="KEY=RANGE",
            help="KEY=START:STOP:STEP or KEY=VALUE,VALUE,...; may be repeated.",
        ),
    ] = None,
    system: Annotated[
        list[str] | None,
        typer.Option(
            metavar="SYSTEM", help="pH of this system only, no shortlist; repeatable."
        ),
    ] = None,
    top: Annotated[
        str | None, typer.Option(metavar="N", help="Keep the best N places only.")
    ] = None,
    draws: Annotated[
        str | None, typer.Option(metavar="N", help="Draws per point, none if absent.")
    ] = None,
    seed: Annotated[
        str | None, typer.Option(metavar="SEED", help="Start of the draws.")
    ] = None,
    output: Annotated[
        str | None,
        typer.Option(
            "--output",
            "-o",
            metavar="FILE",
            help="CSV file; a rerun goes on where it stopped.",
        ),
    ] = None,
    knowledge: KnowledgeOption = None,
) -> None:
    """Evaluate a grid of briefs and write one row per point and candidate, as CSV.

    KEY is a key of the brief (loads.acid_mmol_l, storage[1].temperature_c) or
    target_ph, which moves the window along. With --system, pH, ionic strength and
    capacity of recipes over target_ph, concentration_mmol_l, temperature_c and
    load_mmol_l (strong base, negative for acid), millions in a minute.
    """
    from formbuf.advice.scan_grid import FORM, grid_of, parse_axis
    from formbuf.cli.numbers import whole
    from formbuf.cli.quick import check_draws, check_top
    from formbuf.errors import UsageError
    from formbuf.product.brief import read_brief

    places = check_top(whole("--top", top))
    count, start = check_draws(whole("--draws", draws), whole("--seed", seed))
    if output is not None and not output.strip():
        msg = "--output: the file name is empty, allowed a file"
        raise UsageError(msg)
    if not over:
        msg = f"--over is not given, allowed at least one {FORM}"
        raise UsageError(msg, hint="For example --over target_ph=5:7:0.5.")
    grid = grid_of([parse_axis(text) for text in over])
    read = read_brief(brief)
    library = open_library(knowledge)
    path = Path(output) if output is not None else None
    if system:
        if places is not None or count is not None:
            msg = "--system is given beside --top or --draws, allowed one or the other"
            raise UsageError(msg)
        _states(read, library, grid, system, path)
        return
    from formbuf.advice.scan import ShortlistScan

    _shortlists(
        ShortlistScan(read, library, grid, count or 0, start, places or 0), path
    )


def _settings(brief: Brief, library: Library, grid: Grid) -> dict[str, Any]:
    """Return what decides every row of a scan."""
    from formbuf import __version__

    return {
        "version": __version__,
        "knowledge": [library.sha256, library.overlay_sha256],
        "brief": brief.to_dict(),
        "axes": [[axis.key, list(axis.values)] for axis in grid.axes],
    }


def _shortlists(scan: ShortlistScan, path: Path | None) -> None:
    from formbuf.cli.emit import put
    from formbuf.cli.progress import Progress
    from formbuf.output.scan_file import ScanFile, mark_of

    scan.check()
    mark = mark_of(
        {
            **_settings(scan.brief, scan.library, scan.grid),
            "draws": [scan.draws, scan.seed],
            "top": scan.top,
        }
    )
    with ScanFile(path, scan.columns, mark, put) as file:
        _say_resumed(file.start)
        progress = Progress("points", file.start)
        try:
            for point, rows in scan.rows(file.start):
                file.add(point, rows)
                progress(point + 1, scan.grid.size)
        finally:
            progress.close()
    _say_written(path, scan.grid.size, "point")


def _states(
    brief: Brief, library: Library, grid: Grid, systems: list[str], path: Path | None
) -> None:
    from formbuf.advice.case import case_for
    from formbuf.advice.scan_states import COLUMNS, state_scan
    from formbuf.cli.emit import put
    from formbuf.cli.progress import Progress
    from formbuf.output.scan_file import ScanFile, mark_of
    from formbuf.product.brief import complete

    completed = complete(brief, library)
    known = completed.library
    chosen = [known.get_system(name, where="--system") for name in systems]
    scan: StateScan = state_scan(case_for(completed), chosen, grid)
    settings = _settings(brief, library, grid)
    mark = mark_of({**settings, "systems": [s.id for s in chosen]})
    with ScanFile(path, COLUMNS, mark, put) as file:
        _say_resumed(file.start)
        progress = Progress("states", file.start)
        try:
            for first, columns in scan.chunks(file.start):
                file.add_columns(first, columns)
                progress(first + len(columns["system"]), scan.size)
        finally:
            progress.close()
    _say_written(path, scan.size, "state")


def _say_resumed(start: int) -> None:
    from formbuf.cli.emit import say

    if start:
        say(f"Going on with point {start}.")


def _say_written(path: Path | None, count: int, what: str) -> None:
    from formbuf.cli.emit import say

    if path is not None:
        from formbuf.output.figures import counted

        say(f"Wrote {path}: {counted(count, what)}.")
