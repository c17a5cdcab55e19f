"""Cells in batches as sources of error: the parts that a cycle of four corners seldom shows."""

import math

import numpy as np
import pytest
from builders import batched

from cornerwise.blocks import BatchMeans, Blocks, weighted_sums
from cornerwise.sources import CellSource, Component, cell_source

SIGNS = (1.0, -1.0, -1.0, 1.0)
DAYS = (["a", "a", "b"], ["a", "b", "b"], ["b", "b", "a"], ["a", "b"])


def _stream(component: Component) -> np.random.Generator:
    return np.random.default_rng([ord(letter) for letter in component.construct])


def _corner(label: str, values: list[float], days: list[str]) -> CellSource:
    return cell_source(label, {Component("median", label): batched(values, days, f"{label} ")})


def _corners(days: tuple[list[str], ...] = DAYS) -> list[CellSource]:
    rng = np.random.default_rng(4)
    return [
        _corner(label, list(rng.normal(0, 2, len(own))), own) for label, own in zip("wxyz", days, strict=True)
    ]


def test_what_leaves_out_a_corner_is_no_comparison_and_counts_cells() -> None:
    corners = _corners((DAYS[0], DAYS[1], ["a", "a"], DAYS[3]))
    blocks = Blocks(corners, SIGNS)
    gradient = [2.0, 0.0, -3.0, 0.0]
    first, _, third, _ = corners
    assert not blocks.whole(gradient)
    assert blocks.parts(gradient) == (*first.parts([2.0]), *third.parts([-3.0]))
    drawn = blocks.deviations_drawn(gradient, _stream, 500)
    apart = [first.deviations_drawn([2.0], _stream, 500), third.deviations_drawn([-3.0], _stream, 500)]
    assert drawn == pytest.approx(apart[0] + apart[1])
    footprint = blocks.footprint(gradient)
    expected = {**first.footprint([2.0]), **third.footprint([-3.0])}
    assert footprint.keys() == expected.keys()
    assert all(np.array_equal(footprint[key], expected[key]) for key in expected)


def test_batch_means_of_two_numbers_of_the_same_cells() -> None:
    days = ["a", "a", "a", "b", "b", "c"]
    v, q = np.array([1.0, 2.0, 4.0, 8.0, 9.0, 3.0]), np.array([3.0, 1.0, 7.0, 2.0, 6.0, 5.0])
    kinds = (Component("median", "w"), Component("charge", "w"))
    cells = cell_source("w", {kind: batched(x, days) for kind, x in zip(kinds, (v, q), strict=True)})
    means = BatchMeans(cells)
    by_batch = np.array([[x[:3].mean(), x[3:5].mean(), x[5]] for x in (v, q)])
    gradient = [2.0, -0.5]
    (part,) = means.parts(gradient)
    assert part.spread.variance == pytest.approx(np.var(gradient @ by_batch, ddof=1) / 3)
    assert part.spread.dof == 2
    assert part.name == "w in 3 batches"
    shift = by_batch.mean(axis=1) - np.array([v.mean(), q.mean()])
    assert means.shift(gradient) == pytest.approx(gradient @ shift)
    ((named, errors),) = means.footprint(gradient).items()
    assert named == Component("median", "w by batch")
    assert np.sum(errors**2) == pytest.approx(part.spread.variance)


def test_a_construct_without_residuals_of_its_own_borrows_the_others() -> None:
    # The only cell of `z`, in a batch that others share, keeps less than half a degree of freedom.
    corners = _corners((["a", "a", "b"], ["a", "b", "b"], ["b", "b", "a"], ["a"]))
    blocks = Blocks(corners, SIGNS)
    y = np.concatenate([corner.values[0] for corner in corners])  # 1 times each, whatever the sign
    residuals = blocks.residual_maker @ y
    own = np.repeat(np.arange(4), [3, 3, 3, 1])
    dof = np.array([np.diag(blocks.residual_maker)[own == k].sum() for k in range(4)])
    squares = np.array([np.sum(residuals[own == k] ** 2) for k in range(4)])
    assert dof[3] < 0.5 <= dof[:3].min()
    variances = [*(squares[:3] / dof[:3]), squares.sum() / dof.sum()]
    weights = np.array([np.sum(blocks.weights[own == k] ** 2) for k in range(4)])
    parts = blocks.parts(list(SIGNS))
    assert [part.spread.variance for part in parts] == pytest.approx(weights * variances)
    assert [part.spread.dof for part in parts] == pytest.approx([*dof[:3], dof.sum()])


def test_half_a_degree_of_freedom_is_enough() -> None:
    # Two constructs once in each of two batches: every cell keeps 1 - 3/4, every construct one half.
    days = ["a", "b"]
    corners = [_corner("w", [0.0, 2.0], days), _corner("x", [1.0, 4.0], days)]
    blocks = Blocks(corners, (1.0, -1.0))
    parts = blocks.parts([1.0, -1.0])
    assert [part.spread.dof for part in parts] == pytest.approx([0.5, 0.5])
    assert blocks.has_scatter  # one degree of freedom in all


@pytest.mark.parametrize("shift", [0.0, 3.0])  # all alike, or a batch effect alone
def test_constructs_without_scatter_draw_nothing(shift: float) -> None:
    days = ["a", "b"]
    corners = [_corner("w", [0.0, shift], days), _corner("x", [0.0, shift], days)]
    blocks = Blocks(corners, (1.0, -1.0))
    assert np.abs(blocks.deviations_drawn([1.0, -1.0], _stream, 50)).max() < 1e-12
    for errors in blocks.footprint([1.0, -1.0]).values():
        assert errors.shape == (2,)
        assert np.abs(errors).max() < 1e-12


def test_deviations_have_the_spread_and_the_sign_of_the_comparison() -> None:
    corners = _corners()
    blocks = Blocks(corners, SIGNS)
    gradient = list(SIGNS)
    drawn = blocks.deviations_drawn(gradient, _stream, 200_000)
    variance = math.fsum(part.spread.variance for part in blocks.parts(gradient))
    assert drawn.var() == pytest.approx(variance, rel=0.02)
    # Skewness tells the sign: that of weight times residual, cubed, over the cells of each construct.
    scaled = blocks._scaled_residuals(gradient)
    third = 0.0
    for k in range(4):
        own = blocks.construct == k
        third += float(np.sum(blocks.weights[own] ** 3) * np.mean((scaled[own] - scaled[own].mean()) ** 3))
    assert abs(third) > 0.01
    assert np.mean((drawn - drawn.mean()) ** 3) == pytest.approx(third, rel=0.2)


@pytest.mark.parametrize("weights", [(0.5, 0.5, 0.5), (0.2, 0.3, 0.5), (-1.0, 2.0, 0.25)])
def test_weighted_sums_of_resampled_values(weights: tuple[float, ...]) -> None:
    values, w = np.array([1.0, 4.0, 10.0]), np.array(weights)
    sums = weighted_sums(values, w, np.random.default_rng(6), 200_000)
    spread = math.sqrt(np.sum(w**2) * values.var())
    assert sums.mean() == pytest.approx(w.sum() * values.mean(), abs=spread / 60)
    assert sums.std() == pytest.approx(spread, rel=0.02)
