"""The one family of errors, and the record of what is wrong with the data."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


def visible(text: str) -> str:
    r"""Text without anything a terminal would obey: what cannot be seen is spelt out.

    Examples
    --------
    >>> visible("seal\x07 lost")
    'seal\\x07 lost'
    """
    if text.isprintable():
        return text
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode("ascii") for c in text)


@dataclass(frozen=True, kw_only=True, slots=True)
class Origin:
    """Where in the user's files a value was read.

    Built without arguments for data that were made in Python and have no file.
    """

    file: str = ""  # as the user would name it; for a workbook "book.xlsx, sheet curves"
    row: int | None = None  # 1 is the header line, as a text editor or a spreadsheet counts
    column: str | None = None  # the header of the column, or the key of a TOML table

    def __str__(self) -> str:
        parts = [self.file] if self.file else []
        if self.row is not None:
            parts.append(f"row {self.row}")
        if self.column is not None:
            kind = "key" if self.file.casefold().endswith(".toml") else "column"
            parts.append(f"{kind} {self.column}" if self.row is not None else self.column)
        return ", ".join(parts)


@dataclass(frozen=True, kw_only=True, slots=True)
class Problem:
    """One thing that is wrong with the data, and the way out."""

    origin: Origin
    found: str  # what stands there
    expected: str  # what should stand there
    remedy: str  # what to do

    def __str__(self) -> str:
        where = str(self.origin)
        text = f"found {self.found}; expected {self.expected}; {self.remedy}"
        return f"{where}: {text}" if where else text


class CornerwiseError(Exception):
    """Base of every error this package raises on purpose."""

    exit_code = 1


class UsageError(CornerwiseError, ValueError):
    """A call or a command line that cannot be carried out as given."""

    exit_code = 2


class DataRefused(CornerwiseError, ValueError):
    """The data cannot be read safely; carries every problem found.

    Parameters
    ----------
    problems : sequence of Problem
        At least one; all that were found in one go.
    """

    exit_code = 3

    def __init__(self, problems: Sequence[Problem]) -> None:
        self.problems = tuple(problems)
        count = len(self.problems)
        head = "1 problem" if count == 1 else f"{count} problems"
        super().__init__("\n".join([f"the data were refused: {head}", *map(str, self.problems)]))
