import math

import pytest
from builders import campaign, construct

from cornerwise.campaign import Construct
from cornerwise.charge_judgement import ASSUMED, ChargeJudgement, cells_for_verdict, family_verdicts
from cornerwise.coupling import couple
from cornerwise.intervals import Interval
from cornerwise.result import InteractionRow, Result


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


def test_offset_contribution_is_f_j_times_the_stated_offset() -> None:
    row = _row(couple(campaign(_four([10.0, 10.3, 9.7, 10.1, 9.9]), voltage_offset_mv=3.0)))
    expected = 0.02306054783061903 * 3.0 * abs(row.charge_interaction_e0)  # type: ignore[arg-type]
    assert row.offset_contribution == pytest.approx(expected)
    assert row.change_per_10_mv == pytest.approx(-10 * 0.02306054783061903 * row.charge_interaction_e0)  # type: ignore[operator]
