"""Median voltage of charge-voltage (Q-V) curves.

The median voltage Vm is the integral of V dq over the whole curve: the voltage that makes the area under q
on its left equal the area over q on its right. Total charge times Vm is the activation free energy
whatever the gating scheme (Wyman 1964; derived in `cornerwise.gating`), so nothing here assumes one.

One construct's cells are read together. Several families of smooth curves are fitted to all of them, one
shape for the construct and a gain, an offset and a shift for each cell, and averaged by their marginal
likelihood (`cornerwise.median.shape_average`). The averaged shape supplies plateaus, tails and what lies
between the points; each cell's residuals then say how far its own shape departs
(`cornerwise.median.departures`). The plain area between three-point plateaus is reported beside every
estimate.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from ..campaign import Curve
from .cell_reading import CellReading, FittedCurve, unreadable
from .curve_quality import Evidence, cell_flags, outlying_flags
from .departures import own_departures, smooth_leftover_mv
from .extrapolation import Missing, missing_charge, truncation_mv
from .plateaus import plain_median_mv, plain_uncertainty_mv
from .scaled_cells import ScaledCells, canonical, scale, why_unreadable
from .shape_average import PooledShape, pool_shape
from .shape_fit import Cells
from .shapes import FloatArray
from .sloping import Slopes, find_slopes, no_slopes

_UNEVEN_NOISE = 3.0  # ratio of the cells' variances from which they are weighted
_NOISE_PRIOR_POINTS = 10.0  # points' worth of the typical variance that steadies each cell's
_VARIANCE_FLOOR = 1e-26
_TO_SIGMA = 1.4826  # median absolute deviation of normal noise
_GRID_POINTS = 201


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class _Findings:
    """All that was found out about one construct's cells together."""

    scaled: ScaledCells
    pooled: PooledShape
    departure_mv: FloatArray  # (n_cells,), own shape and leftovers
    median_mv: FloatArray  # (n_cells,), departures included
    own_uncertainty_mv: FloatArray  # (n_cells,)
    gain: FloatArray  # (n_cells,)
    offset: FloatArray  # (n_cells,)
    residual: FloatArray  # (n_cells, n_points)
    missing: list[Missing]
    slopes: Slopes
    noise: FloatArray  # (n_cells,), fraction of each cell's charge
    typical_noise: float  # median over the cells
    midpoint_mv: float  # of the mean curve, relative to its median
    rise_mv: tuple[float, float]  # where the mean curve has moved 10 and 90 %, relative to its median


def read_construct(
    curves: Sequence[Curve], *, correct_sloping_plateaus: bool = False
) -> tuple[CellReading, ...]:
    """Estimate the median voltage of every cell of one construct.

    Parameters
    ----------
    curves : sequence of Curve
        All cells of one construct; their voltages, units and scales may differ, and a falling charge is
        read as a rising one of the other sign. Their order changes nothing.
    correct_sloping_plateaus : bool, default False
        Take off the straight line that both plateaus of a cell share before reading it: right where residual
        linear capacity is known to be the cause, wrong where a slow component is.

    Returns
    -------
    tuple of CellReading
        In the order of `curves`. A cell that cannot be read, or whose curve leaves out too much charge, has
        ``used`` False and a reason.

    Notes
    -----
    ``truncation_mv`` is the same for all cells read together. It holds the uncertainty of the shared shape,
    which the scatter between cells cannot show, and a share of what lies outside the measured range.

    References
    ----------
    Wyman J (1964). Adv Protein Chem 19, 223-286: linked functions, median ligand activity (from memory).
    """
    readings: dict[int, CellReading] = {}
    readable: list[int] = []
    for i in sorted(range(len(curves)), key=lambda i: canonical(curves[i])):
        reason = why_unreadable(curves[i])
        if reason is None:
            readable.append(i)
        else:
            readings[i] = unreadable(curves[i], reason)
    if readable:
        scaled = scale([curves[i] for i in readable])
        readings.update(zip(readable, _read(scaled, correct_sloping_plateaus), strict=True))
    return tuple(readings[i] for i in range(len(curves)))


def _read(scaled: ScaledCells, correct: bool) -> list[CellReading]:
    pooled = _pool(scaled.cells)
    missing = missing_charge(pooled)
    slopes = find_slopes(pooled)
    if correct and slopes.supported:
        scaled = replace(scaled, cells=slopes.off(scaled.cells))
        pooled = _pool(scaled.cells)
        slopes, missing = no_slopes(scaled.cells), missing_charge(pooled)
    found = _findings(scaled, pooled, missing, slopes)
    shift = slopes.shift_mv if slopes.supported else 0.0
    common = truncation_mv(pooled, missing, slope_shift_mv=shift)
    readings = [_reading(found, i, common) for i in range(len(scaled.curves))]
    return _name_outliers(readings)


def _findings(scaled: ScaledCells, pooled: PooledShape, missing: list[Missing], slopes: Slopes) -> _Findings:
    departures = own_departures(pooled)
    departure = departures.own_mv + smooth_leftover_mv(pooled, departures.left)
    noise = _noise(pooled) / np.maximum(np.abs(pooled.gain), _VARIANCE_FLOOR)
    middle, rise = _landmarks(pooled)
    return _Findings(
        scaled=scaled,
        pooled=pooled,
        departure_mv=departure,
        median_mv=pooled.median_mv + departure,
        own_uncertainty_mv=np.sqrt(pooled.own_variance_mv2),
        gain=pooled.gain,
        offset=pooled.offset,
        residual=pooled.residual,
        missing=missing,
        slopes=slopes,
        noise=noise,
        typical_noise=float(np.median(noise)),
        midpoint_mv=middle,
        rise_mv=rise,
    )


