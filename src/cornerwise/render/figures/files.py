"""Figure files: which figures there are, what they are called, and their bytes."""

from __future__ import annotations

import os
import re
import signal
import threading
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from concurrent.futures import ProcessPoolExecutor
from contextlib import contextmanager
from functools import partial
from multiprocessing import active_children, get_context
from pathlib import Path
from tempfile import TemporaryDirectory

from ...result import CellRow, InteractionRow, Result, Table
from ...surveying import Survey
from ..ordering import by_strength, grouped
from .budget import budget_sheets, cycle_budget
from .charges import charge_sheets
from .curves import ConstructCurves, curve_sheets, cycle_curves
from .interactions import interaction_sheets
from .lettering import common_font
from .marks import Sheet
from .matrix import matrix_sheet
from .printing import printed
from .profile import profile_sheet
from .square import cycle_shape
from .style import FORMATS, SINGLE_COLUMN_MM, WIDTHS_MM, Format
from .vector import svg_file

Progress = Callable[[str, int, int], None]
_ALONE = 6  # sheets that are drawn sooner than a second process starts


def rendered(sheet: Sheet, form: Format, font: Path | None = None) -> bytes:
    """Bytes of a sheet in a format, the same for the same sheet; `font` as for `printing.printed`."""
    return svg_file(sheet) if form == "svg" else printed(sheet, form, font)


def cells_by_construct(cells: Table[CellRow]) -> dict[str, tuple[CellRow, ...]]:
    """Cells of each construct in the order of the table."""
    return {label: tuple(own) for label, own in grouped((cell.construct, cell) for cell in cells).items()}


def curve_files(survey: Survey) -> dict[str, bytes]:
    """Sheets of all constructs' curves with medians and equal areas, in every format.

    Parameters
    ----------
    survey : Survey
        What `cornerwise.survey` returned.

    Returns
    -------
    dict of str to bytes
        ``curves-1.svg``, ``curves-1.pdf``, ``curves-1.png``, ``curves-2.svg``, ...; empty when only
        summaries were brought.
    """
    cells = cells_by_construct(survey.cells)
    shown = [
        ConstructCurves(
            label=row.construct, median_mv=row.median_mv, curve=row.curve, cells=cells.get(row.construct, ())
        )
        for row in survey.constructs
    ]
    sheets = {f"curves-{number}": sheet for number, sheet in enumerate(curve_sheets(shown), start=1)}
    return drawn_files(sheets)


class CycleFigures:
    """The figures of single cycles of a result.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    """

    def __init__(self, result: Result) -> None:
        self._result = result
        self._constructs = {row.construct: row for row in result.constructs}
        self._cells = cells_by_construct(result.cells)
        self._budget = grouped((part.cycle, part) for part in result.budget)

    def of(self, row: InteractionRow, width: float) -> dict[str, Sheet]:
        """Sheets that apply to a cycle, by kind: ``shape``, ``curves``, ``voltage``, ``budget``."""
        curves = [self._curves(label) for label, _ in row.corners]
        sheets = {
            "shape": cycle_shape(
                row, self._constructs, width, reference_mv=self._result.settings.reference_voltage_mv
            ),
            "curves": cycle_curves(row.cycle, curves, width),
            "voltage": profile_sheet(row, self._result, width),
            "budget": cycle_budget(row, self._budget.get(row.cycle, []), width),
        }
        return {kind: sheet for kind, sheet in sheets.items() if sheet is not None}

    def _curves(self, label: str) -> ConstructCurves:
        row = self._constructs[label]
        return ConstructCurves(
            label=label, median_mv=row.median_mv, curve=row.curve, cells=self._cells.get(label, ())
        )


def overview_sheets(result: Result, width: float) -> dict[str, list[Sheet]]:
    """Figures of the whole campaign by kind; a kind that does not apply has no sheet."""
    matrix = matrix_sheet(result, width)
    return {
        "interactions": interaction_sheets(result, width),
        "matrix": [] if matrix is None else [matrix],
        "charges": charge_sheets(result, width),
        "budget": budget_sheets(result, width),
    }


