"""The table of curves: both layouts, points, cells, and shapes that no charge-voltage curve has."""

from pathlib import Path

import numpy as np
import pytest

from cornerwise.intake import read
from intake.writing import (
    CHARGES,
    LABELS,
    TOML,
    VOLTAGES,
    Rows,
    assert_refused,
    changed,
    content,
    curve_rows,
    folder,
    problems,
    sigmoid,
    wide_rows,
)


def with_column(name: str, values: list[str], rows: Rows | None = None) -> Rows:
    """The curves with one more column; `values` are repeated as often as needed."""
    rows = rows or curve_rows()
    return [[*row, name if i == 0 else values[(i - 1) % len(values)]] for i, row in enumerate(rows)]


def with_cell(voltages: list[float], charges: list[float], cell: str = "c2") -> Rows:
    """The curves and a second cell of the wild type, whose first point is in row 34."""
    return [*curve_rows(), *(["WT", cell, repr(v), repr(q)] for v, q in zip(voltages, charges, strict=True))]


def test_a_tidy_curve(tmp_path: Path) -> None:
    rows = with_column("batch", ["b1"], with_column("holding_mV", ["-90"], with_column("phase", ["On"])))
    curve = read(folder(tmp_path / "a", curves=rows)).construct("E181A").curves[0]
    assert (curve.construct, curve.cell, curve.batch, curve.phase) == ("E181A", "c1", "b1", "on")
    assert curve.holding_mv == -90.0
    assert tuple(curve.voltage_mv) == VOLTAGES
    assert tuple(curve.charge) == CHARGES
    assert curve.charge_unit == ""
    assert (curve.origin.file, curve.origin.row) == ("curves.csv", 10)


@pytest.mark.parametrize("unit", ["fC", "pC", "nC", "e0"])
def test_charge_units(unit: str, tmp_path: Path) -> None:
    rows = curve_rows()
    rows[0][3] = f"charge_{unit}"
    curve = read(folder(tmp_path / "a", curves=rows)).constructs[0].curves[0]
    assert curve.charge_unit == unit
    assert tuple(curve.charge) == CHARGES


def test_volts_become_exactly_the_same_millivolts(tmp_path: Path) -> None:
    rows = curve_rows()
    for row in rows[1:]:
        row[2] = repr(int(row[2]) / 1000)
    rows[0][2] = "voltage_V"
    assert content(read(folder(tmp_path / "a", curves=rows))) == content(read(folder(tmp_path / "b")))


def test_what_is_left_empty_is_not_stated(tmp_path: Path) -> None:
    rows = with_column("batch", [""], with_column("holding_mV", [""], with_column("phase", [""])))
    assert content(read(folder(tmp_path / "a", curves=rows))) == content(read(folder(tmp_path / "b")))


def test_the_wide_layout_says_the_same(tmp_path: Path) -> None:
    wide, tidy = folder(tmp_path / "a", curves=wide_rows()), folder(tmp_path / "b")
    assert content(read(wide)) == content(read(tidy))


def test_the_cell_follows_the_last_slash(tmp_path: Path) -> None:
    construct = read(folder(tmp_path / "a", curves=wide_rows())).constructs[-1]
    assert (construct.label, construct.curves[0].cell) == ("E181A/R212Q", "c1")


@pytest.mark.parametrize(
    ("header", "match"),
    [
        ("E181A/R212Q", "reads as a mutation"),
        ("WT/", "expected construct/cell"),
        ("/c1", "expected construct/cell"),
        (" WT / c1", "the cell of 'WT/c1' again"),
    ],
)
def test_wide_headers_that_name_no_cell(header: str, match: str, tmp_path: Path) -> None:
    rows = wide_rows([*(f"{label}/c1" for label in LABELS), header])
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=1, column=header.strip(), match=match)


def test_a_wide_column_without_a_cell(tmp_path: Path) -> None:
    rows = wide_rows([*(f"{label}/c1" for label in LABELS), "leak"])
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=1, column="leak", match="voltage_V or construct/cell")


def test_a_cell_twice_in_the_wide_layout(tmp_path: Path) -> None:
    rows = wide_rows([*(f"{label}/c1" for label in LABELS), "WT/c1"])
    found = problems(folder(tmp_path / "a", curves=rows))
    assert "2 columns called 'WT/c1'" in str(found[0])


def test_an_empty_field_in_the_wide_layout(tmp_path: Path) -> None:
    rows = wide_rows()
    rows[3][2] = ""
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(
        path, file="curves.csv", row=4, column="E181A/c1", match="found nothing; expected a number"
    )


def test_a_voltage_twice_in_the_wide_layout(tmp_path: Path) -> None:
    rows = wide_rows()
    path = folder(tmp_path / "a", curves=[*rows, rows[2]])
    assert_refused(
        path, file="curves.csv", row=10, column="voltage_mV", match="second value at -100 mV.*row 3"
    )


