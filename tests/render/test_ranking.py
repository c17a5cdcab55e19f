"""The ranking, the budget line and the kind of interval as a person reads them."""

import io
from dataclasses import replace
from pathlib import Path

import numpy as np
from builders import campaign, construct

from cornerwise.campaign import Campaign, Distance, StatedCharge, ranked_by
from cornerwise.coupling import couple
from cornerwise.render.explanation import explain
from cornerwise.render.legend import CAUTION, budget_sentence, interval_words
from cornerwise.render.methods import methods_paragraphs
from cornerwise.render.ranking import print_ranking
from cornerwise.render.report.page import report_html
from cornerwise.render.terminal import print_result
from cornerwise.result import Result
from cornerwise.result_reading import read_result
from cornerwise.units import in_percent

PAIRS = {"D10N/R60Q": 16.0, "E12Q/K64M": -12.0, "S16A/T70A": 1.0, "D14N/H66A": 4.0}


def _campaign(**settings: object) -> Campaign:
    rng = np.random.default_rng(3)
    made = [construct("WT", list(rng.normal(-40, 1.5, 5)))]
    for pair, shift in PAIRS.items():
        for label, mean in zip((*pair.split("/"), pair), (-35.0, -45.0, -40.0 + shift), strict=True):
            made.append(construct(label, list(rng.normal(mean, 1.5, 5))))
    stated = StatedCharge(value_e0=13.0, sem_e0=0.1)
    built = campaign(made, charge=stated, **settings)
    return replace(built, distances=DISTANCES, notes=("side chains were measured",))


DISTANCES = (
    Distance(
        residues=frozenset({10, 60}), angstrom=3.14, within_chain_angstrom=12.26, across_chains_angstrom=3.14,
        charged_angstrom=4.51, atoms="D10 CG in chain A to R60 CZ in chain B", source="x.cif (invented)",
        definition="shortest distance",
    ),
    Distance(residues=frozenset({16, 70}), angstrom=8.0, source="distances.csv", definition="as stated"),
)  # fmt: skip
RESULT = couple(_campaign())


def _ranked(result: Result) -> list[str]:
    stream = io.StringIO()
    print_ranking(result, stream)
    return stream.getvalue().splitlines()


def test_one_line_a_cycle_in_order() -> None:
    lines = _ranked(RESULT)
    assert [line.split()[:2] for line in lines[1:5]] == [[str(row.rank), row.cycle] for row in RESULT.ranking]
    assert lines[1].endswith("opposite charges, 3.1 A (4.5 A)")
    assert next(line for line in lines if "S16A/T70A" in line).endswith(" 8.0 A")
    assert any(line.endswith("opposite charges with histidine") for line in lines[1:5])
    assert "first 3" in lines[0]
    first = RESULT.ranking[0]
    assert f"{first.rank_low} to {first.rank_high}" in lines[1]
    assert f"{first.first_probability:.2f}" in lines[1]


def test_distances_come_with_what_they_are() -> None:
    lines = _ranked(RESULT)
    legend = (
        "distance in angstrom between the side chains of the native pair; in brackets between charged atoms"
    )
    assert legend in lines
    assert "distances from x.cif (invented): shortest distance" in lines
    assert "distances from distances.csv: as stated" in lines
    assert CAUTION in lines
    assert "Note: side chains were measured" in lines
    without = _ranked(couple(replace(_campaign(), distances=())))
    assert not [line for line in without if "distance" in line]


def test_distances_are_in_every_output() -> None:
    row = next(row for row in RESULT.ranking if row.cycle == "D10N/R60Q")
    told = dict(zip(row.columns, row.cells(), strict=True))
    assert [told[key] for key in told if "distance" in key] == [
        3.14, 12.26, 3.14, 4.51, "D10 CG in chain A to R60 CZ in chain B", "x.cif (invented)",
        "shortest distance",
    ]  # fmt: skip
    in_words = (
        "3.1 Å, D10 CG in chain A to R60 CZ in chain B; 12.3 Å within one chain; charged atoms 4.5 Å (x.cif "
        "(invented): shortest distance). They carry opposite charges. A structure shows one state"
    )
    assert in_words in explain(RESULT, "D10N/R60Q")
    assert "Distance of the native side chains: 8.0 Å (distances.csv: as stated). A" in explain(
        RESULT, "S16A/T70A"
    )
    assert "side chains" not in explain(RESULT, "E12Q/K64M")
    (methods,) = [text for text in methods_paragraphs(RESULT)[0] if "side chains" in text]
    assert "of 2 native pairs" in methods
    assert "x.cif (invented): shortest distance; distances from distances.csv: as stated" in methods
    page = report_html(RESULT)
    assert "12.3 Å within one chain" in page
    assert "x.cif (invented): shortest distance" in page


def test_distances_are_read_back(tmp_path: Path) -> None:
    path = tmp_path / "result.json"
    path.write_text(RESULT.to_json(), encoding="utf-8")
    assert read_result(path).to_json() == RESULT.to_json()


def test_budget_line_names_the_largest_source_of_the_strongest_cycles() -> None:
    (line,) = budget_sentence(RESULT)
    for row in RESULT.ranking[:3]:
        (part, *_) = [one for one in RESULT.budget if one.cycle == row.cycle]
        assert f"{row.cycle} {in_percent(part.share)} {part.source}" in line
    assert RESULT.ranking[3].cycle not in line
    assert "budget.csv" in line
    stream = io.StringIO()
    print_result(RESULT, stream)
    assert line in stream.getvalue().splitlines()


def test_a_monte_carlo_interval_says_so() -> None:
    asked = couple(_campaign(interval="monte-carlo"))
    assert "95 % Monte Carlo interval" in _ranked(asked)[0]
    stream = io.StringIO()
    print_result(asked, stream)
    assert "95 % Monte Carlo interval" in stream.getvalue()
    assert interval_words(RESULT.settings) == "95 % interval"


def test_what_is_asked_for_is_no_default_any_more() -> None:
    given = _campaign(defaulted=("rank_by", "first", "seed"))
    assert ranked_by(given) == given
    asked = ranked_by(given, lower_limit=True, first=2).settings
    assert (asked.rank_by, asked.first, asked.defaulted) == ("lower bound", 2, ("seed",))


def test_a_shrunken_estimate_takes_four_cycles() -> None:
    few = couple(replace(_campaign(), cycles=_campaign().cycles[:3]))
    assert [row.shrunken for row in few.ranking] == [None] * 3
    assert [row.rank for row in few.ranking] == [1, 2, 3]
    lines = _ranked(few)
    at = lines[0].index("shrunken") + len("shrunken") - 1
    assert [line[at] for line in lines[1:4]] == ["-"] * 3
    assert any(line.startswith("shrunken: ") and line.endswith("it takes 4 cycles") for line in lines)
    assert "takes 4 cycles<" in report_html(few)
    assert all(row.shrunken is not None for row in RESULT.ranking)
    assert "takes 4 cycles<" not in report_html(RESULT)
    table = few.ranking.to_frame()
    assert table["shrunken"].isna().all()
