"""The pairs of a campaign measured in its structure."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from .. import plausible
from ..campaign import Distance
from ..errors import Origin
from ..mutations import Residue
from ..side_chains import DEFINITION, Approach, SideChain, closest_of, side_chain
from .coordinates import Model
from .findings import Findings, shown
from .settings import Document
from .structure import StructureRequest

MOST_LISTED = 12  # residues or pairs named in a note
FEWEST_FOR_AN_OFFSET = 3  # residues; fewer fit in too many places
_TOLD = 3  # faults of one kind that are named

Pair = tuple[Residue, Residue]
SideChains = Mapping[Residue, Sequence[SideChain]]


@dataclass(frozen=True, kw_only=True, slots=True)
class Measured:
    """The distances of the pairs, and what the reader should know of them."""

    distances: tuple[Distance, ...] = ()
    notes: tuple[str, ...] = ()


def named(pair: Pair) -> str:
    """A pair as it is called in sentences."""
    return "/".join(map(str, pair))


def listed(names: Sequence[str]) -> str:
    """Names joined, long lists cut."""
    more = f" and {len(names) - MOST_LISTED} more" if len(names) > MOST_LISTED else ""
    return f"{', '.join(names[:MOST_LISTED])}{more}"


def measure_pairs(
    model: Model,
    request: StructureRequest,
    pairs: Sequence[Pair],
    document: Document,
    findings: Findings,
    *,
    subunits: int,
) -> Measured:
    """Measure the side-chain distance of every pair whose residues are in the structure.

    Parameters
    ----------
    model : Model
        The structure.
    request : StructureRequest
        Which chains, and how its residues are numbered.
    pairs : sequence of (Residue, Residue)
        In residue order.
    document : Document
        For the places of faults.
    findings : Findings
        Takes chains that are not there, residues of another type, broken coordinates.
    subunits : int
        Of the channel, which one chain alone does not show.
    """
    chains = _chains(model, request, document, findings)
    residues = sorted({residue for pair in pairs for residue in pair})
    if not chains or not residues:
        return Measured()
    if _refused_types(model, request, chains, residues, document, findings):
        return Measured()
    found = {residue: _side_chains(model, request, chains, residue, findings) for residue in residues}
    distances = [_distance(pair, found, model, request, findings) for pair in pairs]
    notes = (
        _source_note(model, request, chains, subunits),
        *_absent_note(model, found),
        *_incomplete_note(model, found),
    )
    return Measured(distances=tuple(one for one in distances if one is not None), notes=notes)


def _chains(
    model: Model, request: StructureRequest, document: Document, findings: Findings
) -> tuple[str, ...]:
    """The chains to measure in; none when they are not known, which is a fault."""
    known = [shown(chain) for chain in model.chains]
    if not request.chains and len(known) == 1:
        return model.chains
    unknown = [chain for chain in request.chains if chain not in model.chains]
    if not request.chains:
        line = ", ".join(f'"{chain}"' for chain in model.chains[:4])
        findings.add(
            document.origin("structure", "chains"), found=f"{len(known)} chains of protein in {model.file}",
            expected=f"chains, to say which are of the protein that was mutated: {listed(known)}",
            remedy=f"add a line such as chains = [{line}]",
        )  # fmt: skip
        return ()
    for chain in unknown:
        findings.add(
            document.origin("structure", "chains"), found=f"the chain {shown(chain)}",
            expected=f"chains of protein in {model.file}: {listed(known)}",
            remedy="correct its name; chains are called as the authors of the structure call them",
        )  # fmt: skip
    return () if unknown else request.chains


def _refused_types(
    model: Model,
    request: StructureRequest,
    chains: Sequence[str],
    residues: Sequence[Residue],
    document: Document,
    findings: Findings,
) -> bool:
    """Refuse residues of another type than the wild type's, and a structure that has none at all."""
    others, there = [], 0
    for residue in residues:
        for chain in chains:
            found = model.at(chain, residue.position + request.offset)
            there += bool(found)
            if found and all(one.native != residue.native for one in found):
                number = residue.position + request.offset
                others.append(f"{found[0].name} {number} in chain {chain} for {residue}")
    if there and not others:
        return False
    fitting = _fitting_offset(model, chains, residues)
    remedy = (
        f"did you mean offset = {fitting}, with which all {len(residues)} residues fit?"
        if fitting is not None
        else "correct offset or chains; where the structure is of a mutant, state distances in distances.csv"
    )
    more = f" and {len(others) - _TOLD} more" if len(others) > _TOLD else ""
    what = f"{', '.join(others[:_TOLD])}{more}" if others else f"none of {listed(list(map(str, residues)))}"
    findings.add(
        document.origin("structure", "offset"), found=f"{what} in {model.file}, offset {request.offset}",
        expected="the wild type's residues: number in the campaign plus offset is number in the structure",
        remedy=remedy,
    )  # fmt: skip
    return True


