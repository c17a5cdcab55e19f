"""Voltage protocols: expected curves against closed forms, judgements against the estimator itself."""

import io
import json
import re
from dataclasses import asdict, replace
from math import log
from pathlib import Path

import numpy as np
import pytest
from typer.testing import CliRunner

from cornerwise import read_model
from cornerwise.campaign import Curve
from cornerwise.cli import app
from cornerwise.errors import UsageError
from cornerwise.median import read_construct
from cornerwise.protocols import (
    ProtocolCheck,
    ProtocolQuestion,
    check_protocols,
    curves_of,
    expected_curves,
    median_and_slope,
    question_for,
)
from cornerwise.render.protocols import print_protocols

MODEL = Path(__file__).parents[1] / "examples" / "models" / "two_states.toml"
CURVES = expected_curves([(-40.0, 8.0)])
TWO_STATES = {"alone": CURVES["-40 mV, slope 8 mV, two states"]}
QUESTION = ProtocolQuestion(steps_mv=(10.0, 30.0), trials=3, cells=3)


@pytest.fixture(scope="module")
def found() -> ProtocolCheck:
    return check_protocols(TWO_STATES, replace(QUESTION, ends_mv=(-140.0, 61.0)))


@pytest.mark.parametrize("temperature", [8.0, 22.0])
def test_expected_curves_have_the_stated_median_and_slope(temperature: float) -> None:
    curves = expected_curves([(-40.0, 8.0), (15.0, 20.0)], temperature)
    assert len(curves) == 6
    for name, scheme in curves.items():
        assert scheme.median_mv == pytest.approx(-40.0 if name.startswith("-40") else 15.0, abs=1e-9)
    v = np.array([-300.0, -292.0])
    low, high = curves["-40 mV, slope 8 mV, two states"].q(v)
    assert log(high / low) == pytest.approx(1.0, abs=1e-9)  # e-fold over the slope, far below the rise
    # The slow step is half as steep: in a late tail what is left falls e-fold over two slopes.
    left = 1 - curves["-40 mV, slope 8 mV, late tail"].q([150.0, 166.0])
    assert log(left[0] / left[1]) == pytest.approx(1.0, abs=1e-3)


def test_tails_mirror_each_other() -> None:
    late, early = (CURVES[f"-40 mV, slope 8 mV, {end} tail"] for end in ("late", "early"))
    away = np.linspace(0.0, 120.0, 9)
    np.testing.assert_allclose(late.q(-40.0 + away), 1 - early.q(-40.0 - away), atol=1e-12)


def test_ranges_leave_out_what_they_should(found: ProtocolCheck) -> None:
    # A two-state curve has moved the fraction p at slope times ln(p/(1 - p)) from its midpoint.
    for share in (0.02, 0.01, 0.002):
        reach = 8.0 * log((1 - share) / share)
        first = 5 * np.floor((-40 - reach) / 5)
        assert any(row.first_mv == first and row.last_mv >= -40 + reach for row in found.rows)
    for row in found.rows:
        worst = max(1 / (1 + np.exp((-40 - row.first_mv) / 8.0)), 1 / (1 + np.exp((row.last_mv + 40) / 8.0)))
        assert row.share_outside == pytest.approx(worst, rel=1e-9)


def test_own_range_is_judged_as_it_stands(found: ProtocolCheck) -> None:
    own = [row for row in found.rows if row.first_mv == -140.0]
    assert [(row.last_mv, row.step_mv, row.points) for row in own] == [(60.0, 10.0, 21), (40.0, 30.0, 7)]


def test_wide_and_fine_is_within_and_narrow_or_coarse_is_not(found: ProtocolCheck) -> None:
    fine = [row for row in found.rows if row.step_mv == 10.0]
    assert fine[-1].within
    assert not fine[0].within  # its extrapolation is too uncertain
    assert fine[0].stated_mv is not None
    assert fine[0].stated_mv > 1.0
    coarse = [row for row in found.rows if row.step_mv == 30.0]
    assert not any(row.within for row in coarse)
    assert all(row.lost == 1.0 for row in coarse if row.lost is not None)


def test_the_one_with_the_fewest_points_is_advised(found: ProtocolCheck) -> None:
    assert found.advised is not None
    assert found.advised.within
    assert found.advised.points == min(row.points for row in found.rows if row.within)


def test_numbers_are_those_of_the_estimator() -> None:
    """Without noise nothing random is left: the same reading by hand."""
    scheme = curves_of(read_model(MODEL.with_name("allosteric.toml")))["WT"]
    question = replace(QUESTION, steps_mv=(10.0,), ends_mv=(-140.0, 100.0), noise=0.0, cell_sd_mv=0.0)
    row = next(row for row in check_protocols({"WT": scheme}, question).rows if row.points == 25)
    v = np.arange(-140.0, 101.0, 10.0)
    shifts = (-10 / 3, 0.0, 10 / 3)
    curves = [
        Curve(construct="x", cell=str(i), voltage_mv=v, charge=scheme.q(v - s)) for i, s in enumerate(shifts)
    ]
    errors = [r.median_mv - scheme.median_mv - s for r, s in zip(read_construct(curves), shifts, strict=True)]
    assert row.bias_mv == pytest.approx(np.mean(errors), abs=1e-9)
    assert abs(np.mean(errors)) > 0.01  # no family of the estimator's is this scheme's
    assert row.scatter_mv == pytest.approx(0.0, abs=1e-9)


def test_noise_decides_too() -> None:
    """A quiet recording passes a bound that a noisy one does not."""
    quiet, noisy = (
        check_protocols(TWO_STATES, replace(QUESTION, steps_mv=(10.0,), noise=noise, bound_mv=0.4))
        for noise in (0.001, 0.04)
    )
    assert quiet.advised is not None
    assert noisy.advised is None


