"""How wide words are, and the letters that an SVG file carries with it."""

from __future__ import annotations

import base64
import io
from functools import lru_cache

from .style import FONT, POINTS_PER_MM

# Advance widths of the font in hundredths of the type size, from the space to the tilde, read off the file.
_PRINTABLE = (
    32, 40, 46, 84, 64, 95, 78, 27, 39, 39, 50, 84, 32, 36, 32, 34, 64, 64, 64, 64, 64, 64, 64, 64,
    64, 64, 34, 34, 84, 84, 84, 53, 100, 68, 69, 70, 77, 63, 58, 77, 75, 29, 29, 66, 56, 86, 75, 79,
    60, 79, 69, 63, 61, 73, 68, 99, 69, 61, 69, 39, 34, 39, 84, 50, 50, 61, 63, 55, 63, 62, 35, 63,
    63, 28, 28, 58, 28, 97, 63, 61, 63, 63, 41, 52, 39, 63, 59, 82, 59, 59, 52, 64, 34, 64, 84,
)  # fmt: skip
_WIDTHS = dict(zip(map(chr, range(32, 127)), _PRINTABLE, strict=True)) | {
    "±": 84, "−": 84, "×": 84, "→": 84, "←": 84, "·": 32, "°": 50, "…": 100, "–": 50, "\u00a0": 32,
}  # fmt: skip
_UNKNOWN = 70
_SMALLEST = 5.0  # points; smaller type is not readable in print

_COMMON = "".join(map(chr, range(32, 127))) + "±−×·°←→≤≥…–ΔΣµ\u00a0"


def width_of(text: str, size: float) -> float:
    """Width of a line of text (mm) at a type size (points)."""
    return sum(_WIDTHS.get(letter, _UNKNOWN) for letter in text) * size / 100 / POINTS_PER_MM


def sized(text: str, size: float, room: float) -> tuple[str, float]:
    """The text with the type size at which it fits into `room` (mm); cut below the smallest size."""
    natural = width_of(text, size)
    if natural <= room:
        return text, size
    smaller = max(_SMALLEST, size * room / natural)
    return fitted(text, smaller, room), smaller


def fitted(text: str, size: float, room: float) -> str:
    """The text, or as much of it as fits into `room` (mm) with an ellipsis."""
    if width_of(text, size) <= room + 1e-6:
        return text
    while text and width_of(f"{text}…", size) > room:
        text = text[:-1]
    return f"{text}…"


def in_lines(text: str, size: float, room: float) -> list[str]:
    """Words broken into lines no wider than `room` (mm)."""
    lines = [""]
    for word in text.split(" "):
        longer = f"{lines[-1]} {word}" if lines[-1] else word
        if lines[-1] and width_of(longer, size) > room:
            lines.append(word)
        else:
            lines[-1] = longer
    return lines


def signed(text: str) -> str:
    """Number for a figure: a true minus sign."""
    return text.replace("-", "−")


def embedded_font(text: str) -> str:
    """Style rule that brings the letters of a text along, as CSS with the font inside."""
    extra = "".join(sorted(set(text) - set(_COMMON)))
    return (
        f'@font-face{{font-family:"{FONT}";src:url(data:font/ttf;base64,{_subset(_COMMON + extra)}) '
        'format("truetype")}'
    )


def only_common(text: str) -> bool:
    """Whether `common_font` holds every letter of a text."""
    return set(text) <= set(_COMMON)


def common_font() -> bytes:
    """A font file with the letters that figures use unless labels bring others."""
    return base64.b64decode(_subset(_COMMON))


@lru_cache(maxsize=64)
def _subset(letters: str) -> str:
    """The font with these letters only, base64; the same bytes each time."""
    from fontTools import subset
    from fontTools.ttLib import TTFont
    from matplotlib import font_manager

    font = TTFont(font_manager.findfont(FONT, fallback_to_default=False), recalcTimestamp=False)
    options = subset.Options(hinting=False, layout_features=[], notdef_outline=True)
    options.drop_tables += ["FFTM"]
    chosen = subset.Subsetter(options)
    chosen.populate(text=letters)
    chosen.subset(font)
    stream = io.BytesIO()
    font.save(stream)
    return base64.b64encode(stream.getvalue()).decode("ascii")
