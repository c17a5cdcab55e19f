"""Plans of pilots and of campaigns yet to be recorded."""

import itertools
import math

import numpy as np
import pytest
from builders import campaign, construct
from statsmodels.stats.power import TTestIndPower

from cornerwise.campaign import Campaign, ChargeSummary, StatedCharge
from cornerwise.coupling import couple
from cornerwise.errors import UsageError
from cornerwise.planning.assumed import Assumptions
from cornerwise.planning.plan import plan, plan_assumed
from cornerwise.planning.request import PlanRequest

PAIR = {"WT": -40.0, "E5A": -33.0, "R9Q": -47.0, "E5A/R9Q": -30.0}
PER_MV = 0.0230605


def _pilot(n: int = 5, *, charges: bool = True, charge_sd: float = 0.5, **settings: object) -> Campaign:
    rng = np.random.default_rng(n)
    made = [
        construct(
            label,
            list(median + 1.5 * rng.standard_normal(n)),
            list(13 + charge_sd * rng.standard_normal(n)) if charges else None,
            charge_cells="n",
        )
        for label, median in PAIR.items()
    ]
    return campaign(made, **settings)


def _assumed(**changes: object) -> Assumptions:
    usual = {"median_mv": (-40.0,), "median_sd_mv": (2.0,), "charge_e0": (13.0,), "charge_sd_e0": (0.5,)}
    return Assumptions(**{**usual, **changes})  # type: ignore[arg-type]


def test_what_there_is_now_is_what_couple_says() -> None:
    pilot = _pilot()
    now = next(row for row in plan(pilot).outlooks if row.cells_each is None)
    (row,) = couple(pilot).interactions
    assert row.low is not None
    assert row.high is not None
    assert now.half_width == pytest.approx((row.high - row.low) / 2, rel=1e-5)


def test_more_cells_narrow_the_interval_and_raise_the_power() -> None:
    rows = list(plan(_pilot(), PlanRequest(cells=(6, 9, 15, 30))).outlooks)
    assert [row.cells_each for row in rows] == [None, 6, 9, 15, 30]
    for few, many in itertools.pairwise(rows):
        assert few.half_width > many.half_width  # type: ignore[operator]
        assert few.power < many.power  # type: ignore[operator]
        assert many.half_width_low <= many.half_width <= many.half_width_high  # type: ignore[operator]


def test_cells_that_are_told_of_follow_the_pilot() -> None:
    assert plan(_pilot(8)).cells == (12, 16, 24)
    assert plan_assumed(_assumed()).cells == (4, 6, 8, 12)
    drawn = plan(_pilot(8), PlanRequest(drawn=True))
    assert drawn.cells == (12, 16, 24)
    assert {12, 16, 24} < {row.cells_each for row in drawn.outlooks}


def test_needed_cells_reach_what_is_wanted() -> None:
    pilot = _pilot()
    found = plan(pilot, PlanRequest(half_width=0.8, power=0.9, interaction=1.5))
    assert [(row.goal, row.wanted) for row in found.needs] == [("half-width", 0.8), ("power", 0.9)]
    for row in found.needs:
        assert row.further == sum(share.cells for share in row.shares)
        assert row.further_low <= row.further <= row.further_high  # type: ignore[operator]
    narrow, strong = found.needs
    assert narrow.expected <= 0.8  # type: ignore[operator]
    assert strong.expected >= 0.9  # type: ignore[operator]


def test_without_a_question_a_power_against_the_threshold_is_planned() -> None:
    found = plan(_pilot(threshold=1.4))
    assert found.true_interaction == 1.4
    assert [(row.goal, row.wanted) for row in found.needs] == [("power", 0.8)]
    assert list(plan(_pilot(), PlanRequest(recordings=10)).needs) == []


def test_a_stated_charge_can_stand_in_the_way() -> None:
    pilot = _pilot(charges=False, charge=StatedCharge(value_e0=13.0, sem_e0=6.0))
    (row,) = plan(pilot, PlanRequest(half_width=0.2)).needs
    assert row.further is None
    assert row.shares == ()
    assert row.reason is not None
    assert "stated total charge, shared by all constructs" in row.reason


