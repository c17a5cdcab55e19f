"""A sheet as SVG: a file that carries its font, or a drawing for a page that has its own colours."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from html import escape
from itertools import pairwise

from .lettering import embedded_font
from .marks import Area, Line, Mark, Point, Sheet, Symbols, Words, outline
from .style import FONT, INKS, POINTS_PER_MM, Ink

Paint = Callable[[str, Ink], str]  # "fill" or "stroke" and an ink to attributes

_CLOSE_MM = 0.015  # a point nearer than this to the line through its neighbours is not needed


def svg_file(sheet: Sheet) -> bytes:
    """Bytes of an SVG file of the sheet's size, text as text, its font inside."""
    text = "".join(mark.text for mark in sheet.marks if isinstance(mark, Words))
    rules = f'{embedded_font(text)}text{{font-family:"{FONT}",sans-serif}}'
    body = "".join(_drawn(mark, _fixed) for mark in sheet.marks)
    width, height = _n(sheet.width), _n(sheet.height)
    return (
        '<?xml version="1.0" encoding="UTF-8"?>\n'
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{width}mm" height="{height}mm" '
        f'viewBox="0 0 {width} {height}" role="img">\n<title>{plain(sheet.title)}</title>\n'
        f"<style>{rules}</style>\n"
        f'<rect width="{width}" height="{height}" fill="{INKS["paper"]}"/>\n{body}</svg>\n'
    ).encode()


def svg_inline(sheet: Sheet, *, decorative: bool = False) -> str:
    """SVG element for an HTML page whose style sheet gives the inks their colours.

    Parameters
    ----------
    sheet : Sheet
        The figure.
    decorative : bool, optional
        Hide it from those who cannot see it: the text beside it says the same.

    Returns
    -------
    str
        Strokes have class ``s-`` and the ink's name, fills ``f-``.
    """
    body = "".join(_drawn(mark, _by_class) for mark in sheet.marks)
    width, height = _n(sheet.width), _n(sheet.height)
    named = 'aria-hidden="true"' if decorative else f'role="img" aria-label="{plain(sheet.title)}"'
    kind = "strip" if decorative else "drawn"
    return f'<svg class="{kind}" viewBox="0 0 {width} {height}" {named}>{body}</svg>'


def plain(text: str) -> str:
    """Text for SVG: markup escaped, characters that XML does not allow replaced."""
    allowed = (c if c >= " " and c not in "\x7f\ufffe\uffff" else "\ufffd" for c in text)
    return escape("".join(allowed), quote=True)


def _n(number: float) -> str:
    text = f"{number:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text.replace("0.", ".", 1) if text.startswith(("0.", "-0.")) else text


def _fixed(kind: str, ink: Ink) -> str:
    return f'fill="{INKS[ink]}"' if kind == "fill" else f'fill="none" stroke="{INKS[ink]}"'


def _by_class(kind: str, ink: Ink) -> str:
    return f'class="f-{ink}"' if kind == "fill" else f'class="s-{ink}"'


def _drawn(mark: Mark, paint: Paint) -> str:
    match mark:
        case Line():
            dash = f' stroke-dasharray="{" ".join(map(_n, mark.dash))}"' if mark.dash else ""
            path = _path(simplified(mark.points))
            return f'<path d="{path}" {paint("stroke", mark.ink)} stroke-width="{_n(mark.width)}"{dash}/>\n'
        case Area():
            tint = "" if mark.tint == 1.0 else f' fill-opacity="{_n(mark.tint)}"'
            return f'<path d="{_path(simplified(mark.points))}z" {paint("fill", mark.ink)}{tint}/>\n'
        case Symbols():
            return _symbols(mark, paint)
        case Words():
            return _words(mark, paint)


def _path(points: Iterable[Point]) -> str:
    return "M" + "L".join(f"{_n(x)} {_n(y)}" for x, y in points)


def _words(mark: Words, paint: Paint) -> str:
    x, y = map(_n, mark.at)
    anchor = "" if mark.anchor == "start" else f' text-anchor="{mark.anchor}"'
    turn = f' transform="rotate(-90 {x} {y})"' if mark.turned else ""
    size = _n(mark.size / POINTS_PER_MM)
    return (
        f'<text x="{x}" y="{y}" font-size="{size}" {paint("fill", mark.ink)}{anchor}{turn}>'
        f"{plain(mark.text)}</text>\n"
    )


def _symbols(mark: Symbols, paint: Paint) -> str:
    """All symbols as one path: discs are dots of a round pen, the others outlines."""
    stroke = f'{paint("stroke", mark.ink)} stroke-width="{_n(mark.width)}"'
    half = _n(mark.size / 2)
    match mark.symbol:
        case "disc":
            dots = "".join(f"M{_n(x)} {_n(y)}h0" for x, y in mark.points)
            pen = f'{paint("stroke", mark.ink)} stroke-width="{_n(mark.size)}" stroke-linecap="round"'
            return f'<path d="{dots}" {pen}/>\n'
        case "ring":
            turn = f"a{half} {half} 0 1 0 0 .01z"  # all the way round but a hair, which the z closes
            rings = "".join(f"M{_n(x + mark.size / 2)} {_n(y)}{turn}" for x, y in mark.points)
            return f'<path d="{rings}" {stroke}/>\n'
        case "cross":
            strokes = []
            for point in mark.points:
                a, b, c, d = outline("square", point, mark.size)
                strokes.append(_path((a, c)) + _path((b, d)))
            return f'<path d="{"".join(strokes)}" {stroke}/>\n'
        case "frame":
            frames = "".join(f"{_path(outline('square', point, mark.size))}z" for point in mark.points)
            return f'<path d="{frames}" {stroke}/>\n'
        case "square" | "lozenge":
            shapes = "".join(f"{_path(outline(mark.symbol, point, mark.size))}z" for point in mark.points)
            return f'<path d="{shapes}" {paint("fill", mark.ink)}/>\n'


def simplified(points: tuple[Point, ...]) -> list[Point]:
    """Path with fewer points that passes no point left out farther away than can be seen."""
    kept, skipped = list(points[:1]), list[Point]()
    for here, after in pairwise(points[1:]):
        skipped.append(here)
        if any(_distance(point, kept[-1], after) > _CLOSE_MM for point in skipped):
            kept.append(here)
            skipped = []
    return kept + list(points[1:][-1:])


def _distance(point: Point, start: Point, end: Point) -> float:
    """Distance of a point from a stretch of line (mm)."""
    (x, y), (x0, y0), (x1, y1) = point, start, end
    dx, dy = x1 - x0, y1 - y0
    length = dx * dx + dy * dy
    along = min(max(((x - x0) * dx + (y - y0) * dy) / length, 0.0), 1.0) if length else 0.0
    return float(((x - x0 - along * dx) ** 2 + (y - y0 - along * dy) ** 2) ** 0.5)
