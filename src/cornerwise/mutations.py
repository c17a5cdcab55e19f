"""Construct labels to sets of mutations and back, and the double-mutant cycles among constructs."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from difflib import get_close_matches
from itertools import combinations
from typing import Literal

from .errors import Origin, UsageError

_THREE_LETTER = {
    "Ala": "A", "Arg": "R", "Asn": "N", "Asp": "D", "Cys": "C", "Gln": "Q", "Glu": "E",
    "Gly": "G", "His": "H", "Ile": "I", "Leu": "L", "Lys": "K", "Met": "M", "Phe": "F",
    "Pro": "P", "Ser": "S", "Thr": "T", "Trp": "W", "Tyr": "Y", "Val": "V",
}  # fmt: skip
_ONE_LETTER = frozenset(_THREE_LETTER.values())

_SUBSTITUTION = re.compile(r"([A-Z])([1-9][0-9]*)([A-Z])")
_HGVS = re.compile(r"([A-Z][a-z]{2})([1-9][0-9]*)([A-Z][a-z]{2})")
_RESIDUE = re.compile(r"([A-Z](?:[a-z]{2})?)([1-9][0-9]*)")
_SEPARATORS = re.compile(r"[+/;:\s]+")

HIGHEST_LISTED_ORDER = 6  # of a cycle whose missing constructs are named one by one

Mutations = frozenset["Mutation"]


@dataclass(frozen=True, slots=True)
class Mutation:
    """One mutation; `position`, `native` and `mutant` are None when it is not a plain substitution."""

    text: str  # "R212Q", or the user's own word
    position: int | None = None
    native: str | None = None  # one-letter code
    mutant: str | None = None  # one-letter code

    def __str__(self) -> str:
        return self.text

    @property
    def residue_order(self) -> tuple[bool, int, str]:
        """Sort key: substitutions by residue number, then everything else by its text."""
        return (self.position is None, self.position or 0, self.text)


def in_residue_order(mutations: Iterable[Mutation]) -> tuple[Mutation, ...]:
    """Sort `mutations` by residue number."""
    return tuple(sorted(mutations, key=lambda mutation: mutation.residue_order))


_ACIDIC, _BASIC = frozenset("DE"), frozenset("KR")

OppositeCharges = Literal["opposite charges", "opposite charges with histidine"]


def opposite_charges(mutations: Sequence[Mutation]) -> OppositeCharges | None:
    """Whether the native residues of a pair carry opposite charges, as those of a salt bridge do.

    Parameters
    ----------
    mutations : sequence of Mutation
        Of one cycle; anything but a pair of substitutions is no candidate.

    Returns
    -------
    {"opposite charges", "opposite charges with histidine"} or None
        Aspartate or glutamate with lysine or arginine; histidine is stated apart, its charge depends on
        the pH (common practice, no source). It says that the pair could form a salt bridge, no more.

    Examples
    --------
    >>> opposite_charges([Mutation("E154Q", 154, "E", "Q"), Mutation("R226Q", 226, "R", "Q")])
    'opposite charges'
    """
    natives = [mutation.native for mutation in mutations]
    if len(natives) != 2 or not any(native in _ACIDIC for native in natives):
        return None
    if any(native in _BASIC for native in natives):
        return "opposite charges"
    return "opposite charges with histidine" if "H" in natives else None


def parse_mutation(token: str) -> Mutation | None:
    """Read one substitution in one-letter or HGVS protein notation.

    Parameters
    ----------
    token : str
        Such as ``R212Q``, ``p.Arg212Gln`` or ``p.(Arg212Gln)``.

    Returns
    -------
    Mutation or None
        None if `token` is no substitution of one of the 20 amino acids by another.

    References
    ----------
    HGVS sequence variant nomenclature, protein substitutions: https://hgvs-nomenclature.org

    Examples
    --------
    >>> parse_mutation("p.(Arg212Gln)").text
    'R212Q'
    """
    bare = token.removeprefix("p.").strip("[]()").removeprefix("p.").strip("()")
    if match := _HGVS.fullmatch(bare):
        native, mutant = _THREE_LETTER.get(match[1]), _THREE_LETTER.get(match[3])
    elif match := _SUBSTITUTION.fullmatch(bare):
        native, mutant = match[1], match[3]
    else:
        return None
    if native is None or mutant is None or native == mutant or not {native, mutant} <= _ONE_LETTER:
        return None
    return Mutation(f"{native}{match[2]}{mutant}", int(match[2]), native, mutant)


def named_mutation(token: str) -> Mutation:
    """Read `token` as a substitution if it is one, else keep it as a mutation of the user's own naming."""
    return parse_mutation(token) or Mutation(token.strip())


