"""What an estimate's uncertainty is made of, in a form that says what further cells would do to it."""

from __future__ import annotations

import math
from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Literal, NamedTuple

from ..blocks import BatchMeans, Blocks
from ..ledger import Ledger
from ..sources import CellSource, Component, ComponentKind, Derived, Part, Source
from .pooling import Scatter, Scatters

Kind = Literal["curves", "charges", "curves with charges"]

_FEWEST_DOF = 0.5  # a scatter with less says nothing


class Recording(NamedTuple):
    """What more can be recorded of: one kind of cell of one construct."""

    construct: str
    kind: Kind


@dataclass(frozen=True, kw_only=True, slots=True)
class Term:
    """The cells of one kind of one construct, as they enter one estimate.

    Parameters
    ----------
    recording : Recording
        What it is.
    sd : float
        Standard deviation of one cell's contribution, so that ``sd**2 / n`` is what n cells add to the
        estimate's squared standard uncertainty; the estimate's unit.
    scatter_dof : float
        Degrees of freedom with which `sd` is known; ``inf`` for one that is assumed.
    kept : float
        Cells there are already, which stay.
    kept_dof : float
        Degrees of freedom of the scatter they show; -1 without any.
    dof_each : float
        Degrees of freedom that each further cell adds: 1, or less where batches are counted.
    step : int
        Cells that come together: those of a batch where batch means are counted, else 1.
    lent : bool
        Whether `sd` is that of other constructs, its own cells being too few.
    """

    recording: Recording
    sd: float
    scatter_dof: float
    kept: float = 0.0
    kept_dof: float = -1.0
    dof_each: float = 1.0
    step: int = 1
    lent: bool = False

    def anew(self) -> Term:
        """The same scatter without the cells it is known from."""
        return replace(self, kept=0.0, kept_dof=self.kept_dof - self.kept * self.dof_each)

    @property
    def least(self) -> int:
        """Fewest cells that a plan may give it: 3, and as many as show scatter."""
        wanted = math.ceil((1 - self.kept_dof) / self.dof_each + self.kept - 1e-9)
        return max(3, -(-wanted // self.step) * self.step)


class Fixed(NamedTuple):
    """A part of the uncertainty that no further cell makes smaller."""

    name: str
    variance: float
    dof: float
    kind: ComponentKind
    sloping: bool = False  # the plateaus of its construct slope and are taken as they are

    @property
    def remedy(self) -> str:
        """What does make it smaller."""
        return _LEVEL_PLATEAUS if self.sloping else _REMEDIES[self.kind]


_LEVEL_PLATEAUS = (
    "set correct_sloping_plateaus = true in campaign.toml after a look at its plateaus, which slope, or "
    "record it with better subtraction of leak and capacity"
)


_REMEDIES: Mapping[ComponentKind, str] = {
    "truncation": "record its curves over voltages that reach both plateaus",
    "stated charge": "measure the total charge",
    "charge": "measure that charge",
    "median": "measure that median voltage",
    "charge x median": "record cells that show both",
    "voltage offset": "pin the voltage down better, or measure corners whose charges add up",
}


@dataclass(frozen=True, kw_only=True, slots=True)
class Prospect:
    """One estimate and what its uncertainty is made of."""

    name: str
    value: float
    terms: tuple[Term, ...]
    fixed: tuple[Fixed, ...] = ()

    @property
    def unknown(self) -> tuple[Recording, ...]:
        """What shows no scatter to plan with: fewer than two cells."""
        return tuple(term.recording for term in self.terms if not math.isfinite(term.sd))

    @property
    def floor(self) -> float:
        """Standard uncertainty that would be left with any number of cells."""
        return math.sqrt(math.fsum(part.variance for part in self.fixed))

    def anew(self) -> Prospect:
        """The same scatters without the cells they are known from."""
        return replace(self, terms=tuple(term.anew() for term in self.terms))


class _Gradient(NamedTuple):
    """Sensitivities to the components of one source."""

    components: tuple[Component, ...]
    weights: Sequence[float]

    @property
    def active(self) -> list[int]:
        """Places of the components that count."""
        return [place for place, weight in enumerate(self.weights) if weight]

    @property
    def recording(self) -> Recording:
        """What is recorded to learn more of them."""
        kinds = {self.components[place].kind for place in self.active}
        kind: Kind = "curves with charges"
        if len(kinds) == 1 and "charge x median" not in kinds:
            kind = "curves" if "median" in kinds else "charges"
        return Recording(self.components[0].construct, kind)

    def lent(self, scatters: Scatters) -> Scatter | None:
        """Scatter of other constructs, as an error of the estimate; None where there is none."""
        if len(self.active) != 1:
            return None
        (place,) = self.active
        found = scatters.get(self.components[place].kind)
        return None if found is None else Scatter(abs(self.weights[place]) * found.sd, found.dof)


def _of_cells(part: Part, gradient: _Gradient, cells: float, scatters: Scatters) -> Term:
    """Cells that are counted one by one; too few of them borrow the scatter of the others."""
    variance, dof = part.spread
    if dof >= _FEWEST_DOF and math.isfinite(variance):
        sd = math.sqrt(variance * cells)
        return Term(recording=gradient.recording, sd=sd, scatter_dof=dof, kept=cells, kept_dof=dof)
    lent = gradient.lent(scatters) or Scatter(math.nan, math.nan)
    return Term(
        recording=gradient.recording, sd=lent.sd, scatter_dof=lent.dof, kept=cells, kept_dof=0.0, lent=True
    )


def _of_cell_source(source: CellSource, gradient: _Gradient, scatters: Scatters) -> list[Term]:
    active = gradient.active
    (part,) = source.parts(gradient.weights)
    if len(active) == 1 or source.fully_shared:
        return [_of_cells(part, gradient, float(source.counts[active[0]]), scatters)]
    # Only some cells show both: each kind by itself, the covariance spread over both in proportion.
    alone = [
        gradient._replace(weights=[w if i == place else 0.0 for i, w in enumerate(gradient.weights)])
        for place in active
    ]
    parts = [source.parts(own.weights)[0] for own in alone]
    apart = math.fsum(own.spread.variance for own in parts)
    together = part.spread.variance / apart if apart > 0 else 1.0
    terms = [
        _of_cells(own, one, float(source.counts[place]), scatters)
        for own, one, place in zip(parts, alone, active, strict=True)
    ]
    return [replace(term, sd=term.sd * math.sqrt(together)) for term in terms]


def _of_batch_means(source: BatchMeans, gradient: _Gradient) -> Term:
    (part,) = source.parts(gradient.weights)
    variance, dof = part.spread
    each = source.cells / source.batches
    return Term(
        recording=gradient.recording,
        sd=math.sqrt(variance * source.cells),
        scatter_dof=dof,
        kept=float(source.cells),
        kept_dof=dof,
        dof_each=1 / each,
        step=round(each),
    )


def _of_blocks(source: Blocks, weights: Sequence[float], scatters: Scatters) -> list[Term]:
    if not source.whole(weights):
        return [term for alone, own in source.alone(weights) for term in _recorded(alone, own, scatters)[0]]
    cells = [float(corner.values.shape[1]) for corner in source.corners]
    of_corners = zip(source.corners, source.by_corner(weights), source.parts(weights), cells, strict=True)
    dof_each = 1 - source.batches / math.fsum(cells)
    return [
        replace(_of_cells(part, _Gradient(corner.components, own), n, scatters), dof_each=dof_each)
        for corner, own, part, n in of_corners
    ]


def _recorded(
    source: Source, weights: Sequence[float], scatters: Scatters, sloping: Collection[str] = ()
) -> tuple[list[Term], list[Fixed]]:
    """What more can be recorded of a source, and what cannot."""
    gradient = _Gradient(source.components, weights)
    if isinstance(source, CellSource):
        return _of_cell_source(source, gradient, scatters), []
    if isinstance(source, BatchMeans):
        return [_of_batch_means(source, gradient)], []
    if isinstance(source, Blocks):
        return _of_blocks(source, weights, scatters), []
    (part,) = source.parts(weights)
    kind, construct = source.components[0]
    if kind in ("median", "charge") and not math.isinf(part.spread.dof):
        return [_of_cells(part, gradient, part.spread.dof + 1, scatters)], []
    slopes = kind == "truncation" and construct in sloping
    return [], [Fixed(part.name, *part.spread, kind, sloping=slopes)]


def prospect(
    name: str, derived: Derived, ledger: Ledger, scatters: Scatters, sloping: Collection[str] = ()
) -> Prospect:
    """What the uncertainty of a derived quantity is made of.

    Parameters
    ----------
    name : str
        Of the estimate.
    derived : Derived
        An interaction energy or the logarithm of a charge ratio.
    ledger : Ledger
        Its sources, grouped by batch where that is due.
    scatters : mapping of str to Scatter
        What constructs borrow that have too few cells to show a scatter.
    sloping : collection of str
        Constructs whose curves were read with plateaus that slope.

    Notes
    -----
    Sensitivities stay what they are: further cells move means a little, not what an error in them weighs.
    Where cells are compared within batches, further cells are taken to be spread over batches that the
    constructs of the comparison share; where batch means are counted, to come in further batches of the
    same size.
    """
    terms, fixed = list[Term](), list[Fixed]()
    for source, gradient in ledger.gradients(derived):
        if any(gradient):
            own, rest = _recorded(source, gradient, scatters, sloping)
            terms += own
            fixed += [part for part in rest if part.variance > 0]
    return Prospect(name=name, value=derived.value, terms=tuple(terms), fixed=tuple(fixed))


def recordings_of(prospects: Sequence[Prospect]) -> tuple[Recording, ...]:
    """Everything that more can be recorded of, each once, in the order of its first use."""
    return tuple(dict.fromkeys(term.recording for one in prospects for term in one.terms))


def kept_cells(prospects: Sequence[Prospect]) -> dict[Recording, int]:
    """Cells of each kind that there are already."""
    return {term.recording: round(term.kept) for one in prospects for term in one.terms}


def steps(prospects: Sequence[Prospect]) -> dict[Recording, int]:
    """Cells of each kind that come together."""
    found: dict[Recording, int] = {}
    for one in prospects:
        for term in one.terms:
            found[term.recording] = max(term.step, found.get(term.recording, 1))
    return found


def brought_to(prospects: Sequence[Prospect], cells: int) -> dict[Recording, int]:
    """Totals with so many cells of each kind, whole batches; those that have more keep them."""
    kept, together = kept_cells(prospects), steps(prospects)
    return {one: max(kept[one], -(-cells // together[one]) * together[one]) for one in kept}


Totals = Mapping[Recording, float]  # cells of each kind that there shall be
