"""Least squares for one shape shared by several cells, each with its own gain, offset and shift.

Gain and offset are linear and are solved for exactly at every step (variable projection); the shift of a
cell touches no other cell and is eliminated from the normal equations, so that each step solves a system no
larger than the shape. The shape has a weak normal prior, without which a free sum of sigmoids now and then
invents a slow component that runs off the end of the data. Sums are elementwise, not matrix products, so
that the number of threads of the linear algebra library changes no digit.

References
----------
Golub GH, Pereyra V (1973). SIAM J Numer Anal 10, 413-432; Marquardt DW (1963). J SIAM 11, 431-441. (Both
cited from memory for the methods' names.)
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from .shapes import Family, FloatArray

_LARGEST_STEP_MV = 40.0
_FROZEN = 1e12  # stiffness that holds a parameter at its bound
_STEPS = 40
_STEPS_TOGETHER = 3  # after which only the best start goes on
_STUCK = 1e6  # damping at which no step helps
_TINY = 1e-14


@dataclass(frozen=True, slots=True, eq=False)
class Cells:
    """Curves of one construct, padded to one length."""

    v_mv: FloatArray  # (n_cells, n_points)
    y: FloatArray  # (n_cells, n_points), each cell scaled to about 0..1
    weight: FloatArray  # (n_cells, n_points), 0 for padding
    baseline: Literal["zero", "level", "line"] = "level"  # what each cell's curve stands on

    @property
    def points(self) -> int:
        """Number of measured points."""
        return int((self.weight > 0).sum())

    @property
    def root(self) -> FloatArray | None:
        """Square root of the weights; None where all are 1, which saves the multiplications."""
        if bool((self.weight == 1.0).all()):
            return None
        return np.asarray(np.sqrt(self.weight), dtype=np.float64)

    @property
    def baseline_basis(self) -> FloatArray:
        """Orthonormal columns of the baseline times root weight, (n_columns, n_cells, n_points)."""
        if self.baseline == "zero":
            return np.empty((0, *self.v_mv.shape))
        root = np.sqrt(self.weight)
        total = self.weight.sum(axis=-1, keepdims=True)
        level: FloatArray = root / np.sqrt(total)
        if self.baseline == "level":
            return level[None]
        centred = root * (self.v_mv - (self.weight * self.v_mv).sum(axis=-1, keepdims=True) / total)
        return np.stack([level, centred / np.sqrt((centred**2).sum(axis=-1, keepdims=True))])


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Prior:
    """Where a shape's parameters may be and where they probably are."""

    mean: FloatArray  # (n_parameters,)
    sd: FloatArray  # (n_parameters,)
    low: FloatArray  # (n_parameters,)
    high: FloatArray  # (n_parameters,)
    variance: float  # of the noise; what a deviation of one sd from the mean costs

    @property
    def precision(self) -> FloatArray:
        """Stiffness in the units of the sum of squares."""
        return self.variance / self.sd**2


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class PooledFit:
    """One family fitted to all cells."""

    family: Family
    theta: FloatArray  # (n_parameters,)
    shift_mv: FloatArray  # (n_cells,)
    gain: FloatArray  # (n_cells,)
    offset: FloatArray  # (n_cells,), of the baseline at the mean voltage
    slope: FloatArray  # (n_cells,), of the baseline per mV; 0 unless it is a line
    slope_information: FloatArray  # (n_cells,), of that slope at a given shape; 0 unless it is a line
    residual: FloatArray  # (n_cells, n_points)
    sum_of_squares: float
    information: FloatArray  # (n_parameters, n_parameters), shifts eliminated, prior included
    coupling: FloatArray  # (n_parameters, n_cells), shape against shift
    shift_information: FloatArray  # (n_cells,)
    departure: FloatArray  # (n_cells, n_points, n_parameters): what a cell's own shape would change
    prior: Prior

    @property
    def median_mv(self) -> FloatArray:
        """Median voltage of each cell (mV), shape (n_cells,)."""
        return self.shift_mv + self.family.median_mv(self.theta)

    @property
    def median_by_shape(self) -> FloatArray:
        """Derivative of each cell's median by the shape, its shift following; (n_parameters, n_cells)."""
        return self.family.median_gradient(self.theta)[:, None] - self.coupling / self.shift_information


