"""``formbuf explain``: everything behind one candidate, screened out or not."""

from __future__ import annotations

from typing import TYPE_CHECKING, Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import (
    BriefArgument,
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    PrecedentOption,
    open_library,
)

if TYPE_CHECKING:
    from formbuf.advice.results import Candidate, Shortlist
    from formbuf.library import Library
    from formbuf.product.brief import Brief

app = command_app()


@app.command(
    "explain",
    epilog=examples(
        "formbuf explain examples/antibody.toml histidine_hydrochloride",
        "formbuf explain examples/antibody.toml tris_hydrochloride --json",
    ),
)
def explain_command(
    brief: BriefArgument,
    system: Annotated[
        str,
        typer.Argument(
            metavar="SYSTEM", help="Buffer system, none, or a formula of the brief."
        ),
    ],
    knowledge: KnowledgeOption = None,
    precedent: PrecedentOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Show everything behind one candidate, screened out or not.

    A system that the brief does not consider is judged as if it were required.
    """
    from formbuf.cli.emit import Target, emit

    target = Target(format_, json_, output)
    target.check()
    from formbuf.output.explain import explain_page
    from formbuf.product.brief import read_brief

    read = read_brief(brief)
    result, candidate, notes = judged(read, open_library(knowledge, precedent), system)
    emit(explain_page(result, candidate, notes), target)


def judged(
    brief: Brief, library: Library, name: str
) -> tuple[Shortlist, Candidate, tuple[str, ...]]:
    """Return the shortlist, the candidate asked for, and what to say about it.

    Raises
    ------
    UnknownNameError
        No candidate and no system bears the name.
    """
    from formbuf.advice.shortlist import shortlist

    result = shortlist(brief, library, thorough=True)
    candidate = _find(result, name)
    if candidate is not None:
        return result, candidate, ()
    if name not in result.library.systems:
        raise _unknown(result, name)
    asked = brief.model_copy(update={"require": (*brief.require, name)})
    result = shortlist(asked, library, thorough=True)
    candidate = _find(result, name)
    if candidate is None:
        raise _unknown(result, name)
    role = candidate.system.role.replace("_", " ")
    note = f"judged because it was asked for: {name} has the role {role}"
    return result, candidate, (note,)


def _find(result: Shortlist, name: str) -> Candidate | None:
    """Return the candidate of a key, an id or a name of the user's."""
    exact = next((c for c in result.candidates if c.key == name), None)
    if exact is not None:
        return exact
    wanted = name.casefold()
    named = [c for c in result.candidates if c.name.casefold() == wanted]
    return named[0] if len(named) == 1 else result.candidate(name)


def _unknown(result: Shortlist, name: str) -> Exception:
    """Return the error for a name that no candidate bears, with those that come near."""
    from formbuf.errors import InputError, UnknownNameError

    systems = result.library.systems
    of_species = [s.id for s in systems.values() if name in s.species]
    if of_species:
        msg = f"SYSTEM: {name!r} is a species, allowed one of its systems"
        return InputError(msg, hint=f"Its systems are {', '.join(of_species)}.")
    known = dict.fromkeys([*(c.key for c in result.candidates), *systems])
    return UnknownNameError("system", name, known, where="SYSTEM")
