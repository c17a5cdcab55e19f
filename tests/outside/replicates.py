"""Joint replicates: Monte Carlo after JCGM 101 and the bootstrap."""

import functools
import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from outside.known import Known, apart, one, sample
from outside.record import Check
from reference_values import load

from cornerwise import intervals
from cornerwise.ledger import Ledger
from cornerwise.sources import Component, Part, Source, Spread, StatedSource, Stream, linear

JCGM, BOOT = load("jcgm101"), load("bootstrap")
MOUSE = BOOT["mouse"]


@dataclass(frozen=True)
class Rectangular:
    """An input known to lie between two limits, as JCGM 101 has it; the package itself has no such source."""

    name: str
    component: Component
    std_uncertainty: float

    @property
    def components(self) -> tuple[Component, ...]:
        return (self.component,)

    def parts(self, gradient: Sequence[float]) -> tuple[Part, ...]:
        return (Part(self.name, Spread((gradient[0] * self.std_uncertainty) ** 2, math.inf)),)

    def shift(self, gradient: Sequence[float]) -> float:
        return 0.0

    def draws(self, rng: np.random.Generator, replicates: int) -> np.ndarray:
        half = math.sqrt(3) * self.std_uncertainty
        return rng.uniform(-half, half, replicates)[np.newaxis]

    def deviations_drawn(self, gradient: Sequence[float], stream: Stream, replicates: int) -> np.ndarray:
        return gradient[0] * self.draws(stream(self.component), replicates)[0]

    def footprint(self, gradient: Sequence[float]) -> dict[Component, np.ndarray]:
        return {self.component: np.array([gradient[0] * self.std_uncertainty])}

    conservative_draws = draws


@functools.cache
def _four_inputs(case: str) -> tuple[Known, float]:
    """Sum of four inputs, and half the width of its central 95 % by Monte Carlo."""
    uncertainties = JCGM[case]["std_uncertainties"]
    parts = [Component("median", str(i)) for i in range(4)]
    made: list[Source] = [
        StatedSource(name=part.construct, component=part, mean=0.0, std_uncertainty=u)
        if case.startswith("normal")
        else Rectangular(part.construct, part, u)
        for part, u in zip(parts, uncertainties, strict=True)
    ]
    ledger = Ledger(made, seed=1, replicates=400_000, conservative=True)
    low, high = np.quantile(np.sum([ledger.draws(part) for part in parts], axis=0), [0.025, 0.975])
    total = linear([(1.0, one(part, 0.0)) for part in parts])
    return Known(total, ledger), float(high - low) / 2


def _percentiles() -> tuple[float, float]:
    x = np.array(BOOT["x"])
    rng = np.random.default_rng(20)
    draws = np.mean(x[rng.integers(0, len(x), size=(400_000, len(x)))], axis=1)
    return tuple(intervals.expanded_percentile_interval(float(x.mean()), draws, math.inf, 0.95))


def _mouse() -> tuple[float, ...]:
    treatment, control = sample(MOUSE["treatment"]), sample(MOUSE["control"])
    return treatment.sem, control.sem, apart(treatment, control).u


_ANY_STREAM = "shown to the digits that any stream of random numbers gives"
_MONTE_CARLO = f"sampling error of 400,000 draws, {_ANY_STREAM}"
_OF_FOUR = {
    "normal_9_2_2": "sum of four normal inputs",
    "rectangular_9_2_3": "sum of four equal rectangular inputs",
    "rectangular_9_2_4": "sum of four rectangular inputs, one ten times as wide",
}

CHECKS = [
    Check(
        what="percentiles of a mean of 16 numbers, 95 %",
        source="R boot",
        expected=tuple(BOOT["percentile"]),
        obtained=_percentiles,
        within=BOOT["tolerance"],
        relative=True,
        form=".0f",
        why=f"{BOOT['tolerance_reason']}, {_ANY_STREAM}. With infinitely many degrees of "
        "freedom no level is widened",
    ),
    Check(
        what="standard errors of two means, 7 and 9 mice, and of their difference",
        source="Efron & Tibshirani 1993",
        expected=tuple(MOUSE["se_printed"]),
        obtained=_mouse,
        within=0.005,
        form=".3f",
        why="two decimals recalled; retellings with 51 for 50 and 30 for 31 in the control give 14.16",
        standing="memory",
    ),
    *(
        Check(
            what=f"{words}: half of the 95 % interval by propagation",
            source="JCGM 101 9.2",
            expected=JCGM[case]["propagated95_printed"],
            obtained=lambda case=case: _four_inputs(case)[0].interval(0.95).high,
            within=0.05 if case == "rectangular_9_2_4" else 0.005,
            form=".5g",
            why="three digits recalled",
            standing="memory",
        )
        for case, words in _OF_FOUR.items()
    ),
    *(
        Check(
            what=f"{words}: half of the 95 % interval by Monte Carlo",
            source="JCGM 101 9.2",
            expected=JCGM[case]["monte_carlo95"],
            obtained=lambda case=case: _four_inputs(case)[1],
            within=0.005,
            relative=True,
            form=".2g",
            printed=f"{JCGM[case]['monte_carlo95_printed']:.3g}",
            why=f"{_MONTE_CARLO}; what is compared is the exact {JCGM[case]['monte_carlo95']:.7g}",
            standing="memory",
        )
        for case, words in _OF_FOUR.items()
    ),
]