def test_beyond_the_share_no_noise_is_drawn() -> None:
    question = replace(QUESTION, steps_mv=(10.0,), share=0.001, ends_mv=(-80.0, 0.0))
    row = check_protocols(TWO_STATES, question).rows[0]
    assert (row.first_mv, row.within, row.noisy_bias_mv, row.lost) == (-80.0, False, None, None)


def test_same_question_same_answer() -> None:
    question = replace(QUESTION, steps_mv=(20.0,))
    one, two = (check_protocols(TWO_STATES, question) for _ in range(2))
    assert list(one.rows) == list(two.rows)


def test_progress_is_told() -> None:
    told = []
    check_protocols(TWO_STATES, replace(QUESTION, steps_mv=(30.0,)), lambda *words: told.append(words))
    assert told[0] == ("protocols", 0, len(told))


def test_a_models_recording_is_asked_about() -> None:
    model = read_model(MODEL)
    question = question_for(model, bound_mv=0.5)
    assert question.ends_mv == (-100.0, 40.0)
    assert 2.0 in question.steps_mv
    assert (question.cells, question.noise, question.bound_mv) == (8, 0.01, 0.5)
    assert question_for(model, steps_mv=[7.0, 3.0], noise=0.02).steps_mv == (3.0, 7.0)
    assert question_for() == ProtocolQuestion()
    assert list(curves_of(model)) == ["WT", "E21A", "R84Q", "E21A/R84Q"]


def test_refused_questions() -> None:
    with pytest.raises(UsageError, match="no curve to check"):
        check_protocols({}, QUESTION)
    with pytest.raises(UsageError, match="0 to -5 mV in steps of 10 mV is no protocol"):
        check_protocols(TWO_STATES, replace(QUESTION, ends_mv=(0.0, -5.0)))
    with pytest.raises(UsageError, match="steps of 0 mV"):
        check_protocols(TWO_STATES, replace(QUESTION, steps_mv=(0.0,)))
    for words in ("-40", "-40:8:1", "a:b", ""):
        with pytest.raises(UsageError, match="is no curve"):
            median_and_slope(words)
    for pair in ((-40.0, 0.0), (-40.0, -8.0), (900.0, 8.0), (float("nan"), 8.0)):
        with pytest.raises(UsageError, match="no curve has"):
            expected_curves([pair])


def test_command_asks_and_prints(found: ProtocolCheck, monkeypatch: pytest.MonkeyPatch) -> None:
    asked = []

    def answer(curves: dict, question: ProtocolQuestion, _: object) -> ProtocolCheck:
        asked.append((list(curves), question))
        return found

    monkeypatch.setattr("cornerwise.protocols.check_protocols", answer)
    words = ["protocol", "--curve", "-40:8", "--step", "30", "--bound", "2", "--range", "-140", "80"]
    told = CliRunner().invoke(app, [*words, "--json"])
    assert told.exit_code == 0
    assert asked == [(list(CURVES), question_for(bound_mv=2.0, steps_mv=[30.0], ends_mv=(-140.0, 80.0)))]
    document = json.loads(told.stdout)
    assert document["schema"] == "cornerwise-protocols/1"
    assert document["protocols"] == [asdict(row) for row in found.rows]
    assert "Within the bounds" in CliRunner().invoke(app, ["protocol", str(MODEL), "--share", "0.01"]).stdout
    assert asked[1] == (list(curves_of(read_model(MODEL))), question_for(read_model(MODEL), share=0.01))


def test_table_in_words(found: ProtocolCheck) -> None:
    stream = io.StringIO()
    print_protocols(found, stream)
    told = stream.getvalue()
    row = found.advised
    assert row is not None
    assert f"Within the bounds with the fewest points: {row.first_mv:g} to {row.last_mv:g} mV" in told
    lines = told.splitlines()[1 : 1 + len(found.rows)]
    narrowest = found.rows[0]
    assert lines[0].split()[:4] == [f"{narrowest.first_mv:g}", "to", f"{narrowest.last_mv:g}", "10"]
    assert [line.startswith("*") for line in lines] == [one.within for one in found.rows]
    assert [int(line.split()[-1]) for line in lines] == [
        1 + found.curves.index(one.curve) for one in found.rows
    ]
    assert all(f"{number}  {curve}" in told for number, curve in enumerate(found.curves, start=1))
    assert max(map(len, lines)) <= 80
    stream = io.StringIO()
    print_protocols(replace(found, advised=None), stream)
    assert "None of these stays within the bounds" in stream.getvalue()


def test_page_names_every_option() -> None:
    page = (Path(__file__).parents[1] / "docs" / "protocols.md").read_text(encoding="utf-8")
    told = CliRunner().invoke(app, ["protocol", "--help"], env={"COLUMNS": "200"}).stdout
    documented = re.findall(r"^\| `(--\w+)` \|", page, flags=re.MULTILINE)
    assert set(documented) == set(re.findall(r"^ +(--\w+)", told, flags=re.MULTILINE))
    usual = ProtocolQuestion()
    for option, value in (("bound", usual.bound_mv), ("share", usual.share)):
        assert f"| `--{option}` | {value:g} |" in page
    assert f"or {usual.noise:g} |" in page
    assert f"| {', '.join(f'{step:g}' for step in usual.steps_mv)} and the model's |" in page
    assert f"{usual.trials} constructs of {usual.cells} cells" in " ".join(page.split())


@pytest.mark.parametrize("words", [[], ["--curve", "-40:8", str(MODEL)], ["--curve", "8"]])
def test_wrong_calls(words: list[str]) -> None:
    assert CliRunner().invoke(app, ["protocol", *words]).exit_code == 2
