"""Make the curves and charges of the `orvane` campaign from a stated truth.

Orvane, its residues and every number here are invented; no real protein stands behind them. The truth is
stated below as free energies and total charges, curves are drawn from a four-step gating scheme that has
exactly that energy and charge, and each construct is then recorded as a laboratory might: a few cells on
two days, noise, and now and then something that goes wrong.

    python cycles/make_orvane.py             # writes curves.csv and charges.csv into cycles/orvane
    python cycles/make_orvane.py OTHER_DIR   # writes them elsewhere
"""

from __future__ import annotations

import csv
import sys
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from cornerwise.gating import LinearSequence
from cornerwise.streams import named_stream
from cornerwise.units import energy_per_e0_mv

TEMPERATURE_C = 21.0
SEED = 20_260_901

# The truth. Energies in kcal/mol per channel at 0 mV, charges in e0 per channel.
WILD_TYPE = "WT"
WILD_TYPE_ENERGY, WILD_TYPE_CHARGE = -9.0, 13.0
SINGLES = {  # energy added to the wild type's, total charge
    "D171N": (2.4, 13.0),
    "K232Q": (1.5, 13.0),
    "E197Q": (-1.2, 13.0),
    "E154Q": (1.8, 12.8),
    "R223Q": (2.6, 9.6),
    "R226Q": (3.2, 9.2),
    "F188A": (-2.0, 13.1),
    "Y241A": (-1.6, 13.0),
    "S205A": (0.4, 13.0),
    "N250A": (0.8, 12.7),
    "R229K": (7.0, 12.9),
}
PAIRS = {  # interaction energy, total charge of the double mutant
    "D171N/K232Q": (3.1, 13.0),  # a salt bridge that favours the resting state
    "E197Q/K232Q": (0.0, 13.0),  # opposite charges that do not hold on to each other
    "E154Q/R226Q": (2.5, 9.0),  # a salt bridge to a sensor charge: total charge drops
    "E154Q/R223Q": (0.0, 11.6),  # the charge of the double does not add up
    "F188A/Y241A": (-1.2, 13.1),  # an aromatic pair that favours the activated state
    "S205A/N250A": (0.3, 12.7),  # three cells over a range that begins too late: nothing can be said
    "E197Q/R229K": (-2.2, 12.9),  # recorded over a range that ends too early
    "F188A/K232Q": (0.2, 13.1),  # total charge of the double never measured
    "Y241A/N250A": (0.5, 12.7),  # a leak slopes the plateaus of the double
    "D171N/F188A": (0.0, 13.1),
}
TRIPLES = {  # third-order interaction energy, total charge
    "D171N/F188A/K232Q": (0.0, 13.1),
}

# The shape: four steps share the charge; their midpoints lie around the median without moving it.
STEP_SHARES = np.array([0.25, 0.30, 0.25, 0.20])
STEP_OFFSETS_MV = np.array([-14.0, -3.0, 6.0, 14.5])
BIPHASIC_OFFSETS_MV = np.array([-34.0, -24.0, 14.0, 52.0])


@dataclass(frozen=True, kw_only=True)
class Recording:
    """How one construct was recorded."""

    cells: int = 8
    charge_cells: int = 8
    paired: bool = False  # charge and curve from the same cells
    first_mv: float = -140.0
    last_mv: float = 80.0
    step_mv: float = 10.0
    noise: float = 0.01  # standard deviation of a point, fraction of the whole charge
    cell_sd_mv: float = 1.4  # between cells
    charge_sd: float = 0.025  # between cells, fraction
    leak_per_mv: float = 0.0  # slope left on both plateaus, fraction of the whole charge
    biphasic: bool = False
    days: tuple[str, ...] = ("day 1", "day 2")
    holding_mv: float = -100.0
    strays_mv: float = 0.0  # how far the last cell lies from the others


RECORDINGS = {
    WILD_TYPE: Recording(cells=12, charge_cells=12),
    "D171N": Recording(cells=10, charge_cells=10, paired=True),
    "K232Q": Recording(cells=12, charge_cells=12, paired=True),
    "E197Q": Recording(cells=12, charge_cells=12),
    "E154Q": Recording(cells=8, charge_cells=9),
    "R229K": Recording(cells=6, charge_cells=6),
    "Y241A": Recording(biphasic=True, noise=0.008),
    "S205A": Recording(cells=5, charge_cells=3, noise=0.04),
    "N250A": Recording(holding_mv=-80.0, days=("day 2",)),
    "D171N/K232Q": Recording(cells=10, charge_cells=10, paired=True),
    "E197Q/K232Q": Recording(cells=12, charge_cells=12),
    "E154Q/R223Q": Recording(strays_mv=12.0),
    "S205A/N250A": Recording(cells=3, charge_cells=3, first_mv=-60.0),
    "E197Q/R229K": Recording(cells=6, charge_cells=6, last_mv=10.0),
    "F188A/K232Q": Recording(charge_cells=0),
    "Y241A/N250A": Recording(leak_per_mv=0.0005),
    "D171N/F188A": Recording(step_mv=20.0),
}


