"""Whatever the bytes: the right campaign, or a refusal that names its place; see `readers`."""

import json
from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from structure_library import needs_gemmi

import cornerwise
from cornerwise.errors import DataRefused
from fuzz import readers
from intake.writing import content, mingled

KINDS = [
    pytest.param(kind, marks=needs_gemmi if kind in readers.STRUCTURES else ())
    for kind in (*readers.READERS, "result")
]
TABLES = ("curves", "medians", "charges", "openings", "distances")

_often = settings(max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
_damage = st.lists(
    st.tuples(st.floats(0, 1), st.integers(0, 30), st.binary(max_size=8)), min_size=1, max_size=4
)  # where, how many bytes are taken away, what is put there


def _damaged(data: bytes, damage: list[tuple[float, int, bytes]]) -> bytes:
    for where, taken, put in damage:
        at = int(where * len(data))
        data = data[:at] + put + data[at + taken :]
    return data


def _whole(kind: str) -> tuple[bytes, ...]:
    return (readers.small_result(),) if kind == "result" else readers.READERS[kind].seeds


@pytest.mark.parametrize("kind", KINDS)
def test_whole_files_are_read(kind: str, tmp_path: Path) -> None:
    outcomes = [readers.judge(kind, seed, tmp_path) for seed in _whole(kind)]
    if kind == "toml":  # the first excludes the only cell of the wild type and lists what has no data
        assert outcomes.pop(0) == "refused"
    assert set(outcomes) == {"read"}


@pytest.mark.parametrize("kind", KINDS)
@_often
@given(data=st.binary(max_size=200))
def test_any_bytes(kind: str, data: bytes, tmp_path: Path) -> None:
    assert readers.judge(kind, data, tmp_path) == "refused"


@pytest.mark.parametrize("kind", KINDS)
@_often
@given(damage=_damage, data=st.data())
def test_damaged_files(
    kind: str, damage: list[tuple[float, int, bytes]], data: st.DataObject, tmp_path: Path
) -> None:
    seed = data.draw(st.sampled_from(_whole(kind)))
    readers.judge(kind, _damaged(seed, damage), tmp_path)


@pytest.mark.parametrize("kind", ["sheet", "book"])
@_often
@given(damage=_damage, data=st.data())
def test_workbooks_damaged_inside(
    kind: str, damage: list[tuple[float, int, bytes]], data: st.DataObject, tmp_path: Path
) -> None:
    parts = readers.parts_of(readers.READERS[kind].seeds[0])
    name = data.draw(st.sampled_from(sorted(parts)))
    readers.judge(kind, readers.packed({**parts, name: _damaged(parts[name], damage)}), tmp_path)


@_often
@given(damage=_damage)
def test_results_damaged_and_sealed_again(damage: list[tuple[float, int, bytes]], tmp_path: Path) -> None:
    readers.judge("result", readers.sealed(_damaged(readers.small_result(), damage)), tmp_path)


_texts = st.text(max_size=6) | st.sampled_from(
    ["", "nan", "1e999", "−40", "0,5", "WT", "#N/A", "E181A", "x" * 2000]
)


@pytest.mark.parametrize("kind", TABLES)
@_often
@given(data=st.data())
def test_a_field_of_any_text(kind: str, data: st.DataObject, tmp_path: Path) -> None:
    lines = data.draw(st.sampled_from(_whole(kind))).decode().split("\n")
    mark = max(",;\t", key=lines[0].count)
    row = data.draw(st.integers(0, len(lines) - 2))
    fields = lines[row].split(mark)
    fields[data.draw(st.integers(0, len(fields) - 1))] = data.draw(_texts)
    lines[row] = mark.join(fields)
    readers.judge(kind, "\n".join(lines).encode("utf-8", "replace"), tmp_path)


@st.composite
def rewritings(draw: st.DrawFn) -> Callable[[bytes], bytes]:
    """The same table written otherwise: nothing of it may be read differently."""
    mark = draw(st.sampled_from(",;\t"))
    comma = mark == ";" and draw(st.booleans())
    encoding = draw(
        st.sampled_from(["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be", "utf-32", "cp1252"])
    )
    end = draw(st.sampled_from(["\n", "\r\n", "\r"]))
    quoted = draw(st.booleans())
    noise = draw(st.lists(st.sampled_from(["", "# a note", "  ", mark * 2]), max_size=4))
    order = draw(st.randoms(use_true_random=False))
    minus = draw(st.sampled_from("-−")) if encoding != "cp1252" else "-"

    def field(text: str) -> str:
        text = text.replace("-", minus, 1) if text.startswith("-") else text
        text = text.replace(".", ",") if comma and text.replace(".", "").lstrip("-−").isdigit() else text
        return f' "{text}"'.strip() if quoted or mark in text else text

    def rewrite(data: bytes) -> bytes:
        header, *rows = readers.fields_of(data)
        order.shuffle(shuffled := list(rows))
        rows = mingled(rows, shuffled) if "construct" in header else rows
        lines = [mark.join(map(field, row)) for row in (header, *rows)]
        for line in noise:
            lines.insert(order.randrange(len(lines)), line)
        return end.join([*lines, ""]).encode(encoding)

    return rewrite


@pytest.mark.parametrize("kind", TABLES)
@_often
@given(rewrite=rewritings(), data=st.data())
def test_a_table_written_otherwise_says_the_same(
    kind: str, rewrite: Callable[[bytes], bytes], data: st.DataObject, tmp_path: Path
) -> None:
    reader = readers.READERS[kind]
    seed = data.draw(st.sampled_from(reader.seeds))
    for name, contents in reader.beside.items():
        (tmp_path / name).write_bytes(contents)
    said = []
    for contents in (seed, rewrite(seed)):
        (tmp_path / reader.file).write_bytes(contents)
        said.append(content(cornerwise.read(tmp_path)))
    assert said[0] == said[1]


@_often
@given(
    value=st.recursive(
        st.none() | st.booleans() | st.integers() | st.floats(allow_nan=False) | st.text(max_size=5),
        lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=5), inner, max_size=3),
        max_leaves=6,
    ),
    data=st.data(),
)
def test_any_value_in_any_place_of_a_result(value: object, data: st.DataObject, tmp_path: Path) -> None:
    document = json.loads(readers.small_result())
    place = document
    while True:
        key = data.draw(st.sampled_from(sorted(place) if isinstance(place, dict) else range(len(place))))
        if not isinstance(place[key], dict | list) or not place[key] or data.draw(st.booleans()):
            break
        place = place[key]
    place[key] = value
    readers.judge("result", readers.sealed(json.dumps(document).encode()), tmp_path)


@pytest.mark.parametrize(
    "text",
    [
        "seed = 1" + "0" * 5000,
        "seed = 0x" + "f" * 6000,
        "threshold = 1" + "0" * 400,
        "title = " + "[" * 5000,
        "a" + ".a" * 5000 + " = 1",
        "first = " + "9" * 30,
        'title = "\\u001b[31m"',
        'title = "two\\nlines"',
        "confidence = nan",
        "threshold = inf",
        "seed = 1979-05-27",
        "charge = { value_e0 = 1_3.0, sem_e0 = 1e400 }",
    ],
)
def test_tricks_in_the_settings(text: str, tmp_path: Path) -> None:
    assert readers.judge("toml", b'wild_type = "WT"\n' + text.encode() + b"\n", tmp_path) == "refused"


def test_a_refusal_names_file_row_and_column(tmp_path: Path) -> None:
    (tmp_path / "campaign.toml").write_bytes(readers.STATED)
    (tmp_path / "curves.csv").write_bytes(readers.CURVES.replace(b"0.31", b"0.3l", 1))
    with pytest.raises(DataRefused, match=r"curves\.csv, row 14, column charge: found '0\.3l'"):
        cornerwise.read(tmp_path)
