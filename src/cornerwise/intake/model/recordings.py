"""How constructs are recorded, in a model file."""

from __future__ import annotations

from collections.abc import Collection, Mapping
from dataclasses import replace

from ... import plausible
from ...simulation.drawing import voltages_mv
from ...simulation.model import Common, Recording
from ..findings import Findings
from ..rows import FEWEST_CELLS
from ..rules import say
from ..settings import Document
from .keys import COMMON_RULES, RECORDING_RULES
from .parts import Part, entries_of, table_of

MOST_POINTS = 2000
_RANGE_KEYS = {"first_mV", "last_mV", "step_mV"}


def read_recordings(
    document: Document, labels: Collection[str], findings: Findings
) -> tuple[Recording, Common, Mapping[str, Recording]]:
    """Read ``[recording]`` and the ``[[construct]]`` entries.

    Parameters
    ----------
    document : Document
        The file, under known keys.
    labels : collection of str
        Labels of the constructs that are made; none when these are not known.
    findings : Findings
        Takes every fault.

    Returns
    -------
    tuple of Recording, Common and mapping of str to Recording
        Of all constructs unless they say otherwise; what they share; those that say otherwise, by label.
    """
    part = table_of(document, "recording", findings)
    common = Common(**part.read(COMMON_RULES, findings))
    recording = Recording(**part.read(RECORDING_RULES, findings))
    _check(part, recording, common, findings)
    own: dict[str, Recording] = {}
    for entry in entries_of(document, "construct", findings):
        label = _label(entry, labels, findings)
        changed = replace(recording, **entry.read(RECORDING_RULES, findings))
        _check(entry, changed, common, findings)
        if label in own:
            findings.add(
                entry.origin("label"), found=f"the construct {label} again", expected="each construct once",
                remedy="put both into one entry",
            )  # fmt: skip
        elif label is not None:
            own[label] = changed
    return recording, common, own


def _label(entry: Part, labels: Collection[str], findings: Findings) -> str | None:
    if entry.lacks(("label",), findings):
        return None
    label = entry.values["label"]
    if not isinstance(label, str):
        findings.add(
            entry.origin("label"), found=say(label), expected="the label of a construct, in quotes",
            remedy="write the label as the cycles spell it",
        )  # fmt: skip
        return None
    if labels and label not in labels:
        entry.refuse_name(("label",), label, tuple(labels), findings)
        return None
    return label


def _check(part: Part, how: Recording, common: Common, findings: Findings) -> None:
    """Refuse protocols and numbers that no campaign can have, where a key of this part makes them so."""
    for_all = part.path == ("recording",)
    if for_all or part.values.keys() & _RANGE_KEYS:
        _check_range(part, how, findings)
    of_charges = for_all or "charge_cells" in part.values
    if of_charges and common.charges == "summaries" and 0 < how.charge_cells < FEWEST_CELLS:
        findings.add(
            part.origin("charge_cells"), found=f"{how.charge_cells} charge to be summarised",
            expected=f"0, or at least {FEWEST_CELLS} for a standard error", remedy="correct charge_cells",
        )  # fmt: skip


def _check_range(part: Part, how: Recording, findings: Findings) -> None:
    span = how.last_mv - how.first_mv
    points = 0 if span < 0 else len(voltages_mv(how.first_mv, how.last_mv, max(how.step_mv, span / 1e5)))
    if span <= plausible.NARROWEST_RANGE_MV or not plausible.FEWEST_POINTS <= points <= MOST_POINTS:
        findings.add(
            part.origin("first_mV"),
            found=f"{points} points from {how.first_mv:g} to {how.last_mv:g} mV",
            expected=f"{plausible.FEWEST_POINTS} to {MOST_POINTS} points over more than "
            f"{plausible.NARROWEST_RANGE_MV:g} mV",
            remedy="correct first_mV, last_mV or step_mV",
        )
