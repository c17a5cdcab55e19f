"""Typed columns of a table, every fault told with its row and column."""

from __future__ import annotations

from collections.abc import Collection, Sequence

import numpy as np
from numpy.typing import NDArray

from ..campaign import FloatArray
from ..errors import Origin
from . import allowed
from .findings import Findings, shown
from .header import Field, RawTable, match_header
from .numbers import looks_grouped, parse_number, refusal

TextArray = NDArray[np.object_]
IntArray = NDArray[np.int64]
BoolArray = NDArray[np.bool_]

LONGEST_TEXT = 1000  # letters of a label or a citation
SPREADSHEET_ERRORS = ("#N/A", "#NULL!", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NUM!")


class Table:
    """Typed access to the columns of a `RawTable`; every fault goes to the findings.

    Parameters
    ----------
    raw : RawTable
        The table as text.
    fields : sequence of Field
        The columns it may have.
    findings : Findings
        Where faults go.
    cells : collection of int
        Columns that hold one cell each (the wide layout).
    """

    def __init__(
        self, raw: RawTable, fields: Sequence[Field], findings: Findings, *, cells: Collection[int] = ()
    ) -> None:
        self.raw = raw
        self.findings = findings
        self.fields = {field.name: field for field in fields}
        findings.take_columns(raw.file, raw.header)
        self.found = match_header(raw, fields, findings, cells=cells)
        self.readable = all(field.base in self.found for field in fields if field.required)
        self._marks: dict[str, tuple[Origin, str]] = {}  # decimal mark: where it was first seen, and how

    def __len__(self) -> int:
        return len(self.raw.rows)

    def __contains__(self, base: str) -> bool:
        return base in self.found

    def header(self, base: str) -> str:
        """Return the header of the column `base`, with its unit."""
        return self.raw.header[self.found[base]]

    def unit(self, base: str) -> str:
        """Return the unit in the header of the column `base`; "" where it has none."""
        return self.header(base).partition("_")[2]

    def origin(self, index: int, base: str | None = None) -> Origin:
        """Return the place of row `index` (from 0) in the column `base`."""
        column = None if base is None else self.header(base)
        return Origin(file=self.raw.file, row=int(self.raw.rows[index]), column=column)

    def refuse(self, index: int, base: str, *, found: str, expected: str, remedy: str) -> None:
        """Add a fault at row `index` (from 0) of the column `base`."""
        self.findings.add(self.origin(index, base), found=found, expected=expected, remedy=remedy)

    def filled(self, base: str) -> BoolArray:
        """In which rows the column `base` holds anything, shape (n_rows,); nowhere when it is missing."""
        if base not in self.found:
            return np.zeros(len(self), dtype=bool)
        return np.array([bool(text.strip()) for text in self.raw.columns[self.found[base]]], dtype=bool)

    def text(self, base: str) -> TextArray:
        """Read a column of words, shape (n_rows,); "" where it is empty or the column is missing."""
        if base not in self.found:
            return np.full(len(self), "", dtype=object)
        codes, uniques = factorize(self.raw.columns[self.found[base]])
        stripped = np.array([text.strip() for text in uniques], dtype=object)
        wrong = [
            text in SPREADSHEET_ERRORS or not text.isprintable() or len(text) > LONGEST_TEXT
            for text in stripped
        ]
        for index in np.flatnonzero(np.array(wrong, dtype=bool)[codes]):
            self._refuse_word(int(index), base, stripped[codes[index]])
        return stripped[codes]

    def labels(self, base: str) -> TextArray:
        """Read a column of words in which none may be empty, shape (n_rows,)."""
        texts = self.text(base)
        remedy = "fill in the label or delete the row"
        for index in np.flatnonzero(texts == "") if base in self else ():
            self.refuse(int(index), base, found="nothing", expected="a label", remedy=remedy)
        return texts

    def numbers(self, base: str, *, empty: bool = False) -> FloatArray:
        """Read a column of numbers, shape (n_rows,); NaN where it holds none, which is a fault.

        With `empty`, an empty field is NaN without being a fault.
        """
        if base not in self.found:
            return np.full(len(self), np.nan)
        return self.block([self.found[base]], empty=empty).ravel()

    def block(self, columns: Sequence[int], *, empty: bool = False) -> FloatArray:
        """Read several columns of numbers by index, shape (n_columns, n_rows), as `numbers` reads one."""
        codes, uniques = factorize([text for column in columns for text in self.raw.columns[column]])
        parsed = [parse_number(text, self.raw.delimiter) for text in uniques]
        values = np.array([np.nan if number is None else number for number in parsed], dtype=np.float64)
        at_fault = [
            number is None and not (empty and not text.strip())
            for number, text in zip(parsed, uniques, strict=True)
        ]
        for flat in np.flatnonzero(np.array(at_fault, dtype=bool)[codes]).tolist():
            found, expected, remedy = refusal(uniques[codes[flat]], self.raw.delimiter)
            self.findings.add(self._place(flat, columns), found=found, expected=expected, remedy=remedy)
        for mark in ",.":
            marked = [
                mark in text and number is not None for number, text in zip(parsed, uniques, strict=True)
            ]
            for flat in np.flatnonzero(np.array(marked, dtype=bool)[codes])[:1].tolist():
                self._marks.setdefault(mark, (self._place(flat, columns), uniques[codes[flat]]))
        values[self._refuse_grouped(columns, codes, uniques)] = np.nan
        return np.asarray(values[codes].reshape(len(columns), len(self)))

    def outside(self, base: str, values: FloatArray) -> BoolArray:
        """Which values of a column, shape (n_rows,), in the first of its units, are beyond its bounds."""
        return allowed.outside(self.fields[base].values if base in self.fields else {}, values)

    def whole_numbers(self, base: str, *, empty: bool = False) -> FloatArray:
        """Read a column of counts, shape (n_rows,); NaN where it holds none."""
        values = self.numbers(base, empty=empty)
        wrong = np.isfinite(values) & (self.outside(base, values) | (values != np.round(values)))
        for index in np.flatnonzero(wrong):
            self.refuse(
                int(index), base, found=f"{values[index]:g}",
                expected=f"a whole number, at least {self.fields[base].values['minimum']}",
                remedy="enter the number of independent cells or measurements",
            )  # fmt: skip
        return np.where(wrong, np.nan, values)

    def check_decimal_mark(self) -> None:
        """Refuse a file that writes some numbers with a point and others with a comma."""
        if len(self._marks) == 2:
            (place, comma), (other, point) = self._marks[","], self._marks["."]
            self.findings.add(
                place,
                found=f"{shown(comma)} here and {shown(point)} in row {other.row}",
                expected="one decimal mark in the whole file",
                remedy="write all numbers with a point or all with a comma, without thousands separators",
            )

    def _place(self, flat: int, columns: Sequence[int]) -> Origin:
        column, index = divmod(flat, len(self))
        name = self.raw.header[columns[column]]
        return Origin(file=self.raw.file, row=int(self.raw.rows[index]), column=name)

    def _refuse_grouped(self, columns: Sequence[int], codes: IntArray, uniques: Sequence[str]) -> list[int]:
        """Refuse a column between tabs in which every comma may set off thousands; return their codes."""
        commas = [code for code, text in enumerate(uniques) if "," in text]
        if self.raw.delimiter != "\t" or not commas or not all(looks_grouped(uniques[c]) for c in commas):
            return []
        flat = int(np.flatnonzero(codes == commas[0])[0])
        self.findings.add(
            self._place(flat, columns),
            found=f"{shown(uniques[commas[0]])}, which may be a thousand times another value",
            expected="no thousands separators",
            remedy="write 1500 or, if the comma is a decimal mark, separate the fields with semicolons",
        )
        return commas

    def _refuse_word(self, index: int, base: str, text: str) -> None:
        found, remedy = f"the spreadsheet error {text}", "mend the formula or type the label"
        if len(text) > LONGEST_TEXT:
            found, remedy = f"{len(text)} letters", f"shorten it to {LONGEST_TEXT} letters at most"
        elif text not in SPREADSHEET_ERRORS:
            codes = ", ".join(f"U+{ord(c):04X}" for c in text if not c.isprintable())
            found, remedy = f"{text!a} with an invisible character ({codes})", "type the label anew"
        self.refuse(index, base, found=found, expected="a label of visible characters", remedy=remedy)


def factorize(texts: Sequence[str] | TextArray) -> tuple[IntArray, list[str]]:
    """Codes, shape (n,), of each text in the list of different texts."""
    number: dict[str, int] = {}
    codes = np.fromiter((number.setdefault(text, len(number)) for text in texts), np.int64, len(texts))
    return codes, list(number)
