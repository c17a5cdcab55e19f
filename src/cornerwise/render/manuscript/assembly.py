"""A table put together from its recipes, its rows and its footnotes."""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterable, Sequence

from .document import Group, ManuscriptTable, Note
from .flag_words import flag_notes
from .notes import dash_note
from .recipes import Recipe, RowT, Shared
from .words import Words, printable

GroupedRows = Iterable[tuple[str, Sequence[RowT]]]  # head of each group and its rows


def assembled(
    recipes: Sequence[Recipe[RowT]],
    rows: GroupedRows[RowT],
    shared: Shared,
    *,
    name: str,
    number: str,
    title: Words,
    notes: Callable[[Collection[str]], Iterable[Note]],
    about: Iterable[str],
) -> ManuscriptTable:
    """Make a table.

    Parameters
    ----------
    recipes : sequence of Recipe
        Its columns.
    rows : iterable of (str, sequence)
        Its groups; a head is empty where there are none.
    shared : Shared
        What fields need to know beside their row.
    name, number, title : str, str, Words
        Of the table.
    notes : callable
        Gives the footnotes from the keys of the columns.
    about : iterable of str
        Constructs and cycles whose flags are explained.
    """
    keys = {recipe.key for recipe in recipes}
    groups = tuple(
        Group(
            head=printable(head),
            rows=tuple(tuple(recipe.fill(row, shared) for recipe in recipes) for row in own),
        )
        for head, own in rows
    )
    flags = flag_notes(shared.flags, shared.marks, about) if "flags" in keys else []
    return ManuscriptTable(
        name=name,
        number=number,
        title=title,
        columns=tuple(recipe.column(shared.settings) for recipe in recipes),
        groups=groups,
        notes=(*notes(keys), *dash_note(groups), *flags),
    )
