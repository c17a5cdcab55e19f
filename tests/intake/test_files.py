"""Which files are read, which are passed over, and which are refused for their names."""

import hashlib
import shutil
from pathlib import Path

import pytest

from cornerwise.intake import files, read
from intake.writing import TOML, assert_refused, content, curve_rows, folder, problems, text_of

CURVES = text_of(curve_rows())


@pytest.fixture
def campaign(tmp_path: Path) -> Path:
    return folder(tmp_path / "a")


@pytest.mark.parametrize(
    "name",
    [
        "README.md", "notes.txt", "make.py", "curves.png", "truth.csv", "interactions.csv", "constructs.csv",
        "cells.csv", "budget.csv", "result.json", ".curves.csv", "~$curves.xlsx", ".~lock.curves.csv#",
        "curves.csv.bak", "curves_readme.txt", "other.toml",
    ],
)  # fmt: skip
def test_what_is_passed_over(name: str, campaign: Path) -> None:
    before = content(read(campaign))
    (campaign / name).write_text("whatever")
    (campaign / "old").mkdir()
    (campaign / "old" / "curves.csv").write_text("whatever")
    assert content(read(campaign)) == before


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("curve.csv", "curves.csv, curves.tsv or curves.xlsx"),
        ("medain.tsv", "medians.csv"),
        ("charge.xlsx", "charges.csv"),
        ("curves_old.csv", "curves.csv"),
        ("curves (1).csv", "curves.csv"),
        ("curves.txt", "curves.csv"),
        ("charges.xls", "charges.csv"),
        ("medians.ods", "medians.csv"),
        ("campaign.xlsx", "expected campaign.toml"),
    ],
)
def test_names_that_are_nearly_right(name: str, expected: str, campaign: Path) -> None:
    (campaign / name).write_text("whatever")
    assert_refused(campaign, file=name, match=f"{expected}.*save it under this name.*else move it")


@pytest.mark.parametrize("name", ["curves.csv", "curve.csv", "curves.txt"])
def test_a_table_that_is_not_read_has_no_consequences(name: str, campaign: Path) -> None:
    """Neither curves nor those of every construct with a charge are called missing beside it."""
    charges = "construct,cell,charge_e0\nWT,c1,13\nE181A,c1,13\n"
    (campaign / "charges.csv").write_text(charges)
    (campaign / "curves.csv").unlink()
    if name == "curves.csv":
        (campaign / name).mkdir()
    else:
        (campaign / name).write_text(CURVES)
    match = "a folder, a device or a link" if name == "curves.csv" else "save it under this name"
    assert_refused(campaign, file=name, match=match)


def test_a_folder_in_place_of_the_campaign_file(campaign: Path) -> None:
    (campaign / "campaign.toml").unlink()
    (campaign / "campaign.toml").mkdir()
    assert_refused(campaign, file="campaign.toml", match="a folder, a device or a link")


@pytest.mark.parametrize("name", ["Kurven.csv", "truth.TSV", "raw data.xlsx"])
def test_other_tables_in_the_folder_are_noted(name: str, campaign: Path) -> None:
    (campaign / name).write_text("whatever")
    assert read(campaign).notes == (f"not read: {name}",)


@pytest.mark.parametrize(
    "name", ["old/Kurven.csv", ".Kurven.csv", "~$Kurven.xlsx", "notes.txt", "Kurven.png"]
)
def test_what_is_no_table_of_the_folder_is_not_noted(name: str, campaign: Path) -> None:
    (campaign / "old").mkdir()
    (campaign / name).write_text("whatever")
    assert read(campaign).notes == ()


@pytest.mark.parametrize(("number", "end"), [(5, "t3.csv, t4.csv"), (6, "t4.csv and 1 more")])
def test_the_note_names_five_tables(number: int, end: str, campaign: Path) -> None:
    for i in range(number):
        (campaign / f"t{i}.csv").write_text("whatever")
    (note,) = read(campaign).notes
    assert note.startswith("not read: t0.csv, ")
    assert note.endswith(end)


def test_two_files_of_one_table(campaign: Path) -> None:
    (campaign / "curves.tsv").write_text(CURVES)
    assert_refused(campaign, file="curves.tsv", match="the files curves.csv and curves.tsv; expected one")


def test_upper_case_does_not_matter(campaign: Path) -> None:
    before = content(read(campaign))
    (campaign / "curves.csv").rename(campaign / "Curves.CSV")
    assert content(read(campaign)) == before


def test_no_campaign_file(campaign: Path) -> None:
    (campaign / "campaign.toml").rename(campaign / "campain.toml")
    assert_refused(campaign, file="campaign.toml", match="no such file.*rename campain.toml")


def test_no_tables(campaign: Path) -> None:
    (campaign / "curves.csv").unlink()
    assert "neither curves nor medians" in str(problems(campaign)[0])


def test_an_empty_folder(tmp_path: Path) -> None:
    assert len(problems(tmp_path)) == 2


def test_nothing_under_the_path(tmp_path: Path) -> None:
    path = tmp_path / "none"
    assert_refused(path, file=str(path), match="nothing under this path.*check the path")


@pytest.mark.parametrize("name", ["campaign.toml", "curves.csv"])
def test_a_file_of_the_folder_in_place_of_the_folder(name: str, campaign: Path) -> None:
    path = campaign / name
    assert_refused(path, file=str(path), match="no .xlsx workbook.*give the folder that holds")


def test_a_path_as_text(campaign: Path) -> None:
    assert content(read(str(campaign))) == content(read(campaign))


def test_every_file_read_is_on_record(campaign: Path) -> None:
    (campaign / "charges.csv").write_text("construct,cell,charge_e0\nWT,c1,13\n")
    (campaign / "README.md").write_text("not read")
    assert [(file.name, file.sha256) for file in read(campaign).inputs] == [
        (name, hashlib.sha256((campaign / name).read_bytes()).hexdigest())
        for name in ("campaign.toml", "curves.csv", "charges.csv")
    ]


def test_a_file_that_is_too_large(campaign: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(files, "MOST_BYTES", 600)
    assert_refused(campaign, file="curves.csv", match="at most 0 MB; keep one point per voltage step")


def test_a_file_that_cannot_be_opened(campaign: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(path: Path) -> bytes:
        raise PermissionError(13, f"no entry to {path.name}")

    monkeypatch.setattr(Path, "read_bytes", refuse)
    found = problems(campaign)
    assert [p.origin.file for p in found] == ["campaign.toml", "curves.csv"]
    assert "cannot be opened (no entry to curves.csv)" in str(found[1])


def test_where_the_folder_stands_does_not_matter(campaign: Path, tmp_path: Path) -> None:
    moved = tmp_path / "elsewhere"
    shutil.copytree(campaign, moved)
    assert read(moved).inputs == read(campaign).inputs
    assert (moved / "campaign.toml").read_text() == TOML


def test_the_hidden_ending_of_a_text_editor(campaign: Path) -> None:
    (campaign / "campaign.toml").rename(campaign / "campaign.toml.txt")
    assert [p.origin.file for p in problems(campaign)] == ["campaign.toml.txt", "campaign.toml"]
    assert "rename campaign.toml.txt" in str(problems(campaign)[1])


def test_a_folder_that_cannot_be_opened(campaign: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(path: Path) -> None:
        raise PermissionError(13, "no entry")

    monkeypatch.setattr(Path, "iterdir", refuse)
    assert_refused(campaign, file=str(campaign), match="folder that cannot be opened .no entry.")
