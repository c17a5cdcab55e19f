"""Where every fault in the data is gathered, so that all are told in one go."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Sequence
from dataclasses import replace
from difflib import get_close_matches
from itertools import islice

from ..errors import Origin, Problem, visible

MOST_LISTED = 1000  # faults of one file that are told one by one

_SHOWN_LENGTH = 60
_LONGEST_TEXT = 2000  # letters of a part of a fault
_LONGEST_HEADER = 200
_SHORTEST_STEM = 3  # letters that may stand for the one name they begin
_LONGEST_WORD = 100  # letters; nothing longer is a misspelt name
_MOST_NAMES = 300  # among which a misspelt one is looked for


class Findings:
    """The faults found so far, and the order in which the files were taken up."""

    def __init__(self) -> None:
        self._problems: list[Problem] = []
        self._files: dict[str, int] = {}
        self._columns: dict[tuple[str, str | None], int] = {}
        self._count: Counter[str] = Counter()

    def __bool__(self) -> bool:
        return bool(self._problems)

    def take_up(self, file: str) -> None:
        """Note that `file` comes next in the listing."""
        self._files.setdefault(file, len(self._files))

    def take_columns(self, file: str, header: Sequence[str]) -> None:
        """Note the order of the columns of a table."""
        for place, column in enumerate(header):
            self._columns.setdefault((file, _shortened(column, _LONGEST_HEADER)), place)

    def add_once(self, origin: Origin, *, found: str, expected: str, remedy: str) -> None:
        """Add one fault, unless the very same was added before."""
        known = (one for one in self._problems if one.origin == origin)
        if not any((one.found, one.expected) == (found, expected) for one in known):
            self.add(origin, found=found, expected=expected, remedy=remedy)

    def add(self, origin: Origin, *, found: str, expected: str, remedy: str) -> None:
        """Add one fault; of those of one file beyond `MOST_LISTED` only the number is kept."""
        self._count[origin.file] += 1
        if self._count[origin.file] <= MOST_LISTED:
            place = replace(
                origin,
                file=visible(origin.file),
                column=origin.column and _shortened(origin.column, _LONGEST_HEADER),
            )
            words = {"found": found, "expected": expected, "remedy": remedy}
            cut = {name: _shortened(text, _LONGEST_TEXT) for name, text in words.items()}
            self._problems.append(Problem(origin=place, **cut))

    def in_order(self) -> tuple[Problem, ...]:
        """Return all faults by file, row and column; those of one place in the order they were found."""
        listed = sorted(self._problems, key=lambda problem: self._place(problem.origin))
        return (
            *listed,
            *(_further(file, n - MOST_LISTED) for file, n in self._count.items() if n > MOST_LISTED),
        )

    def _place(self, origin: Origin) -> tuple[int, int, int]:
        column = self._columns.get((origin.file, origin.column), -1)
        return self._files.get(origin.file, -1), origin.row or 0, column


def _further(file: str, number: int) -> Problem:
    return Problem(
        origin=Origin(file=visible(file)), found=f"{number} more such problems", expected="none",
        remedy="mend those above first; these may have the same cause",
    )  # fmt: skip


def _shortened(text: str, most: int) -> str:
    """`text` for a message: cut when long, nothing in it invisible."""
    return visible(text if len(text) <= most else f"{text[: most - 3]}...")


def shown(text: str) -> str:
    """`text` in quotes, cut when long, with invisible characters spelt out."""
    if not text.strip():
        return "nothing"
    cut = text if len(text) <= _SHOWN_LENGTH else text[: _SHOWN_LENGTH - 3] + "..."
    return repr(cut)


def nearest(word: str, known: Iterable[str]) -> str | None:
    """Return the one of `known` closest in spelling, or None if none is close."""
    if len(word) > _LONGEST_WORD:
        return None
    by_folded = {name.casefold(): name for name in islice(known, _MOST_NAMES)}
    folded = word.strip().casefold()
    found = get_close_matches(folded, by_folded, n=1, cutoff=0.7)
    if not found and len(folded) >= _SHORTEST_STEM:
        found = [name for name in by_folded if name.startswith(folded)]
    return by_folded[found[0]] if len(found) == 1 else None


def refuse_many(found: str, most: int, findings: Findings) -> None:
    """Refuse more of something than a campaign can have."""
    findings.add(
        Origin(file="campaign"), found=found, expected=f"at most {most} in one campaign",
        remedy="look whether labels stand in the right column, or divide the campaign",
    )  # fmt: skip


def listing(words: Iterable[str]) -> str:
    """`words` joined for a sentence: a, b or c."""
    *head, last = words
    return f"{', '.join(head)} or {last}" if head else last
