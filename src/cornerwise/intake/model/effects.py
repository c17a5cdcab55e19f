"""Mutations in a model file, what they do alone and together, and the cycles they are put into."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from ...mutations import HIGHEST_LISTED_ORDER, Mutation, Mutations, in_residue_order, joined, parse_label
from ...simulation.model import Effect
from ..findings import Findings, nearest, shown
from ..listed import mutation_set
from ..rules import say
from ..settings import Document
from .gating import Gating
from .keys import EFFECT_RULES, EFFECT_TABLES
from .parts import Part, entries_of

_SEPARATORS = frozenset("+/;:# \t")


@dataclass(frozen=True, kw_only=True, slots=True)
class Mutated:
    """The mutations of a model file."""

    mutations: tuple[Mutation, ...]  # as listed
    whole: bool  # False when an entry could not be read: other names may then not be called unknown


def read_mutations(
    document: Document, gating: Gating, mev: float, findings: Findings
) -> tuple[Mutated, list[Effect]]:
    """Read the ``[[mutation]]`` entries: the mutations as listed, and the effect of each."""
    mutations: list[Mutation] = []
    effects, whole = [], True
    for entry in entries_of(document, "mutation", findings):
        effect = _effect(entry, frozenset(), gating, mev, findings)
        mutation = _mutation(entry, findings)
        if mutation is None:
            whole = False
            continue
        if mutation in mutations:
            whole = False
            findings.add(
                entry.origin("name"), found=f"the mutation {mutation} again", expected="each mutation once",
                remedy="delete one of the two entries",
            )  # fmt: skip
            continue
        whole = not _refused_other_native(entry, mutation, mutations, findings) and whole
        mutations.append(mutation)
        effects.append(replace(effect, mutations=frozenset({mutation})))
    return Mutated(mutations=tuple(mutations), whole=whole), effects


def read_interactions(
    document: Document, gating: Gating, mutated: Mutated, mev: float, findings: Findings
) -> list[Effect]:
    """Read the ``[[interaction]]`` entries."""
    effects: list[Effect] = []
    for entry in entries_of(document, "interaction", findings):
        effect = _effect(entry, frozenset(), gating, mev, findings)
        if entry.lacks(("mutations",), findings):
            continue
        together = _known_set(entry, "mutations", entry.values["mutations"], mutated, findings)
        if together is None:
            continue
        if any(together == other.mutations for other in effects):
            findings.add(
                entry.origin("mutations"), found=f"a second interaction of {joined(together)}",
                expected="each once", remedy="put both into one entry",
            )  # fmt: skip
            continue
        effects.append(replace(effect, mutations=together))
    return effects


def read_cycles(top: Part, mutated: Mutated, findings: Findings) -> tuple[tuple[Mutation, ...], ...]:
    """Read ``cycles``: which mutations are put together, each cycle once."""
    listed = top.values.get("cycles")
    if not isinstance(listed, list) or not listed:
        findings.add(
            top.origin("cycles"), found="no cycles" if listed in (None, []) else say(listed),
            expected="the mutations of at least one cycle",
            remedy='add a line such as cycles = [["E181A", "R212Q"]] above the first table',
        )  # fmt: skip
        return ()
    cycles: list[Mutations] = []
    for words in listed:
        together = _known_set(top, "cycles", words, mutated, findings)
        if together is None:
            continue
        if together in cycles:
            findings.add(
                top.origin("cycles"), found=f"a second cycle of {joined(together)}", expected="each once",
                remedy="delete one of the two",
            )  # fmt: skip
            continue
        cycles.append(together)
    return tuple(map(in_residue_order, cycles))


def _mutation(entry: Part, findings: Findings) -> Mutation | None:
    if entry.lacks(("name",), findings):
        return None
    name = entry.values["name"]
    found = mutation_set([name], entry.origin("name"), findings)
    if found is None:
        return None
    (mutation,) = found
    if parse_label(mutation.text) is None and _SEPARATORS & set(mutation.text):
        findings.add(
            entry.origin("name"), found=f"the name {shown(mutation.text)}",
            expected="a name without spaces and none of + / ; : #, which separate the mutations of a label",
            remedy="choose another name",
        )  # fmt: skip
        return None
    return mutation


def _refused_other_native(
    entry: Part, mutation: Mutation, earlier: Sequence[Mutation], findings: Findings
) -> bool:
    for other in earlier:
        same_place = mutation.position is not None and other.position == mutation.position
        if same_place and other.native != mutation.native:
            findings.add(
                entry.origin("name"), found=f"{mutation}, where {other} has {other.native}",
                expected="one native residue at each position",
                remedy="correct the letter or the number of the residue",
            )  # fmt: skip
            return True
    return False


def _known_set(part: Part, key: str, words: object, mutated: Mutated, findings: Findings) -> Mutations | None:
    """Two or more mutations that have entries of their own; None when that is not so."""
    together = mutation_set(words, part.origin(key), findings)
    if together is None:
        return None
    if not 2 <= len(together) <= HIGHEST_LISTED_ORDER:
        findings.add(
            part.origin(key), found=f"{len(together)} mutation{'s' * (len(together) != 1)}",
            expected=f"2 to {HIGHEST_LISTED_ORDER} mutations", remedy="correct the list",
        )  # fmt: skip
        return None
    known = [mutation.text for mutation in mutated.mutations]
    texts = [mutation.text for mutation in in_residue_order(together)]
    unknown = [text for text in texts if text not in known] if mutated.whole else []
    for name in unknown:
        close = nearest(name, known)
        findings.add(
            part.origin(key), found=f"{shown(name)}, which has no [[mutation]] entry",
            expected="mutations with entries of their own",
            remedy=f"did you mean {shown(close)}?" if close else "add the entry",
        )  # fmt: skip
    return None if unknown else together


def _effect(entry: Part, mutations: Mutations, gating: Gating, mev: float, findings: Findings) -> Effect:
    plain = entry.read(EFFECT_RULES, findings)
    tables = {
        key: entry.numbers(
            key, gating.state_names if key == "states" else gating.step_names or ["..."], what, findings
        )
        for key, what in EFFECT_TABLES.items()
    }
    return Effect(
        mutations=mutations,
        activation_mev=plain.get("activation_energy", 0.0) * mev,
        charge_e0=plain.get("charge_e0", 0.0),
        steps_mev={name: energy * mev for name, energy in tables["steps"].items()},
        steps_mv=tables["steps_mV"],
        step_charges_e0=tables["step_charges_e0"],
        states_mev={name: energy * mev for name, energy in tables["states"].items()},
    )
