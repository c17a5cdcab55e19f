import math

import numpy as np
import pytest
from builders import cells
from scipy import stats

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
    t_factors,
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
        StatedSource(name="a small one", component=V, mean=0.0, std_uncertainty=3.0),
        StatedSource(name="the large one", component=X, mean=0.0, std_uncertainty=4.0),
        StatedSource(name="another small one", component=Q, mean=0.0, std_uncertainty=3.0),
    )
    budget = ledger.budget(linear([(1.0, _one(V)), (1.0, _one(X)), (1.0, _one(Q))]))
    assert [part.source for part in budget] == ["the large one", "a small one", "another small one"]
    assert [part.contribution for part in budget] == pytest.approx([4.0, 3.0, 3.0])
    assert [part.share for part in budget] == pytest.approx([16 / 34, 9 / 34, 9 / 34])


def test_what_is_known_exactly_has_no_shares() -> None:
    ledger = _ledger(StatedSource(name="exact", component=V, mean=1.0, std_uncertainty=0.0))
    (part,) = ledger.budget(_one(V))
    assert (part.contribution, part.share) == (0.0, 0.0)


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
    assert source.spread([0.0]) == (0.0, math.inf)
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


def _partly(seed: int, lone_v: int, both: int, lone_q: int) -> CellSource:
    rng = np.random.default_rng(seed)
    n = lone_v + both + lone_q
    v = rng.normal(0, 2, n)
    q = 0.2 * v + rng.normal(0, 1, n)
    vs = {f"c{i}": v[i] for i in range(lone_v + both)}
    qs = {f"c{i}": q[i] for i in range(lone_v, n)}
    return cell_source("partly", {V: _sample(vs), Q: _sample(qs)})


def _centring(members: np.ndarray) -> np.ndarray:
    m = members.astype(float)
    return np.diag(m) - np.outer(m, m) / m.sum()


@pytest.mark.parametrize(("lone_v", "both", "lone_q"), [(2, 3, 3), (1, 4, 0), (3, 2, 1), (4, 6, 2)])
@pytest.mark.parametrize("weights", [(1.5, 0.5), (1.0, -3.0)])
def test_degrees_of_freedom_of_partly_shared_cells(
    weights: tuple[float, float], lone_v: int, both: int, lone_q: int
) -> None:
    # The variance is a quadratic form z'Az of all numbers z. For normal cells with covariance S its own
    # variance is 2 tr(ASAS) (a standard result on quadratic forms of normal variables; from memory).
    source = _partly(13, lone_v, both, lone_q)
    shown = source.shown
    n_v, n_q = shown.sum(axis=1)
    shared = shown[0] & shown[1]
    a, b = weights[0] / n_v, weights[1] / n_q
    cross = 2 * a * b * both * _centring(shared) / (both - 1) / 2
    form = np.block([
        [a * a * n_v * _centring(shown[0]) / (n_v - 1), cross],
        [cross, b * b * n_q * _centring(shown[1]) / (n_q - 1)],
    ])  # fmt: skip
    (var_v, cov), (_, var_q) = source.covariance
    assert cov**2 < 0.99 * var_v * var_q  # within what the two variances allow
    pairs = np.diag(shared.astype(float)) * cov
    covariance = np.block([
        [np.diag(shown[0] * var_v), pairs], [pairs, np.diag(shown[1] * var_q)]
    ])  # fmt: skip
    z = np.where(shown, source.values, 0.0).ravel()
    product = form @ covariance
    variance = z @ form @ z
    expected = 2 * variance**2 / (2 * np.trace(product @ product))
    spread = source.spread(list(weights))
    assert 1 < expected < n_v + n_q - 2
    assert spread.variance == pytest.approx(variance, rel=1e-12)
    assert spread.dof == pytest.approx(expected, rel=1e-12)


