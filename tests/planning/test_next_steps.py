"""What would settle an unresolved cycle, tried by recording it."""

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np
import pytest
from builders import cells, measurement

from cornerwise.campaign import Campaign, Settings, StatedCharge
from cornerwise.construct_rows import construct_row
from cornerwise.coupling import couple
from cornerwise.energies import EnergyBook
from cornerwise.flags import Flag, FlagCode
from cornerwise.interaction_rows import Corners, interaction_rows
from cornerwise.measurements import Measurement
from cornerwise.median.cell_reading import CellReading
from cornerwise.mutations import find_cycles
from cornerwise.plan_rows import NextStepRow
from cornerwise.planning.next_steps import next_steps
from cornerwise.rows import InteractionRow

LABELS = ("WT", "E5A", "R9Q", "E5A/R9Q")


def _cells(mean: float, sd: float, n: int) -> dict[str, float]:
    """Cells with just this mean and standard deviation."""
    steps = np.arange(n) - (n - 1) / 2
    return cells(mean + sd * steps / np.std(steps, ddof=1))


def _made(medians: Sequence[float], sds: Sequence[float], counts: Sequence[int]) -> list[Measurement]:
    return [
        measurement(label, _cells(m, sd, n))
        for label, m, sd, n in zip(LABELS, medians, sds, counts, strict=True)
    ]


def _judged(made: Sequence[Measurement], **changes: object) -> tuple[list[InteractionRow], list[NextStepRow]]:
    stated = StatedCharge(value_e0=13.0, sem_e0=changes.pop("charge_sem", 0.0))  # type: ignore[arg-type]
    settings = Settings(**{"wild_type": "WT", "charge": stated, "replicates": 200, **changes})  # type: ignore[arg-type]
    cycles = find_cycles({frozenset(one.construct.mutations): one.label for one in made})
    measured: Mapping[str, Measurement] = {one.label: one for one in made}
    book = EnergyBook(made, settings)
    rows = {one.label: construct_row(one, book, measured, settings) for one in made}
    corners = Corners(
        measurements=measured,
        rows={label: row for label, (row, _, _) in rows.items()},
        charges={label: charge for label, (_, _, charge) in rows.items() if charge is not None},
        settings=settings,
    )
    found, _, _ = interaction_rows(cycles, book, corners)
    return found, next_steps(found, cycles, book, settings)


SDS = (6.0, 4.0, 4.0, 8.0)
COUNTS = (4, 3, 3, 3)


@pytest.mark.parametrize(
    ("double", "settled_as", "verdict"), [(-30.0, "detected", "detected"), (-39.7, "uncoupled", "uncoupled")]
)
def test_that_many_cells_settle_it_and_one_less_does_not(
    double: float, settled_as: str, verdict: str
) -> None:
    medians = (-40.0, -33.0, -47.0, double)
    threshold = 4.0
    (row,), (step,) = _judged(_made(medians, SDS, COUNTS), threshold=threshold)
    assert row.interaction_verdict == "unresolved"
    assert step.settled_as == settled_as
    assert step.half_width == pytest.approx((row.high - row.low) / 2, rel=1e-5)  # type: ignore[operator]
    shares = {share.construct: share.cells for share in step.shares}
    assert step.further == sum(shares.values())
    after = [n + shares.get(label, 0) for label, n in zip(LABELS, COUNTS, strict=True)]
    ((later,), steps) = _judged(_made(medians, SDS, after), threshold=threshold)
    assert later.interaction_verdict == verdict
    assert steps == []
    for k in range(4):
        fewer = [n - (i == k) for i, n in enumerate(after)]
        if fewer[k] >= COUNTS[k]:
            ((short,), _) = _judged(_made(medians, SDS, fewer), threshold=threshold)
            assert short.interaction_verdict == "unresolved"


def test_one_more_of_the_next_cell_narrows_it_as_said() -> None:
    medians = (-40.0, -33.0, -47.0, -30.0)
    _, (step,) = _judged(_made(medians, SDS, COUNTS))
    widths = {}
    for k, label in enumerate(LABELS):
        counts = [n + (i == k) for i, n in enumerate(COUNTS)]
        ((row,), _) = _judged(_made(medians, SDS, counts))
        widths[label] = (row.high - row.low) / 2  # type: ignore[operator]
    assert step.next_construct == min(widths, key=widths.__getitem__)
    assert step.next_kind == "curves"
    assert step.half_width_after_next == pytest.approx(min(widths.values()), rel=1e-5)


