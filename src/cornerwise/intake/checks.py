"""What the tables of a campaign must agree on, and what none of them may lack."""

from __future__ import annotations

from dataclasses import replace

from ..campaign import ChargeReplicate, ChargeSummary, Curve, OpeningCurve
from ..errors import Origin
from ..mutations import parse_label
from .charges import CITED, UNNAMED
from .findings import Findings, listing, nearest, shown
from .labels import Genotypes
from .openings import METHOD as LIMITING_SLOPE
from .parts import Parts


def check(parts: Parts, genotypes: Genotypes, findings: Findings) -> None:
    """Refuse tables that contradict each other, and constructs or charges that are missing.

    Parameters
    ----------
    parts : Parts
        All that was read.
    genotypes : Genotypes
        The mutations of every construct, and the labels that were refused already.
    findings : Findings
        Takes every fault.
    """
    _check_medians(parts, findings)
    _check_batches(parts, findings)
    _check_charges(parts, genotypes, findings)
    _check_methods(parts, findings)
    _check_voltages(parts, genotypes, findings)
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


def _check_voltages(parts: Parts, genotypes: Genotypes, findings: Findings) -> None:
    """Charges and open probabilities alone say nothing of an energy."""
    with_voltages = {**parts.curves.seen, **parts.medians.seen}
    told = genotypes.refused(parts.seen)
    for what, seen in (("charges", parts.charges.seen), ("open probabilities", parts.openings.seen)):
        for label, origin in seen.items():
            if label in told or not parts.surely_without(label, parts.curves, parts.medians):
                continue
            told.add(label)
            close = nearest(label, with_voltages)
            if close in genotypes.refused(with_voltages):
                continue  # that label could not be read, and is told with this one as what was meant
            if close is not None and _is_stranger(close, label, genotypes):
                _refuse_stranger(close, with_voltages[close], label, origin, findings)
                continue
            remedy = f"did you mean {shown(close)}?" if close else f"add its curves, or delete its {what}"
            findings.add(
                origin,
                found=f"{what} of {shown(label)}, which has neither curves nor a median",
                expected="charge-voltage data of every construct",
                remedy=remedy,
            )


def _is_stranger(label: str, other: str, genotypes: Genotypes) -> bool:
    """Whether of two spellings `label` has more mutations that no third construct carries."""
    thirds = (own for name, own in genotypes.by_label.items() if name not in (label, other))
    carried = {mutation for own in thirds for mutation in own}
    strange, less = (len(set(genotypes.by_label.get(name, ())) - carried) for name in (label, other))
    return strange > less


def _refuse_stranger(label: str, place: Origin, meant: str, elsewhere: Origin, findings: Findings) -> None:
    """Refuse a label of curves or medians that is most likely the misspelt one of two."""
    findings.add(
        place,
        found=f"{shown(label)}, where {elsewhere.file} has {shown(meant)}, whose mutations other constructs "
        "carry too",
        expected="one spelling of each construct in all tables",
        remedy=f"did you mean {shown(meant)}? Then correct {place.file}, not {elsewhere.file}",
    )


def _check_batches(parts: Parts, findings: Findings) -> None:
    """A cell in several tables, or measured by several methods, is one cell, so it has one batch."""
    first: dict[tuple[str, str], tuple[str, Origin]] = {}
    cells: tuple[Curve | ChargeReplicate | OpeningCurve, ...]
    cells = (*parts.curves.curves, *parts.charges.replicates, *parts.openings.openings)
    for one in cells:
        if one.batch is None:
            continue
        batch, place = first.setdefault((one.construct, one.cell), (one.batch, one.origin))
        if batch != one.batch:
            findings.add(
                replace(one.origin, column="batch"),
                found=f"batch {shown(one.batch)} of the cell {one.construct}/{one.cell}, "
                f"which has batch {shown(batch)} elsewhere ({place})",
                expected="one batch for a cell of the same name in all tables",
                remedy="correct the batch or, if these are two cells, rename one of them",
            )


