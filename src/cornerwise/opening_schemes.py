"""Gating schemes with free parameters, as open-probability curves that can be fitted.

Each gives the logarithm of Po and its derivatives for many parameter sets at once, a proper prior for every
parameter, and the charge its parameters stand for. The formulas are in `limiting_slope`; the same schemes
with fixed parameters are in `gating`, which knows nothing of this module.
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import expit, log_expit

FloatArray = NDArray[np.float64]

_STEPS = (1, 2, 3, 4, 5)
_STEP_CHARGE_E0 = 3.0
_STEP_LOG_SD = 0.4
_STEP_SPREAD_MV = 30.0
_ALLOSTERIC_ODDS = 0.1  # before the data; without a floor they say little of it


@dataclass(frozen=True, kw_only=True, slots=True, eq=False)
class Points:
    """The rise of one open-probability curve."""

    v_mv: FloatArray  # (n,), ascending
    log_po: FloatArray  # (n,)
    kt_mv: float

    @property
    def centre_mv(self) -> float:
        """Voltage some way below the top of the curve, where the priors put the steps."""
        climbing = np.maximum.accumulate(self.log_po)
        return float(np.interp(self.log_po.max() - 2.2, climbing, self.v_mv))


class Family(ABC):
    """One scheme with free parameters; the first is ln(-ln Pmax), which keeps Pmax below 1."""

    def __init__(self, points: Points, mean: list[float], sd: list[float], odds: float) -> None:
        self.points = points
        self.mean = np.array([np.log(0.1), *mean])
        self.precision = np.array([2.0, *sd]) ** -2.0
        self.log_odds_before = float(np.log(odds))

    @abstractmethod
    def starts(self) -> FloatArray:
        """Where to begin the search; (n_starts, n_parameters)."""

    @abstractmethod
    def log_odds(self, theta: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return ln Po/(Pmax - Po), (b, n), and its derivative by all parameters but the first."""

    @abstractmethod
    def charge_gradient(self, theta: FloatArray) -> FloatArray:
        """Charge of each part in its place, 0 elsewhere; the sum is the charge; (n_parameters,)."""

    def model(self, theta: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Return ln Po and its derivative by all parameters; (b, n) and (b, n, p)."""
        odds, by_theta = self.log_odds(theta)
        log_top = -np.exp(theta[:, :1])
        by_top = np.broadcast_to(log_top, odds.shape)
        by_rest = expit(-odds)[..., None] * by_theta
        return log_top + log_expit(odds), np.concatenate([by_top[..., None], by_rest], axis=-1)


class Sequence(Family):
    """Steps one after the other: ln(-ln Pmax), common voltage, ln charges, shifts of the steps."""

    def __init__(self, points: Points, steps: int) -> None:
        self.steps = steps
        shift_sd = _STEP_SPREAD_MV if steps > 1 else 1.0
        charge_sd = _STEP_LOG_SD if steps > 1 else 2.0 * _STEP_LOG_SD
        super().__init__(
            points,
            [points.centre_mv, *[float(np.log(_STEP_CHARGE_E0))] * steps, *[0.0] * steps],
            [60.0, *[charge_sd] * steps, *[shift_sd] * steps],
            1.0,
        )

    def starts(self) -> FloatArray:
        """Steps at one voltage, in the order they open, in the reverse order."""
        spread = np.array([0.0, 30.0, -30.0, 60.0] if self.steps > 1 else [0.0])
        theta = np.tile(self.mean, (len(spread), 1))
        theta[:, 2 + self.steps :] = spread[:, None] * np.linspace(-0.5, 0.5, self.steps)
        return theta

    def log_odds(self, theta: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Minus the logarithm of the weights of all closed states against the open one."""
        m, kt = self.steps, self.points.kt_mv
        charge = np.exp(theta[:, None, 2 : 2 + m])
        where = theta[:, None, 1:2] + theta[:, None, 2 + m :]
        work = charge * (self.points.v_mv[:, None] - where) / kt
        to_open = np.cumsum(work[..., ::-1], axis=-1)[..., ::-1]  # from state k up to the open one
        largest = (-to_open).max(axis=-1, keepdims=True)
        weight = np.exp(-to_open - largest)
        total = weight.sum(axis=-1, keepdims=True)
        still_before = np.cumsum(weight / total, axis=-1)  # closed channels that have step j ahead of them
        by_shift = -still_before * charge / kt
        by_theta = [by_shift.sum(axis=-1, keepdims=True), still_before * work, by_shift]
        return -(largest + np.log(total))[..., 0], np.concatenate(by_theta, axis=-1)

    def charge_gradient(self, theta: FloatArray) -> FloatArray:
        """Charges of the steps."""
        gradient = np.zeros_like(theta)
        gradient[2 : 2 + self.steps] = np.exp(theta[2 : 2 + self.steps])
        return gradient


class Sensors(Family):
    """Equal sensors: ln(-ln Pmax), voltage, ln charge, ln charge of opening, level, [coupling in kT]."""

    def __init__(self, points: Points, sensors: int, *, allosteric: bool) -> None:
        self.sensors = sensors
        self.allosteric = allosteric
        mean = [points.centre_mv, float(np.log(_STEP_CHARGE_E0)), float(np.log(1.5)), -1.5]
        sd = [40.0, _STEP_LOG_SD, 0.8, 5.0]
        coupling = ([4.0], [1.5]) if allosteric else ([], [])
        super().__init__(
            points, mean + coupling[0], sd + coupling[1], _ALLOSTERIC_ODDS if allosteric else 1.0
        )

    def starts(self) -> FloatArray:
        """Sensors below, at and above the middle of the opening."""
        theta = np.tile(self.mean, (3, 1))
        theta[:, 1] += (-25.0, 0.0, 25.0)
        return theta

    def log_odds(self, theta: FloatArray) -> tuple[FloatArray, FloatArray]:
        """Opening itself, and what the sensors lend to it, both counted from the middle voltage."""
        kt, middle = self.points.kt_mv, self.points.centre_mv
        v = np.append(self.points.v_mv, middle)
        charge, opening = np.exp(theta[:, 2:3]), np.exp(theta[:, 3:4])
        work = charge * (v - theta[:, 1:2]) / kt
        helped = work + theta[:, 5:6] if self.allosteric else None
        lift = (
            -np.logaddexp(0.0, -work) if helped is None else np.logaddexp(0, helped) - np.logaddexp(0, work)
        )
        by_work = expit(-work) if helped is None else expit(helped) - expit(work)
        by_lift = [-by_work * charge / kt, by_work * work, *([] if helped is None else [expit(helped)])]
        parts = np.stack([lift, *by_lift], axis=-1)
        lent = self.sensors * (parts[:, :-1] - parts[:, -1:])
        own = opening * (self.points.v_mv - middle) / kt
        by_theta = [lent[..., 1:3], own[..., None], np.ones_like(own)[..., None], lent[..., 3:]]
        return own + theta[:, 4:5] + lent[..., 0], np.concatenate(by_theta, axis=-1)

    def charge_gradient(self, theta: FloatArray) -> FloatArray:
        """Charges of all sensors and of opening."""
        gradient = np.zeros_like(theta)
        gradient[2] = self.sensors * np.exp(theta[2])
        gradient[3] = np.exp(theta[3])
        return gradient


def families(points: Points, sensors: int) -> list[Family]:
    """Every scheme that is tried, with `sensors` equal sensors where it has them."""
    sequences: list[Family] = [Sequence(points, steps) for steps in _STEPS]
    return [*sequences, *(Sensors(points, sensors, allosteric=floor) for floor in (False, True))]
