"""What a fragment allows here is what JSON Schema says it allows; the library jsonschema is the referee."""

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st
from jsonschema import Draft202012Validator

from cornerwise import plausible
from cornerwise.intake import allowed
from cornerwise.intake.model import keys as model_keys
from cornerwise.intake.rules import Rule, within
from cornerwise.intake.settings import CHARGE_RULES, CHARGE_WORD, RULES
from cornerwise.intake.voltages import VOLTAGE_VALUES

MODEL_RULES = [
    rule
    for rules in vars(model_keys).values()
    if isinstance(rules, tuple) and rules and isinstance(rules[0], Rule)
    for rule in rules
]
FRAGMENTS = {
    **{rule.key: rule.read.schema for rule in (*RULES, *CHARGE_RULES)},
    **{
        f"model {rule.key}": rule.read.schema
        for rule in {str(r.read.schema): r for r in MODEL_RULES}.values()
    },
    "charge": CHARGE_WORD.schema,
    "labels": allowed.items(allowed.label(), least=2),
    "any text": allowed.text(),
}
BOUNDS = sorted(
    {
        value
        for fragment in FRAGMENTS.values()
        for value in fragment.values()
        if isinstance(value, int | float)
    }
)
WORDS = sorted({word for fragment in FRAGMENTS.values() for word in fragment.get("enum", ())})
EDGES: list[Any] = [
    *BOUNDS,
    *(math.nextafter(bound, side) for bound in BOUNDS for side in (-math.inf, math.inf)),
    *(bound + step for bound in BOUNDS for step in (-1, 1)),
    *(float(bound) for bound in BOUNDS),
    *WORDS,
    *(word.upper() for word in WORDS),
    "", " ", "WT", " WT ", "two words", "two\nlines", "WT\n", "WT\u200b", "W\u00adT", "\ufeffWT",
    "Δ1/p.(Arg2Gln)", "a\tb", "\x00", "a\u3000b", "a\u00a0b", "𝛼", "\u2028",
    True, False, 0, 0.5, 1, 4.0, -0.0, 1.5, 1e300, 2**63, -(2**63), None, [], {}, ["a"], ["a", "b"],
    ["a", ""], ["a", 1], {"a": 1}, [1.0, 2.0], [0, 1], [2, 3, 4],
]  # fmt: skip
# Letters and marks that every version of Unicode knows, so that no rare invisible one decides.
LETTERS = st.characters(max_codepoint=0x2FF) | st.sampled_from("ΔΩ→−…\u200b\u2028\ufeff\u3000中𝛼")
VALUES = st.recursive(
    st.none()
    | st.booleans()
    | st.integers()
    | st.floats(allow_nan=False, allow_infinity=False)
    | st.text(LETTERS, max_size=6)
    | st.sampled_from(EDGES),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(st.text(max_size=3), inner, max_size=2),
    max_leaves=4,
)


@pytest.mark.parametrize("name", FRAGMENTS)
def test_every_fragment_is_a_schema(name: str) -> None:
    Draft202012Validator.check_schema(FRAGMENTS[name])


@pytest.mark.parametrize("name", FRAGMENTS)
def test_edges_are_judged_alike(name: str) -> None:
    judged = {repr(value): allowed.allows(FRAGMENTS[name], value) for value in EDGES}
    referee = Draft202012Validator(FRAGMENTS[name])
    assert judged == {repr(value): referee.is_valid(value) for value in EDGES}
    assert set(judged.values()) == {True, False}


@pytest.mark.parametrize("name", FRAGMENTS)
@given(value=VALUES)
@settings(max_examples=40, deadline=None)
def test_any_value_is_judged_alike(name: str, value: object) -> None:
    assert allowed.allows(FRAGMENTS[name], value) == Draft202012Validator(FRAGMENTS[name]).is_valid(value)


@given(text=st.text(max_size=8))
@example("\ue000")
@settings(max_examples=500, deadline=None)
def test_only_rare_invisible_letters_are_left_to_the_format(text: str) -> None:
    label = allowed.label()
    if allowed.allows(label, text):
        assert Draft202012Validator(label).is_valid(text)
    else:
        plain = text.strip()
        assert not Draft202012Validator(label).is_valid(text) or not plain.isprintable()


@pytest.mark.parametrize("value", [math.nan, math.inf, -math.inf, 10**400])
def test_what_no_program_can_keep_is_no_number(value: float) -> None:
    assert not allowed.allows(allowed.number(), value)
    assert not allowed.allows(allowed.whole(0), value)


def test_a_keyword_that_is_not_judged_is_not_passed_over() -> None:
    with pytest.raises(KeyError, match="multipleOf"):
        allowed.allows({"type": "number", "multipleOf": 2}, 3)


@pytest.mark.parametrize(
    "fragment", [VOLTAGE_VALUES, allowed.number(above=0, most=100), allowed.number(least=0, below=1)]
)
def test_columns_are_judged_as_single_values_are(fragment: allowed.Fragment) -> None:
    ends = [value for value in fragment.values() if isinstance(value, int | float)]
    numbers = np.array(
        [math.nextafter(end, end + side) for end in ends for side in (-1, 0, 1)] + [1e300, -7.0]
    )
    judged = [not allowed.allows(fragment, float(one)) for one in numbers]
    assert allowed.outside(fragment, numbers).tolist() == judged
    assert set(judged) == {True, False}
    assert allowed.outside(fragment, np.array([np.nan, np.inf])).tolist() == [
        False,
        "maximum" in str(fragment) or "Maximum" in str(fragment),
    ]


def test_limits_are_those_of_what_is_plausible() -> None:
    assert VOLTAGE_VALUES["maximum"] == -VOLTAGE_VALUES["minimum"] == plausible.VOLTAGE_LIMIT_MV == 500.0
    assert FRAGMENTS["temperature_C"] == within(least=-5.0, most=60.0).schema
    assert FRAGMENTS["value_e0"] == within(above=0, most=100.0).schema
