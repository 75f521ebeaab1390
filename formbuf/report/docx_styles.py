"""Styles, page and running heads of the Word file."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from formbuf.report.docx_parts import element, field, run

if TYPE_CHECKING:
    from docx.document import Document as WordFile

PAGE_WIDTH_CM = 17.0
SERIF, SANS = "Times New Roman", "Arial"
DEEP, SOFT, WARM = "17324D", "55595C", "7A2E0B"

#: Name, basis, font, size [pt], bold, colour, space before and after [pt].
_STYLES: tuple[tuple[str, str, str, float, bool, str, float, float], ...] = (
    ("Status", "Normal", SANS, 9.0, True, WARM, 0.0, 6.0),
    ("Story", "Normal", SERIF, 11.0, False, SOFT, 0.0, 6.0),
    ("Placement", "Normal", SANS, 8.5, False, SOFT, 0.0, 4.0),
    ("Caution", "Normal", SERIF, 10.5, False, "1D1F21", 4.0, 8.0),
    ("Table Head", "Normal", SANS, 8.0, True, "1D1F21", 1.5, 1.5),
    ("Table Text", "Normal", SANS, 8.0, False, "1D1F21", 1.5, 1.5),
    ("Table Note", "Normal", SANS, 8.0, False, SOFT, 2.0, 0.0),
    ("After Table", "Normal", SERIF, 4.0, False, "1D1F21", 0.0, 4.0),
    ("Figure", "Normal", SERIF, 10.5, False, "1D1F21", 8.0, 2.0),
    ("Reference", "Normal", SERIF, 10.0, False, "1D1F21", 0.0, 3.0),
    ("Contents Head", "Normal", SANS, 11.0, True, DEEP, 10.0, 4.0),
    ("Signature Head", "Normal", SANS, 9.0, True, DEEP, 8.0, 3.0),
    ("TOC 1", "Normal", SANS, 9.5, False, "1D1F21", 0.0, 1.0),
    ("TOC 2", "Normal", SANS, 9.0, False, "1D1F21", 0.0, 0.0),
)


def dress(file: WordFile) -> None:
    """Set page, fonts and styles of a new file."""
    from docx.shared import Cm

    page = file.sections[0]
    page.page_width, page.page_height = Cm(21.0), Cm(29.7)
    page.left_margin = page.right_margin = Cm(2.0)
    page.top_margin, page.bottom_margin = Cm(2.3), Cm(2.0)
    page.header_distance = page.footer_distance = Cm(1.0)
    _restyle(file, "Normal", SERIF, 10.5, False, "1D1F21", 0.0, 6.0)
    _restyle(file, "Body Text", SERIF, 10.5, False, "1D1F21", 0.0, 6.0)
    _restyle(file, "List Bullet", SERIF, 10.5, False, "1D1F21", 0.0, 3.0)
    _restyle(file, "Title", SANS, 20.0, True, DEEP, 4.0, 4.0)
    _restyle(file, "Subtitle", SANS, 13.0, False, "1D1F21", 0.0, 4.0)
    _restyle(file, "Heading 1", SANS, 14.0, True, DEEP, 18.0, 5.0)
    _restyle(file, "Heading 2", SANS, 11.0, True, DEEP, 12.0, 4.0)
    _restyle(file, "Caption", SANS, 9.0, True, DEEP, 8.0, 3.0)
    for name, basis, font, size, bold, colour, before, after in _STYLES:
        _new_style(file, name, basis)
        _restyle(file, name, font, size, bold, colour, before, after)
    _annex(file)
    _details(file)
    _language(file)


def _new_style(file: WordFile, name: str, basis: str) -> None:
    from docx.enum.style import WD_STYLE_TYPE

    if name in [style.name for style in file.styles]:
        return
    style = file.styles.add_style(name, WD_STYLE_TYPE.PARAGRAPH)
    style.base_style = file.styles[basis]
    style.quick_style = True


def _restyle(
    file: WordFile,
    name: str,
    font: str,
    size: float,
    bold: bool,
    colour: str,
    before: float,
    after: float,
) -> None:
    from docx.oxml.ns import qn
    from docx.shared import Pt, RGBColor

    style: Any = file.styles[name]
    style.font.name = font
    style.font.size = Pt(size)
    style.font.bold = bold
    style.font.italic = False
    style.font.color.rgb = RGBColor.from_string(colour)
    style.paragraph_format.space_before = Pt(before)
    style.paragraph_format.space_after = Pt(after)
    fonts = style.element.rPr.rFonts
    for name_ in list(fonts.attrib):
        if "Theme" in name_ or "theme" in name_:
            del fonts.attrib[name_]
    for slot in ("w:ascii", "w:hAnsi", "w:cs", "w:eastAsia"):
        fonts.set(qn(slot), font)
    for spread in style.element.rPr.findall(qn("w:spacing")):
        style.element.rPr.remove(spread)
    properties = style.element.pPr
    if properties is not None:
        for border in properties.findall(qn("w:pBdr")):
            properties.remove(border)


def _annex(file: WordFile) -> None:
    """Headings of annexes: like those of sections, with letters."""
    _new_style(file, "Annex", "Heading 1")
    _restyle(file, "Annex", SANS, 14.0, True, DEEP, 18.0, 5.0)
    _new_style(file, "Annex Part", "Heading 2")
    _restyle(file, "Annex Part", SANS, 11.0, True, DEEP, 12.0, 4.0)
    file.styles["Annex"].next_paragraph_style = file.styles["Body Text"]


def _details(file: WordFile) -> None:
    from docx.shared import Cm

    styles: Any = file.styles
    caution = styles["Caution"]
    caution.paragraph_format.left_indent = Cm(0.4)
    line = {"w:val": "single", "w:sz": "24", "w:space": "6", "w:color": "A4501F"}
    caution.element.get_or_add_pPr().append(
        element("w:pBdr", None, element("w:left", line))
    )
    _order(caution.element.pPr)
    styles["TOC 2"].paragraph_format.left_indent = Cm(0.6)
    styles["Reference"].paragraph_format.left_indent = Cm(0.8)
    styles["Reference"].paragraph_format.first_line_indent = Cm(-0.8)
    styles["Figure"].paragraph_format.keep_with_next = True
    styles["Placement"].paragraph_format.keep_with_next = True
    for name in ("Heading 1", "Heading 2", "Annex", "Annex Part"):
        styles[name].paragraph_format.keep_with_next = True


def _order(properties: Any) -> None:
    """Put the border where the schema of Word wants it: before spacing and indent."""
    from docx.oxml.ns import qn

    border = properties.find(qn("w:pBdr"))
    after = [qn(f"w:{n}") for n in ("spacing", "ind", "jc", "outlineLvl")]
    first = next((child for child in properties if child.tag in after), None)
    if border is not None and first is not None:
        first.addprevious(border)


def _language(file: WordFile) -> None:
    from docx.oxml.ns import qn

    for lang in file.styles.element.iter(qn("w:lang")):
        lang.set(qn("w:val"), "en-GB")


def edges(file: WordFile, head: str, status: str, foot: str) -> None:
    """Write running head and foot: identity, status, versions, page numbers."""
    page = file.sections[0]
    for part, left, right in (
        (page.header, [run(head)], [run(status, bold=True)]),
        (
            page.footer,
            [run(foot)],
            [run("Page "), *field("PAGE", "1"), run(" of "), *field("NUMPAGES", "1")],
        ),
    ):
        part.is_linked_to_previous = False
        line = part.paragraphs[0]
        line.style = file.styles["Placement"]
        line.paragraph_format.keep_with_next = False
        _tabs(line)
        holder = line._p
        for made in (*left, element("w:r", None, element("w:tab")), *right):
            holder.append(made)


def _tabs(line: Any) -> None:
    from docx.enum.text import WD_TAB_ALIGNMENT
    from docx.shared import Cm

    stops = line.paragraph_format.tab_stops
    stops.add_tab_stop(Cm(PAGE_WIDTH_CM), WD_TAB_ALIGNMENT.RIGHT)
