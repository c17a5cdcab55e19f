from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import t

from cornerwise.campaign import Curve
from cornerwise.flags import codes
from cornerwise.gating import GatingScheme, TwoStates, example_schemes
from cornerwise.median import CellReading, read_construct

SCHEMES = example_schemes()
GRID = np.arange(-170.0, 131.0, 10.0)


def curve(v: np.ndarray, charge: np.ndarray, cell: str = "c1", construct: str = "invented") -> Curve:
    return Curve(
        construct=construct, cell=cell, voltage_mv=np.asarray(v, float), charge=np.asarray(charge, float)
    )


def cells(
    scheme: GatingScheme,
    count: int,
    *,
    seed: int = 1,
    noise: float = 0.01,
    v: np.ndarray = GRID,
    sd: float = 2.0,
) -> tuple[list[Curve], np.ndarray]:
    """Cells with their own gain, offset and shift; the second item is each cell's true median."""
    rng = np.random.default_rng(seed)
    shift = rng.normal(0.0, sd, count)
    made = [
        curve(
            v,
            rng.normal(0.0, 0.3) + rng.uniform(0.5, 2.0) * (scheme.q(v - s) + rng.normal(0.0, noise, len(v))),
            f"c{i:02d}",
        )
        for i, s in enumerate(shift)
    ]
    return made, scheme.median_mv + shift


def medians(readings: tuple[CellReading, ...]) -> np.ndarray:
    return np.array([reading.median_mv for reading in readings])


def interval(readings: tuple[CellReading, ...]) -> tuple[float, float]:
    """Mean and 95 % half-width: t over the cells with the shared uncertainty (Welch-Satterthwaite)."""
    found = medians(readings)
    own = found.var(ddof=1) / len(found)
    variance = own + readings[0].truncation_mv ** 2
    return float(found.mean()), float(
        t.ppf(0.975, variance**2 / (own**2 / (len(found) - 1))) * math.sqrt(variance)
    )


@pytest.mark.parametrize("name", SCHEMES)
def test_construct_mean_is_near_the_truth_for_every_scheme(name: str) -> None:
    errors, plain = [], []
    for seed in range(12):
        made, truth = cells(SCHEMES[name], 8, seed=seed)
        readings = read_construct(made)
        errors.append((medians(readings) - truth).mean())
        plain.append((np.array([r.plain_median_mv for r in readings]) - truth).mean())
    assert abs(np.mean(errors)) <= 0.25
    assert math.sqrt(np.mean(np.square(errors))) <= 0.3
    assert math.sqrt(np.mean(np.square(errors))) <= 0.7 * math.sqrt(np.mean(np.square(plain)))


@pytest.mark.parametrize("count", [1, 3])
@pytest.mark.parametrize("name", SCHEMES)
def test_few_cells_are_read_too(name: str, count: int) -> None:
    made, truth = cells(SCHEMES[name], count, seed=5)
    assert np.abs(medians(read_construct(made)) - truth).max() < 2.5


def test_scatter_between_cells_survives_pooling() -> None:
    # Shifts of 2 mV and shapes stretched by 10 % about the median, in the hardest scheme for a pooled shape.
    scheme = SCHEMES["biphasic"]
    found, true = [], []
    for seed in range(10):
        rng = np.random.default_rng(seed)
        truth = scheme.median_mv + rng.normal(0.0, 2.0, 8)
        made = [
            curve(
                GRID,
                scheme.q((GRID - m) / math.exp(rng.normal(0.0, 0.1)) + scheme.median_mv)
                + rng.normal(0.0, 0.01, 31),
                f"c{i}",
            )
            for i, m in enumerate(truth)
        ]
        found.append(medians(read_construct(made)).var(ddof=1))
        true.append(truth.var(ddof=1))
    assert 0.9 < math.sqrt(np.mean(found) / np.mean(true)) < 1.2


@pytest.mark.parametrize("name", SCHEMES)
def test_noiseless_curves_are_read_exactly(name: str) -> None:
    v = np.arange(-200.0, 181.0, 5.0)
    reading = read_construct([curve(v, SCHEMES[name].q(v))])[0]
    assert reading.median_mv == pytest.approx(SCHEMES[name].median_mv, abs=0.02)