class _Point(NamedTuple):
    """Everything at one point of the search; the leading axis is the batch of starts."""

    q: FloatArray  # (b, c, n), baseline projected out and of unit length
    gain: FloatArray  # (b, c)
    base: FloatArray  # (b, n_columns, c), coefficients of the baseline
    residual: FloatArray  # (b, c, n)
    by_shape: FloatArray  # (b, p + 1, c, n): derivatives by each parameter and, last, by the shift


class _Normal(NamedTuple):
    shape: FloatArray  # (b, p, p)
    coupling: FloatArray  # (b, p, c)
    shift: FloatArray  # (b, c)
    shape_pull: FloatArray  # (b, p)
    shift_pull: FloatArray  # (b, c)


def fit_shape(
    cells: Cells,
    family: Family,
    starts: FloatArray,
    shift_mv: FloatArray,
    prior: Prior,
    *,
    tolerance: float = 1e-4,
) -> PooledFit:
    """Fit one family from several starts and keep the best.

    Parameters
    ----------
    cells : Cells
        The construct's curves.
    family : Family
        What to fit.
    starts : ndarray, shape (n_starts, n_parameters)
        Parameter vectors to start from.
    shift_mv : ndarray, shape (n_cells,)
        Shifts to start from (mV).
    prior : Prior
        Bounds and weak prior.
    tolerance : float, default 1e-4
        Relative gain of the sum of squares below which the search ends.

    Returns
    -------
    PooledFit
    """
    theta = np.clip(starts, prior.low, prior.high)
    theta, shift = _search(
        cells, family, theta, np.repeat(shift_mv[None], len(theta), axis=0), prior, tolerance
    )
    return _describe(cells, family, theta, shift, prior)


def _search(
    cells: Cells, family: Family, theta: FloatArray, shift: FloatArray, prior: Prior, tolerance: float
) -> tuple[FloatArray, FloatArray]:
    """Levenberg-Marquardt over a batch of starts; ends when the best of them has converged."""
    damping, basis = np.full(len(theta), 1e-2), cells.baseline_basis
    here = _evaluate(cells, family, theta, shift, basis)
    cost = _cost(here, theta, prior)
    for step in range(_STEPS):
        normal = _normal(cells, here, theta, prior, basis)
        new_theta, new_shift = _move(normal, theta, shift, damping, prior, family.step_limit)
        there = _evaluate(cells, family, new_theta, new_shift, basis)
        new_cost = _cost(there, new_theta, prior)
        better = new_cost <= cost
        small = np.where(better, cost - new_cost < tolerance * cost, damping > _STUCK)
        if better.all():
            theta, shift, here, cost = new_theta, new_shift, there, new_cost
        else:
            theta = np.where(better[:, None], new_theta, theta)
            shift = np.where(better[:, None], new_shift, shift)
            here = _Point(*(_pick(better, new, old) for new, old in zip(there, here, strict=True)))
            cost = np.where(better, new_cost, cost)
        damping = np.clip(np.where(better, damping * 0.1, damping * 6.0), 1e-10, 100.0 * _STUCK)
        best = int(np.argmin(cost))
        if (small[best] and step > 2) or cost[best] <= _TINY**2:
            break
        if step == _STEPS_TOGETHER:
            only = slice(best, best + 1)
            theta, shift, cost, damping = theta[only], shift[only], cost[only], damping[only]
            here = _Point(*(part[only] for part in here))
    best = int(np.argmin(cost))
    return theta[best], shift[best]


