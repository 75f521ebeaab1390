"""Numbers as text, layout for the terminal, Markdown."""

from __future__ import annotations

import doctest
import io
from collections import Counter

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from rich.cells import cell_len

from formbuf.output import figures, leaves, markdown, tables, writers
from formbuf.output.figures import decimals, plainly, significant
from formbuf.output.page import (
    Block,
    Column,
    Grid,
    Heading,
    Items,
    Page,
    Paragraph,
    number,
    section,
)
from formbuf.output.tables import columns_shown, to_text
from formbuf.output.writers import render

BLOCKS: list[Block] = [
    Heading("Buffers for one product", 1),
    Paragraph("Lead: 5 mmol/L histidine hydrochloride."),
    Grid(
        (
            number("Rank", short="#"),
            Column("System"),
            number("mmol/L"),
            number("Desirability", short="Desira-\nbility"),
            Column("Limited by", keep=True),
            number("Required,\nmmol/L", 120),
        ),
        (
            ("1", "histidine hydrochloride", "5.00", "0.815", "precedent", "4.42"),
            ("", "  or histidine acetate", "12.0", "0.70", "temperature drift", "4.2"),
            (
                "2",
                "glycine with hydrochloric acid or sodium hydroxide",
                "150",
                "0.1",
                "capacity",
                "140",
            ),
        ),
    ),
    Heading("Warnings"),
    Items(("one", "two " * 30)),
]
AT_60 = """\
Buffers for one product
Lead: 5 mmol/L histidine hydrochloride.

                                  Desira-
#  System                 mmol/L   bility  Limited by
-- ---------------------- ------- -------- -----------------
1  histidine                5.00    0.815  precedent
   hydrochloride
     or histidine           12.0     0.70  temperature drift
     acetate
2  glycine with              150      0.1  capacity
   hydrochloric acid or
   sodium hydroxide

Warnings
* one
* two two two two two two two two two two two two two two
  two two two two two two two two two two two two two two
  two two
"""
AT_120 = """\
Buffers for one product
Lead: 5 mmol/L histidine hydrochloride.

                                                                                                   Required,
Rank  System                                              mmol/L  Desirability  Limited by            mmol/L
----- --------------------------------------------------- ------- ------------- ------------------ ---------
   1  histidine hydrochloride                               5.00         0.815  precedent               4.42
        or histidine acetate                                12.0          0.70  temperature drift        4.2
   2  glycine with hydrochloric acid or sodium hydroxide     150           0.1  capacity                 140

Warnings
* one
* two two two two two two two two two two two two two two two two two two two two two two two two two two two two two
  two
"""


@pytest.mark.parametrize("module", [figures, leaves, markdown, writers])
def test_examples_in_the_docstrings(module: object) -> None:
    found = doctest.testmod(module)  # type: ignore[arg-type]
    assert found.attempted > 0
    assert found.failed == 0


@pytest.mark.parametrize(
    ("value", "count", "text"),
    [
        (6.0, 2, "6.00"),
        (5.996, 2, "6.00"),
        (-0.004, 2, "0.00"),
        (0.0, 2, "0.00"),
        (-0.04, 2, "-0.04"),
        (None, 2, "-"),
        (float("nan"), 2, "-"),
        (float("inf"), 0, "-"),
        (299.6, 0, "300"),
    ],
)
def test_decimals(value: float | None, count: int, text: str) -> None:
    assert decimals(value, count) == text


def test_signs_stand_only_before_what_is_not_zero() -> None:
    shown = [decimals(v, 2, sign=True) for v in (0.35, -0.35, 0.0, -0.001, 0.001)]
    assert shown == ["+0.35", "-0.35", "0.00", "0.00", "0.00"]


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (5.0, "5.00"),
        (9.999, "10.0"),
        (99.96, "100"),
        (1234.5, "1230"),
        (0.0123456, "0.0123"),
        (0.00009999, "0.000100"),
        (1.23e-7, "1.23e-07"),
        (4.2e9, "4.20e+09"),
        (-24.68, "-24.7"),
        (0.0, "0"),
        (None, "-"),
    ],
)
def test_significant_digits(value: float | None, text: str) -> None:
    assert significant(value) == text


@given(st.floats(min_value=1e-9, max_value=1e12))
def test_significant_digits_lose_less_than_half_a_digit(value: float) -> None:
    assert float(significant(value, 3)) == pytest.approx(value, rel=0.00501)


def test_plain_words() -> None:
    values = [True, False, None, "", 5.0, 0.1 + 0.2, ("a", 1), [], "x"]
    expected = ["yes", "no", "-", "-", "5", "0.3", "a, 1", "-", "x"]
    assert [plainly(value) for value in values] == expected


def test_a_narrow_terminal_shows_what_matters() -> None:
    assert to_text(BLOCKS, 60) == AT_60


def test_a_very_narrow_terminal_gets_a_line_for_each_value() -> None:
    """Where words would be broken side by side, headers stand before their values."""
    lines = to_text(BLOCKS, 40).splitlines()
    start = lines.index("Rank: 1")
    assert lines[start : start + 12] == [
        "Rank: 1",
        "  System: histidine hydrochloride",
        "  mmol/L: 5.00",
        "  Desirability: 0.815",
        "  Limited by: precedent",
        "",
        "System: or histidine acetate",
        "  mmol/L: 12.0",
        "  Desirability: 0.70",
        "  Limited by: temperature drift",
        "",
        "Rank: 2",
    ]
    assert max(map(len, lines)) <= 40


