"""A report in which every free text is hostile."""

from __future__ import annotations

import datetime as dt
import functools
from typing import Any

from report_support import Report, report_of

from formbuf.report.assemble import document

TURNED = "\u202e" + "txt.exe" + "\u202c"
HOSTILE = {
    "tags": "</title></style></p><script>alert(1)</script><img src=x onerror=alert(2)>",
    "attributes": '" onmouseover="alert(3)" x=\'',
    "markdown": "](javascript:alert(4)) ![x](http://e.example/a.png) <b>b</b> `c` **d** | e",
    "setext": "Title\n=====\n\n# heading\n\n- item\n\n1. first\n\n---\n\n> quote\n\n    code",
    "links": "http://e.example www.e.example me@e.example [1]: http://e.example",
    "formula": '=HYPERLINK("http://e.example","x")',
    "at": "@SUM(1+1)*cmd|' /C calc'!A0",
    "plus": "+1+1",
    "minus": "-2+3+cmd|' /C calc'!A0",
    "turned": f"safe {TURNED} \u2066isolate\u2069 \u200bhidden\ufeff",
    "emoji": "\U0001f9ea \U0001f469\u200d\U0001f52c \u0627\u0644\u0639\u0631\u0628\u064a\u0629 \u65e5\u672c",
    "dollars": "$x^2$ \\frac{1}{2} {{ 7*7 }} {% raw %} %s %n {0}",
    "entities": "&lt;script&gt; &#60;b&#62; &amp; &nbsp;",
    "field": "{ DDEAUTO c:\\\\windows\\\\calc.exe } \\o \\h",
    "path": "../../etc/passwd C:\\windows /dev/null ~",
    "css": '"; } body { display: none } @page { size: 1mm } /*',
}
LONG = "long " + "x" * 10_000


TOKEN = "Harmless"


@functools.cache
def tame() -> Report:
    """A report with the token wherever a brief takes free text."""
    return report_of(brief(TOKEN))


@functools.cache
def hostile(kind: str) -> Report:
    """The same report with a hostile text in place of every token.

    The brief itself refuses line ends, turning marks and long texts; here they come
    through all the same, as they might by way of a table or an old result. Titles of
    rules, names and references hold them too.
    """
    text = LONG if kind == "long" else HOSTILE[kind]
    data = _with(tame().data, text)
    more = data["rationale"]
    for rule in more["rules"].values():
        rule["title"] = text
    for name in more["names"]["components"]:
        more["names"]["components"][name] = text
    for source in more["sources"].values():
        source["text"] = text
    return Report(data, document(data))


def _with(value: Any, text: str) -> Any:
    """Plain data with another text for the token, keys included."""
    if isinstance(value, dict):
        return {k.replace(TOKEN, text): _with(v, text) for k, v in value.items()}
    if isinstance(value, list):
        return [_with(item, text) for item in value]
    return value.replace(TOKEN, text) if isinstance(value, str) else value


def brief(text: str) -> dict[str, Any]:
    """A brief with a text wherever a brief takes free text."""
    return {
        "title": text,
        "product": {"name": text, "version": text, "route": "subcutaneous"},
        "ph": {"target": 6.0},
        "storage": [
            {"kind": "storage", "temperature_c": 5.0},
            {"kind": "storage", "temperature_c": -20.0, "state": "frozen"},
        ],
        "loads": {"acid_mmol_l": 0.2, "base_mmol_l": 0.2, "note": text},
        "drug": {"kind": "antibody", "name": text},
        "candidate": [
            {
                "name": text,
                "system": "histidine_hydrochloride",
                "concentration_mmol_l": 20.0,
            }
        ],
        "override": [
            {
                "rule": "R065",
                "reason": f"{text} and more",
                "name": text,
                "date": dt.date(2026, 1, 5),
            }
        ],
    }
