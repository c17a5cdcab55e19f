"""Encodings, delimiters, field counts, comments, quotes: a text file is read as meant or not at all."""

from pathlib import Path

import pytest

from cornerwise.intake import read, text
from intake.writing import LABELS, assert_refused, content, curve_rows, folder, problems, text_of, wide_rows

PLAIN = text_of(curve_rows())


@pytest.fixture
def expected(tmp_path: Path) -> object:
    return content(read(folder(tmp_path / "expected")))


@pytest.mark.parametrize(
    "encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32", "cp1252"]
)
def test_every_encoding_gives_the_same(encoding: str, tmp_path: Path, expected: object) -> None:
    assert content(read(folder(tmp_path / "a", curves=PLAIN.encode(encoding)))) == expected


@pytest.mark.parametrize("encoding", ["utf-8", "utf-16", "utf-16-le", "cp1252"])
def test_a_letter_beyond_ascii_survives(encoding: str, tmp_path: Path) -> None:
    toml = 'wild_type = "WT°"\ncharge = { value_e0 = 13.0, sem_e0 = 0.5 }\n'
    rows = curve_rows(("WT°", *LABELS[1:]))
    path = folder(tmp_path / "a", toml=toml.encode(encoding), curves=text_of(rows).encode(encoding))
    assert read(path).constructs[0].label == "WT°"


@pytest.mark.parametrize("encoding", ["utf-8-sig", "utf-16", "utf-16-be"])
def test_the_campaign_file_in_other_encodings(encoding: str, tmp_path: Path, expected: object) -> None:
    toml = (folder(tmp_path / "b") / "campaign.toml").read_text()
    assert content(read(folder(tmp_path / "a", toml=toml.encode(encoding)))) == expected


def test_bytes_that_are_no_text(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=PLAIN.encode() + b"WT,\x81,1,2\n")
    assert_refused(path, file="curves.csv", row=34, match="no text.*save the file as UTF-8")


@pytest.mark.parametrize("delimiter", [",", ";", "\t"])
@pytest.mark.parametrize("suffix", ["csv", "tsv"])
def test_delimiters(delimiter: str, suffix: str, tmp_path: Path, expected: object) -> None:
    path = folder(tmp_path / "a", **{f"curves_{suffix}": text_of(curve_rows(), delimiter)})
    assert content(read(path)) == expected


@pytest.mark.parametrize("delimiter", [";", "\t"])
def test_decimal_comma(delimiter: str, tmp_path: Path, expected: object) -> None:
    rows = [[field.replace(".", ",") for field in row] for row in curve_rows()]
    assert content(read(folder(tmp_path / "a", curves=text_of(rows, delimiter)))) == expected


@pytest.mark.parametrize("line_end", ["\r\n", "\r", "\n"])
def test_line_ends(line_end: str, tmp_path: Path, expected: object) -> None:
    assert content(read(folder(tmp_path / "a", curves=PLAIN.replace("\n", line_end).encode()))) == expected


def test_quoted_fields(tmp_path: Path, expected: object) -> None:
    rows = [[f'"{field}"' for field in row] for row in curve_rows()]
    assert content(read(folder(tmp_path / "a", curves=rows))) == expected


def test_a_label_with_the_delimiter_in_quotes(tmp_path: Path) -> None:
    rows = [[field.replace("E181A/R212Q", '"E181A;R212Q"') for field in row] for row in curve_rows()]
    campaign = read(folder(tmp_path / "a", curves=text_of(rows, ";")))
    assert campaign.constructs[-1].label == "E181A;R212Q"


def test_semicolons_in_labels_do_not_mislead(tmp_path: Path) -> None:
    rows = wide_rows([f"{label.replace('/', ';')}/c1" for label in LABELS])
    assert read(folder(tmp_path / "a", curves=rows)).constructs[-1].label == "E181A;R212Q"


def test_unicode_minus(tmp_path: Path, expected: object) -> None:
    assert content(read(folder(tmp_path / "a", curves=PLAIN.replace(",-", ",−")))) == expected


def test_blank_and_comment_lines_are_passed_over(tmp_path: Path, expected: object) -> None:
    lines = PLAIN.splitlines()
    mixed = ["# made up", "", *lines[:3], '#WT,"c9,1,2', ",,,", "  ", *lines[3:], "", ""]
    assert content(read(folder(tmp_path / "a", curves="\n".join(mixed)))) == expected


def test_rows_are_counted_as_in_an_editor(tmp_path: Path) -> None:
    lines = PLAIN.splitlines()
    lines[3] = lines[3].replace("0.08", "x")
    mixed = "\n".join(["# note", "", *lines])
    assert_refused(
        folder(tmp_path / "a", curves=mixed), file="curves.csv", row=6, column="charge", match="'x'.*a number"
    )


