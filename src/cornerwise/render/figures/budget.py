"""Where the uncertainty comes from: the sources of one cycle, and the largest ones of all cycles."""

from __future__ import annotations

from collections.abc import Sequence

from ...result import BudgetRow, InteractionRow, Result
from ..ordering import by_strength, grouped
from ..rounding import decimals_for, number
from .lettering import width_of
from .marks import Sheet
from .scales import Scale, rule_below
from .style import SMALL_TYPE, TALLEST_MM

_BOTTOM_MM = 9.5
_SOURCE_MM = 6.2  # height of a source: its name, its bar below
_CYCLE_MM = 9.4  # height of a cycle: its name, its bar, its largest source
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
    if not known or not known[0].share:  # no uncertainty at all: cells that agree to the last digit
        return None
    shown = known[:_MOST_SOURCES]
    bottom = 1.0 + len(shown) * _SOURCE_MM
    title = f"Where the uncertainty of {row.cycle} comes from"
    sheet = Sheet(width=width, height=bottom + _BOTTOM_MM, title=title)
    largest = 100 * (shown[0].share or 0.0)
    scale = Scale(low=0.0, high=1.02 * largest, start=3.0, end=width - 11.0)
    for place, part in enumerate(shown):
        y = 1.0 + place * _SOURCE_MM
        sheet.name((scale.start, y + 2.3), part.source, width - 3.5, size=SMALL_TYPE)
        end = scale(100 * (part.share or 0.0))
        sheet.box(scale.start, y + 3.1, max(end, scale.start + 0.15), y + 5.3, ink="below", tint=0.75)
        sheet.words((end + 1.0, y + 5.0), _share(part.share), size=SMALL_TYPE)
    rule_below(sheet, scale, bottom)
    total = number(row.std_uncertainty, decimals_for(row.std_uncertainty))
    axis = f"share of u² (%); u = {total} {row.energy_unit} per channel"
    sheet.words(((scale.start + scale.end) / 2, bottom + 7.6), axis, anchor="middle")
    left = len(known) - len(shown)
    if left:
        sheet.foot([f"{left} smaller source{'s' if left > 1 else ''} left out."])
    return sheet


def _share(share: float | None) -> str:
    percent = 100 * (share or 0.0)
    return "<1 %" if percent < 1 else f"{percent:.0f} %"


def budget_sheets(result: Result, width: float) -> list[Sheet]:
    """One line a cycle: its standard uncertainty and which sources make it up."""
    parts = grouped((part.cycle, part) for part in _known(result.budget))
    rows = [row for row in by_strength(result.interactions) if row.cycle in parts]
    each = int((TALLEST_MM - _BOTTOM_MM - 2.0) / _CYCLE_MM)
    return [_sheet(rows[start : start + each], parts, width) for start in range(0, len(rows), each)]


def _sheet(rows: Sequence[InteractionRow], parts: dict[str, list[BudgetRow]], width: float) -> Sheet:
    bottom = 1.0 + len(rows) * _CYCLE_MM
    title = f"Where the uncertainty of {len(rows)} cycles comes from"
    sheet = Sheet(width=width, height=bottom + _BOTTOM_MM, title=title)
    scale = Scale(low=0.0, high=100.0, start=2.0, end=width - 4.0)
    for place, row in enumerate(rows):
        y = 1.0 + place * _CYCLE_MM
        text = f"u = {number(row.std_uncertainty, decimals_for(row.std_uncertainty))} {row.energy_unit}"
        sheet.words((scale.end, y + 2.6), text, size=SMALL_TYPE, anchor="end")
        sheet.name(
            (scale.start, y + 2.6), row.cycle, scale.end - scale.start - width_of(text, SMALL_TYPE) - 2.0
        )
        _bar(sheet, scale, parts[row.cycle], y + 3.4)
    rule_below(sheet, scale, bottom)
    axis = "share of the squared standard uncertainty u (%)"
    sheet.words((width / 2, bottom + 7.6), axis, anchor="middle")
    sheet.foot(["Largest source first and named; u and energies per channel."])
    return sheet


def _bar(sheet: Sheet, scale: Scale, parts: Sequence[BudgetRow], y: float) -> None:
    """Shares end to end, the largest first and darkest, named below the bar."""
    done = 0.0
    for place, part in enumerate(parts):
        share = 100 * (part.share or 0.0)
        left, right = scale(done), scale(min(done + share, 100.0))
        tint = _TINTS[min(place, len(_TINTS) - 1)]
        if right - left > 0.3:
            sheet.box(left, y, right - 0.2, y + 2.4, ink="below", tint=tint)
        done += share
    largest = f"{_share(parts[0].share)}: {parts[0].source}"
    sheet.name((scale.start, y + 4.9), largest, scale.end - scale.start, size=SMALL_TYPE)
