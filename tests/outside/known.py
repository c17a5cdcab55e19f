"""Quantities with the sources they depend on, by the package's own ledger."""

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from cornerwise.intervals import Interval, t_p_value
from cornerwise.ledger import Ledger
from cornerwise.quantities import Quantity, Sample, Summary
from cornerwise.sources import Component, Derived, Source, cell_source, linear, summary_source


@dataclass(frozen=True)
class Known:
    """A quantity and the sources it depends on."""

    derived: Derived
    ledger: Ledger

    @property
    def u(self) -> float:
        return math.sqrt(self.ledger.spread(self.derived).variance)

    @property
    def dof(self) -> float:
        return self.ledger.spread(self.derived).dof

    def interval(self, confidence: float) -> Interval:
        return self.derived.interval(self.ledger, confidence)

    def p_against(self, bound: float) -> float:
        """Two-sided p value against a bound."""
        return t_p_value(self.derived.value - bound, self.u, self.dof)

    def one_sided(self, *bounds: float) -> tuple[float, ...]:
        """p values on the near side of each bound."""
        return tuple(self.p_against(bound) / 2 for bound in bounds)

    def equivalence(self, bound: float) -> str:
        """Two one-sided tests at 5 % reject exactly when the 90 % interval lies inside the bounds."""
        return "rejected" if self.interval(0.90).inside(-bound, bound) else "not rejected"


def one(component: Component, value: float) -> Derived:
    return Derived(value=value, sensitivities={component: 1.0})


def ledger_of(sources: Sequence[Source]) -> Ledger:
    return Ledger(sources, seed=1, replicates=1)


def sample(values: Sequence[float]) -> Sample:
    return Sample(cells=tuple(f"c{i:02d}" for i in range(len(values))), values=np.array(values, dtype=float))


X, Y = Component("median", "x"), Component("median", "y")


def source_of(component: Component, quantity: Quantity) -> Source:
    name = component.construct
    if isinstance(quantity, Summary):
        return summary_source(name, component, quantity)
    return cell_source(name, {component: quantity})


def apart(x: Quantity, y: Quantity) -> Known:
    """Difference of the means of two groups that share nothing."""
    difference = linear([(1.0, one(X, x.mean)), (-1.0, one(Y, y.mean))])
    return Known(difference, ledger_of([source_of(X, x), source_of(Y, y)]))


def paired(x: Sample, y: Sample) -> Known:
    """Difference of two means that the same cells show."""
    difference = linear([(1.0, one(X, x.mean)), (-1.0, one(Y, y.mean))])
    return Known(difference, ledger_of([cell_source("both", {X: x, Y: y})]))