def _pool(cells: Cells) -> PooledShape:
    """Pool the shape, a second time with weights when the cells' noise differs much."""
    pooled = pool_shape(cells)
    variance = _noise(pooled) ** 2
    typical = float(np.median(variance))
    count = (cells.weight > 0).sum(axis=1)
    steadied = (_NOISE_PRIOR_POINTS * typical + count * variance) / (_NOISE_PRIOR_POINTS + count)
    steadied = np.maximum(steadied, _VARIANCE_FLOOR)
    if len(variance) < 2 or steadied.max() < _UNEVEN_NOISE * steadied.min():
        return pooled
    relative = np.clip(typical / steadied, 0.01, 4.0)
    return pool_shape(replace(cells, weight=(cells.weight > 0) * relative[:, None]))


def _noise(pooled: PooledShape) -> FloatArray:
    """Standard deviation of each cell's points around the averaged curve, cells scaled to 0..1."""
    cells = pooled.cells
    inside = cells.weight > 0
    shared = pooled.best.family.parameters / len(cells.y)
    free = np.maximum(inside.sum(axis=1) - 3.0 - shared, 1.0)
    return np.asarray(np.sqrt((inside * pooled.residual**2).sum(axis=1) / free), dtype=np.float64)


def _landmarks(pooled: PooledShape) -> tuple[float, tuple[float, float]]:
    """Where the mean curve has moved 50 %, and 10 and 90 %, relative to its median (mV)."""
    measured = pooled.cells.v_mv[pooled.cells.weight > 0]
    grid = np.linspace(measured.min(), measured.max(), _GRID_POINTS)
    q = pooled.q(grid[None], pooled.shifts_mv.mean(axis=1, keepdims=True))[0]
    at = np.interp([0.1, 0.5, 0.9], np.maximum.accumulate(q), grid) - pooled.median_mv.mean()
    return float(at[1]), (float(at[0]), float(at[2]))


def _reading(found: _Findings, i: int, common_mv: float) -> CellReading:
    scaled, curve = found.scaled, found.scaled.curves[i]
    relative = float(found.median_mv[i])
    plain = plain_median_mv(curve.voltage_mv, curve.charge)
    median = relative + scaled.origin_mv
    low = scaled.low[i] + found.offset[i] * scaled.height[i]
    missing = found.missing[i]
    return CellReading(
        construct=curve.construct,
        cell=curve.cell,
        batch=curve.batch,
        median_mv=median,
        midpoint_mv=median + found.midpoint_mv,
        low_plateau=float(low),
        high_plateau=float(low + found.gain[i] * scaled.height[i]),
        points=len(curve.voltage_mv),
        plain_median_mv=plain,
        truncation_mv=common_mv,
        own_uncertainty_mv=float(found.own_uncertainty_mv[i]),
        missing_low=missing.low,
        missing_high=missing.high,
        noise=float(found.noise[i]),
        fit=_fitted_curve(found, i),
        used=missing.reason is None,
        reason=missing.reason,
        flags=cell_flags(_evidence(found, i, relative, plain - median)),
    )


def _fitted_curve(found: _Findings, i: int) -> FittedCurve:
    pooled = found.pooled
    moved = found.scaled.origin_mv + float(found.departure_mv[i])
    return FittedCurve(
        families=tuple(fit.family for fit in pooled.fits),
        weights=tuple(pooled.weights.tolist()),
        parameters=tuple(tuple(fit.theta.tolist()) for fit in pooled.fits),
        origins_mv=tuple((pooled.shifts_mv[:, i] + moved).tolist()),
    )


def _evidence(found: _Findings, i: int, median_mv: float, disagreement_mv: float) -> Evidence:
    cells, curve = found.scaled.cells, found.scaled.curves[i]
    inside = cells.weight[i] > 0
    v = cells.v_mv[i][inside]
    y = cells.y[i][inside] / found.gain[i]
    residual = found.residual[i][inside] / found.gain[i]
    fallen = np.maximum.accumulate(y) - y
    spread = float(np.median(np.abs(residual - np.median(residual))))
    return Evidence(
        subject=f"{curve.construct}/{curve.cell}",
        points=len(v),
        lowest_mv=float(curve.voltage_mv[0]),
        highest_mv=float(curve.voltage_mv[-1]),
        missing_low=found.missing[i].low,
        missing_high=found.missing[i].high,
        doubt_low_mv=found.missing[i].doubt_low_mv,
        doubt_high_mv=found.missing[i].doubt_high_mv,
        slope_charge=float(found.slopes.added[i]) if found.slopes.supported else 0.0,
        slope_shift_mv=found.slopes.shift_mv,
        reversal=float(fallen.max()),
        reversal_mv=float(curve.voltage_mv[int(np.argmax(fallen))]),
        typical_noise=max(_TO_SIGMA * spread, found.typical_noise),
        noise=float(found.noise[i]),
        largest_step_mv=_largest_step(v - median_mv, found.rise_mv),
        rise_mv=found.rise_mv[1] - found.rise_mv[0],
        disagreement_mv=disagreement_mv,
        plain_uncertainty_mv=plain_uncertainty_mv(v, median_mv, found.typical_noise),
    )


def _largest_step(v: FloatArray, rise: tuple[float, float]) -> float:
    """Largest step that overlaps the rise."""
    overlaps = (v[1:] > rise[0]) & (v[:-1] < rise[1])
    steps = np.diff(v)
    return float(steps[overlaps].max() if overlaps.any() else steps.max())


def _name_outliers(readings: list[CellReading]) -> list[CellReading]:
    used = [reading for reading in readings if reading.used]
    found = outlying_flags([r.subject for r in used], np.array([r.median_mv for r in used]))
    return [
        replace(r, flags=(*r.flags, found[r.subject])) if r.used and r.subject in found else r
        for r in readings
    ]
