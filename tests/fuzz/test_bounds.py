"""Files made to exhaust a machine are refused before they do; `bench/bounds.py` reads the largest allowed.

Each is read in a process of its own, whose largest resident memory the system tells.
"""

import re
import zipfile
from pathlib import Path

import pytest

from fuzz.peak import refused
from fuzz.readers import READERS, STATED, parts_of, small_result

PAGE = (Path(__file__).parents[2] / "docs" / "formats.md").read_text(encoding="utf-8")
(GIGABYTES,) = re.findall(r"never takes more than (\d+(?:\.\d+)?) GB of memory", PAGE)
SHEET = "xl/worksheets/sheet1.xml"


def _refused(path: Path, match: str) -> None:
    told, peak = refused(path)
    assert re.search(match, told), told
    assert peak <= float(GIGABYTES) * 1e9


def _campaign(folder: Path, curves: bytes) -> Path:
    (folder / "campaign.toml").write_bytes(STATED)
    (folder / "curves.csv").write_bytes(curves)
    return folder


@pytest.mark.parametrize(
    ("curves", "match"),
    [
        (b"construct,cell\n" + b"a,b\n" * 10_000_000, "10000001 rows; expected at most 1000000 rows"),
        (b"construct" + b",x" * 9_000_000, "9000001 columns; expected at most 16384"),
        ((b"x," * 10_000 + b"\n") * 1_000, "fields; expected at most 8000000"),
        (b"x" * 99_000_000, "a row that cannot be split"),
        (b"x" * 101_000_000, r"101\.0 MB; expected at most 100 MB"),
        (b"construct,cell\n" + b"e" + b"\xcc\x81" * 1_000_000, "a row that cannot be split"),
    ],
    ids=["rows", "columns", "fields", "letters", "bytes", "accents"],
)
def test_tables_without_end(curves: bytes, match: str, tmp_path: Path) -> None:
    _refused(_campaign(tmp_path, curves), match)


@pytest.mark.parametrize(
    ("text", "match"),
    [
        ("a" + ".a" * 400_000 + " = 1", "more than 20 names joined by dots"),
        ("x = [" + "[" * 900_000, "lists too deep"),
        ("x = '" + "x" * 1_000_000 + "'", r"1\.0 MB; expected at most 1 MB"),
    ],
    ids=["dots", "brackets", "bytes"],
)
def test_settings_without_end(text: str, match: str, tmp_path: Path) -> None:
    folder = _campaign(tmp_path, READERS["curves"].seeds[0])
    (folder / "campaign.toml").write_bytes(STATED + text.encode())
    _refused(folder, match)


@pytest.mark.parametrize(
    ("name", "contents", "megabytes", "match"),
    [
        (SHEET, b" ", 700, "sheet1.xml in it unpacks to more than 600 MB"),
        ("xl/styles.xml", b"\n", 50, "styles.xml in it unpacks to more than 16 MB"),
        ("[Content_Types].xml", b" ", 700, ""),  # not needed, so not unpacked
    ],
    ids=["sheet", "styles", "other"],
)
def test_workbooks_that_unpack_a_thousandfold(
    name: str, contents: bytes, megabytes: int, match: str, tmp_path: Path
) -> None:
    path = tmp_path / "book.xlsx"
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        for part, whole in parts_of(READERS["book"].seeds[1]).items():
            with archive.open(part, "w") as file:
                for _ in range(megabytes if part == name else 0):
                    file.write(contents * 1_000_000)
                file.write(whole)
    assert path.stat().st_size * 900 < megabytes * 1_000_000
    if match:
        _refused(path, match)
    else:
        assert refused(path)[0] == ""


def test_a_result_without_end(tmp_path: Path) -> None:
    path = tmp_path / "result.json"
    path.write_bytes(small_result()[:-3] + b", [" + b"0," * 60_000_000)
    _refused(path, "more than 100 MB")


def test_faults_without_end_are_counted(tmp_path: Path) -> None:
    rows = READERS["curves"].seeds[0] + b"WT,c1,x,y\n" * 3_000
    told, _ = refused(_campaign(tmp_path, rows))
    assert told.count("found") == 1001
    assert "curves.csv: found 5000 more such problems" in told
