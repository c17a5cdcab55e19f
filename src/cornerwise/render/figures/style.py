"""What all figures share: journal widths, type, a palette that survives grey and colour blindness."""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    from matplotlib.figure import Figure

Format = Literal["svg", "pdf", "png"]
FORMATS: tuple[Format, ...] = ("svg", "pdf", "png")

SINGLE_COLUMN_MM = 85.0
FULL_WIDTH_MM = 180.0
_MM_PER_INCH = 25.4

# Dark and light enough to differ in grey, far enough apart for red-green colour blindness.
INK = "#1b1b1b"
PALE_INK = "#8a8a8a"
BELOW = "#3a5f8f"  # what lies left of the median, the resting side
ABOVE = "#d99a3c"  # what lies right of it, the activated side
RULE = "#c9c9c9"

_SETTINGS: dict[str, Any] = {
    "font.family": "sans-serif",
    "font.sans-serif": ["DejaVu Sans"],  # ships with the drawing library: the same on every machine
    "font.size": 7.0,
    "axes.titlesize": 7.0,
    "axes.labelsize": 7.0,
    "xtick.labelsize": 6.0,
    "ytick.labelsize": 6.0,
    "legend.fontsize": 6.0,
    "axes.linewidth": 0.5,
    "axes.edgecolor": INK,
    "axes.spines.top": False,
    "axes.spines.right": False,
    "xtick.major.width": 0.5,
    "ytick.major.width": 0.5,
    "xtick.major.size": 2.0,
    "ytick.major.size": 2.0,
    "lines.linewidth": 0.9,
    "text.parse_math": False,  # a label with a dollar sign is only text
    "svg.fonttype": "none",  # text stays text
    "svg.hashsalt": "cornerwise",  # the same file every time
    "pdf.fonttype": 42,  # real fonts, embedded
    "figure.dpi": 100.0,
    "savefig.dpi": 300.0,
}


@contextmanager
def drawing() -> Iterator[None]:
    """Settings of every figure, in force while it is drawn and saved."""
    import matplotlib as mpl

    settings: Any = _SETTINGS  # its keys are checked when they are set
    with mpl.rc_context(settings):
        yield


def new_figure(width_mm: float, height_mm: float) -> Figure:
    """Empty figure of a size in mm, without a window system."""
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(figsize=(width_mm / _MM_PER_INCH, height_mm / _MM_PER_INCH), layout="constrained")
    FigureCanvasAgg(figure)
    return figure


def rendered(figure: Figure, form: Format) -> bytes:
    """Bytes of a figure file, the same for the same figure."""
    stream = io.BytesIO()
    undated: dict[Format, dict[str, Any]] = {
        "svg": {"Date": None, "Creator": None},
        "pdf": {"CreationDate": None, "Creator": None, "Producer": None},
        "png": {"Software": None},
    }
    figure.savefig(stream, format=form, metadata=undated[form])
    return stream.getvalue()
