"""A check of voltage protocols as a person reads it."""

from __future__ import annotations

from collections.abc import Mapping
from typing import IO

from rich.text import Text

from ..protocols import ProtocolCheck, ProtocolQuestion, ProtocolRow
from .legend import percent
from .rounding import number, with_uncertainty
from .terminal import plain_grid, plus_minus_of, screen_on, show_grid

_COLUMNS = (  # as many as 80 columns hold
    ("", False),
    ("range (mV)", True),
    ("step", True),
    ("points", True),
    ("outside", True),
    ("bias", True),
    ("with noise", True),
    ("scatter", True),
    ("stated", True),
    ("lost", True),
    ("curve", True),
)
_WITHIN = "*"


def print_protocols(found: ProtocolCheck, stream: IO[str]) -> None:
    """Every protocol that was tried, the one to take, and what the columns mean.

    Parameters
    ----------
    found : ProtocolCheck
        What `cornerwise.protocols.check_protocols` returned.
    stream : text stream
        At a terminal the table is fitted to its width; elsewhere the text is plain and never cut.
    """
    numbers = {curve: str(number) for number, curve in enumerate(found.curves, start=1)}
    with screen_on(stream) as screen:
        plus_minus = plus_minus_of(screen)
        grid = plain_grid(_COLUMNS, folding=("curve",))
        for row in found.rows:
            grid.add_row(*map(Text, _line(row, numbers[row.curve], plus_minus)))
        show_grid(screen, grid)
        screen.print()
        for line in (_advice(found), "", *_legend(found.question, plus_minus), "", *_curves(numbers)):
            screen.print(Text(line))


def _line(row: ProtocolRow, curve: str, plus_minus: str) -> list[str]:
    return [
        _WITHIN if row.within else "",
        f"{row.first_mv:g} to {row.last_mv:g}",
        f"{row.step_mv:g}",
        str(row.points),
        f"{row.share_outside:.2%}",
        "-" if row.bias_mv is None else f"{number(row.bias_mv, 2)}",
        with_uncertainty(row.noisy_bias_mv, row.noisy_bias_sem_mv, plus_minus) or "-",
        number(row.scatter_mv, 2) or "-",
        number(row.stated_mv, 2) or "-",
        "-" if row.lost is None else f"{row.lost:.0%}",
        curve,
    ]


def _advice(found: ProtocolCheck) -> str:
    row = found.advised
    if row is None:
        return (
            "None of these stays within the bounds: allow a larger bias, lower the noise by averaging more "
            "sweeps, or give smaller steps"
        )
    return (
        f"Within the bounds with the fewest points: {row.first_mv:g} to {row.last_mv:g} mV in steps of "
        f"{row.step_mv:g} mV, {row.points} points"
    )


def _curves(numbers: Mapping[str, str]) -> list[str]:
    return ["Curves that were tried:", *(f"{number:>3}  {curve}" for curve, number in numbers.items())]


def _legend(question: ProtocolQuestion, plus_minus: str) -> list[str]:
    return [
        f"{_WITHIN}: within the bounds, which are {question.bound_mv:g} mV on bias and stated uncertainty, "
        f"{percent(question.share)} of the charge outside at either end; whether a membrane bears the range "
        "is not judged",
        f"Constructs of {question.cells} cells, medians scattering by {question.cell_sd_mv:g} mV, noise of "
        f"{percent(question.noise)} of the charge at each point, {question.trials} constructs a curve",
        "outside: charge beyond the worse end, of the curve that reaches furthest",
        "bias, with noise: mean error of a construct's median in mV, of the curve numbered last, "
        f"{plus_minus} its standard error; - where the bounds were left before noise was added",
        "scatter: standard deviation that noise gives that median, in mV",
        "stated: largest uncertainty in mV that a reading would state for shape and extrapolation",
        "lost: cells that would be set aside or flagged coarse-steps",
    ]
