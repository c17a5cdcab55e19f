r"""Charge that opening needs, from open probabilities that fall towards negative voltages.

For any scheme at equilibrium, with <q> the mean charge moved by the open states or by all of them::

    kT d ln Po / dV = <q>_open - <q>_all

Far below the curve every channel rests, <q>_all vanishes, and the slope is the charge of the open state [1]_.
At any Po that can be measured, some channels stand in states between, and the slope falls short of the limit
by the charge these have moved already: 4 to 10 % at Po = 1e-6 for a channel of 13 e0, half of it at 1e-2. A
straight line through the lowest points is therefore a lower bound.

What is missing is estimated with a small family of schemes, each fitted to ln Po over the whole rise, and
averaged by their marginal likelihoods (Laplace's approximation)::

    sequence of m steps, m = 1..5       Pmax/Po - 1 = sum over k < m of exp(-sum_{j>k} z_j (V - V_j)/kT)
    n equal sensors, opening after all  Po/(Pmax - Po) = C o s^n / (1 + s)^n
    n equal sensors, opening at any     Po/(Pmax - Po) = C o (1 + D s)^n / (1 + s)^n

with s = exp(z_s (V - V_s)/kT) and o = exp(z_o V/kT). The last has a floor, where Po falls only by the charge
of opening itself. Weak log-normal priors hold what the points leave open: about 3 e0 a step (12 to 14 e0
shared by four sensors), within a factor of 1.5, and steps 30 mV apart.

Three limits no analysis of Po can pass. Charge that moves without opening anything is not seen. A steep part
below the lowest point is not seen: a curve may run straight at 3 e0 from 1e-2 to 1e-4 and turn to 13 e0
below. And at a floor the charge rests on the model, not on the slope.

References
----------
.. [1] Almers W (1978). Gating currents and charge movements in excitable membranes. Reviews of Physiology,
   Biochemistry and Pharmacology 82, 96-190. (Cited from memory; the relation is derived in
   docs/limiting_slope.md.)
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from .errors import UsageError
from .opening_schemes import Family, Points, families
from .units import thermal_voltage_mv

FloatArray = NDArray[np.float64]

Basis = Literal["limit", "floor", "bound"]

MIN_POINTS = 4
LARGEST_REACHED_PO = 1e-4  # above it curves that look straight are 10 % short on average, some 30 %
LARGEST_SHORTFALL = 0.30  # of the charge, between the steepest slope seen and the limit
LARGEST_RELATIVE_UNCERTAINTY = 0.15
FLOOR_FRACTION = 0.6  # a slope that falls back to this part of the steepest is a floor

_TOP = 0.95  # of the largest Po; the plateau above it holds no charge
_RUN_DECADES = 1.5  # a slope is read over at least this much of Po
_RUN_POINTS = 3
_NOISE = 0.02  # of ln Po; counts as one point, so that noiseless curves have a scale too
_ITERATIONS = 120


@dataclass(frozen=True, kw_only=True, slots=True)
class LimitingSlope:
    """Charge per channel that one cell's open probabilities show."""

    charge_e0: float  # e0; the estimate, or the steepest slope where that is all that can be said
    std_uncertainty_e0: float  # e0, from this cell's own points and the choice of scheme; not between cells
    basis: Basis  # "limit": slope near its limit; "floor": model across a floor; "bound": lower bound
    extrapolated_e0: float  # e0, average over the schemes, whatever the basis
    extrapolated_std_uncertainty_e0: float  # e0
    steepest_slope_e0: float  # e0, no model: what the total charge is at least
    steepest_low_mv: float  # mV, the points it was read from
    steepest_high_mv: float  # mV
    window_low_mv: float  # mV, the points the schemes were fitted to
    window_high_mv: float  # mV
    points: int  # in the window
    zeros_left_out: int  # below what was resolved
    lowest_po: float  # smallest open probability above 0
    scatter: float  # relative standard deviation of Po about the schemes
    warnings: tuple[str, ...]  # sentences for the user

    @property
    def reached_limit(self) -> bool:
        """Whether the slope came near its limit, so that `charge_e0` hangs little on the schemes."""
        return self.basis == "limit"

    @property
    def is_lower_bound(self) -> bool:
        """Whether `charge_e0` says only what the charge is at least."""
        return self.basis == "bound"

    @property
    def method(self) -> str:
        """How `charge_e0` was found, in words."""
        return {
            "limit": "limiting slope of ln Po, completed with an average of gating schemes",
            "floor": "gating schemes with a floor of Po, averaged; the slope itself never reaches the charge",
            "bound": "steepest slope of ln Po, a lower bound of the charge",
        }[self.basis]


