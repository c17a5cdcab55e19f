"""Refused data in words."""

from __future__ import annotations

from itertools import groupby
from typing import IO

from rich.text import Text

from ..errors import DataRefused
from .terminal import hanging, screen_on


def print_problems(error: DataRefused, stream: IO[str]) -> None:
    """Every problem: where, what was found, what was expected, what to do.

    Parameters
    ----------
    error : DataRefused
        Carries the problems.
    stream : text stream
        Usually stderr.
    """
    count = len(error.problems)
    with screen_on(stream) as screen:
        words = "1 problem" if count == 1 else f"{count} problems"
        screen.print(Text(f"cornerwise: the data were refused, {words}"))
        for where, problems in groupby(error.problems, key=lambda problem: str(problem.origin)):
            screen.print(Text(where or "campaign"))
            for problem in problems:
                hanging(screen, "  found     ", problem.found)
                hanging(screen, "  expected  ", problem.expected)
                hanging(screen, "  to do     ", problem.remedy)
