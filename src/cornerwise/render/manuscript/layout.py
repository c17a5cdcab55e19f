"""Page, type size and column widths with which no number of a table breaks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from ..figures.lettering import width_of
from .document import Column, ManuscriptTable
from .words import plain

PAGE_MM = (210.0, 297.0)  # A4
MARGIN_MM = 20.0
PADDING_MM = 1.4  # on either side of a field
_WIDEST_TEXT_MM = 48.0  # longer labels go on in a second line
_SIZES_PT = ((False, 9.0), (False, 8.0), (True, 9.0), (True, 8.0), (True, 7.0))  # landscape or not, type


@dataclass(frozen=True, kw_only=True, slots=True)
class Layout:
    """How a table is set on its page."""

    landscape: bool
    size_pt: float
    widths_mm: tuple[float, ...]  # of the columns, padding included
    wraps: tuple[bool, ...]  # whether a column's texts go on in a second line

    @property
    def room_mm(self) -> float:
        """Width between the margins."""
        return room(landscape=self.landscape)

    def stretched(self) -> tuple[float, ...]:
        """Widths that fill the room between the margins."""
        spare = (self.room_mm - sum(self.widths_mm)) / max(1, len(self.widths_mm))
        return tuple(width + spare for width in self.widths_mm)


def room(*, landscape: bool) -> float:
    """Width between the margins, mm."""
    return PAGE_MM[landscape] - 2 * MARGIN_MM


def layout(table: ManuscriptTable) -> Layout:
    """Choose the page and the largest type a table fits with; the smallest where none does.

    Parameters
    ----------
    table : ManuscriptTable
        Widths are those of its texts in the figures' font, which is wider than most.
    """
    texts = [[row[place].text for _, row in table.rows()] for place in range(len(table.columns))]
    for landscape, size in _SIZES_PT:
        naturals = [_natural(c, own, size) for c, own in zip(table.columns, texts, strict=True)]
        widths = [min(natural, most) + 2 * PADDING_MM for natural, most in naturals]
        if sum(widths) <= room(landscape=landscape):
            break
    scale = min(1.0, room(landscape=landscape) / sum(widths))
    return Layout(
        landscape=landscape,
        size_pt=size,
        widths_mm=tuple(width * scale for width in widths),
        wraps=tuple(natural > most for natural, most in naturals),
    )


def _natural(column: Column, texts: Sequence[str], size: float) -> tuple[float, float]:
    """Width of the widest text of a column, and the width it may have at most."""
    head = max(width_of(text, size) for text in head_lines(column))
    widest = max((width_of(text, size) for text in texts), default=0.0)
    return max(head, widest), max(head, widest if column.numeric else _WIDEST_TEXT_MM)


def head_lines(column: Column) -> tuple[str, ...]:
    """Lines of a column's head: its name, and its unit where it has one."""
    unit = plain(column.unit)
    return (plain(column.head), f"({unit})") if unit else (plain(column.head),)
