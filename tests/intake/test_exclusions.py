"""Cells set aside with a reason."""

from pathlib import Path

import pytest

from cornerwise.campaign import Exclusion
from cornerwise.intake import read
from intake.test_openings import opening_rows
from intake.writing import LABELS, TOML, assert_refused, content, curve_rows, folder, problems

MEASURED = 'wild_type = "WT"\n'
CURVES = curve_rows(cells=("c1", "c2"))
CYCLE = '[[cycle]]\nname = "bridge"\nmutations = ["E181A", "R212Q"]\n'
CHARGES = "construct,cell,charge_e0\nWT,c1,13\nWT,q7,12\nE181A,q1,12\n"


def entry(construct: str, cell: str, reason: str = "leak rose") -> str:
    return f'[[exclude]]\nconstruct = "{construct}"\ncell = "{cell}"\nreason = "{reason}"\n'


def test_cells_are_set_aside_with_their_reasons(tmp_path: Path) -> None:
    toml = TOML + entry("WT", " c2 ", " seal lost ") + entry("E181A", "c1")
    campaign = read(folder(tmp_path / "a", toml, curves=CURVES))
    assert campaign.exclusions == (
        Exclusion(construct="E181A", cell="c1", reason="leak rose"),
        Exclusion(construct="WT", cell="c2", reason="seal lost"),
    )
    assert [curve.cell for curve in campaign.construct("WT").curves] == ["c1", "c2"]


def test_none_by_default(tmp_path: Path) -> None:
    assert read(folder(tmp_path / "a", curves=CURVES)).exclusions == ()


def test_the_order_of_entries_does_not_matter(tmp_path: Path) -> None:
    entries = [entry("WT", "c2"), entry("E181A", "c1"), entry("E181A", "c2")]
    one = read(folder(tmp_path / "a", TOML + "".join(entries), curves=CURVES))
    assert content(one) == content(read(folder(tmp_path / "b", TOML + "".join(entries[::-1]), curves=CURVES)))


@pytest.mark.parametrize(
    ("construct", "cell"), [("WT", "q7"), ("E181A", "q1"), ("R212Q", "p1"), ("WT", "c2")]
)
def test_a_cell_of_any_table(construct: str, cell: str, tmp_path: Path) -> None:
    path = folder(
        tmp_path / "a", TOML + entry(construct, cell), curves=CURVES, charges=CHARGES,
        openings=opening_rows(("R212Q",)),
    )  # fmt: skip
    assert [(e.construct, e.cell) for e in read(path).exclusions] == [(construct, cell)]


@pytest.mark.parametrize(
    ("construct", "cell", "match"),
    [
        (
            "WT",
            "c3",
            "the cell 'c3', which 'WT' has not; expected a cell of 'WT' in .*: 'c1' or 'c2'; correct",
        ),
        ("WT", "C1", "did you mean 'c1'"),
        ("WT", "zebra", "the cell 'zebra', which 'WT' has not.*correct the label, or delete the entry"),
        ("E181", "c1", "the construct 'E181', of which no cell is known; .*did you mean 'E181A'"),
        ("K95N", "c1", "the construct 'K95N', of which no cell is known; expected a construct with cells"),
    ],
)
def test_a_cell_that_does_not_exist(construct: str, cell: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + entry("E181A", "c2") + entry(construct, cell), curves=CURVES)
    assert_refused(path, file="campaign.toml", column="exclude entry 2", match=match)


def test_a_cell_of_another_construct_does_not_count(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + entry("R212Q", "q7"), curves=CURVES, charges=CHARGES)
    assert_refused(path, file="campaign.toml", column="exclude entry 1", match="'q7', which 'R212Q' has not")


def test_a_cell_in_a_row_that_was_lost_is_not_called_unknown(tmp_path: Path) -> None:
    charges = CHARGES + "WT,q9\n"
    path = folder(tmp_path / "a", TOML + entry("WT", "q9"), curves=CURVES, charges=charges)
    assert_refused(path, file="charges.csv", row=5, match="found 2 fields")


@pytest.mark.parametrize("reason", ["leak rose", "another reason"])
def test_the_same_cell_twice(reason: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + entry("WT", "c2") + entry("WT", "c2", reason), curves=CURVES)
    match = "the cell WT/c2 again, after campaign.toml, row 3.*each cell once; delete one"
    assert_refused(path, file="campaign.toml", row=7, column="exclude entry 2", match=match)


@pytest.mark.parametrize(
    ("old", "new", "column", "match"),
    [
        ('construct = "WT"\n', "", "construct", "no construct; expected the label of a construct"),
        ('cell = "c2"\n', "", "cell", "no cell; expected the label of one of its cells"),
        (
            'reason = "leak rose"\n',
            "",
            "reason",
            'no reason; expected why .* write reason = "..." in this entry',
        ),
        ('"leak rose"', '" "', "reason", "an empty text; expected why the cell is set aside"),
        (
            '"leak rose"',
            '"leak\\nrose"',
            "reason",
            "expected why the cell is set aside, in quotes and on one line",
        ),
        ('"c2"', "2", "cell", "the number 2; expected the label of one of its cells, in quotes"),
        ('"WT"', "true", "construct", "the truth value true"),
        (
            'reason = "leak rose"\n',
            'reason = "x"\nreasons = "y"\n',
            "reasons",
            "unknown key .*mean reason",
        ),
        ('reason = "leak rose"\n', 'reason = "x"\namplifier = 1\n', "amplifier", "unknown key.*delete it"),
        ('reason = "leak rose"\n', 'reason = "x"\nseed = 1\n', "seed", "move seed above the first"),
    ],
)
def test_entries_that_cannot_be(old: str, new: str, column: str, match: str, tmp_path: Path) -> None:
    toml = TOML + entry("E181A", "c2") + entry("WT", "c2").replace(old, new)
    path = folder(tmp_path / "a", toml, curves=CURVES)
    assert_refused(path, file="campaign.toml", column=f"exclude entry 2 {column}", match=match)