def _check_charges(parts: Parts, genotypes: Genotypes, findings: Findings) -> None:
    """The charge policy finds the charges it needs; a limiting slope is one."""
    policy, wild_type = parts.settings.charge, parts.settings.wild_type
    if not isinstance(policy, str) or not parts.surely_without(wild_type, parts.charges, parts.openings):
        return
    if any(label.casefold() == wild_type.casefold() for label in genotypes.refused(parts.charges.seen)):
        return  # they are there under a spelling that is told
    state_one = (
        "state one charge for all in campaign.toml: charge = { value_e0 = 13.0, sem_e0 = 0.5 }, your values"
    )
    if parts.charges_file is None and not parts.openings.seen:
        findings.add(
            parts.document.origin("charge"),
            found=f'no table of charges, with charge = "{policy}"',
            expected="the total charge per channel",
            remedy=f'add a table of charges with the wild type\'s, from which charge = "wild-type" takes '
            f"one for all; or {state_one}",
        )
    else:
        first = next(iter(parts.openings.seen.values()), Origin())
        findings.add(
            Origin(file=parts.charges_file or first.file),
            found=f'no charge of the wild type {shown(wild_type)}, with charge = "{policy}"',
            expected="its total charge per channel",
            remedy=f"add it to the table; or {state_one}",
        )


def _check_methods(parts: Parts, findings: Findings) -> None:
    """A method has one form in a construct, and the one that is asked for exists."""
    slopes = parts.openings.seen
    charges: tuple[ChargeReplicate | ChargeSummary, ...]
    charges = (*parts.charges.replicates, *parts.charges.summaries)
    for one in charges:
        if one.method == LIMITING_SLOPE and one.construct in slopes:
            findings.add(
                replace(one.origin, column="method"),
                found=f"a charge of {shown(one.construct)} by the method {shown(LIMITING_SLOPE)}, which its "
                f"open probabilities give too ({slopes[one.construct]})",
                expected="each method in one form",
                remedy="delete the charge, or give its method another name",
            )
    wanted = parts.settings.charge_method
    known = (*parts.charges.methods, *((LIMITING_SLOPE,) if slopes else ()))
    if wanted is None or wanted in known or not parts.surely_without(wanted, parts.charges, parts.openings):
        return
    if wanted in (UNNAMED, CITED) and parts.charges.lost:  # a lost row may be one without a method
        return
    close = nearest(wanted, known)
    findings.add(
        parts.document.origin("charge_method"),
        found=f"the method {shown(wanted)}, by which no charge was measured",
        expected=f"one of the methods of the tables, {listing(map(shown, known))}"
        if known
        else "no method, since there are no charges",
        remedy=f"did you mean {shown(close)}?" if close else "correct the name, or delete the line",
    )


def meant_wild_type(parts: Parts, findings: Findings) -> Parts:
    """Refuse a wild type of which there are no data; read on as if it were spelt as in the tables."""
    wild_type, listed = parts.settings.wild_type, parts.listed
    if not parts.surely_without(wild_type, *parts.tables):
        return parts
    spelling_none = [label for label in parts.seen if not listed.get(label, parse_label(label))]
    words = [label for label in spelling_none if not any(map(str.isdigit, label))]
    close = nearest(wild_type, spelling_none) or (words[0] if len(words) == 1 else None)
    origin = parts.document.origin("wild_type")
    _refuse_name(origin, "the wild type", wild_type, close or nearest(wild_type, parts.seen), findings)
    return parts if close is None else replace(parts, settings=replace(parts.settings, wild_type=close))


def _check_names(parts: Parts, findings: Findings) -> None:
    """The labels under [mutations] are those of constructs."""
    for label in parts.listed:
        if parts.surely_without(label, *parts.tables):
            close = nearest(label, parts.seen)
            _refuse_name(parts.document.origin("mutations", label), "mutations of", label, close, findings)


def _refuse_name(origin: Origin, what: str, label: str, close: str | None, findings: Findings) -> None:
    findings.add(
        origin,
        found=f"{what} {shown(label)}, of which there are no data",
        expected="the label of a construct in the tables",
        remedy=f"did you mean {shown(close)}?" if close else "correct the label, or add the construct's data",
    )
