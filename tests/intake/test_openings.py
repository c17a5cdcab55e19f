"""Open probabilities: both layouts, what cannot be, and what they must agree on with the other tables."""

from pathlib import Path

import numpy as np
import pytest

from cornerwise.intake import read
from intake.writing import (
    LABELS,
    TOML,
    Rows,
    assert_refused,
    changed,
    content,
    curve_rows,
    folder,
    problems,
    text_of,
)

MEASURED = 'wild_type = "WT"\n'
VOLTAGES = (-90, -80, -70, -60, -50, -40)
OPEN = ("0.0001", "0.002", "0.03", "0.2", "0.6", "0.8")


def opening_rows(labels: tuple[str, ...] = ("WT", "E181A"), cell: str = "p1") -> Rows:
    """Header and points of one cell per construct; the first point of the first stands in row 2."""
    rows = [["construct", "cell", "batch", "voltage_mV", "open_probability"]]
    for label in labels:
        rows += [[label, cell, "b", str(v), po] for v, po in zip(VOLTAGES, OPEN, strict=True)]
    return rows


def test_open_probabilities(tmp_path: Path) -> None:
    rows = opening_rows()
    campaign = read(folder(tmp_path / "a", MEASURED, openings=[rows[0], *rows[:0:-1]]))
    (opening,) = campaign.construct("E181A").openings
    assert (opening.construct, opening.cell, opening.batch) == ("E181A", "p1", "b")
    assert opening.voltage_mv.tolist() == list(VOLTAGES)
    assert opening.open_probability.tolist() == list(map(float, OPEN))
    assert (opening.origin.file, opening.origin.row) == ("openings.csv", 2)
    assert campaign.construct("R212Q").openings == ()
    assert [file.name for file in campaign.inputs] == ["campaign.toml", "curves.csv", "openings.csv"]


@pytest.mark.parametrize("suffix", ["csv", "tsv"])
@pytest.mark.parametrize(("delimiter", "decimal"), [(",", "."), (";", ","), ("\t", ".")])
def test_layouts_say_the_same(suffix: str, delimiter: str, decimal: str, tmp_path: Path) -> None:
    tidy = [[field for i, field in enumerate(row) if i != 2] for row in opening_rows()]
    expected = content(read(folder(tmp_path / "a", MEASURED, openings=tidy)))
    wide = [
        ["voltage_mV", "WT/p1", "E181A/p1"],
        *([str(v), po, po] for v, po in zip(VOLTAGES, OPEN, strict=True)),
    ]
    volts = [["voltage_V", *wide[0][1:]], *([f"{float(row[0]) / 1000:.2f}", *row[1:]] for row in wide[1:])]
    for number, rows in enumerate((tidy, wide, volts)):
        text = text_of(
            [rows[0], *([field.replace(".", decimal) for field in row] for row in rows[1:])], delimiter
        )
        path = folder(tmp_path / f"{number}", MEASURED, **{f"openings_{suffix}": text})
        assert content(read(path)) == expected


@pytest.mark.parametrize("policy", ["measured", "wild-type"])
def test_a_limiting_slope_is_a_measured_charge(policy: str, tmp_path: Path) -> None:
    toml = f'{MEASURED}charge = "{policy}"\n'
    assert read(folder(tmp_path / "a", toml, openings=opening_rows(("WT",)))).settings.charge == policy
    path = folder(tmp_path / "b", toml, openings=opening_rows(("E181A",)))
    assert_refused(path, file="openings.csv", match="no charge of the wild type 'WT'.*add it to the table")
    charges = "construct,charge_e0,sem_e0,n\nE181A,12,1,4\n"
    assert read(folder(tmp_path / "c", toml, charges=charges, openings=opening_rows(("WT",)))).constructs
    path = folder(tmp_path / "d", toml, charges=charges, openings=opening_rows(("E181A",)))
    assert_refused(path, file="charges.csv", match="no charge of the wild type 'WT'")


def test_the_method_may_be_asked_for(tmp_path: Path) -> None:
    toml = MEASURED + 'charge_method = "limiting slope"\n'
    assert (
        read(folder(tmp_path / "a", toml, openings=opening_rows())).settings.charge_method == "limiting slope"
    )
    path = folder(tmp_path / "b", toml.replace("slope", "slopes"), openings=opening_rows())
    match = "expected one of the methods of the tables, 'limiting slope'; did you mean 'limiting slope'"
    assert_refused(path, file="campaign.toml", column="charge_method", match=match)


