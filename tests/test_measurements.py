"""What the settings say about reading curves reaches the medians."""

import dataclasses

import numpy as np
import pytest
from builders import VOLTAGES, campaign, construct

from cornerwise.campaign import Campaign, StatedCharge
from cornerwise.coupling import couple

LEAK_PER_MV = 0.0007


def _leaky(**settings: object) -> Campaign:
    """Wild type with a line under every curve; medians are spaced as those of the other constructs."""
    rng = np.random.default_rng(4)
    medians = [-40.0 + shift for shift in (-1.2, 0.3, 0.9, -0.4, 0.7, -0.3, 0.2, -0.2)]
    constructs = [construct(label, medians) for label in ("WT", "E5A", "R9Q", "E5A/R9Q")]
    curves = tuple(
        dataclasses.replace(
            curve,
            charge=curve.charge + LEAK_PER_MV * VOLTAGES + 0.005 * rng.standard_normal(len(VOLTAGES)),
        )
        for curve in constructs[0].curves
    )
    constructs[0] = dataclasses.replace(constructs[0], curves=curves)
    return campaign(constructs, charge=StatedCharge(value_e0=13.0, sem_e0=0.1), **settings)


def test_a_sloping_plateau_is_flagged_and_taken_off_only_when_asked() -> None:
    plain, corrected = couple(_leaky()), couple(_leaky(correct_sloping_plateaus=True))
    assert "sloping-plateau" in plain.constructs[0].flags
    assert "sloping-plateau" not in corrected.constructs[0].flags
    assert corrected.constructs[0].median_mv == pytest.approx(-40.0, abs=0.6)
    assert plain.constructs[0].std_uncertainty > 2 * corrected.constructs[0].std_uncertainty  # type: ignore[operator]
    for before, after in zip(plain.constructs[1:], corrected.constructs[1:], strict=True):
        assert before.median_mv == pytest.approx(after.median_mv, abs=0.1)
