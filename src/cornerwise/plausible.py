"""Physical limits on plain numbers and arrays: what no recording of a gating charge can be.

The limits refuse blunders (volts in a millivolt column, a sign turned round, an empty channel), not poor
data. Whether a curve rises is therefore asked of the shape alone, without a model of the curve.

Notes
-----
A rising curve of any shape is described best by its isotonic regression, the least-squares fit among all
sequences that never fall. The share of the scatter about the mean that this fit removes,

    share = 1 - RSS(isotonic) / RSS(mean),

is 1 for a curve that never falls and small for noise about a constant. For independent normal noise of
unknown size about a constant, its distribution is known exactly (the E-bar-squared statistic for a simple
order): a mixture of beta distributions,

    P(share >= c) = sum over l of P(l, n) P(Beta((l - 1)/2, (n - l)/2) >= c),

P(l, n) being the probability that the fit to n points has l levels, the coefficient of z**l in
z (z + 1) ... (z + n - 1) / n!. A curve counts as rising (or falling) when its share is one that a flat
curve reaches less often than once in twenty. The same is asked of the ranks of the charges, so that one
wild point does not refuse a curve: to rise, the charges or their ranks must, and the ranks must not fall.
So a late rise over the last few voltages of a long plateau passes too.

References
----------
Barlow, Bartholomew, Bremner and Brunk 1972, Statistical Inference under Order Restrictions (from memory).
"""

from __future__ import annotations

from functools import lru_cache
from typing import Literal

import numpy as np
from numpy.typing import NDArray
from scipy.special import betaincc

FloatArray = NDArray[np.float64]

VOLTAGE_LIMIT_MV = 500.0  # membranes break down well before; common practice, no source
NARROWEST_RANGE_MV = 5.0  # a curve inside this holds volts in a millivolt column
TEMPERATURE_RANGE_C = (-5.0, 60.0)
DISTANCE_RANGE_ANGSTROM = (1.0, 500.0)  # of two side chains; atoms that are bonded are farther apart than 1 A
CHARGE_LIMIT_E0 = 100.0  # per channel; the largest known are near 14 e0
FEWEST_POINTS = 5
FEWEST_OPENINGS = 4  # points of a cell's open probability; fewer show no limit of a slope
FLAT_CHANCE = 0.05  # how often noise about a constant may pass for a rise

_STRAY = 10.0  # times the spread of all other charges of a cell
_LEVELS_LIMIT = 500  # the mixture changes little beyond, and the limit on the share stays on the strict side

Direction = Literal["rises", "falls", "flat"]


def too_narrow(voltage_mv: FloatArray) -> bool:
    """Whether all voltages in mV, shape (n,), lie within `NARROWEST_RANGE_MV`."""
    return bool(np.ptp(voltage_mv) <= NARROWEST_RANGE_MV)


def volts_among_millivolts(voltage_mv: FloatArray) -> NDArray[np.bool_]:
    """Which voltages of one cell, in mV, shape (n,) and rising, are most likely volts typed by mistake.

    Such a value is tiny, lies where the cell's steps leave no room for it, and a thousandfold fills a gap
    between the other voltages or goes on by a step where they end. Voltages near zero of a grid that is
    shifted as a whole, as after a correction of the junction potential, pass.
    """
    tiny = (np.abs(voltage_mv) < VOLTAGE_LIMIT_MV / 1000) & (voltage_mv != 0)
    others = voltage_mv[~tiny]
    if not tiny.any() or len(others) < FEWEST_POINTS - 1:
        return np.zeros(len(voltage_mv), dtype=bool)
    step = float(np.median(np.diff(others)))
    away = np.abs(voltage_mv[:, None] - others).min(axis=1)
    meant_away = np.abs(1000 * voltage_mv[:, None] - others).min(axis=1)
    crowded = away <= step / 2
    fitting = (meant_away > step / 2) & (meant_away < 1.5 * step)
    return np.asarray(tiny & crowded & fitting)


def turned_voltage(voltage_mv: FloatArray) -> int | None:
    """Which voltage of one cell, in mV, shape (n,) and as the rows stand, breaks their order; None for none.

    All others rise or fall from row to row, and this one does not lie between its neighbours, as when its
    sign was lost. Rows in no order, and a value added at the end, pass.
    """
    if len(voltage_mv) < FEWEST_POINTS + 1:
        return None
    steps = np.diff(voltage_mv)
    if np.all(steps > 0) or np.all(steps < 0):
        return None
    for place in range(1, len(voltage_mv) - 1):
        others = np.diff(np.delete(voltage_mv, place))
        if np.all(others > 0) or np.all(others < 0):
            return place
    return None


