"""Where every fault in the data is gathered, so that all are told in one go."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from difflib import get_close_matches

from ..errors import Origin, Problem

_SHOWN_LENGTH = 60
_SHORTEST_STEM = 3  # letters that may stand for the one name they begin


class Findings:
    """The faults found so far, and the order in which the files were taken up."""

    def __init__(self) -> None:
        self._problems: list[Problem] = []
        self._files: dict[str, int] = {}
        self._columns: dict[tuple[str, str | None], int] = {}

    def __bool__(self) -> bool:
        return bool(self._problems)

    def take_up(self, file: str) -> None:
        """Note that `file` comes next in the listing."""
        self._files.setdefault(file, len(self._files))

    def take_columns(self, file: str, header: Sequence[str]) -> None:
        """Note the order of the columns of a table."""
        for place, column in enumerate(header):
            self._columns.setdefault((file, column), place)

    def add(self, origin: Origin, *, found: str, expected: str, remedy: str) -> None:
        """Add one fault."""
        self._problems.append(Problem(origin=origin, found=found, expected=expected, remedy=remedy))

    def in_order(self) -> tuple[Problem, ...]:
        """Return all faults by file, row and column; those of one place in the order they were found."""
        return tuple(sorted(self._problems, key=lambda problem: self._place(problem.origin)))

    def _place(self, origin: Origin) -> tuple[int, int, int]:
        column = self._columns.get((origin.file, origin.column), -1)
        return self._files.get(origin.file, -1), origin.row or 0, column


def shown(text: str) -> str:
    """`text` in quotes, cut when long, with invisible characters spelt out."""
    if not text.strip():
        return "nothing"
    cut = text if len(text) <= _SHOWN_LENGTH else text[: _SHOWN_LENGTH - 3] + "..."
    return repr(cut)


def nearest(word: str, known: Iterable[str]) -> str | None:
    """Return the one of `known` closest in spelling, or None if none is close."""
    by_folded = {name.casefold(): name for name in known}
    folded = word.strip().casefold()
    found = get_close_matches(folded, by_folded, n=1, cutoff=0.7)
    if not found and len(folded) >= _SHORTEST_STEM:
        found = [name for name in by_folded if name.startswith(folded)]
    return by_folded[found[0]] if len(found) == 1 else None


def listing(words: Iterable[str]) -> str:
    """`words` joined for a sentence: a, b or c."""
    *head, last = words
    return f"{', '.join(head)} or {last}" if head else last
