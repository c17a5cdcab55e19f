"""The parts of a workbook as sheets of typed cells, read strictly.

A value is a text, a number, `Unreadable` with the reason, or None for an empty cell. Numbers that are
displayed otherwise than by their digits are `Displayed`. A formula counts with the value stored beside it.
What a spreadsheet program would not write is refused rather than mended: rows or cells out of order, a text
that is not in the list of texts, a sheet whose part is missing.

Written after ECMA-376 (Office Open XML), part 1, chapters 12 and 18, and part 2 for the container.
"""

from __future__ import annotations

import datetime
import re
from collections.abc import Mapping
from dataclasses import dataclass, field

from .markup import parse
from .package import MOST_UNPACKED_BYTES, DamagedBook, Package, beside, relations_of

MOST_SHEET_ROWS = 1_048_576
MOST_SHEET_COLUMNS = 16_384
MOST_FIELDS = 8_000_000  # of a sheet, empty ones before the last of a row included
MOST_STRING_BYTES = 200_000_000
LONGEST_CELL = 1_000_000  # letters; a spreadsheet program allows 32767

_REFERENCE = re.compile(r"\$?([A-Z]{1,3})\$?([1-9][0-9]{0,6})")
_NUMBER = re.compile(r"[+-]?(?:[0-9]+(?:\.[0-9]*)?|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")
_ESCAPED = re.compile(r"_x([0-9A-Fa-f]{4})_")
_NO_DATE = re.compile(r'"[^"]*"|\\.|_.|\*.|\[(?!h+\]|m+\]|s+\])[^\]]*\]|General', re.IGNORECASE)
_DATE_IDS = frozenset((*range(14, 23), *range(27, 37), *range(45, 48), *range(50, 59)))
_BUILT_IN = {
    0: "General", 1: "0", 2: "0.00", 3: "#,##0", 4: "#,##0.00", 9: "0%", 10: "0.00%", 11: "0.00E+00",
    12: "# ?/?", 13: "# ??/??", 48: "##0.0E+0", 49: "@",
}  # fmt: skip
_PLAIN_FORMATS = ("General", "0", "@")  # those that display a number as its digits

Value = str | float | None


class Unreadable(str):
    """What stands in a cell that cannot be read."""

    __slots__ = ()


class Truth(Unreadable):
    """A truth value, which only a setting may have."""

    __slots__ = ()

    @property
    def holds(self) -> bool:
        """Whether it is the true one."""
        return self.endswith("TRUE")


class Displayed(float):
    """A number that is displayed otherwise than by its digits."""

    __slots__ = ("number_format",)
    number_format: str


@dataclass(frozen=True, kw_only=True, slots=True)
class _Formats:
    """How the styles of a workbook display numbers; by index of a style."""

    codes: tuple[str, ...] = ("General",)
    dates: frozenset[int] = frozenset()  # styles that display dates or times
    from_1904: bool = False


@dataclass(kw_only=True, slots=True)
class _Cell:
    """A cell while it is read."""

    column: int
    kind: str
    style: int
    formula: bool = False
    has_value: bool = False
    letters: int = 0
    texts: list[str] = field(default_factory=list)


class Sheets:
    """All sheets of a workbook.

    Parameters
    ----------
    package : Package
        The archive.

    Raises
    ------
    DamagedBook
        If it holds no sound workbook.
    """

    def __init__(self, package: Package) -> None:
        self._package = package
        main = _only(_relations(package, ""), "officeDocument")
        relations = _relations(package, main)
        self.parts, from_1904 = _workbook(package, main, relations)  # part of each sheet, by title
        styles = _only(relations, "styles", required=False)
        self._formats = _styles(package, styles, from_1904=from_1904)
        strings = _only(relations, "sharedStrings", required=False)
        self._strings = _strings(package, strings) if strings else []

    def rows(self, title: str) -> list[tuple[int, tuple[Value, ...]]]:
        """Row number and values of every row that holds any; empty cells at its end are cut off."""
        reader = _SheetReader(self.parts[title], self._strings, self._formats)
        pieces = self._package.pieces(reader.name, most=MOST_UNPACKED_BYTES)
        parse(pieces, reader.name, begin=reader.begin, end=reader.end, text=reader.text)
        return reader.rows