def limiting_slope(
    voltage_mv: ArrayLike, open_probability: ArrayLike, *, temperature_c: float, sensors: int = 4
) -> LimitingSlope:
    """Total charge coupled to opening, from one cell's open-probability curve.

    Parameters
    ----------
    voltage_mv : array_like, shape (n,)
        Voltages (mV), any order.
    open_probability : array_like, shape (n,)
        Open probabilities, absolute, 0 to 1. A zero lies below what was resolved: it is left out, and said.
    temperature_c : float
        Temperature (degrees Celsius).
    sensors : int
        Number of equal sensors in the two schemes that have them; 4 for four subunits or domains.

    Returns
    -------
    LimitingSlope

    Raises
    ------
    UsageError
        If the arrays differ in length, a value is not finite, a probability lies outside 0..1, fewer than
        four voltages have one above 0, or the probability does not rise with voltage.

    Notes
    -----
    `charge_e0` is the average over schemes when the lowest Po is at most 1e-4, the steepest slope seen is at
    least 70 % of the average, and the average is uncertain by at most 15 %; or, with the uncertainty alone
    as the condition, when Po turns to a floor. Otherwise it is the steepest slope, a lower bound.

    Examples
    --------
    >>> import numpy as np
    >>> v = np.arange(-105.0, -20.0, 5.0)
    >>> found = limiting_slope(v, 1 / (1 + np.exp(-5.0 * (v + 40.0) / 25.4341)), temperature_c=22.0)
    >>> round(found.charge_e0, 1), found.reached_limit
    (5.0, True)
    """
    v, po, zeros = _usable(voltage_mv, open_probability)
    if sensors < 1:
        raise UsageError(f"found {sensors} sensors; a channel has at least 1")
    kt = thermal_voltage_mv(temperature_c)
    rise = _rise(v, po)
    v, log_po = v[rise], np.log(po[rise])
    average = _average(families(Points(v_mv=v, log_po=log_po, kt_mv=kt), sensors))
    run = _steepest(v, log_po, kt)
    floor = _has_floor(v, log_po, run, average, kt)
    basis = _basis(average, run, float(po.min()), floor)
    return LimitingSlope(
        charge_e0=run.slope_e0 if basis == "bound" else average.charge_e0,
        std_uncertainty_e0=run.per_scatter_e0 * average.scatter if basis == "bound" else average.sd_e0,
        basis=basis,
        extrapolated_e0=average.charge_e0,
        extrapolated_std_uncertainty_e0=average.sd_e0,
        steepest_slope_e0=run.slope_e0,
        steepest_low_mv=run.low_mv,
        steepest_high_mv=run.high_mv,
        window_low_mv=float(v[0]),
        window_high_mv=float(v[-1]),
        points=len(v),
        zeros_left_out=zeros,
        lowest_po=float(po.min()),
        scatter=average.scatter,
        warnings=_warnings(basis, average, run, float(po.min()), zeros),
    )


def _usable(voltage_mv: ArrayLike, open_probability: ArrayLike) -> tuple[FloatArray, FloatArray, int]:
    """Points above 0 in the order of voltage, and how many zeros were left out."""
    v = np.asarray(voltage_mv, dtype=np.float64)
    po = np.asarray(open_probability, dtype=np.float64)
    if v.ndim != 1 or v.shape != po.shape:
        raise UsageError(
            f"found voltages of shape {v.shape} and open probabilities of {po.shape}; give one to one"
        )
    if not (np.isfinite(v).all() and np.isfinite(po).all()):
        raise UsageError("found a voltage or an open probability that is not a finite number; leave it out")
    outside = (po < 0.0) | (po > 1.0)
    if outside.any():
        first = int(np.argmax(outside))
        raise UsageError(
            f"found an open probability of {po[first]:g} at {v[first]:g} mV; it must lie within 0 to 1"
        )
    zeros = int((po == 0.0).sum())
    order = np.argsort(v[po > 0.0], kind="stable")
    v, po = v[po > 0.0][order], po[po > 0.0][order]
    levels = len(np.unique(v))
    if levels < MIN_POINTS:
        raise UsageError(
            f"found {levels} voltages with an open probability above 0 ({zeros} zeros left out); "
            f"a limiting slope needs {MIN_POINTS}: record {MIN_POINTS - levels} more where few channels open"
        )
    return v, po, zeros


