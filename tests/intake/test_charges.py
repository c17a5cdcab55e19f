"""Total charges, by cell and by construct, and what they must agree on with the other tables."""

from pathlib import Path

import pytest

from cornerwise.campaign import StatedCharge
from cornerwise.charges import charge_values
from cornerwise.intake import read
from cornerwise.intake.charges import method_name
from intake.writing import (
    LABELS,
    MEDIANS,
    TOML,
    Rows,
    assert_refused,
    changed,
    content,
    curve_rows,
    folder,
    problems,
    text_of,
)  # fmt: skip

MEASURED = 'wild_type = "WT"\n'
SHARED = 'wild_type = "WT"\ncharge = "wild-type"\n'
REPLICATES = [
    ["construct", "cell", "batch", "charge_e0", "method"],
    *([label, cell, "b", "12.5", "noise"] for label in LABELS for cell in ("q1", "q2")),
]
SUMMARIES = [
    ["construct", "charge_e0", "sem_e0", "n"],
    *([label, "12.5", "0.4", "6"] for label in LABELS),
]


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


MIXED = [
    ["construct", "cell", "batch", "charge_e0", "sem_e0", "n", "method", "citation"],
    ["WT", "q1", "b", "12.5", "", "", "noise", ""],
    ["WT", "q2", "b", "12.9", "", "", "noise", ""],
    ["WT", "", "", "13.5", "0.4", "6", "blocker", ""],
    ["WT", "", "", "13.1", "0.3", "", "", "an invented source"],
    ["E181A", "q1", "", "9.5", "", "", "", ""],
]


def test_several_methods_for_one_construct(tmp_path: Path) -> None:
    wild_type = read(folder(tmp_path / "a", MEASURED, charges=MIXED)).construct("WT")
    assert [(r.cell, r.charge_e0, r.method) for r in wild_type.charge_replicates] == [
        ("q1", 12.5, "noise"),
        ("q2", 12.9, "noise"),
    ]
    assert [(s.charge_e0, s.sem_e0, s.n, s.method, s.citation) for s in wild_type.charge_summaries] == [
        (13.1, 0.3, None, None, "an invented source"),
        (13.5, 0.4, 6, "blocker", None),
    ]


def test_one_cell_by_two_methods(tmp_path: Path) -> None:
    rows = [*REPLICATES, ["WT", "q1", "b", "13.5", "blocker"], ["WT", "q1", "", "13.1", ""]]
    replicates = read(folder(tmp_path / "a", MEASURED, charges=rows)).construct("WT").charge_replicates
    assert [(r.cell, r.method) for r in replicates] == [
        ("q1", None), ("q1", "blocker"), ("q1", "noise"), ("q2", "noise"),
    ]  # fmt: skip


def test_summaries_by_two_methods(tmp_path: Path) -> None:
    rows = [[*row, "method" if i == 0 else ""] for i, row in enumerate(SUMMARIES)]
    path = folder(tmp_path / "a", MEASURED, charges=[*rows, ["WT", "13", "0.3", "5", "noise"]])
    assert [s.method for s in read(path).construct("WT").charge_summaries] == [None, "noise"]


def test_methods_are_called_as_the_arithmetic_calls_them(tmp_path: Path) -> None:
    construct = read(folder(tmp_path / "a", MEASURED, charges=MIXED)).construct("WT")
    named = {method_name(one.method, None) for one in construct.charge_replicates}
    named |= {method_name(one.method, one.citation) for one in construct.charge_summaries}
    values = charge_values(construct, 22.0)
    assert named == {value.method for value in values} == {"noise", "blocker", "literature"}
    (value,) = charge_values(read(folder(tmp_path / "b", MEASURED, charges=SUMMARIES)).construct("WT"), 22.0)
    assert value.method == method_name(None, None)


def test_a_citation_makes_the_column_n_needless(tmp_path: Path) -> None:
    rows = [["construct", "charge_e0", "sem_e0", "citation"], ["WT", "13", "0.4", "an invented source"]]
    (charge,) = read(folder(tmp_path / "a", MEASURED, charges=rows)).construct("WT").charge_summaries
    assert (charge.n, charge.citation, charge.method) == (None, "an invented source", None)
    path = folder(tmp_path / "b", MEASURED, charges=changed(rows, 2, "citation", ""))
    assert_refused(
        path, file="charges.csv", row=2, column="citation", match="number of cells in n, at least 2, or"
    )


