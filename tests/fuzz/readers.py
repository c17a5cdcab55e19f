"""Every reader under one roof: bytes in, and either a sound campaign, or a refusal that names its place.

Used by the property tests beside it and by `explore.py`. What the bytes may lead to:

- they are read, and then every number of the campaign stands in the file, is finite and possible;
- or they are refused with `DataRefused`, whose every problem names the file, what was found, what was
  expected and what to do, in words that a terminal can show.

Anything else is a fault of the program and comes out as an exception.
"""

from __future__ import annotations

import csv
import io
import json
import math
import re
import tempfile
import tomllib
import zipfile
from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Literal

import numpy as np
import openpyxl

import cornerwise
from cornerwise.campaign import Campaign, MedianSummary
from cornerwise.errors import DataRefused, Origin
from cornerwise.render.problems import print_problems
from cornerwise.result import checksum
from cornerwise.result_reading import read_result

Outcome = Literal["read", "refused"]

LABELS = ("WT", "E181A", "R212Q", "E181A/R212Q")
VOLTAGES = (-120, -100, -80, -60, -40, -20, 0, 20)
CHARGES = (0.0, 0.01, 0.08, 0.31, 0.66, 0.9, 0.98, 1.0)
STATED = b'wild_type = "WT"\ncharge = { value_e0 = 13.0, sem_e0 = 0.5 }\n'
MEASURED = b'wild_type = "WT"\n'


def _lines(rows: list[tuple[object, ...]], delimiter: str = ",") -> bytes:
    return "".join(delimiter.join(map(str, row)) + "\n" for row in rows).encode()


def _points(value: str, values: tuple[float, ...] = CHARGES) -> list[tuple[object, ...]]:
    points = zip(VOLTAGES, values, strict=True)
    body = [(label, "c1", v, q) for v, q in points for label in LABELS]
    return [("construct", "cell", "voltage_mV", value), *body]


def _wide() -> list[tuple[object, ...]]:
    body = [(v, *([q] * len(LABELS))) for v, q in zip(VOLTAGES, CHARGES, strict=True)]
    return [("voltage_mV", *(f"{label}/c1" for label in LABELS)), *body]


