"""Model files are read as strictly as campaigns: every fault at its line, with the way out."""

import re
from contextlib import suppress
from pathlib import Path

import pytest

from cornerwise import read_model, truth_of
from cornerwise.errors import DataRefused, Problem
from cornerwise.intake.model.keys import KEYS, RECORDING_RULES
from cornerwise.simulation import Recording

TEXT = """\
note = "invented"
seed = 5
cycles = [["E21A", "R84Q"]]

[campaign]
wild_type = "WT"
temperature_C = 20
energy_unit = "kJ/mol"

[[step]]
name = "sensor"
charge_e0 = 2.5
midpoint_mV = -60
copies = 4

[[step]]
name = "opening"
charge_e0 = 2.0
energy = -4.0

[[side]]
name = "inactivated"
beside = "activated"
energy = 1.0

[[mutation]]
name = "E21A"
activation_energy = 6.0
steps = { sensor = 0.5 }

[[mutation]]
name = "R84Q"
charge_e0 = -1.0
states = { inactivated = 2.0 }

[[interaction]]
mutations = ["E21A", "R84Q"]
steps_mV = { opening = 5 }

[recording]
cells = 5

[[construct]]
label = "R84Q"
cells = 9
"""


def write(tmp_path: Path, text: str) -> Path:
    path = tmp_path / "model.toml"
    path.write_text(text, encoding="utf-8")
    return path


def problems(tmp_path: Path, text: str) -> tuple[Problem, ...]:
    with pytest.raises(DataRefused, match="the data were refused: ") as caught:
        read_model(write(tmp_path, text))
    return caught.value.problems


def test_what_is_written_is_read(tmp_path: Path) -> None:
    model = read_model(write(tmp_path, TEXT))
    mev = 1 / 0.0964853321  # of one kJ/mol: F in kJ per mol and V, CODATA, over 1000 mV
    sensor, opening = model.steps
    assert (sensor.copies, sensor.charge_e0, sensor.energy_mev) == (4, 2.5, -150.0)
    assert opening.energy_mev == pytest.approx(-4.0 * mev, rel=1e-8)
    assert model.sides[0].energy_mev == pytest.approx(mev, rel=1e-8)
    one, two, both = model.effects
    assert one.activation_mev == pytest.approx(6.0 * mev, rel=1e-8)
    assert one.steps_mev["sensor"] == pytest.approx(0.5 * mev, rel=1e-8)
    assert (two.charge_e0, both.steps_mv) == (-1.0, {"opening": 5.0})
    assert {mutation.text for mutation in both.mutations} == {"E21A", "R84Q"}
    assert model.recording == Recording(cells=5)
    assert model.own_recordings == {"R84Q": Recording(cells=9)}
    assert (model.seed, model.note, model.settings.temperature_c) == (5, "invented", 20.0)
    assert model.source == TEXT.encode()


def test_steps_are_moved_to_the_activation_energy(tmp_path: Path) -> None:
    text = TEXT.replace("[[step]]", "[gating]\nactivation_energy = -30.0\n\n[[step]]", 1)
    sensor, opening = read_model(write(tmp_path, text)).steps
    mev = 1 / 0.0964853321
    assert 4 * sensor.energy_mev + opening.energy_mev == pytest.approx(-30.0 * mev, rel=1e-8)
    apart = opening.energy_mev / 2.0 - sensor.energy_mev / 2.5
    assert apart == pytest.approx(-4.0 * mev / 2.0 + 60.0, rel=1e-7)


