"""Numbers in sentences: no exponent where a person would write none."""

from __future__ import annotations

import pytest

from formbuf.advice.wording import percent, plain


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
