"""A table as a Word document: real styles, a header row that repeats, widths in which no number breaks."""

from __future__ import annotations

import io
from collections.abc import Iterable, Sequence
from html import escape
from typing import TYPE_CHECKING

from .document import Cell, Column, ManuscriptTable
from .layout import MARGIN_MM, PADDING_MM, Layout, layout
from .packing import timeless
from .words import Run, Words, plain

if TYPE_CHECKING:
    from docx.document import Document

_TABLE, _TITLE, _HEAD, _NUMBER_HEAD, _TEXT, _NUMBER, _GROUP, _NOTE = (
    "ManuscriptTable", "TableTitle", "TableHead", "TableNumberHead", "TableText", "TableNumber", "TableGroup",
    "TableNote",
)  # fmt: skip
_FONT = "Arial"
_TWIPS_PER_MM, _HALF_POINTS = 1440 / 25.4, 2
_NAMESPACE = 'xmlns:w="http://schemas.openxmlformats.org/wordprocessingml/2006/main"'
_FACES = {
    "plain": "",
    "italic": "<w:rPr><w:i/></w:rPr>",
    "bold": "<w:rPr><w:b/></w:rPr>",
    "subscript": '<w:rPr><w:vertAlign w:val="subscript"/></w:rPr>',
    "superscript": '<w:rPr><w:vertAlign w:val="superscript"/></w:rPr>',
}


def word_file(table: ManuscriptTable) -> bytes:
    """Bytes of a ``.docx`` with one table, its title above and its footnotes below.

    Parameters
    ----------
    table : ManuscriptTable
        Becomes landscape where it is wide. The same table gives the same bytes.
    """
    from docx import Document
    from docx.oxml import parse_xml

    set_out = layout(table)
    document = Document()
    _set_page(document, set_out)
    for style in _styles(set_out.size_pt):
        document.styles.element.append(parse_xml(style))
    _set_properties(document, table)
    body = document.element.body
    for part in (_title(table), _table(table, set_out), *map(_note, table.paragraphs())):
        body.insert(len(body) - 1, parse_xml(part))  # before the properties of the section
    saved = io.BytesIO()
    document.save(saved)
    return timeless(saved.getvalue())


def _set_page(document: Document, set_out: Layout) -> None:
    from docx.enum.section import WD_ORIENT
    from docx.shared import Mm

    section = document.sections[0]
    section.orientation = WD_ORIENT.LANDSCAPE if set_out.landscape else WD_ORIENT.PORTRAIT
    section.page_width, section.page_height = map(Mm, set_out.page_mm)
    section.left_margin = section.right_margin = Mm(MARGIN_MM)
    section.top_margin = section.bottom_margin = Mm(MARGIN_MM)


def _set_properties(document: Document, table: ManuscriptTable) -> None:
    document.core_properties.title = plain(table.title)
    document.core_properties.author = ""
    document.core_properties.comments = ""
    document.core_properties.last_modified_by = ""


def _twips(mm: float) -> int:
    return round(mm * _TWIPS_PER_MM)


def _styles(size: float) -> list[str]:
    """Styles of our own: one for the table, one for each kind of paragraph in and around it."""
    cell = _twips(PADDING_MM)
    paragraphs = [
        (_TITLE, "Table title", "left", size + 1, 0, 120, "<w:keepNext/>", ""),
        (_HEAD, "Table head", "left", size, 40, 40, "<w:keepNext/>", "<w:b/>"),
        (_NUMBER_HEAD, "Table number head", "right", size, 40, 40, "<w:keepNext/>", "<w:b/>"),
        (_TEXT, "Table text", "left", size, 20, 20, "", ""),
        (_NUMBER, "Table number", "right", size, 20, 20, "", ""),
        (_GROUP, "Table group", "left", size, 80, 20, "<w:keepNext/>", "<w:b/>"),
        (_NOTE, "Table note", "left", size - 1, 60, 0, "", ""),
    ]
    return [
        f'<w:style {_NAMESPACE} w:type="table" w:customStyle="1" w:styleId="{_TABLE}">'
        '<w:name w:val="Manuscript table"/><w:basedOn w:val="TableNormal"/><w:uiPriority w:val="99"/>'
        '<w:tblPr><w:tblBorders><w:top w:val="single" w:sz="10" w:space="0" w:color="auto"/>'
        '<w:bottom w:val="single" w:sz="10" w:space="0" w:color="auto"/></w:tblBorders>'
        f'<w:tblCellMar><w:left w:w="{cell}" w:type="dxa"/><w:right w:w="{cell}" w:type="dxa"/>'
        '</w:tblCellMar></w:tblPr><w:tblStylePr w:type="firstRow"><w:tblPr/><w:tcPr><w:tcBorders>'
        '<w:bottom w:val="single" w:sz="6" w:space="0" w:color="auto"/></w:tcBorders></w:tcPr></w:tblStylePr>'
        "</w:style>",
        *(_paragraph_style(*one) for one in paragraphs),
    ]


