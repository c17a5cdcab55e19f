"""How well open probabilities give the total charge, by the lowest probability recorded.

    python tests/bench/limiting_slope.py [cells] [processes]      # 40 cells a scheme, 2 processes by default

Invented schemes; 5 mV steps at a random offset, from the lowest Po to 95 % of the largest; Po scatters by
10 % below 1e-3 and by 5 % above it, less near the top. Prints Markdown tables; asserts nothing.
"""

from __future__ import annotations

import sys
from concurrent.futures import ProcessPoolExecutor
from typing import NamedTuple

import numpy as np

from cornerwise.gating import (
    AllostericOpening,
    ConcertedOpening,
    GatingScheme,
    LinearSequence,
    example_schemes,
)
from cornerwise.limiting_slope import LimitingSlope, limiting_slope

TEMPERATURE_C = 22.0
LOWEST = (1e-2, 1e-3, 1e-4, 1e-5, 1e-6, 1e-7)
GROUP = 5  # cells of one construct


def sequence(charges: tuple[float, ...], midpoints: tuple[float, ...]) -> GatingScheme:
    return LinearSequence(charges_e0=charges, midpoints_mv=midpoints)


def concerted(sensor: float, sensor_mv: float, opening: float, opening_mv: float) -> GatingScheme:
    return ConcertedOpening(
        sensor_charge_e0=sensor,
        sensor_midpoint_mv=sensor_mv,
        opening_charge_e0=opening,
        opening_midpoint_mv=opening_mv,
    )


def allosteric(sensor: float, sensor_mv: float, opening: float, energy: float, d: float) -> GatingScheme:
    return AllostericOpening(
        sensor_charge_e0=sensor,
        sensor_midpoint_mv=sensor_mv,
        opening_charge_e0=opening,
        opening_energy_mev=energy,
        sensor_coupling_mev=d,
    )


SCHEMES: dict[str, GatingScheme] = {
    **example_schemes(),
    "sequence of 2, 4.5 e0": sequence((2.0, 2.5), (-40.0, -20.0)),
    "sequence of 3, 13 e0": sequence((4.0, 6.0, 3.0), (-75.0, -50.0, -35.0)),
    "sequence of 4, 13.2 e0": sequence((3.3,) * 4, (-65.0, -55.0, -50.0, -40.0)),
    "sequence of 5, 14 e0": sequence((2.5, 2.5, 2.5, 2.5, 4.0), (-70.0, -60.0, -60.0, -50.0, -45.0)),
    "sequence of 6, 12.6 e0": sequence((2.0,) * 5 + (2.6,), (-60.0, -60.0, -55.0, -50.0, -45.0, -40.0)),
    "the same, easy end": sequence((2.0,) * 5 + (2.6,), (-40.0, -45.0, -50.0, -55.0, -60.0, -60.0)),
    "concerted, easy opening, 12.4 e0": concerted(2.6, -45.0, 2.0, -70.0),
    "concerted, late opening, 13.6 e0": concerted(3.0, -50.0, 1.6, -20.0),
    "concerted, later opening, 12.8 e0": concerted(2.9, -55.0, 1.2, 10.0),
    "allosteric, no floor in sight, 13 e0": allosteric(3.0, -40.0, 1.0, 500.0, 140.0),
    "allosteric, 12.6 e0": allosteric(2.9, -40.0, 1.0, 240.0, 80.0),
    "allosteric, low floor, 8.6 e0": allosteric(2.0, -20.0, 0.6, 300.0, 95.0),
    "allosteric, small sensors, 2.7 e0": allosteric(0.6, 80.0, 0.3, 230.0, 65.0),
}


class Cell(NamedTuple):
    scheme: str
    lowest: float
    noisy: bool
    found: LimitingSlope | None

    @property
    def truth(self) -> float:
        return SCHEMES[self.scheme].total_charge_e0


def record(name: str, lowest: float, cell: int) -> Cell:
    """One simulated cell; cell 0 is noiseless and starts on a multiple of 5 mV."""
    scheme = SCHEMES[name]
    rng = np.random.default_rng([cell, list(SCHEMES).index(name), LOWEST.index(lowest)])
    v = np.arange(-160.0, 160.0, 5.0) + (rng.uniform(0.0, 5.0) if cell else 0.0)
    po = scheme.open_probability(v)
    kept = slice(int(np.argmax(po >= lowest)), int(np.argmax(po >= 0.95 * po.max())) + 1)
    v, po = v[kept], po[kept]
    if cell:
        scatter = 0.01 + np.where(po < 1e-3, 0.10, 0.05) * np.minimum(1.0, 2.0 * (1.0 - po))
        po = np.minimum(po * np.exp(scatter * rng.standard_normal(len(po))), 0.999)
    found = limiting_slope(v, po, temperature_c=TEMPERATURE_C) if len(v) >= 4 else None
    return Cell(name, lowest, cell > 0, found)