def test_degrees_of_freedom_of_partly_shared_cells_stay_possible() -> None:
    alike = cell_source("alike", {V: _sample({"a": 1.0, "b": 1.0}), Q: _sample(cells([2.0] * 3, "b"))})
    assert alike.spread([1.0, 1.0]) == (0.0, 2 + 3 - 2)
    few = cell_source("few", {V: _sample({"a": 1.0, "b": 3.0}), Q: _sample({"b": 2.0, "c": 2.1})})
    spread = few.spread([1.0, 1.0])
    assert spread.variance == pytest.approx(1.0 + 0.05**2)
    assert 1 <= spread.dof <= 2
    # Where the two halves nearly cancel, little is known of what is left: one degree of freedom at least.
    v, q = {"c0": 0.0, "c1": 10.0, "a": 5.0}, {"c0": 0.0, "c1": -10.0, "d": -5.0}
    assert cell_source("opposed", {V: _sample(v), Q: _sample(q)}).spread([1.0, 1.0]).dof == 1


def test_one_cell_of_a_number_that_others_share_shows_no_scatter() -> None:
    source = cell_source("one", {V: _sample({"a": 1.0}), Q: _sample({"a": 2.0, "b": 2.2, "c": 2.3})})
    spread = source.spread([1.0, 1.0])
    assert math.isnan(spread.variance)
    assert math.isnan(spread.dof)


def test_deviations_of_a_stated_number_are_normal_of_its_uncertainty() -> None:
    source = StatedSource(name="stated", component=V, mean=40.0, std_uncertainty=0.5)
    drawn = source.deviations_drawn([-4.0], lambda _: np.random.default_rng(1), 100_000)
    assert drawn.shape == (100_000,)
    assert drawn.mean() == pytest.approx(0.0, abs=0.03)
    assert drawn.std() == pytest.approx(2.0, rel=0.01)


@pytest.mark.parametrize("dof", [0.5, 1.0, 7.0])
def test_factors_turn_normal_replicates_into_students_t(dof: float) -> None:
    rng = np.random.default_rng(2)
    t = rng.standard_normal(20_000) * t_factors(dof, rng, 20_000)
    assert stats.kstest(t, stats.t(dof).cdf).pvalue > 1e-3


def test_factors_at_the_ends() -> None:
    rng = np.random.default_rng(3)
    assert np.array_equal(t_factors(math.inf, rng, 3), np.ones(3))
    for dof in (0.0, -1.0, math.nan):
        none = t_factors(dof, rng, 3)
        assert none.shape == (3,)
        assert np.isnan(none).all()


def test_conservative_draws_of_partly_shared_cells() -> None:
    source = _partly(12, 4, 9, 5)  # 13 and 14 cells, 9 of them the same
    drawn = source.conservative_draws(np.random.default_rng(5), 400_000)
    n_v, n_q = 13, 14
    (var_v, cov), (_, var_q) = source.covariance
    of_means = np.array([[var_v / n_v, cov * 9 / (n_v * n_q)], [cov * 9 / (n_v * n_q), var_q / n_q]])
    dof = n_v - 1  # of the fewer cells
    assert np.cov(drawn) == pytest.approx(of_means * dof / (dof - 2), rel=0.03)
    means = [row[seen].mean() for row, seen in zip(source.values, source.shown, strict=True)]
    assert drawn.mean(axis=1) == pytest.approx(means, abs=0.01)


def test_footprint_has_one_error_a_cell() -> None:
    source = _partly(14, 2, 3, 1)
    gradient = np.array([2.0, -1.0])
    (errors,) = source.footprint(list(gradient)).values()
    per_cell = np.zeros(6)
    for weight, row, shown in zip(gradient, source.values, source.shown, strict=True):
        n = shown.sum()
        per_cell[shown] += weight * (row[shown] - row[shown].mean()) / math.sqrt(n * (n - 1))
    assert errors.shape == (6,)
    assert errors / np.linalg.norm(errors) == pytest.approx(per_cell / np.linalg.norm(per_cell))
    assert float(np.sum(errors**2)) == pytest.approx(source.spread(list(gradient)).variance)


def test_cells_that_are_all_alike_leave_no_footprint() -> None:
    source = cell_source("alike", {V: _sample(cells([2.0, 2.0, 2.0]))})
    assert np.array_equal(source.footprint([3.0])[V], np.zeros(3))
