"""Outputs as a user reads them: any width, pipes, numbers of nouns, one word for a thing."""

from __future__ import annotations

import itertools
import re
from pathlib import Path
from typing import Any

import pytest
from cli_runner import EXAMPLES, Done, formbuf
from rich.cells import cell_len

from formbuf import load_library, read_brief, shortlist
from formbuf.cli.registry import COMMANDS
from formbuf.output import words as output_words
from formbuf.output.explain import merged_loads
from formbuf.output.figures import counted
from formbuf.output.knowledge_page import check_page
from formbuf.product.brief import brief_from_mapping
from formbuf.report import words as report_words

ANTIBODY, BULK = str(EXAMPLES / "antibody.toml"), str(EXAMPLES / "antibody_bulk.toml")
HISTIDINE = ("--system", "histidine_hydrochloride")
COMMAND_LINES = [
    ("shortlist", ANTIBODY),
    ("explain", ANTIBODY, "sodium_citrate"),
    ("freeze-thaw", BULK),
    ("predict", "--add", "sodium_acetate_trihydrate=20", "--add", "sucrose=10"),
    ("batch-sheet", ANTIBODY, *HISTIDINE, "--volume", "10"),
    ("challenge", str(EXAMPLES / "ampoule.toml"), "--system", "sodium_citrate"),
    ("dilute", ANTIBODY, *HISTIDINE, "--into", "sodium_chloride_0p9"),
    ("retentate", BULK, *HISTIDINE),
    ("brief", "check", str(EXAMPLES / "enzyme.toml")),
    ("knowledge", "list"),
    ("knowledge", "show", "systems"),
    ("knowledge", "sources", "goldberg_2002"),
    ("guide",),
]


@pytest.mark.parametrize(
    "width",
    [
        pytest.param(40, marks=pytest.mark.slow),
        80,
        pytest.param(120, marks=pytest.mark.slow),
    ],
)
@pytest.mark.parametrize("line", COMMAND_LINES, ids=" ".join)
def test_no_line_is_too_long_and_no_pipe_gets_codes(
    line: tuple[str, ...], width: int
) -> None:
    done = formbuf(*line, columns=width)
    assert done.code == 0, done.err
    assert "\x1b" not in done.out
    assert "\u2026" not in done.out  # what is cropped would end so
    assert max(cell_len(one) for one in done.out.splitlines()) <= width


def _broken_words(done: Done, whole: str) -> list[str]:
    """Words at ends of lines that the widest output does not know."""
    known = set(re.findall(r"[a-z]{4,}", whole.casefold()))
    pieces = re.findall(r"[a-z]{4,}$", done.out.casefold(), re.MULTILINE)
    return sorted({piece for piece in pieces if piece not in known})


@pytest.mark.slow
@pytest.mark.parametrize("line", COMMAND_LINES, ids=" ".join)
def test_words_stay_whole_on_forty_columns(line: tuple[str, ...]) -> None:
    """Each word that ends a line is a word of the same output in Markdown."""
    form = ("--format", "markdown") if line != ("guide",) else ()
    whole = formbuf(*line, *form, columns=500).out
    assert _broken_words(formbuf(*line, columns=40), whole) == []


@pytest.mark.slow
@pytest.mark.parametrize("line", COMMAND_LINES[:8], ids=" ".join)
def test_every_column_has_a_header(line: tuple[str, ...]) -> None:
    done = formbuf(*line, "--format", "markdown")
    assert done.code == 0, done.err
    heads = [
        text
        for text, rule in _pairs(done.out)
        if set(rule) <= set("|-: ") and "---" in rule
    ]
    assert heads
    for head in heads:
        assert all(cell.strip() for cell in head.strip("|").split("|")), head


def _pairs(text: str) -> list[tuple[str, str]]:
    lines = text.splitlines()
    return list(itertools.pairwise(lines))


# -- numbers of nouns ---------------------------------------------------------------


def test_counts_agree_with_their_nouns(tmp_path: Path) -> None:
    assert counted(1, "row") == "1 row"
    library = load_library()
    (_, said, _) = check_page(library, ["one fault"], 1, 1).blocks()
    assert getattr(said, "text", "") == "1 table with 1 row: 1 fault."
    done = formbuf("knowledge", "show", "associations")
    assert " 1 rows" not in done.out
    scan = formbuf("scan", ANTIBODY, "--over", "target_ph=6", "-o", str(tmp_path / "a"))
    assert "1 point." in scan.err


@pytest.mark.slow
@pytest.mark.parametrize("line", COMMAND_LINES[:10], ids=" ".join)
def test_one_is_never_followed_by_a_plural(line: tuple[str, ...]) -> None:
    """Units and names after a 1 aside, no counted noun is in the plural."""
    nouns = "systems rows draws tables faults points states cases groups candidates"
    pattern = (
        rf"(?<![\d.])1 ({'|'.join([*nouns.split(), 'rules', 'places', 'values'])})\b"
    )
    done = formbuf(*line)
    assert done.code == 0, done.err
    assert not re.search(pattern, done.out)


# -- one word for a thing -----------------------------------------------------------


def test_criteria_have_one_name_in_terminal_and_report() -> None:
    for key, name in report_words.CRITERIA.items():
        assert output_words.criterion_name(key) == name


@pytest.mark.parametrize("name", COMMANDS)
def test_arguments_are_bracketed_once(name: str) -> None:
    usage = formbuf(name, "--help").out.splitlines()[0]
    assert "[[" not in usage
    assert usage.startswith(f"Usage: formbuf {name}")


# -- loads told once ----------------------------------------------------------------

PRODUCT: dict[str, Any] = {
    "product": {"route": "subcutaneous"},
    "ph": {"target": 6.0},
    "container": {"type": "plastic_syringe", "gas_permeable": False},
}


def test_one_note_on_acid_and_base_is_printed_once() -> None:
    result = shortlist(read_brief(ANTIBODY), load_library())
    acid, base, glass = result.loads.items
    both, alone = merged_loads(result.loads.items)
    assert both.name == "acid and base over shelf life"
    assert both.acid_mmol_l == acid.acid_mmol_l
    assert both.base_mmol_l == base.base_mmol_l
    assert alone == glass
    shown = formbuf("explain", ANTIBODY, "sodium_citrate", "--format", "markdown").out
    assert shown.count(acid.reason) == 1


def test_two_notes_stay_two_rows() -> None:
    """Acid stated, base by default: each keeps its own reason."""
    loads = {"loads": {"acid_mmol_l": 0.1, "note": "measured"}}
    result = shortlist(brief_from_mapping(PRODUCT | loads), load_library())
    names = [item.name for item in merged_loads(result.loads.items)]
    assert names[:2] == ["acid over shelf life", "base over shelf life"]


# -- the report in Markdown ---------------------------------------------------------


def test_markdown_says_once_where_figures_are_and_describes_each(
    tmp_path: Path,
) -> None:
    path = tmp_path / "report.md"
    assert formbuf("rationale", ANTIBODY, "-o", str(path)).code == 0
    text = path.read_text(encoding="utf-8")
    assert text.count("> Drawing: in the HTML and Word forms of this report only;") == 1
    captions = re.findall(r"^\*\*Figure \d+\.\*\* .+$", text, re.MULTILINE)
    assert len(captions) >= 4
    for caption in captions:
        below = text.partition(caption)[2].lstrip("\n").splitlines()[0]
        assert below.startswith("> Drawing: ")
        assert "tables of this section" in below or "table above" in below
    row = "| acid and base over shelf life | 0.2 | 0.3 |"
    assert row in text