def test_a_point_twice(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=[*curve_rows(), ["WT", "c1", "-100.0", "0.5"]])
    assert_refused(
        path,
        file="curves.csv",
        row=34,
        column="voltage_mV",
        match="second value at -100 mV, the other in row 3",
    )


@pytest.mark.parametrize(
    ("points", "match"), [(1, "the other in row 2; expected"), (3, "row 2, and 2 more voltages twice; exp")]
)
def test_repeated_points_of_a_cell_are_told_once(points: int, match: str, tmp_path: Path) -> None:
    rows = curve_rows()
    path = folder(tmp_path / "a", curves=[*rows, *rows[1 : 1 + points]])
    assert_refused(path, file="curves.csv", row=34, column="voltage_mV", match=f"{match}.*; delete one of")


def test_repeated_points_of_two_cells_are_told_for_each(tmp_path: Path) -> None:
    rows = curve_rows()
    found = problems(folder(tmp_path / "a", curves=[*rows, *rows[1:9], *rows[9:11]]))
    assert [problem.origin.row for problem in found] == [34, 42]


@pytest.mark.parametrize("wide", [False, True])
def test_lost_minus_signs_are_told_once_a_curve(wide: bool, tmp_path: Path) -> None:
    """Voltages from -120 to 20 without their signs: 20 comes twice; one voltage below 0 is no loss of all."""
    rows = wide_rows() if wide else curve_rows()
    place = rows[0].index("voltage_mV")
    lost = [[field.lstrip("-") if i == place else field for i, field in enumerate(row)] for row in rows]
    found = problems(folder(tmp_path / "a", curves=lost))
    assert [problem.origin.row for problem in found] == ([9] if wide else [9, 17, 25, 33])
    assert all("minus signs may have been lost, no voltage has one" in one.remedy for one in found)
    kept = changed(lost, 2, "voltage_mV", "-120")
    assert "minus signs" not in problems(folder(tmp_path / "b", curves=kept))[0].remedy


@pytest.mark.parametrize(
    ("header", "match"),
    [
        ("E181Ac2", "'E181Ac2' without a slash before the cell.*did you mean E181A/c2"),
        ("WT c2", "did you mean WT/c2"),
        ("WT_c2", "did you mean WT/c2"),
        ("E181A/R212Qc2", "did you mean E181A/R212Q/c2"),
        ("E181Ac1", "write E181A, a slash and the cell's label"),  # E181A/c1 is another column
        ("WT", "write WT, a slash and the cell's label"),
        ("K95N c2", "the unknown column 'K95N c2'.*delete the column"),  # no other header has it
    ],
)
def test_a_wide_header_without_its_slash(header: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=wide_rows([*(f"{label}/c1" for label in LABELS), header]))
    assert_refused(path, file="curves.csv", row=1, column=header, match=match)


def test_cells_that_begin_as_another_label_ends(tmp_path: Path) -> None:
    """E181A/R2 is a cell of E181A, and WT/11 one of WT, whatever the other headers."""
    names = [*(f"{label}/c1" for label in LABELS), "E181A/R2", "WT/1", "WT/11"]
    found = read(folder(tmp_path / "a", curves=wide_rows(names)))
    assert [curve.cell for curve in found.construct("WT").curves] == ["1", "11", "c1"]
    assert [curve.cell for curve in found.construct("E181A").curves] == ["R2", "c1"]


@pytest.mark.parametrize(("falling", "told"), [(1, 1), (5, 5), (6, 1), (8, 1)])
@pytest.mark.parametrize("wide", [False, True])
def test_many_curves_that_fall_are_told_once(falling: int, told: int, wide: bool, tmp_path: Path) -> None:
    """Up to five one by one; more, or all eight there are, as one inverted column."""
    rows = curve_rows(cells=("c1", "c2"))
    if wide:
        rows = wide_rows(f"{label}/{cell}" for label in LABELS for cell in ("c1", "c2"))
    for number in range(falling):
        for point in range(8):
            row, column = (point + 1, number + 1) if wide else (1 + 8 * number + point, 3)
            rows[row][column] = f"-{rows[row][column]}"
    found = problems(folder(tmp_path / "a", curves=rows))
    assert len(found) == told
    if told < falling:
        how_many = "all 8 curves falling" if falling == 8 else "6 curves that fall"
        assert found[0].origin.column == ("voltage_mV" if wide else "charge")
        assert f"{how_many}: WT/c1, WT/c2, E181A/c1, E181A/c2, R212Q/c1 and" in found[0].found
        assert "voltages or charges are inverted" in found[0].remedy


@pytest.mark.parametrize(
    ("column", "values", "match"),
    [
        ("batch", ["a", "b"], "'b' for the cell WT/c1, which has 'a' in row 2; expected one batch"),
        ("batch", ["a", ""], "nothing for the cell WT/c1, which has 'a' in row 2"),
        ("holding_mV", ["-90", "-80"], "one holding for all points"),
        ("phase", ["on", "off"], "one phase for all points"),
    ],
)
def test_a_cell_under_two_conditions(column: str, values: list[str], match: str, tmp_path: Path) -> None:
    rows = with_column(column, [values[0]])
    rows[3][4] = values[1]
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=4, column=column, match=match)


