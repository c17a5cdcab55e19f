"""What a person reads: fitted at a terminal, uncut in a pipe, labels always plain text."""

import dataclasses
import io
import re

import pytest
from builders import campaign, construct

from cornerwise.campaign import Campaign, StatedCharge
from cornerwise.coupling import couple
from cornerwise.errors import DataRefused, Origin, Problem
from cornerwise.flags import Flag, FlagCode
from cornerwise.render.problems import print_problems
from cornerwise.render.terminal import print_result, print_survey
from cornerwise.surveying import survey

STATED = StatedCharge(value_e0=13.0, sem_e0=0.2)


class _Terminal(io.StringIO):
    """Stream that says it is a terminal."""

    encoding = "utf-8"

    def isatty(self) -> bool:
        return True


def _campaign(**settings: object) -> Campaign:
    medians = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": -20.0}
    constructs = [construct(label, [m - 1, m, m + 0.7, m + 1.5]) for label, m in medians.items()]
    return campaign(constructs, **{"charge": STATED, **settings})


def _piped(given: Campaign) -> str:
    stream = io.StringIO()
    print_result(couple(given), stream)
    return stream.getvalue()


def test_numbers_of_the_row_are_those_of_the_result() -> None:
    text = _piped(_campaign())
    row = couple(_campaign()).interactions[0]
    line = next(line for line in text.splitlines() if line.startswith("E5A/R9Q"))
    assert f"{row.interaction:.2f} ± {row.std_uncertainty:.2f}" in line
    assert f"{row.low:.2f} to {row.high:.2f}" in line
    assert line.split()[-4:] == ["resting", "coupled", "untested", "a"]


def test_formula_sign_unit_and_defaults_are_printed() -> None:
    text = _piped(_campaign(energy_unit="kJ/mol", defaulted=("seed", "confidence")))
    assert "kJ/mol per channel" in text
    assert "s F Q Vm" in text
    assert "favours the resting state" in text
    assert "no proof of a contact" in text
    assert re.search(r"^Defaults: confidence = 0.95, seed = 1$", text, re.MULTILINE)
    assert "threshold = 4.184" in text


def test_a_pipe_gets_plain_text_without_a_cut_line_or_a_trailing_blank() -> None:
    text = _piped(_campaign())
    assert "\x1b" not in text
    assert all(line == line.rstrip() for line in text.splitlines())
    assert max(map(len, text.splitlines())) > 100  # a long sentence stays on its line


@pytest.mark.parametrize("width", [60, 80, 132])
def test_a_terminal_is_never_exceeded(width: int, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", str(width))
    monkeypatch.setenv("TERM", "xterm")
    stream = _Terminal()
    print_result(couple(_campaign()), stream)
    lines = re.sub(r"\x1b\[[0-9;]*m", "", stream.getvalue()).splitlines()
    assert max(map(len, lines)) <= width
    assert any("E5A/R9Q" in line for line in lines)


def test_no_color_is_honoured(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.setenv("NO_COLOR", "1")
    stream = _Terminal()
    print_result(couple(_campaign()), stream)
    assert not re.search(r"\x1b\[[0-9;]*3[0-7]", stream.getvalue())


def test_an_encoding_without_plus_minus_gets_ascii() -> None:
    raw = io.BytesIO()
    stream = io.TextIOWrapper(raw, encoding="ascii")
    print_result(couple(_campaign()), stream)
    stream.flush()
    assert b" +/- " in raw.getvalue()


@pytest.mark.parametrize("title", ["[bold]x", "R362Q [/a]", "=1+1", "50%_x", "Δ6-46", "<script>", ":smile:"])
def test_user_text_is_only_text(title: str) -> None:
    assert _piped(_campaign(title=title)).splitlines()[0] == title


def test_survey_has_a_line_a_construct() -> None:
    stream = io.StringIO()
    print_survey(survey(_campaign()), stream)
    lines = stream.getvalue().splitlines()
    assert [line.split()[0] for line in lines[1:5]] == ["WT", "E5A", "R9Q", "E5A/R9Q"]
    assert "1 complete cycle: E5A/R9Q" in lines


def test_survey_names_what_a_cycle_lacks() -> None:
    given = _campaign()
    lone = construct("E5A/K7M", [-10.0, -11.0, -12.0, -13.0])
    stream = io.StringIO()
    whole = campaign([*given.constructs, lone], charge=STATED)
    print_survey(survey(whole), stream)
    assert "E5A/K7M: no cycle, it lacks K7M" in stream.getvalue()


def test_every_problem_is_shown_under_its_place() -> None:
    place = Origin(file="curves.csv", row=7, column="voltage_mV")
    problems = [
        Problem(origin=place, found="600", expected="-500 to 500 mV", remedy="check the unit"),
        Problem(origin=Origin(file="campaign.toml"), found="'sede'", expected="a key", remedy="write seed"),
    ]
    stream = io.StringIO()
    print_problems(DataRefused(problems), stream)
    text = stream.getvalue()
    assert "2 problems" in text
    for part in ("curves.csv, row 7, column voltage_mV", "600", "check the unit", "'sede'", "write seed"):
        assert part in text


@pytest.mark.parametrize("unit", ["kcal/mol", "kJ/mol"])
def test_numbers_of_flags_told_in_short_have_their_unit(unit: str) -> None:
    def flags(code: FlagCode, *values: float) -> list[Flag]:
        return [
            Flag(code=code, subject=f"E{n}A", construct=f"E{n}A", message="first.", value=value)
            for n, value in enumerate(values)
        ]

    told = survey(_campaign(energy_unit=unit))
    # The worst comes first in full, whichever way is worse.
    shown = [*flags("few-cells", 2, 3), *flags("midpoint-misleads", -4.0, -0.95712)]
    shown += [*flags("charge-shift", 0.6, 1.5), *flags("mixed-ranges", 80.0, 70.0)]
    shown = shown[::-1]
    stream = io.StringIO()
    print_survey(dataclasses.replace(told, flags=tuple(shown)), stream)
    short = re.findall(r"([\w-]+): first\.; likewise E1A \((.*)\)", stream.getvalue())
    assert dict(short) == {
        "few-cells": "3 cells", "midpoint-misleads": f"-0.957 {unit}", "charge-shift": "1.50 times",
        "mixed-ranges": "70 mV",
    }  # fmt: skip
