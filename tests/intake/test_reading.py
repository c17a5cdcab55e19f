"""The whole way: every problem in one go and in order; what is written in any layout reads back the same."""

import unicodedata
from collections.abc import Callable
from functools import partial
from pathlib import Path
from tempfile import TemporaryDirectory

import numpy as np
import openpyxl
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from cornerwise.campaign import Campaign
from cornerwise.errors import DataRefused, Problem
from cornerwise.intake import read
from intake.writing import LABELS, TOML, Rows, content, curve_rows, folder, mingled, problems, text_of

SINGLES = ("K95N", "E181A", "R212Q", "D300N")


def test_every_problem_in_file_and_row_order(tmp_path: Path) -> None:
    curves = curve_rows()
    curves[9][3] = "x"
    curves[4][2] = "900"
    curves += [["E181A/R212"], ["foo", "c1", "0", "1"], ["WT", "c1", "-120", "0"]]
    toml = 'wild_type = "WT"\nconfidence = 95\ntemperature_C = 300\nsead = 1\ncharge = "measured"\n'
    charges = "construct,cell,charge_e0\nE181A,c1,-3\nWT,c1,130\nWT,c1,nan\n"
    found = problems(folder(tmp_path / "a", toml, curves=curves, charges=charges))
    assert [(p.origin.file, p.origin.row, p.origin.column) for p in found] == [
        ("campaign.toml", 2, "confidence"),
        ("campaign.toml", 3, "temperature_C"),
        ("campaign.toml", 4, "sead"),
        ("curves.csv", 5, "voltage_mV"),
        ("curves.csv", 10, "charge"),
        ("curves.csv", 34, None),
        ("curves.csv", 35, "construct"),
        ("curves.csv", 35, "charge"),
        ("curves.csv", 36, "voltage_mV"),
        ("charges.csv", 2, "charge_e0"),
        ("charges.csv", 3, "charge_e0"),
        ("charges.csv", 4, "cell"),
        ("charges.csv", 4, "charge_e0"),
    ]


