import re

import pytest
from builders import campaign, construct

from cornerwise.coupling import couple
from cornerwise.errors import UsageError
from cornerwise.render.explanation import explain
from cornerwise.result import Result

WILD = [13.0, 13.3, 12.7, 13.1, 12.9]


def _result(double: list[float] | None, **settings: object) -> Result:
    return couple(
        campaign(
            [
                construct("WT", [-40.0, -41.0, -39.0, -40.5], WILD, charge_cells="n"),
                construct("E5A", [-30.0, -31.0, -29.0, -30.5], WILD, charge_cells="n"),
                construct("R9Q", [-50.0, -51.0, -49.0, -50.5], WILD, charge_cells="n"),
                construct("E5A/R9Q", [-33.0, -34.0, -32.0, -33.5], double, charge_cells="n"),
            ],
            **settings,
        )
    )


def test_valid_shortcut_in_words() -> None:
    result = _result(WILD)
    row, text = result.interactions[0], explain(result, "E5A/R9Q")
    assert row.shortcut_verdict == "valid"
    for part in (
        f"I = + dG(WT) - dG(E5A) - dG(R9Q) + dG(E5A/R9Q) = {row.interaction:.2f}",
        "Nothing was assumed about total charge",
        "The shortcut is valid",
        "one number for all voltages",
        "stays valid down to a margin of",
    ):
        assert part in text


def test_changed_charge_in_words() -> None:
    text = explain(_result([q - 4 for q in WILD], voltage_offset_mv=2.0), "E5A/R9Q")
    for part in (
        "The shortcut is invalid",
        "The charges do not add up",
        "voltage offset of 2 mV contributes",
    ):
        assert part in text


def test_assumed_charge_in_words() -> None:
    text = explain(_result(None), "E5A/R9Q")
    assert "E5A/R9Q: Vm" in text
    assert "Q not measured" in text
    assert (
        "the total charge of E5A/R9Q was not measured in this campaign and is taken to be that of WT" in text
    )
    assert re.search(
        r"if the charge of one of them differed from that by so much: E5A/R9Q [+-][0-9.]+ %", text
    )
    assert "measuring the assumed charges would test the shortcut" in text


def test_every_paragraph_is_a_line() -> None:
    text = explain(_result(WILD), "E5A/R9Q")
    assert all(len(paragraph.splitlines()) == 1 for paragraph in text.split("\n\n"))


def test_mutations_in_another_order_name_the_cycle() -> None:
    assert explain(_result(WILD), "R9Q+E5A") == explain(_result(WILD), "E5A/R9Q")


def test_unknown_cycle_names_the_nearest() -> None:
    with pytest.raises(UsageError, match="did you mean E5A/R9Q"):
        explain(_result(WILD), "E5A/R9K")
    with pytest.raises(UsageError, match="there are E5A/R9Q"):
        explain(_result(WILD), "zzz")


def test_what_would_change_it_names_cells_and_no_looser_criterion() -> None:
    result = _result([11.4, 13.6, 15.5, 12.2, 14.0])
    row, text = result.interactions[0], explain(result, "E5A/R9Q")
    double = row.corner_charges[-1]
    assert row.shortcut_verdict == double.verdict == "unresolved"
    assert double.cells_needed is not None
    assert double.cells_needed > 5
    assert (
        f"{double.cells_needed} charge values each on E5A/R9Q and WT (there are 5 and 5) would give that "
        "charge a verdict"
    ) in text
    far = text.partition("How far the shortcut is from valid: ")[2]
    assert (
        f"the interval of the bias reaches {row.passing_tolerance:.2g} kcal/mol (the tolerance is 0.5)" in far
    )
    assert "% from equality (the margin is 10 %)" in far
    assert far.endswith("limits are to be chosen before looking.")
    assert "with a margin of" not in text
    assert "would be tolerable" not in text


def test_a_shared_charge_has_no_count_of_its_own() -> None:
    result = _result([11.4, 13.6, 15.5, 12.2, 14.0], charge="wild-type")
    assert "charge values each on E5A/R9Q and WT would give that charge a verdict" in explain(
        result, "E5A/R9Q"
    )
