"""Small drawings inside tables: an interval on a common scale, a cell's curve."""

from __future__ import annotations

from ...result import CellRow, InteractionRow, Result
from ..figures.interactions import draw_interval, scale_limits
from ..figures.marks import Sheet
from ..figures.scales import Scale
from ..figures.vector import svg_inline

_INTERVAL_MM = (36.0, 4.4)
_CURVE_MM = (22.0, 7.0)


class Strips:
    """Draws strips that share one scale each.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    """

    def __init__(self, result: Result) -> None:
        rows = [row for row in result.interactions if row.interaction is not None]
        low, high = scale_limits(rows, result) if rows else (-1.0, 1.0)
        self._energy = Scale(low=low, high=high, start=1.5, end=_INTERVAL_MM[0] - 1.5)
        self._threshold = result.settings.energy_threshold
        voltages = [v for cell in result.cells for v in (cell.voltage_mv[0], cell.voltage_mv[-1])]
        first, last = (min(voltages), max(voltages)) if voltages else (0.0, 1.0)
        self._voltage = Scale(low=first, high=max(last, first + 1.0), start=0.6, end=_CURVE_MM[0] - 0.6)

    def of_cycle(self, row: InteractionRow) -> str:
        """Interval of a cycle over the band within the threshold; its text stands beside it."""
        sheet, scale = Sheet(width=_INTERVAL_MM[0], height=_INTERVAL_MM[1], title=""), self._energy
        sheet.box(
            scale.inside(-self._threshold), 0.0, scale.inside(self._threshold), sheet.height, ink="band"
        )
        sheet.line([(scale(0.0), 0.0), (scale(0.0), sheet.height)], ink="rule", width=0.2)
        draw_interval(sheet, scale, row, sheet.height / 2)
        return svg_inline(sheet, decorative=True)

    def of_cell(self, cell: CellRow) -> str:
        """Points of a cell's curve over its whole range of charge, with its median voltage."""
        sheet = Sheet(width=_CURVE_MM[0], height=_CURVE_MM[1], title="")
        low, high = min(cell.charge), max(cell.charge)
        charge = Scale(low=low, high=high if high > low else low + 1.0, start=sheet.height - 0.7, end=0.7)
        if cell.median_mv is not None and self._voltage.holds(cell.median_mv):
            at = self._voltage(cell.median_mv)
            sheet.line([(at, 0.0), (at, sheet.height)], ink="rule", width=0.25)
        points = [(self._voltage(v), charge(q)) for v, q in zip(cell.voltage_mv, cell.charge, strict=True)]
        sheet.symbols(points, "disc", size=0.8, ink="ink" if cell.used else "above")
        return svg_inline(sheet, decorative=True)
