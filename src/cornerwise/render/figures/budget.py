"""Where the uncertainty comes from: the sources of one cycle, and the largest ones of all cycles."""

from __future__ import annotations

from collections.abc import Sequence

from ...result import BudgetRow, InteractionRow, Result
from ..ordering import by_strength, grouped
from ..rounding import decimals_for, number
from .lettering import width_of
from .marks import Sheet
from .scales import Scale, rule_below
from .style import FULL_WIDTH_MM, SMALL_TYPE, TALLEST_MM, TYPE

_LINE_MM = 4.3
_BOTTOM = 9.5
_MOST_SOURCES = 9
_TINTS = (0.95, 0.6, 0.35, 0.18)


def _known(parts: Sequence[BudgetRow]) -> list[BudgetRow]:
    return [part for part in parts if part.share is not None and part.contribution is not None]


def cycle_budget(row: InteractionRow, parts: Sequence[BudgetRow], width: float) -> Sheet | None:
    """Sources of one cycle's uncertainty, the largest first; None where it has none.

    Parameters
    ----------
    row : InteractionRow
        The cycle.
    parts : sequence of BudgetRow
        Its budget, the largest first.
    width : float
        Of the sheet (mm).
    """
    known = _known(parts)
    if not known:
        return None
    shown = known[:_MOST_SOURCES]
    bottom = 2.0 + len(shown) * _LINE_MM
    sheet = Sheet(
        width=width, height=bottom + _BOTTOM + 3.0, title=f"Where the uncertainty of {row.cycle} comes from"
    )
    names = min(max(width_of(part.source, SMALL_TYPE) for part in shown) + 1.0, 0.56 * width)
    largest = shown[0].contribution or 1.0
    scale = Scale(low=0.0, high=1.05 * largest, start=names + 2.0, end=width - 12.0)
    for place, part in enumerate(shown):
        y = 2.0 + (place + 0.5) * _LINE_MM
        sheet.name((0.5, y + 0.8), part.source, names, size=SMALL_TYPE)
        end = scale(part.contribution or 0.0)
        sheet.box(scale.start, y - 1.3, max(end, scale.start + 0.15), y + 1.3, ink="below", tint=0.75)
        sheet.words((end + 1.0, y + 0.8), _share(part.share), size=SMALL_TYPE)
    rule_below(sheet, scale, bottom, most=4)
    axis = f"standard uncertainty ({row.energy_unit} per channel)"
    sheet.words((width - 1.0, bottom + 7.4), axis, size=SMALL_TYPE, anchor="end")
    left = len(known) - len(shown)
    if left:
        words = f"{left} smaller source{'s' if left > 1 else ''} left out"
        sheet.words((0.5, bottom + 10.4), words, size=SMALL_TYPE, ink="pale")
    return sheet


def _share(share: float | None) -> str:
    percent = 100 * (share or 0.0)
    return "<1 %" if percent < 1 else f"{percent:.0f} %"


def budget_sheets(result: Result, width: float) -> list[Sheet]:
    """One line a cycle: its standard uncertainty and which sources make it up."""
    parts = grouped((part.cycle, part) for part in _known(result.budget))
    rows = [row for row in by_strength(result.interactions) if row.cycle in parts]
    each = int((TALLEST_MM - 6.0 - _BOTTOM) / (2 * _LINE_MM - 1.0))
    return [_sheet(rows[start : start + each], parts, width) for start in range(0, len(rows), each)]


def _sheet(rows: Sequence[InteractionRow], parts: dict[str, list[BudgetRow]], width: float) -> Sheet:
    step = 2 * _LINE_MM - 1.0
    bottom = 2.0 + len(rows) * step
    sheet = Sheet(
        width=width, height=bottom + _BOTTOM, title=f"Where the uncertainty of {len(rows)} cycles comes from"
    )
    names = min(max(width_of(row.cycle, TYPE) for row in rows) + 1.0, 0.3 * width)
    values = 16.0 if width < FULL_WIDTH_MM else 24.0
    scale = Scale(low=0.0, high=100.0, start=names + 2.0, end=width - values)
    for place, row in enumerate(rows):
        y = 2.0 + place * step
        sheet.name((0.5, y + 3.3), row.cycle, names)
        _bar(sheet, scale, parts[row.cycle], y)
        text = number(row.std_uncertainty, decimals_for(row.std_uncertainty))
        sheet.words((scale.end + 2.0, y + 2.9), f"u = {text}", size=SMALL_TYPE)
    rule_below(sheet, scale, bottom)
    axis = f"share of the squared standard uncertainty u (%); u in {rows[0].energy_unit} per channel"
    sheet.words((width - 1.0, bottom + 7.6), axis, anchor="end", size=SMALL_TYPE)
    return sheet


def _bar(sheet: Sheet, scale: Scale, parts: Sequence[BudgetRow], y: float) -> None:
    """Shares end to end, the largest first and darkest, named below the bar."""
    done = 0.0
    for place, part in enumerate(parts):
        share = 100 * (part.share or 0.0)
        left, right = scale(done), scale(min(done + share, 100.0))
        tint = _TINTS[min(place, len(_TINTS) - 1)]
        if right - left > 0.3:
            sheet.box(left, y + 0.6, right - 0.2, y + 3.2, ink="below", tint=tint)
        done += share
    largest = f"{_share(parts[0].share)}: {parts[0].source}"
    sheet.name((scale.start, y + 6.0), largest, sheet.width - scale.start - 0.5, size=SMALL_TYPE)
