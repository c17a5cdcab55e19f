"""Headers with their units, numbers, labels as text."""

from pathlib import Path

import pytest

from cornerwise.intake import read
from cornerwise.intake.numbers import parse_number
from intake.writing import (
    LABELS,
    Rows,
    assert_refused,
    changed,
    content,
    curve_rows,
    folder,
    problems,
    text_of,
    wide_rows,
)


def with_header(position: int, name: str) -> Rows:
    rows = curve_rows()
    rows[0][position] = name
    return rows


@pytest.mark.parametrize(
    ("position", "name", "match"),
    [
        (2, "voltage", "voltage_mV or voltage_V; put the unit"),
        (2, "voltage (mV)", "voltage_mV or voltage_V"),
        (2, "voltage_uV", "voltage_mV or voltage_V"),
        (2, "Voltage_mV", "voltage_mV or voltage_V"),
        (3, "charge_uC", "charge, charge_fC, charge_pC, charge_nC or charge_e0"),
        (3, "chrage", r"unknown column 'chrage'.*did you mean charge\?"),
        (0, "constuct", r"unknown column 'constuct'.*did you mean construct\?"),
    ],
)
def test_headers_that_are_nearly_right(position: int, name: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=with_header(position, name))
    assert_refused(path, file="curves.csv", row=1, column=name, match=match)


def test_a_missing_unit_hides_no_other_fault(tmp_path: Path) -> None:
    rows = with_header(2, "voltage")
    rows[3][2] = rows[2][2]
    rows[5][1] = ""
    rows[7][2] = "900"
    found = " ".join(map(str, problems(folder(tmp_path / "a", curves=rows))))
    for fault in ("put the unit", "a second value at -100 mV", "expected a label", "900 mV"):
        assert fault in found


@pytest.mark.parametrize("factor", [1.0, 0.001])
def test_without_a_unit_no_fault_is_made_of_the_unit(factor: float, tmp_path: Path) -> None:
    rows = with_header(2, "voltage")
    for row in rows[1:]:
        row[2] = str(factor * float(row[2]))
    assert_refused(folder(tmp_path / "a", curves=rows), file="curves.csv", row=1, match="put the unit",
                   column="voltage")  # fmt: skip


@pytest.mark.parametrize(("row", "volts"), [(4, "-0.08"), (5, "-0.06"), (2, "-0.12"), (9, "0.02")])
def test_one_value_in_volts_among_millivolts(row: int, volts: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=changed(curve_rows(), row, "voltage_mV", volts))
    assert_refused(path, file="curves.csv", row=row, column="voltage_mV",
                   match=f"{volts} mV.*a value in volts among")  # fmt: skip


def test_a_sign_that_was_lost(tmp_path: Path) -> None:
    rows = changed(curve_rows(), 5, "voltage_mV", "60")
    assert_refused(folder(tmp_path / "a", curves=rows), file="curves.csv", row=5, column="voltage_mV",
                   match="60 mV between -80 and -40 mV .*expected -60 mV")  # fmt: skip


def test_a_voltage_out_of_order_in_a_wide_table_is_told_once(tmp_path: Path) -> None:
    rows = wide_rows()
    rows[4][0] = "60"
    assert_refused(folder(tmp_path / "a", curves=rows), file="curves.csv", row=5, column="voltage_mV",
                   match="60 mV between -80 and -40 mV;")  # fmt: skip


def test_rows_in_no_order_and_a_value_added_at_the_end_are_read(tmp_path: Path) -> None:
    rows = curve_rows()
    at_the_end = [rows[0], *rows[1:4], *rows[5:9], rows[4], *rows[9:]]
    mixed = [rows[0], *(rows[1:9][i] for i in (3, 0, 6, 2, 7, 1, 5, 4)), *rows[9:]]
    for name, table in (("a", at_the_end), ("b", mixed)):
        assert content(read(folder(tmp_path / name, curves=table))) == content(read(folder(tmp_path / "c")))


def test_a_decimal_mark_that_was_lost(tmp_path: Path) -> None:
    rows = changed(curve_rows(), 6, "charge", "66000")
    assert_refused(folder(tmp_path / "a", curves=rows), file="curves.csv", row=6, column="charge",
                   match="66000 in the cell WT/c1, whose other charges lie between 0 and 1")  # fmt: skip


