"""Figure files of a survey: name and bytes."""

from __future__ import annotations

from ...result import CellRow, Table
from ...surveying import Survey
from .curves import curve_sheets
from .style import FORMATS, drawing, rendered


def _cells_of(cells: Table[CellRow]) -> dict[str, list[CellRow]]:
    grouped: dict[str, list[CellRow]] = {}
    for cell in cells:
        grouped.setdefault(cell.construct, []).append(cell)
    return grouped


def curve_files(survey: Survey) -> dict[str, bytes]:
    """Sheets of all constructs' curves with medians and equal areas, in every format.

    Parameters
    ----------
    survey : Survey
        What `cornerwise.survey` returned.

    Returns
    -------
    dict of str to bytes
        ``curves-1.svg``, ``curves-1.pdf``, ``curves-1.png``, ``curves-2.svg``, ...; empty when only
        summaries were brought.
    """
    constructs = [(row.construct, row.median_mv, row.curve) for row in survey.constructs]
    files: dict[str, bytes] = {}
    for number, sheet in enumerate(curve_sheets(constructs, _cells_of(survey.cells)), start=1):
        with drawing():
            files |= {f"curves-{number}.{form}": rendered(sheet, form) for form in FORMATS}
    return files
