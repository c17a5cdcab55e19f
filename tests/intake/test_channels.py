"""Charge of whole cells and channel counts to charge per channel."""

from pathlib import Path

import pytest

from cornerwise.intake import read
from intake.writing import LABELS, Rows, assert_refused, changed, folder, problems

MEASURED = 'wild_type = "WT"\n'
# CODATA 2018, exact by definition of the SI (the table "elementary charge", read in scipy's copy of it).
E0_COULOMB = 1.602176634e-19
RAW = [
    ["construct", "cell", "charge_pC", "channels", "channels_sem"],
    *([label, cell, "6.0", "3.0e6", "1.5e5"] for label in LABELS for cell in ("q1", "q2")),
]
EITHER = [
    ["construct", "cell", "charge_e0", "charge_pC", "channels", "channels_sem"],
    ["WT", "q1", "12.5", "", "", ""],
    ["WT", "q2", "", "6.0", "3e6", ""],
    ["E181A", "q1", "", "6.0", "3e6", "1e5"],
]


def test_charge_over_channels(tmp_path: Path) -> None:
    first, _ = read(folder(tmp_path / "a", MEASURED, charges=RAW)).construct("E181A").charge_replicates
    assert first.charge_e0 == pytest.approx(6.0e-12 / 3.0e6 / E0_COULOMB, rel=1e-14)
    assert first.own_uncertainty_e0 == pytest.approx(first.charge_e0 * 0.05, rel=1e-14)
    assert (first.cell, first.origin.row) == ("q1", 4)


@pytest.mark.parametrize(("unit", "factor"), [("fC", 1000.0), ("pC", 1.0), ("nC", 0.001)])
def test_the_unit_of_the_header(unit: str, factor: float, tmp_path: Path) -> None:
    rows = [
        [row[0], row[1], f"charge_{unit}" if i == 0 else str(6.0 * factor), *row[3:]]
        for i, row in enumerate(RAW)
    ]
    first, _ = read(folder(tmp_path / "a", MEASURED, charges=rows)).construct("WT").charge_replicates
    assert first.charge_e0 == pytest.approx(12.483018148921526, rel=1e-14)  # 6e-12 / 3e6 / E0_COULOMB


@pytest.mark.parametrize("sem", [None, "", "0"])
def test_a_count_without_uncertainty(sem: str | None, tmp_path: Path) -> None:
    rows = [row[:4] for row in RAW] if sem is None else changed(RAW, 2, "channels_sem", sem)
    first, _ = read(folder(tmp_path / "a", MEASURED, charges=rows)).construct("WT").charge_replicates
    assert first.own_uncertainty_e0 == (0.0 if sem == "0" else None)


