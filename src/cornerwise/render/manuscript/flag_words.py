"""What each flag says, short enough for a footnote."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence

from ...flags import FLAG_CODES, Flag, FlagCode
from ...measurements import FEWEST_CELLS
from .document import Note
from .words import words

FLAG_WORDS: Mapping[FlagCode, str] = {
    "unsaturated-low": "curves begin above their lower plateau and were extrapolated",
    "unsaturated-high": "curves end below their upper plateau and were extrapolated",
    "sloping-plateau": "plateaus slope, as residual linear capacity makes them",
    "not-monotonic": "charge falls back where it should rise",
    "coarse-steps": "too few voltage steps in the rise of the curve",
    "noisy": "points scatter widely about the curve",
    "area-disagrees": "the plain area between the plateaus gives another median",
    "midpoint-misleads": "the curve is not symmetric, so midpoints would give another energy",
    "few-cells": f"a mean rests on fewer than {FEWEST_CELLS} cells",
    "single-batch": "all cells of a construct come from one batch",
    "charge-shift": "total charge differs from the wild type's",
    "charge-nonadditive": "total charges do not add up over the cycle, so the energy depends on the voltage",
    "charge-assumed": "total charge was assumed, not measured",
    "charge-methods-differ": "two methods of measuring total charge disagree",
    "charge-lower-bound": "total charge is a lower bound",
    "charge-implausible": "total charge is outside what is known of voltage-gated channels",
    "mixed-ranges": "corners were recorded over different ranges of voltage",
    "mixed-protocol": "corners were recorded with different protocols",
    "outlying-cell": "a cell lies far from the others and was kept",
}
_MOST_NAMED = 6


def flag_notes(flags: Sequence[Flag], marked: Mapping[str, str], about: Iterable[str]) -> list[Note]:
    """Footnote of each flag: short words, and the constructs and cycles it was raised by.

    Parameters
    ----------
    flags : sequence of Flag
        All of a result.
    marked : mapping of str to str
        What `ordering.flag_marks` returned for the codes in the table.
    about : iterable of str
        Labels of the constructs and names of the cycles that the table is about.
    """
    wanted, notes = set(about), []
    for code in (code for code in FLAG_CODES if code in marked):
        subjects = list(dict.fromkeys(f.construct or f.subject for f in flags if f.code == code))
        named = _named([subject for subject in subjects if subject in wanted])
        text = words("{code}: {what}{named}.", code=code, what=FLAG_WORDS[code], named=named)
        notes.append(Note(mark=marked[code], text=text))
    return notes


def _named(subjects: Sequence[str]) -> str:
    if not subjects:
        return ""
    more = len(subjects) - _MOST_NAMED
    rest = f" and {more} more" if more > 0 else ""
    return f" ({', '.join(subjects[:_MOST_NAMED])}{rest})"
