"""Text files to fields: the encoding, the delimiter, and the number of fields in every row.

Encodings: UTF-8 and UTF-16, with a byte-order mark or (told by the zero bytes) without one; whatever is
no valid UTF-8 is read as cp1252. Delimiter: the comma, the semicolon or the tab, whichever turns the
header into the most known column names. Lines that are empty, hold delimiters only, or begin with ``#``
are passed over; a label that begins with ``#`` must stand in quotes. Rows are counted as in a text
editor, from 1. A quoted field may not run over the end of its line. Letters that can be written in two ways,
such as an e with its accent, are composed, so that a label is the same wherever it was typed.
"""

from __future__ import annotations

import codecs
import csv
import re
import unicodedata
from collections.abc import Sequence

import numpy as np

from ..errors import Origin
from .findings import Findings, shown
from .header import RawTable
from .table import LONGEST_TEXT, SPREADSHEET_ERRORS

DELIMITERS = {",": "commas", ";": "semicolons", "\t": "tabs"}
MOST_ROWS = 1_000_000
MOST_COLUMNS = 16_384
MOST_FIELDS = 8_000_000  # of a table
MOST_TITLES = 20  # lines above a header in which it is looked for
LONGEST_HEADER = 100_000  # letters in which column names are looked for

_MOST_ACCENTS = 30
_NOT_LATIN = re.compile("[\u0300-\U0010ffff]{31,}")  # the only runs in which that many accents can be
_MOST_LOST = 1_000_000  # letters that are searched for labels

Record = tuple[int, list[str]]  # row number and fields

_MARKS = (
    (codecs.BOM_UTF32_LE, "utf-32"),
    (codecs.BOM_UTF32_BE, "utf-32"),
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)
_KINDS = {
    b"\x89PNG": "a PNG image", b"\xff\xd8\xff": "a JPEG image", b"GIF8": "a GIF image",
    b"%PDF": "a PDF document", b"PK\x03\x04": "a ZIP archive or a workbook",
    b"\xd0\xcf\x11\xe0": "an old Excel workbook", b"{\\rtf": "a document of a word processor",
}  # fmt: skip
_COLUMN_WORDS = frozenset(
    (
        *("construct", "cell", "batch", "voltage", "charge", "holding", "phase", "median", "sem", "n"),
        *("method", "channels", "citation", "open", "residue", "distance", "definition"),
    )
)


def encoding_of(data: bytes) -> str:
    """Name the encoding of a file's bytes."""
    for mark, encoding in _MARKS:
        if data.startswith(mark):
            return encoding
    sample = data[:4096]
    if sample.count(0) > len(sample) / 4:  # in UTF-16 every second byte of a plain letter is zero
        return "utf-16-le" if sample[1::2].count(0) > sample[::2].count(0) else "utf-16-be"
    try:
        data.decode("utf-8")
    except UnicodeDecodeError:
        return "cp1252"
    return "utf-8"


def _kind_of(data: bytes) -> str | None:
    """What a file that is no text is, by its first bytes."""
    return next((kind for start, kind in _KINDS.items() if data.startswith(start)), None)


def decode(data: bytes, file: str, findings: Findings) -> str | None:
    """Turn the bytes of a file into text with plain line ends; None when that fails, which is a fault."""
    if kind := _kind_of(data):
        findings.add(
            Origin(file=file), found=f"a file that looks like {kind}", expected="a text file",
            remedy=f"export the values as text and save them as {file}"
            + " or, if it is a workbook, with the ending .xlsx" * kind.startswith(("a ZIP", "an old")),
        )  # fmt: skip
        return None
    encoding = encoding_of(data)
    try:
        text = data.decode(encoding)
    except UnicodeDecodeError as error:
        findings.add(
            Origin(file=file, row=data[: error.start].count(b"\n") + 1),
            found=f"bytes that are no text ({encoding})",
            expected="text in UTF-8, UTF-16 or cp1252",
            remedy="save the file as UTF-8 text",
        )
        return None
    return composed(text.replace("\r\n", "\n").replace("\r", "\n"))


def composed(text: str) -> str:
    """Letters and their accents as one character each (Unicode normalisation form C).

    Text with more than 30 accents on one letter stays as it is: no one writes it, and composing it takes long
    (stream-safe text, Unicode Standard Annex 15).
    """
    if text.isascii() or any(_overloaded(run[0]) for run in _NOT_LATIN.finditer(text)):
        return text
    return unicodedata.normalize("NFC", text)


def _overloaded(run: str) -> bool:
    accents = 0
    for letter in run:
        accents = accents + 1 if unicodedata.combining(letter) else 0
        if accents > _MOST_ACCENTS:
            return True
    return False


