"""Donors and days: what the units of a comparison are when cells were recorded in batches.

Cells of one batch share whatever that batch does to them. When the constructs that are compared were
recorded in the same batches, the effect of a batch cancels within it; when each construct has its own
batches, batch means are all there is to count. Which of the two holds is decided for each comparison.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from .ledger import Ledger
from .sources import CellSource, Component, Part, Source, Spread, Stream, resampled_sums

FloatArray = NDArray[np.float64]
Rule = Literal["cells", "within batches", "batch means"]
Family = Literal["medians", "charges", "paired cells"]

# A construct whose residuals keep less than this many degrees of freedom borrows the others' scatter.
_OWN_SCATTER_DOF = 0.5
_ROUNDING = 1e-8


@dataclass(frozen=True, kw_only=True, slots=True)
class Units:
    """What was counted in one comparison, and why."""

    family: Family
    rule: Rule
    cells: int
    batches: int  # of all constructs together; 0 when none is stated
    reason: str  # a clause; empty when no batch is stated


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
        self.name = f"{cells.name} in {len(names)} batches"
        self._means = CellSource(name=self.name, components=self.components, values=np.column_stack(columns))
        self._shift: FloatArray = np.mean(self._means.values, axis=1) - np.mean(cells.values, axis=1)

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        """One part, with the number of batches less one as degrees of freedom."""
        return self._means.parts(gradient)

    def shift(self, gradient: Sequence[float]) -> float:
        """The mean of the batch means less the mean of all cells."""
        return float(np.sum(np.asarray(gradient) * self._shift))

    def draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """Bootstrap replicates of the means of batch means, batches resampled."""
        return self._means.draws(rng, replicates)

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> FloatArray:
        """Bootstrap replicates of the weighted sum, batches resampled."""
        return self._means.deviations_drawn(gradient, stream, replicates)


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

    def _gradients(self, gradient: Sequence[float]) -> list[list[float]]:
        """Sensitivities to the components of each construct."""
        rest = iter(gradient)
        return [[next(rest) for _ in corner.components] for corner in self.corners]

    def _values(self, gradient: Sequence[float]) -> FloatArray:
        """Value of every cell without the sign of its construct, shape (n_cells,)."""
        per_corner = [
            np.sum(np.asarray(own)[:, np.newaxis] * corner.values, axis=0) / sign
            for own, corner, sign in zip(self._gradients(gradient), self.corners, self.signs, strict=True)
        ]
        values: FloatArray = np.concatenate(per_corner)
        return values

    def _whole(self, gradient: Sequence[float]) -> bool:
        """Whether every construct takes part, so that batch effects can cancel."""
        return all(any(own) for own in self._gradients(gradient))

    def _alone(self, gradient: Sequence[float]) -> list[tuple[Source, list[float]]]:
        """The constructs that take part, each by itself."""
        return [
            (BatchMeans(corner) if len(set(corner.batches)) > 1 else corner, own)
            for corner, own in zip(self.corners, self._gradients(gradient), strict=True)
            if any(own)
        ]

    def _scatter(self, residuals: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Variance of one cell of each construct, and its degrees of freedom."""
        squares, dof = self._by_construct(residuals**2), self._dof
        own = dof >= _OWN_SCATTER_DOF
        pooled = squares.sum() / dof.sum()
        variances = np.where(own, squares / np.where(own, dof, 1.0), pooled)
        return variances, np.where(own, dof, dof.sum())

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        """One part for each construct."""
        if not self._whole(gradient):
            return tuple(part for source, own in self._alone(gradient) for part in source.parts(own))
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

    def draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """Not available: only comparisons can be drawn."""
        raise NotImplementedError("draw deviations of a comparison instead")

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> FloatArray:
        """Bootstrap replicates of the comparison: residuals resampled within construct.

        Residuals carry the factor sqrt(n_k / nu_k), so that their spread is the variance of `parts`.
        """
        total: FloatArray = np.zeros(replicates)
        if not self._whole(gradient):
            for source, own in self._alone(gradient):
                total += source.deviations_drawn(own, stream, replicates)
            return total
        residuals = self.residual_maker @ self._values(gradient)
        variances, _ = self._scatter(residuals)
        squares = self._by_construct(residuals**2)
        for k, corner in enumerate(self.corners):
            own = self.construct == k
            if squares[k] > 0:
                scaled = residuals[own] * np.sqrt(variances[k] * self._counts[k] / squares[k])
                total += weighted_sums(scaled, self.weights[own], stream(corner.components[0]), replicates)
        return total


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


def _fully_stated(source: CellSource) -> bool:
    return bool(source.batches) and None not in source.batches


def _decide(
    family: Family, sources: Sequence[CellSource], signs: Sequence[float]
) -> tuple[Units, list[Source]]:
    """Units of one family of cells, and the sources that speak in their place."""
    cells = sum(source.values.shape[1] for source in sources)
    stated = {batch for source in sources for batch in source.batches if batch is not None}

    def units(rule: Rule, reason: str) -> Units:
        return Units(family=family, rule=rule, cells=cells, batches=len(stated), reason=reason)

    if not stated:
        return units("cells", ""), []
    if not all(map(_fully_stated, sources)):
        return units("cells", "some cells have no batch"), []
    if not all(source.fully_shared for source in sources):
        return units("cells", "only some cells show both charge and median"), []
    if len(sources) > 1 and len(stated) > 1:
        blocks = Blocks(sources, signs)
        if blocks.estimable and blocks.has_scatter:
            return units("within batches", "the constructs share their batches, whose effects cancel"), [
                blocks
            ]
    if all(len(set(source.batches)) > 1 for source in sources):
        return units("batch means", "the constructs do not share their batches"), list(
            map(BatchMeans, sources)
        )
    if len(stated) == 1:
        return units("cells", "all cells come from one batch"), []
    return units("cells", "a construct has a single batch, so differences between batches are left out"), []


