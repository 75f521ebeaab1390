"""The guide and the README are true: their commands run and print what they show."""

from __future__ import annotations

import re
from itertools import pairwise
from pathlib import Path

import pytest
from cli_runner import ROOT, formbuf
from docs_runner import Command, commands, difference, prepare, printed

from formbuf.cli.guide import TOPICS, page, readable
from formbuf.cli.registry import COMMANDS

PAGES = {name: page(name) for name in TOPICS}
README = (ROOT / "README.md").read_text("utf-8")
DOCUMENTS = {**PAGES, "README.md": README}


@pytest.mark.slow
@pytest.mark.parametrize("name", DOCUMENTS)
def test_commands_print_what_the_page_shows(
    name: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """After a meant change run ``tests/tools/update_docs.py``."""
    monkeypatch.chdir(tmp_path)
    prepare(tmp_path)
    for command in commands(DOCUMENTS[name]):
        assert not difference(command.shown, printed(command)), command.line


def test_the_pages_show_commands() -> None:
    shown = [c.args[0] for text in DOCUMENTS.values() for c in commands(text)]
    assert len(shown) >= 15
    assert {"shortlist", "explain", "freeze-thaw", "rationale", "qualify"} <= set(shown)


def test_every_page_is_there_and_no_other() -> None:
    found = {p.stem for p in (ROOT / "formbuf" / "guide").glob("*.md")}
    assert found == set(TOPICS)


@pytest.mark.parametrize("name", TOPICS)
def test_a_page_is_short_and_readable(name: str) -> None:
    text = readable(PAGES[name])
    assert len(text.splitlines()) < 110
    prose = re.sub(r"```.*?```", "", PAGES[name], flags=re.DOTALL)
    assert max(len(line) for line in prose.splitlines()) <= 90
    done = formbuf("guide", name)
    assert (done.code, done.out) == (0, text)
    assert "```" not in done.out
    assert "**" not in done.out


def test_pages_lead_to_each_other() -> None:
    names = list(TOPICS)
    for name, following in pairwise(names):
        assert PAGES[name].rstrip().endswith(f"Next page: `formbuf guide {following}`.")


def test_without_a_topic_the_pages_are_listed() -> None:
    out = formbuf("guide").out
    assert all(name in out for name in TOPICS)


@pytest.mark.parametrize("asked", ["Getting Started", "getting_started", "OWN-DATA"])
def test_a_topic_as_people_write_it(asked: str) -> None:
    assert formbuf("guide", asked).code == 0


def test_an_unknown_topic() -> None:
    done = formbuf("guide", "frezing")
    assert done.code == 3
    assert "freezing" in done.one_error()


def test_a_page_goes_to_a_file_as_it_is(tmp_path: Path) -> None:
    place = tmp_path / "page.md"
    assert formbuf("guide", "model", "-o", str(place)).code == 0
    assert place.read_text("utf-8") == PAGES["model"]


@pytest.mark.parametrize("name", DOCUMENTS)
def test_commands_and_options_in_the_text_exist(name: str) -> None:
    for line in re.findall(r"`formbuf ([a-z][a-z-]+)[^`]*`", DOCUMENTS[name]):
        assert line in COMMANDS, line
    for words in re.findall(r"`formbuf ([a-z][^`]+)`", DOCUMENTS[name]):
        command, *rest = words.split()
        done = formbuf(command, "--help", columns=200)
        more = "".join(
            formbuf(command, r, "--help", columns=200).out
            for r in rest[:1]
            if r.isalpha() and r.islower()
        )
        for option in (r for r in rest if r.startswith("--")):
            assert option in done.out + more, f"{words}: {option}"


def test_the_runner_sees_a_difference() -> None:
    assert not difference(["a", "...", "c"], ["a", "b", "c"])
    assert not difference(["a", "..."], ["a", "b"])
    assert difference(["a", "c"], ["a", "b"])
    assert difference(["a"], ["a", "b"])
    assert difference(["...", "z"], ["a", "b"])
    assert difference(["b", "..."], ["a", "b"])
    assert commands("```console\n$ formbuf a \\\n    --b\nout\n```\n") == [
        Command("formbuf a --b", ["out"])
    ]
