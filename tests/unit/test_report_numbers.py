"""Every number of a report is in its JSON result, and every source in its list."""

from __future__ import annotations

import re
from collections.abc import Iterator
from decimal import Decimal
from typing import Any

import pytest
from report_support import NAMES, Page, Report, example

from formbuf.report.content import clean
from formbuf.report.reading import resolve

#: Numbers that the wording itself may hold: numbering, dossier places, equations,
#: limits of the models, and reference conditions. Everything else has to be read
#: from the result.
WORDING = (
    r"Table \d+\.?",
    r"Figure \d+\.?",
    r"(section|annex) [0-9A-Z]+(\.\d+)?",
    r"3\.2\.P\.\d(\.\d)*",
    r"\[\d+(, \d+)*\]",
    r"SHA-256",
    r"ICH Q1A\(R2\)",
    r"ln K\(T\) = ln K\(T0\) − .* T0 = 298\.15 K",
    r"log10|ln 10|1 \+ 1\.5 √I|γ = 1 |\(1 − Σ",
    r"zero ionic strength|at 25 °C",
    r"negligible below 0\.3, moderate to 1, severe",
    r"up to 0\.5 mol/kg|below 0 °C|above 77 °C|below −20 °C|up to 7 %",
    r"pH 7\.4|Central 90 %",
    r"[a-z_]+\[\d+\]",  # place of an entry in a list of the brief
    r"1 % more|2 K (warmer|too high)",  # mistakes of the batch sheet
    r"_0p9",
)
NUMBER = re.compile(r"\d")


@pytest.fixture(
    params=[
        NAMES[0],
        *(
            pytest.param(n, marks=pytest.mark.slow)
            for n in (*NAMES[1:], "enzyme drawn")
        ),
    ]
)
def report(request: pytest.FixtureRequest) -> Report:
    name, _, drawn = str(request.param).partition(" ")
    return example(name, 200 if drawn else 0)


def _loose(html: str) -> Iterator[str]:
    """Pieces of wording that hold a digit after what wording may hold is taken."""
    body = re.sub(r"^\s*\d+(\.\d+)? ", "", html)
    text = re.sub("|".join(f"(?:{p})" for p in WORDING), " ", body)
    for found in NUMBER.finditer(text):
        start = max(found.start() - 40, 0)
        yield " ".join(text[start : found.end() + 20].split())


def _body(html: str) -> str:
    """The page without contents and drawings; headings without their numbers."""
    html = re.sub(r"<nav.*?</nav>", "", html, flags=re.DOTALL)
    html = re.sub(r"<svg.*?</svg>", "", html, flags=re.DOTALL)
    html = re.sub(r'<a href="#ref-\d+">(\d+)</a>', r"\1", html)
    return re.sub(r"(<h[23][^>]*>)(Annex [A-Z]\.|[A-Z]\.\d+|\d+(\.\d+)?) ", r"\1", html)


def test_every_number_is_read_from_the_result(report: Report) -> None:
    page = Page(_body(report.html))
    values = page.all("data")
    assert len(values) > 300
    for element in values:
        path = element.attributes["title"]
        number = resolve(report.data, path)
        assert not isinstance(number, bool)
        assert isinstance(number, int | float), path
        assert float(element.attributes["value"]) == number, path
        _check_digits(element.text, float(number), path)


