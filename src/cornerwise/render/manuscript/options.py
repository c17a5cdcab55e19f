"""What the user may choose of a table: columns, groups, digits."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from difflib import get_close_matches

from ...errors import UsageError
from ..rounding import DIGIT_RULES

GROUPINGS = ("none", "pair", "construct")


@dataclass(frozen=True, kw_only=True, slots=True)
class TableOptions:
    """Choices for the tables of a manuscript.

    Parameters
    ----------
    columns, construct_columns : sequence of str
        Keys of the columns of the coupling table and of the construct table, in the order they shall have;
        empty for the usual ones. ``docs/formats.md`` lists them.
    group : {"none", "pair", "construct"}
        How rows are grouped. By pair: cycles of the same residues together, and constructs a cycle at a
        time. By construct: cycles under each of their single mutants, and constructs by the number of their
        mutations.
    digits : {"two", "one-or-two"}
        Significant digits of an uncertainty: always two, or one or two by its leading digits.

    Raises
    ------
    UsageError
        If `group` or `digits` is none of these. Unknown columns are refused where the table is made.
    """

    columns: Sequence[str] = ()
    construct_columns: Sequence[str] = ()
    group: str = "none"
    digits: str = "two"

    def __post_init__(self) -> None:
        check_choice("grouping", self.group, GROUPINGS)
        check_choice("rule for digits", self.digits, DIGIT_RULES)


def check_choice(what: str, given: str, known: Collection[str]) -> None:
    """Refuse a word that is none of the known ones.

    Raises
    ------
    UsageError
        Names the nearest, or all of them.
    """
    if given in known:
        return
    near = get_close_matches(given, known, n=1)
    hint = f"did you mean {near[0]}?" if near else f"use {', '.join(known)}"
    raise UsageError(f"{what} {given!r} is not known; {hint}")
