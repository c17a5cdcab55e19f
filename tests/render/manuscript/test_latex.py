"""The LaTeX documents compile as they stand and print every label."""

import os
import re
import shutil
import subprocess
from pathlib import Path

import pytest
from manuscript_example import hostile_tables_campaign

import cornerwise
from cornerwise.render.manuscript.files import manuscript_tables
from cornerwise.render.manuscript.latex import escaped, latex_text
from cornerwise.render.manuscript.options import TableOptions

CYCLES = Path(__file__).parents[3] / "cycles"
MISSING = None if shutil.which("pdflatex") else "no pdflatex on the path"
_RANGES = (range(32, 127), range(0xA0, 0x180), range(0x391, 0x3CA), (0x212B, 0x2126, 0x4E2D))
STRANGE = "".join(chr(code) for codes in _RANGES for code in codes)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("50 %_x", r"50 \%\_x"),
        ("−1.5 ± 0.2", r"\ensuremath{-}1.5 \ensuremath{\pm} 0.2"),
        ("Å", r"\AA{}"),
        ("\u212b", r"\AA{}"),
        ("Δ", r"\ensuremath{\Delta}"),
        ("é", r"\'{e}"),
        ("a--b", "a-{}-b"),
        ("中", "[U+4E2D]"),
        ("a\u00a0b", "a~b"),
    ],
)
def test_characters(text: str, expected: str) -> None:
    assert escaped(text) == expected


def test_only_ascii_is_left() -> None:
    assert escaped(STRANGE).isascii()


def test_a_long_label_may_break_after_a_slash() -> None:
    assert escaped("E154Q/R226Q", breaks=True) == r"E154Q/\allowbreak{}R226Q"


def _compile(text: str, folder: Path) -> tuple[str, bytes]:
    if MISSING and os.environ.get("CORNERWISE_CI") != "1":
        pytest.skip(f"the LaTeX tables are not compiled: {MISSING}")
    assert MISSING is None, f"the LaTeX tables have to be compiled here: {MISSING}"
    (folder / "table.tex").write_text(text, encoding="utf-8")
    for _ in range(2):
        done = subprocess.run(
            ["pdflatex", "-interaction=nonstopmode", "-halt-on-error", "-no-shell-escape", "table.tex"],
            cwd=folder, capture_output=True, check=False,
        )  # fmt: skip
        assert done.returncode == 0, done.stdout.decode("latin-1")[-2000:]
    return (folder / "table.log").read_text("latin-1"), (folder / "table.pdf").read_bytes()


@pytest.mark.parametrize("place", [0, 1])
@pytest.mark.parametrize("group", ["none", "pair"])
def test_hostile_labels_compile(tmp_path: Path, place: int, group: str) -> None:
    tables = manuscript_tables(cornerwise.couple(hostile_tables_campaign()), TableOptions(group=group))
    log, pdf = _compile(latex_text(tables[place]), tmp_path)
    assert pdf.startswith(b"%PDF")
    assert not re.search(r"Missing character|undefined|Overfull \\hbox \((?:[1-9]\d|\d{3,})", log)


@pytest.mark.parametrize("campaign", ["orvane", "published-medians"])
def test_shipped_campaigns_compile(tmp_path: Path, campaign: str) -> None:
    for table in manuscript_tables(cornerwise.couple(cornerwise.read(CYCLES / campaign))):
        log, _ = _compile(latex_text(table), tmp_path)
        assert not re.search(r"Missing character|undefined|Overfull", log)


def test_every_printable_character_compiles(tmp_path: Path) -> None:
    letters = "\n\n".join(escaped(letter) for letter in STRANGE)
    published = cornerwise.couple(cornerwise.read(CYCLES / "published-medians"))
    whole, begin, end = latex_text(manuscript_tables(published)[0]), r"\begin{document}", r"\end{document}"
    document = f"{whole.partition(begin)[0]}{begin}\n{letters}\n{end}\n"
    log, _ = _compile(document, tmp_path)
    assert "Missing character" not in log
