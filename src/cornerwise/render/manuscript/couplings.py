"""The main table: every cycle's interaction energy, its uncertainty and its verdicts."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from functools import partial

from ...mutations import named_mutation
from ...result import InteractionRow, Result
from ..methods import counted as number_of
from ..ordering import by_strength, grouped
from .assembly import assembled
from .cells import (
    Limits,
    counted,
    flag_letters,
    freedom,
    from_to,
    probability,
    to_decimals,
    worded,
)  # fmt: skip
from .document import MISSING, Cell, ManuscriptTable
from .notes import coupling_notes
from .options import TableOptions
from .recipes import ENERGY, LEVEL, Recipe, Shared, chosen, csv_columns, shared_by
from .words import Words, words

_Row = InteractionRow
_Fill = Callable[[_Row, Shared], Cell]
USUAL = (
    "cycle", "interaction", "interval", "p_adjusted", "favours", "verdict", "shortcut_verdict", "cells",
    "batches", "flags",
)  # fmt: skip


def _limits(name: str, meaning: str) -> tuple[tuple[str, str, str], ...]:
    return (
        (f"{name}low", ENERGY, f"lower limit of {meaning}"),
        (f"{name}high", ENERGY, f"upper limit of {meaning}"),
    )


def _interval(limits: Callable[[_Row], Limits]) -> _Fill:
    return lambda row, shared: shared.rounding.interval(limits(row), row.std_uncertainty)


def _alone(value: Callable[[_Row], float | None]) -> _Fill:
    return lambda row, shared: shared.rounding.alone(value(row), row.std_uncertainty)


def _cells(row: _Row, shared: Shared) -> Cell:
    numbers = [shared.constructs[label].cells_used for label, _ in row.corners]
    return from_to(min(numbers), max(numbers))


def batches_of(row: _Row) -> int:
    """Batches that a cycle's cells come from; 0 where none is stated."""
    return max((units.batches for units in row.units), default=0)


def _flags(row: _Row, shared: Shared) -> Cell:
    return flag_letters(row.flags, shared.marks)


def _rank(row: _Row, _: Shared) -> Cell:
    if row.rank is None or row.rank_low is None or row.rank_high is None:
        return Cell(text=MISSING, values=(None, None, None))
    between = from_to(row.rank_low, row.rank_high)
    return Cell(text=f"{row.rank} ({between.text})", values=(row.rank, *between.values), decimals=0)