def stray_charge(charge: FloatArray) -> int | None:
    """Which charge of one cell, shape (n,), lies out of all proportion to the others; None for none.

    It lies more than ten times the spread of all others outside them, as when a decimal mark was lost.
    """
    for place in {int(np.argmin(charge)), int(np.argmax(charge))}:
        others = np.delete(charge, place)
        beyond = max(others.min() - charge[place], charge[place] - others.max())
        if beyond > _STRAY * np.ptp(others):
            return place
    return None


def possible_total_charge(charge_e0: float) -> bool:
    """Whether a channel can move this total gating charge, in e0."""
    return 0.0 < charge_e0 <= CHARGE_LIMIT_E0


def direction(charge: FloatArray) -> Direction:
    """Judge whether charge rises with voltage.

    Parameters
    ----------
    charge : array, shape (n,)
        Charges in rising voltage, in any unit and with any offset; n >= 2.

    Returns
    -------
    {"rises", "falls", "flat"}
        See the notes of this module for the criterion.

    Examples
    --------
    >>> import numpy as np
    >>> direction(np.array([0.0, 0.02, -0.01, 0.6, 1.0, 0.97]))
    'rises'
    >>> direction(np.array([3.0, 3.0, 3.0, 3.0, 3.0]))
    'flat'
    """
    if np.ptp(charge) <= 1e-9 * np.max(np.abs(charge)):
        return "flat"
    ranks = midranks(charge)
    if _plainly_rises(ranks):
        return "rises"
    chances = [_chances(*_shares(values), len(charge)) for values in (ranks, charge)]
    (rank_rise, rank_fall), (rise, fall) = chances
    if rank_fall >= FLAT_CHANCE and min(rank_rise, rise) < FLAT_CHANCE:
        return "rises"
    return "falls" if min(rank_fall, fall) < FLAT_CHANCE else "flat"


def midranks(values: FloatArray) -> FloatArray:
    """Ranks of `values`, shape (n,), from 1; equal values share the mean of their ranks."""
    _, place, count = np.unique(values, return_inverse=True, return_counts=True)
    return np.asarray((np.cumsum(count) - (count - 1) / 2)[place], dtype=np.float64)


def flat_chance(share: float, n: int) -> float:
    """Probability that noise about a constant gives at least this share.

    Parameters
    ----------
    share : float
        Share of the scatter that the isotonic regression removes, 0 to 1.
    n : int
        Number of points, at least 2.

    Returns
    -------
    float
        The upper tail of the E-bar-squared distribution for a simple order.
    """
    if share <= 0.0:
        return 1.0
    points = min(n, _LEVELS_LIMIT)
    levels = np.arange(2, points)
    tails = betaincc((levels - 1) / 2, (points - levels) / 2, min(share, 1.0))
    weights = level_probabilities(points)
    return float(np.sum(weights[1:-1] * tails) + weights[-1])


@lru_cache(maxsize=64)
def level_probabilities(n: int) -> FloatArray:
    """Probabilities that the isotonic regression of `n` exchangeable values has 1, 2, ..., n levels."""
    weights = np.zeros(n)
    weights[0] = 1.0
    for size in range(2, n + 1):
        weights[1:] = weights[1:] * ((size - 1) / size) + weights[:-1] / size
        weights[0] *= (size - 1) / size
    return weights


def _plainly_rises(ranks: FloatArray) -> bool:
    """Whether a straight line through the ranks already settles it.

    A rising line is one of the sequences that never fall, so its share is a lower bound of the isotonic
    one; the shares of the rising and the falling fit add up to at most 1, so above one half it also wins.
    """
    place = np.arange(len(ranks)) - (len(ranks) - 1) / 2
    centred = ranks - ranks.mean()
    slope = float(place @ centred)
    share = slope**2 / float((place @ place) * (centred @ centred))
    if slope <= 0 or share <= 0.5:
        return False
    return _half_suffices(len(ranks)) or flat_chance(share, len(ranks)) < FLAT_CHANCE


@lru_cache(maxsize=64)
def _half_suffices(n: int) -> bool:
    """Whether a share of one half already tells a curve of `n` points from a flat one."""
    return flat_chance(0.5, n) < FLAT_CHANCE


def _shares(values: FloatArray) -> tuple[float, float]:
    """Shares of the scatter that the best rising and the best falling sequence remove."""
    from scipy.optimize import isotonic_regression  # takes long to import, and few curves are in doubt

    centred = values - values.mean()
    total = float(centred @ centred)
    fits = (isotonic_regression(centred, increasing=up).x for up in (True, False))
    rise, fall = (1.0 - float(np.sum((centred - fit) ** 2)) / total for fit in fits)
    return rise, fall


def _chances(rise: float, fall: float, n: int) -> tuple[float, float]:
    """How often noise does as well as the better of the two directions; 1 for the other one."""
    return (flat_chance(rise, n), 1.0) if rise > fall else (1.0, flat_chance(fall, n))
