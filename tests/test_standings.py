"""Every cycle among the others, through the whole computation."""

import dataclasses
import functools
import math

import numpy as np
import pytest
from builders import campaign, cells, construct, measurement
from scipy import stats

from cornerwise.campaign import Campaign, Distance, Settings, StatedCharge
from cornerwise.coupling import couple
from cornerwise.energies import EnergyBook
from cornerwise.estimates import Estimate, estimate_all
from cornerwise.mutations import find_cycles
from cornerwise.quantities import Summary
from cornerwise.result import InteractionRow, Result
from cornerwise.standings import Standing, standings
from cornerwise.units import energy_per_e0_mv

CHARGE = StatedCharge(value_e0=13.0, sem_e0=0.2)
PAIRS = ("D10N/R60Q", "E12Q/K64M", "D14N/H66A", "S16A/T70A", "E18Q/D72N")
SHIFTS_MV = (16.0, -12.0, 5.0, 0.0, 1.0)


def _campaign(n: int = 6, **settings: object) -> Campaign:
    rng = np.random.default_rng(12)
    made = [construct("WT", list(rng.normal(-40, 1.5, n)))]
    for pair, shift in zip(PAIRS, SHIFTS_MV, strict=True):
        a, b = pair.split("/")
        for label, mean in ((a, -35.0), (b, -45.0), (pair, -40.0 + shift)):
            made.append(construct(label, list(rng.normal(mean, 1.5, n))))
    return campaign(made, charge=CHARGE, **settings)


@functools.cache
def _result(**settings: object) -> Result:
    return couple(_campaign(**settings))


def _rows(**settings: object) -> dict[str, InteractionRow]:
    return {row.cycle: row for row in _result(**settings).interactions}


def test_every_row_knows_its_place() -> None:
    rows = _rows()
    first = rows[PAIRS[0]]
    assert (first.rank, first.rank_low) == (1, 1)
    assert first.strength_low == pytest.approx(max(0.0, first.low or 0.0))
    assert {row.strength_low for row in rows.values() if row.low <= 0 <= row.high} == {0.0}
    assert rows[PAIRS[1]].strength_low == pytest.approx(-(rows[PAIRS[1]].high or 0.0))
    assert sum(row.first_probability or 0.0 for row in rows.values()) == pytest.approx(3.0)  # first = 3
    for row in rows.values():
        assert abs(row.shrunken or 0.0) <= abs(row.interaction or 0.0)
        assert row.rank_low <= row.rank <= row.rank_high
        assert row.simultaneous_low is None
        assert row.monte_carlo_low is None


def test_order_by_the_lower_limit_of_strength() -> None:
    rows = _rows(rank_by="lower bound")
    by_bound = sorted(rows.values(), key=lambda row: row.rank)
    reach = [max(row.low, -row.high) for row in by_bound]
    assert reach == sorted(reach, reverse=True)
    plain = _rows()
    assert [rows[cycle].interaction for cycle in rows] == [plain[cycle].interaction for cycle in rows]


def test_ranking_table_is_in_order() -> None:
    result = _result()
    frame = result.ranking.to_frame()
    assert list(frame["rank"]) == [1, 2, 3, 4, 5]
    assert list(frame.columns[:3]) == ["rank", "cycle", "interaction"]
    assert frame.cycle[0] == PAIRS[0]


def test_simultaneous_intervals_are_wider_and_hold_the_plain_ones() -> None:
    plain, wide = _rows(), _rows(simultaneous=True)
    for cycle, row in wide.items():
        assert row.low == plain[cycle].low
        assert row.simultaneous_low < row.low
        assert row.simultaneous_high > row.high
        # Not wider than five separate intervals by Bonferroni's inequality would be.
        half = stats.t.ppf(1 - 0.025 / 5, row.dof) * row.std_uncertainty
        assert row.simultaneous_high - row.interaction < 1.05 * half


def test_monte_carlo_interval_takes_the_headline_when_asked_for() -> None:
    plain, asked = _rows(), _rows(interval="monte-carlo")
    for cycle, row in asked.items():
        assert (row.low, row.high) == (row.monte_carlo_low, row.monte_carlo_high)
        assert row.high - row.low > plain[cycle].high - plain[cycle].low
        assert row.boot_low == plain[cycle].boot_low
        assert row.p_value == plain[cycle].p_value


def test_adjustment_by_benjamini_and_hochberg() -> None:
    holm, bh = _rows(), _rows(adjustment="benjamini-hochberg")
    p = np.array([row.p_value for row in bh.values()])
    assert [row.p_adjusted for row in bh.values()] == pytest.approx(stats.false_discovery_control(p))
    assert all(bh[cycle].p_adjusted <= holm[cycle].p_adjusted for cycle in bh)


