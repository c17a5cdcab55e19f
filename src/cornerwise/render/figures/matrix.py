"""Residue by residue: the interaction of every pair that was studied."""

from __future__ import annotations

from collections.abc import Sequence

from ...result import InteractionRow, Result
from ..legend import formula_and_sign
from ..rounding import decimals_for, number
from .lettering import signed, sized, width_of
from .marks import Sheet, Symbol
from .style import HAIRLINE, POINTS_PER_MM, SMALL_TYPE, TYPE, Ink

_LARGEST_CELL_MM = 14.0
_SMALLEST_CELL_MM = 2.2
_NUMBERS_FROM_MM = 7.0
_TOP = 1.0
_KEY: tuple[tuple[Symbol, Ink, str], ...] = (
    ("disc", "below", "I > 0"),
    ("square", "above", "I < 0"),
    ("ring", "below", "open: not shown to differ from 0"),
)


def _axis(result: Result) -> list[str]:
    """Mutations that take part in a pair, in residue order."""
    paired = {mutation for row in result.interactions if row.order == 2 for mutation in row.mutations}
    singles = [row.mutations[0] for row in result.constructs if len(row.mutations) == 1]
    return [mutation for mutation in dict.fromkeys(singles) if mutation in paired]


def matrix_sheet(result: Result, width: float) -> Sheet | None:
    """Matrix of the pairs; None without one, or where so many do not fit into this width."""
    axis = _axis(result)
    pairs = [row for row in result.interactions if row.order == 2 and row.interaction is not None]
    if not pairs or len(axis) < 3:
        return None
    margin = max(width_of(name, TYPE) for name in axis) + 2.0
    cell = min((width - margin - 1.0) / (len(axis) - 1), _LARGEST_CELL_MM)
    if cell < _SMALLEST_CELL_MM:
        return None
    bottom = _TOP + cell * (len(axis) - 1)
    title = f"Interactions of {len(pairs)} pairs of residues"
    sheet = Sheet(width=width, height=bottom + margin + 7.0, title=title)
    place = {name: index for index, name in enumerate(axis)}
    _grid(sheet, axis, cell, margin)
    largest = max(abs(row.interaction or 0.0) for row in pairs)
    for row in pairs:
        first, second = sorted(place[name] for name in row.mutations)
        _pair(sheet, row, (margin + (first + 0.5) * cell, _TOP + (second - 0.5) * cell), cell, largest)
    _key(sheet, bottom + margin + 1.0)
    numbers = f"Numbers: I in {result.settings.energy_unit} per channel. " if cell >= _NUMBERS_FROM_MM else ""
    unit = f"{numbers}The area of a symbol is proportional to the size of I; empty: not studied."
    sheet.foot([unit, *formula_and_sign([2], result.settings.reference_voltage_mv)])
    return sheet


def _grid(sheet: Sheet, axis: Sequence[str], cell: float, margin: float) -> None:
    """Staircase of cells below the diagonal, second residue beside, first residue below."""
    size = min(TYPE, cell * POINTS_PER_MM * 0.85)
    lowered = 0.35 * size / POINTS_PER_MM  # from a line's middle to its baseline
    bottom = _TOP + (len(axis) - 1) * cell
    for index, name in enumerate(axis):
        left, top = margin + index * cell, _TOP + index * cell
        if index > 0:
            sheet.words((margin - 1.2, top - cell / 2 + lowered), name, size=size, anchor="end")
            sheet.line([(margin, top - cell), (left, top - cell)], width=HAIRLINE, ink="rule")
        if index < len(axis) - 1:
            sheet.turned_words((left + cell / 2 + lowered, bottom + 1.2), name, size=size, anchor="end")
            sheet.line([(left + cell, top), (left + cell, bottom)], width=HAIRLINE, ink="rule")
    sheet.line(
        [(margin, _TOP), (margin, bottom), (margin + bottom - _TOP, bottom)], width=HAIRLINE, ink="rule"
    )


def _symbol(row: InteractionRow) -> tuple[Symbol, Ink]:
    """A disc for I > 0, a square for I < 0, open while its sign is not established."""
    if (row.interaction or 0.0) >= 0:
        return ("disc" if row.favours else "ring"), "below"
    return ("square" if row.favours else "frame"), "above"


def _pair(
    sheet: Sheet, row: InteractionRow, middle: tuple[float, float], cell: float, largest: float
) -> None:
    numbered = cell >= _NUMBERS_FROM_MM
    x, y = middle[0], middle[1] - (1.2 if numbered else 0.0)
    room = cell - (3.4 if numbered else 0.7)
    across = max(0.8, room * (abs(row.interaction or 0.0) / largest) ** 0.5) if largest else 0.8
    symbol, ink = _symbol(row)
    if ink == "above":
        across *= 0.886  # a square of the same area as the disc
    sheet.symbols([(x, y)], symbol, size=across, ink=ink, width=0.35)
    if numbered:
        text = signed(number(row.interaction, decimals_for(row.std_uncertainty)))
        shown, size = sized(text, SMALL_TYPE, cell - 0.5)
        sheet.words((middle[0], middle[1] + cell / 2 - 0.7), shown, size=size, anchor="middle")


def _key(sheet: Sheet, y: float) -> None:
    x = 2.0
    for symbol, ink, text in _KEY:
        sheet.symbols([(x + 1.0, y + 2.2)], symbol, size=2.0, ink=ink, width=0.35)
        sheet.words((x + 3.0, y + 3.0), text, size=SMALL_TYPE)
        x += 6.0 + width_of(text, SMALL_TYPE)