@dataclass(frozen=True, slots=True, order=True)
class Residue:
    """A native residue of the protein."""

    position: int
    native: str  # one-letter code

    def __str__(self) -> str:
        return f"{self.native}{self.position}"


def parse_residue(text: str) -> Residue | None:
    """Read a residue in one-letter or three-letter notation.

    Parameters
    ----------
    text : str
        Such as ``D171`` or ``Asp171``.

    Returns
    -------
    Residue or None
        None if `text` is no residue, one of the 20 amino acids and its number.

    Examples
    --------
    >>> str(parse_residue("Asp171"))
    'D171'
    >>> parse_residue("D171N") is None
    True
    """
    match = _RESIDUE.fullmatch(text)
    native = _THREE_LETTER.get(match[1], match[1]) if match else ""
    return Residue(int(match[2]), native) if match and native in _ONE_LETTER else None


def parse_label(label: str) -> Mutations | None:
    """Read the mutations a construct's label spells out.

    Parameters
    ----------
    label : str
        Substitutions joined by ``+``, ``/``, ``;``, ``:`` or space.

    Returns
    -------
    frozenset of Mutation or None
        None if any part of `label` is no substitution, or a residue occurs twice.

    Examples
    --------
    >>> sorted(map(str, parse_label("E181A/R212Q")))
    ['E181A', 'R212Q']
    >>> parse_label("wild type") is None
    True
    """
    tokens = [token for token in _SEPARATORS.split(label.strip()) if token]
    parsed = [parse_mutation(token) for token in tokens]
    mutations = [mutation for mutation in parsed if mutation is not None]
    if not mutations or len(mutations) < len(tokens):
        return None
    if len({mutation.position for mutation in mutations}) < len(mutations):
        return None
    return frozenset(mutations)


def joined(mutations: Iterable[Mutation]) -> str:
    """Text of a set of mutations in residue order, joined by a slash."""
    return "/".join(map(str, in_residue_order(mutations)))


@dataclass(frozen=True, kw_only=True, slots=True)
class Corner:
    """One construct's place in a cycle."""

    label: str
    mutations: tuple[Mutation, ...]  # those of the cycle that this corner carries
    sign: int  # s_k = (-1)^(order - number of mutations)


@dataclass(frozen=True, kw_only=True, slots=True)
class Cycle:
    """A complete cycle of order 2 (double-mutant) or higher."""

    name: str
    mutations: tuple[Mutation, ...]  # in residue order
    corners: tuple[Corner, ...]  # wild type, singles, doubles, ...; 2**order of them

    @property
    def order(self) -> int:
        """Number of mutations."""
        return len(self.mutations)


@dataclass(frozen=True, kw_only=True, slots=True)
class CycleRequest:
    """A ``[[cycle]]`` entry."""

    mutations: tuple[Mutation, ...]
    name: str | None = None
    origin: Origin = field(default_factory=Origin)


def _subsets(mutations: tuple[Mutation, ...]) -> list[tuple[Mutation, ...]]:
    return [subset for size in range(len(mutations) + 1) for subset in combinations(mutations, size)]


def missing_corners(mutations: Iterable[Mutation], labels: Mapping[Mutations, str]) -> tuple[str, ...]:
    """Corners that a cycle on `mutations` lacks.

    Parameters
    ----------
    mutations : iterable of Mutation
        The mutations of the cycle.
    labels : mapping of frozenset of Mutation to str
        The construct that carries exactly these mutations; the wild type carries none.

    Returns
    -------
    tuple of str
        The mutations of each missing construct joined by a slash; empty when the cycle is complete.
    """
    ordered = in_residue_order(mutations)
    return tuple(joined(s) or "wild type" for s in _subsets(ordered) if frozenset(s) not in labels)