def _named(result: Result) -> dict[str, Sheet]:
    """Every sheet of a result under the path of its files without their ending."""
    named = {}
    folders = cycle_folders([row.cycle for row in by_strength(result.interactions)])
    figures = CycleFigures(result)
    for width in WIDTHS_MM:
        size = f"{width:.0f}mm"
        for kind, sheets in overview_sheets(result, width).items():
            for number, sheet in enumerate(sheets, start=1):
                part = f"-{number}" if len(sheets) > 1 else ""
                named[f"figures/{kind}{part}-{size}"] = sheet
        for row in result.interactions:
            for kind, sheet in figures.of(row, width).items():
                named[f"figures/{folders[row.cycle]}/{kind}-{size}"] = sheet
    return named


def cycle_folders(cycles: Iterable[str]) -> dict[str, str]:
    """Folder name for each cycle: letters, digits and dashes only, each name once on any file system."""
    folders: dict[str, str] = {}
    taken: set[str] = set()
    for cycle in cycles:
        plain = re.sub(r"[^A-Za-z0-9]+", "-", cycle).strip("-")[:60] or "cycle"
        name, count = plain, 1
        while name.lower() in taken:
            count += 1
            name = f"{plain}-{count}"
        taken.add(name.lower())
        folders[cycle] = name
    return folders


def figure_files(
    result: Result, progress: Progress | None = None, workers: int | None = None
) -> dict[str, bytes]:
    """All figures of a result in both journal widths and every format.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    progress : callable, optional
        Called with a step's name, how much of it is done and how much there is.
    workers : int, optional
        Processes that draw; None for one a core. The bytes do not depend on it.

    Returns
    -------
    dict of str to bytes
        ``figures/interactions-85mm.svg``, ..., and a folder a cycle such as
        ``figures/E154Q-R223Q/shape-180mm.pdf``.
    """
    return drawn_files(_named(result), progress, workers)


def drawn_files(
    sheets: Mapping[str, Sheet], progress: Progress | None = None, workers: int | None = None
) -> dict[str, bytes]:
    """Files of named sheets, drawn by several processes when there are many.

    Parameters
    ----------
    sheets : mapping of str to Sheet
        Sheets by the path of their files without the ending.
    progress, workers : optional
        As for `figure_files`.
    """
    many = workers if workers is not None else os.cpu_count() or 1
    with TemporaryDirectory(ignore_cleanup_errors=True) as folder:
        font = Path(folder) / "letters.ttf"
        font.write_bytes(common_font())
        draw = partial(_in_every_format, font=font)
        if many == 1 or len(sheets) <= _ALONE:
            return _gather(sheets, map(draw, sheets.values()), progress)
        # Fresh processes rather than copies of this one, whose numerical libraries may hold threads.
        pool = ProcessPoolExecutor(max_workers=many, mp_context=get_context("spawn"))
        others = active_children()
        try:
            with _deaf_to_interrupts():
                drawn = pool.map(draw, sheets.values(), chunksize=4)
            return _gather(sheets, drawn, progress)
        except BaseException:  # stopped: what is being drawn is of no use
            for child in active_children():
                if child not in others:
                    child.terminate()
            raise
        finally:
            pool.shutdown(cancel_futures=True)


@contextmanager
def _deaf_to_interrupts() -> Iterator[None]:
    """Have processes that begin here leave an interrupt to this one, which stops them without a word."""
    if threading.current_thread() is not threading.main_thread():  # where signals cannot be set
        yield
        return
    heard = signal.signal(signal.SIGINT, signal.SIG_IGN)
    try:
        yield
    finally:
        signal.signal(signal.SIGINT, heard)


def _gather(
    sheets: Mapping[str, Sheet], drawn: Iterable[Sequence[bytes]], progress: Progress | None
) -> dict[str, bytes]:
    files: dict[str, bytes] = {}
    for done, (name, contents) in enumerate(zip(sheets, drawn, strict=True), start=1):
        files |= {f"{name}.{form}": data for form, data in zip(FORMATS, contents, strict=True)}
        if progress is not None:
            progress("figures", done, len(sheets))
    return files


def _in_every_format(sheet: Sheet, font: Path) -> list[bytes]:
    return [rendered(sheet, form, font) for form in FORMATS]


__all__ = [
    "SINGLE_COLUMN_MM",
    "CycleFigures",
    "cells_by_construct",
    "curve_files",
    "cycle_folders",
    "figure_files",
    "overview_sheets",
    "rendered",
]
