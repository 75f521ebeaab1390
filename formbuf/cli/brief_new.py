"""The dialogue of ``formbuf brief new``: asks, explains, goes back, writes the brief.

Lines are read and written through two functions, so that a test can play the user.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

from formbuf.errors import InputError, UsageError

if TYPE_CHECKING:
    from formbuf.advice.missing_facts import MissingFact
    from formbuf.library import Library
    from formbuf.product.interview import Interview, Question

Ask = Callable[[str], str]
Say = Callable[[str], None]

WELCOME = """\
A guided brief. Answer each question and press Enter. What you do not know,
leave empty: it is assumed, and marked so. Type ? to have a question explained,
back to go back one question, done to write the brief with the rest left open.
Ctrl-C leaves without writing anything.
"""
#: Most facts asked for at the end.
MOST_FACTS = 6
PROMPT = "> "
LEAST_WIDTH = 40


def refuse_existing(path: Path) -> None:
    """Refuse a file that is already there, or that could not be written at the end.

    Raises
    ------
    UsageError
        It exists, or its folder does not, or may not be written to.
    """
    if not path.parent.is_dir() or not os.access(path.parent, os.W_OK):
        msg = f"{path}: there is no folder {path.parent} that can be written to"
        raise UsageError(msg)
    if path.exists() or path.is_symlink():
        msg = f"{path}: is already there, allowed a new file"
        raise UsageError(msg, hint="Name another file, or move this one away.")


def hold_interview(library: Library, path: Path, ask: Ask, say: Say) -> None:
    """Ask for a brief and write it.

    Parameters
    ----------
    library : Library
    path : Path
        File to write.
    ask : callable
        Shows a prompt and returns the line that was typed; raises `EOFError` where
        there is none.
    say : callable
        Shows a text.

    Raises
    ------
    UsageError
        The answers ended before a brief could be written.
    OutputError
        The file could not be written.
    """
    from formbuf.library.rules import load_rulebook
    from formbuf.product.interview import Interview, fact_questions
    from formbuf.product.interview_questions import questions

    say(WELCOME)
    interview = Interview(questions(library), library)
    _go_through(interview, ask, say)
    write(interview, path)
    more = fact_questions(
        [m.fact for m in _facts_worth_asking(interview)],
        load_rulebook(library).vocabulary,
    )
    if more:
        say(
            f"\nThe brief is written to {path}. A few more answers could change the "
            "order of the buffers; they come from rules that cannot be judged yet."
        )
        follow = Interview([*interview.questions, *more], library)
        follow.answers = dict(interview.answers)
        for question in interview.questions:
            follow.answers.setdefault(question.key, None)
        _go_through(follow, ask, say, first=len(follow.answers))
        write(follow, path)
    say(f"\nWrote {path}. Next: formbuf shortlist {path}")


def _go_through(interview: Interview, ask: Ask, say: Say, first: int = 0) -> None:
    """Ask until every question that matters has its answer, or the user has enough."""
    shown = ""
    while True:
        question = interview.current()
        if question is None:
            return
        if question.key != shown:
            say(f"\n{worded(question, interview.left())}")
            shown = question.key
        try:
            line = ask(PROMPT).strip()
        except EOFError:
            msg = "the answers ended before the brief was done, nothing more is written"
            raise UsageError(msg, hint="Type done to finish early.") from None
        command = line.casefold()
        if command in ("?", "help"):
            say(question.explain)
        elif command == "back":
            if len(interview.answers) <= first or not interview.back():
                say("This is the first question.")
            shown = ""
        elif command == "done":
            if interview.can_stop():
                return
            say("A brief needs at least the route and the target pH.")
        else:
            _take(interview, line, say)


def _take(interview: Interview, line: str, say: Say) -> None:
    """Give an answer to the interview, or say why it does not fit."""
    question = interview.current()
    try:
        interview.answer(line)
    except InputError as error:
        say(error.message.replace("brief: ", ""))
        say(error.hint or "Type ? to have the question explained.")
        return
    taken = interview.answers.get(question.key) if question else None
    if question and question.choices and taken and str(taken) != line.strip():
        say(f"(taken as {taken if isinstance(taken, str) else ', '.join(taken)})")


def worded(question: Question, left: int) -> str:
    """Return a question as it is shown, with its list of choices."""
    lines = [f"[{left} to go] {question.text}"]
    if question.choices:
        width = max(map(len, question.choices)) + 5
        row = max(1, 76 // width)
        cells = [f"{n:>2} {name}" for n, name in enumerate(question.choices, start=1)]
        lines += [
            "".join(cell.ljust(width) for cell in cells[i : i + row]).rstrip()
            for i in range(0, len(cells), row)
        ]
    return "\n".join(lines)


def _facts_worth_asking(interview: Interview) -> list[MissingFact]:
    """Return the facts that could change the order, for what is answered so far."""
    from formbuf.advice.shortlist import shortlist
    from formbuf.product.brief import brief_from_mapping
    from formbuf.product.interview import GROUPS

    result = shortlist(brief_from_mapping(interview.data()), interview.library)
    asked = [
        missing
        for missing in result.missing_facts
        if missing.fact.held_in.startswith("facts.") or missing.fact.held_in == GROUPS
    ]
    return asked[:MOST_FACTS]


def write(interview: Interview, path: Path) -> None:
    """Write the brief, commented, whole or not at all; it was checked before."""
    from formbuf.output.writers import write_file
    from formbuf.product.brief import brief_from_text, complete
    from formbuf.product.brief_writer import brief_toml

    left_open = {
        q.key: (line, q.text)
        for q in interview.open_questions()
        if (line := q.line_when_open()) is not None
    }
    head = [
        "Product brief, written by `formbuf brief new`.",
        "Lines that begin with # are comments. What is open is assumed and marked in",
        "the results; to answer it, take the # away and fill in the value.",
    ]
    text = brief_toml(interview.data(), head=head, open_keys=left_open)
    complete(brief_from_text(text, name=str(path)), interview.library)
    write_file(path, text)


def terminal_ask(prompt: str) -> str:
    """Read a line from the terminal."""
    return input(prompt)


def require_terminal(*streams: object) -> None:
    """Refuse to ask where nobody can answer.

    Raises
    ------
    UsageError
        A stream is no terminal.
    """
    if not all(getattr(s, "isatty", lambda: False)() for s in streams):
        msg = "brief new asks questions and needs a terminal"
        hint = (
            "Without one, write the file by hand (see `formbuf brief schema`), or use "
            "the quick form: formbuf shortlist --ph 6 --route subcutaneous."
        )
        raise UsageError(msg, hint=hint)


def wrapped_text(text: str, width: int) -> str:
    """Return a text whose long lines are wrapped; short ones stay as they are."""
    import textwrap

    room = max(width, LEAST_WIDTH)
    lines = []
    for line in text.split("\n"):
        lines += [line] if len(line) <= room else textwrap.wrap(line, room)
    return "\n".join(lines) + "\n"