def test_what_holds_it_back_is_named_with_a_remedy() -> None:
    medians = (-40.0, -33.0, -47.0, -30.0)
    _, (step,) = _judged(_made(medians, SDS, COUNTS), charge_sem=8.0)
    assert step.further is None
    assert step.shares == ()
    assert step.limit == "stated total charge, shared by all constructs"
    assert step.remedy == "measure the total charge"


@pytest.mark.parametrize(
    ("codes", "correct", "named"),
    [
        (("sloping-plateau",), False, True),
        (("sloping-plateau",), True, False),
        (("unsaturated-high",), False, False),
    ],
)
def test_a_sloping_plateau_is_levelled_before_the_range_is_widened(
    codes: tuple[FlagCode, ...], *, correct: bool, named: bool
) -> None:
    made = _made((-40.0, -33.0, -47.0, -30.0), SDS, COUNTS)
    flags = tuple(Flag(code=code, subject="E5A/R9Q/c0", message="", value=1.0, limit=0.1) for code in codes)
    cell = CellReading(
        construct="E5A/R9Q", cell="c0", batch=None, median_mv=-30.0, midpoint_mv=-30.0, low_plateau=0.0,
        high_plateau=1.0, points=20, plain_median_mv=-30.0, flags=flags,
    )  # fmt: skip
    double = replace(made[3], truncation_mv=40.0, cells=(cell,))
    _, (step,) = _judged([*made[:3], double], correct_sloping_plateaus=correct)
    assert step.limit == "curve shape and extrapolation of E5A/R9Q"
    assert step.remedy is not None
    assert ("correct_sloping_plateaus = true" in step.remedy) is named
    assert (step.remedy == "record its curves over voltages that reach both plateaus") is not named
    unused = replace(double, cells=(replace(cell, used=False),))
    _, (other,) = _judged([*made[:3], unused], correct_sloping_plateaus=correct)
    assert other.remedy == "record its curves over voltages that reach both plateaus"


def test_adjustment_for_many_cycles_asks_for_more() -> None:
    medians = (-40.0, -33.0, -47.0, -30.0)
    alone = _judged(_made(medians, SDS, COUNTS))[1][0]
    third = [
        measurement(label, _cells(m, 3.0, 4))
        for label, m in (("K3M", -35.0), ("K3M/E5A", -28.5), ("K3M/R9Q", -42.0))
    ]
    among = next(s for s in _judged([*_made(medians, SDS, COUNTS), *third])[1] if s.cycle == alone.cycle)
    assert alone.confidence == 0.95
    assert among.confidence > 0.95
    assert among.further > alone.further  # type: ignore[operator]


def test_a_construct_of_one_cell_borrows_a_scatter() -> None:
    medians = (-40.0, -33.0, -47.0, -30.0)
    made = [measurement("WT", cells([-40.0])), *_made(medians, SDS, COUNTS)[1:]]
    (row,), (step,) = _judged(made)
    assert row.std_uncertainty is None
    assert step.half_width is None
    assert step.next_construct == "WT"
    assert step.further is not None


def test_the_result_holds_a_step_for_every_unresolved_cycle(campaign_of_orvane: Campaign) -> None:
    result = couple(campaign_of_orvane)
    unresolved = [row.cycle for row in result.interactions if row.interaction_verdict == "unresolved"]
    assert [step.cycle for step in result.next_steps] == unresolved
    assert unresolved
    sloping = next(step for step in result.next_steps if step.cycle == "Y241A/N250A")
    assert sloping.remedy is not None  # its double slopes; the others are held back by a range
    assert "correct_sloping_plateaus = true" in sloping.remedy
    for step in result.next_steps:
        assert (step.further is None) == (step.shares == ())
        assert step.limit is None or math.isfinite(step.half_width_wanted)


@pytest.fixture(scope="module")
def campaign_of_orvane() -> Campaign:
    from pathlib import Path

    import cornerwise

    return cornerwise.read(Path(__file__).parents[2] / "cycles" / "orvane")
