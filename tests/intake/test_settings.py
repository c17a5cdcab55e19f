"""The keys of campaign.toml: defaults, types, ranges, names."""

from pathlib import Path

import pytest

from cornerwise.campaign import Settings, StatedCharge
from cornerwise.intake import read
from intake.writing import assert_refused, changed, curve_rows, folder, problems

CHARGE = "charge = { value_e0 = 13.0, sem_e0 = 0.5 }\n"
BASE = 'wild_type = "WT"\n' + CHARGE
EVERY_KEY = """
title = "An invented sensor"
wild_type = "WT"
temperature_C = 18.5
subunits = 4
energy_unit = "kJ/mol"
confidence = 0.9
replicates = 2000
seed = 7
threshold = 4
shortcut_tolerance = 2.0
charge_margin = 0.2
voltage_offset_mV = 3
reference_voltage_mV = -60
charge = { value_e0 = 12, sem_e0 = 0, citation = "an invented source, table 2" }
charge_method = "noise"
correct_sloping_plateaus = true
interval = "monte-carlo"
adjustment = "benjamini-hochberg"
simultaneous = false
rank_by = "lower bound"
first = 5
"""


def test_every_key(tmp_path: Path) -> None:
    charges = "construct,charge_e0,sem_e0,n,method\nWT,12,1,4,noise\n"
    assert read(folder(tmp_path / "a", EVERY_KEY, charges=charges)).settings == Settings(
        title="An invented sensor",
        wild_type="WT",
        temperature_c=18.5,
        subunits=4,
        energy_unit="kJ/mol",
        confidence=0.9,
        replicates=2000,
        seed=7,
        threshold=4.0,
        shortcut_tolerance=2.0,
        charge_margin=0.2,
        voltage_offset_mv=3.0,
        reference_voltage_mv=-60.0,
        charge=StatedCharge(value_e0=12.0, sem_e0=0.0, citation="an invented source, table 2"),
        charge_method="noise",
        correct_sloping_plateaus=True,
        interval="monte-carlo",
        adjustment="benjamini-hochberg",
        simultaneous=False,
        rank_by="lower bound",
        first=5,
        defaulted=(),
    )


def test_what_is_left_out_is_named(tmp_path: Path) -> None:
    settings = read(folder(tmp_path / "a", BASE + "seed = 3\n")).settings
    assert settings.defaulted == (
        "title", "temperature_C", "subunits", "energy_unit", "confidence", "replicates", "threshold",
        "shortcut_tolerance", "charge_margin", "voltage_offset_mV", "reference_voltage_mV", "charge_method",
        "correct_sloping_plateaus", "interval", "adjustment", "simultaneous", "rank_by", "first",
    )  # fmt: skip
    assert settings.temperature_c == Settings(wild_type="WT").temperature_c


@pytest.mark.parametrize(
    ("key", "values"),
    [
        ("title", ["1", "true", '"two\\nlines"']),
        ("wild_type", ["1", '""', '"  "', '["WT"]']),
        ("temperature_C", ["-5.1", "60.1", "295.15", '"22"', "true", "nan", "inf", "2024-01-01"]),
        ("subunits", ["0", "-1", "4.5", "true", '"4"']),
        ("energy_unit", ['"kcal"', '"KJ/mol"', "1"]),
        ("confidence", ["0.5", "1", "1.0", "95", "true", '"0.95"', "nan"]),
        ("replicates", ["999", "1000001", "1e3001", "true"]),
        ("seed", ["-1", "1.5", "true", "9223372036854775808", '"1"']),
        ("threshold", ["0", "-1", "true", "inf", "1" + 400 * "0"]),
        ("shortcut_tolerance", ["0", "-1", "true", "nan"]),
        ("charge_margin", ["0", "1", "10", "true"]),
        ("voltage_offset_mV", ["-0.1", "true", "501", '"2 mV"']),
        ("reference_voltage_mV", ["500.1", "-500.1", "true", '"-60"', "nan"]),
        ("charge_method", ["1", '""', '" "', '["noise"]', '"a\\tb"']),
        ("interval", ['"z"', '"Monte-Carlo"', "1", '["propagated"]']),
        ("adjustment", ['"none"', "true"]),
        ("simultaneous", ['"true"', "1"]),
        ("rank_by", ['"bound"', "1"]),
        ("first", ["0", "1.5", "inf", "true"]),
        ("charge", ['"shared"', "13.0", "true", "[13.0, 0.5]"]),
    ],
)
def test_values_that_cannot_be(key: str, values: list[str], tmp_path: Path) -> None:
    for number, value in enumerate(values):
        lines = [line for line in BASE.splitlines() if not line.startswith(key)]
        path = folder(tmp_path / str(number), "\n".join([*lines, f"{key} = {value}"]))
        assert_refused(path, file="campaign.toml", column=key, match="found .*; expected ")