@pytest.mark.parametrize(("gain", "offset"), [(1e-15, 0.0), (1e6, -4e6), (-3.0, 7.0)])
def test_scale_and_offset_of_the_charge_do_not_matter(gain: float, offset: float) -> None:
    made, _ = cells(SCHEMES["linear sequence"], 3)
    moved = [replace(c, charge=gain * c.charge + offset) for c in made]
    before, after = read_construct(made), read_construct(moved)
    np.testing.assert_allclose(medians(after), medians(before), atol=1e-5)
    for b, a in zip(before, after, strict=True):
        assert a.low_plateau == pytest.approx(gain * b.low_plateau + offset, rel=1e-5, abs=1e-5 * abs(gain))
        assert a.high_plateau == pytest.approx(gain * b.high_plateau + offset, rel=1e-5, abs=1e-5 * abs(gain))


def test_a_shift_of_the_voltages_shifts_the_medians() -> None:
    made, _ = cells(SCHEMES["allosteric"], 3)
    moved = [replace(c, voltage_mv=c.voltage_mv + 37.5) for c in made]
    np.testing.assert_allclose(
        medians(read_construct(moved)), medians(read_construct(made)) + 37.5, atol=1e-5
    )


def test_order_of_the_cells_changes_no_digit() -> None:
    made, _ = cells(SCHEMES["biphasic"], 6)
    forward, backward = read_construct(made), read_construct(made[::-1])
    assert forward == backward[::-1]


def test_the_same_cell_twice_reads_the_same() -> None:
    made, _ = cells(SCHEMES["concerted opening"], 4)
    twice = read_construct([*made, *(replace(c, cell=c.cell + " again") for c in made)])
    np.testing.assert_allclose(medians(twice)[:4], medians(twice)[4:], atol=1e-9)


def test_cells_on_different_grids_are_read_together() -> None:
    scheme = SCHEMES["linear sequence"]
    grids = [np.arange(-170.0, 131.0, 10.0), np.arange(-160.0, 121.0, 8.0), np.arange(-150.0, 101.0, 12.5)]
    made = [
        curve(v, scheme.q(v) + np.random.default_rng(i).normal(0, 0.01, len(v)), f"c{i}")
        for i, v in enumerate(grids)
    ]
    np.testing.assert_allclose(medians(read_construct(made)), scheme.median_mv, atol=1.0)


def test_a_noisy_cell_does_not_spoil_the_others() -> None:
    made, truth = cells(SCHEMES["linear sequence"], 6)
    noisy = replace(made[0], charge=made[0].charge + np.random.default_rng(3).normal(0.0, 0.2, len(GRID)))
    readings = read_construct([noisy, *made[1:]])
    assert np.abs(medians(readings)[1:] - truth[1:]).max() < 1.2
    assert "noisy" in codes(readings[0].flags)


def test_fitted_curve_has_the_median_that_is_reported() -> None:
    made, _ = cells(SCHEMES["shifted intermediate"], 4)
    fine = np.linspace(-500.0, 500.0, 20_001)
    for reading in read_construct(made):
        assert reading.fit is not None
        q = reading.fit.q(fine)
        assert fine[-1] - np.trapezoid(q, fine) == pytest.approx(reading.median_mv, abs=1e-3)


@pytest.mark.parametrize("end", ["low", "high"])
@pytest.mark.parametrize("name", SCHEMES)
def test_cut_curves_cover_the_truth_or_are_refused(name: str, end: str) -> None:
    scheme = SCHEMES[name]
    v = GRID[scheme.q(GRID) <= 0.93] if end == "high" else GRID[scheme.q(GRID) >= 0.07]
    honest = 0
    for seed in range(12):
        readings = read_construct(cells(scheme, 6, seed=seed, v=v)[0])
        used = tuple(reading for reading in readings if reading.used)
        if len(used) < 2:
            assert all("outside the measured voltages" in str(r.reason) for r in readings)
            honest += 1
            continue
        mean, half = interval(used)
        honest += abs(mean - scheme.median_mv) <= half
    assert honest >= 11


def test_one_range_gets_one_verdict() -> None:
    # Refusing cell by cell would drop those shifted one way and bias the mean.
    scheme = TwoStates(charge_e0=3.5, midpoint_mv=-45.0)
    for last in (-15.0, -20.0, -25.0, -30.0, -35.0):
        readings = read_construct(cells(scheme, 8, v=np.arange(-170.0, last + 1.0, 5.0))[0])
        assert len({reading.used for reading in readings}) == 1


