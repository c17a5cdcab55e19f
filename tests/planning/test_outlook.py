"""What to expect, against closed forms, the reference libraries and plain simulation of cells."""

import math

import numpy as np
import pytest
from scipy import special, stats
from statsmodels.stats.power import TTestIndPower

from cornerwise.planning.outlook import (
    expected_half_width,
    expected_half_width_of_t,
    outcomes,
    outlook,
    power_of_t,
)
from cornerwise.planning.prospects import Fixed, Prospect, Recording, Term

CONFIDENCE = 0.95


def _prospect(sds: list[float], *, kept: int = 0, known: float = math.inf, fixed: float = 0.0) -> Prospect:
    terms = tuple(
        Term(recording=Recording(f"K{i}", "curves"), sd=sd, scatter_dof=known, kept=kept, kept_dof=kept - 1.0)
        for i, sd in enumerate(sds)
    )
    parts = (Fixed("offset", fixed**2, math.inf, "voltage offset"),) if fixed else ()
    return Prospect(name="I", value=0.0, terms=terms, fixed=parts)


def _totals(prospect: Prospect, *cells: int) -> dict[Recording, int]:
    return dict(zip((term.recording for term in prospect.terms), cells, strict=True))


def _welch(variances: np.ndarray, dofs: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Half-widths and standard uncertainties of many campaigns, written out plainly."""
    squared = variances.sum(axis=1)
    dof = squared**2 / (variances**2 / dofs).sum(axis=1)
    u = np.sqrt(squared)
    return special.stdtrit(dof, 0.5 + CONFIDENCE / 2) * u, u


@pytest.mark.parametrize("n", [2, 3, 5, 12, 40])
def test_one_variance_is_the_textbook_t_interval(n: int) -> None:
    one = _prospect([2.0])
    found = outlook(one, _totals(one, n), truth=2.5, confidence=CONFIDENCE)
    u = 2.0 / math.sqrt(n)
    assert found.half_width.expected == pytest.approx(
        expected_half_width_of_t(u, n - 1.0, CONFIDENCE), rel=1e-3
    )
    assert found.power.expected == pytest.approx(power_of_t(2.5, u, n - 1.0, CONFIDENCE), abs=1e-3)
    assert found.assurance == pytest.approx(found.power.expected, abs=5e-3)


@pytest.mark.parametrize(
    ("dof", "shift"), [(2.0, 1.0), (4.7, 3.2), (9.0, -2.0), (60.0, 4.0), (math.inf, 2.8)]
)
def test_power_of_t_is_the_noncentral_t_of_scipy(dof: float, shift: float) -> None:
    limit = stats.t.ppf(0.975, dof) if math.isfinite(dof) else stats.norm.ppf(0.975)
    law = stats.nct(dof, abs(shift)) if math.isfinite(dof) else stats.norm(abs(shift))
    assert power_of_t(shift, 1.0, dof, CONFIDENCE) == pytest.approx(law.sf(limit) + law.cdf(-limit), abs=1e-9)


def test_mean_of_s_is_that_of_the_chi_distribution() -> None:
    for dof in (1.0, 3.0, 8.5):
        mean = stats.chi(dof).mean() / math.sqrt(dof)
        quantile = stats.t.ppf(0.975, dof)
        assert expected_half_width_of_t(2.0, dof, CONFIDENCE) == pytest.approx(2.0 * mean * quantile)
    assert expected_half_width_of_t(2.0, math.inf, CONFIDENCE) == pytest.approx(2.0 * stats.norm.ppf(0.975))


@pytest.mark.parametrize("ratio", [1.0, 2.0, 4.0])
@pytest.mark.parametrize("n", [4, 8, 20, 64])
@pytest.mark.parametrize("effect", [0.5, 0.8, 1.5])
def test_a_single_difference_of_means_is_that_of_statsmodels(n: int, effect: float, ratio: float) -> None:
    pooled = float(TTestIndPower().power(effect, nobs1=n, alpha=0.05, ratio=ratio))
    pooled = 1.0 if math.isnan(pooled) else pooled  # what it gives for a power of 1
    m = round(n * ratio)
    u = math.sqrt(1 / n + 1 / m)
    assert power_of_t(effect, u, n + m - 2.0, CONFIDENCE) == pytest.approx(pooled, abs=1e-6)
    # Welch's test, which is what is computed, has a little less power where the scatters happen to be equal:
    # it does not know that they are. The difference goes with the cells of the smaller group.
    difference = _prospect([1.0, 1.0])
    found = outlook(difference, _totals(difference, n, m), truth=effect, confidence=CONFIDENCE)
    assert pooled - (0.2 if ratio == 1 else 0.8) / n <= found.power.expected <= pooled + 1e-3


@pytest.mark.parametrize(
    ("sds", "cells"),
    [
        ([1.0, 1.0, 1.0, 1.0], [3, 3, 3, 3]),
        ([1.0, 1.0, 1.0, 3.0], [3, 3, 3, 3]),
        ([1.0, 1.0, 1.0, 3.0], [12, 4, 4, 3]),
        ([1.0, 0.5] * 4, [5] * 8),
        ([1.0, 0.5] * 8, [3] * 16),
    ],
)
def test_expectation_and_power_are_those_of_plain_simulation(sds: list[float], cells: list[int]) -> None:
    rng = np.random.default_rng(7)
    one, campaigns = _prospect(sds, fixed=0.2), 40_000
    dofs = np.append(np.array(cells) - 1.0, np.inf)
    drawn = np.column_stack(
        [sd**2 / n * rng.chisquare(n - 1, campaigns) / (n - 1) for sd, n in zip(sds, cells, strict=True)]
        + [np.full(campaigns, 0.04)]
    )
    half_widths, _ = _welch(drawn, dofs)
    u = math.sqrt(sum(sd**2 / n for sd, n in zip(sds, cells, strict=True)) + 0.04)
    found = outlook(one, _totals(one, *cells), truth=3 * u, confidence=CONFIDENCE)
    assert found.half_width.expected == pytest.approx(half_widths.mean(), rel=0.01)
    power = np.mean(np.abs(rng.normal(3 * u, u, campaigns)) > half_widths)
    assert found.power.expected == pytest.approx(power, abs=0.01)
    low, high = np.quantile(half_widths, [0.1, 0.9])
    assert (found.half_width.low, found.half_width.high) == pytest.approx((low, high), rel=0.02)


def test_cells_that_are_there_keep_their_sum_of_squares() -> None:
    pilot = _prospect([1.0, 1.5], kept=4, known=3.0)
    now = outlook(pilot, _totals(pilot, 4, 4), truth=1.0, confidence=CONFIDENCE)
    variances = np.array([[1.0 / 4, 2.25 / 4]])
    (seen,), _ = _welch(variances, np.array([3.0, 3.0]))
    assert now.half_width.expected == pytest.approx(seen, rel=1e-6)
    assert (now.half_width.low, now.half_width.high) == pytest.approx((seen, seen), rel=1e-6)

    rng = np.random.default_rng(3)
    further, campaigns = 5, 20_000
    squares = [3 * sd**2 + sd**2 * rng.chisquare(further, campaigns) for sd in (1.0, 1.5)]
    half_widths, _ = _welch(np.column_stack(squares) / 8 / 9, np.array([8.0, 8.0]))
    later = expected_half_width(pilot, _totals(pilot, 9, 9), CONFIDENCE)
    assert later == pytest.approx(half_widths.mean(), rel=0.005)


def test_an_uncertain_scatter_is_carried() -> None:
    """Range and assurance, against draws of the true variance from what three cells say of it."""
    pilot = _prospect([1.0], kept=3, known=2.0)
    rng = np.random.default_rng(5)
    true = 2.0 / rng.chisquare(2, 100_000)
    squares = 2.0 + true * rng.chisquare(7, 100_000)
    half_widths, _ = _welch(squares[:, np.newaxis] / 9 / 10, np.array([9.0]))
    u = np.sqrt(true / 10)
    found = outlook(pilot, _totals(pilot, 10), truth=1.5, confidence=CONFIDENCE)
    low, high = np.quantile(half_widths, [0.1, 0.9])
    assert (found.half_width.low, found.half_width.high) == pytest.approx((low, high), rel=0.03)
    power = special.ndtr((1.5 - half_widths) / u) + special.ndtr((-1.5 - half_widths) / u)
    assert found.assurance == pytest.approx(power.mean(), abs=0.01)
    assert found.power.low < found.assurance < found.power.expected


@pytest.mark.parametrize(
    ("sds", "kept", "further"),
    [
        ([1.0], [3], [9]),
        ([1.0, 1.0, 1.0, 1.0], [3, 3, 3, 3], [9, 9, 9, 9]),
        ([1.0, 1.0, 1.0, 3.0], [5, 5, 5, 5], [0, 0, 0, 10]),
        ([1.0, 0.7] * 4, [4] * 8, [4] * 8),
    ],
)
def test_the_likely_range_holds_eight_of_ten_pilots(
    sds: list[float], kept: list[int], further: list[int]
) -> None:
    """Pilots, then more cells: the half-width falls into the range that the pilot told, on either side."""
    rng = np.random.default_rng(11)
    n0, more = np.array(kept, dtype=float), np.array(further, dtype=float)
    n, pilots, low, high = n0 + more, 150, 0, 0
    for _ in range(pilots):
        squares = np.array(sds) ** 2 * rng.chisquare(n0 - 1)
        terms = tuple(
            Term(
                recording=Recording(f"K{i}", "curves"), sd=math.sqrt(s / (k - 1)), scatter_dof=k - 1.0,
                kept=k, kept_dof=k - 1.0,
            )
            for i, (s, k) in enumerate(zip(squares, n0, strict=True))
        )  # fmt: skip
        one = Prospect(name="I", value=0.0, terms=terms)
        found = outlook(one, _totals(one, *map(int, n)), truth=1.0, confidence=CONFIDENCE)
        added = np.where(more > 0, rng.chisquare(np.maximum(more, 1)), 0.0)
        final = (squares + np.array(sds) ** 2 * added) / (n - 1) / n
        (half_width,), _ = _welch(final[np.newaxis], n - 1)
        low += half_width < found.half_width.low
        high += half_width > found.half_width.high
    assert 0.70 <= 1 - (low + high) / pilots <= 0.95
    assert max(low, high) / pilots <= 0.20


def test_what_cannot_be_made_smaller_stays() -> None:
    one = _prospect([1.0], fixed=0.5)
    assert expected_half_width(one, _totals(one, 10**9), CONFIDENCE) == pytest.approx(
        0.5 * 1.959964, rel=1e-6
    )
    assert one.floor == 0.5


def test_an_unknown_scatter_tells_nothing() -> None:
    one = _prospect([1.0, math.nan])
    found = outlook(one, _totals(one, 5, 5), truth=1.0, confidence=CONFIDENCE)
    assert math.isnan(found.half_width.expected)
    assert math.isnan(found.assurance)
    assert one.unknown == (Recording("K1", "curves"),)


def test_same_question_same_answer_to_the_last_bit() -> None:
    one = _prospect([1.0, 2.0], kept=3, known=2.0)
    first, second = (outcomes(one, _totals(one, 5, 7), certain=False) for _ in range(2))
    assert (first.estimated == second.estimated).all()
    assert (first.dof == second.dof).all()