def _rise(v_mv: FloatArray, po: FloatArray) -> slice:
    """Points up to the first that is practically at the top, four at least."""
    first = int(np.argmax(po >= _TOP * po.max()))
    if first == 0:
        raise UsageError(
            f"the open probability is largest at the most negative voltage ({v_mv[0]:g} mV): it does not "
            "rise; a channel opened by hyperpolarisation needs the sign of its voltages reversed"
        )
    return slice(0, max(first + 1, MIN_POINTS))


class _Run(NamedTuple):
    """Neighbouring points on the steepest stretch."""

    slope_e0: float
    per_scatter_e0: float  # standard uncertainty of the slope per unit scatter of ln Po
    low_mv: float
    high_mv: float


def _steepest(v_mv: FloatArray, log_po: FloatArray, kt_mv: float) -> _Run:
    """Steepest straight line over a run of neighbours that spans enough of Po."""
    span = min(_RUN_DECADES * np.log(10.0), 0.5 * float(np.ptp(log_po)))
    best: _Run | None = None
    for start in range(len(v_mv) - _RUN_POINTS + 1):
        for stop in range(start + _RUN_POINTS, len(v_mv) + 1):
            x, y = v_mv[start:stop] / kt_mv, log_po[start:stop]
            centred = x - x.mean()
            spread = float((centred**2).sum())
            if spread == 0.0 or np.ptp(y) < span:
                continue
            slope = float((centred * y).sum()) / spread
            if best is None or slope > best.slope_e0:
                best = _Run(slope, spread**-0.5, float(v_mv[start]), float(v_mv[stop - 1]))
            break
    if best is None or best.slope_e0 <= 0.0:
        raise UsageError("the open probability does not rise with voltage: no slope can be read")
    return best


class _Fit(NamedTuple):
    """One family at its best."""

    theta: FloatArray
    log_charge: float
    log_charge_variance: float
    sum_of_squares: float  # of the residuals of ln Po
    parameters: float  # that the points, not the prior, decide
    log_evidence: float


def _fit(family: Family, scatter: float, starts: FloatArray) -> _Fit:
    """Most probable parameters from several starts, and the evidence around them."""
    theta, cost = _search(family, scatter, starts)
    best = theta[int(np.argmin(cost))]
    value, by_theta = family.model(best[None])
    residual, jacobian = family.points.log_po - value[0], by_theta[0] / scatter
    data = jacobian.T @ jacobian
    information = data + np.diag(family.precision)
    covariance = np.linalg.inv(information)
    charge = family.charge_gradient(best)
    share = charge / charge.sum()
    volume = 0.5 * (np.log(family.precision).sum() - np.linalg.slogdet(information)[1])
    return _Fit(
        theta=best,
        log_charge=float(np.log(charge.sum())),
        log_charge_variance=float(share @ covariance @ share),
        sum_of_squares=float((residual**2).sum()),
        parameters=float(np.trace(covariance @ data)),
        log_evidence=float(family.log_odds_before - cost.min() + volume),
    )


