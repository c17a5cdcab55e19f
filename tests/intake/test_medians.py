"""Median voltages known as summaries, and what they must agree on with the curves."""

from pathlib import Path

import pytest

from cornerwise.intake import read
from intake.writing import LABELS, MEDIANS, assert_refused, changed, curve_rows, folder, problems


def test_medians_alone(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", medians=MEDIANS))
    median = campaign.construct("R212Q").median
    assert median is not None
    assert (median.median_mv, median.sem_mv, median.n) == (-46.0, 1.5, 5)
    assert (median.origin.file, median.origin.row) == ("medians.csv", 4)
    assert campaign.construct("R212Q").curves == ()


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


def test_curves_and_a_median_of_one_construct(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", curves=curve_rows(LABELS[:3]), medians=MEDIANS[:1] + MEDIANS[3:])
    match = r"a median of 'R212Q', which has curves too \(curves.csv, row 18, column construct\)"
    assert_refused(path, file="medians.csv", row=2, column="construct", match=match)


def test_some_constructs_with_curves_and_some_with_medians(tmp_path: Path) -> None:
    campaign = read(folder(tmp_path / "a", curves=curve_rows(LABELS[:3]), medians=[MEDIANS[0], MEDIANS[4]]))
    assert [bool(construct.curves) for construct in campaign.constructs] == [True, True, True, False]
