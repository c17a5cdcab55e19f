"""The supplementary table: every construct's median voltage, total charge and activation free energy."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial

from ...result import ConstructRow, Result
from ..methods import counted as number_of
from ..ordering import by_strength, grouped
from .assembly import assembled
from .cells import counted, flag_letters, freedom, worded
from .document import Cell, ManuscriptTable
from .notes import construct_notes
from .options import TableOptions
from .recipes import ENERGY, LEVEL, Recipe, Shared, chosen, csv_columns, shared_by
from .words import Words, words

_Row = ConstructRow
USUAL = (
    "construct", "cells", "median", "charge", "charge_cells", "charge_source", "energy", "interval",
    "charge_ratio", "charge_verdict", "flags",
)  # fmt: skip


def _source(row: _Row, _: Shared) -> Cell:
    """How the charge was measured; a stated value's citation stands in the footnote."""
    return Cell(
        text=worded(row.charge_source.partition(":")[0]).text, values=worded(row.charge_source).values
    )


def _batches(row: _Row, _: Shared) -> Cell:
    return counted(max((units.batches for units in row.units), default=0) or None)


RECIPES: tuple[Recipe[_Row], ...] = (
    Recipe(
        key="construct", head="Construct", numeric=False,
        parts=csv_columns("constructs", "construct"),
        fill=lambda row, _: worded(row.construct),
    ),
    Recipe(
        key="mutations", head="Mutations", numeric=False,
        parts=csv_columns("constructs", "mutations"),
        fill=lambda row, _: worded("/".join(row.mutations) or None),
    ),
    Recipe(
        key="cells", head="*n*", parts=csv_columns("constructs", "cells"),
        fill=lambda row, _: counted(row.cells_used),
    ),
    Recipe(
        key="batches", head="*N*", parts=(("batches", "", "batches (donors, days) the cells come from"),),
        fill=_batches,
    ),
    Recipe(
        key="median", head="*V*~m~", unit="mV",
        parts=(
            *csv_columns("constructs", "median_mV"),
            (
                "median_uncertainty_mV", "mV",
                "standard uncertainty of the median: scatter of cells, and what was extrapolated",
            ),
        ),
        fill=lambda row, shared: shared.rounding.measured(row.median_mv, row.median_uncertainty_mv),
    ),
    Recipe(
        key="midpoint", head="*V*~½~", unit="mV",
        parts=csv_columns("midpoints", "midpoint_mV"),
        fill=lambda row, shared: shared.rounding.alone(row.midpoint_mv, row.median_uncertainty_mv),
    ),
    Recipe(
        key="charge", head="*Q*", unit="*e*~0~",
        parts=csv_columns("constructs", "charge_e0", "charge_sem_e0"),
        fill=lambda row, shared: shared.rounding.measured(row.charge_e0, row.charge_sem_e0),
    ),
    Recipe(
        key="charge_cells", head="*n*~Q~", parts=csv_columns("constructs", "charge_n"),
        fill=lambda row, _: counted(row.charge_n),
    ),
    Recipe(
        key="charge_source", head="Source of *Q*", numeric=False,
        parts=csv_columns("constructs", "charge_source"),
        fill=_source,
    ),
    Recipe(
        key="energy", head="Δ*G*", unit=ENERGY,
        parts=csv_columns("constructs", "energy", "std_uncertainty"),
        fill=lambda row, shared: shared.rounding.measured(row.energy, row.std_uncertainty),
    ),
    Recipe(
        key="dof", head="*ν*",
        parts=csv_columns("constructs", "dof"),
        fill=lambda row, _: freedom(row.dof),
    ),
    Recipe(
        key="interval", head=LEVEL, unit=ENERGY,
        parts=csv_columns("constructs", "low", "high"),
        fill=lambda row, shared: shared.rounding.interval((row.low, row.high), row.std_uncertainty),
    ),
    Recipe(
        key="charge_ratio", head="*Q*/*Q*~wt~",
        parts=csv_columns("constructs", "charge_ratio", "charge_ratio_low", "charge_ratio_high"),
        fill=lambda row, shared: shared.rounding.with_limits(
            row.charge_ratio, (row.charge_ratio_low, row.charge_ratio_high)
        ),
    ),
    Recipe(
        key="charge_verdict", head="Charge", numeric=False,
        parts=csv_columns("constructs", "charge_verdict"),
        fill=lambda row, _: worded(row.charge_verdict),
    ),
    Recipe(
        key="flags", head="Flags", numeric=False,
        parts=(("flags", "", "doubts about the construct or its cells, in words"),),
        fill=lambda row, shared: flag_letters(row.flags, shared.marks),
    ),
)  # fmt: skip


def construct_table(result: Result, options: TableOptions) -> ManuscriptTable:
    """Form the supplementary table of constructs.

    Parameters
    ----------
    result : Result
        In the unit the table shall have.
    options : TableOptions
        Columns, grouping and digits.

    Raises
    ------
    UsageError
        If a column is unknown.
    """
    recipes = chosen(RECIPES, options.construct_columns, USUAL, "construct table")
    codes = (code for row in result.constructs for code in row.flags)
    return assembled(
        recipes,
        _groups(result, options.group),
        shared_by(result, options.digits, codes),
        name="constructs",
        number="S1",
        title=_title(result),
        notes=partial(construct_notes, result),
        about=[row.construct for row in result.constructs],
    )


def _title(result: Result) -> Words:
    return words(
        "Median voltage, total gating charge and activation free energy of {count}.{about}",
        count=number_of(len(result.constructs), "construct"),
        about=f" {result.settings.title}." if result.settings.title else "",
    )


_BY_MUTATIONS = ("Wild type", "Single mutants", "Double mutants", "Triple mutants")


def _groups(result: Result, group: str) -> list[tuple[str, Sequence[_Row]]]:
    if group == "pair":
        constructs = {row.construct: row for row in result.constructs}
        return [
            (row.cycle, [constructs[label] for label, _ in row.corners])
            for row in by_strength(result.interactions)
        ]
    if group == "construct":
        return list(grouped((_number_of_mutations(row), row) for row in result.constructs).items())
    return [("", tuple(result.constructs))]


def _number_of_mutations(row: _Row) -> str:
    number = len(row.mutations)
    return _BY_MUTATIONS[number] if number < len(_BY_MUTATIONS) else f"Mutants of order {number}"