CURVES = _lines(_points("charge"))
OPENINGS = _lines(_points("open_probability", tuple(0.001 + 0.8 * q for q in CHARGES)))
MEDIANS = _lines(
    [("construct", "median_mV", "sem_mV", "n"), *((x, -40.5 - i, 1.5, 5) for i, x in enumerate(LABELS))]
)
REPLICATES = _lines(
    [
        ("construct", "cell", "batch", "charge_e0", "method"),
        *((x, f"c{i}", f"day {i}", 12.5 + i / 8, "noise") for x in LABELS for i in (1, 2, 3)),
    ]
)
COUNTED = _lines(
    [
        ("construct", "cell", "charge_pC", "channels", "channels_sem"),
        *((x, f"c{i}", 2.25 + i / 8, 1_200_000, 50_000) for x in LABELS for i in (1, 2)),
    ]
)
SUMMARIES = _lines(
    [
        ("construct", "charge_e0", "sem_e0", "n", "citation"),
        *((x, 12.5, 0.25, "", "J. Invented 1, 2") if x == "WT" else (x, 12.5, 0.25, 4, "") for x in LABELS),
    ]
).replace(b"J. Invented 1, 2", b'"J. Invented 1, 2"')
DISTANCES = _lines(
    [
        ("residue_a", "residue_b", "distance_A", "citation", "definition"),
        ("E181", "Arg212", 3.25, "", "OE1 to NH2"),
        ("K95", "E181", 12.5, "invented", ""),
    ]
)
_FRAGMENT = (
    ("CB", "C", "", "GLU", 181, (0.0, 0.0, -9.5)), ("OE1", "O", "A", "GLU", 181, (0.0, 0.0, 0.0)),
    ("OE1", "O", "B", "GLU", 181, (1.5, 0.0, 0.0)), ("CB", "C", "", "ARG", 212, (12.25, 3.0, 6.0)),
    ("NH2", "N", "", "ARG", 212, (2.0, 3.0, 6.0)), ("O", "O", "", "HOH", 301, (40.0, 41.0, -42.5)),
)  # fmt: skip
_TAGS = (
    "group_PDB", "id", "type_symbol", "label_atom_id", "label_alt_id", "label_comp_id", "auth_asym_id",
    "auth_seq_id", "occupancy", "Cartn_x", "Cartn_y", "Cartn_z", "pdbx_PDB_model_num",
)  # fmt: skip
PDB = "".join(
    [
        "HEADER    INVENTED\n",
        *(
            f"ATOM  {i:5d}  {name:<3s}{letter:1s}{residue} A{number:4d}    {x:8.3f}{y:8.3f}{z:8.3f}"
            f"  1.00 10.00          {element:>2s}\n"
            for i, (name, element, letter, residue, number, (x, y, z)) in enumerate(_FRAGMENT, start=1)
        ),
        "TER\nEND\n",
    ]
).encode()
MMCIF = "".join(
    [
        "data_invented\n_entry.id 'an invented one'\nloop_\n",
        *(f"_atom_site.{tag}\n" for tag in _TAGS),
        *(
            f"ATOM {i} {element} {name} {letter or '.'} {residue} A {number} 1.0 {x} {y} {z} 1\n"
            for i, (name, element, letter, residue, number, (x, y, z)) in enumerate(_FRAGMENT, start=1)
        ),
        "#\n_symmetry.entry_id\n;over\ntwo lines\n;\n",
    ]
).encode()
TOML = b"""title = "An invented channel"  # a note
wild_type = "WT"
temperature_C = 22.5
subunits = 4
energy_unit = "kJ/mol"
confidence = 0.9
replicates = 2000
seed = 7
threshold = 4.5
charge_margin = 0.1
voltage_offset_mV = 2
reference_voltage_mV = -60
charge = { value_e0 = 13.0, sem_e0 = 0.5, citation = "invented" }
interval = "monte-carlo"
adjustment = "benjamini-hochberg"
rank_by = "lower bound"
first = 2

[mutations]
"clone 7" = ["E181A", "R212Q"]

[[cycle]]
name = "the pair"
mutations = ["E181A", "R212Q"]

[[exclude]]
construct = "WT"
cell = "c1"
reason = '''seal lost'''
"""


def _workbook(**sheets: list[tuple[object, ...]]) -> bytes:
    book = openpyxl.Workbook()
    book.remove(book.active)
    for title, rows in sheets.items():
        sheet = book.create_sheet(title)
        for row in rows:
            sheet.append(row)
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def parts_of(data: bytes) -> dict[str, bytes]:
    """The files inside a workbook."""
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        return {name: archive.read(name) for name in archive.namelist()}


def packed(parts: Mapping[str, bytes]) -> bytes:
    """A workbook of these files."""
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_STORED) as archive:
        for name, contents in parts.items():
            archive.writestr(name, contents)
    return stream.getvalue()


_INLINE = re.compile(rb't="inlineStr"><is><t[^>]*>([^<]*)</t></is>')
_STRINGS = "xl/sharedStrings.xml"
_MAIN = b"http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_OFFICE = b"http://schemas.openxmlformats.org/officeDocument/2006/relationships"


def shared(data: bytes) -> bytes:
    """A workbook with the texts of its cells in one list, as spreadsheet programs write it."""
    parts = parts_of(data)
    texts: list[bytes] = []

    def number(match: re.Match[bytes]) -> bytes:
        texts.append(match[1])
        return b't="s"><v>%d</v>' % (len(texts) - 1)

    for name in parts:
        if name.startswith("xl/worksheets/"):
            parts[name] = _INLINE.sub(number, parts[name])
    items = b"".join(b"<si><r><t>%s</t></r><rPh><t>sound</t></rPh></si>" % text for text in texts)
    parts[_STRINGS] = b'<sst xmlns="%s">%s</sst>' % (_MAIN, items)
    link = b'<Relationship Id="rId99" Type="%s/sharedStrings" Target="sharedStrings.xml"/>' % _OFFICE
    name = "xl/_rels/workbook.xml.rels"
    parts[name] = parts[name].replace(b"</Relationships>", link + b"</Relationships>")
    return packed({name: contents for name, contents in parts.items() if "theme" not in name})


