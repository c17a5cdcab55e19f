"""Speed of reading 1,000 cells against one `curve_fit` sigmoid per cell, in one run.

Run it with ``python tests/bench/median_speed.py``. Ratios within the run are what counts; the seconds are
those of whatever machine runs it.
"""

from __future__ import annotations

import time

import numpy as np
from scipy.optimize import curve_fit

from cornerwise.campaign import Curve
from cornerwise.gating import example_schemes
from cornerwise.median import read_construct

CONSTRUCTS, CELLS = 125, 8
VOLTAGES_MV = np.linspace(-170.0, 130.0, 31)


def invented_constructs() -> list[list[Curve]]:
    """Every scheme in turn, 1 % noise, shifts of 2 mV; invented data."""
    schemes = list(example_schemes().values())
    constructs = []
    for k in range(CONSTRUCTS):
        rng = np.random.default_rng(k)
        scheme = schemes[k % len(schemes)]
        constructs.append(
            [
                Curve(
                    construct=f"invented {k}",
                    cell=f"c{i}",
                    voltage_mv=VOLTAGES_MV,
                    charge=scheme.q(VOLTAGES_MV - rng.normal(0.0, 2.0)) + rng.normal(0.0, 0.01, 31),
                )
                for i in range(CELLS)
            ]
        )
    return constructs


def sigmoid(v: np.ndarray, low: float, height: float, midpoint: float, width: float) -> np.ndarray:
    return low + height / (1.0 + np.exp(-np.clip((v - midpoint) / width, -300.0, 300.0)))


def fit_every_cell(constructs: list[list[Curve]]) -> None:
    for curves in constructs:
        for curve in curves:
            q = curve.charge
            start = [
                float(q.min()),
                float(np.ptp(q)),
                float(curve.voltage_mv[np.argmin(np.abs(q - q.mean()))]),
                10.0,
            ]
            curve_fit(sigmoid, curve.voltage_mv, q, p0=start, maxfev=5000)


def seconds(work: object, constructs: list[list[Curve]]) -> float:
    begin = time.perf_counter()
    work(constructs)  # type: ignore[operator]
    return time.perf_counter() - begin


def main() -> None:
    constructs = invented_constructs()
    read_construct(constructs[0])  # imports and first calls are not what is measured
    halves = (constructs[::2], constructs[1::2])
    ours = theirs = 0.0
    for half in halves:  # taken in turns, so that a busy machine weighs on both
        ours += seconds(lambda some: [read_construct(curves) for curves in some], half)
        theirs += seconds(fit_every_cell, half)
    count = CONSTRUCTS * CELLS
    print(f"{count} cells of {len(VOLTAGES_MV)} points in {CONSTRUCTS} constructs, invented data")
    print(f"read_construct             {ours:6.2f} s   {1e3 * ours / CONSTRUCTS:6.1f} ms per construct")
    print(f"one curve_fit per cell     {theirs:6.2f} s   {1e3 * theirs / count:6.2f} ms per cell")
    print(f"ratio                      {ours / theirs:6.1f}   (limit 10)")


if __name__ == "__main__":
    main()
