"""The forms a report can be written in."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path
from typing import Any, Literal

from formbuf.errors import UsageError, nearest
from formbuf.report.content import Document

Form = Literal["html", "docx", "markdown", "json"]
#: Form meant by the ending of a file.
ENDINGS: Mapping[str, Form] = {
    ".html": "html",
    ".htm": "html",
    ".docx": "docx",
    ".md": "markdown",
    ".markdown": "markdown",
    ".json": "json",
}
INSTALL = "Install what reports need: pip install 'formbuf[report]'"


def form_of(path: str) -> Form:
    """Return the form that a file name asks for.

    Raises
    ------
    UsageError
        The name is empty or has another ending.
    """
    if not path.strip():
        msg = "--output: the file name is empty, allowed a file"
        raise UsageError(msg)
    ending = Path(path).suffix.lower()
    form = ENDINGS.get(ending)
    if form is None:
        shown = repr(ending) if ending else "no ending"
        near = nearest(ending, (".html", ".docx", ".md", ".json"), 1)
        hint = f"Did you mean {near[0]}?" if near else ""
        msg = f"--output: {path} has {shown}, allowed .html, .docx, .md or .json"
        raise UsageError(msg, hint=hint)
    return form


def write_form(document: Document, data: Mapping[str, Any], form: Form) -> bytes:
    """Return a report in one form.

    Parameters
    ----------
    document : Document
    data : mapping
        The result that the document was made of.
    form : {"html", "docx", "markdown", "json"}

    Raises
    ------
    UsageError
        Where a package that the form needs is not installed.
    """
    if form == "json":
        from formbuf.output.writers import json_text

        return json_text(data).encode("utf-8")
    if form == "markdown":
        from formbuf.report.write_markdown import to_markdown

        return to_markdown(document).encode("utf-8")
    try:
        if form == "html":
            from formbuf.report.write_html import to_html

            return to_html(document).encode("utf-8")
        from formbuf.report.write_docx import to_docx

        return to_docx(document)
    except ModuleNotFoundError as error:
        if error.name is None or error.name.partition(".")[0] not in (
            "matplotlib",
            "docx",
        ):
            raise
        msg = f"the {form} form needs the package {error.name}, which is not installed"
        raise UsageError(msg, hint=INSTALL) from error
