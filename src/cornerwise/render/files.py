"""The files of ``--out``: written beside their place and moved there as a whole."""

from __future__ import annotations

import csv
import io
import shutil
import tempfile
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import TYPE_CHECKING

from ..errors import UsageError
from ..result import Result, Row, Table
from ..unit_change import in_unit

if TYPE_CHECKING:
    from .manuscript.options import TableOptions

Progress = Callable[[str, int, int], None]


def check_destination(folder: Path, *, force: bool) -> None:
    """Refuse a destination that would be overwritten unasked, before anything is computed.

    Raises
    ------
    UsageError
        If `folder` exists and `force` is False, or if it is a file, or its parent does not exist.
    """
    if folder.exists() and not folder.is_dir():
        raise UsageError(f"{folder} is a file; give a folder to write to")
    if folder.exists() and not force:
        raise UsageError(f"{folder} exists; use --force to replace it as a whole, or give another folder")
    if not folder.absolute().parent.is_dir():
        raise UsageError(f"{folder.absolute().parent} is not a folder; make it first")


def csv_text(table: Table[Row]) -> str:
    """Text of a CSV file."""
    # The shortest digits that give the same float back; integers and text as they are; nothing for None.
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(table.columns)
    writer.writerows(row.cells() for row in table)
    return stream.getvalue()


def result_files(result: Result, *, cycle_figures: bool | None = None) -> dict[str, str]:
    """Name and text of a result's data files and of its report.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    cycle_figures : bool, optional
        Whether the report draws every cycle; None for as long as there are not too many.
    """
    from .report.page import report_html  # with its templates, only when files are written

    some: dict[str, Table[Row]] = {
        "per_subunit.csv": result.per_subunit,
        "backgrounds.csv": result.backgrounds,
    }
    return {
        "result.json": result.to_json(),
        "interactions.csv": csv_text(result.interactions),
        "constructs.csv": csv_text(result.constructs),
        "cells.csv": csv_text(result.cells),
        "midpoints.csv": csv_text(result.midpoints),
        "budget.csv": csv_text(result.budget),
        "ranking.csv": csv_text(result.ranking),
        **{name: csv_text(table) for name, table in some.items() if len(table)},
        "report.html": report_html(result, cycle_figures=cycle_figures),
    }


def output_files(
    result: Result,
    *,
    tables: TableOptions | None = None,
    unit: str | None = None,
    figures: bool = False,
    progress: Progress | None = None,
) -> dict[str, str | bytes]:
    """Every file that ``--out`` writes, from a result alone.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` or `cornerwise.read_result` returned.
    tables : TableOptions, optional
        Columns, grouping and digits of the manuscript's tables.
    unit : {"kcal/mol", "kJ/mol", "kT", "meV"}, optional
        Energy unit of every file but ``result.json``, which stays as it was computed; None for the result's.
    figures : bool, optional
        Draw all figures too, and every cycle's in the report.
    progress : callable, optional
        Called with a step's name, how much of it is done and how much there is.

    Returns
    -------
    dict of str to str or bytes
        Path below the folder to contents, for `write_folder`; the same bytes for the same result and
        choices.

    Raises
    ------
    UsageError
        If a column or the unit is unknown.
    """
    from .manuscript.files import table_files

    shown = result if unit is None else in_unit(result, unit)
    in_tables = table_files(shown, tables)  # first: an unknown column is refused before much is done
    files: dict[str, str | bytes] = {**result_files(shown, cycle_figures=figures or None), **in_tables}
    if shown is not result:
        files["result.json"] = result.to_json()
    if figures:
        from .figures.files import figure_files

        files |= figure_files(shown, progress)
    return files


def write_folder(files: Mapping[str, str | bytes], folder: Path, *, force: bool = False) -> None:
    r"""Write files into `folder`, all of them or none.

    Parameters
    ----------
    files : mapping of str to str or bytes
        File name, or a path below `folder` with forward slashes, to contents; text is written
        as UTF-8 with ``\n`` line ends.
    folder : Path
        Appears, or is replaced, as a whole once every file is complete.
    force : bool, optional
        Replace an existing folder.

    Raises
    ------
    UsageError
        As `check_destination`, or if the place cannot be written.
    """
    check_destination(folder, force=force)
    folder = folder.absolute()
    try:
        fresh = Path(tempfile.mkdtemp(prefix=f".{folder.name}-", dir=folder.parent))
    except OSError as error:
        raise UsageError(f"cannot write beside {folder}: {error.strerror}") from error
    try:
        for name, contents in files.items():
            place = _place_below(fresh, name)
            place.parent.mkdir(parents=True, exist_ok=True)
            place.write_bytes(contents.encode("utf-8") if isinstance(contents, str) else contents)
        fresh.chmod(0o755)
        _move_into_place(fresh, folder)
    except OSError as error:
        raise UsageError(f"cannot write {folder}: {error.strerror}; nothing was changed") from error
    finally:
        shutil.rmtree(fresh, ignore_errors=True)


def _place_below(folder: Path, name: str) -> Path:
    """Path of a file inside `folder`; a name that would leave it is a fault of the program."""
    parts = name.split("/")
    if any(part in ("", ".", "..") or "\\" in part or ":" in part for part in parts):
        raise ValueError(f"{name!r} is no path below a folder")
    return folder.joinpath(*parts)


def _move_into_place(fresh: Path, folder: Path) -> None:
    if not folder.exists():
        fresh.rename(folder)
        return
    # A folder cannot be swapped for another in one step: keep the old one until the new one is there.
    aside = fresh.with_name(f"{fresh.name}-old")
    folder.rename(aside)
    try:
        fresh.rename(folder)
    except OSError:
        aside.rename(folder)
        raise
    shutil.rmtree(aside, ignore_errors=True)