def _pick(better: NDArray[np.bool_], new: FloatArray, old: FloatArray) -> FloatArray:
    return np.where(better.reshape((-1,) + (1,) * (new.ndim - 1)), new, old)


def _evaluate(
    cells: Cells, family: Family, theta: FloatArray, shift: FloatArray, basis: FloatArray
) -> _Point:
    """Solve for gains and baselines; derivatives are left as they are. Everything is times root weight."""
    root = cells.root
    values = family.values(cells.v_mv - shift[:, :, None], theta)
    raw, y = _whitened(values.q, root), _whitened(cells.y, root)
    q = _off_basis(raw, basis)
    length = np.sqrt(_dot(q, q)) + _TINY  # a shape that is flat over a cell's range has no gain
    q = q / length[..., None]
    y_off = _off_basis(y, basis)
    scaled_gain = _dot(q, y_off)
    gain = scaled_gain / length
    base = _dot(basis, (y - gain[..., None] * raw)[:, None])
    gradient = np.concatenate([values.gradient, -values.slope[:, None]], axis=1)
    gradient *= gain[:, None, :, None]
    residual = y_off - scaled_gain[..., None] * q
    return _Point(q, gain, base, residual, _whitened(gradient, root))


def _whitened(x: FloatArray, root: FloatArray | None) -> FloatArray:
    return x if root is None else x * root


def _dot(x: FloatArray, y: FloatArray) -> FloatArray:
    """Sum of products over the points."""
    return np.asarray(np.einsum("...n,...n->...", x, y), dtype=np.float64)


def _off_basis(x: FloatArray, basis: FloatArray) -> FloatArray:
    """Part of `x` that no baseline can imitate."""
    for column in basis:
        x = x - _dot(x, column)[..., None] * column
    return x


def _cost(here: _Point, theta: FloatArray, prior: Prior) -> FloatArray:
    misfit = np.einsum("bcn,bcn->b", here.residual, here.residual)
    return np.asarray(misfit + (prior.precision * (theta - prior.mean) ** 2).sum(axis=-1), dtype=np.float64)


def _normal(cells: Cells, here: _Point, theta: FloatArray, prior: Prior, basis: FloatArray) -> _Normal:
    """Normal equations with gains and baselines eliminated.

    The ridge keeps a cell or a parameter that the data do not touch from being singular.
    """
    linear = [_dot(here.by_shape, column) for column in basis]
    linear.append(_dot(here.by_shape, here.q[:, None]))
    imitated = np.concatenate(linear, axis=-1)  # (b, p + 1, columns of all cells)
    flat = here.by_shape.reshape(*here.by_shape.shape[:2], -1)
    pull = _dot(here.by_shape, here.residual[:, None])
    shape = np.einsum("bpk,bqk->bpq", flat[:, :-1], flat[:, :-1])
    shape -= np.einsum("bpk,bqk->bpq", imitated[:, :-1], imitated[:, :-1])
    against_shift = _dot(here.by_shape, here.by_shape[:, -1:])
    for part in linear:
        against_shift -= part * part[:, -1:]
    diagonal, ridge = np.arange(shape.shape[1]), _TINY * cells.points
    shape[:, diagonal, diagonal] += prior.precision + ridge
    return _Normal(
        shape=shape,
        coupling=against_shift[:, :-1],
        shift=against_shift[:, -1] + ridge * _TINY,
        shape_pull=pull[:, :-1].sum(axis=-1) - prior.precision * (theta - prior.mean),
        shift_pull=pull[:, -1],
    )


