import math

import numpy as np
import pytest
from scipy import stats
from statsmodels.stats.multitest import multipletests

from cornerwise import intervals
from cornerwise.intervals import Interval


def test_missing_p_values_are_not_counted_as_tests() -> None:
    adjusted = intervals.adjusted_p_values([0.01, math.nan, 0.04])
    assert adjusted[0] == pytest.approx(0.02)
    assert math.isnan(adjusted[1])
    assert all(math.isnan(p) for p in intervals.adjusted_p_values([math.nan]))


def test_expanded_percentiles_of_normal_draws_are_the_t_interval() -> None:
    # A grid of exact normal quantiles stands for the draws; t of 4 degrees of freedom is 2.776.
    draws = stats.norm.ppf((np.arange(200_000) + 0.5) / 200_000) * 0.7 + 3.0
    found = intervals.expanded_percentile_interval(3.0, draws, 4.0, 0.95)
    assert found == pytest.approx(tuple(intervals.t_interval(3.0, 0.7, 4.0, 0.95)), abs=2e-3)


def test_levels_beyond_the_draws_are_reached_by_stretching() -> None:
    draws = stats.norm.ppf((np.arange(2_000) + 0.5) / 2_000)
    found = intervals.expanded_percentile_interval(0.0, draws, 2.0, 0.95)
    assert found.high == pytest.approx(stats.t.ppf(0.975, 2), rel=0.01)
    assert found.high > draws.max()


@pytest.mark.parametrize("dof", [0.5, 2.0, 7.3, 60.0, math.inf])
@pytest.mark.parametrize("confidence", [0.8, 0.95, 0.99])
def test_t_against_scipy(dof: float, confidence: float) -> None:
    low, high = intervals.t_interval(1.0, 0.5, dof, confidence)
    expected = stats.norm if math.isinf(dof) else stats.t(dof)
    assert high == pytest.approx(1.0 + 0.5 * expected.ppf(0.5 + confidence / 2), rel=1e-9)
    assert low + high == pytest.approx(2.0)
    assert intervals.t_p_value(1.0, 0.5, dof) == pytest.approx(2 * expected.sf(2.0), rel=1e-9)


def test_no_uncertainty_gives_no_interval_and_no_p_value() -> None:
    assert all(map(math.isnan, intervals.t_interval(1.0, math.nan, 0.0, 0.95)))
    assert math.isnan(intervals.t_p_value(1.0, math.nan, math.nan))
    assert all(map(math.isnan, intervals.expanded_percentile_interval(1.0, np.ones(9), math.nan, 0.95)))
    assert math.isnan(intervals.welch_satterthwaite([1.0, math.nan], [3.0, 0.0]))


def test_exactly_known_difference() -> None:
    assert intervals.t_p_value(0.0, 0.0, math.inf) == 1.0
    assert intervals.t_p_value(0.1, 0.0, math.inf) == 0.0


def test_ratio_and_its_inverse_get_inverse_intervals() -> None:
    a = intervals.ratio_interval(0.8, 0.05, 6.0, 0.95)
    b = intervals.ratio_interval(1 / 0.8, 0.05, 6.0, 0.95)
    assert (1 / b.high, 1 / b.low) == pytest.approx((a.low, a.high))


@pytest.mark.parametrize(
    ("interval", "excludes_0", "inside_1", "outside_1"),
    [
        (Interval(-0.5, 0.5), False, True, False),
        (Interval(0.1, 0.9), True, True, False),
        (Interval(0.1, 1.0), True, False, False),
        (Interval(1.0, 2.0), True, False, False),
        (Interval(1.1, 2.0), True, False, True),
        (Interval(-2.0, -1.1), True, False, True),
        (Interval(math.nan, math.nan), False, False, False),
    ],
)
def test_where_an_interval_lies(
    interval: Interval, excludes_0: bool, inside_1: bool, outside_1: bool
) -> None:
    assert interval.excludes(0.0) == excludes_0
    assert interval.inside(-1, 1) == inside_1
    assert interval.outside(-1, 1) == outside_1


@pytest.mark.parametrize(("method", "name"), [("holm", "holm"), ("benjamini-hochberg", "fdr_bh")])
@pytest.mark.parametrize("p", [[0.01, 0.04, 0.03, 0.9, 0.005], [0.02, 0.02, 0.5, 0.02], [0.6], [0.0, 1.0]])
def test_adjusted_p_values_against_statsmodels(
    p: list[float], method: intervals.Adjustment, name: str
) -> None:
    adjusted = intervals.adjusted_p_values([*p[:1], math.nan, *p[1:]], method)
    assert math.isnan(adjusted.pop(1))
    assert adjusted == pytest.approx(multipletests(p, method=name)[1])
    if method == "holm":
        assert intervals.adjusted_p_values(p) == pytest.approx(adjusted)


def test_an_interval_that_ends_at_a_bound_is_not_outside_it() -> None:
    assert not Interval(-3.0, -1.0).outside(-1.0, 1.0)
    assert not Interval(1.0, 3.0).outside(-1.0, 1.0)
    assert Interval(1.1, 3.0).outside(-1.0, 1.0)
    assert Interval(-3.0, -1.1).outside(-1.0, 1.0)


def test_a_value_at_a_limit_is_not_excluded() -> None:
    interval = Interval(-1.0, 3.0)
    assert [interval.excludes(value) for value in (-1.0, 3.0, 0.0, -1.1, 3.1)] == [
        False, False, False, True, True
    ]  # fmt: skip


def test_welch_satterthwaite_by_hand_and_where_there_is_none() -> None:
    found = intervals.welch_satterthwaite
    assert found([1.0, 2.0], [3.0, 5.0]) == pytest.approx(9 / (1 / 3 + 4 / 5))
    assert found([1.0, 0.0], [3.0, 0.0]) == 3.0  # what adds nothing has no say
    assert math.isnan(found([1.0, 2.0], [0.0, 4.0]))
    assert math.isnan(found([math.nan, 1.0], [3.0, 4.0]))


def test_percentiles_that_can_be_read_are_not_stretched() -> None:
    draws = np.random.default_rng(1).gamma(2.0, 1.0, 10_000)
    found = intervals.expanded_percentile_interval(2.0, draws, math.inf, 0.9)
    assert found == pytest.approx(np.quantile(draws, [0.05, 0.95]), rel=1e-12)


def test_both_sides_are_stretched_alike() -> None:
    draws = np.random.default_rng(2).gamma(2.0, 1.0, 100)
    found = intervals.expanded_percentile_interval(2.0, draws, 3.0, 0.95)
    stretch = stats.t.ppf(0.975, 3) / stats.norm.ppf(0.9)  # ten of a hundred lie beyond the tenth percentile
    expected = 2.0 + (np.quantile(draws, [0.1, 0.9]) - 2.0) * stretch
    assert found == pytest.approx(expected, rel=1e-9)


def test_no_adjusted_p_value_is_above_one() -> None:
    assert intervals.adjusted_p_values([0.6, 0.7]) == [1.0, 1.0]
