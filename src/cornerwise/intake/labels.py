"""From construct labels to mutations against the wild type, refusing what cannot be told apart."""

from __future__ import annotations

from collections import Counter, defaultdict
from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass

from ..errors import Origin
from ..mutations import Mutation, Mutations, in_residue_order, joined, parse_label
from .findings import Findings, nearest, shown


@dataclass(frozen=True, kw_only=True, slots=True)
class Genotypes:
    """The mutations of each construct, those of the background taken off."""

    by_label: Mapping[str, tuple[Mutation, ...]]  # in residue order; the wild type has none
    background: tuple[Mutation, ...]
    aliases: frozenset[str]  # labels refused because another has the same mutations
    whole: bool  # False when a label could not be read

    @property
    def labels(self) -> dict[Mutations, str]:
        """The construct that carries exactly these mutations."""
        return {frozenset(mutations): label for label, mutations in self.by_label.items()}

    def refused(self, labels: Iterable[str]) -> set[str]:
        """Those of `labels` that were refused as they are spelt."""
        return set(labels) - self.by_label.keys()


def read_genotypes(
    seen: Mapping[str, Origin],
    wild_type: str,
    listed: Mapping[str, Mutations],
    findings: Findings,
) -> Genotypes:
    """Read the mutations of every construct and take off those of the wild type.

    Parameters
    ----------
    seen : mapping of str to Origin
        Every construct's label and where it is first named.
    wild_type : str
        The wild type's label; whatever mutations it spells or is listed with are the background.
    listed : mapping of str to frozenset of Mutation
        The table ``[mutations]``, which goes before what a label spells.
    findings : Findings
        Takes every fault.
    """
    spelt = {label: _spelt(label, wild_type, listed) for label in seen}
    known = {label: mutations for label, mutations in spelt.items() if mutations is not None}
    for label in (label for label in spelt if label not in known):
        _refuse_unreadable(label, seen[label], wild_type, known, findings)
    background = known.get(wild_type, frozenset())
    for label, mutations in known.items():
        if missing := background - mutations:
            findings.add(
                seen[label],
                found=f"{shown(label)} without {joined(missing)}, which the wild type carries",
                expected="every construct in the background of the wild type",
                remedy="name the background mutations in the label, or list the construct under [mutations]",
            )
    _refuse_native_residues(known, seen, findings)
    aliases = _refuse_aliases(known, wild_type, seen, findings)
    return Genotypes(
        by_label={
            label: in_residue_order(mutations - background)
            for label, mutations in known.items()
            if label not in aliases and background <= mutations
        },
        background=in_residue_order(background),
        aliases=aliases,
        whole=len(known) == len(seen) and not aliases,
    )


def _spelt(label: str, wild_type: str, listed: Mapping[str, Mutations]) -> Mutations | None:
    if label in listed:
        return listed[label]
    parsed = parse_label(label)
    return frozenset() if parsed is None and label == wild_type else parsed


def _refuse_unreadable(
    label: str, origin: Origin, wild_type: str, known: Collection[str], findings: Findings
) -> None:
    remedy = "list its mutations in campaign.toml under [mutations]"
    if label.casefold() == wild_type.casefold():
        remedy = f"write {shown(wild_type)}, as the wild type is called"
    elif close := nearest(label, known):
        remedy += f", or did you mean {shown(close)}?"
    findings.add(
        origin,
        found=f"the label {shown(label)}",
        expected="substitutions such as E181A/R212Q or p.(Arg212Gln), or a label listed under [mutations]",
        remedy=remedy,
    )


def _refuse_native_residues(
    known: Mapping[str, Mutations], seen: Mapping[str, Origin], findings: Findings
) -> None:
    """Refuse labels that disagree with most others about the native residue of a position."""
    natives: dict[int, Counter[str]] = defaultdict(Counter)
    for mutations in known.values():
        for mutation in mutations:
            if mutation.position is not None and mutation.native is not None:
                natives[mutation.position][mutation.native] += 1
    usual = {
        position: min(counts, key=lambda native: (-counts[native], native))
        for position, counts in natives.items()
        if len(counts) > 1
    }
    for label, mutations in known.items():
        for mutation in in_residue_order(mutations):
            native = usual.get(mutation.position or 0)
            if native is not None and mutation.native != native:
                findings.add(
                    seen[label],
                    found=f"{mutation} in {shown(label)}, where other labels have {native}",
                    expected="one native residue at each position",
                    remedy="correct the letter or the number of the residue",
                )


def _refuse_aliases(
    known: Mapping[str, Mutations], wild_type: str, seen: Mapping[str, Origin], findings: Findings
) -> frozenset[str]:
    """Refuse a second label for the same mutations; the wild type's and the first one stay."""
    first: dict[Mutations, str] = {known[wild_type]: wild_type} if wild_type in known else {}
    aliases = set()
    for label, mutations in known.items():
        holder = first.setdefault(mutations, label)
        if holder != label:
            aliases.add(label)
            findings.add(
                seen[label],
                found=f"{shown(label)}, which has the same mutations as {shown(holder)}",
                expected="one label for each construct",
                remedy="use one spelling everywhere, or correct the mutations of one of them",
            )
    return frozenset(aliases)
