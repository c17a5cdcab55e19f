"""Workbooks read cell by cell: what an independent library writes, and what none would write."""

import datetime
import io
import zipfile

import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cornerwise.intake import package as package_room
from cornerwise.intake.package import DamagedBook, Package, beside
from cornerwise.intake.sheets import Displayed, Sheets, Truth, Unreadable, Value, column_letters
from fuzz.readers import SHEET, packed, parts_of, shared

PART = "xl/worksheets/sheet1.xml"
HEAD = '<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetData>'
DATES = ("yyyy-mm-dd", "d/m/yy", "h:mm:ss", "[h]:mm", "mmm-yy", '[Red]"at "d.m.', "[$-409]d\\-mmm")
NUMBERS = (
    "General",
    "0",
    "@",
    "0.00",
    "000",
    "0.0E+00",
    '0.0 "mV"',
    "0\\d",
    "[Blue]0",
    "#,##0_d",
    "0%",
    "# ?/?",
)


def _book(cells: list[list[object]], formats: dict[str, str] | None = None) -> bytes:
    book = openpyxl.Workbook()
    for row in cells:
        book.active.append(row)
    for place, code in (formats or {}).items():
        book.active[place].number_format = code
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def _rows(data: bytes) -> list[tuple[int, tuple[Value, ...]]]:
    sheets = Sheets(Package(data))
    return sheets.rows(next(iter(sheets.parts)))


def _with_cells(inside: str) -> bytes:
    return packed({**parts_of(SHEET), PART: f"{HEAD}{inside}</sheetData></worksheet>".encode()})


_values = (
    st.none()
    | st.floats(-1e300, 1e300).map(lambda x: float(f"{x:.15g}"))
    | st.integers(-(2**53), 2**53)
    | st.booleans()
    | st.text(st.characters(exclude_categories=["Cc", "Cs", "Cn"]), max_size=8).filter(
        lambda text: not text.startswith(("=", "#")) and "_x" not in text
    )
)


@settings(max_examples=60, deadline=None)
@given(cells=st.lists(st.lists(_values, max_size=6), max_size=6), in_one_list=st.booleans())
def test_what_a_library_writes_is_read(cells: list[list[object]], in_one_list: bool) -> None:
    data = _book(cells)
    read = dict(_rows(shared(data) if in_one_list else data))
    for number, row in enumerate(cells, start=1):
        values = read.get(number, ())
        for written, value in zip(row, (*values, *[None] * len(row)), strict=False):
            if isinstance(written, bool):
                assert isinstance(value, Truth)
                assert value.holds is written
            elif isinstance(written, int | float):
                assert value == written
                assert isinstance(value, float)
            else:
                assert (value or "") == (written or "")


@pytest.mark.parametrize("code", NUMBERS)
def test_numbers_and_how_they_are_displayed(code: str) -> None:
    ((_, (value,)),) = _rows(_book([[3.5]], {"A1": code}))
    assert value == 3.5
    assert isinstance(value, Displayed) is (code not in ("General", "0", "@"))
    assert not isinstance(value, Displayed) or value.number_format == code


@pytest.mark.parametrize("code", DATES)
def test_dates_are_told_from_numbers(code: str) -> None:
    ((_, (value,)),) = _rows(_book([[45000.25]], {"A1": code}))
    assert isinstance(value, Unreadable)
    written = openpyxl.utils.datetime.from_excel(45000.25)
    assert value == f"the date or time {written:%Y-%m-%d %H:%M:%S}"


def test_a_date_in_a_workbook_that_counts_from_1904() -> None:
    book = openpyxl.Workbook()
    book.epoch = openpyxl.utils.datetime.CALENDAR_MAC_1904
    book.active.append([datetime.date(2024, 2, 29)])
    stream = io.BytesIO()
    book.save(stream)
    ((_, (value,)),) = _rows(stream.getvalue())
    assert value == "the date or time 2024-02-29 00:00:00"


@pytest.mark.parametrize(
    ("cell", "value"),
    [
        ('<c r="A1"><v>1.50</v></c>', 1.5),
        ("<c><v> 2 </v></c>", 2.0),
        ('<c t="str"><f>A2</f><v>x</v></c>', "x"),
        ('<c t="str"><f>""</f><v></v></c>', None),
        ("<c><f>1+1</f></c>", "a formula without a stored value"),
        ("<c><f>1+1</f><v/></c>", "a formula without a stored value"),
        ('<c t="e"><f>1/0</f><v>#DIV/0!</v></c>', "the spreadsheet error #DIV/0!"),
        ('<c t="d"><v>2024-05-01</v></c>', "the date or time 2024-05-01"),
        ('<c t="inlineStr"><is><r><t>Δ</t></r><r><t>6</t></r><rPh sb="0"><t>delta</t></rPh></is></c>', "Δ6"),
        ('<c t="inlineStr"><is><t>a_x000A_b_x005F_x0041_</t></is></c>', "a\nb_x0041_"),
    ],
)
def test_cells(cell: str, value: Value) -> None:
    rows = _rows(_with_cells(f"<row>{cell}</row>"))
    assert rows == ([] if value is None else [(1, (value,))])


