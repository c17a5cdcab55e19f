"""Splits and fewest cells, against every possible choice on small cases."""

import itertools
import math
from collections.abc import Iterator, Sequence

import numpy as np
import pytest

from cornerwise.planning.board import Board
from cornerwise.planning.goals import NarrowEnough, StrongEnough, reached
from cornerwise.planning.outlook import expected_half_width
from cornerwise.planning.prospects import Prospect, Recording, Term
from cornerwise.planning.search import equal_shares, fewest, fewest_for_all, spend, value_of

LEVEL = 0.95


def _prospect(name: str, parts: dict[str, float], kept: int = 0) -> Prospect:
    known = kept - 1.0 if kept else math.inf
    terms = tuple(
        Term(recording=Recording(k, "curves"), sd=sd, scatter_dof=known, kept=kept, kept_dof=kept - 1.0)
        for k, sd in parts.items()
    )
    return Prospect(name=name, value=0.0, terms=terms)


def _drawn(seed: int, kept: int = 0, pairs: int = 1) -> list[Prospect]:
    rng = np.random.default_rng(seed)
    labels = ["WT", *(f"{k}{i}" for i in range(pairs) for k in "ABD")]
    sd = dict(zip(labels, rng.lognormal(0, 0.8, len(labels)), strict=True))
    return [
        _prospect(f"{i}", {k: sd[k] for k in ("WT", f"A{i}", f"B{i}", f"D{i}")}, kept) for i in range(pairs)
    ]


def _ways(kinds: int, cells: int) -> Iterator[tuple[int, ...]]:
    """Every way to give so many cells to so many kinds."""
    for bars in itertools.combinations(range(cells + kinds - 1), kinds - 1):
        edges = (-1, *bars, cells + kinds - 1)
        yield tuple(b - a - 1 for a, b in itertools.pairwise(edges))


def _worth(board: Board, totals: np.ndarray, criterion: str) -> float:
    """The criterion on expected half-widths, which the search itself does not look at."""
    named = board.named(totals)
    widths = [expected_half_width(one, named, LEVEL) for one in board.prospects]
    return value_of(np.array(widths), criterion)  # type: ignore[arg-type]


@pytest.mark.parametrize("seed", range(6))
@pytest.mark.parametrize("kept", [0, 3, 6])
def test_a_split_for_one_pair_is_the_best_of_all(seed: int, kept: int) -> None:
    board = Board(_drawn(seed, kept), [LEVEL])
    start = np.maximum(board.kept, board.least)
    found = spend(board, start, 7, "mean")
    assert int(np.sum(found - start)) == 7
    best = min(_worth(board, start + np.array(way), "mean") for way in _ways(4, 7))
    assert _worth(board, found, "mean") <= best * 1.01
    assert board.plain(found)[0] == pytest.approx(
        min(board.plain(start + np.array(way))[0] for way in _ways(4, 7)), rel=1e-12
    )


@pytest.mark.parametrize("criterion", ["mean", "largest"])
@pytest.mark.parametrize("seed", range(3))
def test_a_split_for_two_pairs_is_the_best_of_all(seed: int, criterion: str) -> None:
    board = Board(_drawn(seed, 4, pairs=2), [LEVEL] * 2)
    found = spend(board, board.kept, 5, criterion)
    plain = [value_of(board.plain(board.kept + np.array(way)), criterion) for way in _ways(7, 5)]
    assert value_of(board.plain(found), criterion) <= min(plain) * 1.003


def test_no_cell_is_left_and_none_is_given_up() -> None:
    board = Board(_drawn(1, 5, pairs=4), [LEVEL] * 4)
    for recordings in (0, 1, 13, 40):
        for criterion in ("mean", "largest"):
            found = spend(board, board.kept, recordings, criterion)
            assert (found >= board.kept).all()
            assert int(np.sum(found - board.kept)) == recordings
        assert int(np.sum(equal_shares(board, board.kept, recordings) - board.kept)) == recordings


