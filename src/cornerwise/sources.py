"""Independent sources of error, and quantities that depend on them with known sensitivities.

Everything uncertain in a campaign is one of a list of independent sources: the median voltages of a
construct, its charges, both together when they come from the same cells, a charge shared by all, an offset
of the voltage. A derived quantity carries its sensitivity to each component of each source, so whatever
two quantities share is counted once, in one cycle and across all of them.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Literal, NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

from .intervals import Interval, t_interval
from .quantities import Sample, Summary

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


ComponentKind = Literal[
    "median", "truncation", "charge", "charge x median", "stated charge", "voltage offset"
]


class Component(NamedTuple):
    """One uncertain number: what it is and of which construct ('' for a common one)."""

    kind: ComponentKind
    construct: str = ""


class Spread(NamedTuple):
    """A squared standard uncertainty and its degrees of freedom."""

    variance: float
    dof: float


Stream = Callable[[Component], np.random.Generator]  # the stream named after a source's first component


class Part(NamedTuple):
    """What one source, or one construct of a joint source, adds to a squared standard uncertainty."""

    name: str
    spread: Spread


class Spreads(Protocol):
    """What knows the uncertainty of a derived quantity."""

    def spread(self, derived: Derived) -> Spread:
        """Squared standard uncertainty and degrees of freedom."""
        ...


@dataclass(frozen=True, kw_only=True, slots=True)
class Derived:
    """A number with its sensitivity to every component it depends on."""

    value: float
    sensitivities: Mapping[Component, float]

    def interval(self, ledger: Spreads, confidence: float) -> Interval:
        """Propagated interval at `confidence`."""
        spread = ledger.spread(self)
        return t_interval(self.value, math.sqrt(spread.variance), spread.dof, confidence)


def linear(terms: Iterable[tuple[float, Derived]]) -> Derived:
    """Weighted sum of derived quantities; what they share is added before it is squared."""
    value, sensitivities = 0.0, dict[Component, float]()
    for weight, term in terms:
        value += weight * term.value
        for component, sensitivity in term.sensitivities.items():
            sensitivities[component] = sensitivities.get(component, 0.0) + weight * sensitivity
    return Derived(value=value, sensitivities=sensitivities)


def product(a: Derived, b: Derived) -> Derived:
    """Product of two derived quantities, to first order in their errors."""
    return Derived(value=a.value * b.value, sensitivities=linear([(b.value, a), (a.value, b)]).sensitivities)


def log_ratio(a: Derived, b: Derived) -> Derived:
    """Natural logarithm of a / b for positive numbers, to first order in their errors."""
    sensitivities = linear([(1 / a.value, a), (-1 / b.value, b)]).sensitivities
    return Derived(value=math.log(a.value / b.value), sensitivities=sensitivities)


class Source(Protocol):
    """What every source of error can say of itself."""

    @property
    def name(self) -> str:
        """Words for the budget."""
        ...

    @property
    def components(self) -> tuple[Component, ...]:
        """The numbers it determines, each in no other source."""
        ...

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        """Squared standard uncertainty of ``sum(gradient * components)``, by what causes it."""
        ...

    def shift(self, gradient: Sequence[float]) -> float:
        """What its estimate of ``sum(gradient * components)`` adds to that from the plain means of cells."""
        ...

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> FloatArray:
        """Replicates of ``sum(gradient * components)`` less its estimate, shape (replicates,)."""
        ...

    def footprint(self, gradient: Sequence[float]) -> dict[Component, FloatArray]:
        """Independent errors in ``sum(gradient * components)``, by the component they are named after.

        Products of two footprints, summed, are the covariance of two quantities; the sum of squares is the
        squared standard uncertainty.
        """
        ...


class DrawnSource(Source, Protocol):
    """A source whose components can be drawn one by one, not only a comparison of several constructs."""

    def draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """Joint replicates of the components' means, shape (n_components, replicates)."""
        ...

    def conservative_draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """As `draws`, from Student's t distributions: shape (n_components, replicates)."""
        ...


