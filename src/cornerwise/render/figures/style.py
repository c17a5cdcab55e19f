"""What all figures share: journal widths, sizes of type, a palette that survives grey and colour loss."""

from __future__ import annotations

from typing import Literal

Format = Literal["svg", "pdf", "png"]
FORMATS: tuple[Format, ...] = ("svg", "pdf", "png")

SINGLE_COLUMN_MM = 85.0
FULL_WIDTH_MM = 180.0
WIDTHS_MM = (SINGLE_COLUMN_MM, FULL_WIDTH_MM)
TALLEST_MM = 230.0  # a journal's page
MM_PER_INCH = 25.4
POINTS_PER_MM = 72.0 / MM_PER_INCH

Ink = Literal["ink", "pale", "rule", "band", "below", "above", "paper"]

# Dark and light enough to differ in grey, far enough apart for red-green colour blindness.
INKS: dict[Ink, str] = {
    "ink": "#1b1b1b",
    "pale": "#6b6b6b",
    "rule": "#bdbdbd",
    "band": "#ececec",
    "below": "#3a5f8f",  # what lies left of the median, the resting side
    "above": "#d99a3c",  # what lies right of it, the activated side
    "paper": "#ffffff",
}

TYPE = 7.0  # points
SMALL_TYPE = 6.0
FOOT_TYPE = 5.5
HAIRLINE = 0.15  # mm
LINE = 0.32
FONT = "DejaVu Sans"  # ships with the drawing library: the same on every machine
PNG_DPI = 400