def test_a_shared_wild_type_earns_more_than_any_mutant() -> None:
    pairs = [_prospect(f"{i}", {"WT": 1.0, f"A{i}": 1.0, f"B{i}": 1.0, f"D{i}": 1.0}, 4) for i in range(6)]
    board = Board(pairs, [LEVEL] * 6)
    found = dict(zip(board.recordings, spend(board, board.kept, 300, "mean"), strict=True))
    wild = found.pop(Recording("WT", "curves"))
    # in the long run as the square root of the number of pairs: 6 ** 0.5 = 2.4 times as many
    assert 2.2 < wild / np.mean(list(found.values())) < 2.6
    alone = Board(pairs[:1], [LEVEL])
    assert set(spend(alone, alone.kept, 12, "mean")) == {7}


def test_where_cells_come_in_batches_whole_ones_are_planned() -> None:
    by_batch = Term(
        recording=Recording("WT", "curves"), sd=1.0, scatter_dof=2.0, kept=6, kept_dof=2.0, dof_each=0.5,
        step=2,
    )  # fmt: skip
    alone = Term(recording=Recording("A", "curves"), sd=1.5, scatter_dof=5.0, kept=6, kept_dof=5.0)
    terms = (by_batch, alone)
    board = Board([Prospect(name="I", value=0.0, terms=terms)], [LEVEL])
    found = spend(board, board.kept, 9, "mean") - board.kept
    assert found[0] % 2 == 0
    assert int(found.sum()) == 9
    assert board.least.tolist() == [4, 3]


def _reached(board: Board, goals: Sequence[object]):  # type: ignore[no-untyped-def]
    def whether(row: int, totals: np.ndarray) -> bool:
        return reached(goals[row], board.prospects[row], board.named(totals))  # type: ignore[arg-type]

    return whether


@pytest.mark.parametrize("kept", [0, 3])
@pytest.mark.parametrize("seed", range(5))
def test_fewest_cells_are_the_fewest_of_all(seed: int, kept: int) -> None:
    board = Board(_drawn(seed, kept), [LEVEL])
    start = np.maximum(board.kept, board.least)
    goal = NarrowEnough(wanted=0.75 * _worth(board, start, "mean"), confidence=LEVEL)
    whether = _reached(board, [goal])
    found = fewest(board, start, lambda totals: whether(0, totals), 50)
    assert found is not None
    further = int(np.sum(found - start))
    assert whether(0, found)
    assert not any(whether(0, start + np.array(way)) for way in _ways(4, further - 1))


def test_fewest_cells_for_a_power() -> None:
    board = Board(_drawn(3), [LEVEL])
    truth = 2.0 * _worth(board, board.least, "mean")
    for power in (0.8, 0.95):
        goal = StrongEnough(wanted=power, truth=truth, confidence=LEVEL)
        whether = _reached(board, [goal])
        found = fewest(board, board.least, lambda totals, w=whether: w(0, totals), 50)
        assert found is not None
        less = int(np.sum(found - board.least)) - 1
        assert less < 0 or not any(whether(0, board.least + np.array(way)) for way in _ways(4, less))


def test_what_is_reached_needs_nothing_and_what_is_too_far_gives_up() -> None:
    board = Board(_drawn(0, 4), [LEVEL])
    assert fewest(board, board.kept, lambda _: True, 10) is board.kept
    assert fewest(board, board.kept, lambda _: False, 10) is None
    assert fewest_for_all(board, board.kept, np.array([1e-3]), lambda *_: False, 10) is None


@pytest.mark.parametrize("seed", range(3))
def test_fewest_cells_for_two_pairs_are_the_fewest_or_one_more(seed: int) -> None:
    board = Board(_drawn(seed, 4, pairs=2), [LEVEL] * 2)
    now = [expected_half_width(one, board.named(board.kept), LEVEL) for one in board.prospects]
    goals = [NarrowEnough(wanted=0.85 * width, confidence=LEVEL) for width in now]
    whether = _reached(board, goals)
    targets = np.array([goal.wanted for goal in goals])
    found = fewest_for_all(board, board.kept, targets, whether, 50)
    assert found is not None
    assert all(whether(row, found) for row in range(2))
    further = int(np.sum(found - board.kept))
    for cells in range(1, further - 1):
        ways = (board.kept + np.array(way) for way in _ways(7, cells))
        assert not any(whether(0, way) and whether(1, way) for way in ways)
