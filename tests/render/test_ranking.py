"""The ranking, the budget line and the kind of interval as a person reads them."""

import io

import numpy as np
from builders import campaign, construct

from cornerwise.campaign import Campaign, Distance, StatedCharge, ranked_by
from cornerwise.coupling import couple
from cornerwise.render.legend import budget_sentence, interval_words
from cornerwise.render.ranking import print_ranking
from cornerwise.render.terminal import print_result
from cornerwise.result import Result
from cornerwise.units import in_percent

PAIRS = {"D10N/R60Q": 16.0, "E12Q/K64M": -12.0, "S16A/T70A": 1.0, "D14N/H66A": 4.0}


def _campaign(**settings: object) -> Campaign:
    rng = np.random.default_rng(3)
    made = [construct("WT", list(rng.normal(-40, 1.5, 5)))]
    for pair, shift in PAIRS.items():
        for label, mean in zip((*pair.split("/"), pair), (-35.0, -45.0, -40.0 + shift), strict=True):
            made.append(construct(label, list(rng.normal(mean, 1.5, 5))))
    stated = StatedCharge(value_e0=13.0, sem_e0=0.1)
    distances = (Distance(residues=frozenset({10, 60}), angstrom=3.14),)
    built = campaign(made, charge=stated, **settings)
    return Campaign(
        settings=built.settings, constructs=built.constructs, cycles=built.cycles, distances=distances
    )


RESULT = couple(_campaign())


def _ranked(result: Result) -> list[str]:
    stream = io.StringIO()
    print_ranking(result, stream)
    return stream.getvalue().splitlines()


def test_one_line_a_cycle_in_order() -> None:
    lines = _ranked(RESULT)
    assert [line.split()[:2] for line in lines[1:5]] == [[str(row.rank), row.cycle] for row in RESULT.ranking]
    assert lines[1].endswith("opposite charges, 3.1 A")
    assert any(line.endswith("opposite charges with histidine") for line in lines[1:5])
    assert "first 3" in lines[0]
    first = RESULT.ranking[0]
    assert f"{first.rank_low} to {first.rank_high}" in lines[1]
    assert f"{first.first_probability:.2f}" in lines[1]


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
