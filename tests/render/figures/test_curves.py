import re

import numpy as np
import pytest
from builders import campaign, construct

from cornerwise.campaign import StatedCharge
from cornerwise.render.figures.curves import curve_sheets
from cornerwise.render.figures.files import curve_files
from cornerwise.surveying import Survey, survey

LABELS = ("WT", "E5A", "R9Q", "E5A/R9Q")


@pytest.fixture(scope="module")
def found() -> Survey:
    constructs = [construct(label, [-40.0, -41.0, -38.5]) for label in LABELS]
    return survey(campaign(constructs, charge=StatedCharge(value_e0=13.0, sem_e0=0.1)))


def test_one_sheet_in_three_formats_the_same_each_time(found: Survey) -> None:
    files = curve_files(found)
    assert sorted(files) == ["curves-1.pdf", "curves-1.png", "curves-1.svg"]
    assert files == curve_files(found)


def test_text_stays_text_and_width_is_the_journals(found: Survey) -> None:
    svg = curve_files(found)["curves-1.svg"].decode()
    for label in LABELS:
        assert f">{label}</tspan>" in svg or f">{label}</text>" in svg
    width = float(re.search(r'<svg[^>]* width="([\d.]+)pt"', svg)[1])  # type: ignore[index]
    assert width / 72 * 25.4 == pytest.approx(180.0, abs=0.1)
    assert b"/FontFile2" in curve_files(found)["curves-1.pdf"]


def test_every_cell_and_both_areas_are_drawn(found: Survey) -> None:
    cells = {label: [c for c in found.cells if c.construct == label] for label in LABELS}
    rows = [(r.construct, r.median_mv, r.curve) for r in found.constructs]
    (sheet,) = curve_sheets(rows, cells)
    panel = sheet.axes[0]
    points = [line for line in panel.lines if line.get_marker() == "o"]
    assert len(points) == 3
    assert len(points[0].get_xdata()) == len(cells["WT"][0].voltage_mv)
    below, above = (_area(patch.get_paths()[0].vertices) for patch in panel.collections)
    assert below == pytest.approx(above, rel=0.02)


def _area(vertices: np.ndarray) -> float:
    x, y = vertices[:, 0], vertices[:, 1]
    return abs(float(np.sum(x * np.roll(y, -1) - np.roll(x, -1) * y))) / 2


@pytest.mark.parametrize("label", ["$x^2$", "<script>", "E5A & R9Q"])
def test_labels_are_plain_text(found: Survey, label: str) -> None:
    row = found.constructs[0]
    cells = [cell for cell in found.cells if cell.construct == "WT"]
    (sheet,) = curve_sheets([(label, row.median_mv, row.curve)], {label: cells})
    assert sheet.axes[0].get_title(loc="left").splitlines()[0] == label
    from cornerwise.render.figures.style import drawing, rendered

    with drawing():
        svg = rendered(sheet, "svg").decode()
    assert "<script" not in svg


def test_thirteen_constructs_need_two_sheets(found: Survey) -> None:
    row = found.constructs[0]
    cells = [cell for cell in found.cells if cell.construct == "WT"]
    many = [(f"construct {i}", row.median_mv, row.curve) for i in range(13)]
    sheets = curve_sheets(many, {label: cells for label, *_ in many})
    assert [sum(axes.get_title(loc="left") != "" for axes in sheet.axes) for sheet in sheets] == [12, 1]
