import re
from dataclasses import replace

import numpy as np
import pytest
from builders import campaign, construct

from cornerwise.campaign import StatedCharge
from cornerwise.render.figures.curves import ConstructCurves, curve_sheets, equal_areas
from cornerwise.render.figures.files import cells_by_construct, curve_files
from cornerwise.render.figures.marks import Area, Sheet, Symbols, Words
from cornerwise.render.figures.vector import svg_file
from cornerwise.surveying import Survey, survey

LABELS = ("WT", "E5A", "R9Q", "E5A/R9Q")


@pytest.fixture(scope="module")
def found() -> Survey:
    constructs = [construct(label, [-40.0, -41.0, -38.5]) for label in LABELS]
    return survey(campaign(constructs, charge=StatedCharge(value_e0=13.0, sem_e0=0.1)))


def _shown(found: Survey, label: str = "WT", called: str | None = None) -> ConstructCurves:
    row = next(row for row in found.constructs if row.construct == label)
    cells = cells_by_construct(found.cells)[label]
    return ConstructCurves(label=called or label, median_mv=row.median_mv, curve=row.curve, cells=cells)


def _all_words(sheet: Sheet) -> list[str]:
    return [mark.text for mark in sheet.marks if isinstance(mark, Words)]


def test_one_sheet_in_three_formats_the_same_each_time(found: Survey) -> None:
    files = curve_files(found)
    assert sorted(files) == ["curves-1.pdf", "curves-1.png", "curves-1.svg"]
    assert files == curve_files(found)


def test_text_stays_text_and_width_is_the_journals(found: Survey) -> None:
    files = curve_files(found)
    svg = files["curves-1.svg"].decode()
    for label in LABELS:
        assert f">{label}</text>" in svg
    assert 'width="180mm"' in svg
    assert b"/FontFile2" in files["curves-1.pdf"]
    box = re.search(rb"/MediaBox \[ ?0 0 ([\d.]+)", files["curves-1.pdf"])
    assert box is not None
    assert float(box[1]) / 72 * 25.4 == pytest.approx(180.0, abs=0.1)


def test_every_point_of_every_cell_is_drawn(found: Survey) -> None:
    (sheet,) = curve_sheets([_shown(found)])
    (rings,) = [mark for mark in sheet.marks if isinstance(mark, Symbols)]
    cells = [cell for cell in found.cells if cell.construct == "WT"]
    assert rings.symbol == "ring"
    assert len(rings.points) == sum(len(cell.voltage_mv) for cell in cells) == 75


def test_the_two_shaded_areas_are_equal(found: Survey) -> None:
    shown = _shown(found)
    assert shown.curve is not None
    assert shown.median_mv is not None
    below, above = map(_area, equal_areas(shown.curve, shown.median_mv))
    assert below == pytest.approx(above, rel=0.02)
    (sheet,) = curve_sheets([shown])
    drawn = [_area(mark.points) for mark in sheet.marks if isinstance(mark, Area)]
    assert drawn[0] == pytest.approx(drawn[1], rel=0.02)


def _area(points: object) -> float:
    x, y = np.array(points).T
    return abs(float(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y))) / 2


def test_a_cell_that_is_not_used_is_a_cross(found: Survey) -> None:
    shown = _shown(found)
    first, *rest = shown.cells
    changed = ConstructCurves(
        label="WT", median_mv=shown.median_mv, curve=shown.curve, cells=(replace(first, used=False), *rest)
    )
    (sheet,) = curve_sheets([changed])
    marks = {mark.symbol: len(mark.points) for mark in sheet.marks if isinstance(mark, Symbols)}
    assert marks == {"ring": 50, "cross": 25}
    assert any(words.startswith("2 of 3 cells") for words in _all_words(sheet))


@pytest.mark.parametrize("label", ["$x^2$", "<script>", "E5A & R9Q", 'a"b'])
def test_labels_are_plain_text(found: Survey, label: str) -> None:
    (sheet,) = curve_sheets([_shown(found, called=label)])
    assert label in _all_words(sheet)
    svg = svg_file(sheet).decode()
    assert "<script" not in svg
    assert 'a"b' not in svg


def test_thirteen_constructs_need_two_sheets(found: Survey) -> None:
    many = [_shown(found, called=f"construct {i}") for i in range(13)]
    sheets = curve_sheets(many)
    assert [sum(word.startswith("construct ") for word in _all_words(s)) for s in sheets] == [12, 1]
