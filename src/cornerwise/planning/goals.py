"""What further recordings shall reach: a half-width, a power, or a verdict on a charge."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Literal, Protocol

import numpy as np
from numpy.typing import NDArray
from scipy import special

from ..intervals import t_quantile
from .outlook import LIKELY, Outcomes, outcomes
from .prospects import Prospect, Totals

FloatArray = NDArray[np.float64]

Sureness = Literal["as seen", "lucky", "sure"]
Verdict = Literal["equal", "changed"]


class Goal(Protocol):
    """Something an estimate shall reach."""

    @property
    def confidence(self) -> float:
        """Level of the interval that decides."""
        ...

    @property
    def need(self) -> float:
        """Score that reaches it."""
        ...

    def scores(self, found: Outcomes) -> FloatArray:
        """Score of every outcome, or of every possible scatter; more is better."""
        ...

    def half_width(self, value: float) -> float:
        """Half-width that reaches it by and large, for an estimate of this value; 0 or less if none does."""
        ...


@dataclass(frozen=True, kw_only=True, slots=True)
class NarrowEnough:
    """An interval whose half-width is at most so much."""

    wanted: float
    confidence: float

    @property
    def need(self) -> float:
        """The half-width with a minus sign."""
        return -self.wanted

    def scores(self, found: Outcomes) -> FloatArray:
        """Half-widths with a minus sign."""
        return -found.half_widths(self.confidence)

    def half_width(self, value: float) -> float:
        """The wanted one, whatever the estimate."""
        return self.wanted + 0.0 * value


@dataclass(frozen=True, kw_only=True, slots=True)
class StrongEnough:
    """A test against 0 that finds a true value of this size so often."""

    wanted: float  # power
    truth: float
    confidence: float

    @property
    def need(self) -> float:
        """The power."""
        return self.wanted

    def scores(self, found: Outcomes) -> FloatArray:
        """Powers."""
        return found.powers(self.truth, self.confidence)

    def half_width(self, value: float) -> float:
        """With which a normal estimate has the power, whatever the estimate."""
        limit = t_quantile(0.5 + self.confidence / 2, math.inf)
        return abs(self.truth) * limit / (limit + float(special.ndtri(self.wanted))) + 0.0 * value


@dataclass(frozen=True, kw_only=True, slots=True)
class Judged:
    """A verdict on the ratio of two charges that is reached so often."""

    wanted: float  # probability
    verdict: Verdict
    margin: float  # fraction by which the ratio may differ from 1 and count as equal
    level: float  # the campaign's confidence
    truth: float | None = None  # logarithm of the true ratio; None: the estimated one

    @property
    def confidence(self) -> float:
        """Of the two one-sided tests for ``equal``, of the interval for ``changed``."""
        return 2 * self.level - 1 if self.verdict == "equal" else self.level

    @property
    def need(self) -> float:
        """The probability."""
        return self.wanted

    @property
    def _limits(self) -> tuple[float, float]:
        return math.log(1 - self.margin), math.log(1 + self.margin)

    def of(self, value: float) -> Judged:
        """The same with the true ratio settled."""
        truth = value if self.truth is None else self.truth
        return Judged(
            wanted=self.wanted, verdict=self.verdict, margin=self.margin, level=self.level, truth=truth
        )

    def scores(self, found: Outcomes) -> FloatArray:
        """Probabilities of the verdict, shape (n_scatters,)."""
        assert self.truth is not None
        low, high = self._limits
        if self.verdict == "equal":
            return found.insides(self.truth, low, high, self.confidence)
        # Beyond 1 at the level of the interval, and not inside the margin as well, which would be "equal".
        reach, inner = found.half_widths(self.level), found.half_widths(2 * self.level - 1)
        above = np.maximum(reach, high - inner)
        below = np.minimum(-reach, low + inner)
        u = found.std_uncertainty
        share = special.ndtr((self.truth - above) / u) + special.ndtr((below - self.truth) / u)
        shares: FloatArray = np.mean(share, axis=1)
        return shares

    def half_width(self, value: float) -> float:
        """Distance of the true ratio from the nearer margin, or from 1."""
        truth = self.truth if self.truth is not None else value
        low, high = self._limits
        return min(high - truth, truth - low) if self.verdict == "equal" else abs(truth)


def score(goal: Goal, prospect: Prospect, totals: Totals, sureness: Sureness = "as seen") -> float:
    """What the goal's score comes to with so many cells of each kind.

    Parameters
    ----------
    goal : Goal
        What shall be reached.
    prospect : Prospect
        The estimate.
    totals : mapping of Recording to float
        Cells of each kind.
    sureness : {"as seen", "lucky", "sure"}
        Every scatter being what it seems; or the score that 1 in 10 of the possible outcomes exceed, or
        9 in 10.
    """
    found = outcomes(prospect, totals, certain=sureness == "as seen")
    scores = goal.scores(found)
    if sureness == "as seen":
        return float(np.mean(scores))
    return float(np.quantile(scores, LIKELY[1] if sureness == "lucky" else LIKELY[0]))


def reached(goal: Goal, prospect: Prospect, totals: Totals, sureness: Sureness = "as seen") -> bool:
    """Whether so many cells of each kind reach the goal; see `score`."""
    return score(goal, prospect, totals, sureness) >= goal.need


def within_reach(goal: Goal, prospect: Prospect) -> bool:
    """Whether any number of cells could reach the goal: what cannot be made smaller must leave room."""
    if prospect.unknown:
        return False
    endless = {term.recording: term.kept + 1e9 for term in prospect.terms}
    return goal.half_width(prospect.value) > 0 and reached(goal, prospect, endless)
