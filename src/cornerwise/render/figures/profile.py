"""Interaction energy against voltage, for a cycle whose total charges do not add up."""

from __future__ import annotations

from ...result import InteractionRow, Result
from ..legend import formula_and_sign, percent
from .lettering import signed
from .marks import Sheet
from .scales import Scale, around, rule_below, rule_beside
from .style import HAIRLINE, SMALL_TYPE

_HEIGHT_MM = 52.0


def profile_sheet(row: InteractionRow, result: Result, width: float) -> Sheet | None:
    """Energy with its interval over the voltages around the medians; None where the charges add up."""
    points = [p for p in row.profile if p.low is not None and p.high is not None]
    if len(points) < 2:
        return None
    sheet = Sheet(width=width, height=_HEIGHT_MM, title=f"Interaction energy of {row.cycle} against voltage")
    threshold, settings = result.settings.energy_threshold, result.settings
    low, high = around([0.0, *(p.low or 0.0 for p in points), *(p.high or 0.0 for p in points)])
    x = Scale(low=points[0].voltage_mv, high=points[-1].voltage_mv, start=14.0, end=width - 3.0)
    y = Scale(low=low, high=high, start=_HEIGHT_MM - 10.5, end=4.0)
    sheet.box(x.start, y.inside(threshold), x.end, y.inside(-threshold), ink="band")
    outline = [(x(p.voltage_mv), y(p.low or 0.0)) for p in points]
    outline += [(x(p.voltage_mv), y(p.high or 0.0)) for p in reversed(points)]
    sheet.area(outline, ink="below", tint=0.3)
    sheet.line([(x.start, y(0.0)), (x.end, y(0.0))], width=HAIRLINE, ink="pale")
    sheet.line([(x(p.voltage_mv), y(p.interaction)) for p in points], width=0.4)
    reference = settings.reference_voltage_mv
    if x.holds(reference) and row.interaction is not None:
        at = x(reference)
        sheet.line([(at, y.start), (at, y.end)], width=0.22, dash=(1.2, 0.7))
        sheet.symbols([(at, y.inside(row.interaction))], "disc", size=1.9)
        left = at > (x.start + x.end) / 2
        words = signed(f"I is stated at {reference:g} mV")
        sheet.words(
            (at + (-1.0 if left else 1.0), y.end + 1.6),
            words,
            size=SMALL_TYPE,
            anchor="end" if left else "start",
        )
    rule_below(sheet, x, y.start, most=6)
    rule_beside(sheet, y, x.start)
    sheet.words(((x.start + x.end) / 2, _HEIGHT_MM - 1.2), "voltage (mV)", anchor="middle")
    sheet.turned_words((3.0, (y.start + y.end) / 2), f"I(V) ({row.energy_unit} per channel)")
    level = percent(settings.confidence)
    sheet.foot(
        [
            f"I(V) = I - F V J with its {level} interval; grey: within the threshold.",
            *formula_and_sign([row.order])[1:],
        ]
    )
    return sheet
