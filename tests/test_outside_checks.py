"""What the package computes against what others published, and the page that says so."""

from collections import Counter
from pathlib import Path

import pytest
from outside.record import PRACTICE, Check, agrees, obtained
from outside_checks import ELSEWHERE, GROUPS, PAGE, all_checks, render
from reference_values import all_sources

ROOT = Path(__file__).parents[1]
NAMED = [pytest.param(one, id=f"{group}: {one.what}") for group, checks in GROUPS.items() for one in checks]


@pytest.mark.parametrize("check", NAMED)
def test_obtained_as_expected(check: Check) -> None:
    assert agrees(check), f"{obtained(check)} instead of {check.expected} ({check.source})"


@pytest.mark.parametrize(
    ("expected", "within", "relative", "same"),
    [
        (2.0, 0.011, False, True),
        (2.0, 0.009, False, False),
        ((2.01, 4.0), 0.002, True, False),
        ((2.01, 3.99), 0.003, True, True),
        ("2.01", 0.0, False, False),
        (2.01, 0.0, False, True),
    ],
)
def test_a_difference_beyond_the_tolerance_is_seen(
    expected: float | tuple[float, ...] | str, within: float, relative: bool, same: bool
) -> None:
    found = (2.01, 3.99) if isinstance(expected, tuple) else 2.01
    check = Check(
        what="",
        source="",
        expected=expected,
        obtained=lambda: found,
        why="",
        within=within,
        relative=relative,
    )
    assert agrees(check) is same


def test_the_page_shows_what_is_obtained() -> None:
    assert PAGE.read_text(encoding="utf-8") == render(), "run python tests/outside_checks.py"


@pytest.mark.parametrize("check", NAMED)
def test_nothing_from_memory_is_called_published(check: Check) -> None:
    allowed = {"published": {"read"}, "recomputed": {"read"}, "memory": {"memory"}}
    if check.standing == "practice":
        assert check.source == PRACTICE
    else:
        assert all_sources()[check.source].keys() == allowed[check.standing]


def test_every_source_is_used_and_every_check_has_its_own_words() -> None:
    assert {check.source for check in all_checks()} - {PRACTICE} == all_sources().keys()
    assert [
        words for words, times in Counter(check.what for check in all_checks()).items() if times > 1
    ] == []


@pytest.mark.parametrize("test", [test for _, _, test in ELSEWHERE])
def test_the_other_tests_that_the_page_names_exist(test: str) -> None:
    file, name = test.split("::")
    assert f"def {name}(" in (ROOT / file).read_text(encoding="utf-8")
