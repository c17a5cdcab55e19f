r"""Two families of smooth rising curves from 0 to 1 with medians in closed form.

``parallel`` is a weighted sum of independent sigmoids, what populations of independent two-state steps
give. ``ladder`` is the curve of one molecule that climbs states of rising charge: every equilibrium gating
scheme is such a ladder once states of equal charge are lumped, so the family is closed under the schemes
in `cornerwise.gating`. Both rise everywhere and level off at both ends.

Slopes are kept as kappa = z/kT (per mV), so that no temperature is needed here.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]

_STEEPEST_EXPONENT = 60.0  # exp of it is far beyond the precision of a float and far below its overflow


class Values(NamedTuple):
    """A family's curves and derivatives for a batch of parameter vectors."""

    q: FloatArray  # (n_batch, n_cells, n_points)
    slope: FloatArray  # dq/dV (1/mV), same shape
    gradient: FloatArray  # dq/dparameter, (n_batch, n_parameters, n_cells, n_points)


@dataclass(frozen=True, kw_only=True, slots=True)
class Family:
    """A family with a fixed number of components.

    Parameter vectors hold the midpoints (mV), then the logarithms of the slopes kappa (1/mV), then, for
    ``parallel`` with two components or more, the logarithms of the weights relative to the last one.
    """

    kind: Literal["parallel", "ladder"]
    components: int

    @property
    def parameters(self) -> int:
        """Length of a parameter vector."""
        k = self.components
        return 3 * k - 1 if self.kind == "parallel" else 2 * k

    @property
    def step_limit(self) -> FloatArray:
        """Largest change of each parameter in one step of a search: 40 mV, or a factor of 4.5."""
        return np.where(np.arange(self.parameters) < self.components, 40.0, 1.5)

    def values(self, u: FloatArray, theta: FloatArray) -> Values:
        """Curves, slopes and gradients.

        Parameters
        ----------
        u : ndarray, shape (n_batch, n_cells, n_points)
            Voltages (mV), each cell's shift already taken off.
        theta : ndarray, shape (n_batch, n_parameters)
            Parameter vectors.
        """
        if self.kind == "parallel":
            return _parallel(u, theta, self.components)
        return _ladder(u, theta, self.components)

    def q(self, u: FloatArray, theta: FloatArray) -> FloatArray:
        """Curve of one parameter vector at voltages of any shape."""
        flat = np.atleast_1d(u).reshape(1, 1, -1)
        return self.values(flat, theta[None]).q.reshape(np.shape(u))

    def median_mv(self, theta: FloatArray) -> float:
        """Integral of V dq, the mean of the midpoints weighted by what each component moves."""
        share = _shares(theta, self)
        return float((share * theta[: self.components]).sum())

    def median_gradient(self, theta: FloatArray) -> FloatArray:
        """Derivative of `median_mv` by each parameter."""
        k = self.components
        share = _shares(theta, self)
        pull = share * (theta[:k] - (share * theta[:k]).sum())
        if self.kind == "ladder":
            return np.concatenate([share, pull])
        return np.concatenate([share, np.zeros(k), pull[: k - 1]])


def _shares(theta: FloatArray, family: Family) -> FloatArray:
    """Fraction of the whole charge that each component moves."""
    k = family.components
    log_share = theta[k : 2 * k] if family.kind == "ladder" else np.append(theta[2 * k :], 0.0)
    share = np.exp(log_share - log_share.max())
    return np.asarray(share / share.sum(), dtype=np.float64)


def _parallel(u: FloatArray, theta: FloatArray, k: int) -> Values:
    log_weight = np.concatenate([theta[:, 2 * k :], np.zeros((len(theta), 1))], axis=1)
    weight = np.exp(log_weight - log_weight.max(axis=1, keepdims=True))
    weight = (weight / weight.sum(axis=1, keepdims=True))[:, :, None, None]
    kappa = np.exp(theta[:, k : 2 * k, None, None])
    x = kappa * (u[:, None] - theta[:, :k, None, None])
    step = 1.0 / (1.0 + np.exp(np.minimum(-x, _STEEPEST_EXPONENT)))
    rise = weight * step * (1.0 - step)
    q = (weight * step).sum(axis=1)
    by_midpoint = kappa * rise
    by_weight = (weight * (step - q[:, None]))[:, : k - 1]
    gradient = np.concatenate([-by_midpoint, rise * x, by_weight], axis=1)
    return Values(q, by_midpoint.sum(axis=1), gradient)


def _ladder(u: FloatArray, theta: FloatArray, k: int) -> Values:
    midpoint, kappa = theta[:, :k], np.exp(theta[:, k:])
    charge = np.cumsum(kappa, axis=1)[:, :, None, None]  # of state j, over kT
    energy = np.cumsum(kappa * midpoint, axis=1)[:, :, None, None]  # of state j, over kT
    total = charge[:, -1:]
    log_weight = u[:, None] * charge - energy
    top = np.maximum(log_weight.max(axis=1, keepdims=True), 0.0)  # the resting state weighs exp(0)
    p = np.exp(log_weight - top)
    p /= p.sum(axis=1, keepdims=True) + np.exp(-top)
    mean = (charge * p).sum(axis=1, keepdims=True)
    q = mean / total
    by_energy = p * (charge - mean) / total  # minus the derivative by energy j
    by_charge = p / total + u[:, None] * by_energy
    # A step's charge and energy enter every state above it.
    above_energy = _sum_above(by_energy)
    above_charge = _sum_above(by_charge)
    kappa4, midpoint4 = kappa[:, :, None, None], midpoint[:, :, None, None]
    gradient = np.concatenate(
        [-kappa4 * above_energy, kappa4 * (above_charge - midpoint4 * above_energy - q / total)], axis=1
    )
    return Values(q[:, 0], (charge * by_energy).sum(axis=1), gradient)


def _sum_above(x: FloatArray) -> FloatArray:
    summed = x.copy()
    for k in range(x.shape[1] - 2, -1, -1):
        summed[:, k] += summed[:, k + 1]
    return summed
