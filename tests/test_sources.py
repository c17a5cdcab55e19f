import math

import numpy as np
import pytest
from builders import cells

from cornerwise.ledger import Ledger
from cornerwise.quantities import Sample
from cornerwise.sources import (
    CellSource,
    Component,
    Derived,
    StatedSource,
    cell_source,
    linear,
    log_ratio,
)

V, Q, X = Component("median", "WT"), Component("charge", "WT"), Component("median", "A1G")


def _sample(values: dict[str, float]) -> Sample:
    return Sample(cells=tuple(values), values=np.array(list(values.values())))


def _ledger(*sources: CellSource | StatedSource, replicates: int = 100) -> Ledger:
    return Ledger(sources, seed=1, replicates=replicates)


def _one(component: Component, value: float = 0.0) -> Derived:
    return Derived(value=value, sensitivities={component: 1.0})


def test_what_two_quantities_share_is_added_before_it_is_squared() -> None:
    ledger = _ledger(
        StatedSource(name="common", component=V, mean=0.0, std_uncertainty=3.0),
        StatedSource(name="own", component=X, mean=0.0, std_uncertainty=4.0),
    )
    difference = linear([(1.0, linear([(1.0, _one(V)), (1.0, _one(X))])), (-1.0, _one(V))])
    assert ledger.spread(difference).variance == pytest.approx(16.0)  # 9 + 16 + 9 if counted apart
    assert ledger.spread(linear([(2.0, _one(V))])).variance == pytest.approx(36.0)


def test_budget_shares_add_up_and_come_largest_first() -> None:
    ledger = _ledger(
        StatedSource(name="small", component=V, mean=0.0, std_uncertainty=3.0),
        StatedSource(name="large", component=X, mean=0.0, std_uncertainty=4.0),
    )
    budget = ledger.budget(linear([(1.0, _one(V)), (1.0, _one(X))]))
    assert [part.source for part in budget] == ["large", "small"]
    assert [part.contribution for part in budget] == pytest.approx([4.0, 3.0])
    assert [part.share for part in budget] == pytest.approx([0.64, 0.36])


def test_cells_that_show_both_numbers_keep_their_covariance() -> None:
    rng = np.random.default_rng(3)
    v, q = rng.normal(-40, 2, 6), rng.normal(13, 1, 6)
    source = cell_source("both", {V: _sample(cells(v)), Q: _sample(cells(q))})
    spread = source.spread([2.0, -3.0])
    per_cell = 2 * v - 3 * q
    assert spread.variance == pytest.approx(np.var(per_cell, ddof=1) / 6, rel=1e-12)
    assert spread.dof == 5


def test_partly_shared_cells_against_the_moments_written_out() -> None:
    # Cells 0..4 show v, cells 2..7 show q; 2, 3, 4 show both.
    rng = np.random.default_rng(4)
    v, q = rng.normal(0, 2, 5), rng.normal(0, 1, 6)
    vs = {f"c{i}": x for i, x in enumerate(v)}
    qs = {f"c{i + 2}": x for i, x in enumerate(q)}
    source = cell_source("partly", {V: _sample(vs), Q: _sample(qs)})
    shared_covariance = np.cov(v[2:], q[:3])[0, 1]
    a, b = 1.5, 0.5
    expected = a**2 * np.var(v, ddof=1) / 5 + b**2 * np.var(q, ddof=1) / 6
    expected += 2 * a * b * shared_covariance * 3 / (5 * 6)
    spread = source.spread([a, b])
    assert spread.variance == pytest.approx(expected, rel=1e-12)
    assert 1 <= spread.dof <= 9


def test_partly_shared_formula_meets_the_exact_one_when_all_cells_are_shared() -> None:
    rng = np.random.default_rng(5)
    v, q = rng.normal(0, 2, 7), rng.normal(0, 1, 7)
    source = cell_source("both", {V: _sample(cells(v)), Q: _sample(cells(q))})
    exact = source.spread([1.0, 2.0])
    moments = source._partly_shared(np.array([1.0, 2.0]))
    assert moments.variance == pytest.approx(exact.variance, rel=1e-12)
    assert moments.dof == pytest.approx(exact.dof, rel=1e-9)


