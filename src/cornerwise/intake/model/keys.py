"""The keys of a model file: types and ranges; the defaults are those of `cornerwise.simulation.model`."""

from __future__ import annotations

from collections.abc import Mapping
from typing import get_args

from ... import plausible
from ...simulation.model import ChargeForm, Order, Scatter
from .. import allowed
from ..findings import listing
from ..rules import Reader, Rule, number, text, visible_text, whole, within, word, yes_or_no

SECTIONS = (
    "campaign", "gating", "step", "coupling", "side", "mutation", "interaction", "recording", "construct",
)  # fmt: skip

MOST_CELLS = 1000
MOST_COPIES = 12

_LIMIT = plausible.VOLTAGE_LIMIT_MV
_NOT_NEGATIVE = within(least=0)
_FRACTION = within(least=0, below=0.5)
_STEP = within(above=0, most=_LIMIT)
_VOLTAGE = within(least=-_LIMIT, most=_LIMIT)
_A_VOLTAGE = f"a voltage in mV, from -{_LIMIT:g} to {_LIMIT:g}"
_A_FRACTION = "a fraction of the whole charge, from 0 to below 0.5"
_AN_ENERGY = "an energy in the campaign's energy_unit"


def _words(allowed: tuple[str, ...]) -> str:
    return listing(f'"{one}"' for one in allowed)


def _different(names: list[str]) -> tuple[str, ...]:
    stripped = tuple(map(str.strip, names))
    if len(set(stripped)) < len(stripped):
        raise ValueError
    return stripped


def _rising(ends: list[float]) -> tuple[float, float]:
    low, high = map(float, ends)
    if low > high:
        raise ValueError
    return low, high


_BATCHES = Reader(allowed.items(allowed.label()), _different)
_SPAN = Reader(allowed.items(allowed.number(above=0), least=2, most=2), _rising)

TOP_RULES = (
    Rule(key="note", attribute="note", read=text, expected="text in quotes"),
    Rule(key="seed", attribute="seed", read=whole(0), expected="a whole number, not negative"),
)

GATING_RULES = (
    Rule(
        key="order", attribute="order", read=word(*get_args(Order)), expected=_words(get_args(Order)),
    ),
    Rule(key="opening", attribute="opening", read=visible_text, expected="the name of a step, in quotes"),
    Rule(
        key="activation_energy", attribute="activation_energy", read=number, expected=_AN_ENERGY,
    ),
)  # fmt: skip

STEP_RULES = (
    Rule(key="name", attribute="name", read=visible_text, expected="a name in quotes"),
    Rule(
        key="charge_e0", attribute="charge_e0",
        read=within(least=0, most=plausible.CHARGE_LIMIT_E0),
        expected=f"a charge in e0, from 0 to {plausible.CHARGE_LIMIT_E0:g}",
    ),
    Rule(key="midpoint_mV", attribute="midpoint_mv", read=_VOLTAGE, expected=_A_VOLTAGE),
    Rule(key="energy", attribute="energy", read=number, expected=_AN_ENERGY),
    Rule(
        key="copies", attribute="copies", read=whole(1, MOST_COPIES),
        expected=f"a whole number from 1 to {MOST_COPIES}",
    ),
)  # fmt: skip

COUPLING_RULES = (Rule(key="energy", attribute="energy", read=number, expected=_AN_ENERGY),)

SIDE_RULES = (
    Rule(key="name", attribute="name", read=visible_text, expected="a name in quotes"),
    Rule(key="beside", attribute="beside", read=visible_text, expected="the name of a state, in quotes"),
    Rule(key="energy", attribute="energy", read=number, expected=_AN_ENERGY),
)

EFFECT_RULES = (
    Rule(key="activation_energy", attribute="activation_energy", read=number, expected=_AN_ENERGY),
    Rule(key="charge_e0", attribute="charge_e0", read=number, expected="a charge in e0"),
)

# Effects on single steps and states: the key, and what it adds.
EFFECT_TABLES: Mapping[str, str] = {
    "steps": "energies",
    "steps_mV": "voltages in mV",
    "step_charges_e0": "charges in e0",
    "states": "energies",
}

