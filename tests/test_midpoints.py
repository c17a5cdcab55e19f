"""Midpoints beside medians: equal for a symmetric curve, misleading for a biphasic one."""

import dataclasses

import numpy as np
import pytest
from builders import VOLTAGES, campaign, construct

from cornerwise.campaign import Construct, StatedCharge
from cornerwise.coupling import couple
from cornerwise.result import Result

KCAL = 0.02306054783061903
STATED = StatedCharge(value_e0=13.0, sem_e0=0.1)


def _skewed(label: str, share: float) -> Construct:
    """Two well separated components; the median lies between them, the midpoint in the larger one."""
    base = construct(label, [-40.0, -40.5, -39.5, -40.2])
    q = (1 - share) / (1 + np.exp(-(VOLTAGES + 60.0) / 6.0)) + share / (1 + np.exp(-(VOLTAGES - 10.0) / 6.0))
    curves = tuple(dataclasses.replace(curve, charge=q * (1 + i)) for i, curve in enumerate(base.curves))
    return dataclasses.replace(base, curves=curves)


def _result(share: float) -> Result:
    constructs = [construct(label, [-40.0, -41.0, -39.0, -40.5]) for label in ("WT", "E5A", "R9Q")]
    return couple(campaign([*constructs, _skewed("E5A/R9Q", share)], charge=STATED))


def test_symmetric_curve_has_one_energy() -> None:
    row = _result(0.3).constructs[0]
    assert row.midpoint_mv == pytest.approx(row.median_mv, abs=0.1)
    assert row.midpoint_energy == pytest.approx(row.energy, abs=0.03)
    # 7 mV per e-fold at 22 C: kT/e0 is 25.434 mV (CODATA), so the slope's charge is 25.434 / 7
    assert row.slope_charge_e0 == pytest.approx(25.434 / 7.0, rel=0.01)
    assert row.sigmoid_energy == pytest.approx(KCAL * row.slope_charge_e0 * row.sigmoid_midpoint_mv)
    assert "midpoint-misleads" not in row.flags


def test_skewed_curve_is_flagged_with_its_number() -> None:
    result = _result(0.3)
    row = result.constructs[3]
    assert row.median_mv == pytest.approx(-60 * 0.7 + 10 * 0.3, abs=0.5)
    assert "midpoint-misleads" in row.flags
    (flag,) = [flag for flag in result.flags if flag.code == "midpoint-misleads"]
    assert flag.value == pytest.approx(row.midpoint_energy - row.energy)
    assert f"{row.midpoint_mv - row.median_mv:+.1f} mV" in flag.message


@pytest.mark.parametrize("inside", [True, False])
def test_limit_of_the_flag_is_the_tolerance(inside: bool) -> None:
    constructs = [construct(label, [-40.0, -41.0, -39.0, -40.5]) for label in ("WT", "E5A", "R9Q")]
    made = [*constructs, _skewed("E5A/R9Q", 0.3)]
    row = couple(campaign(made, charge=STATED)).constructs[3]
    difference = abs(row.midpoint_energy - row.energy)  # type: ignore[operator]
    tolerance = difference * (1.001 if inside else 0.999)
    flags = couple(campaign(made, charge=STATED, shortcut_tolerance=tolerance)).constructs[3].flags
    assert ("midpoint-misleads" in flags) is not inside


def test_only_constructs_with_curves_have_midpoints() -> None:
    result = _result(0.3)
    assert len(result.midpoints) == 4
    summaries = [construct(c.construct, (-40.0, 1.0, 5), summarised=True) for c in result.constructs]
    assert len(couple(campaign(summaries, charge=STATED)).midpoints) == 0
