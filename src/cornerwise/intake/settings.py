"""The keys of ``campaign.toml``: types, ranges and defaults.

`RULES` names every plain key with what it may hold; the defaults are those of `cornerwise.campaign.Settings`.
Besides them there are ``charge``, which is ``"measured"``, ``"wild-type"`` or a table ``{ value_e0, sem_e0,
citation }`` whose citation may be left out, and the tables of `cornerwise.intake.listed`,
`cornerwise.intake.exclusions` and `cornerwise.intake.structure`. ``charge_method`` is compared with the
methods of the tables once these are read.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from typing import get_args

from .. import plausible
from ..campaign import ChargePolicy, IntervalKind, RankOrder, Settings, StatedCharge
from ..errors import Origin
from ..intervals import Adjustment
from ..units import ENERGY_UNITS
from .findings import Findings, listing, nearest
from .rules import Rule, line, read_by_rules, say, visible_text, whole, within, word, yes_or_no
from .spelling import meant_keys


@dataclass(frozen=True, kw_only=True, slots=True)
class Document:
    """The content of ``campaign.toml``, or of the sheets that stand for it."""

    values: Mapping[str, object]
    file: str
    rows: Mapping[tuple[str | int, ...], tuple[str, int]] = field(default_factory=dict)  # file and row

    def as_meant(self, known: Sequence[str], findings: Findings) -> Document:
        """The document under known keys; others are refused, and taken for what they must stand for."""
        meant = meant_keys(self.values, known, findings, origin=self.origin)
        values = {meant[key]: value for key, value in self.values.items() if key in meant}
        rows = {(meant.get(str(first), first), *rest): place for (first, *rest), place in self.rows.items()}
        return Document(values=values, file=self.file, rows=rows)

    def entries(self, name: str, findings: Findings) -> list[Mapping[str, object]]:
        """Entries of the array of tables called `name`; none when it is something else, which is a fault."""
        entries = self.values.get(name, [])
        if isinstance(entries, list) and all(isinstance(entry, Mapping) for entry in entries):
            return entries
        findings.add(
            self.origin(name), found=say(entries), expected=f"entries that begin with [[{name}]]",
            remedy="use double square brackets",
        )  # fmt: skip
        return []

    def origin(self, *path: str | int) -> Origin:
        """Return the place of a key, named by its path; that of its table when it is missing there."""
        first_entry = (*path, 0)  # where an array of tables begins
        places = (first_entry, *(path[:length] for length in range(len(path), 0, -1)))
        known = (place for place in places if place in self.rows)
        file, row = self.rows.get(next(known, ()), (self.file, None))
        names = [f"entry {part + 1}" if isinstance(part, int) else part for part in path]
        return Origin(file=file, row=row, column=" ".join(names) or None)


# Stands for a policy that was refused, so that no charges are called for in its name.
_UNKNOWN_CHARGE = StatedCharge(value_e0=1.0, sem_e0=0.0)

_LOW_C, _HIGH_C = plausible.TEMPERATURE_RANGE_C
_STATE_CHARGE = "write charge = { value_e0 = 13.0, sem_e0 = 0.5 } with your own values"
_POSITIVE = within(above=0)

RULES = (
    Rule(key="title", attribute="title", read=line, expected="text in quotes, on one line"),
    Rule(
        key="wild_type", attribute="wild_type", read=visible_text,
        expected="the wild type's label, in quotes",
        remedy="write the label as it stands in the tables",
    ),
    Rule(
        key="temperature_C", attribute="temperature_c", read=within(least=_LOW_C, most=_HIGH_C),
        expected=f"a temperature from {_LOW_C:g} to {_HIGH_C:g} degrees Celsius",
        remedy="correct the value; subtract 273.15 if it is in kelvin",
    ),
    Rule(key="subunits", attribute="subunits", read=whole(1), expected="a whole number, at least 1"),
    Rule(
        key="energy_unit", attribute="energy_unit", read=word(*ENERGY_UNITS),
        expected=listing(f'"{unit}"' for unit in ENERGY_UNITS),
    ),
    Rule(
        key="confidence", attribute="confidence", read=within(above=0.5, below=1),
        expected="a number above 0.5 and below 1", remedy="write 0.95 for 95 %",
    ),
    Rule(
        key="replicates", attribute="replicates", read=whole(1000, 1_000_000),
        expected="a whole number from 1000 to 1000000",
    ),
    Rule(key="seed", attribute="seed", read=whole(0), expected="a whole number, not negative"),
    Rule(
        key="threshold", attribute="threshold", read=_POSITIVE,
        expected="an energy above 0, in the campaign's energy_unit",
    ),
    Rule(
        key="shortcut_tolerance", attribute="shortcut_tolerance", read=_POSITIVE,
        expected="an energy above 0, in the campaign's energy_unit",
    ),
    Rule(
        key="charge_margin", attribute="charge_margin", read=within(above=0, below=1),
        expected="a fraction above 0 and below 1", remedy="write 0.10 for 10 %",
    ),
    Rule(
        key="voltage_offset_mV", attribute="voltage_offset_mv",
        read=within(least=0, most=plausible.VOLTAGE_LIMIT_MV),
        expected="a standard uncertainty in mV, not negative",
    ),
    Rule(
        key="reference_voltage_mV", attribute="reference_voltage_mv",
        read=within(least=-plausible.VOLTAGE_LIMIT_MV, most=plausible.VOLTAGE_LIMIT_MV),
        expected=f"a voltage in mV, from -{plausible.VOLTAGE_LIMIT_MV:g} to {plausible.VOLTAGE_LIMIT_MV:g}",
        remedy="correct the value; write -60 for -60 mV",
    ),
    Rule(
        key="charge_method", attribute="charge_method", read=visible_text,
        expected="the name of a method, in quotes",
        remedy="write it as it stands in the column method of charges",
    ),
    Rule(
        key="correct_sloping_plateaus", attribute="correct_sloping_plateaus", read=yes_or_no,
        expected="true or false",
    ),
    Rule(
        key="interval", attribute="interval", read=word(*get_args(IntervalKind)),
        expected=listing(f'"{word}"' for word in get_args(IntervalKind)),
    ),
    Rule(
        key="adjustment", attribute="adjustment", read=word(*get_args(Adjustment)),
        expected=listing(f'"{word}"' for word in get_args(Adjustment)),
    ),
    Rule(key="simultaneous", attribute="simultaneous", read=yes_or_no, expected="true or false"),
    Rule(
        key="rank_by", attribute="rank_by", read=word(*get_args(RankOrder)),
        expected=listing(f'"{word}"' for word in get_args(RankOrder)),
    ),
    Rule(key="first", attribute="first", read=whole(1), expected="a whole number, at least 1"),
)  # fmt: skip

CHARGE_WORD = word("measured", "wild-type")
CHARGE_RULES = (
    Rule(
        key="value_e0", attribute="value_e0", read=within(above=0, most=plausible.CHARGE_LIMIT_E0),
        expected=f"a charge per channel above 0, at most {plausible.CHARGE_LIMIT_E0:g} e0",
        remedy=_STATE_CHARGE,
    ),
    Rule(
        key="sem_e0", attribute="sem_e0", read=within(least=0),
        expected="its standard uncertainty in e0, not negative", remedy=_STATE_CHARGE,
    ),
    Rule(
        key="citation", attribute="citation", read=visible_text,
        expected="the source of the value, in quotes",
        remedy='write citation = "where the value is published", or leave it out',
    ),
)  # fmt: skip
NEEDED = ("value_e0", "sem_e0")  # of a stated charge

KEYS = (*(rule.key for rule in RULES), "charge")
CHARGE_KEYS = tuple(rule.key for rule in CHARGE_RULES)
SECTIONS = ("mutations", "cycle", "exclude", "structure")


def read_settings(document: Document, findings: Findings) -> Settings | None:
    """Read every key but the tables of mutations and cycles.

    Parameters
    ----------
    document : Document
        The content of the file, under known keys.
    findings : Findings
        Takes wrong types and values out of range.

    Returns
    -------
    Settings or None
        None only if the wild type is not named; keys at fault have their defaults.
    """
    values = read_by_rules(document.values, RULES, document.origin, findings)
    if "charge" in document.values:
        values["charge"] = _charge_policy(document, findings)
    if values.get("simultaneous") and values.get("interval") == "monte-carlo":
        findings.add(
            document.origin("simultaneous"),
            found='simultaneous = true with interval = "monte-carlo"',
            expected="one of the two: intervals that hold all cycles at once are propagated ones",
            remedy="delete one of the two lines",
        )
    if "wild_type" not in document.values:
        findings.add(
            document.origin("wild_type"),
            found="no wild type",
            expected="the label of the construct that all others are compared with",
            remedy='add a line such as wild_type = "WT"',
        )
    if "wild_type" not in values:
        return None
    defaulted = tuple(key for key in KEYS if key not in document.values)
    return Settings(**values, defaulted=defaulted)


def _charge_policy(document: Document, findings: Findings) -> ChargePolicy:
    stated = document.values["charge"]
    if isinstance(stated, Mapping):
        return _stated_charge(document, stated, findings)
    try:
        return CHARGE_WORD(stated)
    except ValueError:
        close = nearest(stated, CHARGE_WORD.schema["enum"]) if isinstance(stated, str) else None
        findings.add(
            document.origin("charge"),
            found=say(stated),
            expected='"measured", "wild-type" or a table such as { value_e0 = 13.0, sem_e0 = 0.5 }',
            remedy=f'did you mean "{close}"?' if close else "choose one of the three",
        )
        return _UNKNOWN_CHARGE


def _stated_charge(document: Document, stated: Mapping[str, object], findings: Findings) -> ChargePolicy:
    def origin(key: str) -> Origin:
        return document.origin("charge", key)

    meant = meant_keys(stated, CHARGE_KEYS, findings, origin=origin)
    stated = {meant[key]: value for key, value in stated.items() if key in meant}
    values = read_by_rules(stated, CHARGE_RULES, origin, findings)
    for rule in CHARGE_RULES:
        if rule.key in NEEDED and rule.key not in stated:
            findings.add(origin(rule.key), found=f"no {rule.key}", expected=rule.expected, remedy=rule.remedy)
    return StatedCharge(**values) if values.keys() >= set(NEEDED) else _UNKNOWN_CHARGE
