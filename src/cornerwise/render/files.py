"""The files of ``--out``, from a result alone; `cornerwise.folders` writes them."""

from __future__ import annotations

import csv
import io
from collections.abc import Callable
from typing import TYPE_CHECKING

from ..result import Result, Row, Table
from ..unit_change import in_unit

if TYPE_CHECKING:
    from .manuscript.options import TableOptions

Progress = Callable[[str, int, int], None]


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
        "next_steps.csv": result.next_steps,
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
        Path below the folder to contents, for `cornerwise.write_folder`; the same bytes for the same result
        and choices.

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
