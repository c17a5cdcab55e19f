import dataclasses
import math

import numpy as np
import pytest
from builders import VOLTAGES, campaign, construct

from cornerwise.campaign import Construct
from cornerwise.charge_judgement import ASSUMED, ChargeJudgement, cells_for_verdict, family_verdicts
from cornerwise.coupling import couple
from cornerwise.gating import LinearSequence
from cornerwise.intervals import Interval
from cornerwise.result import InteractionRow, Result
from cornerwise.verdicts import interaction_verdict


def _judged(verdict: str, p: float) -> ChargeJudgement:
    return ChargeJudgement(verdict=verdict, p_value=p)  # type: ignore[arg-type]


def test_family_holds_its_error_by_holms_step_down() -> None:
    corners = [_judged("changed", 0.04), _judged("equal", 0.5), _judged("unresolved", 0.2)]
    assert family_verdicts(corners, 0.95) == ["unresolved", "equal", "unresolved"]
    corners = [_judged("changed", 0.016), _judged("changed", 0.024), _judged("unresolved", 0.2)]
    assert family_verdicts(corners, 0.95) == ["changed", "changed", "unresolved"]
    corners = [_judged("changed", 0.018), _judged("changed", 0.001), _judged("equal", 0.3)]
    assert family_verdicts(corners, 0.95) == ["changed", "changed", "equal"]


def test_corners_never_measured_are_no_part_of_the_family() -> None:
    corners = [_judged("changed", 0.04), ASSUMED, ASSUMED]
    assert family_verdicts(corners, 0.95) == ["changed", "assumed", "assumed"]


def test_passing_margin_is_the_farther_limit() -> None:
    judged = ChargeJudgement(verdict="equal", equivalence=Interval(0.93, 1.04))
    assert judged.passing_margin == pytest.approx(0.07)
    assert math.isnan(ASSUMED.passing_margin)


@pytest.mark.parametrize("scatter", [0.04, 0.08, 0.12])
def test_cells_for_a_verdict_are_just_enough(scatter: float) -> None:
    n = cells_for_verdict(1.0, (scatter, scatter), 0.10, 0.95)
    assert n is not None
    # By hand: t(0.95; 2n - 2) sqrt(2) s / sqrt(n) must stay below ln 1.1, and not for one fewer.
    from scipy import stats

    def half(cells: int) -> float:
        return float(stats.t.ppf(0.95, 2 * cells - 2) * scatter * math.sqrt(2 / cells))

    assert half(n) < math.log(1.1)
    assert n == 3 or half(n - 1) >= math.log(1.1)


def test_no_number_of_cells_settles_a_ratio_at_the_margin_as_equal() -> None:
    # A ratio at the margin is settled as changed once 1 is excluded, never as equal.
    assert cells_for_verdict(1.1, (0.3, 0.3), 0.10, 0.95) == pytest.approx(76, abs=6)
    assert cells_for_verdict(1.02, (0.9, 0.9), 0.001, 0.95) is None
    assert cells_for_verdict(1.0, (math.nan, 0.1), 0.1, 0.95) is None


def _four(double: list[float]) -> list[Construct]:
    wild = [13.0, 13.3, 12.7, 13.1, 12.9]
    return [
        construct("WT", [-40.0, -41.0, -39.0, -40.5], wild, charge_cells="n"),
        construct("E5A", [-30.0, -31.0, -29.0, -30.5], [q + 0.05 for q in wild], charge_cells="n"),
        construct("R9Q", [-50.0, -51.0, -49.0, -50.5], [q - 0.05 for q in wild], charge_cells="n"),
        construct("E5A/R9Q", [-33.0, -34.0, -32.0, -33.5], double, charge_cells="n"),
    ]


def _row(result: Result) -> InteractionRow:
    return result.interactions[0]


def test_trace_says_what_would_settle_the_shortcut() -> None:
    row = _row(couple(campaign(_four([11.0, 14.0, 15.0, 12.0, 13.0]))))
    assert row.shortcut_verdict == "unresolved"
    traced = {one.construct: one for one in row.corner_charges}
    assert set(traced) == {"E5A", "R9Q", "E5A/R9Q"}
    assert traced["E5A/R9Q"].verdict == "unresolved"
    assert row.passing_margin == traced["E5A/R9Q"].passing_margin > 0.1  # type: ignore[operator]
    assert row.charge_cells_needed == traced["E5A/R9Q"].cells_needed > 5  # type: ignore[operator]
    # the margin it names is one that passes
    wider = campaign(_four([11.0, 14.0, 15.0, 12.0, 13.0]), charge_margin=row.passing_margin + 1e-9)
    assert {one.verdict for one in _row(couple(wider)).corner_charges} == {"equal"}