COMMON_RULES = (
    Rule(
        key="batch_sd_mV", attribute="batch_sd_mv", read=_NOT_NEGATIVE,
        expected="a standard deviation in mV, not negative",
    ),
    Rule(
        key="batch_charge_sd", attribute="batch_charge_sd", read=_FRACTION,
        expected="a fraction, from 0 to below 0.5",
    ),
    Rule(
        key="charges", attribute="charges", read=word(*get_args(ChargeForm)),
        expected=_words(get_args(ChargeForm)),
    ),
    Rule(key="decimals", attribute="decimals", read=whole(0, 15), expected="a whole number from 0 to 15"),
    Rule(
        key="charge_decimals", attribute="charge_decimals", read=whole(0, 15),
        expected="a whole number from 0 to 15",
    ),
)  # fmt: skip

RECORDING_RULES = (
    Rule(
        key="cells", attribute="cells", read=whole(1, MOST_CELLS),
        expected=f"a whole number from 1 to {MOST_CELLS}",
    ),
    Rule(
        key="scatter", attribute="scatter", read=word(*get_args(Scatter)),
        expected=_words(get_args(Scatter)),
    ),
    Rule(
        key="cell_sd_mV", attribute="cell_sd_mv", read=_NOT_NEGATIVE,
        expected="a standard deviation in mV, not negative",
    ),
    Rule(
        key="batches", attribute="batches", read=_BATCHES,
        expected='different names in quotes, such as ["day 1", "day 2"]',
    ),
    Rule(key="first_mV", attribute="first_mv", read=_VOLTAGE, expected=_A_VOLTAGE),
    Rule(key="last_mV", attribute="last_mv", read=_VOLTAGE, expected=_A_VOLTAGE),
    Rule(key="step_mV", attribute="step_mv", read=_STEP, expected="a step in mV, above 0"),
    Rule(key="noise", attribute="noise", read=_FRACTION, expected=_A_FRACTION),
    Rule(key="baseline_sd", attribute="baseline_sd", read=_FRACTION, expected=_A_FRACTION),
    Rule(
        key="leak_per_mV", attribute="leak_per_mv", read=within(above=-0.1, below=0.1),
        expected="a slope in fractions of the whole charge per mV, smaller than 0.1",
    ),
    Rule(
        key="gain_pC", attribute="gain_pc", read=_SPAN,
        expected="two charges in pC above 0, the lower first, such as [0.6, 2.4]",
    ),
    Rule(key="holding_mV", attribute="holding_mv", read=_VOLTAGE, expected=_A_VOLTAGE),
    Rule(key="stray_mV", attribute="stray_mv", read=_VOLTAGE, expected=_A_VOLTAGE),
    Rule(
        key="charge_cells", attribute="charge_cells", read=whole(0, MOST_CELLS),
        expected=f"a whole number from 0 to {MOST_CELLS}",
    ),
    Rule(
        key="charge_sd", attribute="charge_sd", read=within(least=0, most=0.2),
        expected="a fraction of the charge, from 0 to 0.2",
    ),
    Rule(
        key="charge_method", attribute="charge_method", read=visible_text,
        expected="the name of a method, in quotes",
    ),
    Rule(key="paired", attribute="paired", read=yes_or_no, expected="true or false"),
    Rule(
        key="opening_cells", attribute="opening_cells", read=whole(0, MOST_CELLS),
        expected=f"a whole number from 0 to {MOST_CELLS}",
    ),
    Rule(key="opening_step_mV", attribute="opening_step_mv", read=_STEP, expected="a step in mV, above 0"),
    Rule(
        key="opening_noise", attribute="opening_noise", read=_FRACTION,
        expected="a relative standard deviation, from 0 to below 0.5",
    ),
    Rule(
        key="opening_floor", attribute="opening_floor", read=within(above=0, below=0.1),
        expected="a probability above 0 and below 0.1",
    ),
)  # fmt: skip


def keys_of(rules: tuple[Rule, ...]) -> tuple[str, ...]:
    """Names of the keys that rules are for."""
    return tuple(rule.key for rule in rules)


# Every key of every table, "" being the top of the file; docs/simulate.md has a row for each.
KEYS: Mapping[str, tuple[str, ...]] = {
    "": (*keys_of(TOP_RULES), "cycles"),
    "gating": keys_of(GATING_RULES),
    "step": keys_of(STEP_RULES),
    "coupling": ("steps", *keys_of(COUPLING_RULES)),
    "side": keys_of(SIDE_RULES),
    "mutation": ("name", *keys_of(EFFECT_RULES), *EFFECT_TABLES),
    "interaction": ("mutations", *keys_of(EFFECT_RULES), *EFFECT_TABLES),
    "recording": (*keys_of(RECORDING_RULES), *keys_of(COMMON_RULES)),
    "construct": ("label", *keys_of(RECORDING_RULES)),
}