@pytest.mark.parametrize("text", ['[exclude]\nconstruct = "WT"\n', 'exclude = "WT/c1"\n', "exclude = [1]\n"])
def test_no_entries_but_something_else(text: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + text, curves=CURVES)
    assert_refused(path, file="campaign.toml", row=3, column="exclude", match="use double square brackets")


def test_every_curve_of_the_wild_type(tmp_path: Path) -> None:
    toml = TOML + entry("WT", "c2") + entry("WT", "c1")
    path = folder(tmp_path / "a", toml, curves=CURVES)
    match = r"every curve of the wild type 'WT' set aside \(c1, c2\); expected a usable cell of the wild type"
    assert_refused(path, file="campaign.toml", row=7, column="exclude entry 2", match=match)


@pytest.mark.parametrize("label", LABELS[1:])
def test_every_curve_of_a_construct_of_a_requested_cycle(label: str, tmp_path: Path) -> None:
    excluded = entry(label, "c1") + entry(label, "c2")
    path = folder(tmp_path / "a", TOML + excluded + CYCLE, curves=CURVES)
    match = f"every curve of a construct of the cycle bridge, '{label}' set aside .c1, c2."
    assert_refused(path, file="campaign.toml", row=7, column="exclude entry 2", match=match)
    assert len(read(folder(tmp_path / "b", TOML + excluded, curves=CURVES)).exclusions) == 2


def test_one_fault_for_each_construct_left_empty(tmp_path: Path) -> None:
    toml = TOML + "".join(entry(label, "c1") for label in ("WT", "R212Q")) + CYCLE
    found = [str(p) for p in problems(folder(tmp_path / "a", toml))]
    assert len(found) == 2
    assert "the wild type 'WT'" in found[0]
    assert "'R212Q'" in found[1]


def test_a_median_known_as_a_summary_is_no_curve(tmp_path: Path) -> None:
    path = folder(
        tmp_path / "a",
        TOML + entry("E181A", "q1") + CYCLE,
        curves=curve_rows(("WT", "R212Q", "E181A/R212Q")),
        medians="construct,median_mV,sem_mV,n\nE181A,-40,1,4\n",
        charges=CHARGES,
    )
    assert len(read(path).exclusions) == 1


@pytest.mark.parametrize("policy", ["measured", "wild-type"])
def test_every_charge_of_the_wild_type(policy: str, tmp_path: Path) -> None:
    toml = f'{MEASURED}charge = "{policy}"\n' + entry("WT", "c1") + entry("WT", "q7")
    path = folder(tmp_path / "a", toml, curves=CURVES, charges=CHARGES)
    match = (
        f"every charge of the wild type 'WT' set aside .c1, q7., with charge = \"{policy}\".*state one charge"
    )
    assert_refused(path, file="campaign.toml", row=7, column="exclude entry 2", match=match)
    stated = TOML + entry("WT", "c1") + entry("WT", "q7")
    assert len(read(folder(tmp_path / "b", stated, curves=CURVES, charges=CHARGES)).exclusions) == 2


def test_what_is_left_of_the_wild_types_charge(tmp_path: Path) -> None:
    toml = MEASURED + entry("WT", "q1")
    columns = "construct,cell,charge_e0,sem_e0,n,method\n"
    cells = columns + "WT,q1,13,,,noise\nE181A,q1,12,,,noise\nR212Q,,12,1,4,noise\n"
    path = folder(tmp_path / "a", toml, curves=CURVES, charges=cells)
    match = "every charge of the wild type 'WT' set aside .q1.,"
    assert_refused(path, file="campaign.toml", column="exclude entry 1", match=match)
    with_mean = folder(tmp_path / "b", toml, curves=CURVES, charges=cells + "WT,,13,1,4,blocker\n")
    assert len(read(with_mean).exclusions) == 1
    with_openings = folder(tmp_path / "c", toml, curves=CURVES, charges=cells, openings=opening_rows(("WT",)))
    assert len(read(with_openings).exclusions) == 1


def test_a_file_of_exclusions_is_not_passed_over(tmp_path: Path) -> None:
    for number, name in enumerate(("exclude.csv", "Exclusions.xlsx", "excluded.txt")):
        path = folder(tmp_path / str(number), curves=CURVES)
        (path / name).write_text("construct,cell,reason\nWT,c1,leak\n")
        assert_refused(
            path, file=name, match=r"expected \[\[exclude\]\] entries in campaign.toml; write them into"
        )
