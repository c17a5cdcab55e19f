"""Cells that the user sets aside with a reason: the ``[[exclude]]`` entries.

Each entry has exactly the keys ``construct``, ``cell`` and ``reason``. The cell's curve, charges and open
probabilities are read and checked like any other, shown with the reason, and used for nothing; a cell that is
refused must be deleted instead.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Mapping

from ..campaign import Exclusion
from ..errors import Origin
from ..mutations import Cycle
from .findings import Findings, listing, nearest, shown
from .parts import Parts
from .rules import say, visible_text
from .settings import KEYS, Document
from .spelling import meant_keys

EXCLUDE_KEYS = ("construct", "cell", "reason")
MOST_LISTED = 12  # cells named where one is not known

EXPECTED = {
    "construct": "the label of a construct, in quotes",
    "cell": "the label of one of its cells, in quotes",
    "reason": "why the cell is set aside, in quotes and on one line",
}


def read_exclusions(document: Document, findings: Findings) -> dict[Exclusion, Origin]:
    """Read the ``[[exclude]]`` entries, and the place of each; by construct and cell."""
    read: dict[Exclusion, Origin] = {}
    earlier: dict[tuple[str, str], Origin] = {}
    for number, entry in enumerate(document.entries("exclude", findings)):
        exclusion = _exclusion(document, number, entry, findings)
        if exclusion is None:
            continue
        key, place = (exclusion.construct, exclusion.cell), document.origin("exclude", number)
        if key in earlier:
            findings.add(
                place, found=f"the cell {'/'.join(key)} again, after {earlier[key]}",
                expected="each cell once", remedy="delete one of the two entries",
            )  # fmt: skip
        else:
            earlier[key] = read[exclusion] = place
    return dict(sorted(read.items(), key=lambda item: (item[0].construct, item[0].cell)))


def _exclusion(
    document: Document, number: int, entry: Mapping[str, object], findings: Findings
) -> Exclusion | None:
    meant = meant_keys(
        entry,
        EXCLUDE_KEYS,
        findings,
        origin=lambda key: document.origin("exclude", number, key),
        misplaced=lambda key: f"move {key} above the first [[exclude]]" if key in KEYS else None,
    )
    entry = {meant[key]: value for key, value in entry.items() if key in meant}
    values: dict[str, str] = {}
    for key in EXCLUDE_KEYS:
        try:
            values[key] = visible_text(entry.get(key))
        except ValueError:
            found = say(entry[key]) if key in entry else f"no {key}"
            findings.add(
                document.origin("exclude", number, key), found=found, expected=EXPECTED[key],
                remedy=f'write {key} = "..." in this entry',
            )  # fmt: skip
    return Exclusion(**values) if len(values) == len(EXCLUDE_KEYS) else None


def check_exclusions(parts: Parts, requested: Iterable[Cycle], findings: Findings) -> None:
    """Refuse cells that do not exist, and constructs left without any.

    Parameters
    ----------
    parts : Parts
        All that was read.
    requested : iterable of Cycle
        The cycles asked for by ``[[cycle]]``, whose constructs must each keep a cell, as the wild type must.
    findings : Findings
        Takes every fault.
    """
    known = _known_cells(parts)
    for exclusion, origin in parts.exclusions.items():
        _check_cell(parts, known, exclusion, origin, findings)
    wild_type = parts.settings.wild_type
    needed = {wild_type: "the wild type"}
    for cycle in requested:
        for corner in cycle.corners:
            needed.setdefault(corner.label, f"a construct of the cycle {cycle.name},")
    for label, what in needed.items():
        if not _refused_emptied(parts, label, what, findings) and label == wild_type:
            _refuse_no_charge(parts, wild_type, findings)


def _known_cells(parts: Parts) -> dict[str, set[str]]:
    """Cells of each construct in any table."""
    known: dict[str, set[str]] = defaultdict(set)
    for table in (parts.curves, parts.charges, parts.openings):
        for construct, cell in table.cells:
            known[construct].add(cell)
    return known


def _check_cell(
    parts: Parts, known: Mapping[str, set[str]], exclusion: Exclusion, origin: Origin, findings: Findings
) -> None:
    tables = (parts.curves, parts.charges, parts.openings)
    construct, cell = exclusion.construct, exclusion.cell
    own = known.get(construct, set())
    unread = any(not table.readable or construct in table.lost or cell in table.lost for table in tables)
    if unread or cell in own:
        return
    if construct not in known:
        found, close = (
            f"the construct {shown(construct)}, of which no cell is known",
            nearest(construct, known),
        )
        expected = "a construct with cells in curves, charges or openings"
    else:
        found, close = f"the cell {shown(cell)}, which {shown(construct)} has not", nearest(cell, own)
        names = [shown(name) for name in sorted(own)]
        known_ones = listing(names if len(names) <= MOST_LISTED else [*names[:MOST_LISTED], "another"])
        expected = f"a cell of {shown(construct)} in curves, charges or openings: {known_ones}"
    remedy = f"did you mean {shown(close)}?" if close else "correct the label, or delete the entry"
    findings.add(origin, found=found, expected=expected, remedy=remedy)


def _excluded(parts: Parts, label: str) -> dict[str, Origin]:
    """Cells of a construct that are set aside, and where."""
    return {one.cell: place for one, place in parts.exclusions.items() if one.construct == label}


def _refused_emptied(parts: Parts, label: str, what: str, findings: Findings) -> bool:
    """Whether every curve of a construct is set aside, which is a fault."""
    excluded = _excluded(parts, label)
    curves = {cell for construct, cell in parts.curves.cells if construct == label}
    if not curves or not curves <= excluded.keys() or label in parts.curves.lost:
        return False
    findings.add(
        max((excluded[cell] for cell in curves), key=lambda place: (place.row or 0, place.column or "")),
        found=f"every curve of {what} {shown(label)} set aside ({', '.join(sorted(curves))})",
        expected="a usable cell of the wild type, and of every construct of a cycle that is asked for",
        remedy="keep one at least, or delete the [[cycle]] entry; record more cells",
    )
    return True


def _refuse_no_charge(parts: Parts, wild_type: str, findings: Findings) -> None:
    """Refuse that every charge of the wild type is set aside where the charge policy needs one."""
    if not isinstance(parts.settings.charge, str):
        return
    excluded = _excluded(parts, wild_type)
    tables = (parts.charges, parts.openings)
    cells = {cell for table in tables for construct, cell in table.cells if construct == wild_type}
    kept = any(summary.construct == wild_type for summary in parts.charges.summaries)
    unread = any(not table.readable or wild_type in table.lost for table in tables)
    if kept or unread or not cells or not cells <= excluded.keys():
        return
    findings.add(
        max((excluded[cell] for cell in cells), key=lambda place: (place.row or 0, place.column or "")),
        found=f"every charge of the wild type {shown(wild_type)} set aside ({', '.join(sorted(cells))}), "
        f'with charge = "{parts.settings.charge}"',
        expected="its total charge per channel from one usable cell at least",
        remedy="keep one, or state one charge for all in campaign.toml: charge = { value_e0 = 13.0, sem_e0 = "
        "0.5 }, your values",
    )
