"""The entry point: run a command and turn every outcome into an exit code.

Errors that a user can meet are caught here and nowhere else: one ``Error:`` and one
``Hint:`` on standard error. Anything else is a bug and keeps its traceback.
"""

from __future__ import annotations

import gc
from collections.abc import Sequence
from typing import Annotated, Any

import typer

from formbuf import __version__
from formbuf.cli.emit import leave_quietly, put, say
from formbuf.cli.frame import SETTINGS, LazyGroup, examples
from formbuf.errors import EXIT_BUG, EXIT_DONE, FormbufError

EXIT_INTERRUPTED = 130
#: New objects after which garbage is looked for; one run makes little of it, and
#: looking less often saves a few hundredths of a second.
COLLECT_AFTER = 100_000

app = typer.Typer(
    name="formbuf",
    cls=LazyGroup,
    rich_markup_mode=None,
    pretty_exceptions_enable=False,
    no_args_is_help=True,
    context_settings=dict(SETTINGS),
    epilog=examples(
        "formbuf shortlist examples/antibody.toml",
        "formbuf shortlist --ph 6.0 --route subcutaneous --store 5",
        "formbuf explain examples/antibody.toml histidine_hydrochloride",
    ),
)


def _show_version(wanted: bool) -> None:
    if wanted:
        put(f"formbuf {__version__}\n")
        raise typer.Exit


@app.callback()
def formbuf(
    _version: Annotated[
        bool,
        typer.Option(
            "--version",
            callback=_show_version,
            is_eager=True,
            help="Show the version and exit.",
        ),
    ] = False,
) -> None:
    """Choose and justify the buffer of a drug product.

    A calculation aid: measured values, compendia, local rules and qualified staff
    decide. In options, C means degrees Celsius. Exit codes: 0 done, 1 no acceptable
    candidate or a qualification group failed, 2 usage, 3 bad brief or value, 4
    knowledge broken, 5 no convergence, 70 a bug, 130 interrupted.
    """


def run(args: Sequence[str] | None = None) -> int:
    """Run the command line and return the exit code.

    Parameters
    ----------
    args : sequence of str, optional
        Without the program's name; those of the process if absent.
    """
    gc.set_threshold(COLLECT_AFTER)
    command = typer.main.get_command(app)
    usage_error: Any = typer.BadParameter.__mro__[1]
    shown_error: Any = typer.BadParameter.__mro__[2]
    try:
        given = None if args is None else list(args)
        code = command.main(given, prog_name="formbuf", standalone_mode=False)
    except FormbufError as error:
        _report(error.message, error.hint)
        return error.exit_code
    except usage_error as error:
        return _usage(error)
    except shown_error as error:
        _report(error.format_message(), "")
        return int(error.exit_code)
    except (KeyboardInterrupt, typer.Abort):
        say("Interrupted.")
        return EXIT_INTERRUPTED
    except BrokenPipeError:
        leave_quietly()
    except SystemExit as leaving:
        return leaving.code if isinstance(leaving.code, int) else EXIT_BUG
    except Exception:
        import traceback

        say(traceback.format_exc().rstrip())
        say(f"This is a bug in formbuf {__version__}; please report the lines above.")
        return EXIT_BUG
    return code if isinstance(code, int) else EXIT_DONE


def _report(message: str, hint: str) -> None:
    say(f"Error: {message}")
    if hint:
        say(f"Hint: {hint}")


def _usage(error: Any) -> int:
    """Report a mistake of usage; without arguments the help is the answer."""
    text = error.format_message()
    if type(error).__name__.startswith("NoArgsIsHelp"):
        say(text)
        return int(error.exit_code)
    context = error.ctx
    path = context.command_path if context is not None else "formbuf"
    _report(text, f"Run `{path} --help`.")
    return int(error.exit_code)
