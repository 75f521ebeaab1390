"""Numbers in sentences: no exponent where a person would write none."""

from __future__ import annotations

import pytest

from formbuf.advice.wording import (
    bare_standing,
    criterion_name,
    lower_first,
    percent,
    plain,
    upper_first,
)


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (1000.0, "1000"),
        (999.96, "1000"),
        (3184.2, "3180"),
        (66.46, "66.5"),
        (5.0, "5"),
        (0.00123, "0.00123"),
        (0.0, "0"),
        (-12.34, "-12.3"),
        (2.5e7, "2.5e+07"),
    ],
)
def test_three_digits_without_exponent(value: float, text: str) -> None:
    """A ceiling of 1000 mmol/L once read 1e+03."""
    assert plain(value) == text


@pytest.mark.parametrize(
    ("share", "text"),
    [(0.074, "7.4 %"), (1.0, "100 %"), (0.0, "0 %"), (5e-11, "less than 0.01 %")],
)
def test_a_share_next_to_nothing_is_not_spelt_out(share: float, text: str) -> None:
    assert percent(share) == text


@pytest.mark.parametrize(
    ("share", "standing", "text"),
    [
        (None, "viable", "open"),
        (None, "not evaluable", "open"),
        (0.4, "viable", "not enough by itself"),
        (
            1.0,
            "back-up",
            "enough by calculation, to be confirmed by a titration",
        ),
        (None, "back-up", "no load to carry"),
        (2.0, "lead", "enough by its measured titration"),
    ],
)
def test_the_product_without_a_buffer_is_not_called_a_back_up(
    share: float | None, standing: str, text: str
) -> None:
    assert bare_standing(share, standing) == text


@pytest.mark.parametrize(
    ("sentence", "within"),
    [
        ("Rapid oxidation", "rapid oxidation"),
        ("A gel forms", "a gel forms"),
        ("N-terminal amine", "N-terminal amine"),
        ("Na2HPO4 crystallises", "Na2HPO4 crystallises"),
        ("CSF volume", "CSF volume"),
        ("Maillard browning", "Maillard browning"),
        ("pH falls", "pH falls"),
    ],
)
def test_a_sentence_goes_on_within_another(sentence: str, within: str) -> None:
    assert lower_first(sentence) == within


@pytest.mark.parametrize(
    ("phrase", "sentence"),
    [("acid leaves", "Acid leaves"), ("pH falls", "pH falls"), ("", "")],
)
def test_a_phrase_becomes_a_sentence(phrase: str, sentence: str) -> None:
    assert upper_first(phrase) == sentence


def test_criteria_have_one_name() -> None:
    assert criterion_name("frozen_drift") == "freezing drift"
    assert criterion_name("dose_burden") == "dose burden"
