"""All interactions by strength: energy, interval, the threshold and the verdict in one line each."""

from __future__ import annotations

from collections.abc import Sequence

from ...result import InteractionRow, Result
from ..legend import formula_and_sign
from ..ordering import by_strength
from ..rounding import with_uncertainty
from .lettering import signed, sized, width_of
from .marks import Sheet, Symbol
from .scales import Scale, around, rule_below
from .style import FULL_WIDTH_MM, SMALL_TYPE, TALLEST_MM, TYPE, Ink

_LINE_MM = 4.3
_TOP, _BOTTOM = 7.0, 9.5
SYMBOL_OF: dict[str, tuple[Symbol, Ink]] = {
    "coupled": ("disc", "ink"),
    "detected": ("lozenge", "ink"),
    "uncoupled": ("ring", "ink"),
    "unresolved": ("cross", "pale"),
}


def interaction_sheets(result: Result, width: float) -> list[Sheet]:
    """All cycles that have an energy, strongest first, as many to a sheet as a page holds."""
    rows = [row for row in by_strength(result.interactions) if row.interaction is not None]
    each = int((TALLEST_MM - _TOP - _BOTTOM) / _LINE_MM)
    scale = scale_limits(rows, result) if rows else (0.0, 1.0)
    only_odd = all(row.order % 2 for row in rows)
    return [
        _sheet(rows[start : start + each], result, scale, width, only_odd=only_odd)
        for start in range(0, len(rows), each)
    ]


def _order(row: InteractionRow, *, only_odd: bool) -> str:
    """Word beside the name of a cycle whose sign reads the other way than the words above the axis."""
    return f"(order {row.order})" if row.order % 2 and not only_odd else ""


def scale_limits(rows: Sequence[InteractionRow], result: Result) -> tuple[float, float]:
    """Ends of the scale: every value, the threshold, and intervals up to a few times that reach."""
    threshold = result.settings.energy_threshold
    reach = 1.6 * max(threshold, *(abs(row.interaction or 0.0) for row in rows))
    ends = [-threshold, threshold]
    for row in rows:
        ends += [row.interaction or 0.0, max(row.low or 0.0, -reach), min(row.high or 0.0, reach)]
    return around(ends)


def _sheet(
    rows: Sequence[InteractionRow],
    result: Result,
    limits: tuple[float, float],
    width: float,
    *,
    only_odd: bool,
) -> Sheet:
    wide = width == FULL_WIDTH_MM
    height = _TOP + len(rows) * _LINE_MM + _BOTTOM
    sheet = Sheet(
        width=width, height=height, title=f"Interaction energies of {len(rows)} cycles, strongest first"
    )
    orders = [_order(row, only_odd=only_odd) for row in rows]
    beside = [width_of(order, SMALL_TYPE) + 1.0 if order else 0.0 for order in orders]
    widest = max(width_of(row.cycle, TYPE) + more for row, more in zip(rows, beside, strict=True))
    names = min(widest + 1.0, 0.3 * width + max(beside))
    words = 64.0 if wide else 17.0
    scale = Scale(low=limits[0], high=limits[1], start=names + 2.0, end=width - words)
    bottom = _TOP + len(rows) * _LINE_MM
    _ground(sheet, scale, result.settings.energy_threshold, bottom, only_odd=only_odd)
    for place, row in enumerate(rows):
        y = _TOP + (place + 0.5) * _LINE_MM
        name, size = sized(row.cycle, TYPE, names - beside[place])
        sheet.words((0.5, y + 0.9), name, size=size)
        if orders[place]:
            at = (0.5 + width_of(name, size) + 1.0, y + 0.9)
            sheet.words(at, orders[place], size=SMALL_TYPE, ink="pale")
        draw_interval(sheet, scale, row, y)
        _words(sheet, row, scale.end + 2.5, y + 0.9, wide=wide)
    rule_below(sheet, scale, bottom)
    middle = (scale.start + scale.end) / 2
    unit = f"I ({result.settings.energy_unit} per channel)"
    sheet.words((middle, bottom + 7.6), unit, anchor="middle")
    sheet.foot(formula_and_sign((row.order for row in rows), result.settings.reference_voltage_mv))
    if any(orders):
        sheet.foot(["Where an odd order stands beside a name, the words above the axis change places."])
    return sheet


def _ground(sheet: Sheet, scale: Scale, threshold: float, bottom: float, *, only_odd: bool) -> None:
    """Band within the threshold, line at 0, and what either side means."""
    sheet.box(scale.inside(-threshold), _TOP, scale.inside(threshold), bottom, ink="band")
    sheet.line([(scale(0.0), _TOP), (scale(0.0), bottom)], width=0.22, ink="pale")
    left, right = ("resting", "activated") if only_odd else ("activated", "resting")
    for side, words, anchor in ((-1, f"← {left}", "end"), (1, f"{right} →", "start")):
        at = (scale(0.0) + side * 1.2, _TOP - 1.6)
        sheet.words(at, words, size=SMALL_TYPE, anchor="end" if anchor == "end" else "start", ink="pale")


def draw_interval(sheet: Sheet, scale: Scale, row: InteractionRow, y: float) -> None:
    """Interval as a bar, with an arrowhead where it goes on beyond the scale, and the value as a symbol."""
    symbol, ink = SYMBOL_OF[row.interaction_verdict]
    if row.low is not None and row.high is not None:
        sheet.line([(scale.inside(row.low), y), (scale.inside(row.high), y)], width=0.45, ink=ink)
        for limit, place, side in ((row.low, scale.start, -1), (row.high, scale.end, 1)):
            if not scale.holds(limit):
                tip = [(place + side * 1.3, y), (place, y - 0.8), (place, y + 0.8)]
                sheet.area(tip, ink=ink)
    if row.interaction is not None:
        at = [(scale.inside(row.interaction), y)]
        if symbol == "ring":
            sheet.symbols(at, "disc", size=1.9, ink="paper")
        sheet.symbols(at, symbol, size=1.9 if symbol != "lozenge" else 2.3, ink=ink, width=0.4)


def _words(sheet: Sheet, row: InteractionRow, x: float, y: float, *, wide: bool) -> None:
    sheet.words((x, y), row.interaction_verdict, size=SMALL_TYPE)
    if wide:
        value = signed(with_uncertainty(row.interaction, row.std_uncertainty))
        sheet.words((sheet.width - 27.0, y), value, size=SMALL_TYPE, anchor="end")
        shortcut = row.shortcut_verdict
        sheet.words((sheet.width - 25.0, y), f"shortcut {shortcut}", size=SMALL_TYPE, ink="pale")