@pytest.mark.parametrize(
    ("inside", "match"),
    [
        ('<row r="2"/><row r="2"/>', "the row '2' after row 2"),
        ('<row r="1048577"/>', "the row '1048577'"),
        ('<row r="-1"/>', "the row '-1'"),
        ('<row r="1e3"/>', "the row '1e3'"),
        ('<row r="1"><row r="2"/></row>', "the row '2'"),
        ('<c r="A1"><v>1</v></c>', "the cell 'A1' out of its place"),
        ('<row r="1"><c r="B1"/><c r="A1"/></row>', "the cell 'A1' out of its place"),
        ('<row r="1"><c r="A2"/></row>', "the cell 'A2' out of its place"),
        ('<row r="1"><c r="XFE1"/></row>', "the cell 'XFE1' out of its place"),
        ('<row r="1"><c r="A1"><c r="B1"/></c></row>', "the cell 'B1' out of its place"),
        ('<row r="1"><c s="99"><v>1</v></c></row>', "the style '99'"),
        ("<row><c><v>1_0</v></c></row>", "the value '1_0' in row 1"),
        ("<row><c><v>nan</v></c></row>", "the value 'nan'"),
        ('<row><c t="s"><v>99</v></c></row>', "the value '99'"),
        ('<row><c t="b"><v>2</v></c></row>', "the value '2'"),
        ('<row><c t="zz"><v>2</v></c></row>', "the value '2'"),
        ("<row>" + "<c/>" * 16_385 + "</row>", "out of its place in row 1"),
    ],
)
def test_what_no_spreadsheet_program_writes(inside: str, match: str) -> None:
    with pytest.raises(DamagedBook, match=match):
        _rows(_with_cells(inside))


def test_a_cell_of_very_many_letters(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("cornerwise.intake.sheets.LONGEST_CELL", 50)
    with pytest.raises(DamagedBook, match="more than 50 letters"):
        _rows(_with_cells(f'<row><c t="str"><v>{"é<!-- -->" * 60}</v></c></row>'))
    with pytest.raises(DamagedBook, match="more than 50 letters"):
        _rows(_with_cells(f'<row><c t="str"><v>{"x" * 60}</v></c></row>'))


def test_more_cells_than_a_table_may_have(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("cornerwise.intake.sheets.MOST_FIELDS", 10)
    with pytest.raises(DamagedBook, match="more than 10 cells"):
        _rows(_with_cells('<row><c r="K1"><v>1</v></c></row>'))


def test_parts_of_one_name_are_refused() -> None:
    stream = io.BytesIO(SHEET)
    with zipfile.ZipFile(stream, "a") as archive:
        archive.writestr("xl/Workbook.xml", b"<workbook/>")
    with pytest.raises(DamagedBook, match=r"two parts are called xl/workbook\.xml"):
        Package(stream.getvalue())


def test_an_archive_that_says_too_little_of_its_size_is_found_out(monkeypatch: pytest.MonkeyPatch) -> None:
    parts = {**parts_of(SHEET), "xl/styles.xml": b"<a>" + b" " * 3_000_000}
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, contents in parts.items():
            archive.writestr(name, contents)
    assert len(stream.getvalue()) < 20_000
    monkeypatch.setattr(package_room, "MOST_PART_BYTES", 1_000_000)
    with pytest.raises(DamagedBook, match=r"xl/styles\.xml in it unpacks to more than 1 MB"):
        _rows(stream.getvalue())


def test_other_packings_and_too_many_parts(monkeypatch: pytest.MonkeyPatch) -> None:
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_LZMA) as archive:
        for name, contents in parts_of(SHEET).items():
            archive.writestr(name, contents)
    with pytest.raises(DamagedBook, match="packed in another way"):
        _rows(stream.getvalue())
    monkeypatch.setattr(package_room, "MOST_PARTS", 3)
    with pytest.raises(DamagedBook, match="more than 3 parts"):
        Package(SHEET)


def test_names_of_parts_and_columns() -> None:
    assert beside("xl/workbook.xml", "../a.xml") == "a.xml"
    assert beside("", "/xl/workbook.xml") == "xl/workbook.xml"
    for number in (1, 26, 27, 702, 703, 16_384):
        assert column_letters(number) == openpyxl.utils.get_column_letter(number)