def test_a_limiting_slope_in_two_forms(tmp_path: Path) -> None:
    charges = "construct,charge_e0,sem_e0,n,method\nR212Q,12,1,4,limiting slope\nWT,12,1,4,limiting slope\n"
    path = folder(tmp_path / "a", MEASURED, charges=charges, openings=opening_rows())
    match = "'WT' by the method 'limiting slope', which its open probabilities give too .openings.csv, row 2"
    assert_refused(path, file="charges.csv", row=3, column="method", match=match)


@pytest.mark.parametrize(
    ("column", "value", "match"),
    [
        (
            "open_probability",
            "-0.001",
            "found -0.001; expected open probabilities from 0 to 1.*divide by 100",
        ),
        ("open_probability", "1.001", "found 1.001; expected open probabilities from 0 to 1"),
        ("open_probability", "20", "found 20; expected open probabilities from 0 to 1"),
        ("open_probability", "", "nothing; expected a number"),
        ("open_probability", "nan", "expected a finite number"),
        ("open_probability", "20 %", "the unit belongs in the header"),
        ("voltage_mV", "-501", "found -501 mV; expected voltages between -500 and 500 mV"),
        (
            "voltage_mV",
            "-70",
            "a second value at -70 mV, the other in row 4; expected each voltage once in a cell",
        ),
        ("batch", "c", "'c' for the cell WT/p1, which has 'b' in row 2; expected one batch"),
        ("construct", "E181A", None),
        ("cell", "", "nothing; expected a label"),
    ],
)
def test_points_that_cannot_be(column: str, value: str, match: str | None, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, openings=changed(opening_rows(), 5, column, value))
    if match is None:  # the point becomes a second one of another cell
        assert_refused(path, file="openings.csv", row=11, column="voltage_mV", match="the other in row 5")
    else:
        assert_refused(path, file="openings.csv", row=5, column=column, match=match)


@pytest.mark.parametrize("value", ["0", "1", "0.0", "1.0"])
def test_the_ends_are_probabilities(value: str, tmp_path: Path) -> None:
    row = 2 if float(value) == 0 else 7
    rows = changed(opening_rows(), row, "open_probability", value)
    assert (
        float(value)
        in read(folder(tmp_path / "a", MEASURED, openings=rows)).construct("WT").openings[0].open_probability
    )


def test_percentages_are_told_once(tmp_path: Path) -> None:
    rows = [
        [*row[:4], row[4] if i == 0 else str(float(row[4]) * 10000)] for i, row in enumerate(opening_rows())
    ]
    path = folder(tmp_path / "a", MEASURED, openings=rows)
    match = "10 of 12 values below 0 or above 1, the first 20 in row 3.*if they are percentages"
    assert_refused(path, file="openings.csv", row=1, column="open_probability", match=match)


def test_a_wide_table_names_the_very_field(tmp_path: Path) -> None:
    wide = [
        ["voltage_mV", "WT/p1", "E181A/p1"],
        *([str(v), po, po] for v, po in zip(VOLTAGES, OPEN, strict=True)),
    ]
    wide[3][2] = "3"
    path = folder(tmp_path / "a", MEASURED, openings=wide)
    assert_refused(path, file="openings.csv", row=4, column="E181A/p1", match="found 3; expected open prob")


def test_fewer_than_four_points(tmp_path: Path) -> None:
    assert read(folder(tmp_path / "a", MEASURED, openings=opening_rows(("WT",))[:5])).construct("WT").openings
    path = folder(tmp_path / "b", MEASURED, openings=opening_rows(("WT",))[:4])
    match = (
        "found 3 points of the cell WT/p1; expected at least 4 points.*limiting slope of its logarithm; add"
    )
    assert_refused(path, file="openings.csv", row=2, column="open_probability", match=match)


