"""Charge-voltage curves of constructs, with the median voltage and the two equal areas it divides."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING

from ...result import CellRow, DrawnCurve
from .style import ABOVE, BELOW, FULL_WIDTH_MM, INK, PALE_INK, drawing, new_figure

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

COLUMNS, ROWS = 3, 4
_PANEL_HEIGHT_MM = 42.0


def _scaled(cell: CellRow) -> list[float] | None:
    if cell.low_plateau is None or cell.high_plateau is None:
        return None
    whole = cell.high_plateau - cell.low_plateau
    return [(charge - cell.low_plateau) / whole for charge in cell.charge]


def _areas(axes: Axes, curve: DrawnCurve, median_mv: float) -> None:
    """Shade under the curve left of the median and over it right of the median: the two are equal."""
    v, q = list(curve.voltage_mv), list(curve.q)
    at = _interpolate(v, q, median_mv)
    left = [(x, y) for x, y in zip(v, q, strict=True) if x < median_mv]
    right = [(x, y) for x, y in zip(v, q, strict=True) if x > median_mv]
    if left:
        x, y = zip(*left, (median_mv, at), strict=True)
        axes.fill_between(x, 0.0, y, color=BELOW, alpha=0.35, linewidth=0)
    if right:
        x, y = zip((median_mv, at), *right, strict=True)
        axes.fill_between(x, y, 1.0, color=ABOVE, alpha=0.45, linewidth=0)


def _interpolate(x: Sequence[float], y: Sequence[float], at: float) -> float:
    for (x0, y0), (x1, y1) in zip(zip(x, y, strict=True), zip(x[1:], y[1:], strict=True), strict=False):
        if x0 <= at <= x1:
            return y0 + (y1 - y0) * (at - x0) / (x1 - x0)
    return 0.5


def draw_construct(
    axes: Axes, label: str, median_mv: float | None, curve: DrawnCurve | None, cells: Sequence[CellRow]
) -> None:
    """One construct into one panel.

    Parameters
    ----------
    axes : matplotlib.axes.Axes
        Panel to draw into.
    label : str
        Construct, printed as plain text.
    median_mv : float or None
        Mean median voltage of the cells that are used.
    curve : DrawnCurve or None
        Averaged smooth curve, scaled 0..1.
    cells : sequence of CellRow
        Every cell is shown as points, crosses where it is not used.
    """
    if curve is not None and median_mv is not None:
        _areas(axes, curve, median_mv)
        axes.plot(curve.voltage_mv, curve.q, color=INK, zorder=3)
        axes.axvline(median_mv, color=INK, linewidth=0.7, linestyle=(0, (4, 2)), zorder=2)
    for cell in cells:
        scaled = _scaled(cell)
        if scaled is not None:
            marker = "o" if cell.used else "x"
            axes.plot(
                cell.voltage_mv, scaled, marker, color=PALE_INK, markersize=1.6, markeredgewidth=0.4,
                markerfacecolor="none", zorder=1,
            )  # fmt: skip
    used = sum(cell.used for cell in cells)
    count = f"{used} cells" if used == len(cells) else f"{used} of {len(cells)} cells"
    where = "" if median_mv is None else f", Vm = {median_mv:.1f} mV".replace("-", "−")
    axes.set_title(f"{label}\n{count}{where}", loc="left")
    axes.axhline(0.0, color=INK, linewidth=0.4)
    axes.axhline(1.0, color=INK, linewidth=0.4)
    axes.set_ylim(-0.12, 1.12)
    axes.set_yticks([0.0, 0.5, 1.0])


def curve_sheets(
    constructs: Sequence[tuple[str, float | None, DrawnCurve | None]], cells: Mapping[str, Sequence[CellRow]]
) -> list[Figure]:
    """Every construct with curves, twelve to a sheet of full width.

    Parameters
    ----------
    constructs : sequence of (str, float or None, DrawnCurve or None)
        Label, mean median voltage (mV) and averaged curve, in the order they shall appear.
    cells : mapping of str to sequence of CellRow
        Cells of each construct; one without cells is left out.
    """
    shown = [one for one in constructs if cells.get(one[0])]
    per_sheet = COLUMNS * ROWS
    with drawing():
        return [_sheet(shown[start : start + per_sheet], cells) for start in range(0, len(shown), per_sheet)]


def _sheet(
    constructs: Sequence[tuple[str, float | None, DrawnCurve | None]], cells: Mapping[str, Sequence[CellRow]]
) -> Figure:
    rows = math.ceil(len(constructs) / COLUMNS)
    figure = new_figure(FULL_WIDTH_MM, 12.0 + rows * _PANEL_HEIGHT_MM)
    panels = figure.subplots(rows, COLUMNS, sharex=True, sharey=True, squeeze=False)
    for axes, one in zip(panels.flat, constructs, strict=False):
        draw_construct(axes, *one, cells[one[0]])
    for axes in list(panels.flat)[len(constructs) :]:
        axes.set_axis_off()
    for axes in panels[-1 if len(constructs) % COLUMNS == 0 else -2 :].flat:
        axes.tick_params(labelbottom=True)
    figure.supxlabel("voltage (mV)", fontsize=7.0)
    figure.supylabel("charge moved, scaled between its plateaus", fontsize=7.0)
    return figure
