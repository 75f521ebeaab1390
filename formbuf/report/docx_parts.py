"""Building blocks of a Word file: runs, fields, hyperlinks, tables, numbering."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

SPACE = "{http://www.w3.org/XML/1998/namespace}space"
#: Numbering that headings and annexes are bound to.
NUMBERING = (
    ("71", "decimal", "Heading1", "%1", "Heading2", "%1.%2"),
    ("72", "upperLetter", "Annex", "Annex %1.", "AnnexPart", "%1.%2"),
)
#: Twentieths of a point in a centimetre.
TWIPS_CM = 567.0


def element(tag: str, attributes: dict[str, str] | None = None, *children: Any) -> Any:
    """Return one XML element of WordprocessingML with its children."""
    from docx.oxml import OxmlElement
    from docx.oxml.ns import qn

    made = OxmlElement(tag)
    for name, value in (attributes or {}).items():
        made.set(qn(name), value)
    for child in children:
        if child is not None:
            made.append(child)
    return made


def run(text: str, *, bold: bool = False, style: str = "") -> Any:
    """Return a run of text."""
    properties = None
    if bold or style:
        properties = element(
            "w:rPr",
            None,
            element("w:rStyle", {"w:val": style}) if style else None,
            element("w:b") if bold else None,
        )
    words = element("w:t")
    words.text = text
    words.set(SPACE, "preserve")
    return element("w:r", None, properties, words)


def field(instruction: str, shown: str) -> list[Any]:
    """Return the runs of a field with the text it shows until it is updated."""
    code = element("w:instrText")
    code.text = f" {instruction} "
    code.set(SPACE, "preserve")
    return [
        element("w:r", None, element("w:fldChar", {"w:fldCharType": "begin"})),
        element("w:r", None, code),
        element("w:r", None, element("w:fldChar", {"w:fldCharType": "separate"})),
        run(shown),
        element("w:r", None, element("w:fldChar", {"w:fldCharType": "end"})),
    ]


def hyperlink(anchor: str, *runs: Any) -> Any:
    """Return a link to a bookmark."""
    return element("w:hyperlink", {"w:anchor": anchor, "w:history": "1"}, *runs)


def bookmark(name: str, number: int) -> tuple[Any, Any]:
    """Return the two ends of a bookmark."""
    return (
        element("w:bookmarkStart", {"w:id": str(number), "w:name": name}),
        element("w:bookmarkEnd", {"w:id": str(number)}),
    )


def paragraph(style: str, *children: Any, keep_next: bool = False) -> Any:
    """Return a paragraph of a style."""
    return element(
        "w:p",
        None,
        element(
            "w:pPr",
            None,
            element("w:pStyle", {"w:val": style}),
            element("w:keepNext") if keep_next else None,
        ),
        *children,
    )


def grid(
    heads: Sequence[Sequence[Any]],
    rows: Sequence[Sequence[Sequence[Any]]],
    widths: Sequence[float],
    right: Sequence[bool],
    total_cm: float,
) -> Any:
    """Return a table whose first row repeats on every page.

    Parameters
    ----------
    heads : sequence of runs
        One for each column.
    rows : sequence of rows
        Each a sequence of cells, each a sequence of runs.
    widths : sequence of float
        Relative.
    right : sequence of bool
        Whether a column stands right.
    total_cm : float
        Width of the table [cm].
    """
    share = total_cm * TWIPS_CM / sum(widths)
    twips = [round(width * share) for width in widths]
    table = element("w:tbl", None, _properties(sum(twips)), _columns(twips))
    table.append(_row(heads, twips, right, head=True))
    for row in rows:
        table.append(_row(row, twips, right, head=False))
    return table


def _properties(width: int) -> Any:
    lines = [
        element(
            f"w:{edge}",
            {"w:val": "single", "w:sz": size, "w:space": "0", "w:color": color},
        )
        for edge, size, color in (
            ("top", "8", "17324D"),
            ("bottom", "8", "17324D"),
            ("insideH", "4", "C9C5B8"),
        )
    ]
    margins = [
        element(f"w:{edge}", {"w:w": "85", "w:type": "dxa"})
        for edge in ("left", "right")
    ]
    return element(
        "w:tblPr",
        None,
        element("w:tblStyle", {"w:val": "TableNormal"}),
        element("w:tblW", {"w:w": str(width), "w:type": "dxa"}),
        element("w:tblBorders", None, *lines),
        element("w:tblLayout", {"w:type": "fixed"}),
        element("w:tblCellMar", None, *margins),
        element(
            "w:tblLook",
            {"w:val": "0020", "w:firstRow": "1", "w:noHBand": "1", "w:noVBand": "1"},
        ),
    )


def _columns(twips: Sequence[int]) -> Any:
    return element(
        "w:tblGrid", None, *(element("w:gridCol", {"w:w": str(w)}) for w in twips)
    )


def _row(
    cells: Sequence[Sequence[Any]],
    twips: Sequence[int],
    right: Sequence[bool],
    *,
    head: bool,
) -> Any:
    made = element(
        "w:tr",
        None,
        element(
            "w:trPr",
            None,
            element("w:cantSplit"),
            element("w:tblHeader") if head else None,
        ),
    )
    for cell, width, stands_right in zip(cells, twips, right, strict=True):
        shading = {"w:val": "clear", "w:color": "auto", "w:fill": "F5F3EC"}
        made.append(
            element(
                "w:tc",
                None,
                element(
                    "w:tcPr",
                    None,
                    element("w:tcW", {"w:w": str(width), "w:type": "dxa"}),
                    element("w:shd", shading) if head else None,
                ),
                element(
                    "w:p",
                    None,
                    element(
                        "w:pPr",
                        None,
                        element(
                            "w:pStyle", {"w:val": "TableHead" if head else "TableText"}
                        ),
                        element("w:keepNext") if head else None,
                        element("w:jc", {"w:val": "right"}) if stands_right else None,
                    ),
                    *cell,
                ),
            )
        )
    return made


def add_numbering(document: Any) -> None:
    """Bind heading styles to multilevel numbering, so that headings count themselves."""
    from docx.oxml.ns import qn

    root = document.part.numbering_part.element
    for key, kind, style, text, under, under_text in NUMBERING:
        levels = [
            _level(0, kind, style, text),
            _level(1, "decimal", under, under_text),
        ]
        abstract = element(
            "w:abstractNum",
            {"w:abstractNumId": key},
            element("w:multiLevelType", {"w:val": "multilevel"}),
            *levels,
        )
        root.insert(0, abstract)
        root.append(
            element(
                "w:num", {"w:numId": key}, element("w:abstractNumId", {"w:val": key})
            )
        )
        for level, name in enumerate((style, under)):
            found = next(
                s
                for s in document.styles.element.findall(qn("w:style"))
                if s.get(qn("w:styleId")) == name
            )
            _bind(found, key, level)


def _level(position: int, kind: str, style: str, text: str) -> Any:
    return element(
        "w:lvl",
        {"w:ilvl": str(position)},
        element("w:start", {"w:val": "1"}),
        element("w:numFmt", {"w:val": kind}),
        element("w:pStyle", {"w:val": style}),
        element("w:suff", {"w:val": "space"}),
        element("w:lvlText", {"w:val": text}),
        element("w:lvlJc", {"w:val": "left"}),
        element("w:pPr", None, element("w:ind", {"w:left": "0", "w:firstLine": "0"})),
    )


def _bind(style: Any, key: str, level: int) -> None:
    from docx.oxml.ns import qn

    properties = style.find(qn("w:pPr"))
    if properties is None:
        properties = element("w:pPr")
        style.append(properties)
    for old in properties.findall(qn("w:numPr")):
        properties.remove(old)
    number = element(
        "w:numPr",
        None,
        element("w:ilvl", {"w:val": str(level)}) if level else None,
        element("w:numId", {"w:val": key}),
    )
    keep = [qn(t) for t in ("w:keepNext", "w:keepLines", "w:pageBreakBefore")]
    after = [i for i, child in enumerate(properties) if child.tag in keep]
    properties.insert(after[-1] + 1 if after else 0, number)
