"""Total charge of every mutant against the wild type, with the margin within which it counts as equal."""

from __future__ import annotations

from collections.abc import Sequence

from ...result import ConstructRow, Result
from ..legend import percent
from .lettering import fitted, width_of
from .marks import Sheet, Symbol
from .scales import Scale, around, rule_below
from .style import FULL_WIDTH_MM, SMALL_TYPE, TALLEST_MM, TYPE, Ink

_LINE_MM = 4.8
_TOP, _BOTTOM = 6.0, 9.5
_SYMBOL_OF: dict[str, tuple[Symbol, Ink]] = {
    "equal": ("ring", "ink"),
    "changed": ("disc", "ink"),
    "unresolved": ("cross", "pale"),
}


def charge_sheets(result: Result, width: float) -> list[Sheet]:
    """Every construct, as many to a sheet as a page holds; none where no charge was measured."""
    wild, *mutants = result.constructs
    if all(row.charge_ratio is None for row in mutants):
        return []
    each = int((TALLEST_MM - _TOP - _BOTTOM) / _LINE_MM)
    rows = [wild, *mutants]
    limits = _limits(rows, _one(wild), result.settings.charge_margin)
    return [_sheet(rows[start : start + each], result, limits, width) for start in range(0, len(rows), each)]


def _one(wild: ConstructRow) -> float | None:
    """Charge that counts as 1 on the scale: the mean of the wild type's own values."""
    values = wild.charge_values
    return sum(values) / len(values) if values else None


def _points(row: ConstructRow, one: float | None) -> list[float]:
    return [] if one is None else [value / one for value in row.charge_values]


def _limits(rows: Sequence[ConstructRow], one: float | None, margin: float) -> tuple[float, float]:
    ends = [1 - 1.5 * margin, 1 + 1.5 * margin]
    for row in rows:
        ends += _points(row, one)
        ends += [end for end in (row.charge_ratio_low, row.charge_ratio_high) if end is not None]
    low, high = around(ends)
    return max(low, 0.0), min(high, 3.0)


def _sheet(rows: Sequence[ConstructRow], result: Result, limits: tuple[float, float], width: float) -> Sheet:
    bottom = _TOP + len(rows) * _LINE_MM
    sheet = Sheet(
        width=width,
        height=bottom + _BOTTOM,
        title=f"Total charge of {len(rows)} constructs against the wild type",
    )
    names = min(max(width_of(row.construct, TYPE) for row in rows) + 1.0, 0.3 * width)
    words = 17.0 if width < FULL_WIDTH_MM else 24.0
    scale = Scale(low=limits[0], high=limits[1], start=names + 2.0, end=width - words)
    margin, wild = result.settings.charge_margin, result.constructs[0]
    sheet.box(scale.inside(1 - margin), _TOP, scale.inside(1 + margin), bottom, ink="band")
    sheet.line([(scale(1.0), _TOP), (scale(1.0), bottom)], width=0.22, ink="pale")
    sheet.words(
        (scale(1.0), _TOP - 1.4),
        f"margin ±{100 * margin:.3g} %",
        size=SMALL_TYPE,
        anchor="middle",
        ink="pale",
    )
    for place, row in enumerate(rows):
        y = _TOP + (place + 0.5) * _LINE_MM
        sheet.name((0.5, y + 0.9), row.construct, names)
        _construct(sheet, scale, row, y, _points(row, _one(wild)))
    rule_below(sheet, scale, bottom, most=7)
    middle = (scale.start + scale.end) / 2
    axis = f"total charge / that of {fitted(wild.construct, TYPE, 30.0)}"
    sheet.words((middle, bottom + 7.6), axis, anchor="middle")
    level = percent(result.settings.confidence)
    sheet.foot(
        [f"Rings: single cells. Below them the mean's ratio with its {level} interval. Charge per channel."]
    )
    return sheet


def _construct(sheet: Sheet, scale: Scale, row: ConstructRow, y: float, points: Sequence[float]) -> None:
    """Every cell as a faint ring above, ratio and interval below, the verdict in words."""
    sheet.symbols(
        [(scale(p), y - 0.9) for p in points if scale.holds(p)], "ring", size=1.0, ink="pale", width=0.15
    )
    verdict = row.charge_verdict
    words = verdict or "wild type"
    sheet.words(
        (scale.end + 2.0, y + 0.9),
        words,
        size=SMALL_TYPE,
        ink="pale" if verdict in (None, "assumed") else "ink",
    )
    if row.charge_ratio is None or verdict not in _SYMBOL_OF:
        if verdict == "assumed":
            sheet.words((scale(1.0), y + 0.8), "never measured", size=SMALL_TYPE, anchor="middle", ink="pale")
        return
    symbol, ink = _SYMBOL_OF[verdict]
    below = y + 0.9
    if row.charge_ratio_low is not None and row.charge_ratio_high is not None:
        ends = scale.inside(row.charge_ratio_low), scale.inside(row.charge_ratio_high)
        sheet.line([(ends[0], below), (ends[1], below)], width=0.45, ink=ink)
    at = [(scale.inside(row.charge_ratio), below)]
    if symbol == "ring":
        sheet.symbols(at, "disc", size=1.5, ink="paper")
    sheet.symbols(at, symbol, size=1.5, ink=ink, width=0.35)
