"""The files of a plan: its tables and its figure."""

from __future__ import annotations

from ..planning.plan import Plan
from ..tables import Row, Table
from .figures.files import drawn_files
from .figures.plan import plan_sheets
from .files import csv_text
from .machine import plan_json


def plan_files(plan: Plan) -> dict[str, str | bytes]:
    """Name and contents of every file of a plan.

    Parameters
    ----------
    plan : Plan
        What `cornerwise.plan` returned; its figure goes through all numbers of cells it tells of.

    Returns
    -------
    dict of str to str or bytes
        ``plan.json``, ``plan.csv``, ``needs.csv`` and ``split.csv`` where they were asked for, and
        ``figures/plan-85mm.svg``, ... in both widths and every format.
    """
    some: dict[str, Table[Row]] = {"needs.csv": plan.needs, "split.csv": plan.splits}
    return {
        "plan.json": plan_json(plan),
        "plan.csv": csv_text(plan.outlooks),
        **{name: csv_text(table) for name, table in some.items() if len(table)},
        **drawn_files(plan_sheets(plan)),
    }