@pytest.mark.parametrize(
    ("old", "new", "row", "column", "match"),
    [
        ("seed = 5", "seeed = 5", 2, "seeed", "did you mean seed"),
        ("seed = 5", "seed = -5", 2, "seed", "expected a whole number, not negative"),
        ("[recording]", "[recoding]", 37, "recoding", "did you mean recording"),
        ('cycles = [["E21A", "R84Q"]]', "", None, "cycles", "found no cycles"),
        ('[["E21A", "R84Q"]]', '[["E21A", "R84K"]]', 3, "cycles", "did you mean 'R84Q'"),
        ('[["E21A", "R84Q"]]', '[["E21A"]]', 3, "cycles", "found 1 mutation; expected 2 to 6"),
        ('[["E21A", "R84Q"]]', '[["E21A", "R84Q"], ["R84Q", "E21A"]]', 3, "cycles", "a second cycle of"),
        ('wild_type = "WT"', 'wild_type = "V9A"', 6, "wild_type", "spells mutations"),
        ("temperature_C = 20", "temperature_C = 293", 7, "temperature_C", "subtract 273.15"),
        ("midpoint_mV = -60", "", 10, "step entry 1 energy", "found no midpoint_mV"),
        ("energy = -4.0", "energy = -4.0\nmidpoint_mV = 3", 19, "step entry 2 energy", "both"),
        ("charge_e0 = 2.0", "charge_e0 = -2.0", 18, "step entry 2 charge_e0", "from 0 to 100"),
        ("charge_e0 = 2.5", "charge_e0 = 0", 13, "step entry 1 midpoint_mV", "write energy = "),
        ('name = "opening"', 'name = "sensor"', 17, "step entry 2 name", "the name 'sensor' again"),
        ('name = "opening"', 'name = "rest"', 17, "step entry 2 name", "none of them rest"),
        ("copies = 4", "copies = 40", 14, "step entry 1 copies", "from 1 to 12"),
        ('beside = "activated"', 'beside = "activate"', 23, "side entry 1 beside", "'activated'"),
        ("steps = { sensor", "steps = { sensr", 29, "mutation entry 1 steps sensr", "did you mean 'sensor'"),
        ("sensor = 0.5 }", 'sensor = "0.5" }', 29, "mutation entry 1 steps sensor", "the text '0.5'"),
        ("steps = { sensor = 0.5 }", "steps = 0.5", 29, "mutation entry 1 steps", "steps = { sensor = 1"),
        ("{ inactivated", "{ open", 34, "mutation entry 2 states open", "the unknown name 'open'"),
        ('name = "R84Q"', 'name = "E21A"', 32, "mutation entry 2 name", "again"),
        ('name = "R84Q"', 'name = "K21A"', 32, "mutation entry 2 name", "where E21A has E"),
        ('name = "R84Q"', 'name = "R84 Q"', 32, "mutation entry 2 name", "without spaces"),
        ('mutations = ["E21A", "R84Q"]', 'mutation = ["E21A", "R84Q"]', 37, None, "did you mean mutations"),
        ('mutations = ["E21A", "R84Q"]', "", 36, "interaction entry 1 mutations", "found no mutations"),
        ("cells = 5", "cells = 0", 41, "recording cells", "from 1 to 1000"),
        ("cells = 5", "step_mV = 200", 40, "recording first_mV", "found 2 points from -140 to 80 mV"),
        ("cells = 5", "last_mV = -200", 40, "recording first_mV", "found 0 points"),
        ("cells = 5", "step_mV = 0.0001", 40, "recording first_mV", "expected 5 to 2000 points"),
        ("cells = 5", "noise = 0.5", 41, "recording noise", "below 0.5"),
        ("cells = 5", "gain_pC = [2, 1]", 41, "recording gain_pC", "the lower first"),
        ("cells = 5", 'batches = ["a", "a"]', 41, "recording batches", "different names"),
        ("cells = 5", 'scatter = "gaussian"', 41, "recording scatter", '"normal", "skewed" or'),
        ("cells = 5", 'charges = "summaries"\ncharge_cells = 1', 42, "recording charge_cells", "at least 2"),
        ("cells = 5", "charge_cells = 0", 41, "recording charge_cells", "no charge of the wild type"),
        ('label = "R84Q"', 'label = "R84K"', 44, "construct entry 1 label", "did you mean 'R84Q'"),
        ("cells = 9", "batch_sd_mV = 9", 45, "construct entry 1 batch_sd_mV", "the unknown key"),
        ("charge_e0 = -1.0", "charge_e0 = -12.5", None, "mutation", "charges in e0 of R84Q"),
        ('[[side]]\nname = "inactivated"', '[[side]]\nname = "sensor"', 22, "side entry 1 name", "again"),
    ],
)  # fmt: skip
def test_one_fault_is_told_once(
    tmp_path: Path, old: str, new: str, row: int | None, column: str | None, match: str
) -> None:
    assert TEXT.count(old) >= 1
    text = TEXT
    if "name = " in old:  # nothing else may refer to what loses its name
        text = text.replace("steps_mV = { opening", "steps_mV = { sensor").replace(
            "{ inactivated = 2.0 }", "{ rest = 2.0 }"
        )
    found = problems(tmp_path, text.replace(old, new, 1) if old != "cells = 9" else text.replace(old, new))
    told = "\n".join(map(str, found))
    assert len(found) == 1, told
    assert re.search(match, str(found[0])), told
    assert found[0].origin.file == "model.toml"
    if column is not None:
        assert found[0].origin.column == column, told
    assert found[0].remedy


