"""Half-width and power to expect of one estimate, the uncertainty of the scatters carried along."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import special

from ..intervals import t_quantile, welch_satterthwaite
from .points import FEW, MANY, chi_square_levels, mean_squares, t_quantiles
from .prospects import Prospect, Totals

FloatArray = NDArray[np.float64]

LIKELY = (0.1, 0.9)  # what lies between these shares of the possible outcomes is called likely
_FEWEST_DOF = 0.5  # below it a scatter says nothing
_SCATTERS = 31  # possible scales of the true scatters


@dataclass(frozen=True, kw_only=True, slots=True)
class Range:
    """A number to expect if every scatter is what it seems, and its likely range if not; NaN if unknown."""

    expected: float
    low: float
    high: float


@dataclass(frozen=True, kw_only=True, slots=True)
class Outcomes:
    """Possible outcomes of further recordings, equally likely ones.

    Rows are possible true scatters, columns chance.
    """

    std_uncertainty: FloatArray  # (n_scatters, 1), true one of the estimate
    estimated: FloatArray  # (n_scatters, n_chances), what the cells will say it is
    dof: FloatArray  # (n_scatters, n_chances), Welch-Satterthwaite's that go with it

    def half_widths(self, confidence: float) -> FloatArray:
        """Half the width of the interval, shape (n_scatters, n_chances)."""
        return t_quantiles(0.5 + confidence / 2, self.dof) * self.estimated

    def powers(self, truth: float, confidence: float) -> FloatArray:
        """Probability that the interval excludes 0 for each possible scatter, shape (n_scatters,)."""
        reach = self.half_widths(confidence)
        beyond = special.ndtr((truth - reach) / self.std_uncertainty)
        beyond += special.ndtr((-truth - reach) / self.std_uncertainty)
        powers: FloatArray = np.mean(beyond, axis=1)
        return powers

    def insides(self, truth: float, low: float, high: float, confidence: float) -> FloatArray:
        """Probability that the interval lies between two limits, for each scatter, shape (n_scatters,)."""
        reach = self.half_widths(confidence)
        upper = special.ndtr((high - reach - truth) / self.std_uncertainty)
        lower = special.ndtr((low + reach - truth) / self.std_uncertainty)
        shares: FloatArray = np.mean(np.maximum(upper - lower, 0.0), axis=1)
        return shares


@dataclass(frozen=True, kw_only=True, slots=True)
class _Forecast:
    """One term once there are so many cells, its scatter being what it seems."""

    variance: float  # that it adds to the squared standard uncertainty
    dof: float
    kept: float  # share of the degrees of freedom that is there already

    @property
    def fresh_dof(self) -> float:
        """Degrees of freedom that are yet to come."""
        return (1 - self.kept) * self.dof


def _forecasts(prospect: Prospect, totals: Totals) -> list[_Forecast]:
    found = []
    for term in prospect.terms:
        n = float(totals[term.recording])
        dof = max(_FEWEST_DOF, term.kept_dof + (n - term.kept) * term.dof_each)
        kept = min(max(term.kept_dof, 0.0) / dof, 1.0)
        found.append(_Forecast(variance=term.sd**2 / n, dof=dof, kept=kept if kept < 1 - 1e-9 else 1.0))
    return found


def _scales(prospect: Prospect, forecasts: Sequence[_Forecast]) -> FloatArray:
    """Factors by which the true variances may differ from those seen, equally likely ones."""
    to_come = [(1 - one.kept) * one.variance for one in forecasts]
    counted = to_come if any(to_come) else [one.variance for one in forecasts]
    dof = welch_satterthwaite(counted, [term.scatter_dof for term in prospect.terms])
    return np.ones(1) if math.isinf(dof) else 1 / chi_square_levels(dof, _SCATTERS)


def outcomes(prospect: Prospect, totals: Totals, *, certain: bool) -> Outcomes:
    """Outcomes of recording up to so many cells.

    Parameters
    ----------
    prospect : Prospect
        The estimate.
    totals : mapping of Recording to float
        Cells of each kind that there shall be, those there are included.
    certain : bool
        Take every scatter to be what it seems, at 2039 points of chance; else for 31 possible scales of
        the scatters, at 509 points of chance each.

    Notes
    -----
    The cells there are keep their sum of squares; m degrees of freedom from further cells add the true
    variance times chi-square(m). A scatter s seen with nu degrees of freedom stands for true variances
    nu s**2 / chi-square(nu), its fiducial distribution. For several scatters one common factor is drawn, with
    Welch and Satterthwaite's degrees of freedom of what further cells will say: independent factors for each
    would overstate their sum the more, the more terms there are (docs/planning.md has the measured shares).
    The estimate itself is normal and independent of its scatter.
    """
    forecasts = _forecasts(prospect, totals)
    scales = np.ones((1, 1)) if certain else _scales(prospect, forecasts)[:, np.newaxis]
    chances = MANY if len(scales) == 1 else FEW
    known = math.fsum(part.variance for part in prospect.fixed)
    true: FloatArray = np.full((len(scales), 1), known)
    seen: FloatArray = np.full((len(scales), chances), known)
    spread: FloatArray = np.full(
        (len(scales), chances), math.fsum(part.variance**2 / part.dof for part in prospect.fixed)
    )
    for place, one in enumerate(forecasts):
        share: FloatArray = np.full((1, 1), one.kept)
        if one.kept < 1:
            fresh = mean_squares(one.fresh_dof, place, chances)[np.newaxis]
            share = share + (1 - one.kept) * scales * fresh
        true += one.variance * scales
        seen += one.variance * share
        spread += (one.variance * share) ** 2 / one.dof
    with np.errstate(divide="ignore", invalid="ignore"):
        return Outcomes(std_uncertainty=np.sqrt(true), estimated=np.sqrt(seen), dof=seen**2 / spread)


@dataclass(frozen=True, kw_only=True, slots=True)
class Outlook:
    """What to expect of one estimate."""

    half_width: Range
    power: Range  # against one stated size
    assurance: float  # power averaged over the possible scatters


def outlook(prospect: Prospect, totals: Totals, *, truth: float, confidence: float) -> Outlook:
    """Half-width and power once there are so many cells.

    Parameters
    ----------
    prospect : Prospect
        The estimate.
    totals : mapping of Recording to float
        Cells of each kind that there shall be.
    truth : float
        True size against which the power counts, same unit as the estimate.
    confidence : float
        Of the interval.

    Returns
    -------
    Outlook
        Half-width: expected if every scatter is what it seems, and what 8 of 10 outcomes lie between with
        the scatters uncertain. Power: the same, over the possible scatters. NaN where a scatter is unknown.
    """
    if prospect.unknown:
        nothing = Range(expected=math.nan, low=math.nan, high=math.nan)
        return Outlook(half_width=nothing, power=nothing, assurance=math.nan)
    seeming = outcomes(prospect, totals, certain=True)
    possible = outcomes(prospect, totals, certain=False)
    widths = possible.half_widths(confidence)
    powers = possible.powers(truth, confidence)
    return Outlook(
        half_width=_range(float(np.mean(seeming.half_widths(confidence))), widths),
        power=_range(float(seeming.powers(truth, confidence)[0]), powers),
        assurance=float(np.mean(powers)),
    )


def _range(expected: float, possible: FloatArray) -> Range:
    low, high = np.quantile(possible, LIKELY)
    return Range(expected=expected, low=float(min(low, expected)), high=float(max(high, expected)))


def expected_half_width(prospect: Prospect, totals: Totals, confidence: float) -> float:
    """Half-width to expect if every scatter is what it seems."""
    return float(np.mean(outcomes(prospect, totals, certain=True).half_widths(confidence)))


def power_of_t(truth: float, std_uncertainty: float, dof: float, confidence: float) -> float:
    """Power of a two-sided t test of one variance, from the noncentral t distribution.

    Parameters
    ----------
    truth : float
        True value, tested against 0.
    std_uncertainty : float
        Its true standard uncertainty, same unit.
    dof : float
        Degrees of freedom with which that is estimated.
    confidence : float
        1 minus the level of the test.
    """
    limit, shift = t_quantile(0.5 + confidence / 2, dof), abs(truth) / std_uncertainty
    if math.isinf(dof):
        return float(special.ndtr(shift - limit) + special.ndtr(-shift - limit))
    below, beyond = (float(special.nctdtr(dof, shift, at)) for at in (limit, -limit))
    # Shares too small for the function come out as NaN.
    return 1 - (0.0 if math.isnan(below) else below) + (0.0 if math.isnan(beyond) else beyond)


def expected_half_width_of_t(std_uncertainty: float, dof: float, confidence: float) -> float:
    """Expected half-width of a t interval of one variance: the quantile times the mean of s.

    The mean of s is sigma sqrt(2 / dof) Gamma((dof + 1) / 2) / Gamma(dof / 2).
    """
    quantile = t_quantile(0.5 + confidence / 2, dof)
    if math.isinf(dof):
        return quantile * std_uncertainty
    log_ratio = special.gammaln((dof + 1) / 2) - special.gammaln(dof / 2)
    return quantile * std_uncertainty * math.sqrt(2 / dof) * math.exp(log_ratio)
