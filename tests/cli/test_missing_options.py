"""Every command with nothing, with half of its options, and with options at odds: exit 2."""

from __future__ import annotations

import pytest
from cli_runner import EXAMPLES, formbuf

from formbuf.cli.registry import COMMANDS

ANTIBODY = str(EXAMPLES / "antibody.toml")
QUICK = ("--system", "sodium_phosphate", "--concentration", "50", "--ph", "7.4")
#: Commands that do something sensible with nothing: the list of topics, all checks.
WHOLE = {"guide", "qualify"}
BENCH = ("batch-sheet", "challenge", "retentate", "freeze-thaw")
ALL_THREE = "no brief, and --system, --concentration and --ph are not given"


@pytest.mark.parametrize("name", [name for name in COMMANDS if name not in WHOLE])
def test_nothing_is_a_matter_of_usage(name: str) -> None:
    done = formbuf(name)
    assert done.code == 2, done.err
    assert done.out == ""
    assert done.err


@pytest.mark.parametrize("name", BENCH)
def test_all_that_lacks_is_named_at_once(name: str) -> None:
    said = formbuf(name).one_error()
    assert ALL_THREE in said
    assert "--system, --concentration and --ph" in said.partition("Hint: ")[2]


HALF = [
    (("shortlist",), "--ph and --route are not given"),
    (("shortlist", "--ph", "7"), "--route is not given"),
    (("shortlist", "--route", "subcutaneous"), "--ph is not given"),
    (("explain", ANTIBODY), "SYSTEM"),
    (("scan", ANTIBODY), "--over is not given"),
    (("changes", "old.json"), "NEW.json"),
    (("predict", "--at", "25"), "--add is not given"),
    (("dilute", *QUICK), "--into is not given"),
    (("dilute", "--into", "glucose_5"), ALL_THREE),
    (("batch-sheet", ANTIBODY), "--system is not given"),
    (("batch-sheet", *QUICK), "neither --volume nor --mass is given"),
    (("challenge", *QUICK[:2]), "--concentration and --ph are not given"),
    (("challenge", *QUICK[2:]), "--system is not given"),
    (
        ("retentate", *QUICK),
        "--charge, --protein-mg-ml and --molar-mass are not given",
    ),
    (("retentate", *QUICK, "--charge", "5"), "--protein-mg-ml and --molar-mass are"),
    (("freeze-thaw", *QUICK[:4]), "--ph is not given"),
    (("freeze-thaw", *QUICK[2:]), "--system is not given"),
    (("knowledge", "show"), "TABLE"),
    (("brief", "check"), "BRIEF"),
]


@pytest.mark.parametrize(
    ("args", "words"), HALF, ids=lambda x: " ".join(x) if isinstance(x, tuple) else ""
)
def test_half_of_the_options(args: tuple[str, ...], words: str) -> None:
    done = formbuf(*args)
    assert done.code == 2, done.err
    assert words in done.one_error()


AT_ODDS = [
    ("shortlist", ANTIBODY, "--ph", "7"),
    ("shortlist", ANTIBODY, "--json", "--format", "csv"),
    ("shortlist", ANTIBODY, "--seed", "3"),
    ("freeze-thaw", ANTIBODY, "--system", "sodium_phosphate"),
    ("batch-sheet", ANTIBODY, *QUICK, "--volume", "1"),
    ("batch-sheet", *QUICK, "--volume", "1", "--mass", "1"),
    ("batch-sheet", *QUICK, "--volume", "1", "--osmolality", "300"),
    ("challenge", *QUICK, "--tonicity-agent", "sucrose"),
    ("retentate", ANTIBODY, *QUICK[:2], "--charge", "20"),
    ("scan", ANTIBODY, "--over", "target_ph=6", "--system", "tris", "--top", "2"),
    ("predict", "--add", "sucrose=1", "--basis", "molal", "--amounts", "mmol/L"),
]


@pytest.mark.parametrize("args", AT_ODDS, ids=" ".join)
def test_options_at_odds(args: tuple[str, ...]) -> None:
    done = formbuf(*args)
    assert done.code == 2, done.err
    said = done.one_error()
    assert any(
        word in said for word in ("beside", "without", "contradicts", "not given")
    )


def test_no_message_mistakes_the_number() -> None:
    """One option is, two are: over all that lacks above."""
    for args, _ in HALF:
        said = formbuf(*args).err
        line = said.partition(" not given")[0]
        names = line.count("--")
        if line != said and "no brief, and" in line:
            assert line.endswith(" is" if names == 1 else " are"), said
