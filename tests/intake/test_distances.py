"""The table of distances between side chains."""

from dataclasses import replace
from pathlib import Path

import pytest

from cornerwise.campaign import Campaign, distance_between
from cornerwise.intake import read
from intake.writing import TOML, assert_refused, content, folder, problems

HEADER = "residue_a,residue_b,distance_A\n"


def _read(path: Path, text: str, **tables: str) -> Campaign:
    return read(folder(path / "a", TOML, distances=text, **tables))


def test_a_distance_goes_to_its_pair(tmp_path: Path) -> None:
    campaign = _read(tmp_path, HEADER + "E181,R212,3.25\n")
    (distance,) = campaign.distances
    assert distance_between(campaign.cycles[0].mutations, campaign.distances) == distance
    assert (distance.angstrom, distance.source, distance.definition) == (3.25, "distances.csv", "as stated")
    assert distance.residues == {181, 212}
    assert (distance.origin.file, distance.origin.row) == ("distances.csv", 2)
    assert campaign.notes == ()
    assert [file.name for file in campaign.inputs][-1] == "distances.csv"


@pytest.mark.parametrize(
    "text",
    [
        HEADER + "Glu181,Arg212,3.25\n",
        HEADER + "R212,E181,3.25\n",
        "residue_b,distance_nm,residue_a\nR212,0.325,E181\n",
        "residue_a;residue_b;distance_A\nE181;Arg212;3,25\n",
        "# a model\nresidue_a,residue_b,distance_A\n\n E181 , R212 ,3.25\n",
    ],
)
def test_the_same_distance_in_other_words(text: str, tmp_path: Path) -> None:
    (distance,) = _read(tmp_path, text).distances
    assert distance.angstrom == 3.25
    assert distance.residues == {181, 212}


def test_citation_and_definition_travel(tmp_path: Path) -> None:
    text = "residue_a,residue_b,distance_A,citation,definition\nE181,R212,3.25,a model,OE1 to NH2\n"
    (distance,) = _read(tmp_path, text).distances
    assert (distance.source, distance.definition) == ("distances.csv (a model)", "OE1 to NH2")


def test_distances_change_nothing_else(tmp_path: Path) -> None:
    with_distances = _read(tmp_path, HEADER + "E181,R212,3.25\n")
    assert content(replace(with_distances, distances=())) == content(read(folder(tmp_path / "b", TOML)))


def test_pairs_without_a_cycle_are_said(tmp_path: Path) -> None:
    campaign = _read(tmp_path, HEADER + "E181,R212,3.25\nK300,D7,8\nE181,K300,9\n")
    (note,) = campaign.notes
    assert note == "distances.csv has the distance of pairs without a cycle of two here: D7/K300, E181/K300"
    assert [one.angstrom for one in campaign.distances] == [8, 3.25, 9]


@pytest.mark.parametrize(
    ("row", "column", "match"),
    [
        ("E181A,R212,3", "residue_a", "found 'E181A'; expected a native residue.*write E181: the distance"),
        ("E181,ARG212,3", "residue_b", "found 'ARG212'.*write R212"),
        ("e181,R212,3", "residue_a", "found 'e181'.*write E181"),
        ("E 181,R212,3", "residue_a", "found 'E 181'.*write E181"),
        ("181,R212,3", "residue_a", "found '181'.*one-letter code and the residue's number"),
        ("E181,B212,3", "residue_b", "found 'B212'"),
        ("E181,R0212,3", "residue_b", "found 'R0212'"),
        (",R212,3", "residue_a", "found nothing; expected a label"),
        ("E181,E181,3", "residue_b", "E181, at the same position as residue_a; expected two residues"),
        ("E181,R212,0", "distance_A", "found 0 A; expected the distance of two side chains, 1 to 500 A"),
        ("E181,R212,-3", "distance_A", "found -3 A"),
        ("E181,R212,0.31", "distance_A", "or the unit in the header"),
        ("E181,R212,501", "distance_A", "found 501 A"),
        ("E181,R212,", "distance_A", "found nothing; expected a number"),
        ("E181,R212,3.1 A", "distance_A", "found '3.1 A'; expected a number"),
        ("E181,R212,inf", "distance_A", "expected a finite number"),
    ],
)
def test_rows_that_are_refused(row: str, column: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML, distances=f"{HEADER}{row}\n")
    assert_refused(path, file="distances.csv", row=2, column=column, match=match)


def test_limits_are_inside(tmp_path: Path) -> None:
    found = _read(tmp_path, HEADER + "E181,R212,1\nE181,K300,500\n").distances
    assert [one.angstrom for one in found] == [1, 500]


@pytest.mark.parametrize("second", ["E181,R212,4", "R212,E181,3.25", "Arg212,Glu181,4"])
def test_a_pair_twice(second: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML, distances=f"{HEADER}E181,R212,3.25\nE181,K5,9\n{second}\n")
    match = "'E181/R212' again, after row 2; expected one row each"
    assert_refused(path, file="distances.csv", row=4, column="residue_a", match=match)


def test_another_native_residue_than_the_labels_have(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML, distances=HEADER + "D181,R212,3.25\n")
    match = "the residue D181, where the labels of the constructs have E; .*write E181"
    assert_refused(path, file="distances.csv", row=2, match=match)


@pytest.mark.parametrize(
    ("header", "column", "match"),
    [
        ("residue_a,residue_b,distance", "distance", "with its unit, distance_A or distance_nm"),
        ("residue_a,residue_b,distance_pm", "distance_pm", "distance_A or distance_nm"),
        ("residue_a,residue_c,distance_A", "residue_c", "did you mean residue_"),
        ("residue_a,residue_b,distance_A,note", "note", "the unknown column 'note'"),
    ],
)
def test_headers_that_are_refused(header: str, column: str, match: str, tmp_path: Path) -> None:
    row = "E181,R212,3.25" + ",x" * header.endswith("note")
    found = problems(folder(tmp_path / "a", TOML, distances=f"{header}\n{row}\n"))
    assert found[0].origin.column == column
    assert match in str(found[0])


def test_both_units(tmp_path: Path) -> None:
    text = "residue_a,residue_b,distance_A,distance_nm\nE181,R212,3,0.3\n"
    path = folder(tmp_path / "a", TOML, distances=text)
    assert_refused(path, file="distances.csv", row=1, column="distance_nm", match="this quantity in one unit")


def test_a_file_that_is_nearly_called_so(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", TOML)
    (path / "distance.csv").write_text(HEADER)
    assert_refused(path, file="distance.csv", match="expected distances.csv, distances.tsv or distances.xlsx")