def complete_cycle(
    mutations: Iterable[Mutation], labels: Mapping[Mutations, str], name: str | None = None
) -> Cycle:
    """Put together the cycle on `mutations`.

    Raises
    ------
    KeyError
        If a corner is missing; see `missing_corners`.
    """
    ordered = in_residue_order(mutations)
    corners = tuple(
        Corner(label=labels[frozenset(s)], mutations=s, sign=(-1) ** (len(ordered) - len(s)))
        for s in _subsets(ordered)
    )
    return Cycle(name=name or joined(ordered), mutations=ordered, corners=corners)


def _by_order_then_residue(mutations: Mutations) -> tuple[int, list[tuple[bool, int, str]]]:
    return len(mutations), [mutation.residue_order for mutation in in_residue_order(mutations)]


def find_cycles(labels: Mapping[Mutations, str]) -> tuple[Cycle, ...]:
    """Find every complete cycle among constructs, each once.

    A cycle on a set of mutations needs the construct that carries them all, so each construct with two
    or more mutations offers exactly one candidate.

    Parameters
    ----------
    labels : mapping of frozenset of Mutation to str
        The construct that carries exactly these mutations; the wild type carries none.

    Returns
    -------
    tuple of Cycle
        By order, then in residue order.
    """
    # Without as many constructs as corners there is no need to list the corners, 2**order of them.
    fitting = (m for m in labels if len(m) >= 2 and 2 ** len(m) <= len(labels))
    candidates = sorted(fitting, key=_by_order_then_residue)
    return tuple(complete_cycle(m, labels) for m in candidates if not missing_corners(m, labels))


def name_of_cycle(asked: str, cycles: Mapping[str, Collection[str]]) -> str:
    """Name of the cycle that is asked for by its name, or by its mutations in any order.

    Parameters
    ----------
    asked : str
        What the user wrote.
    cycles : mapping of str to collection of str
        Mutations of every cycle by its name.

    Raises
    ------
    UsageError
        If there is no such cycle; names the nearest, or all.
    """
    if asked in cycles:
        return asked
    mutations = set(map(str, parse_label(asked) or ()))
    for name, own in cycles.items():
        if mutations == set(own):
            return name
    every = f"there are {', '.join(cycles)}" if cycles else "none is complete"
    if not asked.strip():
        raise UsageError(f"give a cycle; {every}")
    near = get_close_matches(asked, cycles, n=1)
    raise UsageError(f"no cycle is called {asked}; {f'did you mean {near[0]}?' if near else every}")


def incomplete_cycles(labels: Mapping[Mutations, str]) -> tuple[tuple[str, tuple[str, ...]], ...]:
    """Find the constructs with two or more mutations whose cycle lacks a corner, and what is missing.

    Parameters
    ----------
    labels : mapping of frozenset of Mutation to str
        The construct that carries exactly these mutations; the wild type carries none.

    Returns
    -------
    tuple of (str, tuple of str)
        Label, and the missing constructs as `missing_corners` names them; beyond order
        `HIGHEST_LISTED_ORDER` their number alone. By order, then in residue order.
    """
    candidates = sorted((m for m in labels if len(m) >= 2), key=_by_order_then_residue)
    lacking = ((labels[m], _named_or_counted(m, labels)) for m in candidates)
    return tuple((label, missing) for label, missing in lacking if missing)


def lacking(label: str, missing: Iterable[str]) -> str:
    """Say of a construct what its cycle lacks, both as `incomplete_cycles` gives them.

    Examples
    --------
    >>> lacking("E181A/R212Q", ["R212Q"])
    'E181A/R212Q: no cycle, it lacks R212Q'
    """
    return f"{label}: no cycle, it lacks {', '.join(missing)}"


def _named_or_counted(mutations: Mutations, labels: Mapping[Mutations, str]) -> tuple[str, ...]:
    if len(mutations) <= HIGHEST_LISTED_ORDER:
        return missing_corners(mutations, labels)
    missing = 2 ** len(mutations) - sum(1 for present in labels if present <= mutations)
    return (f"{missing} constructs",) if missing else ()