def split(text: str, file: str, findings: Findings) -> RawTable | None:
    """Split a table into its fields.

    Parameters
    ----------
    text : str
        The file, with plain line ends.
    file : str
        Its name, for the faults.
    findings : Findings
        Takes rows with a wrong number of fields, unclosed quotes, a missing header.

    Returns
    -------
    RawTable or None
        None if no header could be read. Rows that were refused are left out.
    """
    rows = text.count("\n")
    if rows > MOST_ROWS:
        refuse_long(file, f"{rows} rows", findings)
        return None
    lines = _below_titles([_without_comment(line) for line in text.split("\n")], file, findings)
    first = next((line for line in lines if line), "")
    if refused_wide(file, max(map(first.count, DELIMITERS)) + 1, findings):
        return None
    delimiter = sniff(first)
    if refused_large(file, rows + text.count(delimiter), findings):
        return None
    records, lost = _records(lines, delimiter, file, findings)
    if not records:
        if not lost:
            refuse_empty(file, findings)
        return None
    if len(records[0][1]) < 2:
        below = any(line.count(mark) for line in lines if line for mark in DELIMITERS)
        (refuse_titles if below else _refuse_single_column)(file, records[0][0], first, findings)
        return None
    return tabulate(records, delimiter, file, findings, lost=lost)


def sniff(header: str) -> str:
    """Return the delimiter that turns a header line into the most known column names.

    Examples
    --------
    >>> sniff("voltage_mV,E181A;R212Q/c1,E181A;R212Q/c2")
    ','
    """
    return max(DELIMITERS, key=lambda delimiter: _known_columns(_fields(header, delimiter)))


def _fields(line: str, delimiter: str) -> list[str]:
    """Fields of a line that is looked at before the table is split."""
    return next(csv.reader([line[:LONGEST_HEADER]], delimiter=delimiter), [])


def _known_columns(fields: Sequence[str]) -> tuple[int, int]:
    """How many fields begin like a known column, and how many there are."""
    known = [field for field in fields if field.strip().partition("_")[0].casefold() in _COLUMN_WORDS]
    return len(known), len(fields)


def _below_titles(lines: list[str], file: str, findings: Findings) -> list[str]:
    """Lines of a table, those above its header taken off, which are a fault; row numbers stay."""
    filled = [number for number, line in enumerate(lines) if line][: MOST_TITLES + 1]
    titles = titles_above([_fields(lines[number], sniff(lines[number])) for number in filled])
    if not titles:
        return lines
    refuse_titles(file, filled[0] + 1, lines[filled[0]], findings)
    header = filled[titles]
    return [""] * header + lines[header:]


def titles_above(rows: Sequence[Sequence[str]]) -> int:
    """How many of the first rows stand above the header: the first row with a known column, if not the first.

    Examples
    --------
    >>> titles_above([["Cells of May"], ["construct", "cell"], ["WT", "c1"]])
    1
    >>> titles_above([["Zelle", "Ladung"], ["c1", "1"]])
    0
    """
    counts = [_known_columns(row) for row in rows[: MOST_TITLES + 1]]
    return next((number for number, (known, fields) in enumerate(counts) if known and fields > 1), 0)


def tabulate(
    records: list[Record], delimiter: str, file: str, findings: Findings, *, lost: Sequence[str] = ()
) -> RawTable | None:
    """Put records, the header first, into columns; refuse uneven rows.

    Parameters
    ----------
    records : list of (int, list of str)
        Row number and fields.
    delimiter : str
        What separated the fields; "" in a workbook.
    file : str
        Its name, for the faults.
    findings : Findings
        Takes rows with another number of fields than the header.
    lost : sequence of str
        Text of rows that were left out before.
    """
    header_row, header = records[0]
    even = [(row, fields) for row, fields in records[1:] if len(fields) == len(header)]
    if len(even) < len(records) - 1:
        uneven = [(row, fields) for row, fields in records[1:] if len(fields) != len(header)]
        _refuse_uneven(uneven, len(header), delimiter, file, findings)
        lost = [*lost, *("\n".join(fields) for _, fields in uneven)]
    if long := [name for name in header if len(name) > LONGEST_TEXT]:
        origin = Origin(file=file, row=header_row, column=long[0])
        findings.add(
            origin, found=f"a header of {len(long[0])} letters", expected=f"at most {LONGEST_TEXT}",
            remedy="shorten it",
        )  # fmt: skip
        return None
    columns = list(zip(*(fields for _, fields in even), strict=True)) or [()] * len(header)
    named = [i for i, name in enumerate(header) if name.strip() or any(map(str.strip, columns[i]))]
    return RawTable(
        file=file,
        header=tuple(header[index].strip() for index in named),
        header_row=header_row,
        rows=np.array([row for row, _ in even], dtype=np.int64),
        columns=tuple(columns[index] for index in named),
        delimiter=delimiter,
        lost=_searched(lost),
    )