def test_a_shared_charge_is_one_source_that_counts_for_all() -> None:
    made = [construct(k, [m - 2, m, m + 1, m + 2]) for k, m in PAIR.items()]
    made[0] = construct("WT", [-42, -40, -39, -38], [12.0, 13.0, 14.5], charge_cells="n")
    found = plan(campaign(made, charge="wild-type"), PlanRequest(recordings=30))
    charges = [row for row in found.splits if row.kind == "charges"]
    assert [row.construct for row in charges] == ["WT"]
    assert found.split is not None
    assert found.split.best < found.split.equal < found.split.before  # type: ignore[operator]


def test_summaries_can_be_planned_with() -> None:
    charge = ChargeSummary(construct="WT", charge_e0=13.0, sem_e0=0.3, n=5)
    made = [
        construct(k, (m, 1.0, 4), charge if k == "WT" else None, summarised=True) for k, m in PAIR.items()
    ]
    found = plan(campaign(made, charge="wild-type"), PlanRequest(half_width=1.0))
    (row,) = found.needs
    assert row.further is not None
    assert {share.kind for share in row.shares} <= {"curves", "charges"}


def test_charge_verdicts_for_every_mutant_and_all_at_once() -> None:
    found = plan(_pilot(charge_sd=1.0), PlanRequest(charge_verdict="equal", charge_ratio=1.0, power=0.9))
    *each, together = found.needs
    assert [row.subject for row in each] == list(PAIR)[1:]
    assert {row.goal for row in found.needs} == {"charge equal"}
    assert together.subject == "all"
    assert together.expected >= 0.9  # type: ignore[operator]
    # the wild type's charges serve all three mutants
    assert together.further < sum(row.further for row in each)  # type: ignore[operator, misc]
    with pytest.raises(UsageError, match="no charge can be judged"):
        plan(
            _pilot(charges=False, charge=StatedCharge(value_e0=13.0, sem_e0=0.2)),
            PlanRequest(charge_verdict="equal"),
        )


def test_anew_uses_the_scatters_only() -> None:
    kept, anew = (plan(_pilot(), PlanRequest(half_width=1.0, anew=a)) for a in (False, True))
    assert all(row.cells_each is not None for row in anew.outlooks)
    assert anew.needs[0].further > kept.needs[0].further  # type: ignore[operator]
    total = kept.needs[0].further + 8 * 5  # type: ignore[operator]
    assert anew.needs[0].further <= total  # type: ignore[operator]


def test_cycles_are_chosen_by_name() -> None:
    labels = {**PAIR, "K3M": -35.0, "K3M/E5A": -30.0}
    pilot = campaign(
        [
            construct(k, [m - 1, m, m + 1.5, m + 2], [12.8, 13.2, 13.1, 13.6], charge_cells="n")
            for k, m in labels.items()
        ]
    )
    assert len({row.cycle for row in plan(pilot).outlooks}) == 2
    found = plan(pilot, PlanRequest(cycles=("K3M/E5A",)))
    assert {row.cycle for row in found.outlooks} == {"K3M/E5A"}
    turned = plan(pilot, PlanRequest(cycles=("E5A/K3M", "K3M/E5A")))
    assert {row.cycle for row in turned.outlooks} == {"K3M/E5A"}
    with pytest.raises(UsageError, match="no cycle is called X"):
        plan(pilot, PlanRequest(cycles=("X",)))


@pytest.mark.parametrize(
    ("d", "power", "textbook"),
    [
        # J. Cohen, Statistical Power Analysis for the Behavioral Sciences (2nd ed., 1988), table 2.4.1, two
        # sided at 0.05: 64, 26 and 394 a group for d = 0.5, 0.8 and 0.2 at a power of 0.80 (from memory)
        (0.5, 0.8, 64),
        (0.8, 0.8, 26),
        (0.2, 0.8, 394),
    ],
)
def test_a_single_difference_needs_what_textbooks_say(d: float, power: float, textbook: int) -> None:
    assumed = _assumed(order=1, median_sd_mv=(1.0,), charges="stated", charge_sd_e0=(0.0,))
    truth = d * PER_MV * 13.0
    (row,) = plan_assumed(assumed, PlanRequest(power=power, interaction=truth)).needs
    solved = math.ceil(TTestIndPower().solve_power(d, alpha=0.05, power=power))
    assert solved == textbook
    assert 2 * textbook - 2 <= row.further <= 2 * textbook + 2  # type: ignore[operator]


