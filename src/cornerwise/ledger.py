"""All sources of error of a campaign: uncertainty, budget and joint replicates of what depends on them."""

from __future__ import annotations

import math
from collections.abc import Hashable, Iterator, Sequence
from dataclasses import replace
from typing import NamedTuple, cast

import numpy as np
from numpy.typing import NDArray

from .intervals import welch_satterthwaite
from .sources import Component, Derived, DrawnSource, Part, Source, Spread, t_factors
from .streams import named_stream

FloatArray = NDArray[np.float64]


class Contribution(NamedTuple):
    """What one source adds to a standard uncertainty."""

    source: str
    contribution: float  # the standard uncertainty it would cause alone, in the unit of the quantity
    share: float  # of the variance, 0 to 1


class Ledger:
    """All sources of a campaign; knows where each component belongs.

    Parameters
    ----------
    sources : sequence of Source
        Independent of each other.
    seed : int
        Of the campaign; each source draws from a stream named after its first component.
    replicates : int
        Number of joint replicates.
    conservative : bool, optional
        Draw every source from Student's t with its degrees of freedom rather than resample its cells.

    References
    ----------
    JCGM 101:2008 (GUM supplement 1), 6.4.9: a t distribution for the mean of a few observations.
    """

    def __init__(
        self, sources: Sequence[Source], *, seed: int, replicates: int, conservative: bool = False
    ) -> None:
        self.sources = tuple(sources)
        self.replicates = replicates
        self.conservative = conservative
        self._seed = seed
        self._place = {
            component: (number, column)
            for number, source in enumerate(self.sources)
            for column, component in enumerate(source.components)
        }
        self._draws: dict[int, FloatArray] = {}

    def __contains__(self, component: Component) -> bool:
        return component in self._place

    def regrouped(self, sources: Sequence[Source]) -> Ledger:
        """Ledger in which `sources` speak for their components in place of the sources here."""
        if not sources:
            return self
        fresh = Ledger((), seed=self._seed, replicates=self.replicates, conservative=self.conservative)
        fresh.sources = (*self.sources, *sources)
        own = {
            component: (number, column)
            for number, source in enumerate(sources, start=len(self.sources))
            for column, component in enumerate(source.components)
        }
        fresh._place = {**self._place, **own}
        return fresh

    def conservatively(self) -> Ledger:
        """The same sources, drawn from Student's t distributions."""
        fresh = Ledger((), seed=self._seed, replicates=self.replicates, conservative=True)
        fresh.sources, fresh._place = self.sources, self._place
        return fresh

    def source_of(self, component: Component) -> Source | None:
        """Source that determines a component; None when none does."""
        place = self._place.get(component)
        return None if place is None else self.sources[place[0]]

    def gradients(self, derived: Derived) -> Iterator[tuple[Source, list[float]]]:
        """Sources that a quantity depends on, with its sensitivities to their components."""
        gradients: dict[int, list[float]] = {}
        for component, sensitivity in derived.sensitivities.items():
            number, column = self._place[component]
            gradient = gradients.setdefault(number, [0.0] * len(self.sources[number].components))
            gradient[column] += sensitivity
        return ((self.sources[number], gradients[number]) for number in sorted(gradients))

    def parts(self, derived: Derived) -> list[Part]:
        """What each source adds to the squared standard uncertainty of `derived`."""
        return [part for source, gradient in self.gradients(derived) for part in source.parts(gradient)]

    def spread(self, derived: Derived) -> Spread:
        """Squared standard uncertainty and Welch-Satterthwaite degrees of freedom of `derived`."""
        spreads = [part.spread for part in self.parts(derived)]
        variances, dofs = [s.variance for s in spreads], [s.dof for s in spreads]
        return Spread(math.fsum(variances), welch_satterthwaite(variances, dofs))

    def adjusted(self, derived: Derived) -> Derived:
        """The quantity as its sources estimate it, where that is not from plain means of cells."""
        shift = math.fsum(source.shift(gradient) for source, gradient in self.gradients(derived))
        return replace(derived, value=derived.value + shift) if shift else derived

    def budget(self, derived: Derived) -> tuple[Contribution, ...]:
        """Every source's part in the uncertainty of `derived`, the largest first."""
        spreads = [(part.name, part.spread.variance) for part in self.parts(derived)]
        total = math.fsum(variance for _, variance in spreads)
        parts = [
            Contribution(name, math.sqrt(variance), variance / total if total > 0 else 0.0)
            for name, variance in spreads
        ]
        return tuple(sorted(parts, key=lambda part: (-part.contribution, part.source)))

    def draws(self, component: Component) -> FloatArray:
        """Replicates of one component, shape (replicates,), jointly with all others."""
        number, column = self._place[component]
        if number not in self._draws:
            # Of cells in batches only comparisons are drawn, by `linear_draws`.
            source = cast(DrawnSource, self.sources[number])
            rng = self._stream(source.components[0])
            draw = source.conservative_draws if self.conservative else source.draws
            self._draws[number] = draw(rng, self.replicates)
        drawn: FloatArray = self._draws[number][column]
        return drawn

    def _stream(self, component: Component) -> np.random.Generator:
        return self._named(f"{component.kind}|{component.construct}")

    def _named(self, name: str) -> np.random.Generator:
        return named_stream(self._seed, f"t|{name}" if self.conservative else name)

    def footprint(self, derived: Derived) -> dict[Hashable, FloatArray]:
        """Independent errors in `derived`; see `Source.footprint`."""
        return {
            component: errors
            for source, gradient in self.gradients(derived)
            for component, errors in source.footprint(gradient).items()
        }

    def linear_draws(self, derived: Derived) -> FloatArray:
        """Replicates of `derived` to first order, jointly with all others, shape (replicates,)."""
        total = np.full(self.replicates, derived.value)
        if self.conservative:
            for name, (variance, dof) in self.parts(derived):
                rng = self._named(name)
                normal = rng.standard_normal(self.replicates)
                total += math.sqrt(variance) * normal * t_factors(dof, rng, self.replicates)
            return total
        for source, gradient in self.gradients(derived):
            total += source.deviations_drawn(gradient, self._stream, self.replicates)
        return total
