"""Whether plans come true: half-width, power, ranges and splits against simulated campaigns.

    python tests/bench/planning.py [--part grid|pilots|splits] [--campaigns N] [--workers N]

Campaigns are invented; each is estimated by the package's own functions (energies, interactions, intervals),
which know nothing of the plan. Prints Markdown tables; asserts nothing.
"""

from __future__ import annotations

import argparse
import math
import multiprocessing
import sys
import time
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import combinations
from multiprocessing.pool import Pool
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).parents[1]))
from builders import cells, measurement

from cornerwise.campaign import Settings
from cornerwise.energies import EnergyBook
from cornerwise.interactions import interact
from cornerwise.intervals import t_interval
from cornerwise.measurements import Measurement
from cornerwise.mutations import find_cycles
from cornerwise.planning.assumed import Assumptions, assumed_prospects
from cornerwise.planning.board import Board
from cornerwise.planning.outlook import expected_half_width, outlook
from cornerwise.planning.pooling import pooled_scatters
from cornerwise.planning.prospects import Prospect, Recording, brought_to, prospect
from cornerwise.planning.search import equal_shares, spend
from cornerwise.quantities import Sample
from cornerwise.units import energy_per_e0_mv

PER = energy_per_e0_mv("kcal/mol", 22.0)
RESIDUES = {"A": "A10G", "B": "R20Q", "C": "K30M"}
SD_MV, SD_E0, CORRELATION = 2.0, 0.5, 0.5


@dataclass(frozen=True)
class Case:
    """One kind of campaign."""

    charges: str  # "separate", "paired", "shared"
    order: int
    scatter: str  # "equal", "3:1" for the last corner against the others
    n: int

    @property
    def assumed(self) -> Assumptions:
        """What is known of it, with a true interaction that is found about 7 times in 10."""
        corners = 2**self.order
        medians = [-40.0 + 6.0 * math.sin(3.0 * k) for k in range(corners)]
        sds = [SD_MV] * (corners - 1) + [SD_MV * (3.0 if self.scatter == "3:1" else 1.0)]
        made = Assumptions(
            median_mv=tuple(medians), median_sd_mv=tuple(sds), charge_e0=(13.0,), charge_sd_e0=(SD_E0,),
            charges=self.charges, order=self.order,  # type: ignore[arg-type]
            correlation=CORRELATION if self.charges == "paired" else 0.0,
        )  # fmt: skip
        one, totals = self.prospect(made), self.n
        wanted = 1.25 * expected_half_width(one, brought_to([one], totals), 0.95)
        medians[-1] += (wanted - one.value) / (PER * 13.0)
        return replace(made, median_mv=tuple(medians))

    @staticmethod
    def prospect(assumed: Assumptions) -> Prospect:
        ((one,), _) = assumed_prospects(assumed)
        return one


def label_of(construct: str) -> str:
    """Label that the package reads, from the plan's name of a construct such as A/B or A2/B2."""
    if construct == "WT":
        return construct
    moved = [(RESIDUES[part[0]], int(part[1:] or 0)) for part in construct.split("/")]
    return "/".join(f"{r[0]}{int(r[1:-1]) + 100 * pair}{r[-1]}" for r, pair in moved)


@dataclass(frozen=True)
class Made:
    """Draws campaigns of the constructs of a plan."""

    assumed: Assumptions
    scale: Mapping[str, float]  # of a construct's scatters; 1 where not named

    def campaign(self, rng: np.random.Generator, totals: Mapping[Recording, int]) -> list[Measurement]:
        """One campaign with so many cells of each kind."""
        names = list(dict.fromkeys(one.construct for one in totals))
        order = sorted(names, key=lambda name: (name != "WT", name.count("/"), name))
        places = {name: self._corner(name) for name in order}
        return [self._construct(rng, name, places[name], totals) for name in order]

    def _corner(self, name: str) -> int:
        """Place among the corners of a cycle."""
        if name == "WT":
            return 0
        letters = tuple(part[0] for part in name.split("/"))
        every = "ABC"[: self.assumed.order]
        sets = [c for size in range(self.assumed.order + 1) for c in combinations(every, size)]
        return sets.index(letters)

    def _construct(
        self, rng: np.random.Generator, name: str, corner: int, totals: Mapping[Recording, int]
    ) -> Measurement:
        made, scale = self.assumed, self.scale.get(name, 1.0)
        median, sd = made.at(made.median_mv, corner), scale * made.at(made.median_sd_mv, corner)
        charge, charge_sd = made.at(made.charge_e0, corner), scale * made.at(made.charge_sd_e0, corner)
        paired = totals.get(Recording(name, "curves with charges"))
        if paired is not None:
            x, y = rng.standard_normal((2, paired))
            y = made.correlation * x + math.sqrt(1 - made.correlation**2) * y
            return measurement(label_of(name), cells(median + sd * x), cells(charge + charge_sd * y))
        v = median + sd * rng.standard_normal(totals[Recording(name, "curves")])
        count = totals.get(Recording(name, "charges"))
        q = None if count is None else cells(charge + charge_sd * rng.standard_normal(count), "n")
        return measurement(label_of(name), cells(v), q)