@pytest.mark.parametrize("offset", [0.4, -0.3, 0.05, 10.2])
def test_corrected_voltages_near_zero_are_no_volts(offset: float, tmp_path: Path) -> None:
    rows = curve_rows()
    for row in rows[1:]:
        row[2] = f"{float(row[2]) + offset:g}"
    assert read(folder(tmp_path / "a", curves=rows)).constructs


def test_an_unknown_column(tmp_path: Path) -> None:
    rows = [[*row, "temperature" if i == 0 else "22"] for i, row in enumerate(curve_rows())]
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=1, column="temperature", match="unknown column.*delete the")


def test_a_missing_column(tmp_path: Path) -> None:
    rows = [row[:3] for row in curve_rows()]
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(
        path, file="curves.csv", row=1, column="charge", match="expected a column charge, charge_fC"
    )


def test_a_doubled_header(tmp_path: Path) -> None:
    rows = [[*row, row[3]] for row in curve_rows()]
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=1, column="charge", match="2 columns called 'charge'")


def test_a_quantity_in_two_units(tmp_path: Path) -> None:
    rows = [[*row, "charge_pC" if i == 0 else row[3]] for i, row in enumerate(curve_rows())]
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=1, column="charge_pC", match="both charge and charge_pC")


def test_the_order_of_columns_does_not_matter(tmp_path: Path) -> None:
    turned = [row[::-1] for row in curve_rows()]
    assert content(read(folder(tmp_path / "a", curves=turned))) == content(read(folder(tmp_path / "b")))


@pytest.mark.parametrize(
    ("text", "match"),
    [
        ("", "found nothing; expected a number"),
        ("nan", "'nan'; expected a finite number"),
        ("NaN", "'NaN'; expected a finite number"),
        ("-inf", "'-inf'; expected a finite number"),
        ("1e999", "'1e999'; expected a number"),
        ("1_000", "'1_000'; expected a number"),
        ("0.5 pC", "the unit belongs in the header"),
        ("٣", "expected a number"),
        ("–0.5", "expected a number"),
        ("0x10", "expected a number"),
        ("#N/A", "expected a number"),
    ],
)
def test_what_is_no_number(text: str, match: str, tmp_path: Path) -> None:
    rows = curve_rows()
    rows[4][3] = text
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=5, column="charge", match=match)


@pytest.mark.parametrize(
    ("text", "delimiter", "match"),
    [
        ('"0,5"', ",", "expected a number with a decimal point"),
        ("1,234.5", ";", "without thousands separators"),
        ("1.234,5", ";", "without thousands separators"),
        ("1,234,567", ";", "expected a number"),
    ],
)
def test_commas_in_numbers(text: str, delimiter: str, match: str, tmp_path: Path) -> None:
    rows = curve_rows()
    rows[4][3] = text
    path = folder(tmp_path / "a", curves=text_of(rows, delimiter))
    assert_refused(path, file="curves.csv", row=5, column="charge", match=match)


def test_two_decimal_marks_in_one_file(tmp_path: Path) -> None:
    rows = curve_rows()
    rows[4][3] = "0,31"
    path = folder(tmp_path / "a", curves=text_of(rows, ";"))
    assert_refused(path, file="curves.csv", row=5, column="charge", match="'0,31' here and '0.0' in row 2")


def test_thousands_between_tabs(tmp_path: Path) -> None:
    rows = curve_rows()
    for row in rows[1:]:
        row[3] = str(int(1000 * float(row[3]))) if row[3] != "1.0" else "1,000"
    path = folder(tmp_path / "a", curves=text_of(rows, "\t"))
    assert_refused(path, file="curves.csv", row=9, column="charge", match="'1,000'.*thousand times")


@pytest.mark.parametrize(
    ("text", "value"),
    [("-5", -5), (" +.5 ", 0.5), ("5.", 5), ("1e-3", 0.001), ("−2.5E+1", -25), ("\xa07", 7)],
)
def test_numbers_as_people_type_them(text: str, value: float) -> None:
    assert parse_number(text, ",") == value


