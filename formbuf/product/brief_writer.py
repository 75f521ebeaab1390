"""Write the data of a brief as TOML with comments that a person can follow."""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from typing import Any, TypeAlias

from formbuf.product.brief_model import Brief

OpenKeys: TypeAlias = Mapping[str, tuple[str, str]]
#: Comment above each table that is written.
TABLE_COMMENTS: Mapping[str, str] = {
    "product": "What the product is and where it goes.",
    "ph": "pH aimed at and its window, as measured at 25 C unless said otherwise.",
    "storage": "A temperature it meets: kind is storage, use, accelerated or process.",
    "dose": "How much the patient gets, and how often.",
    "loads": "Acid and base to be carried over the shelf life, mmol/L.",
    "container": "What it is filled into.",
    "tonicity": "Osmolality and what fills it up.",
    "drug": "The drug and what of it binds protons.",
    "excipient": "A further solute and its amount.",
    "facts": "Answers that rules test; see `formbuf knowledge show facts`.",
}


def brief_toml(
    data: Mapping[str, Any],
    *,
    head: Iterable[str] = (),
    open_keys: OpenKeys | None = None,
) -> str:
    """Return the text of a brief file.

    Parameters
    ----------
    data : mapping
        As `formbuf.product.brief.brief_from_mapping` takes it.
    head : iterable of str
        Comment lines on top.
    open_keys : mapping of str to (str, str)
        Keys that were left open, ``table.key``: how the line begins, and the question
        behind it; they are written as comments.
    """
    asked = dict(open_keys or {})
    lines = [f"# {line}".rstrip() for line in head]
    tables = [
        name
        for name in Brief.model_fields
        if isinstance(data.get(name), Mapping) or _is_tables(data.get(name))
    ]
    plain = [name for name in Brief.model_fields if name in data and name not in tables]
    lines += [""] if lines else []
    for name in plain:
        lines.append(_line(name, data[name]))
    lines += _open(asked, "")
    for name in Brief.model_fields:
        here = _open(asked, name)
        if name in tables:
            lines += _table(name, data[name], here)
        elif here:
            lines += ["", *_heading(name, commented=True), *here]
    return "\n".join(lines).strip("\n") + "\n"


def _is_tables(value: Any) -> bool:
    return (
        isinstance(value, list)
        and bool(value)
        and all(isinstance(item, Mapping) for item in value)
    )


def _table(name: str, value: Any, left_open: list[str]) -> list[str]:
    entries = [value] if isinstance(value, Mapping) else value
    double = not isinstance(value, Mapping)
    lines: list[str] = []
    for place, entry in enumerate(entries):
        lines.append("")
        if place == 0:
            lines += _heading(name, commented=False)
        lines.append(f"[[{name}]]" if double else f"[{name}]")
        nested = [key for key, item in entry.items() if _is_tables(item)]
        for key, item in entry.items():
            if key not in nested:
                lines.append(_line(key, item))
        if place == len(entries) - 1:
            lines += left_open
        for key in nested:
            for item in entry[key]:
                lines += ["", f"[[{name}.{key}]]"]
                lines += [_line(k, v) for k, v in item.items()]
    return lines


def _heading(name: str, *, commented: bool) -> list[str]:
    comment = TABLE_COMMENTS.get(name)
    lines = [f"# {comment}"] if comment else []
    return [*lines, f"# [{name}]"] if commented else lines


def _open(asked: OpenKeys, table: str) -> list[str]:
    """Return the open keys of a table as comments; those of no table for an empty name."""
    return [
        f"# {line}   # open: {question}"
        for key, (line, question) in asked.items()
        if key.rpartition(".")[0] == table
    ]


def _line(key: str, value: Any) -> str:
    return f"{key} = {toml_value(value)}"


def toml_value(value: Any) -> str:
    r"""Return a value as TOML.

    Examples
    --------
    >>> toml_value(True), toml_value(6.0), toml_value(["a", 5]), toml_value('a "b"')
    ('true', '6.0', '["a", 5]', '"a \\"b\\""')
    """
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return repr(value)
    if isinstance(value, list | tuple):
        return f"[{', '.join(toml_value(item) for item in value)}]"
    return json.dumps(str(value), ensure_ascii=False).replace("\x7f", "\\u007F")
