"""The tables as a workbook: typed numbers at full precision, what each column is, footnotes."""

from __future__ import annotations

import io
import math
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from ...tables import Value
from .document import Cell, Column, ManuscriptTable, Part
from .packing import timeless
from .words import plain

if TYPE_CHECKING:
    from openpyxl.worksheet.properties import PageSetupProperties
    from openpyxl.worksheet.worksheet import Worksheet

_RUNS_AS_FORMULA = ("=", "+", "-", "@")  # how a text begins that a spreadsheet might compute
_NARROWEST, _WIDEST, _MARGIN = 9, 60, 2  # of columns, in letters
_NOTE_WIDTH, _PER_LINE = 100, 90  # of the notes, in letters
_A4 = 9  # its number among paper sizes
_LINE_HEIGHT = 15  # points
_SCIENTIFIC_BELOW = 1e-4


def workbook_file(tables: Sequence[ManuscriptTable]) -> bytes:
    """Bytes of an ``.xlsx``: a sheet a table, ``columns`` that explains them, ``notes`` with the footnotes.

    Parameters
    ----------
    tables : sequence of ManuscriptTable
        Each value behind a column has a column of its own. Text is never a formula, and numbers, negative
        ones too, stay numbers. The same tables give the same bytes.
    """
    from openpyxl import Workbook

    book = Workbook()
    for place, table in enumerate(tables):
        sheet = book.active if place == 0 else book.create_sheet()
        assert sheet is not None
        sheet.title = table.name
        _fill_table(sheet, table)
    _fill_columns(book.create_sheet("columns"), tables)
    _fill_notes(book.create_sheet("notes"), tables)
    book.properties.creator = ""
    saved = io.BytesIO()
    book.save(saved)
    return timeless(saved.getvalue())


def _head(part: Part) -> str:
    return f"{part.name} ({part.unit})" if part.unit else part.name


def _number_format(value: Value, decimals: int | None) -> str:
    if not isinstance(value, int | float):
        return "General"
    if decimals is None:
        return "0.0E+00" if 0 < abs(value) < _SCIENTIFIC_BELOW else "General"
    return f"0.{'0' * decimals}" if decimals > 0 else "0"


def _fill_table(sheet: Worksheet, table: ManuscriptTable) -> None:
    heads = [_head(part) for column in table.columns for part in column.parts]
    _write_head(sheet, [*(["group"] if table.grouped else []), *heads])
    for number, (group, row) in enumerate(table.rows(), start=2):
        if table.grouped:
            _write(sheet, number, 1, group)
        for place, (value, decimals) in enumerate(_values(row), start=2 if table.grouped else 1):
            _write(sheet, number, place, value, _number_format(value, decimals))
    sheet.auto_filter.ref = sheet.dimensions
    _set_out(sheet)


def _values(row: Iterable[Cell]) -> Iterable[tuple[Value, int | None]]:
    return ((value, cell.decimals) for cell in row for value in cell.values)


def _write_head(sheet: Worksheet, heads: Sequence[str]) -> None:
    from openpyxl.styles import Alignment, Font

    for place, head in enumerate(heads, start=1):
        _write(sheet, 1, place, head)
        cell = sheet.cell(row=1, column=place)
        cell.font = Font(name="Calibri", size=11, bold=True)
        cell.alignment = Alignment(wrap_text=True, vertical="top")
    sheet.freeze_panes = "A2"


def _write(sheet: Worksheet, row: int, column: int, value: Value, form: str = "General") -> None:
    """Put a value into a cell; text that looks like a formula stays text, when it is edited too.

    A number is handed over as its shortest exact text, since openpyxl would write 16 digits of the 17 that
    some need.
    """
    if value is None:
        return
    cell = sheet.cell(row=row, column=column)
    if isinstance(value, str):
        cell.value, cell.data_type = value, "s"
        cell.quotePrefix = value.startswith(_RUNS_AS_FORMULA)
    else:
        cell.value, cell.data_type, cell.number_format = repr(value), "n", form


def _fill_columns(sheet: Worksheet, tables: Sequence[ManuscriptTable]) -> None:
    _write_head(sheet, ["sheet", "column", "unit", "meaning", "printed as"])
    lines = [
        [table.name, _head(part), part.unit or None, part.meaning, _printed(column)]
        for table in tables
        for column in table.columns
        for part in column.parts
    ]
    _write_lines(sheet, lines)
    _set_out(sheet)


def _printed(column: Column) -> str:
    unit = plain(column.unit)
    return f"{plain(column.head)} ({unit})" if unit else plain(column.head)


def _fill_notes(sheet: Worksheet, tables: Sequence[ManuscriptTable]) -> None:
    from openpyxl.styles import Alignment

    _write_head(sheet, ["sheet", "mark", "note"])
    lines: list[list[str | None]] = []
    for table in tables:
        lines.append([table.name, None, plain(table.title)])
        lines += [[table.name, note.mark or None, plain(note.text)] for note in table.notes]
    _write_lines(sheet, lines)
    _set_out(sheet, _NOTE_WIDTH)
    for number, row in enumerate(sheet.iter_rows(min_row=2), start=2):
        text = row[-1]
        text.alignment = Alignment(indent=1, wrap_text=True, vertical="top")
        sheet.row_dimensions[number].height = _LINE_HEIGHT * math.ceil(len(str(text.value)) / _PER_LINE)


def _write_lines(sheet: Worksheet, lines: Iterable[Sequence[str | None]]) -> None:
    for number, line in enumerate(lines, start=2):
        for place, text in enumerate(line, start=1):
            _write(sheet, number, place, text)


def _set_out(sheet: Worksheet, widest: int = _WIDEST) -> None:
    """Columns as wide as their texts, in print one page wide with the head on each."""
    from openpyxl.styles import Alignment
    from openpyxl.utils import get_column_letter

    for place, column in enumerate(sheet.columns, start=1):
        texts = [cell for cell in column[1:] if cell.data_type == "s"]
        needed = max(len(text) for text in [*str(column[0].value).split(), *(str(c.value) for c in texts)])
        width = min(widest, max(_NARROWEST, needed + _MARGIN))
        sheet.column_dimensions[get_column_letter(place)].width = width
        for cell in texts:
            cell.alignment = Alignment(indent=1, vertical="top")
    sheet.row_dimensions[1].height = 2 * _LINE_HEIGHT
    sheet.page_setup.orientation, sheet.page_setup.paperSize = "landscape", _A4
    sheet.page_setup.fitToHeight = 0
    sheet.sheet_properties.pageSetUpPr = _fitted()
    sheet.print_title_rows = "1:1"


def _fitted() -> PageSetupProperties:
    from openpyxl.worksheet.properties import PageSetupProperties

    return PageSetupProperties(fitToPage=True)