def test_sloping_plateaus_are_taken_off_when_asked() -> None:
    made, truth = cells(SCHEMES["linear sequence"], 6)
    sloped = [replace(c, charge=c.charge + 0.1 * np.ptp(c.charge) * GRID / 300.0) for c in made]
    as_is, corrected = read_construct(sloped), read_construct(sloped, correct_sloping_plateaus=True)
    assert all("sloping-plateau" in codes(r.flags) for r in as_is)
    assert not any("sloping-plateau" in codes(r.flags) for r in corrected)
    moved = abs((medians(as_is) - truth).mean())
    assert moved > 1.0
    assert as_is[0].truncation_mv > 0.8 * moved
    assert abs((medians(corrected) - truth).mean()) < 0.5


def test_straight_plateaus_are_left_alone_when_asked() -> None:
    made, _ = cells(SCHEMES["linear sequence"], 6)
    assert read_construct(made, correct_sloping_plateaus=True) == read_construct(made)


@pytest.mark.parametrize(
    ("v", "q", "reason"),
    [
        (np.arange(4.0), np.arange(4.0), "4 points, fewer than 5"),
        (np.arange(9.0), np.full(9, 2.0), "no rise"),
        (np.arange(9.0), np.array([0, 1, 5, 9, 9, 5, 1, 0, 0.0]), "no rise"),
        (np.arange(9.0), np.array([0, 1, 2, np.nan, 4, 5, 6, 7, 8.0]), "not a finite number"),
        (np.array([0, 1, 2, 2, 3, 4.0]), np.arange(6.0), "do not rise"),
    ],
)
def test_curves_that_cannot_be_read_say_why(v: np.ndarray, q: np.ndarray, reason: str) -> None:
    good, _ = cells(SCHEMES["two states"], 2)
    readings = read_construct([curve(v, q, "bad"), *good])
    assert not readings[0].used
    assert reason in str(readings[0].reason)
    assert math.isnan(readings[0].median_mv)
    assert medians(readings)[1:] == pytest.approx(medians(read_construct(good)), abs=1e-12)


DEGENERATE = {
    "five points": (np.array([-100.0, -60, -40, -20, 40]), np.array([0.0, 0.1, 0.5, 0.9, 1.0])),
    "a straight line": (np.arange(-50.0, 51.0, 5.0), np.arange(21.0)),
    "one sharp step": (np.arange(-50.0, 51.0, 5.0), (np.arange(21) > 9).astype(float)),
    "steps from 0.1 to 80 mV": (
        np.array([-200, -120, -60, -59.9, -59.8, -50, -49, -20, 0, 60, 140.0]),
        TwoStates(charge_e0=4.0, midpoint_mv=-50.0).q(
            [-200, -120, -60, -59.9, -59.8, -50, -49, -20, 0, 60, 140.0]
        ),
    ),
    "tiny charges": (GRID, 1e-15 * SCHEMES["biphasic"].q(GRID)),
    "huge charges": (GRID, 1e6 * SCHEMES["biphasic"].q(GRID) - 1e6),
    "whole numbers only": (GRID, np.round(3 * SCHEMES["linear sequence"].q(GRID))),
    "half a curve": (GRID[:12], SCHEMES["two states"].q(GRID[:12])),
}


@pytest.mark.parametrize("name", DEGENERATE)
@pytest.mark.parametrize("count", [1, 3])
def test_degenerate_curves_give_numbers_or_reasons(name: str, count: int) -> None:
    v, q = DEGENERATE[name]
    for reading in read_construct([curve(v, q, f"c{i}") for i in range(count)]):
        if math.isnan(reading.median_mv):
            assert name == "half a curve"
            assert "less than half" in str(reading.reason)
            continue
        values = [reading.median_mv, reading.truncation_mv, reading.own_uncertainty_mv, reading.noise]
        values += [reading.midpoint_mv, reading.low_plateau, reading.high_plateau, reading.plain_median_mv]
        assert np.isfinite(values).all()
        assert reading.used or reading.reason


def test_no_curves_give_no_readings() -> None:
    assert read_construct([]) == ()


def test_random_curves_never_raise() -> None:
    rng = np.random.default_rng(11)
    for _ in range(40):
        v = np.cumsum(rng.lognormal(1.0, 1.5, rng.integers(5, 20)))
        made = [
            curve(v, rng.normal(0.0, 1.0, len(v)) + rng.uniform(0, 5) * np.arange(len(v)), f"c{i}")
            for i in range(2)
        ]
        for reading in read_construct(made):
            assert reading.reason or np.isfinite(reading.median_mv)