def test_charge_per_channel_and_of_whole_cells_in_one_table(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", MEASURED, charges=EITHER))
    wild_type, mutant = (campaign.construct(label).charge_replicates for label in ("WT", "E181A"))
    assert [(r.charge_e0, r.own_uncertainty_e0) for r in wild_type] == [
        (12.5, None),
        (mutant[0].charge_e0, None),
    ]
    assert mutant[0].own_uncertainty_e0 == pytest.approx(mutant[0].charge_e0 / 30)


@pytest.mark.parametrize("unit", ["fC", "pC", "nC"])
def test_no_channel_counts(unit: str, tmp_path: Path) -> None:
    rows = changed([[*row[:3]] for row in RAW], 1, "charge_pC", f"charge_{unit}")
    assert_refused(
        folder(tmp_path / "a", MEASURED, charges=rows), file="charges.csv", row=1, column=f"charge_{unit}",
        match="raw charges of two constructs may not be compared without channel counts; expected "
        "charge_e0.*or a column channels beside it; add a column channels with the number of channels.*"
        "state one charge",
    )  # fmt: skip


def test_an_uncertainty_is_no_count(tmp_path: Path) -> None:
    rows = [[*row[:3], row[4]] for row in RAW]
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(path, file="charges.csv", row=1, column="charge_pC", match="add a column channels with")


def test_a_misspelt_count_is_told_once(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(RAW, 1, "channels", "chanels"))
    assert_refused(path, file="charges.csv", row=1, column="chanels", match=r"did you mean channels\?")


def test_raw_charge_of_a_construct(tmp_path: Path) -> None:
    rows = [["construct", "charge_pC", "channels", "sem_e0", "n"], ["WT", "6", "3e6", "1", "4"]]
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(
        path, file="charges.csv", row=1, column="charge_pC", match="one row per cell.*add the column cell"
    )


@pytest.mark.parametrize(
    ("column", "value", "match"),
    [
        (
            "channels",
            "0",
            "found 0; expected the number of channels in the cell, at least 1; correct the count",
        ),
        ("channels", "-3e6", r"found -3e\+06; expected the number of channels"),
        ("channels", "0.5", "found 0.5; expected the number of channels"),
        ("channels", "", "found nothing; expected the number of channels.*may not be compared"),
        ("channels", "many", "found 'many'; expected a number"),
        ("channels", "nan", "expected a finite number"),
        ("channels_sem", "-1", "found -1; expected the standard uncertainty .* from 0 to that number"),
        ("channels_sem", "3.1e6", r"found 3.1e\+06; expected the standard uncertainty"),
        ("charge_pC", "-6", "found -12.5 e0 a channel.*above 0 and at most 100 e0.*mind the unit"),
        ("charge_pC", "0", "found 0 e0 a channel"),
        ("charge_pC", "60", "found 125 e0 a channel"),
        ("charge_pC", "1e308", "found inf e0 a channel"),
        ("charge_pC", "", "found nothing; expected a number"),
    ],
)
def test_values_that_cannot_be(column: str, value: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(RAW, 3, column, value))
    assert_refused(path, file="charges.csv", row=3, column=column, match=match)


@pytest.mark.parametrize(("unit", "first"), [("nC", r"1.25e\+04"), ("fC", "0.0125")])
def test_a_wrong_unit_is_told_once(unit: str, first: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(RAW, 1, "charge_pC", f"charge_{unit}"))
    match = rf"8 of 8 charges impossible for one channel, the first {first} e0 in row 2.*correct the unit"
    assert_refused(path, file="charges.csv", row=1, column=f"charge_{unit}", match=match)


@pytest.mark.parametrize("traces", [4, 5])
def test_few_traces_of_a_charge_are_poor_cells_and_most_are_a_wrong_unit(traces: int, tmp_path: Path) -> None:
    rows = RAW
    for row in range(2, 2 + traces):
        rows = changed(rows, row, "charge_pC", "0.048")  # 0.0999 e0 a channel
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    if traces == 4:  # half of them
        assert read(path).construct("WT").charge_replicates[0].charge_e0 == pytest.approx(0.0999, rel=1e-3)
    else:
        match = "5 of 8 charges impossible for one channel, the first 0.0999 e0 in row 2; .* at least 0.1 e0"
        assert_refused(path, file="charges.csv", row=1, column="charge_pC", match=match)


@pytest.mark.parametrize(
    ("row", "column", "value", "place", "match"),
    [
        (
            2,
            "charge_pC",
            "6",
            "charge_pC",
            "both charge_e0 and charge_pC; expected either charge_e0 or charge_pC",
        ),
        (2, "charge_e0", "", "charge_e0", "nothing; expected either charge_e0 or charge_pC with channels"),
        (2, "channels", "3e6", "channels", "a channel count without the cell's charge.*delete the count"),
        (2, "channels_sem", "10", "channels_sem", "a channel count without the cell's charge"),
        (3, "channels", "", "channels", "nothing; expected the number of channels"),
    ],
)
def test_rows_with_either_charge(
    row: int, column: str, value: str, place: str, match: str, tmp_path: Path
) -> None:
    rows = changed(EITHER, row, column, value)
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(path, file="charges.csv", row=row, column=place, match=match)


@pytest.mark.parametrize("column", ["channels", "channels_sem"])
def test_a_count_beside_the_charge_of_one_channel(column: str, tmp_path: Path) -> None:
    rows = [
        ["construct", "cell", "charge_e0", column],
        ["WT", "q1", "12.5", "3e6"],
        ["WT", "q2", "12.5", "3e6"],
    ]
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    match = "a channel count without the cell's charge.*one channel already.*whole cell as charge_pC"
    assert_refused(path, file="charges.csv", row=1, column=column, match=match)


@pytest.mark.parametrize("header", ["charge", "charge_uC"])
def test_a_count_beside_a_charge_without_a_known_unit(header: str, tmp_path: Path) -> None:
    """Only the header is told: whether the count is needless shows once the unit is known."""
    match = "the quantity with its unit, charge_e0, charge_fC, charge_pC or charge_nC"
    for number, value in enumerate(("6", "6000", "0.006")):
        rows = [RAW[0], *([*row[:2], value, *row[3:]] for row in RAW[1:])]
        path = folder(tmp_path / str(number), MEASURED, charges=changed(rows, 1, "charge_pC", header))
        assert_refused(path, file="charges.csv", row=1, column=header, match=match)


def test_two_raw_units(tmp_path: Path) -> None:
    rows: Rows = [[*row, "charge_fC" if i == 0 else "6000"] for i, row in enumerate(RAW)]
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(path, file="charges.csv", row=1, column="charge_fC", match="both charge_pC and charge_fC")


def test_faults_come_in_the_order_of_rows_and_columns(tmp_path: Path) -> None:
    rows = changed(changed(RAW, 5, "channels", "0"), 3, "channels_sem", "-1")
    found = problems(folder(tmp_path / "a", MEASURED, charges=changed(rows, 3, "charge_pC", "x")))
    assert [(p.origin.row, p.origin.column) for p in found] == [
        (3, "charge_pC"), (3, "channels_sem"), (5, "channels")
    ]  # fmt: skip