def test_an_unknown_phase(tmp_path: Path) -> None:
    rows = with_column("phase", ["on"])
    for row in rows[1:9]:
        row[4] = "rising"
    found = problems(folder(tmp_path / "a", curves=rows))
    assert [problem.origin.row for problem in found] == list(range(2, 10))
    assert "found 'rising'; expected on, off or nothing" in str(found[0])


@pytest.mark.parametrize(("voltage", "fits"), [("500", True), ("500.1", False), ("-500.1", False)])
def test_voltages_beyond_500_mv(voltage: str, fits: bool, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=[*curve_rows(), ["WT", "c1", voltage, "1"]])
    if fits:
        assert read(path).constructs[0].curves[0].voltage_mv[-1] == 500
    else:
        assert_refused(
            path,
            file="curves.csv",
            row=34,
            column="voltage_mV",
            match=f"{voltage} mV; expected.*-500 and 500",
        )


def test_millivolts_in_a_volt_column_are_told_once(tmp_path: Path) -> None:
    rows = curve_rows()
    rows[0][2] = "voltage_V"
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(
        path,
        file="curves.csv",
        row=1,
        column="voltage_V",
        match="28 of 32 values.*correct the unit in the header",
    )


def test_volts_in_a_millivolt_column_are_told_once(tmp_path: Path) -> None:
    rows = curve_rows()
    for row in rows[1:]:
        row[2] = repr(int(row[2]) / 1000)
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(
        path,
        file="curves.csv",
        row=1,
        column="voltage_mV",
        match="all 4 curves inside.*name the column voltage_V",
    )


@pytest.mark.parametrize(("step", "fits"), [(1.0, False), (1.25, False), (1.26, True)])
def test_one_curve_inside_five_millivolts(step: float, fits: bool, tmp_path: Path) -> None:
    rows = with_cell([-40 + step * i for i in range(5)], [0.0, 0.1, 0.5, 0.9, 1.0])
    path = folder(tmp_path / "a", curves=rows)
    if fits:
        assert len(read(path).constructs[0].curves) == 2
    else:
        assert_refused(
            path, file="curves.csv", row=34, column="voltage_mV", match="cell WT/c2 between.*more than 5 mV"
        )


@pytest.mark.parametrize(("points", "fits"), [(4, False), (5, True)])
def test_fewest_points(points: int, fits: bool, tmp_path: Path) -> None:
    rows = with_cell([-40.0 + 10 * i for i in range(points)], [float(i) for i in range(points)])
    path = folder(tmp_path / "a", curves=rows)
    if fits:
        assert len(read(path).constructs[0].curves[1].charge) == 5
    else:
        assert_refused(
            path, file="curves.csv", row=34, column="charge", match="4 points of the cell WT/c2.*5 points"
        )


def test_a_curve_that_falls(tmp_path: Path) -> None:
    voltage = np.arange(-120.0, 61.0, 20)
    rows = with_cell(voltage.tolist(), (-sigmoid(voltage, -40)).tolist())
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(
        path, file="curves.csv", row=34, column="charge", match="curve that falls.*WT/c2.*flip the sign"
    )


@pytest.mark.parametrize("level", [0.0, 1.0, -3.25])
def test_a_flat_curve(level: float, tmp_path: Path) -> None:
    rows = with_cell([float(v) for v in VOLTAGES], [level] * len(VOLTAGES))
    path = folder(tmp_path / "a", curves=rows)
    assert_refused(path, file="curves.csv", row=34, column="charge", match="flat curve.*WT/c2")


def test_noise_does_not_refuse_a_curve_that_rises(tmp_path: Path) -> None:
    voltage = np.arange(-140.0, 61.0, 10)
    noise = np.random.default_rng(3).normal(0, 0.15, len(voltage))
    rows = with_cell(voltage.tolist(), (sigmoid(voltage, -40) + noise).tolist())
    assert len(read(folder(tmp_path / "a", curves=rows)).constructs[0].curves) == 2


def test_a_cell_whose_rows_were_lost_is_not_called_short(tmp_path: Path) -> None:
    rows = [*curve_rows(), *(["WT", "c2", str(v), "1"] for v in range(4)), ["WT", "c2", "5"]]
    assert_refused(folder(tmp_path / "a", curves=rows), file="curves.csv", row=38, match="3 fields")


def test_the_order_of_rows_does_not_matter(tmp_path: Path) -> None:
    rows = curve_rows(cells=("b", "a", "10", "9"))
    body = rows[1:]
    np.random.default_rng(1).shuffle(body)
    assert content(read(folder(tmp_path / "a", TOML, curves=[rows[0], *body]))) == content(
        read(folder(tmp_path / "b", TOML, curves=rows))
    )
