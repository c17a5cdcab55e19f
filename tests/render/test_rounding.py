import pytest

from cornerwise.render import rounding


@pytest.mark.parametrize(
    ("value", "uncertainty", "expected"),
    [
        (2.0011, 0.7651, "2.00 ± 0.77"),
        (-0.0004, 0.31, "0.00 ± 0.31"),
        (1.23456, 0.0996, "1.23 ± 0.10"),
        (1.23456, 0.0994, "1.235 ± 0.099"),
        (-44.29, 1.24, "-44.3 ± 1.2"),
        (1234.5, 9.96, "1234 ± 10"),
        (1234.6, 99.96, "1235 ± 100"),
        (3.14159, None, "3.142"),
        (3.14159, 0.0, "3.142"),
        (None, 0.5, ""),
    ],
)
def test_value_with_uncertainty(value: float | None, uncertainty: float | None, expected: str) -> None:
    assert rounding.with_uncertainty(value, uncertainty) == expected


def test_interval_has_the_decimals_of_the_uncertainty() -> None:
    assert rounding.span((-0.00001, 3.666), 0.7651) == "0.00 to 3.67"
    assert rounding.span((None, 3.666), 0.7651) == ""


def test_halves_are_never_rounded_twice() -> None:
    # 0.2449 rounds to 0.24; by way of 0.245 it would become 0.25.
    assert rounding.number(0.2449, 2) == "0.24"