@pytest.mark.parametrize(
    ("line", "key"),
    [
        ("temperature_C = -5", "temperature_C"),
        ("temperature_C = 60", "temperature_C"),
        ("subunits = 1", "subunits"),
        ("subunits = 4.0", "subunits"),
        ("confidence = 0.51", "confidence"),
        ("confidence = 0.999", "confidence"),
        ("replicates = 1000", "replicates"),
        ("replicates = 1000000", "replicates"),
        ("seed = 0", "seed"),
        ("voltage_offset_mV = 0", "voltage_offset_mV"),
        ("reference_voltage_mV = 500", "reference_voltage_mV"),
        ("reference_voltage_mV = -500.0", "reference_voltage_mV"),
    ],
)
def test_values_at_the_edge(line: str, key: str, tmp_path: Path) -> None:
    assert key not in read(folder(tmp_path / "a", BASE + line)).settings.defaulted


@pytest.mark.parametrize("unit", ["kcal/mol", "kJ/mol", "kT", "meV"])
def test_energy_units(unit: str, tmp_path: Path) -> None:
    assert read(folder(tmp_path / "a", f'{BASE}energy_unit = "{unit}"')).settings.energy_unit == unit


@pytest.mark.parametrize(
    ("key", "meant"),
    [
        ("wildtype", "wild_type"),
        ("temperature", "temperature_C"),
        ("Seed", "seed"),
        ("voltage_offset_mv", "voltage_offset_mV"),
        ("reference_voltage", "reference_voltage_mV"),
    ],
)
def test_unknown_keys(key: str, meant: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", f"{BASE}{key} = 1\n")
    assert_refused(
        path, file="campaign.toml", column=key, match=f"unknown key '{key}'.*did you mean {meant}\\?"
    )


@pytest.mark.parametrize("section", ["cycle", "exclude"])
def test_a_misspelt_section_is_read_on(section: str, tmp_path: Path) -> None:
    """So the fault inside it is told in the same run."""
    found = problems(folder(tmp_path / "a", f"{BASE}[[{section}s]]\nname = 3\ncell = 3\n"))
    assert [str(problem.origin) for problem in found[:1]] == [f"campaign.toml, row 3, key {section}s"]
    assert f"did you mean {section}?" in str(found[0])
    assert [problem.origin.row for problem in found[1:]]  # of what stands in the entry


def test_a_misspelt_wild_type_is_told_once_and_hides_nothing(tmp_path: Path) -> None:
    spoilt = changed(curve_rows(), 12, "construct", "WT\u200b")
    found = problems(folder(tmp_path / "a", f'wild_typ = "WT"\nseed = -1\n{CHARGE}', curves=spoilt))
    texts = [str(problem) for problem in found]
    assert len([text for text in texts if "wild" in text]) == 1
    assert "did you mean wild_type?" in texts[0]
    assert any("number -1" in text for text in texts)
    assert any("invisible" in text for text in texts)


def test_a_key_that_resembles_none(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", f"{BASE}amplifier = 1\n")
    assert_refused(path, file="campaign.toml", column="amplifier", match="unknown key.*delete it")


@pytest.mark.parametrize(
    ("table", "column", "match"),
    [
        ("{ value_e0 = 13.0 }", "charge sem_e0", "no sem_e0"),
        ("{ sem_e0 = 0.5 }", "charge value_e0", "no value_e0"),
        (
            "{ value_e0 = 0, sem_e0 = 0.5 }",
            "charge value_e0",
            "number 0; expected a charge per channel above 0",
        ),
        ("{ value_e0 = 101, sem_e0 = 0.5 }", "charge value_e0", "at most 100 e0"),
        ("{ value_e0 = true, sem_e0 = 0.5 }", "charge value_e0", "truth value true"),
        ("{ value_e0 = 13, sem_e0 = -0.5 }", "charge sem_e0", "not negative"),
        ("{ value_e0 = 13, sem_e0 = 0.5, n = 3 }", "charge n", "unknown key 'n'.*delete it"),
        ("{ value_e0 = 13, sem_e0 = 0.5, citation = 3 }", "charge citation", "number 3; expected the source"),
        ('{ value_e0 = 13, sem_e0 = 0.5, citation = " " }', "charge citation", "empty text.*leave it out"),
        ('{ value_e0 = 13, sem_e0 = 0.5, citations = "x" }', "charge citations", "did you mean citation"),
        ("{ value_e0 = 13, sem_e0 = 0.5, sem = 3 }", "charge sem", "did you mean sem_e0"),
    ],
)
def test_stated_charges_that_cannot_be(table: str, column: str, match: str, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", f'wild_type = "WT"\ncharge = {table}\n')
    assert_refused(path, file="campaign.toml", column=column, match=match)


def test_a_misspelt_policy(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", 'wild_type = "WT"\ncharge = "wild_type"\n')
    assert_refused(path, file="campaign.toml", column="charge", match='did you mean "wild-type"')


def test_no_wild_type(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", CHARGE)
    assert_refused(path, file="campaign.toml", column="wild_type", match="no wild type.*add a line")


@pytest.mark.parametrize(
    ("toml", "row"),
    [
        (BASE + "seed = \n", 3),
        (BASE + "seed = −1\n", 3),
        ("wild_type = WT\n" + CHARGE, 1),
        (BASE + "seed = 1,5\n", 3),
        (BASE + "[mutations", 3),
    ],
)
def test_a_line_that_is_no_toml(toml: str, row: int, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", toml)
    assert_refused(path, file="campaign.toml", row=row, match="no TOML")


@pytest.mark.parametrize(
    ("more", "row", "key", "first"),
    [
        ("seed = 4\nfirst = 2\nseed = [\n5]\n", 5, "seed", 3),
        ("[mutations]\nx = []\nx = []\n", 5, "mutations.x", 4),
        ("[mutations]\n[mutations]\n", 4, "mutations", 3),
        ('[[cycle]]\nname = "a"\n[[cycle]]\nname = "b"\nname = "c"\n', 7, "cycle.name", 6),
        ("structure.offset = 1\nstructure.offset = 2\n", 4, "structure.offset", 3),
    ],
)
def test_a_key_that_comes_twice(more: str, row: int, key: str, first: int, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", BASE + more)
    match = f"the key {key} comes twice, first in row {first}; .*delete one of the two"
    assert_refused(path, file="campaign.toml", row=row, column=key, match=match)


@pytest.mark.parametrize(
    ("more", "row"),
    [
        ('title = "a\nseed = 3\n', 3),
        ("# a note\n\ntitle = 'a\nseed = 3\n", 5),
        ('seed = 3\ntitle = """a\n', 4),
        ('title = "a', 3),
    ],
)
def test_a_text_without_its_closing_quote(more: str, row: int, tmp_path: Path) -> None:
    path = folder(tmp_path / "a", BASE + more)
    assert_refused(
        path, file="campaign.toml", row=row, match="a text without its closing quote.*close the quote"
    )


def test_the_tables_are_read_though_the_settings_are_not(tmp_path: Path) -> None:
    found = problems(folder(tmp_path / "a", "wild_type =\n", curves="construct,cell\nWT,c1\n"))
    assert [problem.origin.file for problem in found] == ["campaign.toml", "curves.csv", "curves.csv"]


def test_simultaneous_intervals_are_propagated_ones(tmp_path: Path) -> None:
    path = folder(tmp_path / "a", f'{BASE}interval = "monte-carlo"\nsimultaneous = true\n')
    assert_refused(path, file="campaign.toml", column="simultaneous", match="one of the two")
