"""What the tables of a campaign must agree on, and what none of them may lack."""

from __future__ import annotations

from dataclasses import replace

from ..errors import Origin
from .findings import Findings, nearest, shown
from .parts import Parts


def check(parts: Parts, aliases: frozenset[str], findings: Findings) -> None:
    """Refuse tables that contradict each other, and constructs or charges that are missing.

    Parameters
    ----------
    parts : Parts
        All that was read.
    aliases : frozenset of str
        Labels already refused because another construct has the same mutations.
    findings : Findings
        Takes every fault.
    """
    _check_medians(parts, findings)
    _check_batches(parts, findings)
    _check_charges(parts, findings)
    _check_voltages(parts, aliases, findings)
    _check_names(parts, findings)


def _check_medians(parts: Parts, findings: Findings) -> None:
    """Each construct has curves or a median, and not both."""
    for label, origin in parts.medians.seen.items():
        if label in parts.curves.seen:
            findings.add(
                origin,
                found=f"a median of {shown(label)}, which has curves too ({parts.curves.seen[label]})",
                expected="either curves or a summary of each construct",
                remedy="delete the summary: the curves say more",
            )


def _check_voltages(parts: Parts, aliases: frozenset[str], findings: Findings) -> None:
    """Charges alone say nothing of an energy."""
    with_voltages = {**parts.curves.seen, **parts.medians.seen}
    for label, origin in parts.charges.seen.items():
        if label not in aliases and parts.surely_without(label, parts.curves, parts.medians):
            close = nearest(label, with_voltages)
            findings.add(
                origin,
                found=f"charges of {shown(label)}, which has neither curves nor a median",
                expected="voltages of every construct",
                remedy=f"did you mean {shown(close)}?" if close else "add its curves, or delete its charges",
            )


def _check_batches(parts: Parts, findings: Findings) -> None:
    """A cell in both tables is one cell, so it has one batch."""
    batches = {(curve.construct, curve.cell): curve for curve in parts.curves.curves}
    for replicate in parts.charges.replicates:
        curve = batches.get((replicate.construct, replicate.cell))
        if curve and curve.batch and replicate.batch and curve.batch != replicate.batch:
            findings.add(
                replace(replicate.origin, column="batch"),
                found=f"batch {shown(replicate.batch)} of the cell {replicate.construct}/{replicate.cell}, "
                f"which has batch {shown(curve.batch)} elsewhere ({curve.origin})",
                expected="one batch for a cell of the same name in both tables",
                remedy="correct the batch or, if these are two cells, rename one of them",
            )


def _check_charges(parts: Parts, findings: Findings) -> None:
    """The charge policy finds the charges it needs."""
    policy, wild_type = parts.settings.charge, parts.settings.wild_type
    if not isinstance(policy, str) or not parts.surely_without(wild_type, parts.charges):
        return
    state_one = (
        "state one charge for all in campaign.toml: charge = { value_e0 = 13.0, sem_e0 = 0.5 }, your values"
    )
    if parts.charges_file is None:
        findings.add(
            parts.document.origin("charge"),
            found=f'no table of charges, with charge = "{policy}"',
            expected="the total charge per channel",
            remedy=f'add a table of charges with the wild type\'s, from which charge = "wild-type" takes '
            f"one for all; or {state_one}",
        )
    else:
        findings.add(
            Origin(file=parts.charges_file),
            found=f'no charge of the wild type {shown(wild_type)}, with charge = "{policy}"',
            expected="its total charge per channel",
            remedy=f"add it to the table; or {state_one}",
        )


def _check_names(parts: Parts, findings: Findings) -> None:
    """The labels in campaign.toml are those of constructs."""
    known = parts.seen
    tables = (parts.curves, parts.medians, parts.charges)
    wild_type = parts.settings.wild_type
    if parts.surely_without(wild_type, *tables):
        _refuse_name(parts.document.origin("wild_type"), "the wild type", wild_type, known, findings)
    for label in parts.listed:
        if parts.surely_without(label, *tables):
            _refuse_name(parts.document.origin("mutations", label), "mutations of", label, known, findings)


def _refuse_name(origin: Origin, what: str, label: str, known: dict[str, Origin], findings: Findings) -> None:
    close = nearest(label, known)
    findings.add(
        origin,
        found=f"{what} {shown(label)}, of which there are no data",
        expected="the label of a construct in the tables",
        remedy=f"did you mean {shown(close)}?" if close else "correct the label, or add the construct's data",
    )
