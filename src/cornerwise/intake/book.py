"""Sheets of a workbook as rows of text, refusing every cell whose text is not certain.

Formulas count with the value stored beside them and are refused without one. Errors, dates and truth values
are refused. A number in a column of labels is taken as its digits, ``1`` and not ``1.0``; one that is
displayed otherwise (1 as 001, 100000 as 1E+05) is refused, since the label meant is the one displayed.
"""

from __future__ import annotations

import io
import re
import warnings
import zipfile
from collections.abc import Collection
from types import TracebackType
from typing import Any
from xml.etree.ElementTree import ParseError

import openpyxl
from openpyxl.utils import get_column_letter

from ..errors import Origin
from .findings import Findings, shown
from .header import RawTable
from .table import SPREADSHEET_ERRORS
from .text import MOST_ROWS, Record, refuse_empty, refuse_long, tabulate

TEXT_COLUMNS = (
    "construct", "cell", "batch", "phase", "method", "citation", "name", "mutations", "reason"
)  # fmt: skip
MOST_UNPACKED_BYTES = 2_000_000_000

_PLAIN_FORMATS = ("General", "0", "@")  # those that display a number as its digits
_FORMULA = re.compile(rb"<f[ >/]")

Values = tuple[Any, ...]


class _NoValue:
    """A formula without a stored value."""


NO_VALUE = _NoValue()


class Book:
    """An open workbook; a context manager that closes it.

    Parameters
    ----------
    data : bytes
        The file.
    file : str
        Its name, for the faults.

    Raises
    ------
    ValueError
        If the file is no workbook, with the reason.
    """

    def __init__(self, data: bytes, file: str) -> None:
        self.file = file
        self._data = data
        try:
            with zipfile.ZipFile(io.BytesIO(data)) as archive:
                if sum(item.file_size for item in archive.infolist()) > MOST_UNPACKED_BYTES:
                    raise ValueError("it unpacks to more than 2 GB")
                self._has_formulas = any(
                    _FORMULA.search(archive.read(item))
                    for item in archive.namelist()
                    if item.startswith("xl/worksheets/")
                )
            self._book = self._load(stored_values=True)
        except zipfile.BadZipFile:
            raise ValueError("it is damaged, protected by a password or of an older format") from None
        except (KeyError, OSError, ParseError, TypeError, AttributeError) as error:
            raise ValueError(f"it is damaged: {error}") from None
        self._sheets: dict[str, list[tuple[int, Values]]] = {}

    def __enter__(self) -> Book:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._book.close()

    @property
    def titles(self) -> list[str]:
        """Titles of all sheets with cells, in the order of the workbook."""
        return [sheet.title for sheet in self._book.worksheets]

    def place(self, title: str) -> str:
        """Name a sheet as in the faults."""
        return f"{self.file}, sheet {title}"

    def rows(self, title: str) -> list[tuple[int, Values]]:
        """Row number and values of every row that holds any, empty cells at its end cut off."""
        if title not in self._sheets:
            sheet = self._book[title]
            sheet.reset_dimensions()
            unstored = self._unstored(title)
            rows = []
            for number, values in enumerate(sheet.iter_rows(values_only=True), start=1):
                if unstored and number in unstored:
                    values = tuple(NO_VALUE if i in unstored[number] else v for i, v in enumerate(values))
                cut = len(values)
                while cut and (values[cut - 1] is None or values[cut - 1] == ""):
                    cut -= 1
                if cut and not _is_comment(values[0]):
                    rows.append((number, values[:cut]))
            self._sheets[title] = rows
        return self._sheets[title]

    def formats(self, title: str, wanted: Collection[tuple[int, int]]) -> dict[tuple[int, int], str]:
        """Number formats of cells, by row number and column index."""
        if not wanted:
            return {}
        rows = {row for row, _ in wanted}
        return {
            (number, index): str(cells[index].number_format)
            for number, cells in enumerate(self._book[title].iter_rows(), start=1)
            if number in rows
            for index in range(len(cells))
            if (number, index) in wanted
        }

    def _unstored(self, title: str) -> dict[int, set[int]]:
        """Column indices of formulas without a stored value, by row number."""
        if not self._has_formulas:
            return {}
        book = self._load(stored_values=False)
        formulas, stored = book[title], self._book[title]
        formulas.reset_dimensions()
        unstored: dict[int, set[int]] = {}
        for number, (cells, values) in enumerate(
            zip(formulas.iter_rows(), stored.iter_rows(values_only=True), strict=True), start=1
        ):
            for index, (cell, value) in enumerate(zip(cells, values, strict=True)):
                if cell.data_type == "f" and value is None:
                    unstored.setdefault(number, set()).add(index)
        book.close()
        return unstored

    def _load(self, *, stored_values: bool) -> Any:
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")  # about styles and extensions that do not concern values
            return openpyxl.load_workbook(io.BytesIO(self._data), read_only=True, data_only=stored_values)