def _fitting_offset(model: Model, chains: Sequence[str], residues: Sequence[Residue]) -> int | None:
    """The one offset with which every residue is in every chain; None if there is no such, or several."""
    if len(residues) < FEWEST_FOR_AN_OFFSET:
        return None
    first, fitting = residues[0], set[int]()
    sequences = [model.sequence(chain) for chain in chains]
    for number, natives in sequences[0].items():
        offset = number - first.position
        if first.native in natives and all(
            residue.native in sequence.get(residue.position + offset, ())
            for residue in residues
            for sequence in sequences
        ):
            fitting.add(offset)
    return fitting.pop() if len(fitting) == 1 else None


def _side_chains(
    model: Model, request: StructureRequest, chains: Sequence[str], residue: Residue, findings: Findings
) -> list[SideChain]:
    """Side chain of a residue in each chain that has it; broken ones are faults."""
    number, found = residue.position + request.offset, []
    for chain in chains:
        for one in model.at(chain, number):
            if one.native != residue.native:
                continue  # another sequence at the same place; the wild type's is there too
            if one.doubled is not None:
                findings.add(
                    Origin(file=model.file), found=f"the atom {one.doubled} twice in {one.name} {number} of "
                    f"chain {chain}", expected="each atom of a residue once, or as alternate conformers",
                    remedy="mend the file, or fetch it anew",
                )  # fmt: skip
            found.append(side_chain(str(residue), residue.native, chain, one.atoms))
    return found


def _distance(
    pair: Pair, found: SideChains, model: Model, request: StructureRequest, findings: Findings
) -> Distance | None:
    ones, others = (found[residue] for residue in pair)
    within, across = closest_of(ones, others)
    charged = _nearer(closest_of(ones, others, charged=True))
    nearest = _nearer((within, across))
    if nearest is None:
        return None
    low, high = plausible.DISTANCE_RANGE_ANGSTROM
    if not low <= nearest.angstrom <= high:
        findings.add(
            Origin(file=model.file), found=f"{nearest.angstrom:.3g} A from {nearest}",
            expected=f"side chains at {low:g} to {high:g} A", remedy="mend the structure, or leave it out",
        )  # fmt: skip
    cited = f" ({request.citation})" if request.citation else ""
    return Distance(
        residues=frozenset(residue.position for residue in pair),
        angstrom=nearest.angstrom,
        within_chain_angstrom=_length(within),
        across_chains_angstrom=_length(across),
        charged_angstrom=_length(charged),
        atoms=str(nearest),
        source=f"{model.file}{cited}",
        definition=DEFINITION,
    )


def _length(approach: Approach | None) -> float | None:
    return None if approach is None else approach.angstrom


def _nearer(approaches: Iterable[Approach | None]) -> Approach | None:
    """The shortest one; the first of equals."""
    known = [approach for approach in approaches if approach is not None]
    return min(known, key=lambda approach: approach.angstrom, default=None)


def _source_note(model: Model, request: StructureRequest, chains: Sequence[str], subunits: int) -> str:
    words = f"chain{'s' * (len(chains) > 1)} {listed(chains)}"
    if request.offset:
        words += f", residue numbers {request.offset:+d}"
    if model.models > 1:
        words += f", the first of {model.models} models"
    alone = "; one chain says nothing of distances between subunits" if subunits > len(chains) == 1 else ""
    return (
        f"side-chain distances are measured in {model.file} ({words}; read with {model.reader})"
        f"{alone}; a structure shows one state, an interaction energy is a difference between two"
    )


def _absent_note(model: Model, found: SideChains) -> tuple[str, ...]:
    absent = [str(residue) for residue, chains in found.items() if not any(one.atoms for one in chains)]
    if not absent:
        return ()
    return (f"{model.file} has no side chain of {listed(absent)}: there is no distance for their pairs",)


def _incomplete_note(model: Model, found: SideChains) -> tuple[str, ...]:
    parts = [
        f"{one.residue} in chain {one.chain} lacks {' '.join(one.missing)}"
        for chains in found.values()
        for one in chains
        if one.missing and any(other.atoms for other in chains)
    ]
    if not parts:
        return ()
    return (
        f"side chains that are incomplete in {model.file}, so that their distances may be too long: "
        f"{listed(parts)}",
    )