def _move(
    normal: _Normal,
    theta: FloatArray,
    shift: FloatArray,
    damping: FloatArray,
    prior: Prior,
    limit: FloatArray,
) -> tuple[FloatArray, FloatArray]:
    """One damped step, inside the bounds."""
    k = np.arange(theta.shape[1])
    held = (theta <= prior.low) & (normal.shape_pull < 0) | (theta >= prior.high) & (normal.shape_pull > 0)
    stiff_shift = normal.shift * (1.0 + damping[:, None])
    relative = normal.coupling / stiff_shift[:, None]
    matrix = normal.shape - np.einsum("bpc,bqc->bpq", relative, normal.coupling)
    matrix[:, k, k] += damping[:, None] * normal.shape[:, k, k] + np.where(held, _FROZEN, 0.0)
    pull = normal.shape_pull - (relative * normal.shift_pull[:, None]).sum(axis=-1)
    step = np.linalg.solve(matrix, np.where(held, 0.0, pull)[..., None])[..., 0]
    new_theta = _within(theta + _within(step, -limit, limit), prior.low, prior.high)
    follow = normal.shift_pull - (normal.coupling * (new_theta - theta)[:, :, None]).sum(axis=1)
    new_shift = shift + _within(follow / stiff_shift, -_LARGEST_STEP_MV, _LARGEST_STEP_MV)
    return new_theta, new_shift


def _within(x: FloatArray, low: FloatArray | float, high: FloatArray | float) -> FloatArray:
    return np.asarray(
        np.minimum(np.maximum(x, low), high), dtype=np.float64
    )  # np.clip is slow on small arrays


def _describe(cells: Cells, family: Family, theta: FloatArray, shift: FloatArray, prior: Prior) -> PooledFit:
    """Collect what the averaging needs at the optimum."""
    basis = cells.baseline_basis
    here = _evaluate(cells, family, theta[None], shift[None], basis)
    normal = _normal(cells, here, theta[None], prior, basis)
    coupling, shift_information = normal.coupling[0], normal.shift[0]
    slope, slope_information = _baseline_slope(cells, here, basis)
    along = coupling / shift_information
    free = _off_basis(here.by_shape[0], basis)
    free = free - _dot(free, here.q[0])[..., None] * here.q[0]
    return PooledFit(
        family=family,
        theta=theta,
        shift_mv=shift,
        gain=here.gain[0],
        offset=here.base[0, 0] / np.sqrt(cells.weight.sum(axis=-1)) if len(basis) else np.zeros(len(shift)),
        slope=slope,
        slope_information=slope_information,
        residual=_unwhitened(here.residual[0], cells),
        sum_of_squares=float((here.residual[0] ** 2).sum()),
        information=normal.shape[0] - np.einsum("pc,qc->pq", along, coupling),
        coupling=coupling,
        shift_information=shift_information,
        departure=np.moveaxis(_unwhitened(free[:-1] - along[:, :, None] * free[-1:], cells), 0, -1),
        prior=prior,
    )


def _unwhitened(x: FloatArray, cells: Cells) -> FloatArray:
    """Take the root weights off again; 0 at points of no weight."""
    root = np.sqrt(cells.weight)
    return np.where(root > 0.0, x / np.where(root > 0.0, root, 1.0), 0.0)


def _baseline_slope(cells: Cells, here: _Point, basis: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Slope of each cell's baseline per mV, and its information with level, gain and shift free."""
    if cells.baseline != "line":
        none = np.zeros(len(cells.y))
        return none, none
    level, line = basis
    root = np.sqrt(cells.weight)
    centred = cells.v_mv - (cells.weight * cells.v_mv).sum(axis=-1, keepdims=True) / cells.weight.sum(
        axis=-1, keepdims=True
    )
    per_mv = 1.0 / np.sqrt((cells.weight * centred**2).sum(axis=-1))
    shape = root * cells.y - here.residual[0] - here.base[0, 1][:, None] * line
    others, _ = np.linalg.qr(np.stack([level, shape, here.by_shape[0, -1]], axis=-1))
    along = (others * line[..., None]).sum(axis=1)
    left = np.maximum(1.0 - (along**2).sum(axis=-1), 0.0)
    return here.base[0, 1] * per_mv, left / per_mv**2
