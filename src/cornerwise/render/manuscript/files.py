"""The files of the manuscript's tables."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from ...result import Result
from .constructs import construct_table
from .couplings import coupling_table
from .document import ManuscriptTable
from .latex import latex_text
from .markdown import markdown_text
from .options import TableOptions
from .web import html_text
from .word import word_file
from .workbook import workbook_file

WRITERS: Mapping[str, Callable[[ManuscriptTable], str | bytes]] = {
    "docx": word_file,
    "tex": latex_text,
    "md": markdown_text,
    "html": html_text,
}


def manuscript_tables(result: Result, options: TableOptions | None = None) -> tuple[ManuscriptTable, ...]:
    """The main coupling table and the supplementary construct table.

    Parameters
    ----------
    result : Result
        In the unit the tables shall have; see `cornerwise.in_unit`.
    options : TableOptions, optional
        Columns, grouping and digits.

    Raises
    ------
    UsageError
        If a column is unknown.
    """
    chosen = options or TableOptions()
    return coupling_table(result, chosen), construct_table(result, chosen)


def table_files(result: Result, options: TableOptions | None = None) -> dict[str, str | bytes]:
    """Every table in every format.

    Parameters
    ----------
    result : Result
        As for `manuscript_tables`.
    options : TableOptions, optional
        Columns, grouping and digits.

    Returns
    -------
    dict of str to str or bytes
        ``tables/couplings.docx``, ``.tex``, ``.md``, ``.html``, the same of ``tables/constructs``, and
        ``tables/tables.xlsx``. The same result gives the same bytes.
    """
    tables = manuscript_tables(result, options)
    files: dict[str, str | bytes] = {
        f"tables/{table.name}.{ending}": write(table) for table in tables for ending, write in WRITERS.items()
    }
    return {**files, "tables/tables.xlsx": workbook_file(tables)}
