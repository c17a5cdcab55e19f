"""The README shows what the program prints, and its commands can be found by CI."""

import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import cornerwise

TOP = Path(__file__).parents[1]
TEXT = (TOP / "README.md").read_text(encoding="utf-8")


def test_the_table_is_the_one_that_is_printed() -> None:
    (shown,) = re.findall(r"The first prints.*?```text\n(.*?)```", TEXT, flags=re.DOTALL)
    environment = {**os.environ, "PYTHONIOENCODING": "utf-8"}
    done = subprocess.run(
        [sys.executable, "-m", "cornerwise", "couple", str(TOP / "cycles" / "orvane")],
        capture_output=True, text=True, encoding="utf-8", env=environment, check=True,
    )  # fmt: skip
    printed, _ = done.stdout.split("\nFlags\n")
    assert shown == printed


def test_the_python_of_the_page_runs(tmp_path: Path) -> None:
    (block,) = re.findall(r"```python\n(.*?)```", TEXT, flags=re.DOTALL)
    shutil.copytree(TOP / "cycles", tmp_path / "cycles")
    done = subprocess.run(
        [sys.executable, "-c", block], cwd=tmp_path, capture_output=True, text=True, check=False, timeout=300
    )
    assert done.returncode == 0, done.stderr
    assert "D171N/K232Q" in done.stdout
    assert (tmp_path / "results" / "tables" / "couplings.docx").exists()


def test_two_commands_are_marked() -> None:
    commands = re.findall(r"<!-- command -->\n```sh\n(.*?)```", TEXT, flags=re.DOTALL)
    assert len(commands) == 2
    assert "cornerwise couple cycles/orvane" in commands[0]
    assert "pytest" in commands[1]


def test_job_and_caution_come_first() -> None:
    first = TEXT.split("##")[0]
    for words in (
        "interaction (coupling) energy",
        "not for clinical variant interpretation",
        "no proof of a contact",
    ):
        assert words in " ".join(first.split())


def test_every_file_that_is_named_exists() -> None:
    named = set(re.findall(r"`((?:docs|cycles|examples|tests)/[\w./-]+)`", TEXT))
    assert named
    assert [name for name in sorted(named) if not (TOP / name).exists()] == []


def test_the_files_of_out_are_the_ones_that_are_written() -> None:
    part = TEXT.split("## What comes out")[1].split("In the tables value")[0]
    rows = [line.split("|")[1] for line in part.splitlines() if line.startswith("| `")]
    stems = [name for first in rows for name in re.findall(r"`([\w/.]+)`", first)]
    endings = re.findall(r"`(\.\w+)`", part)
    named = {stem for stem in stems if "." in stem}
    named |= {f"{stem}{ending}" for stem in stems if re.search(r"/\w+$", stem) for ending in endings}
    result = cornerwise.couple(cornerwise.read(TOP / "cycles" / "orvane"))
    assert named == set(cornerwise.output_files(result))