class _SheetReader:
    """Takes the elements of a sheet and gives its rows."""

    def __init__(self, name: str, strings: list[str], formats: _Formats) -> None:
        self.name, self.rows = name, list[tuple[int, tuple[Value, ...]]]()
        self._strings, self._formats = strings, formats
        self._row = self._column = self._fields = 0
        self._in_row = False
        self._values: list[Value] = []
        self._cell: _Cell | None = None
        self._listening = False
        self._phonetic = 0

    def begin(self, element: str, attributes: Mapping[str, str]) -> None:
        if element == "c":
            self._begin_cell(attributes)
        elif element == "row":
            self._begin_row(attributes)
        elif self._cell is not None:
            if element == "f":
                self._cell.formula = True
            elif element == "rPh":
                self._phonetic += 1
            elif element == "v" or (element == "t" and not self._phonetic):
                self._cell.has_value = self._listening = True

    def text(self, text: str) -> None:
        if self._listening and self._cell is not None:
            self._cell.texts.append(text)
            self._cell.letters += len(text)
            if self._cell.letters > LONGEST_CELL:
                self._refuse(f"a cell of more than {LONGEST_CELL} letters")

    def end(self, element: str) -> None:
        if element in ("v", "t"):
            self._listening = False
        elif element == "rPh":
            self._phonetic -= 1
        elif element == "c" and self._cell is not None:
            cell, self._cell = self._cell, None
            value = self._value(cell)
            if value is not None and value != "":
                self._values.extend([None] * (cell.column - 1 - len(self._values)))
                self._values.append(value)
        elif element == "row":
            self._in_row = False
            self._keep_row()

    def _keep_row(self) -> None:
        self._fields += len(self._values)
        if self._fields > MOST_FIELDS:
            self._refuse(f"more than {MOST_FIELDS} cells")
        if self._values:
            self.rows.append((self._row, tuple(self._values)))

    def _refuse(self, what: str) -> None:
        raise DamagedBook(f"{self.name} in it has {what}")

    def _begin_row(self, attributes: Mapping[str, str]) -> None:
        number = attributes.get("r", str(self._row + 1))
        if self._in_row or not _is_index(number, MOST_SHEET_ROWS + 1) or int(number) <= self._row:
            self._refuse(f"the row {number[:20]!r} after row {self._row}")
        self._row, self._values, self._column, self._in_row = int(number), [], 0, True

    def _begin_cell(self, attributes: Mapping[str, str]) -> None:
        column = self._column + 1
        if reference := attributes.get("r"):
            column = _column(reference, self._row)
        if self._cell or not self._in_row or not self._column < column <= MOST_SHEET_COLUMNS:
            self._refuse(f"the cell {attributes.get('r', '')[:20]!r} out of its place in row {self._row}")
        style = attributes.get("s", "0")
        if not _is_index(style, len(self._formats.codes)):
            self._refuse(f"the style {style[:20]!r} in row {self._row}, of which nothing is known")
        self._column = column
        self._cell = _Cell(column=column, kind=attributes.get("t", "n"), style=int(style))

    def _value(self, cell: _Cell) -> Value:
        text = "".join(cell.texts)
        if not cell.has_value or (not text and cell.kind not in ("str", "inlineStr")):
            return Unreadable("a formula without a stored value") if cell.formula else None
        if cell.kind == "n":
            return self._number(text.strip(), cell.style)
        if cell.kind == "s":
            known = _is_index(text, len(self._strings))
            return self._strings[int(text)] if known else self._nonsense(text)
        if cell.kind in ("str", "inlineStr"):
            return _ESCAPED.sub(_letter, text)
        if cell.kind == "b" and text in ("0", "1", "true", "false"):
            return Truth(f"the truth value {'TRUE' if text in ('1', 'true') else 'FALSE'}")
        if cell.kind == "e":
            return Unreadable(f"the spreadsheet error {text}")
        if cell.kind == "d":
            return Unreadable(f"the date or time {text}")
        return self._nonsense(text)

    def _number(self, text: str, style: int) -> Value:
        if not _NUMBER.fullmatch(text):
            return self._nonsense(text)
        number = float(text)
        if style in self._formats.dates:
            return Unreadable(f"the date or time {_date(number, from_1904=self._formats.from_1904)}")
        code = self._formats.codes[style]
        if code in _PLAIN_FORMATS:
            return number
        displayed = Displayed(number)
        displayed.number_format = code
        return displayed

    def _nonsense(self, text: str) -> Value:
        self._refuse(f"the value {text[:20]!r} in row {self._row}, which is none of its kind")
        return None


def _is_index(text: str, size: int) -> bool:
    """Whether a text is a number from 0 to below `size`."""
    return text.isascii() and text.isdigit() and len(text) < 10 and int(text) < size


def _column(reference: str, row: int) -> int:
    """Number of the column of a cell's reference, from 1; 0 if it is none of this row."""
    match = _REFERENCE.fullmatch(reference)
    if match is None or int(match[2]) != row:
        return 0
    number = 0
    for letter in match[1]:
        number = 26 * number + ord(letter) - ord("A") + 1
    return number


def column_letters(number: int) -> str:
    """Letters of a column, numbered from 1.

    Examples
    --------
    >>> column_letters(1), column_letters(28)
    ('A', 'AB')
    """
    letters = ""
    while number:
        number, letter = divmod(number - 1, 26)
        letters = chr(ord("A") + letter) + letters
    return letters


def _letter(match: re.Match[str]) -> str:
    return chr(int(match[1], 16))