RECIPES: tuple[Recipe[_Row], ...] = (
    Recipe(
        key="cycle", head="Cycle", numeric=False,
        parts=csv_columns("interactions", "cycle"),
        fill=lambda row, _: worded(row.cycle),
    ),
    Recipe(
        key="order", head="Order", parts=csv_columns("interactions", "order"),
        fill=lambda row, _: counted(row.order),
    ),
    Recipe(
        key="mutations", head="Mutations", numeric=False,
        parts=csv_columns("interactions", "mutations"),
        fill=lambda row, _: worded("/".join(row.mutations)),
    ),
    Recipe(
        key="native_pair", head="Native pair", numeric=False,
        parts=csv_columns("ranking", "opposite_charges"),
        fill=lambda row, _: worded(row.opposite_charges),
    ),
    Recipe(
        key="distance", head="Distance", unit="Å",
        parts=csv_columns("ranking", "distance_A"),
        fill=lambda row, _: to_decimals(row.distance_angstrom, 1),
    ),
    Recipe(
        key="interaction", head="*I* ± *u*", unit=ENERGY,
        parts=csv_columns("interactions", "interaction", "std_uncertainty"),
        fill=lambda row, shared: shared.rounding.measured(row.interaction, row.std_uncertainty),
    ),
    Recipe(
        key="dof", head="*ν*", parts=csv_columns("interactions", "dof"),
        fill=lambda row, _: freedom(row.dof),
    ),
    Recipe(
        key="interval", head=LEVEL, unit=ENERGY, parts=csv_columns("interactions", "low", "high"),
        fill=_interval(lambda row: (row.low, row.high)),
    ),
    Recipe(
        key="bootstrap", head="Bootstrap interval", unit=ENERGY,
        parts=csv_columns("interactions", "boot_low", "boot_high"),
        fill=_interval(lambda row: (row.boot_low, row.boot_high)),
    ),
    Recipe(
        key="simultaneous", head="Interval for all cycles", unit=ENERGY,
        parts=_limits("simultaneous_", "the interval of I that holds all cycles at once"),
        fill=_interval(lambda row: (row.simultaneous_low, row.simultaneous_high)),
    ),
    Recipe(
        key="p_value", head="*p*", parts=csv_columns("interactions", "p_value"),
        fill=lambda row, _: probability(row.p_value),
    ),
    Recipe(
        key="p_adjusted", head="*p*~adj~",
        parts=csv_columns("interactions", "p_adjusted"),
        fill=lambda row, _: probability(row.p_adjusted),
    ),
    Recipe(
        key="favours", head="Favours", numeric=False,
        parts=csv_columns("interactions", "favours"),
        fill=lambda row, _: worded(row.favours),
    ),
    Recipe(
        key="verdict", head="Verdict", numeric=False,
        parts=csv_columns("interactions", "interaction_verdict"),
        fill=lambda row, _: worded(row.interaction_verdict),
    ),
    Recipe(
        key="rank", head="Rank",
        parts=csv_columns("interactions", "rank", "rank_low", "rank_high"),
        fill=_rank,
    ),
    Recipe(
        key="shrunken", head="Shrunken *I*", unit=ENERGY,
        parts=csv_columns("ranking", "shrunken"),
        fill=_alone(lambda row: row.shrunken),
    ),
    Recipe(
        key="shortcut", head="From *V*~m~ alone", unit=ENERGY,
        parts=csv_columns("interactions", "shortcut"),
        fill=_alone(lambda row: row.shortcut),
    ),
    Recipe(
        key="shortcut_bias", head="Shortcut's error", unit=ENERGY,
        parts=csv_columns("interactions", "shortcut_bias", "shortcut_bias_low", "shortcut_bias_high"),
        fill=lambda row, shared: shared.rounding.with_limits(
            row.shortcut_bias, (row.shortcut_bias_low, row.shortcut_bias_high)
        ),
    ),
    Recipe(
        key="shortcut_verdict", head="Shortcut", numeric=False,
        parts=csv_columns("interactions", "shortcut_verdict"),
        fill=lambda row, _: worded(row.shortcut_verdict),
    ),
    Recipe(
        key="charge_interaction", head="*J*", unit="*e*~0~",
        parts=csv_columns(
            "interactions", "charge_interaction_e0", "charge_interaction_low", "charge_interaction_high"
        ),
        fill=lambda row, shared: shared.rounding.with_limits(
            row.charge_interaction_e0, (row.charge_interaction_low, row.charge_interaction_high)
        ),
    ),
    Recipe(
        key="cells", head="*n*",
        parts=(
            ("cells_fewest", "", "cells behind the median voltage of the corner that has fewest"),
            ("cells_most", "", "cells behind the median voltage of the corner that has most"),
        ),
        fill=_cells,
    ),
    Recipe(
        key="batches", head="*N*", parts=(("batches", "", "batches (donors, days) the cells come from"),),
        fill=lambda row, _: counted(batches_of(row) or None),
    ),
    Recipe(
        key="flags", head="Flags", numeric=False,
        parts=(("flags", "", "doubts about the cycle, its constructs or their cells, in words"),),
        fill=_flags,
    ),
)  # fmt: skip


def coupling_table(result: Result, options: TableOptions) -> ManuscriptTable:
    """Form the main coupling table.

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
    stated = any(map(batches_of, result.interactions))
    usual = [key for key in USUAL if stated or key != "batches"]
    recipes = chosen(RECIPES, options.columns, usual, "coupling table")
    rows = by_strength(result.interactions)
    return assembled(
        recipes,
        _groups(rows, options.group),
        shared_by(result, options.digits, (code for row in rows for code in row.flags)),
        name="couplings",
        number="1",
        title=_title(result, options.group),
        notes=partial(coupling_notes, result),
        about=[name for row in rows for name in (row.cycle, *(label for label, _ in row.corners))],
    )


_ORDERS = {"none": ", strongest first", "pair": ", by the residues", "construct": ", by single mutant"}


def _title(result: Result, group: str) -> Words:
    about = f" {result.settings.title}." if result.settings.title else ""
    return words(
        "Interaction (coupling) energies *I* of {count}{order}.{about}",
        count=number_of(len(result.interactions), "mutant cycle"),
        order=_ORDERS[group] if len(result.interactions) > 1 else "",
        about=about,
    )


def _groups(rows: Sequence[_Row], group: str) -> list[tuple[str, Sequence[_Row]]]:
    if group == "pair":
        by_residues = grouped((_residues(row), row) for row in rows)
        return sorted(by_residues.items(), key=lambda item: _place(item[1][0]))
    if group == "construct":
        pairs = [(label, row) for row in rows for label in row.mutations]
        singles = grouped(pairs)
        return sorted(singles.items(), key=lambda item: named_mutation(item[0]).residue_order)
    return [("", rows)]


def _residues(row: _Row) -> str:
    """Native residues that a cycle mutates, such as ``E154 and R226``."""
    found = [named_mutation(text) for text in row.mutations]
    named = [f"{one.native}{one.position}" if one.position else one.text for one in found]
    return f"{', '.join(named[:-1])} and {named[-1]}"


def _place(row: _Row) -> list[tuple[bool, int, str]]:
    return [named_mutation(text).residue_order for text in row.mutations]