def settings_of(charges: str) -> Settings:
    policy = "wild-type" if charges == "shared" else "measured"
    return Settings(wild_type="WT", replicates=10, charge=policy)


def estimates(made: Sequence[Measurement], settings: Settings, order: int) -> list[tuple[float, float]]:
    """Interaction and half-width of every cycle of the full order."""
    book = EnergyBook(made, settings)
    labels = {frozenset(one.construct.mutations): one.label for one in made}
    found = []
    for cycle in find_cycles(labels):
        if cycle.order == order:
            one = interact(cycle, book, "WT")
            spread = one.ledger.spread(one.energy)
            low, high = t_interval(one.energy.value, math.sqrt(spread.variance), spread.dof, 0.95)
            found.append((one.energy.value, (high - low) / 2))
    return found


# Half-width and power at n cells each


def grid() -> list[Case]:
    return [
        Case(charges=charges, order=order, scatter=scatter, n=n)
        for order in (2, 3)
        for charges in ("separate", "paired", "shared")
        for scatter in ("equal", "3:1")
        for n in (3, 4, 5, 8, 12)
    ]


def at_n(task: tuple[Case, int]) -> tuple[Case, list[float]]:
    """Planned and simulated half-width, planned and simulated power in per cent."""
    case, campaigns = task
    assumed = case.assumed
    one = case.prospect(assumed)
    totals = brought_to([one], case.n)
    planned = outlook(one, totals, truth=abs(one.value), confidence=0.95)
    rng = np.random.default_rng([case.n, case.order, len(case.charges), len(case.scatter)])
    made, settings = Made(assumed, {}), settings_of(case.charges)
    found = np.array(
        [estimates(made.campaign(rng, totals), settings, case.order)[0] for _ in range(campaigns)]
    )
    power = 100 * np.mean(np.abs(found[:, 0]) > found[:, 1])
    return case, [
        planned.half_width.expected, float(found[:, 1].mean()), 100 * planned.power.expected, float(power),
    ]  # fmt: skip


# What a pilot tells


PILOTS = (
    ("separate", 3, 5, "equal"), ("separate", 5, 7, "3:1"), ("paired", 3, 6, "equal"),
    ("paired", 4, 4, "3:1"), ("shared", 3, 9, "equal"), ("shared", 6, 6, "3:1"),
)  # fmt: skip


def of_pilots(task: tuple[tuple[str, int, int, str], int]) -> tuple[tuple[str, int, int, str], list[float]]:
    """Share of final half-widths below, within and above the likely range, half-widths, power."""
    (charges, kept, further, scatter), pilots = task
    case = Case(charges=charges, order=2, scatter=scatter, n=kept + further)
    assumed, settings = case.assumed, settings_of(charges)
    truth = case.prospect(assumed).value
    rng = np.random.default_rng([kept, further, len(charges)])
    totals = brought_to([case.prospect(assumed)], kept + further)
    counted = []
    for _ in range(pilots):
        full = Made(assumed, {}).campaign(rng, totals)
        pilot = [_first(one, kept) for one in full]
        book = EnergyBook(pilot, settings)
        (cycle,) = find_cycles({frozenset(one.construct.mutations): one.label for one in pilot})
        seen = interact(cycle, book, "WT")
        one = prospect("I", seen.energy, seen.ledger, pooled_scatters(book.ledger))
        told = outlook(one, brought_to([one], kept + further), truth=abs(truth), confidence=0.95)
        ((value, half_width),) = estimates(full, settings, 2)
        width = told.half_width
        counted.append([
            half_width < width.low, width.low <= half_width <= width.high, half_width > width.high,
            width.expected / half_width, told.power.expected, told.assurance, abs(value) > half_width,
        ])  # fmt: skip
    mean = np.array(counted, dtype=float).mean(axis=0)
    return task[0], [*(100 * mean[:3]), mean[3], *(100 * mean[4:])]


def _first(one: Measurement, count: int) -> Measurement:
    """The first cells of each kind."""

    def cut(sample: Sample) -> dict[str, float]:
        return dict(list(zip(sample.cells, map(float, sample.values), strict=True))[:count])

    v, q = one.median_mv, one.charge_e0
    assert isinstance(v, Sample)
    return measurement(one.label, cut(v), cut(q) if isinstance(q, Sample) else None)


# Best split against equal numbers


@dataclass(frozen=True)
class Splitting:
    """Several pairs on one wild type."""

    pairs: int
    charges: str
    scatter: str  # "alike", "one noisy pair", "noisy doubles"
    each: int  # recordings a kind of cell, on average

    def scale(self, construct: str) -> float:
        """Times the usual scatter."""
        noisy = {"one noisy pair": construct in ("A/B", "A1/B1"), "noisy doubles": "/" in construct}
        return 2.5 if noisy.get(self.scatter, False) else 1.0


SPLITTINGS = tuple(
    Splitting(pairs=pairs, charges=charges, scatter=scatter, each=6)
    for pairs in (1, 4, 10)
    for charges, scatter in (
        ("separate", "alike"), ("separate", "noisy doubles"), ("paired", "one noisy pair"),
        ("shared", "alike"), ("shared", "one noisy pair"),
    )
)  # fmt: skip


