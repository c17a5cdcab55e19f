"""Workbooks: a whole campaign in one, or one table of a folder; no cell is read for what it does not show."""

import datetime
import io
import zipfile
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from cornerwise.campaign import StatedCharge
from cornerwise.intake import book as book_room
from cornerwise.intake import files, package, read
from cornerwise.intake.book import digits
from intake.writing import (
    CHARGES,
    LABELS,
    TOML,
    VOLTAGES,
    assert_refused,
    content,
    folder,
    problems,
    wide_rows,
)

KEYS: list[list[Any]] = [
    ["key", "value"],
    ["wild_type", "WT"],
    ["charge.value_e0", 13],
    ["charge.sem_e0", 0.5],
]


def curve_cells(labels: Sequence[Any] = LABELS) -> list[list[Any]]:
    """Typed cells of the curves."""
    rows: list[list[Any]] = [["construct", "cell", "voltage_mV", "charge"]]
    for label in labels:
        rows += [[label, "c1", v, q] for v, q in zip(VOLTAGES, CHARGES, strict=True)]
    return rows


def book(path: Path, **sheets: list[list[Any]]) -> Any:
    """A workbook of these sheets, besides `campaign` and `curves` unless given; saved by `saved`."""
    workbook = openpyxl.Workbook()
    workbook.remove(workbook.active)
    for title, rows in {"campaign": KEYS, "curves": curve_cells(), **sheets}.items():
        sheet = workbook.create_sheet(title)
        for row in rows:
            sheet.append(row)
    workbook.target = path / "book.xlsx"
    return workbook


def saved(workbook: Any) -> Path:
    workbook.save(workbook.target)
    return Path(workbook.target)


def with_stored_values(path: Path, values: dict[str, str]) -> None:
    """Write values beside formulas, as a spreadsheet program does on saving."""
    with zipfile.ZipFile(path) as archive:
        parts = {name: archive.read(name) for name in archive.namelist()}
    for formula, value in values.items():
        for name in parts:
            if name.startswith("xl/worksheets/"):
                new = f"<f>{formula}</f><v>{value}</v>".encode()
                for empty in ("<v />", "<v/>", "<v></v>"):  # as the XML library at hand writes it
                    parts[name] = parts[name].replace(f"<f>{formula}</f>{empty}".encode(), new)
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w") as archive:
        for name, data in parts.items():
            archive.writestr(name, data)
    path.write_bytes(buffer.getvalue())


def test_a_campaign_in_one_workbook_says_the_same_as_a_folder(tmp_path: Path) -> None:
    campaign = read(saved(book(tmp_path)))
    assert content(campaign) == content(read(folder(tmp_path / "a")))
    assert [file.name for file in campaign.inputs] == ["book.xlsx"]
    assert campaign.constructs[0].curves[0].origin.file == "book.xlsx, sheet curves"
    assert campaign.constructs[0].curves[0].origin.row == 2


def test_every_sheet(tmp_path: Path) -> None:
    path = saved(
        book(
            tmp_path,
            campaign=[["wild_type", "A"], ["replicates", 2000.0], ["charge", "measured"], ["# a note", 1, 2]],
            mutations=[
                ["construct", "mutations"],
                ["A", None],
                ["B", "E181A"],
                ["C", "R212Q"],
                ["D", "E181A, R212Q"],
            ],
            cycles=[["name", "mutations"], ["bridge", "R212Q/E181A"]],
            curves=curve_cells("AB"),
            medians=[["construct", "median_mV", "sem_mV", "n"], ["C", -50, 1.5, 4], ["D", -40.5, 1.5, 4.0]],
            charges=[["construct", "cell", "charge_e0"], ["A", "q1", 13], ["A", "q2", 12.5]],
            notes=[["whatever"]],
            Sheet9=[],
        )
    )
    campaign = read(path)
    assert [cycle.name for cycle in campaign.cycles] == ["bridge"]
    assert [c.median.n for c in campaign.constructs if c.median] == [4, 4]
    assert [r.charge_e0 for r in campaign.constructs[0].charge_replicates] == [13.0, 12.5]
    assert campaign.settings.replicates == 2000


def test_one_table_of_a_folder(tmp_path: Path) -> None:
    rows = [[row[0], *(float(v) for v in row[1:])] if i else row for i, row in enumerate(wide_rows())]
    workbook = book(tmp_path)
    for title in workbook.sheetnames:
        workbook.remove(workbook[title])
    sheet = workbook.create_sheet("Sheet1")
    for row in [[float(row[0]), *row[1:]] if i else row for i, row in enumerate(rows)]:
        sheet.append(row)
    path = folder(tmp_path / "a", curves_xlsx=saved(workbook).read_bytes())
    assert content(read(path)) == content(read(folder(tmp_path / "b")))