def test_points_at_zero_are_none_of_the_four(tmp_path: Path) -> None:
    rows = changed(opening_rows(("WT",))[:6], 2, "open_probability", "0")
    assert (
        len(read(folder(tmp_path / "a", MEASURED, openings=rows)).construct("WT").openings[0].voltage_mv) == 5
    )
    path = folder(tmp_path / "b", MEASURED, openings=changed(rows, 3, "open_probability", "0"))
    assert_refused(
        path,
        file="openings.csv",
        row=2,
        column="open_probability",
        match=r"found 3 points above 0 \(of 5\) of",
    )


@pytest.mark.parametrize(
    ("values", "match"),
    [
        (OPEN[::-1], "a curve that falls: the open probability of the cell WT/p1 decreases.*flip the sign"),
        (("0.5",) * 6, "a flat curve: the open probability of the cell WT/p1 does not rise.*negative end"),
        (("0.5", "0.2", "0.6", "0.3", "0.4", "0.45"), "a flat curve"),
    ],
)
def test_probabilities_that_do_not_rise(values: tuple[str, ...], match: str, tmp_path: Path) -> None:
    rows = opening_rows(("WT",))
    for row, value in zip(rows[1:], values, strict=True):
        row[4] = value
    path = folder(tmp_path / "a", MEASURED, openings=rows)
    assert_refused(path, file="openings.csv", row=2, column="open_probability", match=match)


def test_volts_in_a_column_of_millivolts(tmp_path: Path) -> None:
    rows = [
        [*row[:3], row[3] if i == 0 else str(float(row[3]) / 1000), row[4]]
        for i, row in enumerate(opening_rows())
    ]
    path = folder(tmp_path / "a", MEASURED, openings=rows)
    match = "all 2 curves inside a few mV, between -0.09 and -0.04 mV.*name the column voltage_V"
    assert_refused(path, file="openings.csv", row=1, column="voltage_mV", match=match)


@pytest.mark.parametrize(
    ("column", "name", "match"),
    [
        ("open_probability", "open_probabilty", r"did you mean open_probability\?"),
        ("open_probability", "Po", "unknown column 'Po'"),
        ("voltage_mV", "voltage", "voltage_mV or voltage_V"),
        ("batch", "method", "unknown column 'method'"),
    ],
)
def test_headers(column: str, name: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, openings=changed(opening_rows(), 1, column, name))
    found = [p for p in problems(path) if p.origin.column == name]
    assert len(found) == 1
    assert found[0].origin.row == 1
    assert np.any([word in str(found[0]) for word in (match, match.replace("\\", ""))])


def test_open_probabilities_are_no_voltages(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", openings=opening_rows(("WT", "E181Q")))
    match = "open probabilities of 'E181Q', which has neither curves nor a median.*did you mean 'E181A'"
    assert_refused(path, file="openings.csv", row=8, column="construct", match=match)
    lone = folder(tmp_path / "b", openings=opening_rows(LABELS))
    (lone / "curves.csv").unlink()
    assert "neither curves nor medians in the folder" in str(problems(lone)[0])


def test_a_construct_with_charges_and_openings_alone_is_told_once(tmp_path: Path) -> None:
    charges = "construct,charge_e0,sem_e0,n\nE181Q,12,1,4\n"
    path = folder(tmp_path / "a", charges=charges, openings=opening_rows(("WT", "E181Q")))
    assert_refused(
        path, file="charges.csv", row=2, column="construct", match="charges of 'E181Q', which has neither"
    )


def test_a_cell_has_one_batch_in_all_tables(tmp_path: Path) -> None:
    curves = [[*row, "batch" if i == 0 else "monday"] for i, row in enumerate(curve_rows())]
    path = folder(tmp_path / "a", MEASURED, curves=curves, openings=opening_rows(("WT",), cell="c1"))
    match = "batch 'b' of the cell WT/c1, which has batch 'monday' elsewhere .curves.csv, row 2"
    assert_refused(path, file="openings.csv", row=2, column="batch", match=match)


def test_labels_are_held_against_those_of_the_other_tables(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML, openings=opening_rows(("WT", "wt")))
    assert "write 'WT', as the wild type is called" in str(problems(path)[0])


def test_a_name_that_is_nearly_right(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", opening=opening_rows())
    assert_refused(
        path, file="opening.csv", match="openings.csv, openings.tsv or openings.xlsx; save it under"
    )
