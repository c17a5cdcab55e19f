"""How close two residues' side chains come in a structure.

The distance between two side chains is the shortest one between an atom of the one and an atom of the other.
Hydrogens and the backbone (N, CA, C, O and the terminal OXT) do not count; glycine, which has no side chain,
stands with its CA. Where both native residues carry a charge, the shortest distance between their charged
atoms is given too: within about 4 A they are commonly taken for a salt bridge (D. J. Barlow and J. M.
Thornton, "Ion-pairs in proteins", J. Mol. Biol. 168 (1983) 867-885; from memory).

Alternate conformers carry a letter. Atoms of different letters are never seen together, so they are not
paired; an atom without a letter goes with all.

Atom names are those of the chemical components dictionary of the worldwide Protein Data Bank.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

DEFINITION = "shortest distance between atoms of the side chains, hydrogens aside; CA for glycine"
CHARGED_DEFINITION = (
    "shortest distance between charged atoms: OD1 and OD2 of aspartate, OE1 and OE2 of glutamate, NZ of "
    "lysine, NE, NH1 and NH2 of arginine, ND1 and NE2 of histidine"
)

_BACKBONE = frozenset({"N", "CA", "C", "O", "OXT"})

SIDE_CHAIN_ATOMS: Mapping[str, tuple[str, ...]] = {
    "A": ("CB",),
    "C": ("CB", "SG"),
    "D": ("CB", "CG", "OD1", "OD2"),
    "E": ("CB", "CG", "CD", "OE1", "OE2"),
    "F": ("CB", "CG", "CD1", "CD2", "CE1", "CE2", "CZ"),
    "G": ("CA",),
    "H": ("CB", "CG", "ND1", "CD2", "CE1", "NE2"),
    "I": ("CB", "CG1", "CG2", "CD1"),
    "K": ("CB", "CG", "CD", "CE", "NZ"),
    "L": ("CB", "CG", "CD1", "CD2"),
    "M": ("CB", "CG", "SD", "CE"),
    "N": ("CB", "CG", "OD1", "ND2"),
    "P": ("CB", "CG", "CD"),
    "Q": ("CB", "CG", "CD", "OE1", "NE2"),
    "R": ("CB", "CG", "CD", "NE", "CZ", "NH1", "NH2"),
    "S": ("CB", "OG"),
    "T": ("CB", "OG1", "CG2"),
    "V": ("CB", "CG1", "CG2"),
    "W": ("CB", "CG", "CD1", "CD2", "NE1", "CE2", "CE3", "CZ2", "CZ3", "CH2"),
    "Y": ("CB", "CG", "CD1", "CD2", "CE1", "CE2", "CZ", "OH"),
}

CHARGED_ATOMS: Mapping[str, tuple[str, ...]] = {
    "D": ("OD1", "OD2"),
    "E": ("OE1", "OE2"),
    "H": ("ND1", "NE2"),
    "K": ("NZ",),
    "R": ("NE", "NH1", "NH2"),
}


@dataclass(frozen=True, kw_only=True, slots=True)
class Atom:
    """One atom that is no hydrogen."""

    name: str
    position: tuple[float, float, float]  # angstrom
    conformer: str = ""  # its letter; "" for an atom that all conformers share


@dataclass(frozen=True, kw_only=True, slots=True)
class SideChain:
    """The side chain of one residue in one chain, as far as it is in the structure."""

    residue: str  # as the campaign numbers it, "D171"
    native: str  # one-letter code
    chain: str
    atoms: tuple[Atom, ...]

    @property
    def missing(self) -> tuple[str, ...]:
        """Names of the atoms that are not in the structure."""
        present = {atom.name for atom in self.atoms}
        return tuple(name for name in SIDE_CHAIN_ATOMS[self.native] if name not in present)

    @property
    def charged(self) -> tuple[Atom, ...]:
        """The charged atoms; none where the residue carries no charge."""
        return tuple(atom for atom in self.atoms if atom.name in CHARGED_ATOMS.get(self.native, ()))


@dataclass(frozen=True, kw_only=True, slots=True)
class Approach:
    """Two atoms and their distance."""

    angstrom: float
    ends: tuple[tuple[SideChain, Atom], tuple[SideChain, Atom]]

    def __str__(self) -> str:
        (one, its), (other, others) = self.ends
        return f"{_place(one, its)} to {_place(other, others)}"


def _place(side_chain: SideChain, atom: Atom) -> str:
    conformer = f" (conformer {atom.conformer})" if atom.conformer else ""
    return f"{side_chain.residue} {atom.name}{conformer} in chain {side_chain.chain}"


def side_chain(residue: str, native: str, chain: str, atoms: Iterable[Atom]) -> SideChain:
    """Keep the atoms of a residue that belong to its side chain.

    Parameters
    ----------
    residue : str
        As the campaign numbers it.
    native : str
        One-letter code.
    chain : str
        Name of the chain.
    atoms : iterable of Atom
        All of the residue but hydrogens.
    """
    kept = (atom for atom in atoms if (atom.name == "CA" if native == "G" else atom.name not in _BACKBONE))
    return SideChain(residue=residue, native=native, chain=chain, atoms=tuple(kept))


def closest(one: SideChain, other: SideChain, *, charged: bool = False) -> Approach | None:
    """Closest approach of two side chains; None where no two atoms can be paired.

    Parameters
    ----------
    one, other : SideChain
        Of two residues.
    charged : bool, optional
        Whether charged atoms alone count.

    Examples
    --------
    >>> d = side_chain("D3", "D", "A", [Atom(name="OD1", position=(0.0, 0.0, 0.0))])
    >>> k = side_chain("K9", "K", "A", [Atom(name="NZ", position=(1.0, 2.0, 2.0))])
    >>> found = closest(d, k)
    >>> found.angstrom, str(found)
    (3.0, 'D3 OD1 in chain A to K9 NZ in chain A')
    """
    pairs = (
        (math.dist(a.position, b.position), a, b)
        for a in (one.charged if charged else one.atoms)
        for b in (other.charged if charged else other.atoms)
        if not a.conformer or not b.conformer or a.conformer == b.conformer
    )
    found = min(pairs, key=lambda pair: (pair[0], pair[1].name, pair[2].name), default=None)
    if found is None:
        return None
    angstrom, a, b = found
    return Approach(angstrom=angstrom, ends=((one, a), (other, b)))


def closest_of(
    ones: Sequence[SideChain], others: Sequence[SideChain], *, charged: bool = False
) -> tuple[Approach | None, Approach | None]:
    """Closest approach of two residues of a protein of one or several chains.

    Parameters
    ----------
    ones, others : sequence of SideChain
        The two residues, in each chain that has them.
    charged : bool, optional
        Whether charged atoms alone count.

    Returns
    -------
    within, across : Approach or None
        With both residues in one chain, and each in another.
    """
    found: dict[bool, list[Approach]] = {True: [], False: []}
    for one in ones:
        for other in others:
            approach = closest(one, other, charged=charged)
            if approach is not None:
                found[one.chain == other.chain].append(approach)
    within, across = (min(found[same], key=lambda a: a.angstrom, default=None) for same in (True, False))
    return within, across
