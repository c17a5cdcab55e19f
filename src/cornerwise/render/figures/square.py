"""A cycle as a square or a cube: energies at the corners, differences along the edges, I in the middle."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from itertools import combinations

from ...result import ConstructRow, Edge, InteractionRow
from ..legend import formula_and_sign
from ..rounding import span, with_uncertainty
from .lettering import signed, sized, width_of
from .marks import Point, Sheet
from .style import FULL_WIDTH_MM, HAIRLINE, SMALL_TYPE, TYPE

_BAR_MM = 2.0  # the sign's bar and the gap behind it
_HALF_HEIGHT_MM = 4.6


@dataclass(frozen=True, kw_only=True, slots=True)
class _Corner:
    """A construct's words and where they stand."""

    middle: Point
    half: float  # of the words' width (mm)
    sign: int
    label: str
    energy: str


def cycle_shape(
    row: InteractionRow, constructs: Mapping[str, ConstructRow], width: float, *, reference_mv: float = 0.0
) -> Sheet | None:
    """Square of an order-2 cycle, cube of an order-3 cycle; None for higher orders.

    Parameters
    ----------
    row : InteractionRow
        The cycle.
    constructs : mapping of str to ConstructRow
        By label.
    width : float
        Of the sheet (mm).
    reference_mv : float, optional
        Voltage of the energies (mV).
    """
    drawn = {2: _square, 3: _cube}.get(row.order)
    if drawn is None:
        return None
    sheet = drawn(row, constructs, width)
    sheet.foot(formula_and_sign([row.order], reference_mv))
    return sheet


def _square(row: InteractionRow, constructs: Mapping[str, ConstructRow], width: float) -> Sheet:
    sheet = Sheet(
        width=width, height=54.0, title=f"{row.cycle} as a square of its constructs with their energies"
    )
    side, top, bottom = (40.0 if width == FULL_WIDTH_MM else 16.5), 6.0, 48.0
    places = [(x, y) for y in (top, bottom) for x in (side, width - side)]
    corners = _corners(row, constructs, places, most=16.0)
    _draw_edges(sheet, row, corners, labelled=True)
    _draw_corners(sheet, corners)
    _interaction(sheet, row, (width / 2, (top + bottom) / 2))
    return sheet


def _cube(row: InteractionRow, constructs: Mapping[str, ConstructRow], width: float) -> Sheet:
    wide = width == FULL_WIDTH_MM
    height = 100.0 if wide else 92.0
    sheet = Sheet(
        width=width, height=height, title=f"{row.cycle} as a cube of its constructs with their energies"
    )
    left, right, front_top, bottom = (32.0, 112.0, 32.0, 82.0) if wide else (14.0, 51.0, 24.0, 74.0)
    back = (36.0, 26.0) if wide else (18.5, 18.0)  # how far the back face is shifted right and up
    places = [
        (
            (right if 0 in carried else left) + (back[0] if 2 in carried else 0.0),
            (bottom if 1 in carried else front_top) - (back[1] if 2 in carried else 0.0),
        )
        for carried in _corner_sets(3)
    ]
    corners = _corners(row, constructs, places, most=16.0 if wide else 13.0)
    _draw_edges(sheet, row, corners, labelled=wide)
    _draw_corners(sheet, corners)
    _interaction_line(sheet, row, (width / 2, height - 6.0))
    return sheet


def _corner_sets(order: int) -> list[frozenset[int]]:
    """Which mutations each corner carries, in the order of `InteractionRow.corners`."""
    return [frozenset(one) for size in range(order + 1) for one in combinations(range(order), size)]


def _energy_words(value: float | None, uncertainty: float | None) -> str:
    return signed(with_uncertainty(value, uncertainty)) or "not available"


def _corners(
    row: InteractionRow, constructs: Mapping[str, ConstructRow], places: list[Point], *, most: float
) -> dict[str, _Corner]:
    corners = {}
    for (label, sign), middle in zip(row.corners, places, strict=True):
        one = constructs[label]
        energy = _energy_words(one.energy, one.std_uncertainty)
        text = f"{'+' if sign > 0 else '−'} {label}"
        half = (max(width_of(text, TYPE), width_of(energy, TYPE)) + _BAR_MM) / 2
        corners[label] = _Corner(middle=middle, half=min(half, most), sign=sign, label=text, energy=energy)
    return corners


def _draw_corners(sheet: Sheet, corners: Mapping[str, _Corner]) -> None:
    """Label and energy of each corner; a bar to their left, dark for a plus and pale for a minus."""
    for corner in corners.values():
        (x, y), half = corner.middle, corner.half
        left, room = x - half, 2 * half - _BAR_MM
        sheet.box(left - 0.8, y - _HALF_HEIGHT_MM, x + half + 0.8, y + _HALF_HEIGHT_MM, ink="paper")
        sheet.box(left, y - 3.8, left + 0.9, y + 3.8, ink="ink" if corner.sign > 0 else "rule")
        sheet.name((left + _BAR_MM, y - 0.9), corner.label, room)
        sheet.name((left + _BAR_MM, y + 2.9), corner.energy, room)