def test_couplings_belong_to_steps_in_any_order(tmp_path: Path) -> None:
    coupling = '[[coupling]]\nsteps = ["sensor", "opening"]\nenergy = -1.0\n'
    (found,) = problems(tmp_path, TEXT + coupling)
    assert 'order = "any"' in str(found)
    free = TEXT.replace("[[step]]", '[gating]\norder = "any"\n\n[[step]]', 1) + coupling
    assert read_model(write(tmp_path, free)).couplings[0].steps == ("sensor", "opening")
    (found,) = problems(tmp_path, free.replace('["sensor", "opening"]', '["sensor", "openin"]'))
    assert "did you mean 'opening'" in str(found)


def test_states_between_exist_in_a_sequence_only(tmp_path: Path) -> None:
    aimed = TEXT.replace("states = { inactivated", "states = { sensor")
    assert read_model(write(tmp_path, aimed)).effects[1].states_mev.keys() == {"sensor"}
    (found,) = problems(tmp_path, aimed.replace("[[step]]", '[gating]\norder = "any"\n\n[[step]]', 1))
    assert "the unknown name 'sensor'" in str(found)


def test_all_faults_in_one_go(tmp_path: Path) -> None:
    text = TEXT.replace("seed = 5", "seed = 0.5").replace("cells = 9", "cells = 0.9")
    text = text.replace('beside = "activated"', 'beside = "nowhere"').replace("= { opening = 5 }", "= 5")
    found = problems(tmp_path, text)
    rows = [problem.origin.row for problem in found]
    assert rows == sorted(rows)  # type: ignore[type-var]
    told = {problem.origin.column for problem in found}
    assert {"seed", "construct entry 1 cells", "side entry 1 beside", "interaction entry 1 steps_mV"} <= told


@pytest.mark.parametrize("text", ["", "seed = ", "cycles = 3\n[campaign]\n", "[[campaign]]\n[step]\nx = 1\n"])
def test_what_is_no_model_is_refused_without_an_accident(tmp_path: Path, text: str) -> None:
    assert problems(tmp_path, text)


def test_missing_file_and_folder(tmp_path: Path) -> None:
    for path in (tmp_path / "none.toml", tmp_path):
        with pytest.raises(DataRefused, match="cannot be opened"):
            read_model(path)


def test_every_field_of_a_recording_has_a_key() -> None:
    assert {rule.attribute for rule in RECORDING_RULES} == set(Recording.__dataclass_fields__)
    assert set(KEYS["construct"]) - {"label"} < set(KEYS["recording"])


SPOILT = ("-1", "1e400", '"word"', "[]", "[1, [2]]", "{}", "{ a = 1 }", "true", "1979-05-27")


@pytest.mark.parametrize("value", SPOILT)
def test_no_value_causes_an_accident(tmp_path: Path, value: str) -> None:
    lines = TEXT.splitlines()
    for row, line in enumerate(lines):
        key, _, was = line.partition(" = ")
        if was:
            spoilt = [*lines[:row], f"{key} = {value}", *lines[row + 1 :]]
            path = write(tmp_path, "\n".join(spoilt) + "\n")
            with suppress(DataRefused):  # whatever else it raises is an accident
                assert truth_of(read_model(path)).cycles