def test_long_names_are_broken_behind_a_seam() -> None:
    name = "candidate[1].concentration_mmol_l"
    grid = Grid(
        (Column("Key"), Column("Before"), Column("Now")),
        ((name, "word " * 9, "word " * 9),),
    )
    lines = to_text([grid], 80).splitlines()[2:]
    assert lines[0].startswith("candidate[1].  ")
    assert lines[1].startswith("concentration_mmol_l  ")


def test_a_wide_terminal_shows_more() -> None:
    assert to_text(BLOCKS, 120) == AT_120


@pytest.mark.parametrize(
    "width", [1, 40, 41, 59, 60, 61, 70, 80, 100, 119, 120, 200, 500]
)
def test_no_line_is_longer_than_the_terminal(width: int) -> None:
    lines = to_text(BLOCKS, width).splitlines()
    assert max(map(len, lines)) <= max(width, tables.LEAST_WIDTH)
    assert all(line == line.rstrip() for line in lines)


_CELLS = st.text(max_size=40)
_GRIDS = st.integers(1, 5).flatmap(
    lambda n: st.builds(
        Grid,
        st.lists(
            st.builds(
                Column,
                st.text("abc,/ ", min_size=1, max_size=14),
                st.sampled_from(["left", "right"]),
                st.sampled_from([0, 0, 100, 120]),
                st.booleans(),
            ),
            min_size=n,
            max_size=n,
        ).map(tuple),
        st.lists(st.lists(_CELLS, min_size=n, max_size=n).map(tuple), max_size=5).map(
            tuple
        ),
    )
)


@given(_GRIDS, st.integers(40, 140))
def test_any_grid_fits_and_loses_no_letter(grid: Grid, width: int) -> None:
    lines = to_text([grid], width).splitlines()
    assert all(cell_len(line) <= width for line in lines)
    printed = "".join("".join(lines).split())
    for row in grid.rows:
        for i in columns_shown(grid, width):
            cell = "".join(tables.printable(row[i]).split())
            assert all(printed.count(c) >= cell.count(c) for c in set(cell))


def test_wide_characters_take_two_cells() -> None:
    grid = Grid((Column("Name"), number("x")), (("緩衝", "1"), ("abcd", "2")))
    assert to_text([grid], 60).splitlines()[2:] == ["緩衝  1", "abcd  2"]


def test_control_characters_never_reach_the_terminal() -> None:
    text = to_text([Paragraph("a\x1b[31mred\x07\nb")], 80)
    assert text == "a [31mred  b\n"


def test_a_grid_refuses_rows_of_another_length() -> None:
    with pytest.raises(ValueError, match="2 cells in a grid of 1"):
        Grid((Column("a"),), (("1", "2"),))


def test_sections_without_content_are_left_out() -> None:
    assert section("Empty", Items(()), Grid((Column("a"),), ()), None) == []
    assert section("Full", Items(("x",)), Paragraph(""))[0] == Heading("Full")


def test_bold_is_for_terminals_only(monkeypatch: pytest.MonkeyPatch) -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    monkeypatch.setattr(tables.os, "name", "posix")
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "xterm-256color")
    assert tables.can_be_bold(Terminal())
    assert not tables.can_be_bold(io.StringIO())
    for name, value in (("NO_COLOR", "1"), ("TERM", "dumb")):
        with monkeypatch.context() as patch:
            patch.setenv(name, value)
            assert not tables.can_be_bold(Terminal())


def test_bold_changes_no_letter() -> None:
    plain, bold = to_text(BLOCKS, 80), to_text(BLOCKS, 80, bold=True)
    assert bold != plain
    assert bold.replace("\x1b[1m", "").replace("\x1b[0m", "") == plain


def test_markdown_shows_every_column() -> None:
    page = Page(dict, list, lambda: BLOCKS)
    lines = render(page, "markdown").splitlines()
    assert lines[0] == "# Buffers for one product"
    heads = "| Rank | System | mmol/L | Desirability | Limited by | Required, mmol/L |"
    assert heads in lines
    assert "| ---: | --- | ---: | ---: | --- | ---: |" in lines
    assert "## Warnings" in lines
    assert "- one" in lines


def test_markdown_takes_no_text_for_markup() -> None:
    page = Page(
        dict,
        list,
        lambda: [
            Heading("a|b # c"),
            Paragraph("# no heading\nsecond line"),
            Items(("*x* [y](z) <b>",)),
            Grid((Column("a"),), (("1 | 2",), ("*",))),
        ],
    )
    text = render(page, "markdown")
    assert "\\# no heading second line" in text
    assert "- \\*x\\* \\[y\\](z) &lt;b>" in text
    assert "| 1 \\| 2 |" in text


@given(
    st.lists(
        st.tuples(*[st.text("abc de-(1)µ", max_size=60)] * 4), min_size=1, max_size=4
    ),
    st.integers(40, 130),
)
@settings(max_examples=150, deadline=None)
def test_no_text_of_a_table_is_lost(rows: list[tuple[str, ...]], width: int) -> None:
    columns = (number("mmol/L"), Column("Kept", keep=True), Column("A"), Column("B"))
    text = to_text([Grid(columns, tuple(rows))], width)
    assert max(len(line) for line in text.splitlines()) <= width
    letters = Counter(
        c for row in rows for cell in row for c in cell if not c.isspace()
    )
    lines = text.splitlines()
    rule = lines[1] if len(lines) > 1 else ""
    is_table = "-" in rule and set(rule) <= set(
        "- "
    )  # else each row stands on lines of its own
    printed = Counter(c for line in lines[2 if is_table else 0 :] for c in line)
    assert all(printed[c] >= n for c, n in letters.items() if c != "-")