@dataclass(frozen=True, kw_only=True, slots=True)
class StatedSource:
    """One number known as a mean, a standard uncertainty and degrees of freedom."""

    name: str
    component: Component
    mean: float
    std_uncertainty: float
    dof: float = math.inf

    @property
    def components(self) -> tuple[Component, ...]:
        """The one number."""
        return (self.component,)

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        """Squared standard uncertainty of ``gradient[0]`` times the number."""
        return (Part(self.name, Spread((gradient[0] * self.std_uncertainty) ** 2, self.dof)),)

    def shift(self, gradient: Sequence[float]) -> float:
        """None: the mean is taken as it stands."""
        return 0.0 * gradient[0]

    def draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """Normal replicates, shape (1, replicates)."""
        return (self.mean + self.std_uncertainty * rng.standard_normal(replicates))[np.newaxis]

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> FloatArray:
        """Normal replicates of ``gradient[0]`` times the error of the number."""
        scale = gradient[0] * self.std_uncertainty
        drawn: FloatArray = scale * stream(self.component).standard_normal(replicates)
        return drawn

    def footprint(self, gradient: Sequence[float]) -> dict[Component, FloatArray]:
        """One error."""
        return {self.component: np.array([gradient[0] * self.std_uncertainty])}

    def conservative_draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """Student's t replicates, shape (1, replicates)."""
        normal = rng.standard_normal(replicates)
        return (self.mean + self.std_uncertainty * normal * t_factors(self.dof, rng, replicates))[np.newaxis]


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class CellSource:
    """The cells of one construct: independent of each other, one or more numbers from each.

    A cell need not show every number; each component's mean is over the cells that show it, and two
    components covary as the cells that show both of them do.
    """

    name: str
    components: tuple[Component, ...]
    values: FloatArray  # (n_components, n_cells), NaN where a cell does not show a number
    batches: tuple[str | None, ...] = ()  # (n_cells,), None where not stated; empty when none is stated
    shown: BoolArray = field(init=False)  # (n_components, n_cells)
    fully_shared: bool = field(init=False)  # whether every cell shows every number
    deviations: FloatArray = field(init=False)  # from the component's mean; 0 where not shown
    counts: FloatArray = field(init=False)  # (n_components,) cells that show it
    covariance: FloatArray = field(init=False)  # (n_components, n_components), of one cell's numbers

    def __post_init__(self) -> None:
        shown = np.isfinite(self.values)
        counts = shown.sum(axis=1).astype(float)
        filled = np.where(shown, self.values, 0.0)
        deviations = np.where(shown, filled - (filled.sum(axis=1) / counts)[:, np.newaxis], 0.0)
        object.__setattr__(self, "shown", shown)
        object.__setattr__(self, "fully_shared", bool((shown == shown[0]).all()))
        object.__setattr__(self, "counts", counts)
        object.__setattr__(self, "deviations", deviations)
        object.__setattr__(self, "covariance", _pairwise_covariance(filled, shown))

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        """One part: the cells of the construct."""
        return (Part(self.name, self.spread(gradient)),)

    def shift(self, gradient: Sequence[float]) -> float:
        """None: the plain means of cells are the estimate."""
        return 0.0 * gradient[0]

    def spread(self, gradient: Sequence[float]) -> Spread:
        """Squared standard uncertainty of the weighted sum of means, and its degrees of freedom.

        Notes
        -----
        When every cell shows every number the sum is formed cell by cell, with n - 1 degrees of freedom.
        Otherwise the variance is an estimate from three moments (two variances and the covariance of the
        shared cells) and its degrees of freedom are ``2 E**2 / Var``, with the variance of the estimate
        for normal cells from the traces of the centring matrices.
        """
        active = [row for row, weight in enumerate(gradient) if weight != 0]
        if not active:
            return Spread(0.0, math.inf)
        if len(active) == 1:
            (row,) = active
            per_cell = gradient[row] * self.deviations[row]
        elif self.fully_shared:
            per_cell = np.sum(np.asarray(gradient, dtype=float)[:, np.newaxis] * self.deviations, axis=0)
        else:
            return self._partly_shared(np.asarray(gradient, dtype=float))
        n = float(self.counts[active[0]])
        return Spread(float(np.sum(per_cell**2)) / (n - 1) / n if n > 1 else math.nan, n - 1)

    def _partly_shared(self, weights: FloatArray) -> Spread:
        i, j = 0, 1
        n_i, n_j = self.counts
        if min(n_i, n_j) < 2:
            return Spread(math.nan, math.nan)
        both = float((self.shown[i] & self.shown[j]).sum())
        a, b = weights[i] / n_i, weights[j] / n_j
        var_i, var_j, cov = self.covariance[i, i], self.covariance[j, j], self.covariance[i, j]
        variance = a * a * n_i * var_i + b * b * n_j * var_j + 2 * a * b * both * cov
        p, q, r = a * a * n_i, b * b * n_j, 2 * a * b * both
        trace = both * (1 - 1 / n_i) * (1 - 1 / n_j) + both * (both - 1) / (n_i * n_j)
        uncertainty = 2 * p * p * var_i**2 / (n_i - 1) + 2 * q * q * var_j**2 / (n_j - 1)
        uncertainty += 4 * p * q * cov * cov * trace / ((n_i - 1) * (n_j - 1))
        if both >= 2:
            uncertainty += r * r * (var_i * var_j + cov * cov) / (both - 1)
            uncertainty += 4 * p * r * var_i * cov / (n_i - 1) + 4 * q * r * var_j * cov / (n_j - 1)
        dof = 2 * variance * variance / uncertainty if uncertainty > 0 else math.inf
        return Spread(max(variance, 0.0), float(np.clip(dof, 1.0, n_i + n_j - 2)))

    def draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """Bootstrap replicates of the means: cells resampled, deviations times sqrt(n / (n - 1)).

        Returns
        -------
        ndarray, shape (n_components, replicates)
            A component shown by one cell or none does not vary.
        """
        means: FloatArray = np.array(
            [np.mean(row[shown]) for row, shown in zip(self.values, self.shown, strict=True)]
        )
        sums = resampled_sums(self.deviations, rng, replicates)
        return means[:, np.newaxis] + self._inflate[:, np.newaxis] * sums

    @property
    def _inflate(self) -> FloatArray:
        inflate: FloatArray = np.sqrt(self.counts / np.maximum(self.counts - 1, 1)) / self.counts
        return inflate

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> FloatArray:
        """Bootstrap replicates of the weighted sum of means, less the sum itself."""
        weights = np.asarray(gradient, dtype=float) * self._inflate
        per_cell = np.sum(weights[:, np.newaxis] * self.deviations, axis=0)
        (drawn,) = resampled_sums(per_cell[np.newaxis], stream(self.components[0]), replicates)
        deviations: FloatArray = drawn
        return deviations

    def footprint(self, gradient: Sequence[float]) -> dict[Component, FloatArray]:
        """One error a cell."""
        weights = np.asarray(gradient, dtype=float) * self._inflate
        per_cell = np.sum(weights[:, np.newaxis] * self.deviations, axis=0)
        wanted, found = self.spread(gradient).variance, float(np.sum(per_cell**2))
        factor = math.sqrt(wanted / found) if found > 0 else 0.0
        return {self.components[0]: per_cell * factor}

    def conservative_draws(self, rng: np.random.Generator, replicates: int) -> FloatArray:
        """Multivariate Student's t replicates of the means, shape (n_components, replicates)."""
        both = self.shown[:, np.newaxis] & self.shown[np.newaxis]
        of_means = self.covariance * both.sum(axis=2) / np.outer(self.counts, self.counts)
        sizes, directions = np.linalg.eigh(of_means)
        factor = directions * np.sqrt(np.maximum(sizes, 0.0))
        drawn = np.zeros((len(self.components), replicates))
        for column in factor.T:
            drawn += column[:, np.newaxis] * rng.standard_normal(replicates)
        drawn *= t_factors(float(self.counts.min()) - 1, rng, replicates)
        means = np.sum(np.where(self.shown, self.values, 0.0), axis=1) / self.counts
        shifted: FloatArray = means[:, np.newaxis] + drawn
        return shifted