def truths() -> dict[str, tuple[float, float]]:
    """Activation energy (kcal/mol) and total charge (e0) of every construct, the wild type first."""
    energies = {"": WILD_TYPE_ENERGY}
    charges = {"": WILD_TYPE_CHARGE}
    for label, (added, charge) in SINGLES.items():
        energies[label], charges[label] = WILD_TYPE_ENERGY + added, charge
    for label, (interaction, charge) in PAIRS.items():
        a, b = label.split("/")
        energies[label] = energies[a] + energies[b] - energies[""] + interaction
        charges[label] = charge
    for label, (interaction, charge) in TRIPLES.items():
        a, b, c = label.split("/")
        pairs = energies[f"{a}/{b}"] + energies[f"{a}/{c}"] + energies[f"{b}/{c}"]
        singles = energies[a] + energies[b] + energies[c]
        energies[label] = interaction + pairs - singles + energies[""]
        charges[label] = charge
    return {label or WILD_TYPE: (energies[label], charges[label]) for label in energies}


def scheme(energy: float, charge: float, *, biphasic: bool) -> LinearSequence:
    """Gating scheme with exactly this activation energy (kcal/mol) and total charge (e0)."""
    median_mv = energy / charge / energy_per_e0_mv("kcal/mol", TEMPERATURE_C)
    offsets = BIPHASIC_OFFSETS_MV if biphasic else STEP_OFFSETS_MV
    offsets = offsets - np.sum(STEP_SHARES * offsets)
    return LinearSequence(
        charges_e0=tuple(map(float, charge * STEP_SHARES)),
        midpoints_mv=tuple(map(float, median_mv + offsets)),
        temperature_c=TEMPERATURE_C,
    )


def curve_rows(label: str, energy: float, charge: float) -> list[list[object]]:
    """Points of every cell of one construct."""
    how = RECORDINGS.get(label, Recording())
    truth = scheme(energy, charge, biphasic=how.biphasic)
    voltages = np.arange(how.first_mv, how.last_mv + how.step_mv / 2, how.step_mv)
    rng = named_stream(SEED, f"curves {label}")
    rows: list[list[object]] = []
    for number in range(how.cells):
        shift = rng.normal(0.0, how.cell_sd_mv)
        shift += how.strays_mv if number == how.cells - 1 else 0.0
        whole_pc = rng.uniform(0.6, 2.4)
        q = truth.q(voltages - shift) + how.leak_per_mv * voltages
        q = q + how.noise * rng.standard_normal(len(voltages)) + rng.normal(0.0, 0.02)
        batch = how.days[number % len(how.days)]
        cell = f"c{number + 1:02d}"
        rows += [
            [label, cell, batch, f"{v:g}", f"{whole_pc * y:.4f}", f"{how.holding_mv:g}"]
            for v, y in zip(voltages, q, strict=True)
        ]
    return rows


def charge_rows(label: str, charge: float) -> list[list[object]]:
    """Total charge per channel of every cell of one construct in which it was measured."""
    how = RECORDINGS.get(label, Recording())
    rng = named_stream(SEED, f"charges {label}")
    prefix = "c" if how.paired else "n"
    return [
        [
            label,
            f"{prefix}{number + 1:02d}",
            how.days[number % len(how.days)],
            f"{charge * (1 + how.charge_sd * rng.standard_normal()):.3f}",
            "noise analysis",
        ]
        for number in range(how.charge_cells)
    ]


def write(folder: Path) -> None:
    """Write both tables."""
    curves = [row for label, truth in truths().items() for row in curve_rows(label, *truth)]
    charges = [row for label, (_, charge) in truths().items() for row in charge_rows(label, charge)]
    heads = {
        "curves.csv": ["construct", "cell", "batch", "voltage_mV", "charge_pC", "holding_mV"],
        "charges.csv": ["construct", "cell", "batch", "charge_e0", "method"],
    }
    for (name, head), rows in zip(heads.items(), (curves, charges), strict=True):
        with (folder / name).open("w", encoding="utf-8", newline="") as file:
            writer = csv.writer(file, lineterminator="\n")
            writer.writerow(head)
            writer.writerows(rows)


if __name__ == "__main__":
    write(Path(sys.argv[1]) if len(sys.argv) > 1 else Path(__file__).parent / "orvane")
