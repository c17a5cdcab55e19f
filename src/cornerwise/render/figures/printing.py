"""A sheet as PDF or PNG, drawn by the plotting library mark for mark: no axes, no defaults of its own."""

from __future__ import annotations

import io
import warnings
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

from .lettering import only_common
from .marks import Area, Line, Mark, Sheet, Symbols, Words
from .style import FONT, INKS, MM_PER_INCH, PNG_DPI, POINTS_PER_MM

if TYPE_CHECKING:
    from matplotlib.axes import Axes

_SETTINGS: dict[str, Any] = {
    "font.family": "sans-serif",
    "font.sans-serif": [FONT],
    "text.parse_math": False,  # a label with a dollar sign is only text
    "pdf.fonttype": 42,  # real fonts, embedded
    "path.simplify": False,
}
_UNDATED: dict[str, dict[str, Any]] = {
    "pdf": {"CreationDate": None, "Creator": None, "Producer": None},
    "png": {"Software": None},
}
_MARKERS = {"disc": "o", "ring": "o", "square": "s", "frame": "s", "lozenge": "D", "cross": "x"}


def printed(sheet: Sheet, form: Literal["pdf", "png"], font: Path | None = None) -> bytes:
    """Bytes of a PDF or PNG file of the sheet's size, the same for the same sheet.

    Parameters
    ----------
    sheet : Sheet
        The figure.
    form : {"pdf", "png"}
        Format.
    font : Path, optional
        File of `lettering.common_font`: embedded in a quarter of the time that the whole font takes. Words
        with other letters are set in the whole font.
    """
    import matplotlib as mpl
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    settings: Any = _SETTINGS  # its keys are checked when they are set
    with mpl.rc_context(settings), warnings.catch_warnings():
        warnings.filterwarnings("ignore", "Glyph .* missing from font")  # drawn as an empty box
        figure = Figure(figsize=(sheet.width / MM_PER_INCH, sheet.height / MM_PER_INCH), dpi=PNG_DPI)
        FigureCanvasAgg(figure)
        axes = figure.add_axes((0.0, 0.0, 1.0, 1.0))
        axes.set_axis_off()
        axes.set_xlim(0.0, sheet.width)
        axes.set_ylim(sheet.height, 0.0)
        for layer, mark in enumerate(sheet.marks):
            _draw(axes, mark, layer, font)
        stream = io.BytesIO()
        titled = {**_UNDATED[form], "Title": sheet.title}
        figure.savefig(stream, format=form, metadata=titled, dpi=PNG_DPI)
    return stream.getvalue()


def _draw(axes: Axes, mark: Mark, layer: int, font: Path | None) -> None:
    match mark:
        case Line():
            _line(axes, mark, layer)
        case Area():
            axes.fill(
                *zip(*mark.points, strict=True), facecolor=INKS[mark.ink], alpha=mark.tint, linewidth=0,
                zorder=layer,
            )  # fmt: skip
        case Symbols():
            _symbols(axes, mark, layer)
        case Words():
            _words(axes, mark, layer, font)


def _words(axes: Axes, mark: Words, layer: int, font: Path | None) -> None:
    from matplotlib.font_manager import FontProperties

    file = font if only_common(mark.text) else None
    axes.text(
        *mark.at, mark.text, color=INKS[mark.ink], zorder=layer,
        fontproperties=FontProperties(fname=file, size=mark.size),
        ha={"start": "left", "middle": "center", "end": "right"}[mark.anchor],
        va="baseline", rotation=90.0 if mark.turned else 0.0, rotation_mode="anchor",
    )  # fmt: skip


def _line(axes: Axes, mark: Line, layer: int) -> None:
    width = mark.width * POINTS_PER_MM
    (line,) = axes.plot(
        *zip(*mark.points, strict=True), color=INKS[mark.ink], linewidth=width, zorder=layer, clip_on=False,
        solid_capstyle="butt", dash_capstyle="butt",
    )  # fmt: skip
    if mark.dash:
        line.set_linestyle((0, tuple(length / mark.width for length in mark.dash)))


def _symbols(axes: Axes, mark: Symbols, layer: int) -> None:
    if not mark.points:
        return
    filled = mark.symbol in ("disc", "square", "lozenge")
    across = mark.size / 2**0.5 if mark.symbol == "lozenge" else mark.size
    axes.plot(
        *zip(*mark.points, strict=True), _MARKERS[mark.symbol], zorder=layer, clip_on=False,
        markersize=across * POINTS_PER_MM,
        markerfacecolor=INKS[mark.ink] if filled else "none",
        markeredgecolor=INKS[mark.ink],
        markeredgewidth=0.0 if filled else mark.width * POINTS_PER_MM,
    )  # fmt: skip