def test_a_refusal_is_one_error_with_every_problem_in_its_text(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", "sead = 1\n")
    with pytest.raises(DataRefused, match="2 problems") as caught:
        read(path)
    assert caught.value.exit_code == 3
    assert str(caught.value).count("campaign.toml") == 2


labels_of_cells = st.lists(
    st.text(st.characters(categories=("L", "N"), include_characters="-_.'"), min_size=1, max_size=6).map(
        partial(unicodedata.normalize, "NFC")  # as labels are read
    ),
    min_size=1,
    max_size=3,
    unique=True,
)


@st.composite
def campaigns(draw: st.DrawFn) -> Rows:
    """Tidy rows of a random campaign: two to four singles, some doubles, cells of any label, noisy curves."""
    singles = SINGLES[: draw(st.integers(2, 4))]
    doubles = [
        f"{singles[0]}/{singles[1]}",
        *(f"{singles[0]}+{s}" for s in singles[2:] if draw(st.booleans())),
    ]
    generator = np.random.default_rng(draw(st.integers(0, 2**32)))
    voltages = np.arange(-150, 60, draw(st.integers(7, 30)))
    rows = [["construct", "cell", "voltage_mV", "charge"]]
    for label in ("WT", *singles, *doubles):
        for cell in draw(labels_of_cells):
            scale, offset, midpoint = (
                generator.uniform(0.5, 200),
                generator.normal(),
                generator.uniform(-70, -10),
            )
            charge = offset + scale / (1 + np.exp(-(voltages - midpoint) / 8)) * generator.normal(
                1, 0.01, len(voltages)
            )
            rows += [
                [label, cell, str(v), repr(float(f"{q:.12g}"))]
                for v, q in zip(voltages.tolist(), charge.tolist(), strict=True)
            ]
    return rows


def as_text(
    delimiter: str, decimal: str, encoding: str, line_end: str, minus: str
) -> Callable[[Rows], dict[str, bytes]]:
    def write(rows: Rows) -> dict[str, bytes]:
        body = [
            [*row[:2], *(f.replace(".", decimal).replace("-", minus, 1) for f in row[2:])] for row in rows[1:]
        ]
        # A minus inside an exponent stays as it is: only a leading one is typed as U+2212.
        body = [
            [*row[:2], *(f if f[:1] == minus else f.replace(minus, "-") for f in row[2:])] for row in body
        ]
        text = text_of([rows[0], *body], delimiter).replace("\n", line_end)
        return {"curves.csv": text.encode(encoding)}

    return write


def as_workbook(rows: Rows) -> dict[str, bytes]:
    workbook = openpyxl.Workbook()
    sheet = workbook.active
    assert sheet is not None
    for row in [rows[0], *([*row[:2], *map(float, row[2:])] for row in rows[1:])]:
        sheet.append(row)
    with TemporaryDirectory() as directory:
        workbook.save(Path(directory) / "a.xlsx")
        return {"curves.xlsx": (Path(directory) / "a.xlsx").read_bytes()}


def as_wide(rows: Rows) -> dict[str, bytes]:
    """One column per cell; all cells of these campaigns share their voltages."""
    cells: dict[str, dict[str, str]] = {}
    for label, cell, voltage, charge in rows[1:]:
        cells.setdefault(f"{label}/{cell}", {})[voltage] = charge
    voltages = list(next(iter(cells.values())))
    wide = [["voltage_mV", *cells], *([v, *(points[v] for points in cells.values())] for v in voltages)]
    return {"curves.tsv": text_of(wide, "\t").encode()}


WRITERS = {
    "commas": as_text(",", ".", "utf-8", "\n", "-"),
    "semicolons": as_text(";", ",", "utf-8-sig", "\r\n", "−"),
    "tabs": as_text("\t", ".", "utf-16", "\n", "−"),
    "big-endian": as_text(";", ".", "utf-16-be", "\r\n", "-"),
    "workbook": as_workbook,
    "wide": as_wide,
}


def read_files(files: dict[str, bytes]) -> Campaign:
    with TemporaryDirectory() as directory:
        for name, data in {"campaign.toml": TOML.encode(), **files}.items():
            (Path(directory) / name).write_bytes(data)
        return read(directory)


@pytest.mark.parametrize("layout", WRITERS)
@settings(max_examples=15, deadline=None)
@given(rows=campaigns(), data=st.data())
def test_what_is_written_reads_back(layout: str, rows: Rows, data: st.DataObject) -> None:
    body = rows[1:] if layout == "wide" else mingled(rows[1:], data.draw(st.permutations(rows[1:])))
    campaign = read_files(WRITERS[layout]([rows[0], *body]))
    found = {
        (construct.label, curve.cell, f"{v:g}", repr(q))
        for construct in campaign.constructs
        for curve in construct.curves
        for v, q in zip(curve.voltage_mv.tolist(), curve.charge.tolist(), strict=True)
    }
    assert found == {(label, cell, voltage, charge) for label, cell, voltage, charge in rows[1:]}
    assert all(
        np.all(np.diff(curve.voltage_mv) > 0)
        and [c.cell for c in construct.curves] == sorted(c.cell for c in construct.curves)
        for construct in campaign.constructs
        for curve in construct.curves
    )


@settings(max_examples=25, deadline=None)
@given(rows=campaigns(), data=st.data())
def test_shuffled_rows_give_an_equal_campaign(rows: Rows, data: st.DataObject) -> None:
    shuffled = [rows[0], *mingled(rows[1:], data.draw(st.permutations(rows[1:])))]
    write = WRITERS["commas"]
    assert content(read_files(write(shuffled))) == content(read_files(write(rows)))


def outcome(rows: Rows) -> Campaign | tuple[Problem, ...]:
    try:
        return read_files({"curves.csv": text_of(rows).encode()})
    except DataRefused as refusal:
        return refusal.problems


@settings(max_examples=100, deadline=None)
@given(
    field=st.text(st.characters(exclude_categories=["Cs"]), max_size=8)
    | st.text("0123456789.,-−+eE ", max_size=6),
    row=st.integers(1, 32),
    position=st.integers(0, 3),
)
def test_a_changed_field_is_read_as_it_stands_or_refused(field: str, row: int, position: int) -> None:
    rows = curve_rows()
    rows[row][position] = '"' + field.replace('"', '""') + '"'
    found = outcome(rows)
    if not isinstance(found, Campaign):
        assert found
        assert all(problem.remedy and problem.expected and problem.found for problem in found)
        return
    label, cell, voltage, charge = [*rows[row][:position], field, *rows[row][position + 1 :]]
    (curve,) = [c for c in found.construct(label.strip()).curves if c.cell == cell.strip()]
    assert float(charge.replace("−", "-")) in curve.charge
    assert float(voltage.replace("−", "-")) in curve.voltage_mv


def test_adding_an_unrelated_construct_changes_no_other(tmp_path: Path) -> None:
    one = read(folder(tmp_path / "a"))
    other = read(folder(tmp_path / "b", curves=curve_rows((*LABELS, "K95N"))))
    by_label = {c.label: c for c in other.constructs}
    for construct in one.constructs:
        assert construct.curves[0].charge.tolist() == by_label[construct.label].curves[0].charge.tolist()
        assert construct.mutations == by_label[construct.label].mutations
