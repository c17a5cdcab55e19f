"""The cells of constructs that were recorded in batches, as sources of error."""

from __future__ import annotations

from collections.abc import Sequence
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from .sources import CellSource, Component, Part, Spread, Stream, resampled_sums

FloatArray = NDArray[np.float64]

# A construct whose residuals keep less than this many degrees of freedom borrows the others' scatter.
_OWN_SCATTER_DOF = 0.5
_ROUNDING = 1e-8


class BatchMeans:
    """The cells of one construct, counted by batch.

    Parameters
    ----------
    cells : CellSource
        Every cell with its batch, two batches or more.
    """

    def __init__(self, cells: CellSource) -> None:
        names = sorted({batch for batch in cells.batches if batch is not None})
        batch = np.array(cells.batches)
        columns = [np.mean(cells.values[:, batch == name], axis=1) for name in names]
        self.components = cells.components
        self.cells, self.batches = len(batch), len(names)
        self.name = f"{cells.name} in {len(names)} batches"
        self._means = CellSource(name=self.name, components=self.components, values=np.column_stack(columns))
        self._shift: FloatArray = np.mean(self._means.values, axis=1) - np.mean(cells.values, axis=1)

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        """One part, with the number of batches less one as degrees of freedom."""
        return self._means.parts(gradient)

    def shift(self, gradient: Sequence[float]) -> float:
        """The mean of the batch means less the mean of all cells."""
        return float(np.sum(np.asarray(gradient) * self._shift))

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> FloatArray:
        """Bootstrap replicates of the weighted sum, batches resampled."""
        return self._means.deviations_drawn(gradient, stream, replicates)

    def footprint(self, gradient: Sequence[float]) -> dict[Component, FloatArray]:
        """One error a batch, shared with no other way of counting."""
        first = self.components[0]
        named = Component(first.kind, f"{first.construct} by batch")
        (errors,) = self._means.footprint(gradient).values()
        return {named: errors}


