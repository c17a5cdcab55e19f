"""Doubts about a curve: measured numbers against limits, each with a sentence and what to do."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.special import stdtrit

from ..flags import Flag, FlagCode
from ..units import in_percent
from .shapes import FloatArray

MISSING_LIMIT = 0.02  # fraction of the charge outside the range at one end
DOUBT_LIMIT_MV = 1.0  # standard uncertainty of the median from what has to be extrapolated at one end
SLOPE_LIMIT = 0.03  # charge that a slope adds over the measured span, as a fraction of the total
REVERSAL_LIMIT = 0.05  # fraction of the charge by which the curve falls back
REVERSAL_IN_NOISE = 6.0  # and times the noise of a point
STEPS_LIMIT = 2.0  # steps within the rise from 10 to 90 %
POINTS_LIMIT = 8
NOISE_LIMIT = 0.05  # standard deviation of a point, as a fraction of the charge
DISAGREEMENT_LIMIT_MV = 3.0  # plain area against the estimate
DISAGREEMENT_IN_NOISE = 4.0  # and times what noise alone makes of the plain area
OUTLIER_P = 0.01  # chance that any cell of a sound construct is named
OUTLIER_LIMIT_MV = 2.0  # nearer than this is not worth a name
_FEWEST_FOR_OUTLIER = 4


@dataclass(frozen=True, kw_only=True, slots=True)
class Evidence:
    """The numbers one cell is judged by; charges as fractions of the cell's total."""

    subject: str
    points: int
    lowest_mv: float
    highest_mv: float
    missing_low: float
    missing_high: float
    doubt_low_mv: float  # standard uncertainty of the construct's median from what lies below the range
    doubt_high_mv: float  # and above it
    slope_charge: float  # what a line under the curve adds over the measured span; 0 where none is supported
    slope_shift_mv: float  # by how much the construct's mean median would move without it
    reversal: float  # largest fall below what was reached before
    reversal_mv: float  # where
    typical_noise: float  # from the median deviation, not spoilt by single points
    noise: float
    largest_step_mv: float  # within the rise
    rise_mv: float  # width from 10 to 90 %
    disagreement_mv: float  # plain area less the estimate
    plain_uncertainty_mv: float  # standard uncertainty of the plain area from the noise of the points


def cell_flags(evidence: Evidence) -> tuple[Flag, ...]:
    """Every doubt the evidence raises, in a fixed order."""
    found = (
        _sloping(evidence),
        _reversal(evidence),
        _coarse(evidence),
        _noisy(evidence),
        _area_disagrees(evidence),
    )
    return (*_unsaturated(evidence), *(flag for flag in found if flag is not None))


def outlying_flags(subjects: Sequence[str], medians_mv: FloatArray) -> dict[str, Flag]:
    """Cells whose median stands apart from the others, by subject.

    Parameters
    ----------
    subjects : sequence of str, length n_cells
        Names.
    medians_mv : ndarray, shape (n_cells,)
        Their medians (mV).

    Returns
    -------
    dict of str to Flag
        Each cell is tested against the others by Student's t for one new value, at 1 % shared between the
        cells (Bonferroni); nobody is removed. Fewer than four cells are not judged.
    """
    count = len(medians_mv)
    if count < _FEWEST_FOR_OUTLIER:
        return {}
    critical = float(-stdtrit(count - 2, OUTLIER_P / count / 2.0))
    flags = {}
    for i, subject in enumerate(subjects):
        others = np.delete(medians_mv, i)
        distance = float(medians_mv[i] - others.mean())
        limit = max(critical * float(others.std(ddof=1)) * np.sqrt(1.0 + 1.0 / (count - 1)), OUTLIER_LIMIT_MV)
        if abs(distance) > limit:
            flags[subject] = Flag(
                code="outlying-cell",
                subject=subject,
                message=f"the median lies {distance:+.1f} mV from the mean of the other {count - 1} cells, "
                f"beyond the {limit:.1f} mV that chance explains; the cell is kept: look at its recording "
                "and exclude it only with a reason",
                value=distance,
                limit=limit,
            )
    return flags


