"""The errors a user can meet, each with an exit code and a hint.

::

    FormbufError                  exit 70 unless a subclass says otherwise
      UsageError                  exit 2   the command line asks for something that is not there
      InputError                  exit 3   a brief, file or value of the user is unusable
        UnknownNameError          exit 3   a name that no table holds, with the nearest match
      KnowledgeError              exit 4   the tables of the tool (or an overlay) are broken
      ConvergenceError            exit 5   the equations were not solved within the cap
      OutputError                 exit 3   a result could not be written

A message says what is wrong, where, with which value, and what is allowed; the
hint names the next thing to do. Anything that is not a ``FormbufError`` is a bug
and keeps its traceback (exit 70).
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable

EXIT_DONE = 0
EXIT_NO_CANDIDATE = 1
EXIT_USAGE = 2
EXIT_INPUT = 3
EXIT_KNOWLEDGE = 4
EXIT_CONVERGENCE = 5
EXIT_BUG = 70
#: Shortest text that counts as part of a name [characters].
LEAST_PART = 4


class FormbufError(Exception):
    """Base of every error that formbuf raises on purpose.

    Parameters
    ----------
    message : str
        What is wrong, where, with which value, and what is allowed.
    hint : str, optional
        What to do next, in one sentence.
    """

    exit_code = EXIT_BUG

    def __init__(self, message: str, *, hint: str = "") -> None:
        super().__init__(message)
        self.message = message
        self.hint = hint

    def __str__(self) -> str:
        return self.message


class UsageError(FormbufError):
    """The command line asks for something that does not exist or contradicts itself."""

    exit_code = EXIT_USAGE


class InputError(FormbufError, ValueError):
    """A brief, a file or a value given by the user cannot be used."""

    exit_code = EXIT_INPUT


class UnknownNameError(InputError):
    """A name that no table holds; carries the nearest known names.

    Parameters
    ----------
    kind : str
        What was looked for, for example ``"species"``.
    name : str
        The name given.
    known : iterable of str
        The names that exist.
    where : str, optional
        File and key in which the name stands.
    """

    def __init__(
        self, kind: str, name: str, known: Iterable[str], *, where: str = ""
    ) -> None:
        place = f"{where}: " if where else ""
        near = nearest(name, known)
        hint = f"Did you mean {' or '.join(near)}?" if near else ""
        super().__init__(f"{place}unknown {kind} {name!r}", hint=hint)


class KnowledgeError(FormbufError):
    """A table of the tool, or of an overlay, is broken; lists every fault at once.

    Parameters
    ----------
    faults : iterable of str
        One line per fault, as ``file:line:column: what, allowed``.
    """

    exit_code = EXIT_KNOWLEDGE

    def __init__(self, faults: Iterable[str], *, hint: str = "") -> None:
        self.faults = tuple(faults)
        super().__init__("\n".join(self.faults), hint=hint)


class ConvergenceError(FormbufError, ArithmeticError):
    """The equations were not solved within the iteration cap; the state is in the message."""

    exit_code = EXIT_CONVERGENCE


class OutputError(FormbufError, OSError):
    """A result could not be written; what was there before is untouched."""

    exit_code = EXIT_INPUT


def nearest(name: str, known: Iterable[str], count: int = 3) -> list[str]:
    """Return the known names most like ``name``, best first.

    Where none is like it, those that contain it.
    """
    names = list(known)
    found = difflib.get_close_matches(name, names, n=count, cutoff=0.6)
    if not found and len(name) >= LEAST_PART:
        found = [one for one in names if name.casefold() in one.casefold()][:count]
    return found
