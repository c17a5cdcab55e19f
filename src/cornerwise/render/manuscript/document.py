"""What every writer writes: a table with its heads, groups, rows and footnotes, free of any format."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from ...tables import Value
from .words import Run, Words, joined

MISSING = "–"  # what is printed where a field does not apply


@dataclass(frozen=True, kw_only=True, slots=True)
class Part:
    """One value behind a column: a column of its own where values are typed."""

    name: str  # as in the CSV files where it is there too
    unit: str
    meaning: str


@dataclass(frozen=True, kw_only=True, slots=True)
class Column:
    """One column as it is printed."""

    key: str  # what it is chosen by
    head: Words
    unit: Words  # empty where there is none
    parts: tuple[Part, ...]
    numeric: bool


@dataclass(frozen=True, kw_only=True, slots=True)
class Cell:
    """One field: what is printed and the full-precision values it was printed from."""

    text: str
    values: tuple[Value, ...]  # one a part of its column
    decimals: int | None = None  # shown of every number; None where they follow the number


@dataclass(frozen=True, kw_only=True, slots=True)
class Group:
    """Rows that belong together; a table without groups has one without a head."""

    head: str
    rows: tuple[tuple[Cell, ...], ...]


@dataclass(frozen=True, kw_only=True, slots=True)
class Note:
    """A footnote; `mark` is the letter that stands in the table, empty for a paragraph about all of it."""

    mark: str
    text: Words


@dataclass(frozen=True, kw_only=True, slots=True)
class ManuscriptTable:
    """One table of a manuscript."""

    name: str  # of its files and of its sheet
    number: str  # "1", or "S1" for supplementary material
    title: Words
    columns: tuple[Column, ...]
    groups: tuple[Group, ...]
    notes: tuple[Note, ...]

    @property
    def grouped(self) -> bool:
        """Whether any group has a head."""
        return any(group.head for group in self.groups)

    def rows(self) -> Iterator[tuple[str, tuple[Cell, ...]]]:
        """Every row with the head of its group."""
        for group in self.groups:
            for row in group.rows:
                yield group.head, row

    def paragraphs(self) -> tuple[Words, ...]:
        """Footnotes as they are printed: those with a mark in one paragraph, each after its letter."""
        marked = [(Run(note.mark, "bold"), Run("\u00a0"), *note.text) for note in self.notes if note.mark]
        whole = tuple(note.text for note in self.notes if not note.mark)
        return (*whole, joined(marked)) if marked else whole