def test_breakdown_names_the_change_that_erases_the_interaction() -> None:
    constructs = _four([])
    constructs[3] = construct("E5A/R9Q", [-33.0, -34.0, -32.0, -33.5])
    given = campaign(constructs)
    row = _row(couple(given))
    assert row.shortcut_verdict == "untested"
    (one,) = row.breakdown
    assert one.construct == "E5A/R9Q"
    energies = {r.construct: r.energy for r in couple(given).constructs}
    nearest = row.low if row.low > 0 else row.high  # type: ignore[operator]
    assert nearest + one.fraction * energies["E5A/R9Q"] == pytest.approx(0.0, abs=1e-12)  # type: ignore[operator]
    assert row.interaction_verdict in ("coupled", "detected")


@pytest.mark.parametrize(("threshold", "verdict"), [(0.01, "coupled"), (3.0, "detected"), (3.0, "uncoupled")])
def test_breakdown_names_the_change_that_undoes_the_verdict(threshold: float, verdict: str) -> None:
    """A double whose charge differs by a little less keeps the verdict, by a little more loses it."""
    constructs = _four([])
    spread = [-40.4, -41.4, -39.4, -40.9] if verdict == "uncoupled" else [-33.0, -34.0, -32.0, -33.5]
    constructs[3] = construct("E5A/R9Q", spread)
    row = _row(couple(campaign(constructs, threshold=threshold)))
    assert row.interaction_verdict == verdict
    (one,) = row.breakdown
    energy = next(r.energy for r in couple(campaign(constructs)).constructs if r.construct == "E5A/R9Q")
    assert energy is not None
    for factor, kept in ((0.99, True), (1.01, False)):
        shift = factor * one.verdict_fraction * energy  # the double enters with a plus
        moved = Interval(row.low + shift, row.high + shift)  # type: ignore[operator]
        assert (interaction_verdict(moved, threshold, established=verdict != "uncoupled") == verdict) is kept


def _three_states(charge: float, median_mv: float) -> LinearSequence:
    return LinearSequence(
        charges_e0=(0.4 * charge, 0.6 * charge),
        midpoints_mv=(median_mv - 18.0, median_mv + 12.0),
        temperature_c=22.0,
    )


def test_three_state_mutant_that_loses_30_percent_of_its_charge() -> None:
    # dG in kcal/mol and Q in e0; I is -12 + 10 + 9 - 5.5 = 1.5, medians alone give another number.
    truth = {"WT": (-12.0, 13.0), "E5A": (-10.0, 13.0), "R9Q": (-9.0, 9.1), "E5A/R9Q": (-5.5, 9.1)}
    per = 0.02306054783061903
    medians = {label: energy / charge / per for label, (energy, charge) in truth.items()}
    shortcut = per * 13.0 * (medians["WT"] - medians["E5A"] - medians["R9Q"] + medians["E5A/R9Q"])
    rng = np.random.default_rng(8)
    covered = biased = 0
    for _ in range(12):
        constructs = []
        for label, (_, charge) in truth.items():
            charges = list(charge * (1 + 0.04 * rng.standard_normal(8)))
            base = construct(label, [0.0] * 8, charges, charge_cells="n")
            curves = [
                dataclasses.replace(
                    curve,
                    charge=_three_states(charge, medians[label] + 1.5 * rng.standard_normal()).q(VOLTAGES)
                    + 0.01 * rng.standard_normal(len(VOLTAGES)),
                )
                for curve in base.curves
            ]
            constructs.append(dataclasses.replace(base, curves=tuple(curves)))
        row = _row(couple(campaign(constructs)))
        assert row.shortcut_verdict == "invalid"
        covered += row.low <= 1.5 <= row.high  # type: ignore[operator]
        biased += row.shortcut_bias_low <= 1.5 - shortcut <= row.shortcut_bias_high  # type: ignore[operator]
    # 95 % intervals: of twelve, fewer than ten would come once in fifty times
    assert covered >= 10
    assert biased >= 10


def test_offset_contribution_is_f_j_times_the_stated_offset() -> None:
    row = _row(couple(campaign(_four([10.0, 10.3, 9.7, 10.1, 9.9]), voltage_offset_mv=3.0)))
    expected = 0.02306054783061903 * 3.0 * abs(row.charge_interaction_e0)  # type: ignore[arg-type]
    assert row.offset_contribution == pytest.approx(expected)
    assert row.change_per_10_mv == pytest.approx(-10 * 0.02306054783061903 * row.charge_interaction_e0)  # type: ignore[operator]
