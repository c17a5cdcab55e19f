"""Accuracy of the median voltage by five estimators on invented gating schemes, printed as Markdown.

Run it with ``python tests/bench/median_accuracy.py > docs/median_accuracy.md``; it takes under two minutes.
Errors are those of measurement: the mean over a construct's cells of estimate less the cell's true median.
The oracle is told the scheme's exact curve and fits gain, offset and shift to each cell.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from scipy.optimize import curve_fit, isotonic_regression
from scipy.stats import t as student

from cornerwise.campaign import Curve
from cornerwise.gating import GatingScheme, example_schemes
from cornerwise.median import CellReading, read_construct
from cornerwise.median.plateaus import plain_median_mv

SHIFT_SD_MV = 2.0
LOWEST_MV, HIGHEST_MV = -170.0, 130.0


@dataclass(frozen=True, kw_only=True, slots=True)
class Setting:
    """How one batch of constructs is recorded."""

    step_mv: float = 10.0
    noise: float = 0.01
    cells: int = 8
    cut: str = ""  # "", "low 93", "high 93", "low 89" or "high 89"

    @property
    def name(self) -> str:
        cut = f", {self.cut.split()[0]} end cut at {self.cut.split()[1]} %" if self.cut else ""
        return f"{self.step_mv:g} mV, {self.noise:.1%} noise, {self.cells} cell{'s' * (self.cells > 1)}{cut}"

    def voltages(self, scheme: GatingScheme) -> np.ndarray:
        v = np.arange(LOWEST_MV, HIGHEST_MV + 1.0, self.step_mv)
        if not self.cut:
            return v
        end, percent = self.cut.split()
        level, q = float(percent) / 100.0, scheme.q(v)
        if end == "high":
            return v[: int(np.argmin(np.abs(q - level))) + 1]
        return v[int(np.argmin(np.abs(q - (1.0 - level)))) :]


def construct(scheme: GatingScheme, setting: Setting, seed: int) -> tuple[list[Curve], np.ndarray]:
    """One construct with its own gains, offsets and shifts, and the cells' true medians."""
    rng = np.random.default_rng([seed, int(1e4 * setting.noise), setting.cells])
    v = setting.voltages(scheme)
    shift = rng.normal(0.0, SHIFT_SD_MV, setting.cells)
    curves = []
    for i, moved in enumerate(shift):
        q = scheme.q(v - moved) + rng.normal(0.0, setting.noise, len(v))
        charge = rng.normal(0.0, 0.3) + rng.uniform(0.5, 2.0) * q
        curves.append(Curve(construct="invented", cell=f"c{i:02d}", voltage_mv=v, charge=charge))
    return curves, scheme.median_mv + shift


def pooled(curves: list[Curve], _: GatingScheme) -> np.ndarray:
    return np.array([reading.median_mv for reading in read_construct(curves)])


def plain(curves: list[Curve], _: GatingScheme) -> np.ndarray:
    return np.array([plain_median_mv(curve.voltage_mv, curve.charge) for curve in curves])


def isotonic(curves: list[Curve], _: GatingScheme) -> np.ndarray:
    """Area under the nearest rising curve, its first and last value taken for the plateaus."""
    found = []
    for curve in curves:
        rising = isotonic_regression(curve.charge).x
        scaled = (rising - rising[0]) / (rising[-1] - rising[0])
        found.append(curve.voltage_mv[-1] - np.trapezoid(scaled, curve.voltage_mv))
    return np.array(found)


def sigmoid(v: np.ndarray, low: float, height: float, midpoint: float, width: float) -> np.ndarray:
    return low + height / (1.0 + np.exp(-np.clip((v - midpoint) / width, -300.0, 300.0)))


def single(curves: list[Curve], _: GatingScheme) -> np.ndarray:
    found = []
    for curve in curves:
        q = curve.charge
        middle = curve.voltage_mv[np.argmin(np.abs(q - 0.5 * (q[0] + q[-1])))]
        start = [q[0], q[-1] - q[0], middle, 10.0]
        found.append(curve_fit(sigmoid, curve.voltage_mv, q, p0=start, maxfev=20_000)[0][2])
    return np.array(found)


def oracle(curves: list[Curve], scheme: GatingScheme) -> np.ndarray:
    found = []
    for curve in curves:
        v, shift = curve.voltage_mv, 0.0
        for _ in range(12):
            q = scheme.q(v - shift)
            slope = (scheme.q(v - shift + 0.01) - scheme.q(v - shift - 0.01)) / 0.02
            solution = np.linalg.lstsq(
                np.stack([np.ones_like(v), q, -slope], axis=1), curve.charge, rcond=None
            )[0]
            shift += float(np.clip(solution[2] / solution[1], -10.0, 10.0))
        found.append(scheme.median_mv + shift)
    return np.array(found)


ESTIMATORS: dict[str, Callable[[list[Curve], GatingScheme], np.ndarray]] = {
    "ours": pooled,
    "plain area": plain,
    "isotonic area": isotonic,
    "single sigmoid": single,
    "oracle": oracle,
}