def test_labels_in_cells_survive(tmp_path: Path) -> None:
    labels = ["NA", "001", "1E5", "nan", "True"]
    mutations = [["construct", "mutations"], *([label, f"E{181 + i}A"] for i, label in enumerate(labels))]
    path = saved(book(tmp_path, mutations=mutations, curves=curve_cells([*LABELS[:1], *labels, *LABELS[2:]])))
    assert {c.label for c in read(path).constructs} == {"WT", *labels, "R212Q", "E181A/R212Q"}


def test_a_number_as_a_label_is_its_digits(tmp_path: Path) -> None:
    keys = [["wild_type", 1], *KEYS[2:]]
    rows = curve_cells([1.0, *LABELS[1:]])
    for row in rows[1:]:
        row[1] = 7
    campaign = read(saved(book(tmp_path, campaign=keys, curves=rows)))
    assert campaign.constructs[0].label == "1"
    assert campaign.constructs[0].curves[0].cell == "7"


@pytest.mark.parametrize(
    ("number", "text"), [(1.0, "1"), (1.5, "1.5"), (-2, "-2"), (0.1, "0.1"), (1e22, "1e+22")]
)
def test_digits(number: float, text: str) -> None:
    assert digits(number) == text


@pytest.mark.parametrize("number_format", ["000", "0.00E+00", "0.0", "dd"])
def test_a_label_displayed_otherwise(number_format: str, tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook["curves"].append([1, "c1", 40, 1])
    workbook["curves"]["A34"].number_format = number_format
    found = problems(saved(workbook))
    assert (found[0].origin.file, found[0].origin.row) == ("book.xlsx, sheet curves", 34)
    assert found[0].origin.column == "construct"


@pytest.mark.parametrize(
    ("value", "match"),
    [
        ("=1+1", "a formula without a stored value.*open the workbook.*and save it"),
        ("#N/A", "the spreadsheet error #N/A"),
        ("#DIV/0!", "the spreadsheet error #DIV/0!"),
        (True, "the truth value TRUE"),
        (datetime.datetime(2020, 5, 1), "the date or time 2020-05-01"),
        (datetime.time(5, 1), "the date or time 05:01"),
    ],
)
@pytest.mark.parametrize(("cell", "column"), [("D4", "charge"), ("C4", "voltage_mV"), ("A4", "construct")])
def test_cells_that_cannot_be_read(value: object, match: str, cell: str, column: str, tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook["curves"][cell] = value
    path = saved(workbook)
    assert_refused(path, file="book.xlsx, sheet curves", row=4, column=column, match=match)


@pytest.mark.parametrize(
    ("value", "match"),
    [
        (None, "found nothing"),
        ("x", "'x'"),
        ("0,5", "expected a number with a decimal point"),
        ("nan", "finite"),
    ],
)
def test_cells_that_are_no_numbers(value: object, match: str, tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook["curves"]["D4"] = value
    assert_refused(saved(workbook), file="book.xlsx, sheet curves", row=4, column="charge", match=match)


def test_formulas_count_with_their_stored_values(tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook["curves"]["D4"] = "=4/50"
    path = saved(workbook)
    with_stored_values(path, {"4/50": "0.08"})
    assert read(path).constructs[0].curves[0].charge[2] == 0.08


def test_values_beside_the_table(tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook["curves"]["F9"] = "discard?"
    path = saved(workbook)
    assert_refused(
        path,
        file="book.xlsx, sheet curves",
        row=9,
        column="F",
        match="'discard\\?' to the right of the table",
    )


def test_blank_rows_and_comments_keep_the_row_numbers(tmp_path: Path) -> None:
    rows = curve_cells()
    rows[5][3] = "x"
    mixed = [["# note"], [], rows[0], [], *rows[1:]]
    path = saved(book(tmp_path, curves=mixed))
    assert_refused(path, file="book.xlsx, sheet curves", row=9, column="charge", match="'x'")


@pytest.mark.parametrize(
    ("title", "match"), [("curve", "did you mean curves"), ("raw data", "delete the sheet, or call it notes")]
)
def test_a_stray_sheet(title: str, match: str, tmp_path: Path) -> None:
    path = saved(book(tmp_path, **{title: [["x"]]}))
    assert_refused(path, file=f"book.xlsx, sheet {title}", match=match)


def test_several_sheets_in_one_table_of_a_folder(tmp_path: Path) -> None:
    workbook = book(tmp_path)
    path = folder(tmp_path / "a", curves_xlsx=saved(workbook).read_bytes())
    assert_refused(
        path, file="curves.xlsx", match="2 sheets, 'campaign', 'curves'; expected the table curves alone"
    )


@pytest.mark.parametrize(
    ("row", "column", "match"),
    [
        (["seed", True], "seed", "the truth value true"),
        (["seed", "3"], "seed", "the text '3'; expected a whole number"),
        (["seed", 1.5], "seed", "the number 1.5; expected a whole number"),
        (["seed"], "seed", "no value of seed"),
        (["seed", 1, 2], "seed", "3 cells"),
        ([None, 1], None, "a value without a key"),
        (["wild_type", "WT"], "wild_type", "the key wild_type again"),
        (["sead", 1], "sead", "did you mean seed"),
        (["charge.value", 1], "charge.value", "did you mean value_e0"),
    ],
)
def test_rows_of_the_campaign_sheet(row: list[Any], column: str | None, match: str, tmp_path: Path) -> None:
    path = saved(book(tmp_path, campaign=[*KEYS, row]))
    if column == "charge.value":
        column = "charge value"
    assert_refused(path, file="book.xlsx, sheet campaign", row=5, column=column, match=match)


def test_mutations_and_cycles_are_refused_at_their_rows(tmp_path: Path) -> None:
    path = saved(
        book(
            tmp_path,
            mutations=[
                ["construct", "mutations"],
                ["E181A", "E181A"],
                ["E181A", "E181A"],
                ["R212Q", "r212q"],
            ],
            cycles=[["mutations"], ["E181A/R212Q"], ["E181A"]],
        )
    )
    found = problems(path)
    assert [(p.origin.file.rpartition(" ")[2], p.origin.row) for p in found] == [
        ("mutations", 3), ("mutations", 4), ("cycles", 3)
    ]  # fmt: skip


def test_no_campaign_sheet(tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook["campaign"].title = "champaign"
    found = problems(saved(workbook))
    assert "no sheet campaign among 'champaign', 'curves'" in str(found[0])
    assert "did you mean 'champaign'?" in str(found[0])


def test_no_voltages(tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook.remove(workbook["curves"])
    assert "neither a sheet curves nor a sheet medians" in str(problems(saved(workbook))[0])


@pytest.mark.parametrize("data", [b"", b"PK", b"construct,cell", b"\xd0\xcf\x11\xe0old"])
def test_a_file_that_is_no_workbook(data: bytes, tmp_path: Path) -> None:
    path = tmp_path / "book.xlsx"
    path.write_bytes(data)
    assert_refused(path, file="book.xlsx", match="cannot be opened as a workbook.*save it anew")


def test_an_archive_that_is_no_workbook(tmp_path: Path) -> None:
    path = tmp_path / "book.xlsx"
    with zipfile.ZipFile(path, "w") as archive:
        archive.writestr("a.txt", "a")
    assert_refused(path, file="book.xlsx", match="cannot be opened as a workbook; it is damaged")


def test_a_stated_charge_in_two_rows(tmp_path: Path) -> None:
    assert read(saved(book(tmp_path))).settings.charge == StatedCharge(value_e0=13.0, sem_e0=0.5)
    assert TOML.endswith("sem_e0 = 0.5 }\n")


def test_a_damaged_table_of_a_folder(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves_xlsx=b"PK damaged")
    assert_refused(path, file="curves.xlsx", match="cannot be opened as a workbook")


def test_an_empty_table_of_a_folder(tmp_path: Path) -> None:
    workbook = book(tmp_path, curves=[])
    workbook.remove(workbook["campaign"])
    path = folder(tmp_path / "a", curves_xlsx=saved(workbook).read_bytes())
    assert_refused(path, file="curves.xlsx, sheet curves", match="no header")


def test_a_header_that_cannot_be_read(tmp_path: Path) -> None:
    workbook = book(tmp_path)
    workbook["curves"]["C1"] = "=A1"
    path = saved(workbook)
    assert_refused(
        path, file="book.xlsx, sheet curves", row=1, column="C", match="formula without a stored value"
    )


def test_a_workbook_that_is_too_large(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = saved(book(tmp_path))
    monkeypatch.setattr(package, "MOST_UNPACKED_BYTES", 1000)
    assert_refused(path, file="book.xlsx", match="unpacks to more than 0 MB")
    monkeypatch.setattr(files, "MOST_BYTES", 1000)
    assert_refused(path, file="book.xlsx", match="at most 0 MB")


def test_a_sheet_with_too_many_rows(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = saved(book(tmp_path))
    monkeypatch.setattr(book_room, "MOST_ROWS", 20)
    assert_refused(path, file="book.xlsx, sheet curves", match="33 rows; expected at most")


def test_titles_above_the_header_of_a_sheet(tmp_path: Path) -> None:
    path = saved(book(tmp_path, curves=[["Cells of May"], [], *curve_cells()]))
    match = "'Cells of May' above the header; .*delete the lines above"
    assert_refused(path, file="book.xlsx, sheet curves", row=1, match=match)
