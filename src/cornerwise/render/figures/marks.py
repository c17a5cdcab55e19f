"""What a figure is made of: lines, areas, symbols and words on a sheet, in mm from its top left corner."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Literal

from .lettering import in_lines, sized
from .style import FOOT_TYPE, LINE, TYPE, Ink

Point = tuple[float, float]
Anchor = Literal["start", "middle", "end"]
Symbol = Literal["disc", "ring", "square", "frame", "lozenge", "cross"]


@dataclass(frozen=True, kw_only=True, slots=True)
class Line:
    """A stroked path through points."""

    points: tuple[Point, ...]
    ink: Ink
    width: float  # mm
    dash: tuple[float, ...] = ()  # mm on, mm off, ...


@dataclass(frozen=True, kw_only=True, slots=True)
class Area:
    """A filled polygon."""

    points: tuple[Point, ...]
    ink: Ink
    tint: float = 1.0  # opacity


@dataclass(frozen=True, kw_only=True, slots=True)
class Symbols:
    """The same small symbol at several points."""

    points: tuple[Point, ...]
    symbol: Symbol
    ink: Ink
    size: float  # mm across
    width: float = 0.2  # mm, of the stroke of open symbols


@dataclass(frozen=True, kw_only=True, slots=True)
class Words:
    """One line of text on its baseline."""

    at: Point
    text: str
    size: float  # points
    anchor: Anchor = "start"
    ink: Ink = "ink"
    turned: bool = False  # reads upwards


Mark = Line | Area | Symbols | Words


@dataclass(kw_only=True, slots=True)
class Sheet:
    """A figure while it is drawn: its size, its title for those who cannot see it, its marks in order."""

    width: float  # mm
    height: float  # mm
    title: str
    marks: list[Mark] = field(default_factory=list)

    def line(
        self, points: Iterable[Point], *, ink: Ink = "ink", width: float = LINE, dash: tuple[float, ...] = ()
    ) -> None:
        """Stroke a path."""
        self.marks.append(Line(points=tuple(points), ink=ink, width=width, dash=dash))

    def area(self, points: Iterable[Point], *, ink: Ink, tint: float = 1.0) -> None:
        """Fill a polygon."""
        self.marks.append(Area(points=tuple(points), ink=ink, tint=tint))

    def box(
        self, left: float, top: float, right: float, bottom: float, *, ink: Ink, tint: float = 1.0
    ) -> None:
        """Fill an upright rectangle."""
        self.area([(left, top), (right, top), (right, bottom), (left, bottom)], ink=ink, tint=tint)

    def symbols(
        self, points: Iterable[Point], symbol: Symbol, *, size: float, ink: Ink = "ink", width: float = 0.2
    ) -> None:
        """Put a symbol at every point."""
        self.marks.append(Symbols(points=tuple(points), symbol=symbol, ink=ink, size=size, width=width))

    def words(
        self, at: Point, text: str, *, size: float = TYPE, anchor: Anchor = "start", ink: Ink = "ink"
    ) -> None:
        """Write a line of text on its baseline."""
        self.marks.append(Words(at=at, text=text, size=size, anchor=anchor, ink=ink))

    def name(
        self, at: Point, text: str, room: float, *, size: float = TYPE, anchor: Anchor = "start"
    ) -> None:
        """Write a line of text into `room` (mm), smaller where it would not fit."""
        shown, smaller = sized(text, size, room)
        self.words(at, shown, size=smaller, anchor=anchor)

    def foot(self, sentences: Iterable[str]) -> None:
        """Add small lines below everything that was drawn."""
        for sentence in sentences:
            for line in in_lines(sentence, FOOT_TYPE, self.width - 2.5):
                self.height += 2.5
                self.words((0.5, self.height - 0.9), line, size=FOOT_TYPE, ink="pale")

    def turned_words(self, at: Point, text: str, *, size: float = TYPE, anchor: Anchor = "middle") -> None:
        """Write a line of text that reads upwards."""
        self.marks.append(Words(at=at, text=text, size=size, anchor=anchor, turned=True))


def outline(symbol: Symbol, centre: Point, size: float) -> tuple[Point, ...]:
    """Corners of an angular symbol; two strokes of a cross are four points."""
    (x, y), half = centre, size / 2
    if symbol == "lozenge":
        return ((x, y - half), (x + half, y), (x, y + half), (x - half, y))
    return ((x - half, y - half), (x + half, y - half), (x + half, y + half), (x - half, y + half))
