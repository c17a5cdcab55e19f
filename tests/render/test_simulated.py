"""Simulated campaigns as files: read back as drawn, the truth apart, the same bytes each time."""

from dataclasses import replace
from pathlib import Path

import pytest

import cornerwise
from cornerwise.campaign import StatedCharge
from cornerwise.folders import write_folder
from cornerwise.mutations import named_mutation
from cornerwise.render.simulated import campaign_files
from cornerwise.simulation import Model, Recording
from cornerwise.simulation.model import Common
from intake.writing import content
from simulation.models import A, B, effect, model

EFFECTS = (effect(frozenset({A}), activation_mev=80.0), effect(frozenset({B}), charge_e0=-0.5))
STATED = {"value_e0": 11.0, "sem_e0": 0.3, "citation": "invented"}
KEYS = {
    "title": 'A "quoted" title, back\\slash',
    "wild_type": "WT",
    "temperature_C": 20.5,
    "first": 2,
    "simultaneous": True,
    "charge": STATED,
}


def written(made: Model, folder: Path) -> Path:
    files = campaign_files(cornerwise.simulate(made), cornerwise.truth_of(made), made)
    write_folder(files, folder)
    return folder


RECORDINGS = {
    "plain": model(*EFFECTS),
    "batches, methods and holding": model(
        *EFFECTS, recording=Recording(batches=("1", "day, 2"), charge_method="noise", holding_mv=-90.0)
    ),
    "no charges": model(*EFFECTS, recording=Recording(charge_cells=0, opening_cells=3)),
    "summaries": model(*EFFECTS, common=Common(charges="summaries", decimals=2)),
    "fractions of a mV": model(
        *EFFECTS, recording=Recording(step_mv=2.5, opening_step_mv=1.25, opening_cells=1)
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", RECORDINGS)
def test_files_are_read_back_as_drawn(name: str, tmp_path: Path) -> None:
    made = RECORDINGS[name]
    read = cornerwise.read(written(made, tmp_path / "made"))
    drawn = cornerwise.simulate(replace(made, settings=read.settings))
    assert content(read) == content(drawn)


def test_settings_are_written_as_they_were_read(tmp_path: Path) -> None:
    read = cornerwise.read(written(model(*EFFECTS, campaign=KEYS), tmp_path / "made")).settings
    assert (read.title, read.temperature_c, read.first) == (KEYS["title"], 20.5, 2)
    assert read.simultaneous
    assert read.charge == StatedCharge(**STATED)


def test_mutations_that_are_no_substitutions_are_listed(tmp_path: Path) -> None:
    loop = named_mutation("Δ6-46")
    made = model(effect(frozenset({loop}), activation_mev=50.0), mutations=(A, loop), cycles=((A, loop),))
    read = cornerwise.read(written(made, tmp_path / "made"))
    assert [cycle.name for cycle in read.cycles] == ["E21A/Δ6-46"]
    assert [one.label for one in read.constructs] == ["WT", "E21A", "Δ6-46", "E21A/Δ6-46"]


def test_truth_stands_apart_and_is_not_read(tmp_path: Path) -> None:
    made = model(*EFFECTS, note="one\ntwo", source=b"# the model\n")
    folder = written(made, tmp_path / "made")
    assert sorted(p.name for p in folder.iterdir()) == ["campaign.toml", "charges.csv", "curves.csv", "truth"]
    assert sorted(p.name for p in (folder / "truth").iterdir()) == [
        "constructs.csv",
        "cycles.csv",
        "model.toml",
    ]
    assert (folder / "truth" / "model.toml").read_bytes() == made.source
    read = cornerwise.read(folder)
    assert {file.name for file in read.inputs} == {"campaign.toml", "charges.csv", "curves.csv"}
    head = (folder / "campaign.toml").read_text().splitlines()
    assert head[:3] == ["# one", "# two", "# Simulated, no recorded data: drawn from truth/model.toml by "
                        "`cornerwise simulate`."]  # fmt: skip


def test_same_model_same_bytes() -> None:
    made = model(*EFFECTS, source=b"x")
    one, two = (campaign_files(cornerwise.simulate(made), cornerwise.truth_of(made), made) for _ in range(2))
    assert one == two


def test_true_values_hold_no_rounding_errors() -> None:
    made = model(*EFFECTS)
    files = campaign_files(cornerwise.simulate(made), cornerwise.truth_of(made), made)
    header, row = str(files["truth/cycles.csv"]).splitlines()
    assert dict(zip(header.split(","), row.split(","), strict=True))["interaction"] == "0.0"