def _date(number: float, *, from_1904: bool) -> str:
    """A spreadsheet's date or time in words."""
    if 0 <= number < 1:
        seconds = round(number * 86_400) % 86_400
        return f"{seconds // 3600:02}:{seconds // 60 % 60:02}:{seconds % 60:02}"
    start = datetime.datetime(1904, 1, 1) if from_1904 else datetime.datetime(1899, 12, 30)
    try:
        return str(start + datetime.timedelta(seconds=round(number * 86_400)))
    except OverflowError:
        return f"stored as {number:g}"


def _relations(package: Package, name: str) -> dict[str, tuple[str, str]]:
    """Kind and part of everything the part `name` refers to inside the package, by its identifier."""
    found: dict[str, tuple[str, str]] = {}

    def begin(element: str, attributes: Mapping[str, str]) -> None:
        if element == "Relationship" and attributes.get("TargetMode") != "External":
            kind = attributes.get("Type", "").rpartition("/")[2]
            found[attributes.get("Id", "")] = kind, beside(name, attributes.get("Target", ""))

    part = relations_of(name)
    parse(package.pieces(part), part, begin=begin, end=lambda _: None)
    return found


def _only(relations: Mapping[str, tuple[str, str]], kind: str, *, required: bool = True) -> str:
    """The part of this kind; "" where there is none and it is not required."""
    parts = [part for own, part in relations.values() if own == kind]
    if len(parts) > 1 or (required and not parts):
        raise DamagedBook(f"it is damaged: {len(parts)} parts of the kind {kind}")
    return parts[0] if parts else ""


def _workbook(
    package: Package, name: str, relations: Mapping[str, tuple[str, str]]
) -> tuple[dict[str, str], bool]:
    """Part of each sheet with cells, by title in the order of the workbook; whether dates begin in 1904."""
    sheets: dict[str, str] = {}
    from_1904 = False

    def begin(element: str, attributes: Mapping[str, str]) -> None:
        nonlocal from_1904
        if element == "workbookPr":
            from_1904 = attributes.get("date1904") in ("1", "true")
        if element != "sheet":
            return
        title = attributes.get("name", "")
        identifier = next((v for key, v in attributes.items() if key.endswith("relationships id")), "")
        kind, part = relations.get(identifier, ("", ""))
        if not title or title in sheets or not kind:
            raise DamagedBook(f"it is damaged: the sheet {title[:40]!r} is listed twice or leads nowhere")
        if kind == "worksheet":
            sheets[title] = part

    parse(package.pieces(name), name, begin=begin, end=lambda _: None)
    for title, part in sheets.items():
        if part not in package:
            raise DamagedBook(f"it is damaged: the sheet {title[:40]!r} is missing")
    return sheets, from_1904


def _styles(package: Package, name: str, *, from_1904: bool) -> _Formats:
    """How each style displays a number."""
    if not name:
        return _Formats(from_1904=from_1904)
    custom: dict[str, str] = {}
    used: list[str] = []
    inside: list[str] = []

    def begin(element: str, attributes: Mapping[str, str]) -> None:
        inside.append(element)
        if element == "numFmt" and "dxf" not in inside:
            custom[attributes.get("numFmtId", "")] = attributes.get("formatCode", "")
        elif element == "xf" and "cellXfs" in inside:
            used.append(attributes.get("numFmtId", "0"))

    def end(_: str) -> None:
        inside.pop()

    parse(package.pieces(name), name, begin=begin, end=end)
    codes = tuple(_code(number, custom) for number in used) or ("General",)
    dates = frozenset(style for style, number in enumerate(used) if _is_date(number, custom))
    return _Formats(codes=codes, dates=dates, from_1904=from_1904)


def _code(number: str, custom: Mapping[str, str]) -> str:
    if number in custom:
        return custom[number]
    return _BUILT_IN.get(int(number), f"number {number}") if _is_index(number, 1000) else "General"


def _is_date(number: str, custom: Mapping[str, str]) -> bool:
    if number in custom:
        return re.search("[dmhys]", _NO_DATE.sub("", custom[number]), re.IGNORECASE) is not None
    return _is_index(number, 1000) and int(number) in _DATE_IDS


def _strings(package: Package, name: str) -> list[str]:
    """The texts that cells refer to by number."""
    strings: list[str] = []
    texts: list[str] = []
    inside: list[str] = []

    def begin(element: str, _: Mapping[str, str]) -> None:
        inside.append(element)

    def text(letters: str) -> None:
        if inside and inside[-1] == "t" and "rPh" not in inside:
            texts.append(letters)

    def end(element: str) -> None:
        inside.pop()
        if element == "si":
            strings.append(_ESCAPED.sub(_letter, "".join(texts)))
            texts.clear()

    pieces = package.pieces(name, most=MOST_STRING_BYTES)
    parse(pieces, name, begin=begin, end=end, text=text)
    return strings