def _estimates(
    shifts: dict[str, float], n: int, seed: int, **settings: object
) -> tuple[list[Estimate], list[Standing]]:
    rng = np.random.default_rng(seed)
    made = [measurement("WT", cells(rng.normal(-40, 3, n)))]
    for pair, shift in shifts.items():
        for label, mean in zip((*pair.split("/"), pair), (-35.0, -45.0, -40.0 + shift), strict=True):
            made.append(measurement(label, cells(rng.normal(mean, 3, n))))
    chosen = Settings(**{"wild_type": "WT", "charge": CHARGE, "replicates": 1000, **settings})
    cycles = find_cycles({frozenset(m.construct.mutations): m.label for m in made})
    found, deviations = estimate_all(cycles, EnergyBook(made, chosen), chosen)
    return found, standings(found, deviations, chosen)


@pytest.mark.parametrize("at_once", [False, True], ids=["cells", "summaries"])
def test_a_cycle_with_two_exact_corners_is_welchs_t_test(at_once: bool) -> None:
    # Welch-Satterthwaite of a contrast against a reference library: scipy.stats.ttest_ind, equal_var=False.
    rng = np.random.default_rng(3)
    exact = Summary(mean=-40.0, sem=0.0, n=None)
    for n, m in ((3, 12), (5, 5), (8, 4)):
        single, double = rng.normal(-38, 4, n), rng.normal(-33, 1.5, m)
        quantities = [
            Summary(mean=float(np.mean(x)), sem=float(stats.sem(x)), n=len(x)) if at_once else cells(x)
            for x in (single, double)
        ]
        made = [
            measurement(label, quantity)
            for label, quantity in zip(
                ("WT", "A1G", "C2S", "A1G/C2S"), (exact, exact, *quantities), strict=True
            )
        ]
        charge = StatedCharge(value_e0=1.0, sem_e0=0.0)
        settings = Settings(wild_type="WT", charge=charge, replicates=1000, confidence=0.9)
        cycles = find_cycles({frozenset(m.construct.mutations): m.label for m in made})
        (found,), _ = estimate_all(cycles, EnergyBook(made, settings), settings)
        welch = stats.ttest_ind(double, single, equal_var=False)
        assert found.value / found.std_uncertainty == pytest.approx(welch.statistic)
        assert found.dof == pytest.approx(welch.df)
        assert found.p_value == pytest.approx(welch.pvalue)
        per_mv = energy_per_e0_mv("kcal/mol", settings.temperature_c)
        limits = welch.confidence_interval(0.9)
        assert found.interval.low == pytest.approx(per_mv * limits.low)
        assert found.interval.high == pytest.approx(per_mv * limits.high)


TWENTY = {f"E{10 + i}Q/R{100 + i}Q": 0.0 for i in range(20)}


def test_twenty_null_pairs_seldom_give_a_verdict() -> None:
    # At most 5 % of campaigns; the bench runs 2,000 of them (docs/statistics.md), here the worst of 150.
    false = plain = together = 0
    for seed in range(150):
        found, placed = _estimates(TWENTY, 5, seed, simultaneous=True)
        false += any(one.established for one in placed)
        plain += any(one.interval.excludes(0.0) for one in found)
        together += all(not one.simultaneous.excludes(0.0) for one in placed)
    assert stats.binomtest(false, 150, 0.05, alternative="greater").pvalue > 0.01
    assert stats.binomtest(together, 150, 0.95, alternative="less").pvalue > 0.01
    assert plain > 40


def test_a_cycle_without_uncertainty_takes_no_part() -> None:
    given = _campaign()
    lone = given.constructs[-1]
    cut = dataclasses.replace(lone, curves=lone.curves[:1])
    rows = {
        row.cycle: row
        for row in couple(dataclasses.replace(given, constructs=(*given.constructs[:-1], cut))).interactions
    }
    without = rows[lone.label]
    assert without.interaction is not None
    for key in ("rank", "strength_low", "first_probability", "shrunken", "p_adjusted"):
        assert getattr(without, key) is None, key
    assert sorted(row.rank for row in rows.values() if row.rank) == [1, 2, 3, 4]


def test_opposite_charges_are_marked_with_their_distance() -> None:
    given = dataclasses.replace(
        _campaign(), distances=(Distance(residues=frozenset({10, 60}), angstrom=3.1),)
    )
    rows = {row.cycle: row for row in couple(given).interactions}
    assert [rows[pair].opposite_charges for pair in PAIRS] == [
        "opposite charges", "opposite charges", "opposite charges with histidine", None, None,
    ]  # fmt: skip
    assert [rows[pair].distance_angstrom for pair in PAIRS] == [3.1, None, None, None, None]


def test_top_of_the_ranking_is_said_to_exaggerate() -> None:
    result = _result()
    (told,) = [note for note in result.notes if "exaggerate" in note]
    first = next(row for row in result.interactions if row.rank == 1)
    assert first.cycle in told
    assert f"{first.shrunken:.2f}" in told
    few = couple(dataclasses.replace(_campaign(), cycles=_campaign().cycles[:3]))
    assert not [note for note in few.notes if "exaggerate" in note]


def test_interactions_that_are_not_available_give_no_standing() -> None:
    found, placed = _estimates({PAIRS[0]: 0.0}, 1, 1)
    assert not found[0].known
    assert placed[0].rank is None
    assert math.isnan(placed[0].p_adjusted)