class _Anything(str):
    """Text of which it would take too long to say what it does not hold."""

    __slots__ = ()

    def __contains__(self, key: object) -> bool:
        return True


def _searched(lost: Sequence[str]) -> str:
    """What was lost, as a text in which labels are looked for."""
    return _Anything("...") if sum(map(len, lost)) > _MOST_LOST else "\n".join(lost)


def _without_comment(line: str) -> str:
    """`line`, or nothing if it is a comment or holds delimiters only."""
    comment = line.startswith("#") and not line.startswith(SPREADSHEET_ERRORS)
    return "" if comment or not line.strip(" \t,;") else line


def _records(
    lines: list[str], delimiter: str, file: str, findings: Findings
) -> tuple[list[Record], list[str]]:
    """Row number and fields of each line that holds anything; what stands below an open quote is lost."""
    reader = csv.reader(lines, delimiter=delimiter, strict=True)
    records: list[Record] = []
    before = 0
    try:
        for fields in reader:
            if reader.line_num > before + 1:
                raise csv.Error("a quoted field runs over the end of the line")
            before = reader.line_num
            if any(map(str.strip, fields)):
                records.append((before, fields))
    except csv.Error as error:
        findings.add(
            Origin(file=file, row=before + 1),
            found=f"a row that cannot be split ({error})",
            expected="each quoted field closed on its own line",
            remedy="close the quote, or double it inside a quoted field; rows below were not read",
        )
        return records, lines[before:]
    return records, []


def _refuse_uneven(
    uneven: list[Record], expected: int, delimiter: str, file: str, findings: Findings
) -> None:
    remedy = "put text that holds the delimiter in quotes"
    if delimiter == ",":
        remedy += "; with decimal commas, separate the fields with semicolons"
    for row, fields in uneven:
        findings.add(
            Origin(file=file, row=row),
            found=f"{len(fields)} field{'s' * (len(fields) != 1)} separated by {DELIMITERS[delimiter]}",
            expected=f"{expected}, as in the header",
            remedy=remedy,
        )


def refuse_empty(file: str, findings: Findings) -> None:
    """Refuse a table without a header."""
    findings.add(
        Origin(file=file), found="no header", expected="a header and one row per value",
        remedy="fill in the file or delete it",
    )  # fmt: skip


def refuse_no_rows(raw: RawTable, findings: Findings) -> None:
    """Refuse a table that ends with its header."""
    findings.add(
        Origin(file=raw.file, row=raw.header_row), found="a header and nothing below it",
        expected="a header and one row per value", remedy="fill in the file or delete it",
    )  # fmt: skip


def refuse_long(file: str, found: str, findings: Findings) -> None:
    """Refuse a table with too many rows."""
    findings.add(
        Origin(file=file), found=found, expected=f"at most {MOST_ROWS} rows in one campaign",
        remedy="keep one point per voltage step, not the recorded traces",
    )  # fmt: skip


def refused_wide(file: str, columns: int, findings: Findings) -> bool:
    """Whether a table has too many columns, which is a fault."""
    if columns > MOST_COLUMNS:
        findings.add(
            Origin(file=file), found=f"{columns} columns", expected=f"at most {MOST_COLUMNS} columns",
            remedy="use one row per point instead of one column per cell",
        )  # fmt: skip
    return columns > MOST_COLUMNS


def refused_large(file: str, fields: int, findings: Findings) -> bool:
    """Whether a table has too many fields, which is a fault."""
    if fields > MOST_FIELDS:
        findings.add(
            Origin(file=file), found=f"{fields} fields", expected=f"at most {MOST_FIELDS} fields",
            remedy="keep one point per voltage step, not the recorded traces",
        )  # fmt: skip
    return fields > MOST_FIELDS


def refuse_titles(file: str, row: int, line: str, findings: Findings) -> None:
    """Refuse lines above the header."""
    findings.add(
        Origin(file=file, row=row),
        found=f"{shown(line)} above the header",
        expected="the header first",
        remedy="delete the lines above the header, or begin them with #",
    )


def _refuse_single_column(file: str, row: int, line: str, findings: Findings) -> None:
    findings.add(
        Origin(file=file, row=row),
        found=f"a single column, {shown(line)}",
        expected="a header separated by commas, semicolons or tabs",
        remedy="save the table with one of these delimiters",
    )
