"""Every cycle among the others: adjusted p values, ranks, simultaneous intervals, shrunken estimates."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy import special

from .campaign import Settings
from .estimates import Estimate
from .intervals import Interval, adjusted_p_values, t_interval, t_quantile
from .ranking import (
    FEWEST_TO_SHRINK,
    Estimates,
    first_probabilities,
    rank_intervals,
    shrink,
    simultaneous_quantile,
    strength_ranks,
)

FloatArray = NDArray[np.float64]

_NOT_AVAILABLE = Interval(math.nan, math.nan)


@dataclass(frozen=True, kw_only=True, slots=True)
class Standing:
    """One cycle among the others; NaN and None where there is no uncertainty."""

    p_adjusted: float = math.nan
    established: bool = False  # the adjusted p value is small enough for a verdict
    rank: int | None = None  # in the order the settings ask for
    ranks: tuple[int, int] | None = None  # limits of the rank by true size
    strength_low: float = math.nan  # lower limit of the absolute size; 0 where the interval includes 0
    first_probability: float = math.nan
    shrunken: float = math.nan  # NaN among fewer than four
    simultaneous: Interval = _NOT_AVAILABLE  # NaN unless asked for


def standings(
    estimates: Sequence[Estimate], deviations: NDArray[np.float32], settings: Settings
) -> list[Standing]:
    """Compare all cycles.

    Parameters
    ----------
    estimates : sequence of Estimate
        One a cycle.
    deviations : ndarray, shape (n_cycles, n_replicates)
        Joint replicates of their errors.
    settings : Settings
        Confidence, adjustment, order, how many count as the first, and whether simultaneous intervals are
        asked for.

    Returns
    -------
    list of Standing
        In the order given.
    """
    adjusted = adjusted_p_values([one.p_value for one in estimates], settings.adjustment)
    known = [i for i, one in enumerate(estimates) if one.known]
    found = [Standing(p_adjusted=p) for p in adjusted]
    if not known:
        return found
    some = [estimates[i] for i in known]
    errors = deviations if len(known) == len(estimates) else deviations[known]
    values, u = np.array([one.value for one in some]), np.array([one.std_uncertainty for one in some])
    dofs = np.array([one.dof for one in some])
    limits = rank_intervals(
        Estimates(
            values=values,
            std_uncertainties=u,
            dofs=dofs,
            footprints=[one.interaction.ledger.footprint(one.interaction.energy) for one in some],
        ),
        settings.confidence,
    )
    strengths = [_strength(one) for one in some]
    by_bound = settings.rank_by == "lower bound"
    ranks = strength_ranks(strengths if by_bound else list(np.abs(values)))
    shrunken = shrink(values, u)
    first = _first(shrunken.values, shrunken.std_uncertainties, some, errors, settings)
    wide = _simultaneous(some, errors, u, settings)
    for place, i in enumerate(known):
        low, high = limits[place]
        found[i] = Standing(
            p_adjusted=adjusted[i],
            established=adjusted[i] <= 1 - settings.confidence,
            rank=ranks[place],
            ranks=(min(low, ranks[place]), max(high, ranks[place])),
            strength_low=max(0.0, strengths[place]),
            first_probability=float(first[place]),
            shrunken=float(shrunken.values[place]) if len(known) >= FEWEST_TO_SHRINK else math.nan,
            simultaneous=wide[place],
        )
    return found


def _strength(one: Estimate) -> float:
    """How far the interval stays from 0; negative, by how far it reaches beyond, where it includes 0."""
    return max(one.interval.low, -one.interval.high)


def _first(
    centres: FloatArray,
    spreads: FloatArray,
    estimates: Sequence[Estimate],
    errors: NDArray[np.float32],
    settings: Settings,
) -> FloatArray:
    """Probabilities of being among the first, the replicates widened to Student's t."""
    level = 0.5 + settings.confidence / 2
    normal = t_quantile(level, math.inf)
    u = np.array([one.std_uncertainty for one in estimates])
    stretch = np.array([t_quantile(level, one.dof) / normal for one in estimates])
    scale = stretch * spreads / np.where(u > 0, u, 1.0)
    return first_probabilities(centres, errors, scale, settings.first)


def _simultaneous(
    estimates: Sequence[Estimate], errors: NDArray[np.float32], u: FloatArray, settings: Settings
) -> list[Interval]:
    """Intervals that hold all true values at once, where they are asked for."""
    if not settings.simultaneous:
        return [_NOT_AVAILABLE] * len(estimates)
    quantile = simultaneous_quantile(errors, u, settings.confidence)
    level = float(special.ndtr(quantile) - special.ndtr(-quantile))
    return [t_interval(one.value, one.std_uncertainty, one.dof, level) for one in estimates]