def job(task: tuple[str, float, int]) -> Cell:
    return record(*task)


def percent(cells: list[Cell], what: str = "charge_e0") -> np.ndarray:
    return np.array([100.0 * (getattr(c.found, what) / c.truth - 1.0) for c in cells if c.found])


def rms(values: np.ndarray) -> float:
    return float(np.sqrt((values**2).mean()))


def covered(cells: list[Cell]) -> float:
    """Share of cells whose extrapolated charge lies within 1.96 of its standard uncertainties."""
    hits = [
        abs(c.found.extrapolated_e0 - c.truth) < 1.96 * c.found.extrapolated_std_uncertainty_e0
        for c in cells
        if c.found
    ]
    return 100.0 * float(np.mean(hits))


def by_lowest(cells: list[Cell]) -> None:
    print("\n## All schemes, by the lowest open probability (% of the true charge)\n")
    print(
        "| lowest Po | basis | cells | charge: bias | RMSE | over by > 5 % | "
        "extrapolated: bias | RMSE | covered |"
    )
    print("|---|---|---:|---:|---:|---:|---:|---:|---:|")
    for lowest in LOWEST:
        every = [c for c in cells if c.lowest == lowest and c.noisy and c.found]
        for basis in ("limit", "floor", "bound"):
            some = [c for c in every if c.found and c.found.basis == basis]
            if some:
                e, x = percent(some), percent(some, "extrapolated_e0")
                print(
                    f"| {lowest:.0e} | {basis} | {len(some)}/{len(every)} | {e.mean():+.1f} | {rms(e):.1f} | "
                    f"{100 * (e > 5).mean():.0f} % | {x.mean():+.1f} | {rms(x):.1f} | {covered(some):.0f} % |"
                )


def by_scheme(cells: list[Cell], lowest: float) -> None:
    print(f"\n## Each scheme, lowest open probability {lowest:.0e} (% of the true charge)\n")
    print(
        "| scheme | e0 | noiseless | basis | noisy: steepest slope | extrapolated: bias | RMSE of a cell | "
        f"RMSE of the mean of {GROUP} | stated uncertainty | covered | limit/floor/bound |"
    )
    print("|---|---:|---:|---|---:|---:|---:|---:|---:|---:|---|")
    for name, scheme in SCHEMES.items():
        some = [c for c in cells if c.scheme == name and c.lowest == lowest and c.found]
        clean, noisy = [c for c in some if not c.noisy], [c for c in some if c.noisy]
        x = percent(noisy, "extrapolated_e0")
        means = x[: len(x) // GROUP * GROUP].reshape(-1, GROUP).mean(axis=1)
        stated = np.mean([100 * c.found.extrapolated_std_uncertainty_e0 / c.truth for c in noisy if c.found])
        count = [
            sum(c.found is not None and c.found.basis == b for c in noisy)
            for b in ("limit", "floor", "bound")
        ]
        first = clean[0].found
        print(
            f"| {name} | {scheme.total_charge_e0:.1f} | {percent(clean, 'extrapolated_e0')[0]:+.1f} | "
            f"{first.basis if first else ''} | {percent(noisy, 'steepest_slope_e0').mean():+.1f} | "
            f"{x.mean():+.1f} | {rms(x):.1f} | {rms(means):.1f} | {stated:.1f} | {covered(noisy):.0f} % | "
            f"{'/'.join(map(str, count))} |"
        )


def main() -> None:
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 40
    processes = int(sys.argv[2]) if len(sys.argv) > 2 else 2
    tasks = [(name, lowest, cell) for name in SCHEMES for lowest in LOWEST for cell in range(count + 1)]
    with ProcessPoolExecutor(processes) as pool:
        cells = list(pool.map(job, tasks, chunksize=20))
    print(f"{count} noisy cells a scheme and lowest Po.")
    by_lowest(cells)
    for lowest in (1e-6, 1e-5):
        by_scheme(cells, lowest)


if __name__ == "__main__":
    main()
