"""How the columns of a table are made, and which are chosen."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Generic, TypeVar

from ...campaign import Settings
from ...columns import ENERGY as OF_THE_ROW
from ...columns import OUTPUT_TABLES
from ...flags import Flag
from ...result import ConstructRow, Result
from ..legend import interval_words
from ..ordering import flag_marks
from .cells import Rounding
from .document import Cell, Column, Part
from .options import check_choice
from .words import words

RowT = TypeVar("RowT")
ENERGY, LEVEL = "{energy}", "{level}"  # stand for the energy unit and the level of the interval


_UNITS = {OF_THE_ROW: ENERGY, "1": ""}


def csv_columns(table: str, *names: str) -> tuple[tuple[str, str, str], ...]:
    """Name, unit and meaning of values that are columns of a CSV file too, as they are told there."""
    columns = {column.name: column for column in OUTPUT_TABLES[table].columns}
    return tuple(
        (name, _UNITS.get(columns[name].unit, columns[name].unit), columns[name].explained) for name in names
    )


@dataclass(frozen=True, kw_only=True, slots=True)
class Shared:
    """What fields need to know beside their row."""

    settings: Settings
    rounding: Rounding
    flags: tuple[Flag, ...]  # all of the result
    marks: Mapping[str, str]  # letter of each flag that occurs
    constructs: Mapping[str, ConstructRow]


def shared_by(result: Result, digits: str, codes: Iterable[str]) -> Shared:
    """What the fields of one table need.

    Parameters
    ----------
    result : Result
        In the unit of the table.
    digits : str
        Rule for the digits of an uncertainty.
    codes : iterable of str
        Flags that occur in the table's rows.
    """
    return Shared(
        settings=result.settings,
        rounding=Rounding(digits),
        flags=result.flags,
        marks=flag_marks(codes),
        constructs={row.construct: row for row in result.constructs},
    )


@dataclass(frozen=True, kw_only=True, slots=True)
class Recipe(Generic[RowT]):
    """How one column is made from a row."""

    key: str
    head: str  # in the markup of `words`; ENERGY and LEVEL are filled in
    unit: str = ""
    parts: tuple[tuple[str, str, str], ...]  # name, unit and meaning of each value
    numeric: bool = True
    fill: Callable[[RowT, Shared], Cell]

    def column(self, settings: Settings) -> Column:
        """The column's head in a campaign's unit and level."""

        def filled(text: str) -> str:
            return text.replace(ENERGY, settings.energy_unit).replace(LEVEL, interval_words(settings))

        return Column(
            key=self.key,
            head=words(filled(self.head)),
            unit=words(filled(self.unit)) if self.unit else (),
            parts=tuple(Part(name=n, unit=filled(u), meaning=filled(m)) for n, u, m in self.parts),
            numeric=self.numeric,
        )


def chosen(
    recipes: Sequence[Recipe[RowT]], keys: Sequence[str], usual: Sequence[str], table: str
) -> list[Recipe[RowT]]:
    """Recipes of the columns that were asked for, or of the usual ones.

    Raises
    ------
    UsageError
        If a key is unknown or `keys` has one twice.
    """
    known = {recipe.key: recipe for recipe in recipes}
    for key in keys:
        check_choice(f"column of the {table}", key, known)
    return [known[key] for key in dict.fromkeys(keys or usual)]