def regroup(
    ledger: Ledger, corners: Sequence[tuple[str, float]], shared: Collection[str] = ()
) -> tuple[Ledger, tuple[Units, ...]]:
    """Sources of a comparison, grouped by the batches its constructs were recorded in.

    Parameters
    ----------
    ledger : Ledger
        All sources of the campaign.
    corners : sequence of (str, float)
        Constructs that are compared, and the sign of each.
    shared : collection of str
        What `shared_batches` returns.

    Returns
    -------
    Ledger, tuple of Units
        The ledger to compute this comparison with, and what is counted in each family of cells. A number
        that only some of the constructs were measured for is no comparison: each is then counted as in
        `alone`.
    """
    grouped: list[Source] = []
    decided: list[Units] = []
    for family, sources, signs in _families(ledger, corners):
        if len(sources) == len(corners):
            found = [_decide(family, sources, signs)]
        else:
            found = [_decide_alone(family, source, shared) for source in sources]
        decided.extend(units for units, _ in found)
        grouped.extend(source for _, fresh in found for source in fresh)
    return ledger.regrouped(grouped), tuple(decided)


def _families(
    ledger: Ledger, corners: Sequence[tuple[str, float]]
) -> list[tuple[Family, list[CellSource], list[float]]]:
    """Cell sources of the medians (paired ones too) and of lone charges, with their constructs' signs."""
    medians: list[tuple[CellSource, float]] = []
    charges: list[tuple[CellSource, float]] = []
    for label, sign in corners:
        median = ledger.source_of(Component("median", label))
        charge = ledger.source_of(Component("charge", label))
        if isinstance(median, CellSource):
            medians.append((median, sign))
        if isinstance(charge, CellSource) and charge is not median:
            charges.append((charge, sign))
    paired = any(len(source.components) > 1 for source, _ in medians)
    named: list[tuple[Family, list[tuple[CellSource, float]]]] = [
        ("paired cells" if paired else "medians", medians),
        ("charges", charges),
    ]
    return [(family, [c for c, _ in found], [s for _, s in found]) for family, found in named if found]


def shared_batches(ledger: Ledger) -> frozenset[str]:
    """Batches that more than one construct of the campaign was recorded in."""
    constructs: dict[str, set[str]] = {}
    for source in ledger.sources:
        if isinstance(source, CellSource):
            for batch in source.batches:
                if batch is not None:
                    constructs.setdefault(batch, set()).add(source.components[0].construct)
    return frozenset(batch for batch, labels in constructs.items() if len(labels) > 1)


def alone(ledger: Ledger, label: str, shared: Collection[str]) -> tuple[Ledger, tuple[Units, ...]]:
    """Sources of one construct by itself, counted by batch where its batches are its own.

    Parameters
    ----------
    ledger : Ledger
        All sources of the campaign.
    label : str
        The construct.
    shared : collection of str
        What `shared_batches` returns.

    Returns
    -------
    Ledger, tuple of Units
        A construct that shares a batch with another is counted by cells: its energy then holds for the
        batches that were recorded.
    """
    found = [
        _decide_alone(family, source, shared)
        for family, sources, _ in _families(ledger, [(label, 1.0)])
        for source in sources
    ]
    grouped = [source for _, fresh in found for source in fresh]
    return ledger.regrouped(grouped), tuple(units for units, _ in found)


def _decide_alone(family: Family, source: CellSource, shared: Collection[str]) -> tuple[Units, list[Source]]:
    units, fresh = _decide(family, [source], [1.0])
    if units.rule == "batch means" and any(batch in shared for batch in source.batches):
        reason = "other constructs share the batches, so it holds for the batches recorded"
        return replace(units, rule="cells", reason=reason), []
    if units.rule == "batch means":
        return replace(units, reason="it has batches of its own"), fresh
    return units, fresh


_CONSEQUENCES: dict[Rule, str] = {
    "cells": "cells are the units",
    "within batches": "it is formed within batches and cells are the units",
    "batch means": "batch means are the units",
}


def units_notes(what: str, counted: Sequence[tuple[str, tuple[Units, ...]]]) -> tuple[str, ...]:
    """Sentences on what was counted, for comparisons where a batch is stated.

    Parameters
    ----------
    what : str
        What is counted for, such as "interaction".
    counted : sequence of (str, tuple of Units)
        Name of each comparison and its units.

    Returns
    -------
    tuple of str
        One sentence for all comparisons that follow the same rule for the same reason, with the numbers of
        batches and cells.
    """
    groups: dict[tuple[Rule, str], list[tuple[str, Units]]] = {}
    for name, families in counted:
        for units in families:
            if units.batches:
                groups.setdefault((units.rule, units.reason), []).append((name, units))
    return tuple(
        f"{what} of {_listed([name for name, _ in group])} "
        f"({' and '.join(dict.fromkeys(units.family for _, units in group))}): {reason}; "
        f"{_CONSEQUENCES[rule]} ({_span([units.batches for _, units in group], 'batch', 'batches')}, "
        f"{_span([units.cells for _, units in group], 'cell', 'cells')})"
        for (rule, reason), group in groups.items()
    )


def _listed(names: Sequence[str]) -> str:
    """The names, each once, or the first two and how many more."""
    each = list(dict.fromkeys(names))
    return ", ".join(each) if len(each) <= 3 else f"{', '.join(each[:2])} and {len(each) - 2} more"


def _span(numbers: Sequence[int], one: str, several: str) -> str:
    low, high = min(numbers), max(numbers)
    text = f"{low}" if low == high else f"{low} to {high}"
    return f"{text} {one if high == 1 else several}"
