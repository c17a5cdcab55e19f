"""Median voltages and charges, and what they must agree on with the curves."""

from pathlib import Path

import pytest

from cornerwise.campaign import StatedCharge
from cornerwise.intake import read
from intake.writing import LABELS, Rows, assert_refused, content, curve_rows, folder, problems

MEASURED = 'wild_type = "WT"\n'
SHARED = 'wild_type = "WT"\ncharge = "wild-type"\n'
MEDIANS = [
    ["construct", "median_mV", "sem_mV", "n"],
    *([label, str(-40 - 3 * i), "1.5", "5"] for i, label in enumerate(LABELS)),
]
REPLICATES = [
    ["construct", "cell", "batch", "charge_e0", "method"],
    *([label, cell, "b", "12.5", "noise"] for label in LABELS for cell in ("q1", "q2")),
]
SUMMARIES = [
    ["construct", "charge_e0", "sem_e0", "n"],
    *([label, "12.5", "0.4", "6"] for label in LABELS),
]


def changed(rows: Rows, row: int, column: str, value: str) -> Rows:
    """A copy with one field changed, by its row in the file."""
    copy = [list(fields) for fields in rows]
    copy[row - 1][rows[0].index(column)] = value
    return copy


def test_medians_alone(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", medians=MEDIANS))
    median = campaign.construct("R212Q").median
    assert median is not None
    assert (median.median_mv, median.sem_mv, median.n) == (-46.0, 1.5, 5)
    assert (median.origin.file, median.origin.row) == ("medians.csv", 4)
    assert campaign.construct("R212Q").curves == ()


def test_replicates(tmp_path: Path) -> None:
    rows = [REPLICATES[0], *REPLICATES[:0:-1]]
    replicates = read(folder(tmp_path / "a", MEASURED, charges=rows)).construct("E181A").charge_replicates
    assert [(r.cell, r.batch, r.charge_e0, r.method) for r in replicates] == [
        ("q1", "b", 12.5, "noise"),
        ("q2", "b", 12.5, "noise"),
    ]


def test_summaries(tmp_path: Path) -> None:
    (charge,) = read(folder(tmp_path / "a", MEASURED, charges=SUMMARIES)).construct("WT").charge_summaries
    assert (charge.charge_e0, charge.sem_e0, charge.n, charge.method) == (12.5, 0.4, 6, None)


def test_constructs_other_than_the_wild_type_need_no_charge(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", MEASURED, charges=SUMMARIES[:2]))
    assert campaign.construct("E181A").charge_summaries == ()


@pytest.mark.parametrize(
    ("row", "column", "value", "match"),
    [
        (3, "n", "1", "found 1; expected a whole number, at least 2"),
        (3, "n", "4.5", "found 4.5; expected a whole number"),
        (3, "sem_mV", "-0.1", "found -0.1; expected a standard error, not negative"),
        (3, "median_mV", "-501", "found -501 mV"),
        (4, "construct", "WT", "'WT' again, after row 2"),
    ],
)
def test_impossible_medians(row: int, column: str, value: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", medians=changed(MEDIANS, row, column, value))
    found = [p for p in problems(path) if p.origin.file == "medians.csv"]
    assert [(p.origin.row, p.origin.column) for p in found] == [(row, column)]
    assert match in str(found[0])


def test_a_count_with_a_decimal_point_is_a_count(tmp_path: Path) -> None:
    median = read(folder(tmp_path / "a", medians=changed(MEDIANS, 3, "n", "5.0"))).construct("E181A").median
    assert median is not None
    assert median.n == 5


def test_medians_in_volts(tmp_path: Path) -> None:
    rows = [MEDIANS[0], *([label, "-0.04", "0.001", "4"] for label in LABELS)]
    path = folder(tmp_path / "a", medians=rows)
    assert_refused(path, file="medians.csv", row=1, column="median_mV", match="multiply them.*1000")


def test_a_median_without_its_unit(tmp_path: Path) -> None:
    rows = changed(MEDIANS, 1, "median_mV", "median")
    path = folder(tmp_path / "a", medians=rows)
    assert_refused(path, file="medians.csv", row=1, column="median", match="with its unit, median_mV")


@pytest.mark.parametrize(("value", "fits"), [("0", False), ("-1", False), ("100", True), ("100.1", False)])
@pytest.mark.parametrize("rows", [REPLICATES, SUMMARIES], ids=["replicates", "summaries"])
def test_total_charges(value: str, fits: bool, rows: Rows, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(rows, 2, "charge_e0", value))
    if fits:
        assert read(path).construct("WT").label == "WT"
    else:
        match = f"found {value} e0; expected a total charge per channel above 0 and at most 100 e0"
        assert_refused(path, file="charges.csv", row=2, column="charge_e0", match=match)


@pytest.mark.parametrize(
    ("rows", "row", "column", "value", "match"),
    [
        (SUMMARIES, 3, "n", "1", "at least 2"),
        (SUMMARIES, 3, "sem_e0", "-1", "not negative"),
        (SUMMARIES, 3, "construct", "WT", "'WT' again, after row 2"),
        (REPLICATES, 3, "cell", "q1", "'WT/q1' again, after row 2"),
    ],
)
def test_impossible_charges(
    rows: Rows, row: int, column: str, value: str, match: str, tmp_path: Path
) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(rows, row, column, value))
    assert_refused(path, file="charges.csv", row=row, column=column, match=match)


@pytest.mark.parametrize("unit", ["fC", "pC", "nC"])
def test_raw_charge_is_no_charge_per_channel(unit: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(REPLICATES, 1, "charge_e0", f"charge_{unit}"))
    assert_refused(
        path, file="charges.csv", row=1, column=f"charge_{unit}", match="number of channels.*state one charge"
    )


def test_a_charge_without_its_unit(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(REPLICATES, 1, "charge_e0", "charge"))
    assert_refused(path, file="charges.csv", row=1, column="charge", match="with its unit, charge_e0")


def test_replicates_and_summaries_in_one_table(tmp_path: Path) -> None:
    rows = [["construct", "cell", "charge_e0", "sem_e0", "n"], ["WT", "c1", "13", "1", "4"]]
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(path, file="charges.csv", row=1, column="cell", match="either one row per cell")


def test_curves_and_a_median_of_one_construct(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=curve_rows(LABELS[:3]), medians=MEDIANS[:1] + MEDIANS[3:])
    match = r"a median of 'R212Q', which has curves too \(curves.csv, row 18, column construct\)"
    assert_refused(path, file="medians.csv", row=2, column="construct", match=match)


def test_some_constructs_with_curves_and_some_with_medians(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", curves=curve_rows(LABELS[:3]), medians=[MEDIANS[0], MEDIANS[4]]))
    assert [bool(construct.curves) for construct in campaign.constructs] == [True, True, True, False]


def test_a_construct_with_charges_only(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", charges=[*SUMMARIES, ["E181Q", "12", "1", "3"]])
    assert_refused(
        path, file="charges.csv", row=6, column="construct", match="neither curves nor a median.*mean 'E181A'"
    )


def test_a_cell_with_two_batches_in_two_tables(tmp_path: Path) -> None:
    curves = [[*row, "batch" if i == 0 else "monday"] for i, row in enumerate(curve_rows())]
    charges = [REPLICATES[0], ["WT", "c1", "friday", "13", ""], ["WT", "c2", "friday", "13", ""]]
    path = folder(tmp_path / "a", MEASURED, curves=curves, charges=charges)
    match = "batch 'friday' of the cell WT/c1, which has batch 'monday' elsewhere"
    assert_refused(path, file="charges.csv", row=2, column="batch", match=match)


@pytest.mark.parametrize("toml", [MEASURED, SHARED], ids=["measured", "wild-type"])
def test_no_charges_at_all(toml: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", toml)
    match = 'no table of charges.*wild-type".*or state one charge.*value_e0 = 13.0'
    assert_refused(path, file="campaign.toml", column="charge", match=match)


@pytest.mark.parametrize("toml", [MEASURED, SHARED], ids=["measured", "wild-type"])
@pytest.mark.parametrize("rows", [REPLICATES[:1] + REPLICATES[3:], SUMMARIES[:1] + SUMMARIES[2:]])
def test_no_charge_of_the_wild_type(toml: str, rows: Rows, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", toml, charges=rows)
    assert_refused(path, file="charges.csv", match="no charge of the wild type 'WT'.*add it to the table")


def test_a_stated_charge_beside_a_table(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", charges=SUMMARIES))
    assert campaign.settings.charge == StatedCharge(value_e0=13.0, sem_e0=0.5)
    assert campaign.construct("WT").charge_summaries != ()


def test_the_order_of_rows_does_not_matter(tmp_path: Path) -> None:
    one = folder(tmp_path / "a", MEASURED, medians=MEDIANS, charges=REPLICATES)
    other = folder(
        tmp_path / "b",
        MEASURED,
        medians=[MEDIANS[0], *MEDIANS[:0:-1]],
        charges=[REPLICATES[0], *REPLICATES[:0:-1]],
    )
    assert content(read(one)) == content(read(other))