KEYS: list[tuple[object, ...]] = [
    ("key", "value"), ("wild_type", "WT"), ("charge.value_e0", 13), ("charge.sem_e0", 0.5), ("first", 2),
]  # fmt: skip
BOOK = _workbook(
    campaign=KEYS,
    curves=_points("charge"),
    cycles=[("name", "mutations"), ("the pair", "E181A/R212Q")],
    mutations=[("construct", "mutations"), ("WT", None)],
    exclude=[("construct", "cell", "reason")],
    notes=[("anything", 1)],
)


MEDIAN_BESIDE = {
    label: MedianSummary(
        construct=label, median_mv=-40.5 - i, sem_mv=1.5, n=5, origin=Origin(file="medians.csv", row=i + 2)
    )
    for i, label in enumerate(LABELS)
}  # where the table of medians is not the one in question


SHEET = _workbook(curves=_points("charge"))


@dataclass(frozen=True, kw_only=True)
class Reader:
    """One kind of file: where it stands in a campaign, and what it looks like when it is whole."""

    file: str
    seeds: tuple[bytes, ...]
    beside: Mapping[str, bytes]  # the other files of the campaign


READERS: Mapping[str, Reader] = {
    "toml": Reader(file="campaign.toml", seeds=(TOML, STATED), beside={"curves.csv": CURVES}),
    "curves": Reader(
        file="curves.csv",
        seeds=(
            CURVES,
            CURVES.replace(b",", b";").replace(b".", b","),
            _lines(_wide()),
            _lines(_wide(), "\t"),
        ),
        beside={"campaign.toml": STATED},
    ),
    "medians": Reader(file="medians.csv", seeds=(MEDIANS,), beside={"campaign.toml": STATED}),
    "charges": Reader(
        file="charges.csv",
        seeds=(REPLICATES, COUNTED, SUMMARIES),
        beside={"campaign.toml": MEASURED, "medians.csv": MEDIANS},
    ),
    "openings": Reader(
        file="openings.csv",
        seeds=(OPENINGS,),
        beside={"campaign.toml": MEASURED, "medians.csv": MEDIANS},
    ),
    "distances": Reader(
        file="distances.csv", seeds=(DISTANCES,), beside={"campaign.toml": STATED, "medians.csv": MEDIANS}
    ),
    "pdb": Reader(
        file="a.pdb",
        seeds=(PDB,),
        beside={"campaign.toml": STATED + b'[structure]\nfile = "a.pdb"\n', "medians.csv": MEDIANS},
    ),
    "mmcif": Reader(
        file="a.cif",
        seeds=(MMCIF,),
        beside={"campaign.toml": STATED + b'[structure]\nfile = "a.cif"\n', "medians.csv": MEDIANS},
    ),
    "sheet": Reader(file="curves.xlsx", seeds=(SHEET, shared(SHEET)), beside={"campaign.toml": STATED}),
    "book": Reader(file="book.xlsx", seeds=(BOOK, shared(BOOK)), beside={}),
}


STRUCTURES = ("pdb", "mmcif")  # read by an optional library


def judge(kind: str, data: bytes, folder: Path) -> Outcome:
    """Read `data` as a file of this kind, in an empty folder of its own.

    Raises
    ------
    AssertionError
        If a number was read that does not stand in the file, or a refusal names no place.
    Exception
        Whatever the reader raises besides `DataRefused`.
    """
    try:
        found = opened(kind, data, folder)
    except DataRefused as refused:
        _check_refusal(refused)
        return "refused"
    _CHECKS.get(kind, _check_table)(data)(found)
    return "read"


