"""Charge-voltage curves of constructs, with the median voltage and the two equal areas it divides."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from ...result import CellRow, DrawnCurve
from .lettering import signed
from .marks import Point, Sheet
from .scales import Scale, rule_below, rule_beside
from .style import FULL_WIDTH_MM, HAIRLINE, SMALL_TYPE

_PANELS_ACROSS, _PANELS_DOWN = 3, 4
_PANEL_MM = 41.0  # height of a panel with its title and its voltages
_LEFT, _RIGHT, _TOP, _BOTTOM = 9.0, 2.0, 8.0, 4.5  # around the plotted part of a panel
_AXIS_WORDS_MM = 4.0
_ROOM = 0.12  # of the charge, below 0 and above 1


@dataclass(frozen=True, kw_only=True, slots=True)
class ConstructCurves:
    """What is drawn of one construct."""

    label: str
    median_mv: float | None  # mean over the cells that are used
    curve: DrawnCurve | None  # averaged, scaled 0..1
    cells: tuple[CellRow, ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class Panel:
    """Plotted part of a panel (mm) and its scales."""

    x: Scale
    y: Scale


def _interpolate(curve: DrawnCurve, at: float) -> float:
    v, q = curve.voltage_mv, curve.q
    for (x0, x1), (y0, y1) in zip(pairwise(v), pairwise(q), strict=True):
        if x0 <= at <= x1:
            return y0 + (y1 - y0) * (at - x0) / (x1 - x0)
    return 0.0 if at < v[0] else 1.0


def equal_areas(curve: DrawnCurve, median_mv: float) -> tuple[list[Point], list[Point]]:
    """Outlines of the area under the curve left of the median and of that over it right of the median."""
    points = list(zip(curve.voltage_mv, curve.q, strict=True))
    cut = (median_mv, _interpolate(curve, median_mv))
    left = [*(point for point in points if point[0] < median_mv), cut]
    right = [cut, *(point for point in points if point[0] > median_mv)]
    under = [(left[0][0], 0.0), *left, (median_mv, 0.0)]
    over = [(median_mv, 1.0), *right, (right[-1][0], 1.0)]
    return under, over


def _scaled(cell: CellRow) -> list[Point]:
    if cell.low_plateau is None or cell.high_plateau is None or cell.high_plateau == cell.low_plateau:
        return []
    whole = cell.high_plateau - cell.low_plateau
    scaled = ((charge - cell.low_plateau) / whole for charge in cell.charge)
    return list(zip(cell.voltage_mv, scaled, strict=True))


def draw_construct(sheet: Sheet, panel: Panel, shown: ConstructCurves) -> None:
    """One construct into one panel: areas, every cell as points (crosses where not used), curve, median."""
    x, y = panel.x, panel.y

    def placed(points: Sequence[Point]) -> list[Point]:
        return [(x(v), y(q)) for v, q in points if -_ROOM <= q <= 1 + _ROOM]

    if shown.curve is not None and shown.median_mv is not None:
        under, over = equal_areas(shown.curve, shown.median_mv)
        sheet.area([(x(v), y(q)) for v, q in under], ink="below", tint=0.45)
        sheet.area([(x(v), y(q)) for v, q in over], ink="above", tint=0.4)
    for charge in (0.0, 1.0):
        sheet.line([(x.start, y(charge)), (x.end, y(charge))], width=HAIRLINE, ink="rule")
    for used, symbol in ((True, "ring"), (False, "cross")):
        points = [p for cell in shown.cells if cell.used == used for p in placed(_scaled(cell))]
        if points:
            sheet.symbols(points, "ring" if symbol == "ring" else "cross", size=0.75, ink="pale", width=0.12)
    if shown.curve is not None:
        sheet.line([(x(v), y(q)) for v, q in zip(shown.curve.voltage_mv, shown.curve.q, strict=True)])
    if shown.median_mv is not None and x.holds(shown.median_mv):
        at = x(shown.median_mv)
        sheet.line([(at, y.start), (at, y.end)], width=0.22, dash=(1.2, 0.7))
    _title(sheet, panel, shown)


def _title(sheet: Sheet, panel: Panel, shown: ConstructCurves) -> None:
    left, room = panel.x.start, panel.x.end - panel.x.start + _RIGHT
    used = sum(cell.used for cell in shown.cells)
    cells = f"{used}" if used == len(shown.cells) else f"{used} of {len(shown.cells)}"
    count = f"{cells} cell{'' if cells == '1' else 's'}" if shown.cells else "summary only"
    where = "" if shown.median_mv is None else signed(f", Vm {shown.median_mv:.1f} mV")
    sheet.name((left, panel.y.end - 4.0), shown.label, room)
    sheet.name((left, panel.y.end - 1.2), f"{count}{where}", room, size=SMALL_TYPE)


def voltage_range(constructs: Sequence[ConstructCurves]) -> tuple[float, float]:
    """Lowest and highest voltage of any curve or median."""
    found = [v for one in constructs for cell in one.cells for v in (cell.voltage_mv[0], cell.voltage_mv[-1])]
    found += [
        v for one in constructs if one.curve for v in (one.curve.voltage_mv[0], one.curve.voltage_mv[-1])
    ]
    found += [one.median_mv for one in constructs if one.median_mv is not None and not one.cells]
    low, high = (min(found), max(found)) if found else (-100.0, 100.0)
    return (low, high) if high > low else (low - 50.0, high + 50.0)


def panels_sheet(constructs: Sequence[ConstructCurves], *, width: float, across: int, title: str) -> Sheet:
    """Sheet of panels that share both scales.

    Parameters
    ----------
    constructs : sequence of ConstructCurves
        In reading order.
    width : float
        Of the sheet (mm).
    across : int
        Panels in a row.
    title : str
        For those who cannot see it.
    """
    rows = math.ceil(len(constructs) / across)
    sheet = Sheet(width=width, height=rows * _PANEL_MM + _AXIS_WORDS_MM, title=title)
    low, high = voltage_range(constructs)
    step = (width - _AXIS_WORDS_MM) / across
    for place, shown in enumerate(constructs):
        row, column = divmod(place, across)
        left, top = _AXIS_WORDS_MM + column * step + (_LEFT - 3.5), row * _PANEL_MM
        panel = Panel(
            x=Scale(low=low, high=high, start=left, end=_AXIS_WORDS_MM + (column + 1) * step - _RIGHT),
            y=Scale(low=-_ROOM, high=1 + _ROOM, start=top + _PANEL_MM - _BOTTOM, end=top + _TOP),
        )
        draw_construct(sheet, panel, shown)
        rule_below(sheet, panel.x, panel.y.start, most=5)
        rule_beside(sheet, panel.y, left, most=2, labelled=column == 0)
    middle = (rows * _PANEL_MM + _TOP - _BOTTOM) / 2
    sheet.turned_words((2.6, middle), "scaled charge")
    sheet.words((width / 2, sheet.height - 0.9), "voltage (mV)", anchor="middle")
    sheet.foot(
        ["The dashed line is the median voltage Vm: the two shaded areas on either side of it are equal."]
    )
    return sheet


def curve_sheets(constructs: Sequence[ConstructCurves]) -> list[Sheet]:
    """Every construct with curves, twelve to a sheet of full width; one without cells is left out."""
    shown = [one for one in constructs if one.cells]
    each = _PANELS_ACROSS * _PANELS_DOWN
    return [
        panels_sheet(
            shown[start : start + each],
            width=FULL_WIDTH_MM,
            across=_PANELS_ACROSS,
            title=f"Charge-voltage curves of {len(shown[start : start + each])} constructs",
        )
        for start in range(0, len(shown), each)
    ]


def cycle_curves(cycle: str, constructs: Sequence[ConstructCurves], width: float) -> Sheet | None:
    """The curves of a cycle's corners; None where only summaries were brought."""
    if not any(one.cells for one in constructs):
        return None
    across = 4 if width == FULL_WIDTH_MM else 2
    return panels_sheet(
        constructs, width=width, across=across, title=f"Charge-voltage curves of the corners of {cycle}"
    )
