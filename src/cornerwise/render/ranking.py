"""The ranking as a person reads it."""

from __future__ import annotations

from typing import IO

from rich.text import Text

from ..ranking import FEWEST_TO_SHRINK
from ..result import RankRow, Result
from .legend import (
    CAUTION,
    distance_sources,
    interval_words,
    percent,
    settings_sentences,
    sign_sentences,
    unit_phrase,
)
from .rounding import decimals_for, number, span
from .terminal import NARROW_NAME, WIDE, broken, plain_grid, print_lines, screen_on, show_grid

_WORDS = ("cycle", "verdict", "native pair")  # columns of words
_LEFT_OUT = ("at least", "shrunken")  # on a screen too narrow for all columns
_ORDERS = {
    "estimate": "by the size of the estimate",
    "lower bound": "by the lower limit of the absolute size",
}


def print_ranking(result: Result, stream: IO[str]) -> None:
    """Cycles in order of strength, with what can be said about that order.

    Parameters
    ----------
    result : Result
        What `cornerwise.couple` returned.
    stream : text stream
        At a terminal the table is fitted to its width; elsewhere the text is plain and never cut.
    """
    settings, level = result.settings, percent(result.settings.confidence)
    uncertainty = {row.cycle: row.std_uncertainty for row in result.interactions}
    headers = ("rank", "cycle", "I", interval_words(settings), "at least", "ranks", f"first {settings.first}",
               "shrunken", "verdict", "native pair")  # fmt: skip
    legend = [
        f"I, interval, at least and shrunken in {unit_phrase(settings)}; ranked {_ORDERS[settings.rank_by]}",
        "at least: lower limit of the absolute size; 0 where the interval includes 0",
        f"ranks: those the data allow at {level}; first {settings.first}: probability of being among them",
        "shrunken: the strongest of many tend to exaggerate; this is what to expect of a repetition; it "
        f"takes {FEWEST_TO_SHRINK} cycles",
        "native pair: opposite charges make a candidate salt bridge and no more",
        *_distance_legend(result),
        *sign_sentences({row.order for row in result.interactions}),
        CAUTION,
        *(f"Note: {note}" for note in result.notes),
    ]
    with screen_on(stream) as screen:
        narrow = screen.width < WIDE
        left_out = _LEFT_OUT if narrow else ()
        shown = [(header, header not in _WORDS) for header in headers if header not in left_out]
        grid = plain_grid(shown, folding=("native pair",))
        for row in result.ranking:
            line = dict(zip(headers, _line(row, uncertainty[row.cycle]), strict=True))
            line["cycle"] = broken(row.cycle, NARROW_NAME) if narrow else row.cycle
            grid.add_row(*(Text(line[header]) for header, _ in shown))
        if narrow:
            legend.insert(1, f"{' and '.join(_LEFT_OUT)}: shown in a wider terminal and in a pipe")
        show_grid(screen, grid)
        screen.print()
        print_lines(screen, legend)
        screen.print()
        print_lines(screen, settings_sentences(settings))


def _distance_legend(result: Result) -> list[str]:
    """What the distances are, where there are any."""
    sources = distance_sources(result.ranking)
    if not sources:
        return []
    charged = any(row.charged_distance_angstrom is not None for row in result.ranking)
    words = ["distance in angstrom between the side chains of the native pair"]
    words += ["in brackets between charged atoms"] if charged else []
    return ["; ".join(words), *sources]


def _line(row: RankRow, uncertainty: float | None) -> list[str]:
    decimals = decimals_for(uncertainty)
    native: list[str] = [] if row.opposite_charges is None else [row.opposite_charges]
    if row.distance_angstrom is not None:
        charged = row.charged_distance_angstrom
        beside = "" if charged is None else f" ({charged:.1f} A)"
        native.append(f"{row.distance_angstrom:.1f} A{beside}")
    return [
        str(row.rank),
        row.cycle,
        number(row.interaction, decimals),
        span((row.low, row.high), uncertainty),
        number(row.strength_low, decimals),
        f"{row.rank_low} to {row.rank_high}",
        "" if row.first_probability is None else f"{row.first_probability:.2f}",
        number(row.shrunken, decimals) or "-",
        row.interaction_verdict,
        ", ".join(native),
    ]