def test_a_spreadsheet_error_at_the_start_of_a_line_is_no_comment(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=PLAIN + "#N/A,c1,-200,0\n")
    found = problems(path)
    assert (found[0].origin.row, found[0].origin.column) == (34, "construct")
    assert "the spreadsheet error #N/A" in str(found[0])


@pytest.mark.parametrize(
    ("line", "count"), [("WT,c1,40", "3 fields"), ("WT,c1,40,1,5", "5 fields"), ("WT", "1 field ")]
)
def test_field_counts(line: str, count: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=f"{PLAIN}{line}\n")
    assert_refused(path, file="curves.csv", row=34, match=f"found {count}.*expected 4.*semicolons")


def test_every_uneven_row_is_told(tmp_path: Path) -> None:
    found = problems(folder(tmp_path / "a", curves=PLAIN + "WT,c1\n" + PLAIN.split("\n")[1] + "\nWT\n"))
    assert [problem.origin.row for problem in found] == [34, 35, 36]


@pytest.mark.parametrize("field", ['"WT', '"WT"x', '"W\nT"'])
def test_an_open_quote(field: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=f"{PLAIN}{field},c1,40,1\nWT,c1,60,1\n")
    assert_refused(path, file="curves.csv", row=34, match="cannot be split.*close the quote")


@pytest.mark.parametrize(
    ("start", "kind", "also"),
    [
        (b"\x89PNG\r\n\x1a\n", "a PNG image", False),
        (b"%PDF-1.7\n", "a PDF document", False),
        (b"PK\x03\x04", "a ZIP archive or a workbook", True),
        (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1", "an old Excel workbook", True),
    ],
)
def test_a_file_that_is_no_text(start: bytes, kind: str, also: bool, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=start + bytes(range(256)))
    assert_refused(path, file="curves.csv", match=f"looks like {kind}.*save them as curves.csv")
    assert ("with the ending .xlsx" in problems(path)[0].remedy) == also


TITLES = {
    "one": ("Cells of May\n", 1),
    "of several fields": ("Cells of May,,,\n", 1),
    "with commas": ("Cells, all of them\n\nrecorded in May\n", 1),
    "below a comment": ("# a note\nCells of May\n", 2),
}


@pytest.mark.parametrize(("title", "row"), TITLES.values(), ids=TITLES)
def test_titles_above_the_header_are_told_once(title: str, row: int, tmp_path: Path) -> None:
    match = "'Cells.*above the header.*delete the lines above the header, or begin them with #"
    assert_refused(folder(tmp_path / "a", curves=title + PLAIN), file="curves.csv", row=row, match=match)


def test_what_stands_below_a_title_is_read_with_its_rows(tmp_path: Path) -> None:
    """Twenty lines above the header are looked over; a fault below keeps its row."""
    above = "".join(f"note {i}\n" for i in range(20))
    found = problems(folder(tmp_path / "a", curves=above + PLAIN.replace("0.08", "x", 1)))
    assert [(one.origin.row, one.origin.column) for one in found] == [(1, None), (24, "charge")]
    beyond = problems(folder(tmp_path / "b", curves="note\n" + above + PLAIN))
    assert [one.remedy for one in beyond] == ["delete the lines above the header, or begin them with #"]


def test_titles_above_a_header_of_unknown_columns(tmp_path: Path) -> None:
    curves = "Zellen vom Mai\n" + text_of([["Zelle", "Ladung"], ["c1", "0.5"]], ";")
    match = "'Zellen vom Mai' above the header"
    assert_refused(folder(tmp_path / "a", curves=curves), file="curves.csv", row=1, match=match)


def test_a_single_column(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=text_of(curve_rows(), "|"))
    assert_refused(path, file="curves.csv", row=1, match="a single column.*commas, semicolons or tabs")


@pytest.mark.parametrize("nothing", ["", "\n\n", "# only a note\n", ",,,\n"])
def test_an_empty_table(nothing: str, tmp_path: Path) -> None:
    assert_refused(folder(tmp_path / "a", curves=nothing), file="curves.csv", match="no header")


def test_trailing_delimiters_are_no_column(tmp_path: Path, expected: object) -> None:
    assert content(read(folder(tmp_path / "a", curves=PLAIN.replace("\n", ",\n")))) == expected


def test_values_below_an_empty_header(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=PLAIN.replace("\n", ",\n").replace("0.01,", "0.01,x"))
    assert_refused(path, file="curves.csv", row=1, column="number 5", match="empty header")


def test_too_many_rows(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(text, "MOST_ROWS", 20)
    assert_refused(folder(tmp_path / "a"), file="curves.csv", match="33 rows; expected at most 20 rows")
    monkeypatch.setattr(text, "MOST_ROWS", 34)
    charges = "construct,cell,charge_e0\n" + "".join(f"WT,c{i},13\n" for i in range(5))
    path = folder(tmp_path / "b", charges=charges, curves=curve_rows())
    assert_refused(
        path, file="charges.csv", match="37 rows with those of the other tables; expected at most 34"
    )
