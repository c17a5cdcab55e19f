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
        (1234.6, 99.96, "1230 ± 100"),
        (-52.4, 194.9, "-50 ± 190"),
        (-4.9, 194.9, "0 ± 190"),
        (3.14159, None, "3.142"),
        (3.14159, 0.0, "3.142"),
        (None, 0.5, ""),
    ],
)
def test_value_with_uncertainty(value: float | None, uncertainty: float | None, expected: str) -> None:
    assert rounding.with_uncertainty(value, uncertainty) == expected


def test_degrees_of_freedom_beyond_a_thousand_are_told_as_a_limit() -> None:
    assert rounding.freedom_words(1000.0) == "1000.0 degrees of freedom"
    assert rounding.freedom_words(1000.1) == "more than 1000 degrees of freedom, as good as normal"
    assert rounding.freedom_words(None) == ""


def test_interval_has_the_decimals_of_the_uncertainty() -> None:
    assert rounding.span((-0.00001, 3.666), 0.7651) == "0.00 to 3.67"
    assert rounding.span((None, 3.666), 0.7651) == ""


def test_halves_are_never_rounded_twice() -> None:
    # 0.2449 rounds to 0.24; by way of 0.245 it would become 0.25.
    assert rounding.number(0.2449, 2) == "0.24"


# Worked examples of the Particle Data Group's rule (Review of Particle Physics, introduction, section on
# rounding), from memory: 0.827 ± 0.119 and 0.827 ± 0.367; the others follow from its words.
@pytest.mark.parametrize(
    ("value", "uncertainty", "expected"),
    [
        (0.827, 0.119, "0.83 ± 0.12"),
        (0.827, 0.367, "0.8 ± 0.4"),
        (0.827, 0.1, "0.83 ± 0.10"),
        (0.827, 0.354, "0.83 ± 0.35"),
        (0.827, 0.355, "0.8 ± 0.4"),
        (0.827, 0.949, "0.8 ± 0.9"),
        (0.827, 0.951, "0.8 ± 1.0"),
        (0.827, 0.0962, "0.83 ± 0.10"),
        (827.0, 119.0, "830 ± 120"),
        (827.0, 367.0, "800 ± 400"),
        (827.0, 962.0, "800 ± 1000"),
        (0.827, None, "0.827"),
        (0.827, 0.0, "0.827"),
    ],
)
def test_one_or_two_digits(value: float, uncertainty: float | None, expected: str) -> None:
    rule = rounding.decimals_of_one_or_two_digits
    assert rounding.with_uncertainty(value, uncertainty, decimals=rule) == expected


@pytest.mark.parametrize(
    ("p", "expected"),
    [(None, ""), (3e-9, "< 0.0001"), (1.04e-4, "0.0001"), (0.0123, "0.012"), (0.0996, "0.1"), (1.0, "1.00")],
)
def test_p_values(p: float | None, expected: str) -> None:
    assert rounding.p_words(p) == expected
