from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import t

from cornerwise.campaign import Curve
from cornerwise.flags import codes
from cornerwise.gating import TwoStates, example_schemes
from cornerwise.median import curve_quality as limits
from cornerwise.median import read_construct
from cornerwise.median.curve_quality import Evidence, cell_flags, outlying_flags

SOUND = Evidence(
    subject="invented/c1",
    points=31,
    lowest_mv=-170.0,
    highest_mv=130.0,
    missing_low=0.0,
    doubt_low_mv=0.0,
    doubt_high_mv=0.0,
    missing_high=0.0,
    slope_charge=0.0,
    slope_shift_mv=0.0,
    reversal=0.02,
    reversal_mv=-150.0,
    typical_noise=0.01,
    noise=0.01,
    largest_step_mv=10.0,
    rise_mv=40.0,
    disagreement_mv=0.5,
    plain_uncertainty_mv=1.0,
)

EDGES = [
    ("unsaturated-low", "missing_low", limits.MISSING_LIMIT, +1),
    ("unsaturated-low", "doubt_low_mv", limits.DOUBT_LIMIT_MV, +1),
    ("unsaturated-high", "doubt_high_mv", limits.DOUBT_LIMIT_MV, +1),
    ("unsaturated-high", "missing_high", limits.MISSING_LIMIT, +1),
    ("sloping-plateau", "slope_charge", limits.SLOPE_LIMIT, +1),
    ("sloping-plateau", "slope_charge", -limits.SLOPE_LIMIT, -1),
    ("not-monotonic", "reversal", limits.REVERSAL_IN_NOISE * SOUND.typical_noise, +1),
    ("coarse-steps", "rise_mv", limits.STEPS_LIMIT * SOUND.largest_step_mv, -1),
    ("coarse-steps", "points", limits.POINTS_LIMIT, -1),
    ("noisy", "noise", limits.NOISE_LIMIT, +1),
    ("area-disagrees", "disagreement_mv", limits.DISAGREEMENT_IN_NOISE * SOUND.plain_uncertainty_mv, +1),
]


def test_a_sound_curve_has_no_flags() -> None:
    assert cell_flags(SOUND) == ()


@pytest.mark.parametrize(("code", "field", "limit", "beyond"), EDGES)
def test_each_flag_just_inside_and_just_outside_its_limit(
    code: str, field: str, limit: float, beyond: int
) -> None:
    step = 1 if field == "points" else 1e-6 * abs(limit)
    inside = cell_flags(replace(SOUND, **{field: limit}))
    outside = cell_flags(replace(SOUND, **{field: limit + beyond * step}))
    assert inside == ()
    assert codes(outside) == (code,)
    assert outside[0].subject == "invented/c1"
    assert outside[0].limit is not None
    assert any(digit in outside[0].message for digit in "0123456789")


def test_small_noise_does_not_make_small_reversals_count() -> None:
    assert cell_flags(replace(SOUND, typical_noise=1e-6, reversal=limits.REVERSAL_LIMIT)) == ()
    assert cell_flags(replace(SOUND, typical_noise=1e-6, reversal=limits.REVERSAL_LIMIT + 1e-6)) != ()


def test_disagreement_of_unsaturated_curves_is_told_as_unsaturated_alone() -> None:
    found = cell_flags(replace(SOUND, missing_high=0.1, disagreement_mv=-9.0))
    assert codes(found) == ("unsaturated-high",)


def test_an_outlying_cell_is_named_just_beyond_its_limit() -> None:
    # One new value against five others, two-sided at 1 % shared by six cells: t s sqrt(1 + 1/5) at 4 dof.
    others = np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
    limit = t.ppf(1.0 - 0.01 / 6 / 2, 4) * others.std(ddof=1) * np.sqrt(1.2)
    names = [f"invented/c{i}" for i in range(6)]
    assert outlying_flags(names, np.append(others, 0.999 * limit)) == {}
    found = outlying_flags(names, np.append(others, 1.001 * limit))
    assert list(found) == ["invented/c5"]
    assert found["invented/c5"].code == "outlying-cell"


def test_cells_that_agree_closely_have_no_outliers() -> None:
    names = [f"invented/c{i}" for i in range(6)]
    close = np.array([0.0, 0.01, -0.01, 0.02, -0.02, 1.9])
    assert outlying_flags(names, close) == {}
    assert list(outlying_flags(names, close + np.array([0, 0, 0, 0, 0, 0.2]))) == ["invented/c5"]


def test_three_cells_are_not_judged() -> None:
    assert outlying_flags(["a", "b", "c"], np.array([0.0, 0.1, 80.0])) == {}


def curves(charges: list[np.ndarray], v: np.ndarray) -> list[Curve]:
    return [
        Curve(construct="invented", cell=f"c{i}", voltage_mv=v, charge=charge)
        for i, charge in enumerate(charges)
    ]


V = np.arange(-170.0, 131.0, 10.0)


def noisy(count: int, v: np.ndarray = V, name: str = "concerted opening") -> list[np.ndarray]:
    rng = np.random.default_rng(2)
    q = example_schemes()[name].q(v)
    return [q + rng.normal(0.0, 0.01, len(v)) for _ in range(count)]


def test_sound_constructs_are_left_alone() -> None:
    for name in example_schemes():
        assert [f for r in read_construct(curves(noisy(8, name=name), V)) for f in r.flags] == []


def test_a_reversal_is_found_in_its_cell() -> None:
    charges = noisy(5)
    charges[3] = charges[3].copy()
    charges[3][22] -= 0.2
    readings = read_construct(curves(charges, V))
    assert [codes(r.flags) for r in readings] == [(), (), (), ("not-monotonic",), ()]
    assert "50 mV" in readings[3].flags[0].message


def test_an_outlying_cell_is_kept_and_named() -> None:
    scheme = example_schemes()["two states"]
    shifts = [0.0, 1.0, -1.0, 0.5, -0.5, 25.0]
    rng = np.random.default_rng(4)
    readings = read_construct(curves([scheme.q(V - s) + rng.normal(0, 0.01, len(V)) for s in shifts], V))
    assert [codes(r.flags) for r in readings] == [(), (), (), (), (), ("outlying-cell",)]
    assert all(r.used for r in readings)
    assert readings[5].median_mv == pytest.approx(scheme.median_mv + 25.0, abs=1.0)


def test_coarse_steps_are_found() -> None:
    steep = TwoStates(charge_e0=12.0, midpoint_mv=-43.0)
    readings = read_construct(curves([steep.q(V)] * 3, V))
    assert all("coarse-steps" in codes(r.flags) for r in readings)
    fine = np.arange(-100.0, 11.0, 2.5)
    assert all(
        "coarse-steps" not in codes(r.flags) for r in read_construct(curves([steep.q(fine)] * 3, fine))
    )


@pytest.mark.parametrize(("v", "code"), [(V[:16], "unsaturated-high"), (V[10:], "unsaturated-low")])
def test_unfinished_ends_are_found(v: np.ndarray, code: str) -> None:
    readings = read_construct(curves(noisy(6, v, "two states"), v))
    assert all(codes(r.flags) == (code,) for r in readings)
    assert readings[0].truncation_mv > 1.0
