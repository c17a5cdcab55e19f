"""Ranges and steps tried one after the other, and what became of each."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from typing import ClassVar

import numpy as np

from ..campaign import FloatArray
from ..errors import UsageError
from ..gating import GatingScheme
from ..plausible import FEWEST_POINTS, NARROWEST_RANGE_MV, VOLTAGE_LIMIT_MV
from ..simulation import voltages_mv
from ..tables import Table, Value, available
from .questions import ProtocolQuestion
from .trials import MedianErrors, size, standard_error, with_noise, without_noise

# Of the share that may lie outside: the ranges that are tried leave out so much at either end.
PARTS_OF_SHARE = (1.0, 0.5, 0.2, 0.1, 0.05, 0.02)
_ENDS_MV = 5.0  # ends of ranges are multiples of this
LOST_LIMIT = 0.05  # share of cells that may be lost
_SURE = 2.0  # standard errors by which the bias with noise must stay within the bound

Progress = Callable[[str, int, int], None]


@dataclass(frozen=True, kw_only=True, slots=True)
class ProtocolRow:
    """One range and step; numbers are those of the curve that suffers most from it."""

    columns: ClassVar[tuple[str, ...]] = (
        "first_mV", "last_mV", "step_mV", "points", "share_outside", "bias_mV", "noisy_bias_mV",
        "noisy_bias_sem_mV", "scatter_mV", "stated_mV", "lost", "curve", "within",
    )  # fmt: skip

    first_mv: float
    last_mv: float
    step_mv: float
    points: int
    share_outside: float  # of the charge at the worse end
    bias_mv: float | None  # of the construct's median without noise; None when it cannot be read
    noisy_bias_mv: float | None  # with noise; None where it was not needed, or nothing could be read
    noisy_bias_sem_mv: float | None  # from the number of trials
    scatter_mv: float | None  # standard deviation that noise gives a construct's median
    stated_mv: float | None  # largest uncertainty that the reading states for what the range leaves out
    lost: float | None  # largest share of cells that are set aside or flagged coarse-steps
    curve: str  # whose bias this is
    within: bool  # whether all of this stays within the bounds

    def cells(self) -> tuple[Value, ...]:
        """Values in the order of `columns`."""
        return (
            self.first_mv, self.last_mv, self.step_mv, self.points, self.share_outside, self.bias_mv,
            self.noisy_bias_mv, self.noisy_bias_sem_mv, self.scatter_mv, self.stated_mv, self.lost,
            self.curve, self.within,
        )  # fmt: skip


@dataclass(frozen=True, kw_only=True, slots=True)
class ProtocolCheck:
    """Every protocol that was tried."""

    question: ProtocolQuestion
    rows: Table[ProtocolRow]  # by range, the widest last, and step
    advised: ProtocolRow | None  # the one within the bounds with the fewest points, then the narrowest
    curves: tuple[str, ...]  # that were tried


def check_protocols(
    curves: Mapping[str, GatingScheme], question: ProtocolQuestion, progress: Progress | None = None
) -> ProtocolCheck:
    """Try ranges and steps on the curves that are expected.

    Parameters
    ----------
    curves : mapping of str to GatingScheme
        By name, from `expected_curves` or `curves_of`.
    question : ProtocolQuestion
        The bounds, the steps and how constructs are recorded.
    progress : callable, optional
        Told the step of the work, how many protocols are done and how many there are.

    Returns
    -------
    ProtocolCheck
        A row a protocol. Constructs with noise are only drawn where those without stay within the bounds, for
        at most four curves: the one with the largest bias, those with most charge outside at either end and
        the steepest.

    Raises
    ------
    UsageError
        If there is no curve or a protocol to judge is none.

    Notes
    -----
    A protocol is within the bounds when the bias without noise is; the bias with noise is by two of its
    standard errors; the uncertainty that the reading states for shape and extrapolation is too; no more than
    the stated share of charge lies outside at either end; and at most one cell in twenty is set aside or
    flagged coarse-steps. The random numbers are keyed by curve and trial.
    """
    if not curves:
        raise UsageError("no curve to check; give a model file, or --curve MEDIAN:SLOPE")
    protocols = _protocols(curves, question)
    rows = []
    for done, protocol in enumerate(protocols):
        if progress is not None:
            progress("protocols", done, len(protocols))
        rows.append(_judged(curves, protocol, question))
    good = [row for row in rows if row.within]
    fewest = min(good, key=lambda row: (row.points, row.last_mv - row.first_mv), default=None)
    return ProtocolCheck(
        question=question, rows=Table(ProtocolRow, rows), advised=fewest, curves=tuple(curves)
    )


def _protocols(
    curves: Mapping[str, GatingScheme], question: ProtocolQuestion
) -> list[tuple[float, FloatArray]]:
    """Step and voltages of every protocol, the narrowest range first."""
    ends = {_ends(curves, part * question.share) for part in PARTS_OF_SHARE}
    ends |= {question.ends_mv} if question.ends_mv is not None else set()
    found = []
    for first, last in sorted(ends, key=lambda pair: (pair[1] - pair[0], pair)):
        for step in question.steps_mv:
            if (
                not 0 < step <= VOLTAGE_LIMIT_MV
                or not NARROWEST_RANGE_MV < last - first <= 2 * VOLTAGE_LIMIT_MV
            ):
                raise UsageError(f"{first:g} to {last:g} mV in steps of {step:g} mV is no protocol")
            if (first, last) != question.ends_mv:  # whole steps that reach the end
                last = first + step * math.ceil((last - first) / step - 1e-6)
            voltages = voltages_mv(first, last, step)
            if len(voltages) >= FEWEST_POINTS:
                found.append((step, voltages))
    return found


def _ends(curves: Mapping[str, GatingScheme], share: float) -> tuple[float, float]:
    """Range beyond which every curve moves at most `share` of its charge at either end (mV)."""
    grid = np.arange(-VOLTAGE_LIMIT_MV, VOLTAGE_LIMIT_MV + 1.0, _ENDS_MV)
    lows, highs = [], []
    for scheme in curves.values():
        q = scheme.q(grid)
        lows.append(float(grid[max(int(np.searchsorted(q, share, side="right")) - 1, 0)]))
        highs.append(float(grid[min(int(np.searchsorted(q, 1 - share)), len(grid) - 1)]))
    return min(lows), max(highs)


def _judged(
    curves: Mapping[str, GatingScheme], protocol: tuple[float, FloatArray], question: ProtocolQuestion
) -> ProtocolRow:
    step, v = protocol
    outside = max(max(_outside(scheme, v)) for scheme in curves.values())
    quiet = {name: without_noise(scheme, step, v, question) for name, scheme in curves.items()}
    worst = max(quiet, key=lambda name: size(quiet[name]))
    fits = size(quiet[worst]) <= question.bound_mv and outside <= question.share
    noisy: dict[str, MedianErrors] = {}
    if fits:
        critical = _critical(curves, v, worst)
        noisy = {name: with_noise(name, curves[name], v, question) for name in critical}
        worst = max(noisy, key=lambda name: size(noisy[name]))
    found = noisy.get(worst)
    sem = None if found is None else standard_error(found)
    return ProtocolRow(
        first_mv=float(v[0]),
        last_mv=float(v[-1]),
        step_mv=step,
        points=len(v),
        share_outside=outside,
        bias_mv=quiet[worst].bias_mv,
        noisy_bias_mv=None if found is None else found.bias_mv,
        noisy_bias_sem_mv=sem,
        scatter_mv=None if found is None or sem is None else float(found.means_mv.std(ddof=1)),
        stated_mv=available(max((errors.stated_mv for errors in noisy.values()), default=math.nan)),
        lost=max((errors.lost for errors in noisy.values()), default=None),
        curve=worst,
        within=fits and all(_within(errors, question.bound_mv) for errors in noisy.values()),
    )


def _outside(scheme: GatingScheme, v: FloatArray) -> tuple[float, float]:
    """Fraction of the charge that moves below and above a range."""
    low, high = scheme.q([v[0], v[-1]])
    return float(low), float(1 - high)


def _critical(curves: Mapping[str, GatingScheme], v: FloatArray, worst: str) -> list[str]:
    """Names of the curves that a protocol is hard on, each once."""
    steepness = {name: float(np.diff(scheme.q(v)).max()) for name, scheme in curves.items()}
    low = max(curves, key=lambda name: _outside(curves[name], v)[0])
    high = max(curves, key=lambda name: _outside(curves[name], v)[1])
    return list(dict.fromkeys((worst, low, high, max(steepness, key=lambda name: steepness[name]))))


def _within(errors: MedianErrors, bound_mv: float) -> bool:
    bias = size(errors) + _SURE * (standard_error(errors) or 0.0)
    return errors.lost <= LOST_LIMIT and max(bias, errors.stated_mv) <= bound_mv
