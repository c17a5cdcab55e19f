"""The campaigns that ship, from files to verdicts."""

import dataclasses
import io
import random
import shutil
from pathlib import Path

import pandas as pd
import pytest

import cornerwise
from cornerwise.flags import FLAG_CODES
from cornerwise.render.simulated import campaign_files
from cornerwise.result import InteractionRow, Result
from cornerwise.simulation import Model

CYCLES = Path(__file__).parents[1] / "cycles"
ORVANE, PUBLISHED = CYCLES / "orvane", CYCLES / "published-medians"

# Flags the invented campaign does not show: its charges come from one method and are plausible.
NOT_SHOWN = {"charge-methods-differ", "charge-lower-bound", "charge-implausible", "not-monotonic", "noisy"}


@pytest.fixture(scope="module")
def orvane() -> Result:
    return cornerwise.couple(cornerwise.read(ORVANE))


@pytest.fixture(scope="module")
def model() -> Model:
    return cornerwise.read_model(ORVANE / "truth" / "model.toml")


def test_published_cycle_is_judged_as_far_as_its_summaries_allow() -> None:
    result = cornerwise.couple(cornerwise.read(PUBLISHED))
    (row,) = result.interactions
    assert row.favours == "resting"
    assert row.shortcut_verdict == "untested"
    assert row.mutations == ("S411A", "F433A")
    assert result.background == ("V478W",)


def test_every_verdict_and_most_flags_occur(orvane: Result) -> None:
    rows, constructs = orvane.interactions, orvane.constructs
    assert {row.interaction_verdict for row in rows} == {"coupled", "detected", "uncoupled", "unresolved"}
    assert {row.shortcut_verdict for row in rows} == {"valid", "invalid", "unresolved", "untested"}
    assert {row.charge_verdict for row in constructs} >= {"equal", "changed", "assumed", None}
    assert {row.order for row in rows} == {2, 3}
    assert {flag.code for flag in orvane.flags} >= set(FLAG_CODES) - NOT_SHOWN


def test_truth_is_recovered(orvane: Result, model: Model) -> None:
    known = cornerwise.truth_of(model)
    truth = {row.cycle: row.interaction for row in known.cycles}
    covered = [row.low <= truth[row.cycle] <= row.high for row in orvane.interactions]  # type: ignore[operator]
    assert len(covered) == len(truth)
    assert sum(covered) >= len(covered) - 1  # 95 % intervals: one miss in eleven is no surprise
    energies = {row.construct: row.energy for row in known.constructs}
    errors = [abs(row.energy - energies[row.construct]) / row.std_uncertainty for row in orvane.constructs]  # type: ignore[operator]
    assert max(errors) < 4
    assert sum(error < 2 for error in errors) >= 0.85 * len(errors)


def test_corners_add_up(orvane: Result) -> None:
    energies = {row.construct: row.energy for row in orvane.constructs}
    for row in orvane.interactions:
        total = sum(sign * energies[label] for label, sign in row.corners)  # type: ignore[operator]
        # Within batches of unequal numbers the batch effect is taken off, which moves the sum a little.
        assert row.interaction == pytest.approx(total, abs=0.2 * row.std_uncertainty)  # type: ignore[operator]


def test_the_shipped_campaign_is_what_its_model_gives(model: Model) -> None:
    files = campaign_files(cornerwise.simulate(model), cornerwise.truth_of(model), model)
    assert sorted(files) == sorted(str(p.relative_to(ORVANE)) for p in ORVANE.rglob("*.*"))
    for name, content in files.items():
        shipped = (ORVANE / name).read_bytes()
        if not name.endswith(".csv"):
            assert shipped == (content if isinstance(content, bytes) else content.encode())
            continue
        made = pd.read_csv(io.StringIO(str(content)))  # a last digit may fall otherwise elsewhere
        pd.testing.assert_frame_equal(made, pd.read_csv(ORVANE / name), atol=2e-4)


def _few(folder: Path, shuffled: bool) -> Path:
    """Part of the invented campaign with one pair and an unrelated construct, rows in another order."""
    shutil.copytree(ORVANE, folder)
    keep = {"WT", "D171N", "K232Q", "D171N/K232Q"} | ({"E154Q"} if shuffled else set())
    for name in ("curves.csv", "charges.csv"):
        head, *lines = (folder / name).read_text().splitlines()
        kept = [line for line in lines if line.split(",")[0] in keep]
        if shuffled:
            random.Random(5).shuffle(kept)
        (folder / name).write_text("\n".join([head, *kept]) + "\n")
    return folder


def _figures(row: InteractionRow) -> dict[str, object]:
    return dataclasses.asdict(row)


def test_row_order_and_unrelated_constructs_change_no_figure(tmp_path: Path, orvane: Result) -> None:
    plain = cornerwise.couple(cornerwise.read(_few(tmp_path / "plain", shuffled=False)))
    shuffled = cornerwise.couple(cornerwise.read(_few(tmp_path / "shuffled", shuffled=True)))
    assert _figures(plain.interactions[0]) == _figures(shuffled.interactions[0])
    (whole,) = [row for row in orvane.interactions if row.cycle == "D171N/K232Q"]
    of_many = {"p_adjusted", "rank", "rank_low", "rank_high", "first_probability", "shrunken"}
    for key, value in _figures(plain.interactions[0]).items():
        if key not in of_many:
            assert _figures(whole)[key] == value, key


def test_order_of_listed_cycles_changes_nothing(tmp_path: Path) -> None:
    entries = [
        '[[cycle]]\nname = "first"\nmutations = ["D171N", "K232Q"]\n',
        '[[cycle]]\nname = "second"\nmutations = ["K232Q", "F188A"]\n',
    ]
    texts = []
    for name, listed in (("ab", entries), ("ba", entries[::-1])):
        folder = tmp_path / name
        shutil.copytree(ORVANE, folder)
        with (folder / "campaign.toml").open("a") as file:
            file.write("\n" + "\n".join(listed))
        result = cornerwise.couple(cornerwise.read(folder))
        assert {row.cycle for row in result.interactions} == {"first", "second"}
        texts.append([_figures(row) for row in result.interactions])
    assert texts[0] == texts[1]
