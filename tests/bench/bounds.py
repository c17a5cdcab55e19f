"""How much memory and time the largest files take that are still read, and the worst that are refused late.

    python tests/bench/bounds.py

Prints a table; the figures in ``docs/formats.md`` are its. Takes some minutes.
"""

from __future__ import annotations

import math
import sys
import tempfile
import time
import zipfile
from collections.abc import Iterator
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[1]))

from fuzz.peak import refused
from fuzz.readers import READERS, STATED, parts_of

SHEET = "xl/worksheets/sheet2.xml"
HEAD = b'<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetData>'
LABELS = ("WT", "E181A", "R212Q", "E181A/R212Q")
CHARGES = [(v, f"{1 / (1 + math.exp(-(v + 40) / 9)):.6f}") for v in range(-150, 50, 8)]


def points(rows: int) -> Iterator[tuple[str, str, str, str, str]]:
    """Rows of a table of curves: label, cell, batch, voltage, charge."""
    made = 0
    while True:
        cell = f"cell {made // (4 * len(CHARGES))}"
        for label in LABELS:
            for voltage, charge in CHARGES:
                if made == rows:
                    return
                yield label, cell, f"day {len(cell) % 7}", str(voltage), charge
                made += 1


def folder(path: Path, curves: bytes) -> Path:
    """A campaign of these curves."""
    path.mkdir()
    (path / "campaign.toml").write_bytes(STATED)
    (path / "curves.csv").write_bytes(curves)
    return path


def table(rows: int) -> bytes:
    """A table of curves as text."""
    lines = (",".join(row) + "\n" for row in points(rows))
    return b"construct,cell,batch,voltage_mV,charge\n" + "".join(lines).encode()


def workbook(path: Path, pieces: Iterator[bytes], part: str = SHEET) -> Path:
    """The workbook of the fuzzer with one part made of `pieces`."""
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED, compresslevel=1) as archive:
        for name, whole in parts_of(READERS["book"].seeds[1]).items():
            with archive.open(name, "w", force_zip64=True) as file:
                for piece in pieces if name == part else (whole,):
                    file.write(piece)
    return path


def sheet(rows: int) -> Iterator[bytes]:
    """A table of curves as a sheet, texts in the cells."""
    yield HEAD
    names = ("construct", "cell", "batch", "voltage_mV", "charge")
    yield b"<row>" + b"".join(b'<c t="str"><v>%s</v></c>' % name.encode() for name in names) + b"</row>"
    for *texts, voltage, charge in points(rows):
        cells = b"".join(b'<c t="str"><v>%s</v></c>' % text.encode() for text in texts)
        yield b"<row>%s<c><v>%s</v></c><c><v>%s</v></c></row>" % (cells, voltage.encode(), charge.encode())
    yield b"</sheetData></worksheet>"


def repeated(head: bytes, piece: bytes, megabytes: int) -> Iterator[bytes]:
    """One thing again and again."""
    yield head
    for _ in range(megabytes):
        yield piece * (1_000_000 // len(piece))


def main() -> None:
    strings = b'<sst xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main">'
    with tempfile.TemporaryDirectory() as name:
        here = Path(name)
        files = {
            "1000000 rows of curves, text": lambda p: folder(p, table(999_999)),
            "900000 rows, every field at fault": lambda p: folder(p, table(0) + b"a,b,c,d,e\n" * 900_000),
            "900000 rows of two fields": lambda p: folder(p, table(0) + b"a,b\n" * 900_000),
            "100000 constructs": lambda p: folder(
                p, table(0) + b"".join(b"A%dG,c,,%d,0.5\n" % (i, i % 400) for i in range(1, 100_000))
            ),
            "50000 labels that are none": lambda p: folder(
                p, table(1000) + b"".join(b"x%dy,c,,%d,0.5\n" % (i, i % 400) for i in range(1, 4_900))
            ),
            "an open quote of 98 MB": lambda p: folder(p, table(0) + b'"' + b"a" * 98_000_000),
            "98 MB beyond the 16-bit letters": lambda p: folder(
                p, table(0) + "\U0001f600".encode() * 24_500_000
            ),
            "98 MB of letters and accents": lambda p: folder(p, table(0) + "e\u0301".encode() * 32_000_000),
            "1000000 rows of curves, workbook": lambda p: workbook(p.with_suffix(".xlsx"), sheet(999_999)),
            "590 MB of cells": lambda p: workbook(
                p.with_suffix(".xlsx"), repeated(HEAD, b"<row><c><v>1</v></c></row>", 590)
            ),
            "199 MB of texts": lambda p: workbook(
                p.with_suffix(".xlsx"), repeated(strings, b"<si><t>ab</t></si>", 199), "xl/sharedStrings.xml"
            ),
        }
        print(f"{'file':40} {'memory (GB)':>12} {'time (s)':>9}  outcome")
        for number, (what, make) in enumerate(files.items()):
            path = make(here / f"{number}")
            began = time.monotonic()
            said, peak = refused(path)
            took = time.monotonic() - began
            outcome = said.partition("\n")[0][:100] or "read"
            print(f"{what:40} {peak / 1e9:12.2f} {took:9.1f}  {outcome}", flush=True)


if __name__ == "__main__":
    main()