def test_pairs_on_one_wild_type() -> None:
    found = plan_assumed(_assumed(pairs=5), PlanRequest(recordings=300))
    rows = {(row.construct, row.kind): row for row in found.splits}
    wild = rows["WT", "curves"]
    assert wild.cycles == 5
    assert wild.further > 1.8 * rows["A1", "curves"].further
    assert {row.cycle for row in found.outlooks} == {f"A{i}/B{i}" for i in range(1, 6)}
    assert found.split is not None
    assert found.split.before is None


def test_third_order_has_eight_corners() -> None:
    found = plan_assumed(_assumed(order=3), PlanRequest(recordings=100))
    assert len(found.splits) == 16
    assert {row.order for row in found.outlooks} == {3}


def test_known_from_few_cells_widens_the_range() -> None:
    def upper(known_from: int | None) -> float:
        rows = plan_assumed(_assumed(known_from=known_from), PlanRequest(cells=(8,))).outlooks
        return rows[0].half_width_high  # type: ignore[return-value]

    assert upper(None) < upper(20) < upper(5) < upper(3)


def test_same_question_same_plan() -> None:
    request = PlanRequest(half_width=0.8, recordings=17)
    assert plan(_pilot(), request).outlooks[2] == plan(_pilot(), request).outlooks[2]
    assert list(plan(_pilot(), request).splits) == list(plan(_pilot(), request).splits)


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"cells": (2, 5)}, "3 or more"),
        ({"half_width": 0.0}, "half-width must be above 0"),
        ({"half_width": math.inf}, "half-width must be above 0"),
        ({"interaction": -1.0}, "true interaction must be above 0"),
        ({"recordings": 0}, "number of recordings must be above 0"),
        ({"charge_ratio": 0.0}, "charge ratio must be above 0"),
        ({"power": 1.0}, "between 0 and 1"),
    ],
)
def test_what_cannot_be_wanted_is_refused(changes: dict[str, object], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        PlanRequest(**changes)  # type: ignore[arg-type]


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"median_mv": (-40.0, -30.0)}, "one median voltage for all corners or 4"),
        ({"median_sd_mv": (math.nan,)}, "scatter of the median voltage"),
        ({"median_sd_mv": (-1.0,)}, "may not be negative"),
        ({"median_sd_mv": (0.0,)}, "nothing to plan"),
        ({"charge_e0": (0.0,)}, "charges must be above 0"),
        ({"order": 0}, "order 0"),
        ({"pairs": 0}, "1 cycle or more"),
        ({"correlation": 1.5}, "between -1 and 1"),
        ({"known_from": 1}, "2 cells or more"),
    ],
)
def test_what_cannot_be_assumed_is_refused(changes: dict[str, object], words: str) -> None:
    with pytest.raises(UsageError, match=words):
        _assumed(**changes)


def test_too_few_recordings_for_a_start_are_refused() -> None:
    with pytest.raises(UsageError, match="24 give each of 8 kinds"):
        plan_assumed(_assumed(), PlanRequest(recordings=20))
    with pytest.raises(UsageError, match="only where there is a campaign"):
        plan_assumed(_assumed(), PlanRequest(cycles=("A/B",)))
    with pytest.raises(UsageError, match=r"between 0\.5 and 1"):
        plan_assumed(_assumed(), confidence=1.0)


def test_no_cycle_no_plan() -> None:
    with pytest.raises(UsageError, match="no cycle is complete"):
        plan(campaign([construct("WT", [-40.0, -41.0], [13.0, 13.2]), construct("E5A", [-30.0, -31.0])]))
