"""A guided brief: which question comes next, and what the answers come to.

Nothing here reads or prints. An `Interview` gives its current question, takes the text
of an answer, checks it against all answers before it, and can go back.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, TypeAlias

from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.vocabulary import FactDefinition, Vocabulary
from formbuf.product import interview_readers as readers
from formbuf.product.brief import brief_from_mapping, complete
from formbuf.product.interview_readers import Reader, Value

Answers: TypeAlias = Mapping[str, Value]
Put: TypeAlias = Callable[[dict[str, Any], Value], None]

#: Held with the drug, not among the facts.
GROUPS = "drug.groups"
#: What a person types who does not know.
UNKNOWN = frozenset({"", "unknown", "u", "don't know", "dont know", "not known", "-"})


def always(_: Answers) -> bool:
    """Apply to every product."""
    return True


@dataclass(frozen=True, slots=True)
class Question:
    """One question of a guided brief.

    Parameters
    ----------
    key : str
        Key of the brief that the answer fills, ``table.key``; unique.
    text : str
        The question in plain words.
    explain : str
        Why it is asked, how to answer, and what is assumed without an answer.
    read : callable
        Turns the text of an answer into its value, or raises `InputError`.
    put : callable or None
        Writes the value into the data of a brief; by default at its key.
    applies : callable
        Whether it matters, given the answers so far.
    choices : tuple of str
        Names to choose from.
    required : bool
        Whether a brief cannot do without.
    open_line : str or None
        How it stands in the file without an answer; empty for its key, None for not
        at all.
    """

    key: str
    text: str
    explain: str
    read: Reader
    put: Put | None = None
    applies: Callable[[Answers], bool] = always
    choices: tuple[str, ...] = ()
    required: bool = False
    open_line: str | None = ""

    def line_when_open(self) -> str | None:
        """Return how an unanswered question stands in the file, None for not at all."""
        if self.open_line == "":
            return f"{self.key.rpartition('.')[2]} ="
        return self.open_line

    def fill(self, data: dict[str, Any], value: Value) -> None:
        """Write a value into the data of a brief."""
        if self.put is not None:
            self.put(data, value)
            return
        *tables, last = self.key.split(".")
        place = data
        for name in tables:
            place = place.setdefault(name, {})
        place[last] = value


@dataclass
class Interview:
    """Questions, the answers so far, and the way back.

    Parameters
    ----------
    questions : sequence of Question
    library : Library
        The names that answers may use.
    """

    questions: Sequence[Question]
    library: Library
    answers: dict[str, Value] = field(default_factory=dict)

    def current(self) -> Question | None:
        """Return the next question that matters; None when all are answered."""
        for question in self.questions:
            if question.key not in self.answers and question.applies(self.answers):
                return question
        return None

    def left(self) -> int:
        """Return how many questions remain as things stand, at most."""
        return sum(
            q.key not in self.answers and q.applies(self.answers)
            for q in self.questions
        )

    def answer(self, text: str) -> None:
        """Take the answer to the current question.

        Raises
        ------
        InputError
            If it does not fit; the question then stays the current one.
        """
        question = self.current()
        if question is None:
            msg = "every question is answered"
            raise InputError(msg)
        if text.strip().casefold() in UNKNOWN:
            if question.required:
                msg = "a brief cannot do without this answer"
                raise InputError(msg, hint="Give your best guess; it can be changed.")
            self.answers[question.key] = None
            return
        value = question.read(text)
        tried = {**self.answers, question.key: value}
        self._check(tried)
        self.answers = tried

    def back(self) -> bool:
        """Take the last answer away; False where there is none."""
        if not self.answers:
            return False
        self.answers.popitem()
        return True

    def data(self, answers: Answers | None = None) -> dict[str, Any]:
        """Return the answers as the data of a brief."""
        given = self.answers if answers is None else answers
        found: dict[str, Any] = {}
        for question in self.questions:
            value = given.get(question.key)
            if value is not None:
                question.fill(found, value)
        return found

    def open_questions(self) -> list[Question]:
        """Return the questions that were answered by unknown, or not reached."""
        return [
            q
            for q in self.questions
            if self.answers.get(q.key) is None and q.applies(self.answers)
        ]

    def can_stop(self) -> bool:
        """Whether the answers make a brief."""
        return all(
            self.answers.get(q.key) is not None for q in self.questions if q.required
        )

    def _check(self, answers: Answers) -> None:
        """Refuse answers that contradict each other or name what does not exist."""
        if any(q.required and answers.get(q.key) is None for q in self.questions):
            return
        complete(brief_from_mapping(self.data(answers)), self.library)


def fact_questions(
    facts: Sequence[FactDefinition], vocabulary: Vocabulary
) -> list[Question]:
    """Return the questions for facts that rules test, each after what it hangs on.

    A fact that makes sense only where another one holds comes after the question for
    that one, and is asked where it was answered by yes.
    """
    found: dict[str, Question] = {}
    for fact in facts:
        first = vocabulary.get(fact.only_if)
        if first is None or not first.held_in.startswith("facts."):
            found[fact.name] = fact_question(fact)
            continue
        found.setdefault(first.name, fact_question(first))
        key = f"facts.{first.name}"
        found.pop(fact.name, None)
        found[fact.name] = fact_question(fact, _answered_yes(key))
    return list(found.values())


def _answered_yes(key: str) -> Callable[[Answers], bool]:
    return lambda answers: answers.get(key) is True


def fact_question(
    fact: FactDefinition, applies: Callable[[Answers], bool] = always
) -> Question:
    """Return the question for a fact that rules test."""
    name = fact.name
    unit = f" in {fact.unit}" if fact.kind == "number" else ""
    ways = {
        "yes_no": "Answer yes or no.",
        "number": f"Answer with a number{unit}, {fact.low:g} to {fact.high:g}.",
        "choice": "Answer with a name of the list, or its number.",
        "set": "Answer with names of the list separated by commas, or none.",
    }
    reading: Mapping[str, Reader] = {
        "yes_no": readers.yes_no,
        "number": readers.number_in(fact.unit) if fact.unit else readers.number,
        "choice": readers.one_of(fact.choices),
        "set": readers.some_of(fact.choices),
    }
    held_in = fact.held_in if fact.held_in == GROUPS else f"facts.{name}"
    explain = (
        f"{ways[fact.kind]} A rule cannot be judged without it, and it could change "
        f"the order of the candidates. It is kept in the brief as {held_in}."
    )
    return Question(
        held_in,
        fact.question,
        explain,
        reading[fact.kind],
        None,
        applies,
        fact.choices,
    )
