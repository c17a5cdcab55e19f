"""The published schemas: what the package gives, valid by their standards, and of one mind with the readers.

The libraries jsonschema (JSON Schema, draft 2020-12) and frictionless (Table Schema, version 2.0) are the
referees.
"""

import copy
import csv
import json
import re
import runpy
import tomllib
from pathlib import Path
from typing import Any

import frictionless
import pytest
from builders import campaign, construct
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st
from jsonschema import Draft202012Validator

import cornerwise
from cornerwise.columns import OUTPUT_TABLES
from cornerwise.errors import DataRefused
from cornerwise.intake import exclusions, listed, structure
from cornerwise.intake.files import TABLES as READ_TABLES
from cornerwise.intake.findings import Findings
from cornerwise.intake.settings import KEYS, RULES, SECTIONS, Document, read_settings
from cornerwise.intake.table_schemas import LAYOUTS
from cornerwise.planning.assumed import Assumptions
from cornerwise.planning.plan import plan_assumed
from cornerwise.planning.request import PlanRequest
from cornerwise.render.files import result_files
from cornerwise.render.plan_files import plan_files
from cornerwise.result import Result, checksum
from cornerwise.result_reading import read_result

TOP = Path(__file__).parents[1]
DOCS = TOP / "docs"
STARTER = TOP / "src" / "cornerwise" / "starter_campaign"
CAMPAIGNS = [TOP / "cycles" / "orvane", TOP / "cycles" / "published-medians", STARTER]
SCHEMAS = cornerwise.schemas()
TABLES = [name for name in SCHEMAS if "/" in name]
CAMPAIGN, RESULT = Draft202012Validator(SCHEMAS["campaign"]), Draft202012Validator(SCHEMAS["result"])


@pytest.fixture(scope="module")
def make() -> dict[str, Any]:
    return runpy.run_path(str(DOCS / "make.py"))


def test_those_in_docs_are_those_of_the_package(make: dict[str, Any]) -> None:
    kept = {
        path.relative_to(DOCS / "schemas").as_posix(): path.read_text(encoding="utf-8")
        for path in (DOCS / "schemas").rglob("*")
        if path.is_file()
    }
    assert kept == make["schema_files"](), "run python docs/make.py"


def test_the_page_of_outputs_is_that_of_the_package(make: dict[str, Any]) -> None:
    page = (DOCS / "outputs.md").read_text(encoding="utf-8")
    assert make["outputs_page"](page) == page, "run python docs/make.py"


def test_every_column_that_comes_out_has_its_row() -> None:
    page = (DOCS / "outputs.md").read_text(encoding="utf-8")
    parts = re.findall(r"^## `(\w+)\.csv`\n(.*?)(?=^## |\Z)", page, flags=re.MULTILINE | re.DOTALL)
    rows = {name: re.findall(r"^\| `(\w+)` \|", part, flags=re.MULTILINE) for name, part in parts}
    assert rows == {name: list(table.kind.columns) for name, table in OUTPUT_TABLES.items()}
    for table in OUTPUT_TABLES.values():
        assert set(table.meanings) == set(table.kind.columns)
        assert all(column.meaning for column in table.columns)


@pytest.mark.parametrize("name", ["campaign", "result"])
def test_json_schemas_are_valid(name: str) -> None:
    Draft202012Validator.check_schema(SCHEMAS[name])
    assert SCHEMAS[name]["$id"].startswith("urn:cornerwise")


@pytest.mark.parametrize("name", TABLES)
def test_table_schemas_are_valid(name: str) -> None:
    assert list(frictionless.Schema.metadata_validate(SCHEMAS[name])) == []
    schema = frictionless.Schema.from_descriptor(SCHEMAS[name])
    assert schema.field_names == [field["name"] for field in SCHEMAS[name]["fields"]]
    named = {column for key in ("uniqueKeys", "cornerwise:needsOneOf") for one in SCHEMAS[name].get(key, ())
             for column in one}  # fmt: skip
    assert named | set(schema.primary_key) <= set(schema.field_names)