def _trimmed(start: _Corner, end: _Corner) -> tuple[Point, Point]:
    """Part of an edge that neither corner's words cover."""
    (x0, y0), (x1, y1) = start.middle, end.middle
    across, down = abs(x1 - x0), abs(y1 - y0)

    def share(corner: _Corner) -> float:
        beside = (corner.half + 1.0) / across if across else 1.0
        below = (_HALF_HEIGHT_MM + 0.8) / down if down else 1.0
        return min(beside, below)

    first, last = share(start), 1.0 - share(end)
    return (
        (x0 + first * (x1 - x0), y0 + first * (y1 - y0)),
        (x0 + last * (x1 - x0), y0 + last * (y1 - y0)),
    )


def _draw_edges(sheet: Sheet, row: InteractionRow, corners: Mapping[str, _Corner], *, labelled: bool) -> None:
    lines = [(edge, *_trimmed(corners[edge.start], corners[edge.end])) for edge in row.edges]
    for _, start, end in lines:
        sheet.line([start, end], width=0.3, ink="pale")
        _arrow(sheet, start, end)
    if labelled:
        for edge, start, end in lines:
            _edge_words(sheet, edge, start, end, _label_share(row, edge))


def _label_share(row: InteractionRow, edge: Edge) -> float:
    """How far along an edge its words stand: on a cube, away from where front and back edges cross."""
    if row.order == 2:
        return 0.5
    if edge.mutation == row.mutations[2]:  # from the front face to the back
        return 0.45
    places = {label: carried for (label, _), carried in zip(row.corners, _corner_sets(3), strict=True)}
    return 0.28 if 2 in places[edge.start] else 0.73


def _arrow(sheet: Sheet, start: Point, end: Point) -> None:
    (x0, y0), (x1, y1) = start, end
    length = ((x1 - x0) ** 2 + (y1 - y0) ** 2) ** 0.5
    if length < 2.0:
        return
    ux, uy = (x1 - x0) / length, (y1 - y0) / length
    foot = (x1 - 1.7 * ux, y1 - 1.7 * uy)
    across = (0.6 * uy, -0.6 * ux)
    sheet.area(
        [end, (foot[0] + across[0], foot[1] + across[1]), (foot[0] - across[0], foot[1] - across[1])],
        ink="pale",
    )


def _edge_words(sheet: Sheet, edge: Edge, start: Point, end: Point, share: float) -> None:
    """The mutation and what it adds: above a level edge, on a patch of paper over any other."""
    (x0, y0), (x1, y1) = start, end
    value = _energy_words(edge.difference, edge.std_uncertainty)
    value = value if value.startswith(("−", "not")) else f"+{value}"
    if y0 == y1:
        x, room = x0 + share * (x1 - x0), 2 * min(share, 1 - share) * abs(x1 - x0) + 1.0
        sheet.name((x, y0 - 1.0), value, room, size=SMALL_TYPE, anchor="middle")
        sheet.name((x, y0 + 2.8), edge.mutation, room, size=SMALL_TYPE, anchor="middle")
        return
    x, y = x0 + share * (x1 - x0), y0 + share * (y1 - y0)
    half = max(width_of(edge.mutation, SMALL_TYPE), width_of(value, SMALL_TYPE)) / 2 + 0.8
    sheet.box(x - half, y - 3.0, x + half, y + 3.0, ink="paper")
    sheet.words((x, y - 0.4), value, size=SMALL_TYPE, anchor="middle")
    sheet.words((x, y + 2.3), edge.mutation, size=SMALL_TYPE, anchor="middle")


def _verdict(row: InteractionRow) -> str:
    favoured = "" if row.favours is None else f", favours the {row.favours} state"
    return f"{row.interaction_verdict}{favoured}"


def _interaction(sheet: Sheet, row: InteractionRow, middle: Point) -> None:
    x, y = middle
    room = sheet.width - 54.0
    value = f"I = {_energy_words(row.interaction, row.std_uncertainty)}"
    shown, size = sized(value, 8.0, room)
    sheet.words((x, y - 4.2), shown, size=size, anchor="middle")
    limits = signed(span((row.low, row.high), row.std_uncertainty)) or "no interval"
    sheet.name((x, y - 0.8), f"{row.energy_unit} per channel", room, size=SMALL_TYPE, anchor="middle")
    sheet.name((x, y + 2.3), limits, room, size=SMALL_TYPE, anchor="middle")
    sheet.name((x, y + 5.4), _verdict(row).partition(",")[0], room, size=SMALL_TYPE, anchor="middle")
    if row.favours is not None:
        sheet.name((x, y + 8.5), f"favours {row.favours}", room, size=SMALL_TYPE, anchor="middle")


def _interaction_line(sheet: Sheet, row: InteractionRow, at: Point) -> None:
    x, y = at
    sheet.line([(8.0, y - 5.0), (sheet.width - 8.0, y - 5.0)], width=HAIRLINE, ink="rule")
    value = f"I = {_energy_words(row.interaction, row.std_uncertainty)} {row.energy_unit} per channel"
    sheet.name((x, y), value, sheet.width - 4.0, size=8.0, anchor="middle")
    limits = signed(span((row.low, row.high), row.std_uncertainty))
    words = f"{limits}; {_verdict(row)}" if limits else _verdict(row)
    sheet.name((x, y + 3.8), words, sheet.width - 4.0, size=SMALL_TYPE, anchor="middle")
