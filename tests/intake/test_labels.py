"""Labels to mutations, the background, and which cycles there are."""

from collections.abc import Sequence
from pathlib import Path

import pytest

from cornerwise.campaign import Campaign
from cornerwise.intake import read
from intake.writing import LABELS, TOML, assert_refused, curve_rows, folder, problems, wide_rows


def campaign(path: Path, labels: tuple[str, ...], toml: str = TOML) -> Campaign:
    return read(folder(path, toml, curves=curve_rows(labels)))


def mutations(read_campaign: Campaign) -> dict[str, list[str]]:
    return {c.label: list(map(str, c.mutations)) for c in read_campaign.constructs}


def test_spelt_in_one_letter_and_hgvs(tmp_path: Path) -> None:
    found = campaign(tmp_path / "a", ("WT", "p.(Glu181Ala)", "R212Q", "Arg212Gln:E181A"))
    assert mutations(found) == {
        "WT": [],
        "p.(Glu181Ala)": ["E181A"],
        "R212Q": ["R212Q"],
        "Arg212Gln:E181A": ["E181A", "R212Q"],
    }


def test_listed_labels(tmp_path: Path) -> None:
    toml = TOML + '[mutations]\nA = ["E181A"]\nB = ["p.(Arg212Gln)"]\nAB = ["R212Q", "E181A"]\n"WT" = []\n'
    assert mutations(campaign(tmp_path / "a", ("WT", "A", "B", "AB"), toml)) == {
        "WT": [], "A": ["E181A"], "B": ["R212Q"], "AB": ["E181A", "R212Q"]
    }  # fmt: skip


def test_mutations_of_the_users_own_naming(tmp_path: Path) -> None:
    toml = TOML + '[mutations]\n"d" = ["Δ6-46"]\n"d+E181A" = ["Δ6-46", "E181A"]\n'
    found = campaign(tmp_path / "a", ("WT", "d", "E181A", "d+E181A"), toml)
    assert found.cycles[0].name == "E181A/Δ6-46"


def test_background_from_the_wild_types_label(tmp_path: Path) -> None:
    toml = TOML.replace("WT", "C52S")
    found = campaign(tmp_path / "a", ("C52S", "C52S/E181A", "R212Q+C52S", "C52S/E181A/R212Q"), toml)
    assert list(map(str, found.background)) == ["C52S"]
    assert found.cycles[0].name == "E181A/R212Q"
    assert mutations(found)["C52S/E181A/R212Q"] == ["E181A", "R212Q"]


def test_background_from_the_list(tmp_path: Path) -> None:
    toml = TOML + '[mutations]\nWT = ["C52S"]\n'
    labels = ("WT", "C52S/E181A", "C52S/R212Q", "C52S/E181A/R212Q")
    assert list(map(str, campaign(tmp_path / "a", labels, toml).background)) == ["C52S"]


def test_constructs_come_in_residue_order_after_the_wild_type(tmp_path: Path) -> None:
    labels = ("R212Q/E181A", "R212Q", "K95N", "WT", "E181A", "K95N/R212Q", "E181Q")
    assert [c.label for c in campaign(tmp_path / "a", labels).constructs] == [
        "WT", "K95N", "E181A", "E181Q", "R212Q", "K95N/R212Q", "R212Q/E181A",
    ]  # fmt: skip


@pytest.mark.parametrize(
    ("label", "match"),
    [
        ("mutant3", r"the label 'mutant3'.*list its mutations in campaign.toml under \[mutations\]"),
        ("wt", "write 'WT', as the wild type is called"),
        ("E181A/R212", "did you mean 'E181A/R212Q'"),
        ("E181E", "the label 'E181E'"),
        ("E181A/E181Q", "the label 'E181A/E181Q'"),
    ],
)
def test_labels_that_cannot_be_read(label: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=curve_rows((*LABELS, label)))
    assert_refused(path, file="curves.csv", row=34, column="construct", match=match)


def test_a_construct_outside_the_background(tmp_path: Path) -> None:
    toml = TOML.replace("WT", "C52S")
    labels = ("C52S", "C52S/E181A", "C52S/R212Q", "C52S/E181A/R212Q", "K95N")
    path = folder(tmp_path / "a", toml, curves=curve_rows(labels))
    assert_refused(
        path, file="curves.csv", row=34, column="construct", match="'K95N' without C52S.*wild type carries"
    )


def test_two_labels_of_one_construct(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=curve_rows((*LABELS, "R212Q/E181A")))
    match = "'R212Q/E181A', which has the same mutations as 'E181A/R212Q'"
    assert_refused(path, file="curves.csv", row=34, column="construct", match=match)


def test_another_spelling_in_another_table(tmp_path: Path) -> None:
    charges = "construct,cell,charge_e0\nWT,c1,13\nR212Q+E181A,c1,13\n"
    path = folder(tmp_path / "a", charges=charges)
    match = r"'R212Q\+E181A', which has the same mutations as 'E181A/R212Q'"
    assert_refused(path, file="charges.csv", row=3, column="construct", match=match)


def test_a_label_without_mutations_beside_the_wild_type(tmp_path: Path) -> None:
    toml = TOML + "[mutations]\nother = []\n"
    path = folder(tmp_path / "a", toml, curves=curve_rows((*LABELS, "other")))
    assert_refused(
        path,
        file="curves.csv",
        row=34,
        column="construct",
        match="'other', which has the same mutations as 'WT'",
    )


