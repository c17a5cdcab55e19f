"""Page, type size and column widths with which no number of a table breaks."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from ..figures.lettering import width_of
from .document import Column, ManuscriptTable
from .words import plain

MARGIN_MM = 20.0
PADDING_MM = 1.4  # on either side of a field
_A4_MM = (210.0, 297.0)
_WIDEST_PAGE_MM = 558.0  # that a word processor knows
_BOLD = 1.2  # how much wider heads are for being bold
_SLACK_MM = 0.5  # for a font that is a little wider
_WIDEST_TEXT_MM = 48.0  # longer labels go on in a second line
_UPRIGHT, _TURNED = _A4_MM, (_A4_MM[1], _A4_MM[0])
_CHOICES = ((_UPRIGHT, 9.0), (_UPRIGHT, 8.0), (_TURNED, 9.0), (_TURNED, 8.0), (_TURNED, 7.0))  # type in pt
_SMALLEST_PT = 7.0


@dataclass(frozen=True, kw_only=True, slots=True)
class Layout:
    """How a table is set on its page."""

    page_mm: tuple[float, float]  # width and height
    size_pt: float
    widths_mm: tuple[float, ...]  # of the columns, padding included
    wraps: tuple[bool, ...]  # whether a column's texts go on in a second line

    @property
    def landscape(self) -> bool:
        """Whether the page is wider than it is high."""
        return self.page_mm[0] > self.page_mm[1]

    def stretched(self) -> tuple[float, ...]:
        """Widths that fill the room between the margins."""
        spare = (_room(self.page_mm) - sum(self.widths_mm)) / max(1, len(self.widths_mm))
        return tuple(width + spare for width in self.widths_mm)


def _room(page_mm: tuple[float, float]) -> float:
    """Width between the margins, mm."""
    return page_mm[0] - 2 * MARGIN_MM


def layout(table: ManuscriptTable) -> Layout:
    """Choose the page and the largest type a table fits with.

    Parameters
    ----------
    table : ManuscriptTable
        A4, upright or turned; a table that is wider still has a page as wide as it needs. Widths are those of
        its texts in the figures' font, which is wider than most.
    """
    for page, size in _CHOICES:
        found = _set_out(table, page, size)
        if sum(found.widths_mm) <= _room(page):
            return found
    needed = sum(found.widths_mm) + 2 * MARGIN_MM
    page = (min(needed, _WIDEST_PAGE_MM), _UPRIGHT[0])
    fitting = min(1.0, _room(page) / (needed - 2 * MARGIN_MM))
    return replace(
        found,
        page_mm=page,
        size_pt=_SMALLEST_PT * fitting,
        widths_mm=tuple(width * fitting for width in found.widths_mm),
    )


def _set_out(table: ManuscriptTable, page: tuple[float, float], size: float) -> Layout:
    texts = [[row[place].text for _, row in table.rows()] for place in range(len(table.columns))]
    naturals = [_natural(column, own, size) for column, own in zip(table.columns, texts, strict=True)]
    return Layout(
        page_mm=page,
        size_pt=size,
        widths_mm=tuple(min(natural, most) + 2 * PADDING_MM for natural, most in naturals),
        wraps=tuple(natural > most for natural, most in naturals),
    )


def _natural(column: Column, texts: Sequence[str], size: float) -> tuple[float, float]:
    """Width of the widest text of a column, and the width it may have at most."""
    head = _BOLD * max(width_of(text, size) for text in head_lines(column))
    widest = max((width_of(text, size) for text in texts), default=0.0) + _SLACK_MM
    return max(head, widest), max(head, widest if column.numeric else _WIDEST_TEXT_MM)


def head_lines(column: Column) -> tuple[str, ...]:
    """Lines of a column's head: its name, and its unit where it has one."""
    unit = plain(column.unit)
    return (plain(column.head), f"({unit})") if unit else (plain(column.head),)