def test_partly_shared_formula_meets_two_sources_when_no_cell_is_shared() -> None:
    rng = np.random.default_rng(6)
    vs, qs = _sample(cells(rng.normal(0, 2, 5))), _sample(cells(rng.normal(0, 1, 8), "n"))
    together = cell_source("one list", {V: vs, Q: qs}).spread([1.0, 2.0])
    apart = _ledger(cell_source("v", {V: vs}), cell_source("q", {Q: qs})).spread(
        linear([(1.0, _one(V)), (2.0, _one(Q))])
    )
    assert together.variance == pytest.approx(apart.variance, rel=1e-12)
    assert together.dof == pytest.approx(apart.dof, rel=1e-9)


def test_a_covariance_from_two_shared_cells_never_makes_the_variance_negative() -> None:
    vs = {"c0": 0.0, "c1": 10.0, "a": 5.0, "b": 5.1}
    qs = {"c0": 10.0, "c1": 0.0, "d": 5.0, "e": 5.1}
    source = cell_source("partly", {V: _sample(vs), Q: _sample(qs)})
    for a in (0.1, 1.0, 10.0):
        assert source.spread([a, 1.0]).variance >= 0


def test_one_cell_shows_no_scatter() -> None:
    source = cell_source("one", {V: _sample({"c0": 3.0})})
    assert math.isnan(source.spread([1.0]).variance)
    assert source.spread([0.0]).variance == 0
    assert np.all(source.draws(np.random.default_rng(0), 5) == 3.0)


@pytest.mark.parametrize("n", [3, 5, 12])
def test_draws_have_the_standard_error_of_the_mean(n: int) -> None:
    values = np.random.default_rng(n).gamma(2.0, 1.0, n)
    source = cell_source("cells", {V: _sample(cells(values))})
    draws = source.draws(np.random.default_rng(1), 200_000)[0]
    assert draws.mean() == pytest.approx(values.mean(), abs=0.01)
    # sqrt(n/(n-1)) times the plain bootstrap's spread is the usual standard error
    assert draws.std() == pytest.approx(values.std(ddof=1) / math.sqrt(n), rel=0.01)


def test_draws_keep_the_covariance_of_shared_cells() -> None:
    rng = np.random.default_rng(8)
    v = rng.normal(0, 2, 6)
    q = 0.5 * v + rng.normal(0, 0.3, 6)
    source = cell_source("both", {V: _sample(cells(v)), Q: _sample(cells(q))})
    draws = source.draws(np.random.default_rng(2), 100_000)
    assert np.cov(draws) == pytest.approx(np.cov(np.vstack([v, q])) / 6, rel=0.03)


def test_draws_of_a_source_do_not_depend_on_the_other_sources() -> None:
    own = cell_source("cells", {V: _sample(cells([1.0, 2.0, 4.0]))})
    other = cell_source("others", {X: _sample(cells([5.0, 6.0, 9.0]))})
    alone, beside = _ledger(own), _ledger(other, own)
    assert np.array_equal(alone.draws(V), beside.draws(V))
    assert not np.array_equal(alone.draws(V), Ledger([own], seed=2, replicates=100).draws(V))


def test_row_order_of_cells_changes_no_bit() -> None:
    values = cells(np.random.default_rng(9).normal(size=7))
    shuffled = dict(reversed(values.items()))
    a, b = (cell_source("cells", {V: _sample(one)}) for one in (values, shuffled))
    assert a.spread([1.0]) == b.spread([1.0])
    assert np.array_equal(_ledger(a).draws(V), _ledger(b).draws(V))


def test_log_ratio_to_first_order() -> None:
    ledger = _ledger(
        StatedSource(name="a", component=V, mean=8.0, std_uncertainty=0.4),
        StatedSource(name="b", component=X, mean=10.0, std_uncertainty=0.3),
    )
    ratio = log_ratio(_one(V, 8.0), _one(X, 10.0))
    assert ratio.value == pytest.approx(math.log(0.8))
    assert ledger.spread(ratio).variance == pytest.approx(0.05**2 + 0.03**2)
    assert ledger.spread(log_ratio(_one(V, 8.0), _one(V, 8.0))).variance == 0