# campaign.toml


@pytest.mark.parametrize("folder", CAMPAIGNS, ids=lambda path: path.name)
def test_shipped_campaign_files_fit(folder: Path) -> None:
    CAMPAIGN.validate(tomllib.loads((folder / "campaign.toml").read_text(encoding="utf-8")))


def test_every_key_and_every_table_has_its_schema() -> None:
    assert set(SCHEMAS["campaign"]["properties"]) == {*KEYS, *SECTIONS}
    assert {name.partition("_")[0] for name in LAYOUTS} == set(READ_TABLES)


def _is_read(values: dict[str, Any]) -> bool:
    findings = Findings()
    document = Document(values=values, file="campaign.toml").as_meant((*KEYS, *SECTIONS), findings)
    read_settings(document, findings)
    listed.listed_mutations(document, findings)
    listed.cycle_requests(document, findings)
    exclusions.read_exclusions(document, findings)
    if "structure" in document.values:
        structure.structure_request(document, findings)
    return not findings


SOUND = {
    "wild_type": "WT", "title": "", "seed": 3, "subunits": 4.0, "charge": {"value_e0": 13, "sem_e0": 0.5},
    "mutations": {"clone 7": ["E154Q", "R226Q"]},
    "cycle": [{"mutations": ["D171N", "K232Q"]}, {"name": "a bridge", "mutations": ["E154Q", "R226Q"]}],
    "exclude": [{"construct": "WT", "cell": "c1", "reason": "seal lost"}],
    "structure": {"file": "a.cif", "chains": ["A", "B"], "offset": -20, "citation": "a model"},
}  # fmt: skip
PAIR = ["A1C", "D2E"]
SPOILT: list[dict[str, Any]] = [
    {"wild_type": " "}, {"wild_type": None}, {"seed": -1}, {"seed": 1.5}, {"subunits": True},
    {"colour": "red"}, {"charge": "shared"}, {"charge": 13.0}, {"charge": {"value_e0": 13}},
    {"charge": {"value_e0": 0, "sem_e0": 1}}, {"charge": {"value_e0": 13, "sem_e0": 1, "n": 4}},
    {"charge": {"value_e0": 13, "sem_e0": 1, "citation": ""}}, {"mutations": ["E154Q"]},
    {"mutations": {"clone 7": "E154Q"}}, {"mutations": {"a": [1]}}, {"mutations": {"a": [" "]}},
    {"mutations": {"a": ["E154Q\u200b"]}}, {"cycle": {"mutations": PAIR}}, {"cycle": [{"name": "none"}]},
    {"cycle": [{"mutations": PAIR[:1]}]}, {"cycle": ["E154Q/R226Q"]},
    {"cycle": [{"mutations": PAIR, "name": ""}]}, {"cycle": [{"mutations": PAIR, "seed": 1}]},
    {"exclude": {"construct": "WT"}}, {"exclude": [{"construct": "WT", "cell": "c1"}]},
    {"exclude": [{"construct": "WT", "cell": "c1", "reason": "a\nb"}]},
    {"exclude": [{"construct": "WT", "cell": 1, "reason": "a"}]},
    {"structure": "a.cif"}, {"structure": {"chains": ["A"]}}, {"structure": {"file": ""}},
    {"structure": {"file": "a.cif", "chains": "A"}}, {"structure": {"file": "a.cif", "chains": []}},
    {"structure": {"file": "a.cif", "offset": 1.5}}, {"structure": {"file": "a.cif", "offset": 100_001}},
    {"structure": {"file": "a.cif", "model": 1}}, {"structure": {"file": "a.cif", "citation": ""}},
]  # fmt: skip


def test_a_sound_campaign_file_is_read_and_fits() -> None:
    assert _is_read(SOUND)
    CAMPAIGN.validate(SOUND)


