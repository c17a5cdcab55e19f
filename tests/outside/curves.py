"""Sigmoid fits and median voltages."""

import functools
import math

import numpy as np
from outside.record import Check
from reference_values import load

from cornerwise.campaign import Curve
from cornerwise.median import CellReading, read_construct
from cornerwise.median.single_sigmoid import CellSigmoid, sigmoids_of_cells
from cornerwise.units import thermal_voltage_mv

NIST, RECALLED = load("nist_sigmoids"), load("recalled")
KT = thermal_voltage_mv(22.0)
TIME_MV = 10.0  # one unit of growing time stands for 10 mV


def _curve(x: np.ndarray, y: np.ndarray) -> Curve:
    return Curve(construct="growth", cell="1", voltage_mv=np.asarray(x, float), charge=np.asarray(y, float))


@functools.cache
def _rat42() -> CellSigmoid:
    case = NIST["rat42"]
    curves = [_curve(case["x"], case["y"])]
    (found,) = sigmoids_of_cells(curves, temperature_c=22.0, low_plateau_is_zero=True)
    return found


@functools.cache
def _rat43() -> CellReading:
    """The certified curve itself, without the scatter of the data, between plateaus."""
    b1, b2, b3, b4 = NIST["rat43"]["b"]
    x = np.arange(-20.0, 45.1, 0.5)
    return read_construct([_curve(TIME_MV * x, b1 / (1 + np.exp(b2 - b3 * x)) ** (1 / b4))])[0]


def _median_activity() -> float:
    """Concerted binding of two states, read as a curve in the logarithm of the activity."""
    case = RECALLED["cooperative_binding"]
    large, c, n = case["L"], case["c"], case["n"]
    log_x = np.arange(-14.0, 18.05, 0.1)
    x = np.exp(log_x)
    bound = (x * (1 + x) ** (n - 1) + large * c * x * (1 + c * x) ** (n - 1)) / (
        (1 + x) ** n + large * (1 + c * x) ** n
    )
    return math.exp(read_construct([_curve(KT * log_x, bound)])[0].median_mv / KT)


CHECKS = [
    Check(
        what="single sigmoid of pasture yields, low plateau 0: height b1, slope times midpoint b2, slope b3",
        source="NIST StRD Rat42",
        expected=tuple(NIST["rat42"]["b"]),
        obtained=lambda: (
            _rat42().high_plateau,
            _rat42().slope_charge_e0 / KT * _rat42().midpoint_mv,
            _rat42().slope_charge_e0 / KT,
        ),
        within=NIST["tolerance"],
        relative=True,
        why=NIST["tolerance_reason"],
    ),
    Check(
        what="pasture yields: residual sum of squares",
        source="NIST StRD Rat42",
        expected=NIST["rat42"]["residual_sum_of_squares"],
        obtained=lambda: _rat42().residual_sum_of_squares,
        within=NIST["tolerance"],
        relative=True,
        why=NIST["tolerance_reason"],
    ),
    Check(
        what="pasture yields: midpoint b2/b3",
        source="NIST StRD Rat42",
        expected=NIST["rat42"]["recomputed_midpoint"],
        obtained=lambda: _rat42().midpoint_mv,
        within=NIST["tolerance"],
        relative=True,
        why=f"{NIST['tolerance_reason']}. Its certified uncertainty is not printed",
        standing="recomputed",
    ),
    Check(
        what="median of the certified skewed growth curve, y = b1 / (1 + exp(b2 - b3 x))^(1/b4), sampled "
        "between its plateaus",
        source="NIST StRD Rat43",
        expected=NIST["rat43"]["recomputed_median"],
        obtained=lambda: _rat43().median_mv / TIME_MV,
        within=1e-4,
        why="the exact integral of x dy is (b2 + psi(1/b4) - psi(1)) / b3, checked by quadrature; no family "
        "of curves here contains this one",
        form=".4f",
        standing="recomputed",
    ),
    Check(
        what="midpoint of that growth curve, which is another number than its median",
        source="NIST StRD Rat43",
        expected=NIST["rat43"]["recomputed_midpoint"],
        obtained=lambda: _rat43().midpoint_mv / TIME_MV,
        within=2e-3,
        why="exact from (b2 - ln(2^b4 - 1)) / b3; the midpoint is read off the fitted curve",
        form=".3f",
        standing="recomputed",
    ),
    Check(
        what="median ligand activity of four sites, two states, L = 1000, c = 0.01",
        source="Wyman 1964",
        expected=RECALLED["cooperative_binding"]["median_activity"],
        obtained=_median_activity,
        within=RECALLED["tolerance"],
        relative=True,
        why=RECALLED["tolerance_reason"],
        form=".5f",
        standing="memory",
    ),
]