def t_factors(dof: float, rng: np.random.Generator, replicates: int) -> FloatArray:
    """What turns normal replicates into Student's t ones, shape (replicates,); NaN without any dof."""
    if math.isinf(dof):
        return np.ones(replicates)
    if not dof > 0:
        return np.full(replicates, math.nan)
    factors: FloatArray = np.sqrt(dof / rng.chisquare(dof, replicates))
    return factors


def resampled_sums(values: FloatArray, rng: np.random.Generator, replicates: int) -> FloatArray:
    """Sum over as many cells, drawn with replacement, as there are.

    Parameters
    ----------
    values : ndarray, shape (n_rows, n_cells)
        Drawn jointly: all rows of one cell together.
    rng : numpy.random.Generator
        Gives the same cells for the same number of cells.
    replicates : int
        Number of sums.

    Returns
    -------
    ndarray, shape (n_rows, replicates)
    """
    n_cells = values.shape[1]
    sums = np.zeros((len(values), replicates))
    for picked in rng.integers(0, n_cells, size=(n_cells, replicates)):
        # cell by cell, so that the sum never depends on a linear-algebra library
        sums += np.take(values, picked, axis=1)
    return sums


def _pairwise_covariance(filled: FloatArray, shown: BoolArray) -> FloatArray:
    """Covariance of each two rows over the cells that show both; 0 where fewer than two do."""
    size = len(filled)
    covariance: FloatArray = np.zeros((size, size))
    for i in range(size):
        for j in range(i + 1):
            both = shown[i] & shown[j]
            if both.sum() >= 2:
                x, y = filled[i, both], filled[j, both]
                covariance[i, j] = np.sum((x - x.mean()) * (y - y.mean())) / (both.sum() - 1)
                covariance[j, i] = covariance[i, j]
    # A covariance seen in few shared cells may exceed what the two variances allow.
    deviation = np.sqrt(np.diag(covariance))
    limit: FloatArray = np.outer(deviation, deviation)
    clipped: FloatArray = np.minimum(np.maximum(covariance, -limit), limit)
    return clipped


def cell_source(name: str, samples: Mapping[Component, Sample]) -> CellSource:
    """One source from samples whose cells may be the same, partly the same or different.

    Parameters
    ----------
    name : str
        Words for the budget.
    samples : mapping of Component to Sample
        Cells of the same name are the same cell.
    """
    cells = sorted({cell for sample in samples.values() for cell in sample.cells})
    place = {cell: index for index, cell in enumerate(cells)}
    values = np.full((len(samples), len(cells)), np.nan)
    batches: dict[str, str | None] = {}
    for row, sample in enumerate(samples.values()):
        values[row, [place[cell] for cell in sample.cells]] = sample.values
        for cell, batch in zip(sample.cells, sample.batches, strict=False):
            batches[cell] = batches.get(cell) or batch
    stated = any(batch is not None for batch in batches.values())
    return CellSource(
        name=name,
        components=tuple(samples),
        values=values,
        batches=tuple(batches.get(cell) for cell in cells) if stated else (),
    )


def summary_source(name: str, component: Component, summary: Summary) -> StatedSource:
    """One source from a mean, a standard error and a number of cells."""
    return StatedSource(
        name=name, component=component, mean=summary.mean, std_uncertainty=summary.sem, dof=summary.dof
    )
