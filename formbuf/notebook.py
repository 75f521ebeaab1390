"""Results in a notebook: a table in HTML, everything in it escaped."""

from __future__ import annotations

import html
import math
from collections.abc import Mapping, Sequence
from typing import Any

#: Rows that are shown before the rest is only counted.
MOST_ROWS = 60
STYLE = "text-align:{};padding:2px 8px"


def html_table(title: str, rows: Sequence[Mapping[str, Any]], note: str = "") -> str:
    """Return rows as an HTML table with a title and a note below.

    Parameters
    ----------
    title : str
    rows : sequence of mapping
        All with the same keys, which are the headers: units stand in them.
    note : str
        One sentence below the table.

    Examples
    --------
    >>> "&lt;b&gt;" in html_table("<b>", [{"ph": 6.0}])
    True
    """
    parts = [f"<p><strong>{html.escape(title)}</strong></p>"]
    if rows:
        headers = "".join(f"<th>{html.escape(name)}</th>" for name in rows[0])
        body = "".join(_row(row) for row in rows[:MOST_ROWS])
        parts.append(
            f"<table><thead><tr>{headers}</tr></thead><tbody>{body}</tbody></table>"
        )
    if len(rows) > MOST_ROWS:
        parts.append(f"<p>and {len(rows) - MOST_ROWS} more rows</p>")
    if note:
        parts.append(f"<p>{html.escape(note)}</p>")
    return "".join(parts)


def _row(row: Mapping[str, Any]) -> str:
    cells = []
    for value in row.values():
        side = "right" if _is_number(value) else "left"
        text = html.escape(shown(value))
        cells.append(f'<td style="{STYLE.format(side)}">{text}</td>')
    return f"<tr>{''.join(cells)}</tr>"


def shown(value: Any) -> str:
    """Return a value as a short text: four significant figures, a dash for none.

    Examples
    --------
    >>> shown(None), shown(0.123456), shown(12345.6), shown("a")
    ('-', '0.1235', '12350', 'a')
    """
    if value is None:
        return "-"
    if _is_number(value) and isinstance(value, float):
        return f"{float(f'{value:.4g}'):.6g}" if math.isfinite(value) else "-"
    return str(value)


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)