def opened(kind: str, data: bytes, folder: Path) -> object:
    """What the reader of this kind makes of `data`; the other files of the campaign are whole."""
    if kind == "result":
        (folder / "result.json").write_bytes(data)
        return read_result(folder / "result.json")
    reader = READERS[kind]
    for name, contents in {**reader.beside, reader.file: data}.items():
        (folder / name).write_bytes(contents)
    return cornerwise.read(folder / reader.file if kind == "book" else folder)


def _check_refusal(refused: DataRefused) -> None:
    assert refused.problems
    assert any(problem.origin.file for problem in refused.problems), refused
    for problem in refused.problems:
        assert all((problem.found, problem.expected, problem.remedy)), problem
    stream = io.StringIO()
    print_problems(DataRefused(refused.problems[:20]), stream)
    assert stream.getvalue().replace("\n", "").isprintable(), ascii(stream.getvalue())
    stream.getvalue().encode("utf-8")


_TOKEN = re.compile(r"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?")


def numbers_in(data: bytes) -> frozenset[float]:
    """Every number that stands in a text, with the comma as a delimiter and as a decimal mark."""
    texts = [data.decode(encoding, "ignore") for encoding in ("utf-8", "cp1252", "utf-16", "utf-16-le",
             "utf-16-be", "utf-32")]  # fmt: skip
    text = "\n".join(texts).replace("\N{MINUS SIGN}", "-")
    pieces = [*re.split(r'[,;\t\n\r"]', text), *re.split(r'[;\t\n\r"]', text.replace(",", "."))]
    return frozenset(float(piece) for piece in map(str.strip, pieces) if _TOKEN.fullmatch(piece))


def _measured(campaign: Campaign) -> Iterator[float]:
    """Every number of a campaign that stands in a table as it is."""
    yield from (one.angstrom for one in campaign.distances if one.atoms == "")
    for construct in campaign.constructs:
        for curve in construct.curves:
            yield from (*curve.voltage_mv, *curve.charge)
            yield from () if curve.holding_mv is None else (curve.holding_mv,)
        for opening in construct.openings:
            yield from (*opening.voltage_mv, *opening.open_probability)
        if construct.median is not None and construct.median != MEDIAN_BESIDE.get(construct.label):
            yield from (construct.median.median_mv, construct.median.sem_mv, construct.median.n)
        for one in construct.charge_summaries:
            yield from (one.charge_e0, one.sem_e0, *(() if one.n is None else (one.n,)))
        for replicate in construct.charge_replicates:
            if replicate.own_uncertainty_e0 is None:
                yield replicate.charge_e0


def _check_sound(campaign: object) -> Campaign:
    assert isinstance(campaign, Campaign)
    assert campaign.cycles
    assert campaign.constructs[0].label == campaign.settings.wild_type
    assert all(np.isfinite(value) for value in _measured(campaign))
    for construct in campaign.constructs:
        for curve in construct.curves:
            assert len(curve.voltage_mv) >= 5
            assert np.all(np.diff(curve.voltage_mv) > 0)
            assert np.all(np.abs(curve.voltage_mv) <= 500)
        assert all(0 < one.charge_e0 <= 100 for one in construct.charge_replicates)
        assert all(np.all((o.open_probability >= 0) & (o.open_probability <= 1)) for o in construct.openings)
    return campaign


def _squeezed(data: bytes) -> bytes:
    """The plain letters of a text, which may be UTF-16 or UTF-32."""
    return data.replace(b"\0", b"")


def _check_table(data: bytes) -> Callable[[object], None]:
    def check(found: object) -> None:
        campaign = _check_sound(found)
        if any(unit in _squeezed(data) for unit in (b"_V", b"_pC", b"_nm")):  # scaled when read
            return
        known = numbers_in(data)
        strange = [value for value in _measured(campaign) if value not in known]
        assert not strange, strange

    return check


def _check_toml(data: bytes) -> Callable[[object], None]:
    def check(found: object) -> None:
        settings = _check_sound(found).settings
        text = data.decode("utf-8-sig", "ignore").replace("\r\n", "\n").replace("\r", "\n")
        try:
            stated = tomllib.loads(text)
        except tomllib.TOMLDecodeError:  # in another encoding
            return
        for key in ("subunits", "confidence", "replicates", "seed", "threshold", "charge_margin", "first"):
            if key in stated:
                assert getattr(settings, key) == stated[key], key

    return check