@pytest.mark.parametrize("label", ["NA", "001", "1E5", "nan", "True", "null", "-", "[wt]", "=1+1", "Δ6-46"])
def test_labels_stay_text(label: str, tmp_path: Path) -> None:
    toml = f'wild_type = "{label}"\ncharge = {{ value_e0 = 13.0, sem_e0 = 0.5 }}\n'
    rows = curve_rows((label, *LABELS[1:]), cells=("007", "NA"))
    campaign = read(folder(tmp_path / "a", toml=toml, curves=rows))
    assert campaign.constructs[0].label == label
    assert [curve.cell for curve in campaign.constructs[0].curves] == ["007", "NA"]


def test_outer_spaces_of_labels_do_not_count(tmp_path: Path) -> None:
    rows = [[f" {field} " for field in row] for row in curve_rows()]
    assert content(read(folder(tmp_path / "a", curves=rows))) == content(read(folder(tmp_path / "b")))


@pytest.mark.parametrize(("position", "column"), [(0, "construct"), (1, "cell")])
def test_an_empty_label(position: int, column: str, tmp_path: Path) -> None:
    rows = curve_rows()
    rows += [["WT", "c2", *row[2:]] for row in rows[1:9]]
    rows[35][position] = " "
    path = folder(tmp_path / "a", curves=rows)
    assert (36, column) in [(problem.origin.row, problem.origin.column) for problem in problems(path)]
    assert "found nothing; expected a label" in str(problems(path)[0])


def test_an_invisible_character_in_a_label(tmp_path: Path) -> None:
    rows = curve_rows()
    rows[3][1] = "c1\u200b"
    found = problems(folder(tmp_path / "a", curves=rows))
    assert (found[0].origin.row, found[0].origin.column) == (4, "cell")
    assert "invisible character (U+200B)" in str(found[0])


@pytest.mark.parametrize("table", ["curves", "charges", "medians", "openings"])
def test_a_header_with_nothing_below_it(table: str, tmp_path: Path) -> None:
    """The table is named and nothing that would be in it is called missing."""
    headers = {
        "curves": "construct,cell,voltage_mV,charge",
        "charges": "construct,cell,charge_e0",
        "medians": "construct,median_mV,sem_mV,n",
        "openings": "construct,cell,voltage_mV,open_probability",
    }
    tables = {"curves": text_of(curve_rows()), "charges": "construct,cell,charge_e0\nWT,c1,13\nE181A,c1,13\n"}
    tables |= {table: f"{headers[table]}\n"}
    path = folder(tmp_path / "a", 'wild_type = "WT"\n', **tables)
    match = "found a header and nothing below it; .*; fill in the file or delete it"
    assert_refused(path, file=f"{table}.csv", row=1, match=match)


@pytest.mark.parametrize(
    "units", [["-", "-", "mV", "pC"], ["", "", "(mV)", "[nC]"], ["", "", "mV", "a.u."], ["", "", "mV", "µC"]]
)
def test_a_row_of_units(units: list[str], tmp_path: Path) -> None:
    header, *body = curve_rows()
    path = folder(tmp_path / "a", curves=[header, units, *body])
    match = "row 2 looks like a row of units.*delete it; the unit belongs in the header"
    assert_refused(path, file="curves.csv", row=2, match=match)


def test_a_row_of_units_in_a_wide_table(tmp_path: Path) -> None:
    header, *body = wide_rows()
    path = folder(tmp_path / "a", curves=text_of([header, ["mV", *["pC"] * len(LABELS)], *body], ";"))
    assert_refused(path, file="curves.csv", row=2, match="looks like a row of units")


@pytest.mark.parametrize("row", [["WT", "c9", "mV", "pC"], ["-", "-", "mV", "0.5"], ["-", "-", "-", "-"]])
def test_a_row_that_holds_more_than_units(row: list[str], tmp_path: Path) -> None:
    header, *body = curve_rows()
    found = problems(folder(tmp_path / "a", curves=[header, row, *body]))
    assert not any("row of units" in problem.found for problem in found)


def test_a_row_of_units_further_down(tmp_path: Path) -> None:
    header, first, *body = curve_rows()
    found = problems(folder(tmp_path / "a", curves=[header, first, ["", "", "mV", "pC"], *body]))
    assert not any("row of units" in problem.found for problem in found)