def of_splits(task: tuple[Splitting, int]) -> tuple[Splitting, list[float]]:
    """Planned and simulated gain of the best split over equal numbers, mean and largest, in per cent."""
    case, campaigns = task
    assumed = Assumptions(
        median_mv=(-40.0, -34.0, -46.0, -39.0), median_sd_mv=(SD_MV,), charge_e0=(13.0,),
        charge_sd_e0=(SD_E0,), charges=case.charges, pairs=case.pairs,  # type: ignore[arg-type]
    )  # fmt: skip
    prospects = [
        replace(one, terms=tuple(
            replace(term, sd=term.sd * case.scale(term.recording.construct)) for term in one.terms
        ))
        for one in assumed_prospects(assumed)[0]
    ]  # fmt: skip
    board = Board(prospects, [0.95] * len(prospects))
    spare = case.each * len(board.recordings) - int(board.least.sum())
    made = Made(assumed, {one.construct: case.scale(one.construct) for one in board.recordings})
    numbers = []
    for criterion, of in (("mean", np.mean), ("largest", np.max)):
        planned, simulated = [], []
        for totals in (
            spend(board, board.least, spare, criterion),  # type: ignore[arg-type]
            equal_shares(board, board.least, spare),
        ):
            named = board.named(totals)
            planned.append(of([expected_half_width(one, named, 0.95) for one in prospects]))
            rng = np.random.default_rng(case.pairs)
            drawn = [
                [w for _, w in estimates(made.campaign(rng, named), settings_of(case.charges), 2)]
                for _ in range(campaigns)
            ]
            simulated.append(of(np.mean(drawn, axis=0)))
        numbers += [100 * (1 - planned[0] / planned[1]), 100 * (1 - simulated[0] / simulated[1])]
    return case, [float(number) for number in numbers]


def print_grid(pool: Pool, campaigns: int) -> None:
    """Half-width and power at n cells of each kind."""
    print("| charges | order | scatter | n | planned half-width | simulated | difference, % "
          "| planned power, % | simulated | difference |\n" + "|---" * 10 + "|")  # fmt: skip
    worst = np.zeros(2)
    for case, (w, v, p, q) in pool.imap(at_n, [(case, campaigns) for case in grid()]):
        off = 100 * (w / v - 1), p - q
        worst = np.maximum(worst, np.abs(off))
        shown = f"{w:.3f} | {v:.3f} | {off[0]:+.1f} | {p:.1f} | {q:.1f} | {off[1]:+.1f}"
        print(f"| {case.charges} | {case.order} | {case.scatter} | {case.n} | {shown} |", flush=True)
    print(f"\nlargest difference: half-width {worst[0]:.1f} %, power {worst[1]:.1f} points\n")


def print_pilots(pool: Pool, campaigns: int) -> None:
    """What pilots tell of cells that are then recorded."""
    print("| charges | pilot | further | scatter | below the range, % | within | above "
          "| expected / final | power, % | assurance, % | found, % |\n" + "|---" * 11 + "|")  # fmt: skip
    for which, numbers in pool.imap(of_pilots, [(one, campaigns) for one in PILOTS]):
        low, inside, high, ratio, *powers = numbers
        first = f"{' | '.join(map(str, which))} | {low:.1f} | {inside:.1f} | {high:.1f} | {ratio:.3f}"
        print(f"| {first} | {' | '.join(f'{one:.1f}' for one in powers)} |", flush=True)


def print_splits(pool: Pool, campaigns: int) -> None:
    """What the best split earns over equal numbers."""
    print("| pairs | charges | scatter | recordings | mean: promised gain, % | simulated "
          "| largest: promised gain, % | simulated |\n" + "|---" * 8 + "|")  # fmt: skip
    for case, numbers in pool.imap(of_splits, [(one, campaigns) for one in SPLITTINGS]):
        kinds = 1 + 3 * case.pairs
        kinds *= 2 if case.charges == "separate" else 1
        kinds += case.charges == "shared"
        first = f"{case.pairs} | {case.charges} | {case.scatter} | {case.each * kinds}"
        print(f"| {first} | {' | '.join(f'{one:.1f}' for one in numbers)} |", flush=True)


PARTS = {"grid": print_grid, "pilots": print_pilots, "splits": print_splits}


def main() -> None:
    parser = argparse.ArgumentParser()
    parser.add_argument("--part", choices=tuple(PARTS), help="only this one")
    parser.add_argument("--campaigns", type=int, default=1500, help="a case; four times as many in the grid")
    parser.add_argument("--workers", type=int, default=2)
    asked = parser.parse_args()
    started = time.perf_counter()
    with multiprocessing.Pool(asked.workers) as pool:
        for part in [asked.part] if asked.part else PARTS:
            PARTS[part](pool, asked.campaigns * (4 if part == "grid" else 1))
            print()
    print(f"{time.perf_counter() - started:.0f} s", file=sys.stderr)


if __name__ == "__main__":
    main()