def _unsaturated(e: Evidence) -> list[Flag]:
    ends = (
        (e.missing_low, e.doubt_low_mv, f"below {e.lowest_mv:g} mV, where the curve begins", "negative"),
        (e.missing_high, e.doubt_high_mv, f"above {e.highest_mv:g} mV, where the curve ends", "positive"),
    )
    codes: tuple[FlagCode, FlagCode] = ("unsaturated-low", "unsaturated-high")
    return [
        Flag(
            code=code,
            subject=e.subject,
            message=f"an estimated {in_percent(missing, 1)} of the charge moves {where}; what has to be "
            "extrapolated "
            f"makes the construct's median uncertain by {doubt:.1f} mV ({in_percent(MISSING_LIMIT)} and "
            f"{DOUBT_LIMIT_MV:g} mV are tolerated): go on to a more {sign} voltage",
            value=missing,
            limit=MISSING_LIMIT,
        )
        for code, (missing, doubt, where, sign) in zip(codes, ends, strict=True)
        if missing > MISSING_LIMIT or doubt > DOUBT_LIMIT_MV
    ]


def _sloping(e: Evidence) -> Flag | None:
    if abs(e.slope_charge) <= SLOPE_LIMIT:
        return None
    return Flag(
        code="sloping-plateau",
        subject=e.subject,
        message="both plateaus slope: over the measured span that adds "
        f"{in_percent(e.slope_charge, 1, signed=True)} of the charge, "
        f"more than {in_percent(SLOPE_LIMIT)}, as residual linear capacity does; without it the "
        "construct's medians "
        f"would lie {e.slope_shift_mv:+.1f} mV from here, which widens the uncertainty: correct the "
        "capacity "
        "or ask for the slope to be taken off",
        value=e.slope_charge,
        limit=SLOPE_LIMIT,
    )


def _reversal(e: Evidence) -> Flag | None:
    limit = max(REVERSAL_LIMIT, REVERSAL_IN_NOISE * e.typical_noise)
    if e.reversal <= limit:
        return None
    return Flag(
        code="not-monotonic",
        subject=e.subject,
        message=f"the charge falls back by {in_percent(e.reversal, 1)} of its total at "
        f"{e.reversal_mv:g} mV, more than "
        f"the {in_percent(limit, 1)} that noise explains; no equilibrium curve falls: look for a leak, "
        "a lost seal or a "
        "typing error",
        value=e.reversal,
        limit=limit,
    )


def _coarse(e: Evidence) -> Flag | None:
    if e.points < POINTS_LIMIT:
        return Flag(
            code="coarse-steps",
            subject=e.subject,
            message=f"the curve has {e.points} points, fewer than {POINTS_LIMIT}; too few to show its "
            "shape: "
            "record more voltages",
            value=float(e.points),
            limit=float(POINTS_LIMIT),
        )
    steps = e.rise_mv / e.largest_step_mv
    if steps >= STEPS_LIMIT:
        return None
    return Flag(
        code="coarse-steps",
        subject=e.subject,
        message=f"the rise from 10 to 90 % takes {e.rise_mv:.0f} mV, only {steps:.1f} steps of "
        f"{e.largest_step_mv:g} mV and fewer than {STEPS_LIMIT:g}; the shape between the points is a "
        "guess: "
        "record smaller steps there",
        value=steps,
        limit=STEPS_LIMIT,
    )


def _noisy(e: Evidence) -> Flag | None:
    if e.noise <= NOISE_LIMIT:
        return None
    return Flag(
        code="noisy",
        subject=e.subject,
        message=f"the points scatter by {in_percent(e.noise, 1)} of the charge around the smooth curve, "
        "more than "
        f"{in_percent(NOISE_LIMIT)}; average more sweeps or leave the cell out with a reason",
        value=e.noise,
        limit=NOISE_LIMIT,
    )


def _area_disagrees(e: Evidence) -> Flag | None:
    limit = max(DISAGREEMENT_LIMIT_MV, DISAGREEMENT_IN_NOISE * e.plain_uncertainty_mv)
    saturated = max(e.missing_low, e.missing_high) <= MISSING_LIMIT
    if not saturated or abs(e.disagreement_mv) <= limit:
        return None
    return Flag(
        code="area-disagrees",
        subject=e.subject,
        message=f"the plain area between the plateaus gives a median {e.disagreement_mv:+.1f} mV from the "
        f"estimate, more than {limit:.1f} mV; the end points are noisy or drift: look at the plateaus",
        value=e.disagreement_mv,
        limit=limit,
    )
