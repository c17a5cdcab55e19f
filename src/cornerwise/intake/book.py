"""Sheets of a workbook as rows of text, refusing every cell whose text is not certain.

Formulas count with the value stored beside them and are refused without one. Errors, dates and truth values
are refused. A number in a column of labels is taken as its digits, ``1`` and not ``1.0``; one that is
displayed otherwise (1 as 001, 100000 as 1E+05) is refused, since the label meant is the one displayed.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from types import TracebackType
from typing import TypeVar

from ..errors import Origin
from .findings import Findings, shown
from .header import RawTable
from .package import DamagedBook, Package
from .sheets import Displayed, Sheets, Unreadable, Value, column_letters
from .table import SPREADSHEET_ERRORS
from .text import (
    MOST_ROWS,
    MOST_TITLES,
    Record,
    composed,
    refuse_empty,
    refuse_long,
    refuse_titles,
    tabulate,
    titles_above,
)

TEXT_COLUMNS = (
    "construct", "cell", "batch", "phase", "method", "citation", "name", "mutations", "reason",
    "residue_a", "residue_b", "definition",
)  # fmt: skip

_Read = TypeVar("_Read")


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
    DamagedBook
        If the file is no workbook, with the reason; reading its rows may raise it too.
    """

    def __init__(self, data: bytes, file: str) -> None:
        self.file = file
        self._package = Package(data)
        self._sheets = Sheets(self._package)
        self.rows_of_tables = 0  # of those that were read so far
        self._rows: dict[str, list[tuple[int, tuple[Value, ...]]]] = {}

    def __enter__(self) -> Book:
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._package.close()

    @property
    def titles(self) -> list[str]:
        """Titles of all sheets with cells, in the order of the workbook."""
        return list(self._sheets.parts)

    def place(self, title: str) -> str:
        """Name a sheet as in the faults."""
        return f"{self.file}, sheet {title}"

    def rows(self, title: str) -> list[tuple[int, tuple[Value, ...]]]:
        """Row number and values of every row that holds any, notes left out."""
        if title not in self._rows:
            rows = self._sheets.rows(title)
            self._rows[title] = [(number, values) for number, values in rows if not _is_comment(values[0])]
            if sum(map(len, self._rows.values())) > 2 * MOST_ROWS:
                raise DamagedBook(f"its sheets have more than {2 * MOST_ROWS} rows")
        return self._rows[title]


def from_book(data: bytes, file: str, findings: Findings, read: Callable[[Book], _Read]) -> _Read | None:
    """What `read` makes of a workbook; None when it cannot be opened or is damaged, which is a fault."""
    try:
        with Book(data, file) as book:
            return read(book)
    except DamagedBook as error:
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
    book.rows_of_tables += len(rows)
    if not rows or book.rows_of_tables > MOST_ROWS:
        refuse_long(file, f"{book.rows_of_tables} rows", findings) if rows else refuse_empty(file, findings)
        return None
    if titles := titles_above([_names(values) for _, values in rows[: MOST_TITLES + 1]]):
        refuse_titles(file, rows[0][0], cell_text(rows[0][1][0]), findings)
        rows = rows[titles:]
    header = _names(rows[0][1])
    labels = {index for index, name in enumerate(header) if name in TEXT_COLUMNS}
    records: list[Record] = []
    lost: list[str] = []
    for number, values in rows:
        texts = [
            cell_text(value, as_label=i in labels and number > rows[0][0]) for i, value in enumerate(values)
        ]
        faulty = [
            i
            for i, text in enumerate(texts)
            if isinstance(text, Refusal) or (text.strip() and i >= len(header))
        ]
        for index in faulty:
            name = header[index] if index < len(header) else ""
            origin = Origin(file=file, row=number, column=name or column_letters(index + 1))
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


def cell_text(value: Value, *, as_label: bool = False) -> str:
    """Text of a cell, or a `Refusal`.

    Examples
    --------
    >>> cell_text(1.0)
    '1'
    """
    if value is None:
        return ""
    if isinstance(value, Unreadable):
        return Refusal(value)
    if isinstance(value, str):
        return Refusal(f"the spreadsheet error {value}") if value in SPREADSHEET_ERRORS else composed(value)
    if as_label and isinstance(value, Displayed):
        return Refusal(f"the number {value:g}, displayed in the format {value.number_format}")
    return digits(value)


def digits(number: float) -> str:
    """Shortest text of a number that reads back the same; whole numbers without a decimal point."""
    return str(int(number)) if float(number).is_integer() and abs(number) < 1e15 else repr(number)


def _is_comment(value: object) -> bool:
    return isinstance(value, str) and value.startswith("#") and value not in SPREADSHEET_ERRORS


def _names(header: Sequence[Value]) -> list[str]:
    """Names in a header as far as they are texts."""
    plain = (name if isinstance(name, str) and not isinstance(name, Unreadable) else "" for name in header)
    return [name.strip() for name in plain]


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
