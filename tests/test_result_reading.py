"""result.json comes back as it was written, or is refused with the place."""

import json
import re
from pathlib import Path

import pytest

import cornerwise
from cornerwise.errors import DataRefused
from cornerwise.result import Result, checksum
from cornerwise.result_reading import read_result

CYCLES = Path(__file__).parents[1] / "cycles"


@pytest.fixture(scope="module", params=["orvane", "published-medians"])
def result(request: pytest.FixtureRequest) -> Result:
    return cornerwise.couple(cornerwise.read(CYCLES / request.param))


@pytest.fixture(scope="module")
def published() -> str:
    return cornerwise.couple(cornerwise.read(CYCLES / "published-medians")).to_json()


def _saved(folder: Path, text: str) -> Path:
    path = folder / "result.json"
    path.write_text(text, encoding="utf-8")
    return path


def _edited(text: str, edit: str, value: object) -> str:
    """Another value at a dotted path, with a checksum that fits again."""
    document = json.loads(text)
    del document["checksum"]
    *way, last = (int(step) if step.isdigit() else step for step in edit.split("."))
    place = document
    for step in way:
        place = place[step]
    if value is KeyError:
        del place[last]
    else:
        place[last] = value
    document["checksum"] = checksum(document)
    return json.dumps(document)


def test_what_was_written_comes_back(result: Result, tmp_path: Path) -> None:
    again = read_result(_saved(tmp_path, result.to_json()))
    assert again.to_json() == result.to_json()
    assert again.settings == result.settings
    assert list(again.interactions) == list(result.interactions)
    assert again.constructs[0].curve == result.constructs[0].curve


@pytest.mark.parametrize("part", [0.0, 0.1, 0.5, 0.999])
def test_a_file_cut_short_is_refused(published: str, tmp_path: Path, part: float) -> None:
    with pytest.raises(DataRefused, match="no JSON from line"):
        read_result(_saved(tmp_path, published[: int(part * len(published))]))


def test_a_single_edited_digit_is_refused(published: str, tmp_path: Path) -> None:
    edited = published.replace('"interaction": 2.0', '"interaction": 3.0', 1)
    assert edited != published
    with pytest.raises(DataRefused, match="do not match their checksum"):
        read_result(_saved(tmp_path, edited))


@pytest.mark.parametrize(
    ("edit", "value", "place"),
    [
        ("schema", "cornerwise-result/0", "schema 'cornerwise-result/0'"),
        ("interactions.0.low", "much", "interactions 1 low"),
        ("interactions.0.order", 2.5, "interactions 1 order"),
        ("interactions.0.order", True, "interactions 1 order"),
        ("interactions.0.shortcut_verdict", "fine", "interactions 1 shortcut_verdict"),
        ("interactions.0.dof", KeyError, "interactions 1 dof"),
        ("interactions.0.extra", 1, "interactions 1 extra"),
        ("interactions.0.corners", [["V478W"]], "interactions 1 corners"),
        ("interactions.0.corners", 3, "interactions 1 corners"),
        ("interactions.0.corners", [["nobody", 1]], "corner 'nobody'"),
        ("constructs.1", None, "constructs 2"),
        ("settings.energy_unit", "eV", "settings energy_unit"),
        ("flags.0.code", "odd", "flags 1 code"),
        ("versions", [], "versions"),
        ("notes", [1], "notes 1"),
        ("cells", KeyError, "cells"),
    ],
)
def test_what_does_not_fit_is_refused(
    published: str, tmp_path: Path, edit: str, value: object, place: str
) -> None:
    pattern = f"{re.escape(str(tmp_path / 'result.json'))}.*{re.escape(place)}"
    with pytest.raises(DataRefused, match=pattern):
        read_result(_saved(tmp_path, _edited(published, edit, value)))


@pytest.mark.parametrize(
    ("text", "found"),
    [
        ("[]", "no schema"),
        ("{}", "no schema"),
        ('{"schema": NaN}', "NaN"),
        ("[" * 100_000, "never writes"),
        ("1" * 5_000, "never writes"),
    ],
)
def test_other_json_is_refused(tmp_path: Path, text: str, found: str) -> None:
    with pytest.raises(DataRefused, match=found):
        read_result(_saved(tmp_path, text))


def test_no_file_is_refused(tmp_path: Path) -> None:
    with pytest.raises(DataRefused, match="no readable file"):
        read_result(tmp_path / "none.json")