@pytest.mark.parametrize("spoilt", SPOILT, ids=str)
def test_a_spoilt_campaign_file_is_refused_by_both(spoilt: dict[str, Any]) -> None:
    document = {**SOUND, **spoilt}
    assert not _is_read(document)
    assert not CAMPAIGN.is_valid(document)


def test_defaults_are_those_in_force() -> None:
    stated = {
        key: part["default"] for key, part in SCHEMAS["campaign"]["properties"].items() if "default" in part
    }
    assert _is_read({"wild_type": "WT", **stated})
    read = read_settings(Document(values={"wild_type": "WT", **stated}, file=""), Findings())
    plain = read_settings(Document(values={"wild_type": "WT"}, file=""), Findings())
    assert read is not None
    assert plain is not None
    for rule in RULES:
        assert getattr(read, rule.attribute) == getattr(plain, rule.attribute)
    assert read.charge == plain.charge


LEAVES = (
    st.none() | st.booleans() | st.integers(-3, 2000) | st.floats(-600, 600).filter(lambda x: x != int(x))
    | st.sampled_from(["", "WT", "E154Q", "R226Q", "kT", "measured", "a\nb", "p.(Arg2Gln)"])
)  # fmt: skip
ANYTHING = st.recursive(
    LEAVES,
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.sampled_from(
        ["name", "mutations", "construct", "cell", "reason", "value_e0", "sem_e0", "file",
         "chains", "offset", "x"]), inner, max_size=3),
    max_leaves=6,
)  # fmt: skip


@given(
    document=st.dictionaries(st.sampled_from([*KEYS, *SECTIONS, "other"]), ANYTHING, max_size=5),
    wild_type=st.sampled_from(["WT", "E154Q"]),
)
@settings(max_examples=300, deadline=None)
def test_whatever_is_read_fits(document: dict[str, Any], wild_type: str) -> None:
    document = {"wild_type": wild_type, **document}
    if _is_read(document):
        CAMPAIGN.validate(document)
    elif not {"mutations", "cycle", "exclude", "structure"} & document.keys():
        assert not CAMPAIGN.is_valid(document)  # beside the tables, no two values are compared


# result.json


@pytest.fixture(scope="module")
def triple() -> Result:
    energies = {"WT": -40, "E1A": -30, "R2Q": -35, "K3L": -20, "E1A/R2Q": -10, "E1A/K3L": -5, "R2Q/K3L": 0,
                "E1A/R2Q/K3L": 9}  # fmt: skip
    made = [construct(label, [v - 3, v, v + 4, v + 1], [12.0, 13.5, 13.0]) for label, v in energies.items()]
    return cornerwise.couple(campaign(made, subunits=4))


@pytest.fixture(scope="module")
def shipped() -> list[Result]:
    return [cornerwise.couple(cornerwise.read(folder)) for folder in CAMPAIGNS]


def test_results_fit(shipped: list[Result], triple: Result) -> None:
    for result in (*shipped, triple):
        RESULT.validate(json.loads(result.to_json()))


@pytest.fixture(scope="module")
def small(triple: Result) -> dict[str, Any]:
    """A whole result with the last rows of each kind and the first points of each curve."""
    document: dict[str, Any] = _cut(json.loads(triple.to_json()))
    for name in ("interactions", "constructs", "cells", "budget", "backgrounds", "flags"):
        assert document[name]
        document[name] = document[name][-1:]
    del document["checksum"]
    return document


def _cut(value: Any) -> Any:
    if isinstance(value, dict):
        return {key: _cut(one) for key, one in value.items()}
    if isinstance(value, list):
        return value[:2] if value and isinstance(value[0], float) else [_cut(one) for one in value]
    return value


def _places(value: object, way: tuple[Any, ...] = ()) -> list[tuple[Any, ...]]:
    inner = value.items() if isinstance(value, dict) else enumerate(value) if isinstance(value, list) else ()
    return [way, *(place for key, one in inner for place in _places(one, (*way, key)))]