@pytest.mark.parametrize(
    ("row", "column", "value", "place", "match"),
    [
        (4, "n", "", "n", "nothing; expected the number of cells in n, at least 2, or a citation"),
        (5, "n", "1", "n", "found 1; expected a whole number, at least 2"),
        (5, "n", "many", "n", "found 'many'; expected a number"),
        (5, "sem_e0", "", "sem_e0", "nothing; expected a standard error in e0; enter it, or fill in"),
        (5, "sem_e0", "-1", "sem_e0", "not negative"),
        (5, "citation", "", "n", "or a citation; enter the number; only a value with a citation"),
        (6, "cell", "", "cell", "nothing, and neither sem_e0 nor n; expected a cell's label, or"),
        (2, "sem_e0", "0.5", "sem_e0", "sem_e0 in the row of a cell; expected nothing; .*channels_sem"),
        (2, "n", "5", "n", "n in the row of a cell; expected nothing"),
        (2, "citation", "x", "citation", "citation in the row of a cell"),
        (4, "batch", "b", "batch", "batch in the row of a construct, whose cell is empty; expected nothing"),
        (3, "cell", "q1", "cell", "'WT/q1' again, after row 2 by the same method 'noise'"),
        (4, "method", "noise", "construct", "mean of 'WT' by the method 'noise', of which .* row 2"),
        (3, "method", "Noise", "method", "'Noise', spelt 'noise' in row 2; expected one spelling"),
        (2, "charge_e0", "", "charge_e0", "nothing; expected a number"),
    ],
)  # fmt: skip
def test_faults_in_a_table_of_cells_and_constructs(
    row: int, column: str, value: str, place: str, match: str, tmp_path: Path
) -> None:
    path = folder(tmp_path / "a", MEASURED, charges=changed(MIXED, row, column, value))
    assert_refused(path, file="charges.csv", row=row, column=place, match=match)


def test_both_kinds_of_columns_in_the_row_of_a_cell_are_told_once(tmp_path: Path) -> None:
    rows = changed(changed(MIXED, 2, "sem_e0", "0.5"), 2, "n", "6")
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(
        path, file="charges.csv", row=2, column="sem_e0", match="sem_e0 and n in the row of a cell"
    )


def test_raw_charge_in_the_row_of_a_construct(tmp_path: Path) -> None:
    rows = [["construct", "cell", "charge_e0", "charge_pC", "channels", "sem_e0", "n"],
            ["WT", "q1", "", "6", "3e6", "", ""], ["E181A", "", "", "6", "3e6", "0.4", "5"]]  # fmt: skip
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(
        path, file="charges.csv", row=3, column="charge_pC", match="charge_pC in the row of a construct"
    )


@pytest.mark.parametrize("method", ["", "measured"])
def test_the_unnamed_method_in_both_forms(method: str, tmp_path: Path) -> None:
    rows = [*MIXED, ["E181A", "", "", "9.9", "0.4", "4", method, ""]]
    by_method = "by the method 'measured'" if method else "without a method"
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    match = (
        f"a mean of 'E181A' {by_method}, of which single cells stand too, the first in row 6.*name its method"
    )
    assert_refused(path, file="charges.csv", row=7, column="construct", match=match)


@pytest.mark.parametrize(
    ("method", "said"), [("", "after row 5;"), ("blocker", "after row 4 by the same method")]
)
def test_a_mean_repeated(method: str, said: str, tmp_path: Path) -> None:
    rows = [*MIXED, ["WT", "", "", "9.9", "0.4", "", method, "another invented source"]]
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    assert_refused(path, file="charges.csv", row=7, column="construct", match=f"'WT' again, {said}")


def test_a_cell_by_two_methods_has_one_batch(tmp_path: Path) -> None:
    rows = [*REPLICATES, ["WT", "q1", "friday", "13.5", "blocker"]]
    path = folder(tmp_path / "a", MEASURED, charges=rows)
    match = "batch 'b' of the cell WT/q1, which has batch 'friday' elsewhere"
    assert_refused(path, file="charges.csv", row=2, column="batch", match=match)


@pytest.mark.parametrize("method", ["noise", "blocker", "measured", "literature"])
def test_the_method_asked_for(method: str, tmp_path: Path) -> None:
    toml = f'{MEASURED}charge_method = "{method}"\n'
    assert read(folder(tmp_path / "a", toml, charges=MIXED)).settings.charge_method == method


@pytest.mark.parametrize(
    ("method", "match"),
    [
        ("nois", "'nois', by which no charge was measured; expected one of the methods of the tables, "
         "'blocker', 'literature', 'measured' or 'noise'; did you mean 'noise'"),
        ("Noise", "did you mean 'noise'"),
        ("zebra", "correct the name, or delete the line"),
        ("limiting slope", "correct the name, or delete the line"),
    ],
)  # fmt: skip
def test_a_method_nobody_used(method: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", f'{MEASURED}charge_method = "{method}"\n', charges=MIXED)
    assert_refused(path, file="campaign.toml", row=2, column="charge_method", match=match)


def test_a_method_without_any_charges(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + 'charge_method = "noise"\n')
    assert_refused(
        path, file="campaign.toml", column="charge_method", match="no method, since there are no charges"
    )


def test_a_method_in_a_row_that_was_lost_is_not_called_unknown(tmp_path: Path) -> None:
    text = text_of(MIXED) + "E181A,q2,noise\n"
    path = folder(tmp_path / "a", MEASURED + 'charge_method = "zebra"\n', charges=text + "WT,q9,zebra\n")
    assert [(p.origin.file, p.origin.row) for p in problems(path)] == [("charges.csv", 7), ("charges.csv", 8)]