def _search(family: Family, scatter: float, starts: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Damped least squares from all starts at once; parameters (b, p) and costs (b,)."""
    precision, mean = family.precision, family.mean

    def at(theta: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
        value, by_theta = family.model(theta)
        residual = (family.points.log_po - value) / scatter
        cost = 0.5 * (residual**2).sum(axis=1) + 0.5 * (precision * (theta - mean) ** 2).sum(axis=1)
        jacobian = by_theta / scatter
        downhill = np.einsum("bnp,bn->bp", jacobian, residual) - precision * (theta - mean)
        return cost, downhill, np.einsum("bnp,bnq->bpq", jacobian, jacobian) + np.diag(precision)

    theta, damping = starts.copy(), np.full(len(starts), 1e-2)
    largest = np.where(family.precision < 0.01, 20.0, 0.7)  # a voltage may move 20 mV, a logarithm 0.7
    cost, downhill, information = at(theta)
    for _ in range(_ITERATIONS):
        damped = information + damping[:, None, None] * (information * np.eye(len(mean)))
        step = np.linalg.solve(damped, downhill[..., None])[..., 0]
        tried = theta + np.clip(step, -largest, largest)
        new_cost, new_downhill, new_information = at(tried)
        better = new_cost < cost
        settled = np.abs(cost - new_cost) < 1e-3  # of a log-likelihood: far below what matters
        theta = np.where(better[:, None], tried, theta)
        cost = np.where(better, new_cost, cost)
        downhill = np.where(better[:, None], new_downhill, downhill)
        information = np.where(better[:, None, None], new_information, information)
        damping = np.clip(np.where(better, 0.3, 5.0) * damping, 1e-8, 1e8)
        if (settled | (damping > 1e6)).all():
            break
    return theta, cost


class _Average(NamedTuple):
    """All schemes together."""

    charge_e0: float
    sd_e0: float
    scatter: float


def _average(schemes: list[Family]) -> _Average:
    """Charge averaged over the schemes; the scatter is found along the way, common to all."""
    n = len(schemes[0].points.v_mv)
    scatter = 0.08
    starts = [family.starts() for family in schemes]
    for _ in range(4):
        fits = [_fit(family, scatter, start) for family, start in zip(schemes, starts, strict=True)]
        starts = [np.vstack([family.starts(), fit.theta]) for family, fit in zip(schemes, fits, strict=True)]
        evidence = np.array([fit.log_evidence for fit in fits])
        weight = np.exp(evidence - evidence.max())
        weight /= weight.sum()
        variance = [(fit.sum_of_squares + _NOISE**2) / max(n - fit.parameters + 1.0, 1.0) for fit in fits]
        before, scatter = scatter, max(float(np.sqrt((weight * variance).sum())), 0.003)
        if abs(scatter / before - 1.0) < 0.1:
            break
    log_charge = np.array([fit.log_charge for fit in fits])
    mean = float((weight * log_charge).sum())
    within = np.array([fit.log_charge_variance for fit in fits])
    sd = float(np.sqrt((weight * (within + (log_charge - mean) ** 2)).sum()))
    return _Average(float(np.exp(mean)), float(np.exp(mean)) * sd, scatter)


def _has_floor(v_mv: FloatArray, log_po: FloatArray, run: _Run, average: _Average, kt_mv: float) -> bool:
    """Whether the points below the steepest stretch fall much less than it does."""
    below = v_mv <= run.low_mv
    if below.sum() < _RUN_POINTS:
        return False
    x = v_mv[below] / kt_mv
    centred = x - x.mean()
    spread = float((centred**2).sum())
    if spread == 0.0:
        return False
    slope = float((centred * log_po[below]).sum()) / spread
    doubt = average.scatter * float(np.hypot(spread**-0.5, run.per_scatter_e0))
    return slope < FLOOR_FRACTION * run.slope_e0 and run.slope_e0 - slope > 3.0 * doubt


def _basis(average: _Average, run: _Run, lowest_po: float, floor: bool) -> Basis:
    """What the charge can rest on."""
    certain = average.sd_e0 <= LARGEST_RELATIVE_UNCERTAINTY * average.charge_e0
    near = run.slope_e0 >= (1.0 - LARGEST_SHORTFALL) * average.charge_e0
    if floor:
        return "floor" if certain else "bound"
    return "limit" if certain and near and lowest_po <= LARGEST_REACHED_PO else "bound"


def _warnings(basis: Basis, average: _Average, run: _Run, lowest_po: float, zeros: int) -> tuple[str, ...]:
    """Sentences for the user, the gravest first."""
    said = []
    seen = f"{run.slope_e0:.2f} e0 between {run.low_mv:g} and {run.high_mv:g} mV"
    if basis == "bound":
        said.append(
            f"the open probability has not reached its limiting slope (lowest {lowest_po:.1e}, steepest "
            f"slope {seen}): the charge is a lower bound; record lower open probabilities or measure the "
            "gating charge"
        )
    if basis == "floor":
        said.append(
            f"the open probability levels off below {run.low_mv:g} mV and its steepest slope, {seen}, is "
            "only a lower bound: the charge rests on a scheme that opens without its sensors; if leak or "
            "noise makes the floor, leave its points out"
        )
    if run.slope_e0 > average.charge_e0 + 2.0 * average.sd_e0:
        said.append(
            f"the steepest slope, {seen}, exceeds the {average.charge_e0:.2f} e0 of the schemes: look at the "
            "points there"
        )
    if zeros:
        count = "1 open probability of 0 was" if zeros == 1 else f"{zeros} open probabilities of 0 were"
        said.append(f"{count} below what was resolved and left out")
    return tuple(said)
