import math

import pytest

from cornerwise import verdicts
from cornerwise.intervals import Interval

NONE = Interval(math.nan, math.nan)


@pytest.mark.parametrize(
    ("equivalence", "difference", "expected"),
    [
        ((0.91, 1.09), (0.89, 1.11), "equal"),
        ((0.90, 1.05), (0.88, 1.07), "unresolved"),  # touching the margin is not inside it
        ((0.93, 0.99), (0.92, 0.995), "equal"),  # a small change that is inside the margin
        ((0.85, 0.97), (0.84, 0.98), "changed"),
        ((1.02, 1.25), (1.001, 1.27), "changed"),
        ((0.80, 1.20), (0.75, 1.25), "unresolved"),
        (NONE, NONE, "unresolved"),
    ],
)
def test_charge_verdict(equivalence: tuple, difference: tuple, expected: str) -> None:
    assert verdicts.charge_verdict(Interval(*equivalence), Interval(*difference), 0.10) == expected


@pytest.mark.parametrize(
    ("corners", "bias", "expected"),
    [
        (["equal", "equal", "equal"], (-0.4, 0.4), "valid"),
        (["equal", "equal", "equal"], (-0.5, 0.4), "unresolved"),
        (["equal", "unresolved", "equal"], (-0.4, 0.4), "unresolved"),
        (["equal", "changed", "equal"], (-0.4, 0.4), "invalid"),
        (["equal", "equal", "equal"], (0.6, 0.9), "invalid"),
        (["equal", "assumed", "equal"], NONE, "untested"),
        (["changed", "assumed", "equal"], NONE, "invalid"),
        (["equal", "equal", "equal"], NONE, "unresolved"),
    ],
)
def test_shortcut_verdict(corners: list, bias: tuple, expected: str) -> None:
    assert verdicts.shortcut_verdict(corners, Interval(*bias), 0.5) == expected


@pytest.mark.parametrize(
    ("interval", "expected"),
    [
        ((1.01, 3.0), "coupled"),
        ((-3.0, -1.01), "coupled"),
        ((1.0, 3.0), "detected"),
        ((0.01, 0.9), "detected"),
        ((-0.9, 0.9), "uncoupled"),
        ((-1.0, 0.9), "unresolved"),
        ((-0.1, 2.0), "unresolved"),
        (NONE, "unresolved"),
    ],
)
def test_interaction_verdict(interval: tuple, expected: str) -> None:
    assert verdicts.interaction_verdict(Interval(*interval), 1.0, established=True) == expected


@pytest.mark.parametrize(
    ("interval", "expected"),
    [
        ((1.01, 3.0), "unresolved"),
        ((0.01, 1.5), "unresolved"),
        ((0.01, 0.9), "uncoupled"),
        (NONE, "unresolved"),
    ],
)
def test_nothing_is_coupled_or_detected_without_the_adjusted_p_value(interval: tuple, expected: str) -> None:
    assert verdicts.interaction_verdict(Interval(*interval), 1.0, established=False) == expected
    assert verdicts.favours(2.0, Interval(*interval), 2, established=False) is None


@pytest.mark.parametrize(
    ("value", "interval", "order", "expected"),
    [
        (2.0, (1.0, 3.0), 2, "resting"),
        (-2.0, (-3.0, -1.0), 2, "activated"),
        (2.0, (1.0, 3.0), 3, "activated"),  # the wild type enters an odd order with a minus sign
        (-2.0, (-3.0, -1.0), 3, "resting"),
        (2.0, (1.0, 3.0), 4, "resting"),
        (2.0, (-0.1, 4.1), 2, None),
        (2.0, NONE, 2, None),
    ],
)
def test_which_state_is_favoured(value: float, interval: tuple, order: int, expected: str | None) -> None:
    assert verdicts.favours(value, Interval(*interval), order, established=True) == expected
