"""How often each charge and shortcut verdict is given, by simulation through the package's own functions.

    python tests/bench/charge_verdicts.py [cycles]      # 2000 cycles a case by default

A wild type at 13 e0 and three mutants; charge and median voltages come from different cells; the charge of
a cell scatters by 4, 8 or 12 %, a median by 1.5 mV. Prints Markdown tables; asserts nothing.
"""

from __future__ import annotations

import sys
from collections import Counter
from collections.abc import Sequence
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1]))

from builders import cells, measurement

from cornerwise.campaign import Settings
from cornerwise.charge_judgement import family_verdicts, judge_charge
from cornerwise.energies import EnergyBook
from cornerwise.gating import LinearSequence
from cornerwise.interactions import interact
from cornerwise.measurements import Measurement
from cornerwise.mutations import find_cycles
from cornerwise.units import energy_per_e0_mv
from cornerwise.verdicts import shortcut_verdict

LABELS = ("WT", "E5A", "R9Q", "E5A/R9Q")
FAR, NEAR = (-40.0, -33.0, -47.0, -36.0), (-10.0, -3.0, -17.0, -6.0)  # mV, far from 0 and near it
WILD_TYPE_CHARGE = 13.0
SETTINGS = Settings(wild_type="WT", replicates=1000)
CASES = {
    "all equal, Vm near -40 mV": (FAR, (1.0, 1.0, 1.0)),
    "all equal, Vm near -10 mV": (NEAR, (1.0, 1.0, 1.0)),
    "double at +10 %, Vm near -10 mV": (NEAR, (1.0, 1.0, 1.1)),
    "double at -10 %, Vm near -10 mV": (NEAR, (1.0, 1.0, 0.9)),
    "single and double lose 30 %, Vm near -40 mV": (FAR, (1.0, 0.7, 0.7)),
}


def _campaign(
    rng: np.random.Generator, n: int, scatter: float, vm: Sequence[float], ratios: Sequence[float]
) -> list[Measurement]:
    measured = []
    for label, median, ratio in zip(LABELS, vm, (1.0, *ratios), strict=True):
        charge = WILD_TYPE_CHARGE * ratio * (1 + scatter * rng.standard_normal(n))
        medians = median + 1.5 * rng.standard_normal(n)
        measured.append(measurement(label, cells(medians), cells(charge, "n")))
    return measured


def _verdicts(measured: list[Measurement]) -> tuple[list[str], str]:
    book = EnergyBook(measured, SETTINGS)
    by_label = {one.label: one for one in measured}
    judged = [judge_charge(label, by_label, book, SETTINGS) for label in LABELS[1:]]
    (cycle,) = find_cycles({frozenset(m.construct.mutations): m.label for m in measured})
    bias = interact(cycle, book, "WT").shortcut_bias
    assert bias is not None
    limits = bias.interval(book.ledger, SETTINGS.confidence)
    family = family_verdicts(judged, SETTINGS.confidence)
    return [one.verdict for one in judged], shortcut_verdict(family, limits, SETTINGS.energy_tolerance)


def verdict_table(cycles: int) -> None:
    """Percentages of every verdict by case, number of cells and scatter."""
    print(
        "| charges | cells | scatter | charge of the double: equal / changed / unresolved (%) "
        "| shortcut: valid / invalid / unresolved (%) |\n|---|---|---|---|---|"
    )
    for number, (case, (vm, ratios)) in enumerate(CASES.items()):
        for n in (3, 5, 8, 12):
            for scatter in (0.04, 0.08, 0.12):
                rng = np.random.default_rng([number, n, round(100 * scatter)])
                charges: Counter[str] = Counter()
                shortcuts: Counter[str] = Counter()
                for _ in range(cycles):
                    corners, shortcut = _verdicts(_campaign(rng, n, scatter, vm, ratios))
                    charges.update([corners[-1]])  # the double, which carries the case
                    shortcuts.update([shortcut])
                left = _shares(charges, ("equal", "changed", "unresolved"))
                right = _shares(shortcuts, ("valid", "invalid", "unresolved"))
                print(f"| {case} | {n} | {scatter:.0%} | {left} | {right} |", flush=True)


def _shares(counted: Counter[str], words: Sequence[str]) -> str:
    return " / ".join(f"{100 * counted[word] / counted.total():.1f}" for word in words)


def _three_states(charge: float, energy_kcal: float) -> LinearSequence:
    """Three states; two steps share charge and energy unequally."""
    median = energy_kcal / charge / energy_per_e0_mv("kcal/mol", 22.0)
    return LinearSequence(
        charges_e0=(0.4 * charge, 0.6 * charge),
        midpoints_mv=(median - 18.0, median + 12.0),
        temperature_c=22.0,
    )


def lost_charge_table(cycles: int) -> None:
    """Coverage of the full energy and of the bias when a mutant of a three-state scheme loses 30 %."""
    per = energy_per_e0_mv("kcal/mol", 22.0)
    charges = (13.0, 13.0, 9.1, 9.1)
    energies = (-12.0, -10.0, -9.0, -5.5)
    schemes = [_three_states(q, e) for q, e in zip(charges, energies, strict=True)]
    truth = energies[0] - energies[1] - energies[2] + energies[3]
    medians = [scheme.median_mv for scheme in schemes]
    shortcut = per * 13.0 * (medians[0] - medians[1] - medians[2] + medians[3])
    print(f"\ntrue interaction {truth:.3f}, shortcut with true medians {shortcut:.3f} kcal/mol\n")
    print("| cells | full energy covers (%) | bias covers (%) | shortcut invalid (%) |\n|---|---|---|---|")
    for n in (3, 5, 8, 12):
        rng = np.random.default_rng(n)
        covered = biased = invalid = 0
        for _ in range(cycles):
            measured = [
                measurement(
                    label,
                    cells(m + 1.5 * rng.standard_normal(n)),
                    cells(q * (1 + 0.05 * rng.standard_normal(n)), "n"),
                )
                for label, m, q in zip(LABELS, medians, charges, strict=True)
            ]
            book = EnergyBook(measured, SETTINGS)
            (cycle,) = find_cycles({frozenset(m.construct.mutations): m.label for m in measured})
            found = interact(cycle, book, "WT")
            assert found.shortcut_bias is not None
            covered += not found.energy.interval(book.ledger, 0.95).excludes(truth)
            biased += not found.shortcut_bias.interval(book.ledger, 0.95).excludes(truth - shortcut)
            invalid += _verdicts(measured)[1] == "invalid"
        rates = " | ".join(f"{100 * count / cycles:.1f}" for count in (covered, biased, invalid))
        print(f"| {n} | {rates} |", flush=True)


if __name__ == "__main__":
    count = int(sys.argv[1]) if len(sys.argv) > 1 else 2000
    verdict_table(count)
    lost_charge_table(count)
