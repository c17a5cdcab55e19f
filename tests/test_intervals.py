import math

import numpy as np
import pytest
from reference_values import load
from scipy import stats

from cornerwise import intervals
from cornerwise.intervals import Interval


@pytest.mark.parametrize("example", ["H1", "H1_d"])
def test_welch_satterthwaite_of_the_end_gauge(example: str) -> None:
    case = load("gum_welch_satterthwaite")[example]
    variances = [u**2 for u in case["u_nm"]]
    assert math.sqrt(sum(variances)) == pytest.approx(case["u_total_nm"], rel=1e-9)
    assert intervals.welch_satterthwaite(variances, case["dof"]) == pytest.approx(case["dof_total"], rel=1e-9)


def test_welch_satterthwaite_of_g41() -> None:
    case = load("gum_welch_satterthwaite")["G41_from_memory"]
    dof = intervals.welch_satterthwaite([u**2 for u in case["u_relative_percent"]], case["dof"])
    assert dof == pytest.approx(case["dof_total_recomputed"], abs=1e-6)
    assert round(dof, 1) == case["dof_total_printed"]


def test_interval_of_four_added_normal_inputs() -> None:
    case = load("jcgm101")
    variances = [u**2 for u in case["std_uncertainties"]]
    dof = intervals.welch_satterthwaite(variances, [math.inf] * 4)
    assert math.sqrt(sum(variances)) == case["u"]
    found = intervals.t_interval(0.0, math.sqrt(sum(variances)), dof, 0.95)
    assert found == pytest.approx(tuple(case["interval95"]), abs=case["tolerance"])


def _welch(x: list[float], y: list[float]) -> tuple[float, float, float]:
    variances = [float(np.var(x, ddof=1) / len(x)), float(np.var(y, ddof=1) / len(y))]
    dof = intervals.welch_satterthwaite(variances, [len(x) - 1, len(y) - 1])
    return float(np.mean(x) - np.mean(y)), math.sqrt(sum(variances)), dof


@pytest.mark.parametrize("case", load("welch_tost")["clinic"], ids=["var1", "var2"])
def test_welch_interval_and_equivalence_against_r(case: dict) -> None:
    difference, u, dof = _welch(case["x"], case["y"])
    assert dof == pytest.approx(case["df"], rel=1e-6)
    found = intervals.t_interval(difference, u, dof, 0.90)
    assert found == pytest.approx(tuple(case["ci_diff"]), rel=1e-6)
    # Two one-sided tests at 5 % reject exactly when the 90 % interval lies inside the margin.
    assert found.inside(-case["epsilon"], case["epsilon"]) == (case["result"] == "rejected")
    one_sided = intervals.t_p_value(difference - case["epsilon"], u, dof) / 2
    assert one_sided == pytest.approx(case["p_value"], rel=1e-6)


def test_welch_t_test_against_r() -> None:
    reference = load("welch_tost")
    case, expected = reference["clinic"][0], reference["clinic_t_test_against_1"]
    difference, u, dof = _welch(case["x"], case["y"])
    assert (difference - 1) / u == pytest.approx(expected["statistic"], rel=1e-6)
    assert intervals.t_p_value(difference - 1, u, dof) == pytest.approx(expected["p_value"], rel=1e-6)
    found = intervals.t_interval(difference, u, dof, 0.95)
    assert found == pytest.approx(tuple(expected["conf_int"]), rel=1e-6)


def test_welch_interval_of_the_yield_data() -> None:
    case = load("welch_tost")["yield"]
    difference, u, dof = _welch(case["A"], case["B"])
    assert difference == pytest.approx(case["diff"], abs=1e-7)
    assert dof == pytest.approx(case["welch"]["df"], abs=5e-4)
    found = intervals.t_interval(difference, u, dof, 0.95)
    assert found == pytest.approx(tuple(case["welch"]["ci95"]), abs=5e-5)


@pytest.mark.parametrize("table", load("holm_bh")["tables"])
def test_adjusted_p_values_against_r(table: dict) -> None:
    assert intervals.adjusted_p_values(table["p"]) == pytest.approx(table["holm"], rel=1e-8)
    by_rate = intervals.adjusted_p_values(table["p"], "benjamini-hochberg")
    assert by_rate == pytest.approx(table["bh"], rel=1e-8)


def test_benjamini_hochberg_1995() -> None:
    case = load("holm_bh")["bh1995"]
    adjusted = intervals.adjusted_p_values(case["p"], "benjamini-hochberg")
    assert adjusted == pytest.approx(case["bh"], abs=1e-8)
    assert sum(p <= 0.05 for p in adjusted) == case["rejected_at_5_percent"]


def test_missing_p_values_are_not_counted_as_tests() -> None:
    adjusted = intervals.adjusted_p_values([0.01, math.nan, 0.04])
    assert adjusted[0] == pytest.approx(0.02)
    assert math.isnan(adjusted[1])
    assert all(math.isnan(p) for p in intervals.adjusted_p_values([math.nan]))


def test_percentiles_against_r() -> None:
    case = load("bootstrap_percentile")
    x = np.array(case["x"])
    rng = np.random.default_rng(20)
    draws = np.mean(x[rng.integers(0, len(x), size=(400_000, len(x)))], axis=1)
    # With infinite degrees of freedom nothing is widened: these are the plain percentiles.
    found = intervals.expanded_percentile_interval(float(x.mean()), draws, math.inf, 0.95)
    assert found == pytest.approx(tuple(case["percentile"]), rel=case["tolerance"])


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