def open_book(data: bytes, file: str, findings: Findings) -> Book | None:
    """Open a workbook; None when that fails, which is a fault."""
    try:
        return Book(data, file)
    except ValueError as error:
        findings.add(
            Origin(file=file),
            found=f"a file that cannot be opened as a workbook; {error}",
            expected="an .xlsx workbook without a password",
            remedy="open it in a spreadsheet program and save it anew as .xlsx",
        )
        return None


def read_sheet(book: Book, title: str, findings: Findings) -> RawTable | None:
    """Read a sheet as a table of text.

    Parameters
    ----------
    book : Book
        The workbook.
    title : str
        The sheet.
    findings : Findings
        Takes cells that cannot be read, and values beside the table.

    Returns
    -------
    RawTable or None
        None if the sheet is empty. Rows with a cell that was refused are left out.
    """
    file, rows = book.place(title), book.rows(title)
    if not rows or len(rows) > MOST_ROWS:
        refuse_long(file, len(rows), findings) if rows else refuse_empty(file, findings)
        return None
    header = [str(value).strip() if isinstance(value, str) else "" for value in rows[0][1]]
    labels = {index for index, name in enumerate(header) if name in TEXT_COLUMNS}
    displayed = book.formats(title, _numbers_among_labels(rows[1:], labels))
    records: list[Record] = []
    lost: list[str] = []
    for number, values in rows:
        texts = [cell_text(value, displayed.get((number, i), "General")) for i, value in enumerate(values)]
        faulty = [
            i
            for i, text in enumerate(texts)
            if isinstance(text, Refusal) or (text.strip() and i >= len(header))
        ]
        for index in faulty:
            name = header[index] if index < len(header) else ""
            origin = Origin(file=file, row=number, column=name or get_column_letter(index + 1))
            refuse_cell(origin, texts[index], findings)
        if faulty:
            lost.append("\n".join(texts))
        else:
            records.append((number, (texts + [""] * len(header))[: len(header)]))
    if not records or records[0][0] != rows[0][0]:
        return None
    return tabulate(records, "", file, findings, lost=lost)


class Refusal(str):
    """What was found in a cell that cannot be read."""

    __slots__ = ()


def cell_text(value: object, number_format: str) -> str:
    """Text of a cell, or a `Refusal`.

    Examples
    --------
    >>> cell_text(1.0, "General")
    '1'
    """
    if value is None:
        return ""
    if isinstance(value, str):
        return Refusal(f"the spreadsheet error {value}") if value in SPREADSHEET_ERRORS else value
    if isinstance(value, bool):
        return Refusal(f"the truth value {str(value).upper()}")
    if isinstance(value, int | float):
        if number_format not in _PLAIN_FORMATS:
            return Refusal(f"the number {value:g}, displayed in the format {number_format}")
        return digits(value)
    if value is NO_VALUE:
        return Refusal("a formula without a stored value")
    return Refusal(f"the date or time {value}")


def digits(number: float) -> str:
    """Shortest text of a number that reads back the same; whole numbers without a decimal point."""
    return str(int(number)) if float(number).is_integer() and abs(number) < 1e15 else repr(number)


def _is_comment(value: object) -> bool:
    return isinstance(value, str) and value.startswith("#") and value not in SPREADSHEET_ERRORS


def _numbers_among_labels(rows: list[tuple[int, Values]], labels: Collection[int]) -> set[tuple[int, int]]:
    return {
        (number, index)
        for number, values in rows
        for index in labels
        if index < len(values)
        and isinstance(values[index], int | float)
        and not isinstance(values[index], bool)
    }


def refuse_cell(origin: Origin, text: str, findings: Findings) -> None:
    """Refuse a cell that cannot be read or stands outside the table."""
    if not isinstance(text, Refusal):
        findings.add(
            origin, found=f"{shown(text)} to the right of the table", expected="values below a header only",
            remedy="name the column, or move the note to a sheet called notes",
        )  # fmt: skip
        return
    remedy = "type the value as a plain number or as text"
    if "formula" in text:
        remedy = "open the workbook in a spreadsheet program and save it, or paste the values"
    elif "displayed" in text:
        remedy = "format the column as text and type the label anew"
    findings.add(origin, found=text, expected="a number or a text", remedy=remedy)