def test_native_residues_that_disagree(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=curve_rows((*LABELS, "D181N")))
    match = "D181N in 'D181N', where other labels have E"
    assert_refused(path, file="curves.csv", row=34, column="construct", match=match)


@pytest.mark.parametrize(("label", "match"), [("E181", "did you mean 'E181A'"), ("zzz", "correct the label")])
def test_mutations_of_a_construct_without_data(label: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + f'[mutations]\n{label} = ["E181A"]\n')
    column = f"mutations {label}"
    assert_refused(
        path, file="campaign.toml", column=column, match=f"'{label}', of which there are no data.*{match}"
    )


def test_a_wild_type_without_data(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML.replace("WT", "WT1"))
    match = r"the wild type 'WT1', of which there are no data.*did you mean 'WT'\?"
    assert_refused(path, file="campaign.toml", column="wild_type", match=match)


@pytest.mark.parametrize(
    ("words", "match"),
    [
        ('"E181A"', "the text 'E181A'; expected a list of mutations"),
        ("[1]", "a list; expected a list of mutations"),
        ('["E181A/R212Q"]', "several mutations in 'E181A/R212Q'"),
        ('["e181a"]', "no substitution as it is spelt.*write E181A"),
        ('["GLU181ALA"]', "write E181A"),
        ('["E181A", "E181Q"]', "same residue or mutation twice"),
        ('[""]', "expected a list of mutations"),
    ],
)
def test_lists_that_cannot_be_read(words: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + f"[mutations]\nE181A = {words}\n")
    assert_refused(path, file="campaign.toml", column="mutations E181A", match=match)


def test_a_setting_below_the_mutations(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + "[mutations]\nseed = 4\n")
    assert_refused(path, file="campaign.toml", column="mutations seed", match="move seed above")


def test_mutations_that_are_no_table(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML + 'mutations = ["E181A"]\n')
    assert_refused(path, file="campaign.toml", column="mutations", match="a list; expected a table")


def _charges(labels: Sequence[str]) -> str:
    return "construct,cell,charge_e0\n" + "".join(f"{label},c1,13\n" for label in labels)


@pytest.mark.parametrize("wide", [False, True])
def test_a_label_misspelt_in_the_curves_is_told_there(wide: bool, tmp_path: Path) -> None:
    """The singles tell which of two spellings of a double is meant; the other way would lose the cycle."""
    labels = [label.replace("E181A/", "E18A/") for label in LABELS]
    curves = wide_rows(f"{label}/c1" for label in labels) if wide else curve_rows(labels)
    place = (1, "E18A/R212Q/c1") if wide else (26, "construct")
    path = folder(tmp_path / "a", curves=curves, charges=_charges(LABELS))
    match = (
        "'E18A/R212Q', where charges.csv has 'E181A/R212Q'.*did you mean 'E181A/R212Q'.*correct curves.csv"
    )
    assert_refused(path, file="curves.csv", row=place[0], column=place[1], match=match)


def test_a_label_misspelt_in_the_charges_is_told_there(tmp_path: Path) -> None:
    charges = _charges([label.replace("E181A/", "E18A/") for label in LABELS])
    path = folder(tmp_path / "a", charges=charges)
    match = "charges of 'E18A/R212Q'.*did you mean 'E181A/R212Q'"
    assert_refused(path, file="charges.csv", row=5, column="construct", match=match)


@pytest.mark.parametrize(("label", "match"), [("E181", "did you mean 'E181A'"), ("wt", "write 'WT'")])
def test_a_label_that_cannot_be_read_is_told_once(label: str, match: str, tmp_path: Path) -> None:
    """Neither its charges nor those of the label that was meant are called missing beside it."""
    meant = "WT" if label == "wt" else "E181A"
    spoilt = [label if one == meant else one for one in LABELS]
    toml = 'wild_type = "WT"\n'
    path = folder(tmp_path / "a", toml, charges=_charges(spoilt))
    assert_refused(path, file="charges.csv", row=2 + LABELS.index(meant), column="construct", match=match)
    path = folder(tmp_path / "b", toml, curves=curve_rows(spoilt), charges=_charges(LABELS))
    row = 2 + 8 * LABELS.index(meant)
    assert_refused(path, file="curves.csv", row=row, column="construct", match=match)


@pytest.mark.parametrize(
    ("named", "there", "match"),
    [
        ("wt", "WT", "did you mean 'WT'"),
        ("wildtype", "WT", "did you mean 'WT'"),
        ("WTT", "WT", "did you mean 'WT'"),
        ("C52S", "WT", "did you mean 'WT'"),
        ("control", "WT9", "correct the label"),
    ],
)
def test_a_wild_type_spelt_otherwise_than_in_the_tables(
    named: str, there: str, match: str, tmp_path: Path
) -> None:
    """Read on as it is spelt there; a label with a number may be a mutant's and is not taken for it."""
    labels = (there, *LABELS[1:])
    toml = f'wild_type = "{named}"\n'
    path = folder(tmp_path / "a", toml, curves=curve_rows(labels), charges=_charges(labels))
    first, *others = problems(path)
    assert (first.origin.file, first.origin.row, first.origin.column) == ("campaign.toml", 1, "wild_type")
    assert f"the wild type '{named}', of which there are no data" in first.found
    assert match in first.remedy
    assert bool(others) == (match == "correct the label")