def _paragraph_style(
    key: str, name: str, side: str, size: float, before: int, after: int, flow: str, face: str
) -> str:
    half = round(size * _HALF_POINTS)
    return (
        f'<w:style {_NAMESPACE} w:type="paragraph" w:customStyle="1" w:styleId="{key}">'
        f'<w:name w:val="{name}"/><w:basedOn w:val="Normal"/><w:qFormat/><w:pPr>{flow}'
        f'<w:spacing w:before="{before}" w:after="{after}" w:line="240" w:lineRule="auto"/>'
        f'<w:jc w:val="{side}"/></w:pPr><w:rPr>'
        f'<w:rFonts w:ascii="{_FONT}" w:hAnsi="{_FONT}" w:eastAsia="{_FONT}" w:cs="{_FONT}"/>{face}'
        f'<w:sz w:val="{half}"/><w:szCs w:val="{half}"/></w:rPr></w:style>'
    )


def _runs(runs: Iterable[Run]) -> str:
    return "".join(
        f'<w:r>{_FACES[run.face]}<w:t xml:space="preserve">{escape(run.text)}</w:t></w:r>' for run in runs
    )


def _paragraph(style: str, runs: str, namespace: str = "") -> str:
    return f'<w:p {namespace}><w:pPr><w:pStyle w:val="{style}"/></w:pPr>{runs}</w:p>'


def _title(table: ManuscriptTable) -> str:
    return _paragraph(
        _TITLE, _runs((Run(f"Table {table.number}.", "bold"), Run(" "), *table.title)), _NAMESPACE
    )


def _note(text: Words) -> str:
    return _paragraph(_NOTE, _runs(text), _NAMESPACE)


def _table(table: ManuscriptTable, set_out: Layout) -> str:
    widths = [_twips(width) for width in set_out.stretched()]
    rows = [_header(table.columns, widths)]
    for group in table.groups:
        rows += [_group(group.head, widths)] if group.head else []
        rows += [_row(table.columns, row, widths) for row in group.rows]
    described = escape(plain(table.title))
    grid = "".join(f'<w:gridCol w:w="{width}"/>' for width in widths)
    return (
        f'<w:tbl {_NAMESPACE}><w:tblPr><w:tblStyle w:val="{_TABLE}"/><w:tblW w:w="{sum(widths)}" '
        'w:type="dxa"/><w:tblLayout w:type="fixed"/><w:tblLook w:val="0020" w:firstRow="1" w:lastRow="0" '
        'w:firstColumn="0" w:lastColumn="0" w:noHBand="1" w:noVBand="1"/>'
        f'<w:tblCaption w:val="{described}"/></w:tblPr>'
        f"<w:tblGrid>{grid}</w:tblGrid>"
        f"{''.join(rows)}</w:tbl>"
    )


def _field(width: int, style: str, runs: str, *, span: int = 1, bottom: bool = False) -> str:
    over = f'<w:gridSpan w:val="{span}"/>' if span > 1 else ""
    low = '<w:vAlign w:val="bottom"/>' if bottom else ""
    properties = f'<w:tcPr><w:tcW w:w="{width}" w:type="dxa"/>{over}{low}</w:tcPr>'
    return f"<w:tc>{properties}{_paragraph(style, runs)}</w:tc>"


def _whole(fields: Iterable[str], *, header: bool = False) -> str:
    """A row that no page break divides."""
    repeats = "<w:tblHeader/>" if header else ""
    return f"<w:tr><w:trPr><w:cantSplit/>{repeats}</w:trPr>{''.join(fields)}</w:tr>"


def _header(columns: Sequence[Column], widths: Sequence[int]) -> str:
    return _whole(
        (
            _field(width, _NUMBER_HEAD if column.numeric else _HEAD, _head(column), bottom=True)
            for column, width in zip(columns, widths, strict=True)
        ),
        header=True,
    )


def _head(column: Column) -> str:
    unit: Words = (Run("("), *column.unit, Run(")")) if column.unit else ()
    return _runs(unbroken(column.head)) + ("<w:r><w:br/></w:r>" + _runs(unit) if unit else "")


def _group(head: str, widths: Sequence[int]) -> str:
    return _whole([_field(sum(widths), _GROUP, _runs([Run(head)]), span=len(widths))])


def _row(columns: Sequence[Column], cells: Sequence[Cell], widths: Sequence[int]) -> str:
    return _whole(
        _field(
            width,
            _NUMBER if column.numeric else _TEXT,
            _runs(unbroken((Run(cell.text),)) if column.numeric else [Run(cell.text)]),
        )
        for column, cell, width in zip(columns, cells, widths, strict=True)
    )


def unbroken(runs: Words) -> Words:
    """The same with spaces at which no line ends."""
    return tuple(Run(run.text.replace(" ", "\u00a0"), run.face) for run in runs)
