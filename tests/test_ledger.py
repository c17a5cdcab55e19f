"""All sources together: Monte Carlo after JCGM 101, footprints and first-order replicates."""

import numpy as np
import pytest
from builders import batched, cells, measurement
from scipy import stats

from cornerwise.campaign import Settings
from cornerwise.energies import EnergyBook
from cornerwise.interactions import interact, interaction_draws
from cornerwise.ledger import Ledger
from cornerwise.mutations import find_cycles
from cornerwise.quantities import Sample, Summary
from cornerwise.sources import (
    CellSource,
    Component,
    cell_source,
    summary_source,
)

LABELS = ("WT", "A1G", "C2S", "A1G/C2S")


def _half_width(draws: np.ndarray) -> float:
    low, high = np.quantile(draws, [0.025, 0.975])
    return float(high - low) / 2


def test_conservative_draws_are_students_t() -> None:
    # JCGM 101 6.4.9: the mean of n observations is t with n - 1 degrees of freedom, scaled by its error.
    values = np.array([3.0, 4.5, 3.9, 5.2])
    component = Component("median", "WT")
    source = cell_source("cells", {component: Sample(cells=tuple("abcd"), values=values)})
    stated = summary_source("stated", Component("charge", "WT"), Summary(mean=2.0, sem=0.3, n=6))
    ledger = Ledger([source, stated], seed=2, replicates=50_000, conservative=True)
    t = (ledger.draws(component) - values.mean()) / (values.std(ddof=1) / 2)
    assert stats.kstest(t, stats.t(3).cdf).pvalue > 1e-3
    t = (ledger.draws(Component("charge", "WT")) - 2.0) / 0.3
    assert stats.kstest(t, stats.t(5).cdf).pvalue > 1e-3


def test_conservative_draws_keep_the_covariance_of_shared_cells() -> None:
    rng = np.random.default_rng(3)
    v = rng.normal(0, 2, 12)
    q = 0.5 * v + rng.normal(0, 0.4, 12)
    names = tuple(map(str, range(12)))
    kinds = [Component("median", "WT"), Component("charge", "WT")]
    source = cell_source(
        "both", {k: Sample(cells=names, values=x) for k, x in zip(kinds, (v, q), strict=True)}
    )
    drawn = source.conservative_draws(np.random.default_rng(4), 400_000)
    assert np.cov(drawn) == pytest.approx(np.cov([v, q]) / 12 * 11 / 9, rel=0.03)  # t with 11: 11 / (11 - 2)


def _book(paired: bool, replicates: int = 20_000, **settings: object) -> EnergyBook:
    rng = np.random.default_rng(5)
    made = [
        measurement(
            label, cells(rng.normal(-40, 2, 5)), cells(rng.normal(13, 0.5, 5), "c" if paired else "n")
        )
        for label in LABELS
    ]
    return EnergyBook(made, Settings(**{"wild_type": "WT", "replicates": replicates, **settings}))


(CYCLE,) = find_cycles(
    {frozenset(m.mutations): m.label for m in (measurement(x, {}).construct for x in LABELS)}
)


@pytest.mark.parametrize("paired", [True, False])
def test_monte_carlo_is_wider_than_the_propagated_interval(paired: bool) -> None:
    book = _book(paired)
    found = interact(CYCLE, book, "WT")
    draws = interaction_draws(found, book, conservative=True)
    limits = found.energy.interval(found.ledger, 0.95)
    # Sums of t variables spread wider than Welch and Satterthwaite's single t (it is called conservative).
    assert 1.1 < 2 * _half_width(draws) / (limits.high - limits.low) < 1.5
    assert float(np.median(draws)) == pytest.approx(found.energy.value, abs=0.03)


@pytest.mark.parametrize("paired", [True, False])
def test_footprints_sum_to_variances_and_covariances(paired: bool) -> None:
    book = _book(paired, voltage_offset_mv=1.0)
    energies = [book.energies[label].energy for label in LABELS]
    footprints = [book.ledger.footprint(energy) for energy in energies]
    for energy, footprint in zip(energies, footprints, strict=True):
        squares = sum(float(np.sum(errors**2)) for errors in footprint.values())
        assert squares == pytest.approx(book.ledger.spread(energy).variance)
    a, b = footprints[:2]
    shared = a.keys() & b.keys()
    assert {component.kind for component in shared} == {"voltage offset"}
    joint = sum(float(np.sum(a[key] * b[key])) for key in shared)
    assert joint == pytest.approx(
        (23.06054783 / 1000) ** 2 * np.prod([e.charge.value for e in list(book.energies.values())[:2]])
    )


def test_footprint_of_partly_shared_cells_has_their_variance() -> None:
    rng = np.random.default_rng(6)
    names = [f"c{i}" for i in range(8)]
    v = Sample(cells=tuple(names[:5]), values=rng.normal(0, 2, 5))
    q = Sample(cells=tuple(names[2:]), values=rng.normal(0, 1, 6))
    source = cell_source("partly", {Component("median", "WT"): v, Component("charge", "WT"): q})
    assert isinstance(source, CellSource)
    (errors,) = source.footprint([1.5, 0.5]).values()
    assert float(np.sum(errors**2)) == pytest.approx(source.spread([1.5, 0.5]).variance)


@pytest.mark.parametrize("blocked", [True, False])
def test_footprints_within_batches_sum_to_the_variance(blocked: bool) -> None:
    rng = np.random.default_rng(7)
    made = []
    for label in LABELS:
        batches = [f"{'' if blocked else label}{i % 3}" for i in range(6)]
        medians = batched(rng.normal(-40, 2, 6), batches)
        made.append(measurement(label, medians, Summary(mean=13.0, sem=0.2, n=6)))
    book = EnergyBook(made, Settings(wild_type="WT", replicates=20_000))
    found = interact(CYCLE, book, "WT")
    assert found.ledger is not book.ledger
    footprint = found.ledger.footprint(found.energy)
    assert sum(float(np.sum(e**2)) for e in footprint.values()) == pytest.approx(
        found.ledger.spread(found.energy).variance
    )
    conservative = interaction_draws(found, book, conservative=True)
    limits = found.energy.interval(found.ledger, 0.95)
    assert 0.97 < 2 * _half_width(conservative) / (limits.high - limits.low) < 2.0


def test_first_order_replicates_meet_the_drawn_products() -> None:
    book = _book(paired=False, replicates=1000)
    energy = book.energies["WT"].energy
    linear, products = book.ledger.linear_draws(energy), book.energy_draws("WT")
    # The same cells are drawn, so the two differ by the product of two small deviations alone.
    assert np.corrcoef(linear, products)[0, 1] > 0.9999
    assert linear == pytest.approx(products, abs=0.1)
