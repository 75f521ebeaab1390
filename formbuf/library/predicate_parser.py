"""Read a condition from its text and check it against the facts vocabulary.

The grammar stands in `formbuf.library.predicates`. The text is split into words,
parsed by recursive descent, and every name, unit, choice and threshold is checked as
it is met; the first thing that is wrong ends the reading as a `ConditionError`.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Final, NoReturn, cast

from formbuf.errors import nearest
from formbuf.library.predicates import (
    MAX_DEPTH,
    MAX_LENGTH,
    AllOf,
    Amount,
    AnyOf,
    Arithmetic,
    Compare,
    Comparison,
    Condition,
    ConditionError,
    Expression,
    Flag,
    Holds,
    Magnitude,
    Not,
    Number,
    OneOf,
    Operator,
)
from formbuf.library.vocabulary import (
    FactDefinition,
    FactType,
    UnitPowers,
    Vocabulary,
    format_unit,
    multiply_units,
    unit_powers,
)

_WORDS: Final = re.compile(
    r"\s*(?:(?P<number>(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d+)?)"
    r"|(?P<name>[A-Za-z_][A-Za-z0-9_]*)"
    r"|(?P<sign><=|>=|!=|[<>=()+\-*/,]))"
)
_COMPARISONS: Final = ("<", "<=", ">", ">=", "=", "!=")
_KEYWORDS: Final = frozenset({"and", "or", "not", "in", "has", "any", "of", "abs"})


@dataclass(frozen=True, slots=True)
class _Word:
    kind: str
    text: str
    character: int


@dataclass(frozen=True, slots=True)
class _Measured:
    """An amount with its unit; ``unit`` is None for bare numbers, which fit any."""

    node: Expression
    unit: UnitPowers | None
    character: int


def parse_condition(text: str, vocabulary: Vocabulary) -> Condition:
    """Read a condition.

    Parameters
    ----------
    text : str
        The condition as it stands in a cell, at most `MAX_LENGTH` characters.
    vocabulary : mapping of str to FactDefinition
        The facts it may test.

    Returns
    -------
    Condition
        The condition as nodes.

    Raises
    ------
    ConditionError
        If a word is out of place, a fact or choice unknown, a unit does not fit or
        a threshold lies outside the range of its fact.
    """
    if len(text) > MAX_LENGTH:
        what = f"{len(text)} characters long, allowed {MAX_LENGTH}"
        raise ConditionError(what, MAX_LENGTH + 1)
    reader = _Reader(_split(text), vocabulary)
    condition = reader.condition()
    reader.expect_end()
    return condition


def _split(text: str) -> list[_Word]:
    words = []
    place = 0
    end = len(text.rstrip())
    while place < end:
        found = _WORDS.match(text, place)
        if found is None:
            gap = len(text[place:]) - len(text[place:].lstrip())
            what = f"{text[place + gap]!r} is out of place, allowed names, numbers and < <= > >= = != + - * / ( ) ,"
            raise ConditionError(what, place + gap + 1)
        kind = found.lastgroup or ""
        words.append(_Word(kind, found[kind], found.start(kind) + 1))
        place = found.end()
    words.append(_Word("end", "", end + 1))
    return words


class _Reader:
    """Recursive descent over the words of one condition."""

    def __init__(self, words: list[_Word], vocabulary: Vocabulary) -> None:
        self.words = words
        self.vocabulary = vocabulary
        self.at = 0
        self.depth = 0

    # -- words -------------------------------------------------------------------

    @property
    def word(self) -> _Word:
        return self.words[self.at]

    def fail(self, what: str, word: _Word | None = None) -> NoReturn:
        raise ConditionError(what, (word or self.word).character)

    def take(self, *texts: str) -> bool:
        """Step over the next word if it is one of these."""
        word = self.word
        if word.kind != "number" and word.text in texts and word.text:
            self.at += 1
            return True
        return False

    def expect(self, text: str) -> None:
        if not self.take(text):
            self.fail(f"{_shown(self.word)} is out of place, allowed {text!r}")

    def expect_end(self) -> None:
        word = self.word
        if word.kind == "end":
            return
        if word.text in _COMPARISONS:
            self.fail("a second comparison, allowed one per test: 'a < b and b < c'")
        self.fail(f"{_shown(word)} is out of place, allowed 'and', 'or' or the end")

    def open(self) -> None:
        self.depth += 1
        if self.depth > MAX_DEPTH:
            self.fail(f"brackets deeper than {MAX_DEPTH}, allowed {MAX_DEPTH}")

    def close(self) -> None:
        self.expect(")")
        self.depth -= 1

    # -- conditions --------------------------------------------------------------

    def condition(self) -> Condition:
        parts = [self.part()]
        joined = self.word.text
        if joined not in ("and", "or"):
            return parts[0]
        while self.take(joined):
            parts.append(self.part())
        if self.word.text in ("and", "or"):
            self.fail("'and' and 'or' side by side, allowed only with brackets")
        return AllOf(tuple(parts)) if joined == "and" else AnyOf(tuple(parts))

    def part(self) -> Condition:
        if self.take("not"):
            self.open()
            inner = self.part()
            self.depth -= 1
            return Not(inner)
        if self.word.text == "(" and not self._opens_amount():
            self.at += 1
            self.open()
            inner = self.condition()
            self.close()
            return inner
        return self.test()

    def _opens_amount(self) -> bool:
        """Whether the bracket here holds an amount: what follows its end tells."""
        depth = 0
        for place, word in enumerate(self.words[self.at :], start=self.at + 1):
            depth += (word.text == "(") - (word.text == ")")
            if depth == 0:
                following = self.words[place].text
                return following in (*_COMPARISONS, "+", "-", "*", "/")
        return False

    def test(self) -> Condition:
        word = self.word
        if word.kind == "name" and word.text not in _KEYWORDS:
            fact = self.fact(word)
            if fact.kind != "number":
                self.at += 1
                return self._named_test(fact, word)
        left = self.amount()
        comparison = self.word
        if not self.take(*_COMPARISONS):
            self.fail(
                f"{_shown(comparison)} after a number, allowed {' '.join(_COMPARISONS)}",
            )
        right = self.amount()
        self._check_units(left, right, comparison)
        self._check_range(left, right)
        self._check_range(right, left)
        return Compare(left.node, cast("Comparison", comparison.text), right.node)

    def _named_test(self, fact: FactDefinition, word: _Word) -> Condition:
        if fact.kind == "yes_no":
            if self.word.text in (*_COMPARISONS, "in", "has"):
                self.fail(
                    f"{fact.name} is a yes or no, allowed '{fact.name}' or 'not {fact.name}'"
                )
            return Flag(fact.name)
        if fact.kind == "set":
            if not self.take("has"):
                self.fail(f"{fact.name} is a set, allowed '{fact.name} has NAME'", word)
            if self.take("any"):
                self.expect("of")
                return Holds(fact.name, self.names(fact))
            return Holds(fact.name, (self.name(fact),))
        if self.take("="):
            return OneOf(fact.name, (self.name(fact),))
        if self.take("!="):
            return Not(OneOf(fact.name, (self.name(fact),)))
        negated = self.take("not")
        if not self.take("in"):
            self.fail(
                f"{fact.name} is a choice, allowed '{fact.name} = NAME' or "
                f"'{fact.name} in (NAME, NAME)'",
                word,
            )
        chosen = OneOf(fact.name, self.names(fact))
        return Not(chosen) if negated else chosen

    def names(self, fact: FactDefinition) -> tuple[str, ...]:
        self.expect("(")
        names = [self.name(fact)]
        while self.take(","):
            word = self.word
            name = self.name(fact)
            if name in names:
                self.fail(f"{name!r} stands twice, allowed once", word)
            names.append(name)
        self.expect(")")
        return tuple(names)

    def name(self, fact: FactDefinition) -> str:
        word = self.word
        if word.text not in fact.choices:
            near = nearest(word.text, fact.choices) or fact.choices
            what = (
                f"{_shown(word)} is no choice of {fact.name}, allowed {', '.join(near)}"
            )
            self.fail(what)
        self.at += 1
        return word.text

    def fact(self, word: _Word) -> FactDefinition:
        fact = self.vocabulary.get(word.text)
        if fact is None:
            near = nearest(word.text, self.vocabulary)
            hint = ", ".join(near) if near else "the names in facts.csv"
            self.fail(f"unknown fact {word.text!r}, allowed {hint}", word)
        return fact

    # -- amounts -----------------------------------------------------------------

    def amount(self) -> _Measured:
        left = self.product()
        while self.word.text in ("+", "-") and self.word.kind == "sign":
            sign = self.word
            self.at += 1
            right = self.product()
            self._check_units(left, right, sign)
            unit = right.unit if left.unit is None else left.unit
            left = _join(sign, left, right, unit)
        return left

    def product(self) -> _Measured:
        left = self.factor()
        while self.word.text in ("*", "/") and self.word.kind == "sign":
            sign = self.word
            self.at += 1
            right = self.factor()
            power = 1
            if sign.text == "/":
                self._check_divisor(right)
                power = -1
            if left.unit is None and right.unit is None:
                unit = None
            else:
                unit = multiply_units(left.unit or (), right.unit or (), power)
            left = _join(sign, left, right, unit)
        return left

    def factor(self) -> _Measured:
        word = self.word
        if self.take("("):
            self.open()
            inner = self.amount()
            self.close()
            return inner
        if self.take("abs"):
            self.expect("(")
            self.open()
            inner = self.amount()
            self.close()
            return _Measured(Magnitude(inner.node), inner.unit, word.character)
        sign = -1.0 if self.take("-") else 1.0
        if self.word.kind == "number":
            value = sign * float(self.word.text)
            if abs(value) == float("inf"):
                self.fail(f"{self.word.text} is out of range, allowed a finite number")
            self.at += 1
            return _Measured(Number(value), None, word.character)
        if self.word.kind != "name" or self.word.text in _KEYWORDS or sign < 0:
            self.fail(
                f"{_shown(self.word)} is out of place, allowed a fact or a number"
            )
        fact = self.fact(self.word)
        if fact.kind != "number":
            what = f"{fact.name} is a {_spoken(fact.kind)}, allowed a number fact here"
            self.fail(what)
        self.at += 1
        return _Measured(Amount(fact.name), unit_powers(fact.unit), word.character)

    # -- checks ------------------------------------------------------------------

    def _check_units(self, left: _Measured, right: _Measured, sign: _Word) -> None:
        if left.unit is None and right.unit is None and sign.text in _COMPARISONS:
            self.fail("two numbers compared, allowed a fact on one side", sign)
        if left.unit is None or right.unit is None or left.unit == right.unit:
            return
        self.fail(
            f"{format_unit(left.unit)} {sign.text} {format_unit(right.unit)}: units "
            "differ, allowed facts of the same unit",
            sign,
        )

    def _check_range(self, side: _Measured, other: _Measured) -> None:
        """Refuse a threshold that its fact can never reach: mostly a wrong unit."""
        if not isinstance(side.node, Amount) or not isinstance(other.node, Number):
            return
        fact, value = self.vocabulary[side.node.fact], other.node.value
        if not fact.low <= value <= fact.high:
            raise ConditionError(
                f"{value:g} is out of range of {fact.name}, allowed {fact.low:g} to "
                f"{fact.high:g} {fact.unit}",
                other.character,
            )

    def _check_divisor(self, divisor: _Measured) -> None:
        match divisor.node:
            case Number(value):
                sound = value != 0.0
            case Amount(name):
                fact = self.vocabulary[name]
                sound = fact.low > 0.0 or fact.high < 0.0
            case _:
                sound = False
        if not sound:
            what = "divisor may be zero, allowed a number or a fact whose range leaves zero out"
            raise ConditionError(what, divisor.character)


def _join(
    sign: _Word, left: _Measured, right: _Measured, unit: UnitPowers | None
) -> _Measured:
    node = Arithmetic(cast("Operator", sign.text), left.node, right.node)
    return _Measured(node, unit, left.character)


def _shown(word: _Word) -> str:
    return "the end" if word.kind == "end" else repr(word.text)


def _spoken(kind: FactType) -> str:
    return kind.replace("_", " or ")