class Blocks:
    """The cells of several constructs recorded in the same batches, compared within batches.

    Parameters
    ----------
    corners : sequence of CellSource
        One for each construct, every cell with its batch and all its numbers.
    signs : sequence of float
        With which each construct enters the comparison.

    Notes
    -----
    With y the value of a cell (an energy, say: the sensitivities of the quantity without the construct's
    sign, times the cell's numbers), the model is y = construct + batch + error. The comparison is its
    ordinary least squares estimate, in which every batch effect cancels; for complete blocks it equals that
    from plain means. With w the weights of the cells in it, its variance is the sum over constructs k of
    q_k SS_k / nu_k: q_k the sum of squared weights, SS_k the sum of squared residuals and nu_k the sum of
    (1 - leverage) over the construct's cells. Degrees of freedom are Welch-Satterthwaite's with nu_k. In
    complete blocks the variance is unbiased whatever the scatter of each construct.
    """

    def __init__(self, corners: Sequence[CellSource], signs: Sequence[float]) -> None:
        self.corners = tuple(corners)
        self.signs = np.asarray(signs, dtype=float)
        self.components: tuple[Component, ...] = tuple(c for corner in corners for c in corner.components)
        batches = sorted({str(batch) for corner in corners for batch in corner.batches})
        self.name = f"cells within {len(batches)} batches"
        self.batches = len(batches)
        self.construct = np.repeat(np.arange(len(corners)), [len(corner.batches) for corner in corners])
        batch = np.array([batches.index(str(one)) for corner in corners for one in corner.batches])
        design = np.zeros((len(batch), len(corners) + len(batches)))
        design[np.arange(len(batch)), self.construct] = 1
        design[np.arange(len(batch)), len(corners) + batch] = 1
        inverse = np.linalg.pinv(design.T @ design)
        wanted = np.concatenate([self.signs, np.zeros(len(batches))])
        self.weights: FloatArray = design @ inverse @ wanted  # (n_cells,), of y in the comparison
        self.residual_maker: FloatArray = np.eye(len(batch)) - design @ inverse @ design.T
        self.estimable = bool(np.allclose(design.T @ self.weights, wanted, atol=_ROUNDING))

    @cached_property
    def _dof(self) -> FloatArray:
        return self._by_construct(np.diag(self.residual_maker))

    @cached_property
    def _counts(self) -> FloatArray:
        return self._by_construct(np.ones(len(self.construct)))

    def _by_construct(self, per_cell: FloatArray) -> FloatArray:
        sums: FloatArray = np.bincount(self.construct, weights=per_cell, minlength=len(self.corners)).astype(
            float
        )
        return sums

    @property
    def has_scatter(self) -> bool:
        """Whether anything is left to estimate the scatter within batches from."""
        return float(self._dof.sum()) > 1 - _ROUNDING

    def by_corner(self, gradient: Sequence[float]) -> list[list[float]]:
        """Sensitivities to the components of each construct."""
        rest = iter(gradient)
        return [[next(rest) for _ in corner.components] for corner in self.corners]

    def _values(self, gradient: Sequence[float]) -> FloatArray:
        """Value of every cell without the sign of its construct, shape (n_cells,)."""
        per_corner = [
            np.sum(np.asarray(own)[:, np.newaxis] * corner.values, axis=0) / sign
            for own, corner, sign in zip(self.by_corner(gradient), self.corners, self.signs, strict=True)
        ]
        values: FloatArray = np.concatenate(per_corner)
        return values

    def whole(self, gradient: Sequence[float]) -> bool:
        """Whether every construct takes part, so that batch effects can cancel."""
        return all(any(own) for own in self.by_corner(gradient))

    def alone(self, gradient: Sequence[float]) -> list[tuple[CellSource, list[float]]]:
        """The constructs that take part, each by itself, as its cells.

        Batches that other constructs share are no sample of batches: what is said of some of the constructs
        holds for the batches recorded.
        """
        pairs = zip(self.corners, self.by_corner(gradient), strict=True)
        return [(corner, own) for corner, own in pairs if any(own)]

    def _scatter(self, residuals: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Variance of one cell of each construct, and its degrees of freedom."""
        squares, dof = self._by_construct(residuals**2), self._dof
        own = dof >= _OWN_SCATTER_DOF - _ROUNDING
        pooled = squares.sum() / dof.sum()
        variances = np.where(own, squares / np.where(own, dof, 1.0), pooled)
        return variances, np.where(own, dof, dof.sum())

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        """One part for each construct."""
        if not self.whole(gradient):
            return tuple(part for source, own in self.alone(gradient) for part in source.parts(own))
        variances, dof = self._scatter(self.residual_maker @ self._values(gradient))
        squared_weights = self._by_construct(self.weights**2)
        return tuple(
            Part(f"{corner.name} within {self.batches} batches", Spread(float(q * v), float(nu)))
            for corner, q, v, nu in zip(self.corners, squared_weights, variances, dof, strict=True)
        )

    def shift(self, gradient: Sequence[float]) -> float:
        """The least squares estimate less that from plain means; 0 for complete blocks."""
        plain = self.signs[self.construct] / self._counts[self.construct]
        return float(np.sum((self.weights - plain) * self._values(gradient)))

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> FloatArray:
        """Bootstrap replicates of the comparison: residuals resampled within construct.

        Residuals carry the factor sqrt(n_k / nu_k), so that their spread is the variance of `parts`.
        """
        total: FloatArray = np.zeros(replicates)
        if not self.whole(gradient):
            for source, own in self.alone(gradient):
                total += source.deviations_drawn(own, stream, replicates)
            return total
        for k, corner in enumerate(self.corners):
            own = self.construct == k
            scaled = self._scaled_residuals(gradient)[own]
            total += weighted_sums(scaled, self.weights[own], stream(corner.components[0]), replicates)
        return total

    def _scaled_residuals(self, gradient: Sequence[float]) -> FloatArray:
        """Residuals whose mean square within each construct is the variance of one of its cells."""
        residuals = self.residual_maker @ self._values(gradient)
        variances, _ = self._scatter(residuals)
        squares = self._by_construct(residuals**2)
        scale = np.sqrt(variances * self._counts / np.where(squares > 0, squares, 1.0))
        scaled: FloatArray = residuals * np.where(squares > 0, scale, 0.0)[self.construct]
        return scaled

    def footprint(self, gradient: Sequence[float]) -> dict[Component, FloatArray]:
        """One error a cell, with the sign of its construct."""
        if not self.whole(gradient):
            return {
                c: errors
                for source, own in self.alone(gradient)
                for c, errors in source.footprint(own).items()
            }
        scale = self.signs * np.sqrt(self._by_construct(self.weights**2) / self._counts)
        errors = self._scaled_residuals(gradient) * scale[self.construct]
        return {corner.components[0]: errors[self.construct == k] for k, corner in enumerate(self.corners)}


def weighted_sums(
    values: FloatArray, weights: FloatArray, rng: np.random.Generator, replicates: int
) -> FloatArray:
    """Weighted sum over places, each filled with a value drawn with replacement, shape (replicates,)."""
    if np.ptp(weights) <= _ROUNDING * np.abs(weights).max():
        drawn: FloatArray = weights[0] * resampled_sums(values[np.newaxis], rng, replicates)[0]
        return drawn
    total = np.zeros(replicates)
    picked = rng.integers(0, len(values), size=(len(values), replicates))
    for weight, place in zip(weights, picked, strict=True):
        total += weight * values[place]
    return total