def _check_book(data: bytes) -> Callable[[object], None]:
    """An independent and more lenient reader must find the same numbers, if it reads the workbook at all."""

    def check(found: object) -> None:
        campaign = _check_sound(found)
        known = _in_workbook(data)
        strange = [value for value in _measured(campaign) if known and value not in known]
        assert not strange, strange

    return check


def _in_workbook(data: bytes) -> frozenset[float]:
    try:
        book = openpyxl.load_workbook(io.BytesIO(data), data_only=True, read_only=True)
        cells = [
            value for sheet in book.worksheets for row in sheet.iter_rows(values_only=True) for value in row
        ]
    except Exception:
        return frozenset()
    texts = [value.strip().replace("\N{MINUS SIGN}", "-") for value in cells if isinstance(value, str)]
    numbers = [value for value in cells if isinstance(value, int | float)]
    return frozenset((*map(float, numbers), *(float(text) for text in texts if _TOKEN.fullmatch(text))))


_DECIMAL = re.compile(rb"[+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)")
_IN_ORDER = b"_atom_site.Cartn_x\n_atom_site.Cartn_y\n_atom_site.Cartn_z"


def _check_structure(data: bytes) -> Callable[[object], None]:
    """Every distance must be one between two places that an independent, careless reader finds."""

    def check(found: object) -> None:
        campaign = _check_sound(found)
        text = _squeezed(data)
        places = [tuple(map(float, three)) for three in _threes(text) if all(map(_DECIMAL.fullmatch, three))]
        for one in campaign.distances:
            assert 1 <= one.angstrom <= 500
            if b"_atom_site" in text and _IN_ORDER not in text:
                continue
            apart = (math.dist(a, b) for i, a in enumerate(places) for b in places[:i])
            assert any(math.isclose(one.angstrom, distance, abs_tol=1e-4) for distance in apart), one

    return check


def _threes(data: bytes) -> Iterator[tuple[bytes, ...]]:
    """Three words side by side, by the columns of a line or by spaces."""
    for line in re.split(rb"[\r\n]", data):
        yield line[30:38].strip(), line[38:46].strip(), line[46:54].strip()
    words = [word.partition(b"(")[0].strip(b"'\"") for word in data.split()]
    yield from zip(words, words[1:], words[2:], strict=False)


def _check_result(data: bytes) -> Callable[[object], None]:
    """What is read of a ``result.json`` must give the same contents when it is written again."""

    def check(found: object) -> None:
        assert isinstance(found, cornerwise.Result)
        written = json.loads(found.to_json())
        assert written == json.loads(data)

    return check


_CHECKS: Mapping[str, Callable[[bytes], Callable[[object], None]]] = {
    "toml": _check_toml, "sheet": _check_book, "book": _check_book, "result": _check_result,
    "pdb": _check_structure, "mmcif": _check_structure,
}  # fmt: skip


def sealed(data: bytes) -> bytes:
    """A ``result.json`` with the checksum its contents call for; `data` itself where it has none."""
    try:
        document = json.loads(data)
        document.pop("checksum", None)
        return json.dumps({**document, "checksum": checksum(document)}).encode()
    except (ValueError, AttributeError, RecursionError, TypeError):
        return data


@cache
def small_result() -> bytes:
    """The ``result.json`` of a small campaign of medians."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        (folder / "campaign.toml").write_bytes(STATED + b"replicates = 1000\n")
        (folder / "medians.csv").write_bytes(MEDIANS)
        return cornerwise.couple(cornerwise.read(folder)).to_json().encode()


def fields_of(data: bytes) -> list[list[str]]:
    """Rows of fields of a text table that is whole."""
    text = data.decode()
    mark = max(",;\t", key=text.split("\n")[0].count)
    rows = [row for row in csv.reader(io.StringIO(text), delimiter=mark) if row]
    return [[field.replace(",", ".") if mark == ";" else field for field in row] for row in rows]
