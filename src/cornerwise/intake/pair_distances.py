"""The distance between the side chains of each pair: from the table, or measured in the structure."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace

from ..campaign import Distance
from ..mutations import Cycle, Residue
from .distances import ENDS, StatedDistance
from .findings import Findings
from .labels import Genotypes
from .measured_distances import Measured, Pair, listed, measure_pairs, named
from .parts import Parts

AS_STATED = "as stated"


def pair_distances(
    parts: Parts, genotypes: Genotypes, cycles: Sequence[Cycle], findings: Findings
) -> tuple[tuple[Distance, ...], tuple[str, ...]]:
    """Collect the distances of the campaign's pairs.

    Parameters
    ----------
    parts : Parts
        All that was read.
    genotypes : Genotypes
        The mutations of every construct: their native residues are those of the table and of the structure.
    cycles : sequence of Cycle
        Those of order 2 are the pairs.
    findings : Findings
        Takes residues of another type, and pairs whose distance is given twice.

    Returns
    -------
    distances : tuple of Distance
        In residue order.
    notes : tuple of str
        Where they come from, what is missing, which rows belong to no cycle.
    """
    pairs, stated = _pairs_of(cycles), parts.distances.stated
    _refuse_other_natives(stated, genotypes, findings)
    measured = Measured()
    if parts.structure is not None and parts.model is not None:
        subunits = parts.settings.subunits
        measured = measure_pairs(
            parts.model, parts.structure, pairs, parts.document, findings, subunits=subunits
        )
        _refuse_both(stated, measured, findings)
    found = [*map(_as_stated, stated), *measured.distances]
    notes = (*(_strangers(stated, pairs) if pairs else ()), *measured.notes)
    return tuple(sorted(found, key=lambda one: sorted(one.residues))), notes


def _pairs_of(cycles: Sequence[Cycle]) -> list[Pair]:
    """Native residues of every cycle of two substitutions, each pair once, in residue order."""
    pairs = set()
    for cycle in cycles:
        residues = sorted(
            Residue(mutation.position, mutation.native)
            for mutation in cycle.mutations
            if mutation.position is not None and mutation.native is not None
        )
        if len(cycle.mutations) == len(residues) == 2:
            pairs.add((residues[0], residues[1]))
    return sorted(pairs)


def _as_stated(stated: StatedDistance) -> Distance:
    cited = f" ({stated.citation})" if stated.citation else ""
    return Distance(
        residues=frozenset(residue.position for residue in stated.residues),
        angstrom=stated.angstrom,
        source=f"{stated.origin.file}{cited}",
        definition=stated.definition or AS_STATED,
        origin=stated.origin,
    )


def _refuse_other_natives(stated: Sequence[StatedDistance], genotypes: Genotypes, findings: Findings) -> None:
    """Refuse residues that the labels of the constructs name otherwise."""
    natives: Mapping[int | None, str | None] = {
        mutation.position: mutation.native
        for mutations in genotypes.by_label.values()
        for mutation in mutations
    }
    for one in stated:
        for residue in one.residues:
            native = natives.get(residue.position)
            if native is not None and native != residue.native:
                findings.add(
                    one.origin,
                    found=f"the residue {residue}, where the labels of the constructs have {native}",
                    expected="the native residues of the protein",
                    remedy=f"write {native}{residue.position}, or correct the number",
                )


def _strangers(stated: Sequence[StatedDistance], pairs: Sequence[Pair]) -> tuple[str, ...]:
    """A note on distances of which there is no cycle."""
    strangers = [one for one in stated if one.residues not in pairs]
    if not strangers:
        return ()
    names = listed([named(one.residues) for one in strangers])
    return (f"{strangers[0].origin.file} has the distance of pairs without a cycle of two here: {names}",)


def _refuse_both(stated: Sequence[StatedDistance], measured: Measured, findings: Findings) -> None:
    """Refuse a stated distance of a pair that the structure has."""
    known = {one.residues: one for one in measured.distances}
    for one in stated:
        also = known.get(frozenset(residue.position for residue in one.residues))
        if also is not None:
            findings.add(
                replace(one.origin, column=ENDS[0]),
                found=f"the distance of {named(one.residues)}, which {also.source} has too "
                f"({also.angstrom:.3g} A)",
                expected="one source for each pair", remedy="delete this row, or the table [structure]",
            )  # fmt: skip
