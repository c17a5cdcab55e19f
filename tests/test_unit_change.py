"""A result in another unit is what that unit in the settings would have given."""

import dataclasses
import math
from pathlib import Path

import pytest
from builders import campaign, construct

import cornerwise
from cornerwise.campaign import Campaign
from cornerwise.errors import UsageError
from cornerwise.result import Result
from cornerwise.unit_change import in_unit

ORVANE = Path(__file__).parents[1] / "cycles" / "orvane"


@pytest.fixture(scope="module")
def given() -> Campaign:
    return cornerwise.read(ORVANE)


@pytest.fixture(scope="module")
def result(given: Campaign) -> Result:
    return cornerwise.couple(given)


def _leaves(value: object, place: str = "") -> list[tuple[str, object]]:
    if isinstance(value, dict):
        return [leaf for key, one in value.items() for leaf in _leaves(one, f"{place}.{key}")]
    if isinstance(value, list | tuple):
        return [leaf for i, one in enumerate(value) for leaf in _leaves(one, f"{place}.{i}")]
    return [(place, value)]


def _contents(result: Result) -> dict[str, object]:
    names = ("interactions", "constructs", "cells", "budget", "backgrounds", "flags")
    rows = {name: [dataclasses.asdict(row) for row in getattr(result, name)] for name in names}
    return dict(_leaves({**rows, "notes": result.notes, "settings": dataclasses.asdict(result.settings)}))


@pytest.mark.parametrize("unit", ["kJ/mol", "kT", "meV"])
def test_every_number_and_sentence_is_what_that_unit_would_have_given(
    given: Campaign, result: Result, unit: str
) -> None:
    settings = dataclasses.replace(given.settings, energy_unit=unit)
    computed = _contents(cornerwise.couple(dataclasses.replace(given, settings=settings)))
    changed = _contents(in_unit(result, unit))
    assert changed.keys() == computed.keys()
    for place, value in computed.items():
        if isinstance(value, float):
            assert changed[place] == pytest.approx(value, rel=1e-9, abs=1e-12), place
        else:
            assert changed[place] == value, place


def test_stated_limits_are_energies_too(result: Result) -> None:
    settings = dataclasses.replace(result.settings, threshold=2.0, shortcut_tolerance=0.25)
    changed = in_unit(dataclasses.replace(result, settings=settings), "kJ/mol").settings
    assert (changed.threshold, changed.shortcut_tolerance) == pytest.approx((8.368, 1.046))
    assert "energy_unit" not in changed.defaulted


def test_there_and_back(result: Result) -> None:
    again = in_unit(in_unit(result, "meV"), "kcal/mol")
    for one, other in zip(again.interactions, result.interactions, strict=True):
        assert one.interaction is not None
        assert other.interaction is not None
        assert math.isclose(one.interaction, other.interaction, rel_tol=1e-14)


def test_the_same_unit_changes_nothing(result: Result) -> None:
    assert in_unit(result, "kcal/mol") is result


def test_an_unknown_unit_is_refused(result: Result) -> None:
    with pytest.raises(UsageError, match="'eV' is not known; use one of kcal/mol, kJ/mol, kT, meV"):
        in_unit(result, "eV")


def test_what_is_not_available_stays_so() -> None:
    lone = couple_of_single_cells()
    changed = in_unit(lone, "kJ/mol")
    assert changed.interactions[0].low is None
    assert changed.constructs[0].energy_unit == "kJ/mol"


def couple_of_single_cells() -> Result:
    medians = {"WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "E5A/R9Q": -20.0}
    constructs = [construct(label, [m], [13.0, 12.6]) for label, m in medians.items()]
    return cornerwise.couple(campaign(constructs))
