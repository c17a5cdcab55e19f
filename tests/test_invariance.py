"""What may not change a figure: threads, the order of constructs and cells, the pairs beside a cycle."""

import dataclasses
import os
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path

import numpy as np
import pytest
from builders import campaign, cells, construct, measurement

import cornerwise
from cornerwise.campaign import Construct, Settings, StatedCharge
from cornerwise.coupling import couple
from cornerwise.energies import EnergyBook
from cornerwise.estimates import estimate_all
from cornerwise.mutations import find_cycles
from cornerwise.standings import Standing, standings

STARTER = Path(cornerwise.__file__).parent / "starter_campaign"
THREADS = ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS", "BLIS_NUM_THREADS")
# What is said of a cycle among the others, which the others must change.
OF_MANY = {
    "p_adjusted", "rank", "rank_low", "rank_high", "first_probability", "shrunken", "simultaneous_low",
    "simultaneous_high", "interaction_verdict", "favours",
}  # fmt: skip


def _many_pairs(folder: Path, asked: str) -> Path:
    """Forty pairs of summaries on one wild type, with a kind of interval that is asked for."""
    folder.mkdir()
    rng = np.random.default_rng(8)
    lines = ["construct,median_mV,sem_mV,n", "WT,-40,1,5"]
    for i in range(40):
        one, other = f"E{10 + i}Q", f"R{200 + i}Q"
        lines += [
            f"{label},{rng.normal(-40, 6):.3f},{rng.uniform(0.5, 2):.3f},{rng.integers(3, 9)}"
            for label in (one, other, f"{one}/{other}")
        ]
    (folder / "medians.csv").write_text("\n".join(lines) + "\n")
    (folder / "campaign.toml").write_text(
        f'wild_type = "WT"\ncharge = {{ value_e0 = 13.0, sem_e0 = 0.5 }}\n{asked}\n'
    )
    return folder


@pytest.mark.parametrize("which", ["starter", "simultaneous = true", 'interval = "monte-carlo"'])
def test_the_number_of_threads_changes_no_byte(which: str, tmp_path: Path) -> None:
    folder = STARTER if which == "starter" else _many_pairs(tmp_path / "many", which)
    printed = [
        subprocess.run(
            [sys.executable, "-m", "cornerwise", "couple", str(folder), "--json"],
            capture_output=True, env={**os.environ, **dict.fromkeys(THREADS, number)}, check=True,
        ).stdout
        for number in ("1", "4")
    ]  # fmt: skip
    assert printed[0] == printed[1]
    assert len(printed[0]) > 10_000


LABELS = ("WT", "E5A", "R9Q", "K12A", "E5A/R9Q", "E5A/K12A", "R9Q/K12A", "E5A/R9Q/K12A")
BESIDE = ("D70N", "E5A/D70N", "S80T", "T90A", "S80T/T90A")


def _constructs(labels: Sequence[str], *, turned: bool = False) -> list[Construct]:
    """Constructs in shared batches, most with charges of the same cells; each from a stream of its own."""
    made = []
    for label in reversed(labels) if turned else labels:
        rng = np.random.default_rng(list(label.encode()))
        medians, charges = list(rng.normal(-40, 4, 4)), list(rng.normal(13, 0.5, 4))
        one = construct(label, medians, None if label == "K12A" else charges, batches=["a", "b", "a", "b"])
        if turned:
            one = dataclasses.replace(
                one, curves=one.curves[::-1], charge_replicates=one.charge_replicates[::-1]
            )
        made.append(one)
    return made


POLICIES = [
    {}, {"interval": "monte-carlo", "simultaneous": True, "rank_by": "lower bound"},
    {"charge": "wild-type"}, {"charge": StatedCharge(value_e0=13.0, sem_e0=0.4), "voltage_offset_mv": 2.0},
]  # fmt: skip


@pytest.mark.parametrize("settings", POLICIES, ids=str)
def test_order_and_company_change_no_figure_of_a_cycle(settings: dict[str, object]) -> None:
    alone = couple(campaign(_constructs(LABELS), **settings))
    turned = couple(campaign(_constructs(LABELS, turned=True), **settings))
    assert turned.interactions[:] == alone.interactions[:]
    assert turned.budget[:] == alone.budget[:]
    assert sorted(turned.constructs, key=str) == sorted(alone.constructs, key=str)
    beside = couple(campaign(_constructs([*LABELS, *BESIDE]), **settings))
    rows = {row.cycle: dataclasses.asdict(row) for row in beside.interactions}
    assert len(rows) == len(alone.interactions) + 2
    for row in alone.interactions:
        found = rows[row.cycle]
        for key, value in dataclasses.asdict(row).items():
            assert key in OF_MANY or found[key] == value, (row.cycle, key)
    assert [one for one in beside.budget if one.cycle in {row.cycle for row in alone.interactions}] == [
        *alone.budget
    ]
    assert beside.backgrounds[:] == alone.backgrounds[:]


def test_company_is_what_the_rest_depends_on() -> None:
    # The names set apart above are set apart for a reason.
    alone = couple(campaign(_constructs(LABELS), simultaneous=True)).interactions
    beside = couple(campaign(_constructs([*LABELS, *BESIDE]), simultaneous=True)).interactions
    same = {row.cycle: row for row in beside}
    for key in ("shrunken", "simultaneous_low", "rank_high"):
        assert any(getattr(row, key) != getattr(same[row.cycle], key) for row in alone), key


def test_order_of_constructs_and_cycles_changes_no_standing() -> None:
    rng = np.random.default_rng(5)
    pairs = [f"E{i}A/K{i + 20}A" for i in range(2, 10)]
    labels = ("WT", *(part for pair in pairs for part in (*pair.split("/"), pair)))
    made = [measurement(label, cells(rng.normal(-40, 3, 5))) for label in labels]
    settings = Settings(
        wild_type="WT", replicates=1000, charge=StatedCharge(value_e0=13.0, sem_e0=0.3), simultaneous=True
    )
    cycles = find_cycles({frozenset(m.construct.mutations): m.label for m in made})

    def standing(step: int) -> dict[str, Standing]:
        ordered = cycles[::step]
        found, deviations = estimate_all(ordered, EnergyBook(made[::step], settings), settings)
        names = [cycle.name for cycle in ordered]
        return dict(zip(names, standings(found, deviations, settings), strict=True))

    assert standing(1) == standing(-1)
