"""What to expect of further cells: half-width above, power below, one panel a cycle."""

from __future__ import annotations

from collections.abc import Sequence

from ...plan_rows import OutlookRow
from ...planning.plan import Plan
from ..legend import percent
from ..planning import power_sentence
from .marks import Point, Sheet
from .scales import Scale, rule_below, rule_beside
from .style import FULL_WIDTH_MM, HAIRLINE, SINGLE_COLUMN_MM, SMALL_TYPE, TALLEST_MM, WIDTHS_MM

_PANEL_MM = 52.0  # height of a panel with its name and its numbers
_LEFT, _RIGHT, _TOP, _BOTTOM = 9.5, 2.5, 5.5, 5.0  # around the plotted part of a panel
_POWER_MM, _GAP_MM = 14.0, 3.0
_AXIS_WORDS_MM = 4.0


def plan_sheets(plan: Plan) -> dict[str, Sheet]:
    """Every sheet under the path of its files without their ending.

    Parameters
    ----------
    plan : Plan
        With as many numbers of cells as a curve needs.
    """
    cycles: dict[str, list[OutlookRow]] = {}
    for row in plan.outlooks:
        if row.cells_each is not None and row.half_width is not None:
            cycles.setdefault(row.cycle, []).append(row)
    panels = [rows for rows in cycles.values() if len(rows) > 1]
    named = {}
    for width in WIDTHS_MM:
        across = min(len(panels), 2 if width == SINGLE_COLUMN_MM else 4)
        each = across * int((TALLEST_MM - _AXIS_WORDS_MM - 6.0) / _PANEL_MM)
        parts = [panels[start : start + each] for start in range(0, len(panels), each or 1)]
        for number, part in enumerate(parts, start=1):
            suffix = f"-{number}" if len(parts) > 1 else ""
            named[f"figures/plan{suffix}-{width:.0f}mm"] = _sheet(part, across, plan, width)
    return named


def _sheet(panels: Sequence[Sequence[OutlookRow]], across: int, plan: Plan, width: float) -> Sheet:
    down = -(-len(panels) // across)
    title = f"Half-width and power against cells for {len(panels)} cycle{'s' if len(panels) > 1 else ''}"
    sheet = Sheet(width=width, height=down * _PANEL_MM + _AXIS_WORDS_MM, title=title)
    shown = width if width == FULL_WIDTH_MM or across > 1 else SINGLE_COLUMN_MM
    room = (shown - _AXIS_WORDS_MM) / across
    for place, rows in enumerate(panels):
        left = _AXIS_WORDS_MM + (place % across) * room
        _panel(sheet, rows, plan, (left, (place // across) * _PANEL_MM), room)
    middle = (_AXIS_WORDS_MM + shown) / 2
    sheet.words((middle, down * _PANEL_MM + 2.6), "cells of each kind on every construct", anchor="middle")
    for top in (row * _PANEL_MM for row in range(down)):
        middle = top + (_TOP + _PANEL_MM - _BOTTOM - _POWER_MM - _GAP_MM) / 2
        sheet.turned_words((3.0, middle), f"half-width ({plan.energy_unit})", size=SMALL_TYPE)
        sheet.turned_words((3.0, top + _PANEL_MM - _BOTTOM - _POWER_MM / 2), "power", size=SMALL_TYPE)
    sheet.foot(_legend(plan))
    return sheet


def _legend(plan: Plan) -> list[str]:
    wanted = [" Dashed: what is wanted."] if plan.request.half_width is not None else [""]
    sentence = power_sentence(plan)
    return [
        f"Half-width of the {percent(plan.confidence)} interval per channel and its power against a true "
        f"interaction of {plan.true_interaction:.3g} {plan.energy_unit}, if every scatter is what it seems; "
        f"shaded: what 8 of 10 outcomes lie between.{wanted[0]}",
        f"{sentence[0].upper()}{sentence[1:]}.",
    ]


def _panel(sheet: Sheet, rows: Sequence[OutlookRow], plan: Plan, corner: Point, room: float) -> None:
    left, top = corner
    start, end = left + _LEFT, left + room - _RIGHT
    bottom = top + _PANEL_MM - _BOTTOM
    sheet.name((start, top + 3.6), rows[0].cycle, end - start)
    x = Scale(low=rows[0].cells_each or 0, high=rows[-1].cells_each or 1, start=start, end=end)
    highest = _highest(rows, plan)
    width = Scale(low=0.0, high=highest, start=bottom - _POWER_MM - _GAP_MM, end=top + _TOP)
    power = Scale(low=0.0, high=1.0, start=bottom, end=bottom - _POWER_MM)
    _curve(sheet, x, width, [(r.cells_each, r.half_width, r.half_width_low, r.half_width_high) for r in rows])
    _curve(sheet, x, power, [(r.cells_each, r.power, r.power_low, r.power_high) for r in rows])
    wanted = plan.request.half_width
    if wanted is not None and width.holds(wanted):
        sheet.line([(start, width(wanted)), (end, width(wanted))], width=HAIRLINE, dash=(1.0, 0.7))
    if plan.request.power is not None:
        at = power(plan.request.power)
        sheet.line([(start, at), (end, at)], width=HAIRLINE, dash=(1.0, 0.7))
    rule_beside(sheet, width, start, most=4)
    rule_beside(sheet, power, start, most=2)
    rule_below(sheet, x, bottom, most=5)


def _highest(rows: Sequence[OutlookRow], plan: Plan) -> float:
    """End of the half-width scale: the range, but no more than twice the line that is drawn through it."""
    line = max(row.half_width or 0.0 for row in rows)
    range_ = max(row.half_width_high or 0.0 for row in rows)
    return 1.05 * max(min(range_, 2 * line), plan.request.half_width or 0.0) or 1.0


def _curve(
    sheet: Sheet,
    x: Scale,
    y: Scale,
    points: Sequence[tuple[int | None, float | None, float | None, float | None]],
) -> None:
    """A line in its likely range."""
    known = [(float(n), v, low, high) for n, v, low, high in points if n and v is not None]
    outline = [(x(n), y.inside(high or 0.0)) for n, _, _, high in known]
    outline += [(x(n), y.inside(low or 0.0)) for n, _, low, _ in reversed(known)]
    sheet.area(outline, ink="below", tint=0.25)
    sheet.line([(x(n), y.inside(value)) for n, value, _, _ in known], width=0.4, ink="below")
