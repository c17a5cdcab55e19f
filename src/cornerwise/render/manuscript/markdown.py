"""A table as Markdown: a pipe table that reads well as it stands, every label escaped."""

from __future__ import annotations

import re
from collections.abc import Sequence

from .document import Column, ManuscriptTable
from .words import Run, Words

_SPECIAL = re.compile(r"([\\`*_\[\]|~^$#@]|(?<=-)-)")
_ENTITIES = {"&": "&amp;", "<": "&lt;", ">": "&gt;"}
_FACES = {
    "plain": "{}",
    "italic": "*{}*",
    "bold": "**{}**",
    "subscript": "<sub>{}</sub>",
    "superscript": "<sup>{}</sup>",
}


def escaped(text: str) -> str:
    """Text that a reader of Markdown shows as it is."""
    safe = "".join(_ENTITIES.get(letter, letter) for letter in text)
    return _SPECIAL.sub(r"\\\1", safe)


def markdown_text(table: ManuscriptTable) -> str:
    """Title, pipe table and footnotes.

    Parameters
    ----------
    table : ManuscriptTable
        Rows of a group follow a row with its head in bold.
    """
    head = [_head(column) for column in table.columns]
    rows = []
    for group in table.groups:
        if group.head:
            rows.append([f"**{escaped(group.head)}**", *[""] * (len(head) - 1)])
        rows += [[escaped(cell.text) for cell in row] for row in group.rows]
    numeric = [column.numeric for column in table.columns]
    notes = [_runs(text) for text in table.paragraphs()]
    title = f"**Table {table.number}.** {_runs(table.title)}"
    return "\n\n".join([title, _pipes(head, rows, numeric), *notes]) + "\n"


def _runs(runs: Words) -> str:
    return "".join(_FACES[run.face].format(escaped(run.text)) for run in runs)


def _head(column: Column) -> str:
    unit = (Run(" ("), *column.unit, Run(")")) if column.unit else ()
    return _runs((*column.head, *unit))


def _pipes(head: Sequence[str], rows: Sequence[Sequence[str]], numeric: Sequence[bool]) -> str:
    widths = [max(3, *(len(line[place]) for line in [head, *rows])) for place in range(len(head))]

    def line(fields: Sequence[str]) -> str:
        padded = [
            field.rjust(width) if right else field.ljust(width)
            for field, width, right in zip(fields, widths, numeric, strict=True)
        ]
        return f"| {' | '.join(padded)} |"

    rule = [
        "-" * (width - 1) + ":" if right else "-" * width
        for width, right in zip(widths, numeric, strict=True)
    ]
    return "\n".join([line(head), line(rule), *map(line, rows)])