def _plain_text(value: object) -> bool:
    """Whether every text can be printed and every whole number has at most 63 bits, which no schema says."""
    if isinstance(value, dict):
        return all(map(_plain_text, (*value.keys(), *value.values())))
    if isinstance(value, list):
        return all(map(_plain_text, value))
    return value.isprintable() if isinstance(value, str) else not isinstance(value, int) or abs(value) < 2**63


def _comes_back(document: dict[str, Any], folder: Path) -> bool:
    path = folder / "result.json"
    path.write_text(json.dumps(document | {"checksum": checksum(document)}), encoding="utf-8")
    try:
        read_result(path)
    except DataRefused as refused:
        # A corner that is no construct is no matter of types.
        return "expected one of the constructs" in str(refused)
    return True


@given(data=st.data())
@settings(max_examples=250, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_a_changed_result_is_refused_by_both_or_neither(
    small: dict[str, Any], tmp_path: Path, data: st.DataObject
) -> None:
    changed = copy.deepcopy(small)
    *way, last = data.draw(st.sampled_from(_places(small)[1:]))
    place: Any = changed
    for step in way:
        place = place[step]
    action = data.draw(st.sampled_from(["replace", "replace", "delete", "add"]))
    if action == "replace":
        place[last] = data.draw(LEAVES | ANYTHING)
    elif action == "delete":
        del place[last]
    elif isinstance(place, dict):
        place["further"] = data.draw(LEAVES)
    else:
        place.append(data.draw(LEAVES))
    assume(_plain_text(changed))
    fits = RESULT.is_valid(changed | {"checksum": "0" * 64})
    assert fits == _comes_back(changed, tmp_path)


@pytest.mark.parametrize("value", ["4", True, 4.5, None])
def test_a_spoilt_result_is_refused_by_both(small: dict[str, Any], tmp_path: Path, value: object) -> None:
    spoilt = small | {"settings": small["settings"] | {"subunits": value}}
    assert not RESULT.is_valid(spoilt | {"checksum": "0" * 64})
    assert not _comes_back(spoilt, tmp_path)


# Tables


RESOURCE = "https://datapackage.org/profiles/2.0/dataresource.json"  # says which version of the standard


def _faults(path: Path, name: str) -> list[Any]:
    """Row, column and kind of every fault that the referee finds in a table."""
    descriptor = {"$schema": RESOURCE, "name": "table", "path": path.name, "schema": SCHEMAS[name]}
    resource = frictionless.Resource.from_descriptor(descriptor, basepath=str(path.parent))
    return resource.validate().flatten(["rowNumber", "fieldName", "type"])


def test_tables_that_come_out_fit(shipped: list[Result], triple: Result, tmp_path: Path) -> None:
    seen = set()
    assumed = Assumptions(median_mv=(-40.0,), median_sd_mv=(2.5,), charge_e0=(13.0,), charge_sd_e0=(0.6,))
    asked = PlanRequest(cells=(4, 8), half_width=1.0, recordings=60)
    for files in (*map(result_files, (*shipped, triple)), plan_files(plan_assumed(assumed, asked))):
        for name, text in files.items():
            if name.endswith(".csv"):
                (tmp_path / name).write_text(str(text), encoding="utf-8")
                seen.add(name)
                assert _faults(tmp_path / name, f"output/{name.removesuffix('.csv')}") == []
    assert seen == {f"{name}.csv" for name in OUTPUT_TABLES}


READ = [
    (TOP / "cycles" / "orvane", "curves.csv", "curves"),
    (TOP / "cycles" / "orvane", "charges.csv", "charges_of_cells"),
    (TOP / "cycles" / "published-medians", "medians.csv", "medians"),
    (STARTER, "curves.csv", "curves"),
    (STARTER, "charges.csv", "charges_of_cells"),
]


@pytest.mark.parametrize(("folder", "file", "name"), READ, ids=lambda value: str(value)[-24:])
def test_shipped_tables_fit(folder: Path, file: str, name: str) -> None:
    assert _faults(folder / file, f"input/{name}") == []


CURVES = [
    ["WT", "c1", str(v), str(q)] for v, q in zip(range(-80, 21, 20), (0, 1, 12, 60, 95, 99), strict=True)
]
TABLES_READ = {
    "curves": (["construct", "cell", "voltage_mV", "charge_pC", "holding_mV", "phase"],
               [[*row, "-90", "on"] for row in CURVES]),
    "medians": (["construct", "median_mV", "sem_mV", "n"],
                [["WT", "-40", "1.5", "4"], ["E1A", "-30", "2", "3"]]),
    "charges_of_cells": (["construct", "cell", "charge_fC", "channels", "channels_sem"],
                         [["WT", "c1", "2", "1000", "50"], ["WT", "c2", "2.1", "1000", ""]]),
    "charges_of_constructs": (["construct", "charge_e0", "sem_e0", "n", "method", "citation"],
                              [["WT", "13", "0.5", "4", "", ""],
                               ["WT", "12", "0.5", "", "noise", "an invented table"]]),
    "openings": (["construct", "cell", "voltage_mV", "open_probability"],
                 [["WT", "c1", str(-80 + 10 * i), str(1e-5 * 5.0**i)] for i in range(6)]),
    "distances": (["residue_a", "residue_b", "distance_A", "citation", "definition"],
                  [["D171", "K232", "3.1", "", "OD1 to NZ"], ["Glu154", "R226", "7", "a model", ""]]),
}  # fmt: skip


def _refused(folder: Path, name: str) -> list[tuple[int | None, str | None]]:
    """Row and column of every fault of a table, as the intake tells them."""
    base = name.partition("_")[0]
    (folder / "campaign.toml").write_text('wild_type = "WT"\n', encoding="utf-8")
    if base not in ("curves", "medians"):
        lines = "\n".join(",".join(row) for row in (["construct", "cell", "voltage_mV", "charge"], *CURVES))
        (folder / "curves.csv").write_text(lines, encoding="utf-8")
    try:
        cornerwise.read(folder)
    except DataRefused as refused:
        return [(one.origin.row, one.origin.column) for one in refused.problems
                if one.origin.file == f"{base}.csv"]  # fmt: skip
    return []


def _written(folder: Path, name: str, header: list[str], rows: list[list[str]]) -> Path:
    folder.mkdir(exist_ok=True)
    path = folder / f"{name.partition('_')[0]}.csv"
    with path.open("w", encoding="utf-8", newline="") as stream:
        csv.writer(stream).writerows([header, *rows])
    return path


@pytest.mark.parametrize("name", TABLES_READ)
def test_a_sound_table_is_read_and_fits(name: str, tmp_path: Path) -> None:
    path = _written(tmp_path / "a", name, *TABLES_READ[name])
    assert _faults(path, f"input/{name}") == []
    assert _refused(tmp_path / "a", name) == []


@pytest.mark.parametrize(
    ("name", "column", "value"),
    [
        ("curves", "construct", ""), ("curves", "cell", ""), ("curves", "voltage_mV", "501"),
        ("curves", "voltage_mV", "-500.1"), ("curves", "charge_pC", "x"), ("curves", "holding_mV", "-501"),
        ("curves", "phase", "up"), ("medians", "median_mV", "500.5"), ("medians", "median_mV", ""),
        ("medians", "sem_mV", "-0.1"), ("medians", "n", "1"), ("medians", "n", "2.5"), ("medians", "n", ""),
        ("charges_of_cells", "charge_fC", "-1"), ("charges_of_cells", "charge_fC", "0"),
        ("charges_of_cells", "channels", "0.5"), ("charges_of_cells", "channels_sem", "-1"),
        ("charges_of_constructs", "charge_e0", "0"), ("charges_of_constructs", "charge_e0", "100.5"),
        ("charges_of_constructs", "sem_e0", "-1"), ("charges_of_constructs", "n", "1"),
        ("openings", "open_probability", "1.1"), ("openings", "open_probability", "-0.1"),
        ("openings", "voltage_mV", "600"), ("distances", "residue_a", ""),
        ("distances", "distance_A", "0.31"), ("distances", "distance_A", "500.5"),
    ],
)  # fmt: skip
def test_a_spoilt_table_is_refused_by_both(name: str, column: str, value: str, tmp_path: Path) -> None:
    header, rows = copy.deepcopy(TABLES_READ[name])
    rows[0][header.index(column)] = value
    path = _written(tmp_path / "a", name, header, rows)
    assert [(row, field) for row, field, _ in _faults(path, f"input/{name}")] == [(2, column)]
    assert (2, column) in _refused(tmp_path / "a", name)


@pytest.mark.parametrize("name", TABLES_READ)
def test_an_unknown_column_is_refused_by_both(name: str, tmp_path: Path) -> None:
    header, rows = TABLES_READ[name]
    path = _written(tmp_path / "a", name, [*header, "remark"], [[*row, ""] for row in rows])
    assert [kind for *_, kind in _faults(path, f"input/{name}")] == ["extra-label"]
    assert _refused(tmp_path / "a", name) == [(1, "remark")]


@pytest.mark.parametrize("name", TABLES_READ)
def test_rows_of_one_key_are_refused(name: str, tmp_path: Path) -> None:
    header, rows = TABLES_READ[name]
    schema = SCHEMAS[f"input/{name}"]
    keys = [schema["primaryKey"]] if "primaryKey" in schema else schema["uniqueKeys"]
    assert any(set(key) - {"method"} <= set(header) for key in keys)
    path = _written(tmp_path / "a", name, header, [*rows, rows[0]])
    assert len(_refused(tmp_path / "a", name)) == 1
    if "primaryKey" in schema:
        assert [kind for *_, kind in _faults(path, f"input/{name}")] == ["primary-key"]


@pytest.mark.parametrize("name", TABLES_READ)
def test_of_columns_that_stand_for_one_another_one_is_needed(name: str, tmp_path: Path) -> None:
    header, rows = TABLES_READ[name]
    groups = SCHEMAS[f"input/{name}"].get("cornerwise:needsOneOf", [])
    required = [[field["name"]] for field in SCHEMAS[f"input/{name}"]["fields"]
                if field.get("constraints", {}).get("required")]  # fmt: skip
    for number, group in enumerate([*groups, *required]):
        kept = [place for place, column in enumerate(header) if column not in group]
        folder = tmp_path / str(number)
        path = _written(folder, name, [header[i] for i in kept], [[row[i] for i in kept] for row in rows])
        assert _refused(folder, name) != []
        assert (len(group) == 1) == ("missing-label" in [kind for *_, kind in _faults(path, f"input/{name}")])


@pytest.mark.parametrize("name", ["curves", "openings"])
def test_the_wide_layout_is_described(name: str, tmp_path: Path) -> None:
    wide = SCHEMAS[f"input/{name}"]["cornerwise:wide"]
    assert [field["name"] for field in wide["fields"]] == ["voltage_mV", "voltage_V"]
    for header in ("WT/c1", "E1A/R2Q/c1", "p.(Arg2Gln)/the first"):
        assert re.fullmatch(wide["cellHeader"], header)
    for header in ("WT", "/c1", "WT/", "voltage_mV"):
        assert not re.fullmatch(wide["cellHeader"], header)
    value = next(field for field in SCHEMAS[f"input/{name}"]["fields"] if field["name"] in
                 ("charge", "open_probability"))  # fmt: skip
    assert wide["cells"]["type"] == value["type"]
    assert wide["cells"]["constraints"] == {"required": True, **value.get("constraints", {})}