def _check_digits(text: str, number: float, path: str) -> None:
    """The digits shown are the number, rounded to the last digit shown."""
    found = re.match(r"^([+−]?)(\d+(?:\.\d+)?)(?: × 10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+))?(.*)$", text)
    assert found is not None, (text, path)
    sign, digits, power, unit = found.groups()
    shown = Decimal(digits)
    if power:
        shown = shown.scaleb(
            int(power.translate(str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")))
        )
    if sign == "−":
        shown = -shown
    wanted = Decimal(repr(number))
    # a share may stand as a percentage whose sign is in the heading
    scales = (100,) if unit.strip() == "%" else (1, 100) if 0 <= number <= 1 else (1,)
    exponent = shown.as_tuple().exponent
    assert isinstance(exponent, int)
    if "." not in digits and not power and abs(shown) >= 1000:
        exponent = max(exponent, len(str(abs(int(shown)))) - 3)  # three digits
    step = Decimal(1).scaleb(exponent)
    for scale in scales:
        if abs(shown - wanted * scale) <= step / 2 + Decimal("1e-12"):
            return
    pytest.fail(f"{path}: shows {text}, holds {number}")


def test_every_text_is_quoted_from_the_result(report: Report) -> None:
    quotes = Page(report.html).all("bdi")
    assert len(quotes) > 200
    for element in quotes:
        path = element.attributes["title"]
        held = resolve(report.data, path)
        shown = _typed(element.text)
        assert shown, path
        assert shown in _typed(_whole(held)), (path, element.text, held)


def _typed(text: str) -> str:
    """A text as typed, in small letters: without the signs that a report sets."""
    return text.replace("°C", "C").replace("\u2212", "-").casefold()


def _whole(held: Any) -> str:
    if isinstance(held, list):
        return ", ".join(str(x) for x in held)
    return clean(str(held))


def test_the_wording_holds_no_number_of_its_own(report: Report) -> None:
    page = Page(_body(report.html))
    foot = f"formbuf {report.data['formbuf_version']}, knowledge {report.data['knowledge']['version']}"
    text = "".join(page.loose)
    assert text.count(foot) == 1
    found = list(_loose(text.replace(foot, "")))
    assert not found, found[:10]


@pytest.mark.parametrize(
    ("planted", "test"),
    [
        ("<p>It has 5.3 mmol/L.</p>", test_the_wording_holds_no_number_of_its_own),
        (
            '<p><data value="1.5" title="/brief/ph/target">1.5</data></p>',
            test_every_number_is_read_from_the_result,
        ),
        (
            '<p><bdi title="/brief/product/name">another</bdi></p>',
            test_every_text_is_quoted_from_the_result,
        ),
    ],
    ids=["typed", "wrong", "misquoted"],
)
def test_a_planted_number_is_seen(planted: str, test: Any) -> None:
    good = example("antibody")
    bad = Report(good.data, good.document)
    bad.__dict__["html"] = good.html.replace("</main>", f"{planted}</main>")
    with pytest.raises((AssertionError, pytest.fail.Exception)):
        test(bad)


def test_sources_cited_and_listed_are_the_same(report: Report) -> None:
    page = Page(report.html)
    listed = {
        e.attributes["id"].removeprefix("ref-")
        for e in page.all("li")
        if e.attributes.get("id", "").startswith("ref-")
    }
    cited = {
        e.attributes["href"].removeprefix("#ref-")
        for e in page.all("a")
        if e.attributes["href"].startswith("#ref-")
    }
    assert listed == cited
    assert listed == {str(n) for n in range(1, len(listed) + 1)}
    written = {
        number
        for found in re.findall(r"\[(\d+(?:, \d+)*)\]", "".join(page.loose))
        for number in found.split(", ")
    }
    assert written == listed


def test_every_source_named_by_the_result_of_the_lead_is_known(report: Report) -> None:
    lead = next(
        c for c in report.data["candidates"] if c["system"] == report.data["lead"]
    )
    known = report.data["rationale"]["sources"]
    for name, criterion in lead["criteria"].items():
        for source in criterion["sources"]:
            assert source in known, (name, source)
    for row in lead["exposures"]:
        if row["limit_source"]:
            assert row["limit_source"] in known


@pytest.mark.parametrize("name", NAMES)
def test_references_bear_dois_where_known(name: str) -> None:
    report = example(name)
    dois = [r.doi for r in report.document.references if r.doi]
    assert len(dois) >= len(report.document.references) // 3
    assert all(re.match(r"^10\.\d{4,9}/\S+$", doi) for doi in dois)


def test_every_work_behind_the_method_is_in_the_table_of_sources() -> None:
    from formbuf.library import load_library
    from formbuf.report.data import METHOD_SOURCES

    known = load_library().sources
    assert [name for name in METHOD_SOURCES if name not in known] == []