def errors(scheme: GatingScheme, setting: Setting, trials: int) -> dict[str, np.ndarray]:
    """Error of every cell by every estimator, (trials, cells)."""
    made = [construct(scheme, setting, seed) for seed in range(trials)]
    return {name: np.array([f(c, scheme) - truth for c, truth in made]) for name, f in ESTIMATORS.items()}


def rms(x: np.ndarray) -> float:
    return float(np.sqrt(np.mean(np.square(x))))


def main_table(setting: Setting, trials: int) -> None:
    print(f"\n## {setting.name}, {trials} constructs per scheme: error of the construct's mean (mV)\n")
    print(
        "| scheme |"
        + "".join(f" {name}: bias | RMSE |" for name in ESTIMATORS)
        + " ours/plain | ours per cell |"
    )
    print("|---|" + "---:|" * (2 * len(ESTIMATORS) + 2))
    for name, scheme in example_schemes().items():
        found = errors(scheme, setting, trials)
        means = {key: value.mean(axis=1) for key, value in found.items()}
        row = "".join(f" {m.mean():+.2f} | {rms(m):.2f} |" for m in means.values())
        ratio = rms(means["ours"]) / rms(means["plain area"])
        print(f"| {name} |{row} {ratio:.2f} | {rms(found['ours']):.2f} |")


def worst_table(settings: list[Setting], trials: int) -> None:
    print(f"\n## Other recordings, {trials} constructs per scheme: worst scheme's RMSE of the mean (mV)\n")
    print("Cells that would be refused are counted here like the others.\n")
    print("| recording | ours: largest bias |" + "".join(f" {name} |" for name in ESTIMATORS))
    print("|---|" + "---:|" * (len(ESTIMATORS) + 1))
    for setting in settings:
        found = [errors(scheme, setting, trials) for scheme in example_schemes().values()]
        bias = max((float(f["ours"].mean()) for f in found), key=abs)
        worst = "".join(f" {max(rms(f[name].mean(axis=1)) for f in found):.2f} |" for name in ESTIMATORS)
        print(f"| {setting.name} | {bias:+.2f} |{worst}")


def half_width(used: list[CellReading]) -> float:
    medians = np.array([reading.median_mv for reading in used])
    own = medians.var(ddof=1) / len(medians)
    variance = own + used[0].truncation_mv ** 2
    dof = variance**2 / (own**2 / (len(medians) - 1))
    return float(student.ppf(0.975, dof) * np.sqrt(variance))


def coverage_table(cuts: list[str], trials: int) -> None:
    setting = Setting()
    print(f"\n## Cut curves, {setting.name}, {trials} constructs per scheme\n")
    print("Covered: share of the constructs not refused whose 95 % interval holds the truth.\n")
    print("| scheme | end | charge at the end | refused | covered or refused | RMSE (mV) | half-width (mV) |")
    print("|---|---|---:|---:|---:|---:|---:|")
    for name, scheme in example_schemes().items():
        for cut in cuts:
            print(f"| {name} | {cut} % | {cut_row(scheme, Setting(cut=cut), trials)}")


def cut_row(scheme: GatingScheme, setting: Setting, trials: int) -> str:
    refused, honest, widths, off = 0, 0, [], []
    for seed in range(trials):
        curves, truth = construct(scheme, setting, seed)
        used = [reading for reading in read_construct(curves) if reading.used]
        if len(used) < 2:
            refused += 1
            continue
        by_name = {curve.cell: true for curve, true in zip(curves, truth, strict=True)}
        mean = float(np.mean([reading.median_mv for reading in used]))
        off.append(mean - float(np.mean([by_name[reading.cell] for reading in used])))
        widths.append(half_width(used))
        honest += abs(mean - scheme.median_mv) <= widths[-1]
    q = scheme.q(setting.voltages(scheme)[[0, -1]])
    reached = q[1] if setting.cut.startswith("high") else 1.0 - q[0]
    numbers = f"{rms(np.array(off)):.1f} | {np.median(widths):.1f} |" if off else "- | - |"
    return f"{reached:.1%} | {refused / trials:.0%} | {(honest + refused) / trials:.0%} | {numbers}"


def main() -> None:
    print("# Accuracy of the median voltage\n")
    print("Printed by `tests/bench/median_accuracy.py` from invented gating schemes and noise.")
    main_table(Setting(), 50)
    worst_table(
        [
            *(Setting(step_mv=step) for step in (5.0, 20.0)),
            *(Setting(noise=noise) for noise in (0.005, 0.03)),
            *(Setting(cells=cells) for cells in (1, 3, 6, 12)),
            *(Setting(cut=cut) for cut in ("low 93", "high 93")),
        ],
        10,
    )
    coverage_table(["low 93", "high 93", "low 89", "high 89"], 14)


if __name__ == "__main__":
    main()
