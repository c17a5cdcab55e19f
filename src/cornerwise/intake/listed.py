"""The tables of ``campaign.toml``: which mutations a label stands for, and which cycles are asked for."""

from __future__ import annotations

from collections.abc import Mapping

from ..errors import Origin
from ..mutations import (
    CycleRequest,
    Mutation,
    Mutations,
    in_residue_order,
    joined,
    named_mutation,
    parse_label,
    parse_mutation,
)
from . import allowed
from .findings import Findings, shown
from .rules import say, visible_text
from .settings import KEYS, Document
from .spelling import meant_keys

CYCLE_KEYS = ("name", "mutations")
FEWEST_MUTATIONS = 2  # of a cycle
WORDS = allowed.items(allowed.label())  # the mutations of a construct
MOST_MUTATIONS = 200  # of a construct


def listed_mutations(document: Document, findings: Findings) -> dict[str, Mutations]:
    """Read the table ``[mutations]``: the mutations of each construct it lists, by label."""
    table = document.values.get("mutations", {})
    if not isinstance(table, Mapping):
        findings.add(
            document.origin("mutations"),
            found=say(table),
            expected='a table [mutations] with lines such as "E181A R212Q" = ["E181A", "R212Q"]',
            remedy="write it as a table",
        )
        return {}
    listed: dict[str, Mutations] = {}
    for label, words in table.items():
        origin = document.origin("mutations", label)
        if label in KEYS and not isinstance(words, list):
            findings.add(
                origin, found=f"the key {label} inside [mutations]", expected="labels of constructs",
                remedy=f"move {label} above the line [mutations]",
            )  # fmt: skip
            continue
        mutations = mutation_set(words, origin, findings)
        if mutations is not None:
            listed[label.strip()] = mutations
    return listed


def cycle_requests(document: Document, findings: Findings) -> tuple[CycleRequest, ...]:
    """Read the ``[[cycle]]`` entries, by order and then in residue order."""
    entries = document.entries("cycle", findings)
    requests = [_request(document, number, entry, findings) for number, entry in enumerate(entries)]
    sound = [request for request in requests if request is not None]
    _refuse_twins(sound, findings)
    return tuple(sorted(sound, key=_order))


def _order(request: CycleRequest) -> tuple[int, list[tuple[bool, int, str]]]:
    return len(request.mutations), [mutation.residue_order for mutation in request.mutations]


def _request(
    document: Document, number: int, entry: Mapping[str, object], findings: Findings
) -> CycleRequest | None:
    origin = document.origin("cycle", number)
    meant = meant_keys(
        entry,
        CYCLE_KEYS,
        findings,
        origin=lambda _: origin,
        misplaced=lambda key: (
            f"move {key} above the first [[cycle]] and [mutations]" if key in KEYS else None
        ),
    )
    entry = {meant[key]: value for key, value in entry.items() if key in meant}
    name = _name(entry["name"], origin, findings) if "name" in entry else None
    mutations = mutation_set(entry.get("mutations", []), origin, findings)
    if mutations is None:
        return None
    if len(mutations) < FEWEST_MUTATIONS:
        findings.add(
            origin, found=f"{len(mutations) or 'no'} mutation{'s' * (len(mutations) != 1)}",
            expected="two or more mutations", remedy='write mutations = ["E181A", "R212Q"] with your own',
        )  # fmt: skip
        return None
    return CycleRequest(mutations=in_residue_order(mutations), name=name, origin=origin)


def _name(value: object, origin: Origin, findings: Findings) -> str | None:
    try:
        return visible_text(value)
    except ValueError:
        findings.add(origin, found=say(value), expected="a name in quotes", remedy="correct the name")
        return None


def _refuse_twins(requests: list[CycleRequest], findings: Findings) -> None:
    """Refuse a second cycle of the same name or on the same mutations."""
    names: set[str] = set()
    sets: set[tuple[Mutation, ...]] = set()
    for request in requests:
        name = request.name or joined(request.mutations)
        if request.mutations in sets:
            findings.add(
                request.origin, found=f"a second cycle on {joined(request.mutations)}",
                expected="each cycle once", remedy="delete one of the two entries",
            )  # fmt: skip
        elif name in names:
            findings.add(
                request.origin, found=f"a second cycle called {shown(name)}",
                expected="another name for each cycle", remedy="rename one of them",
            )  # fmt: skip
        names.add(name)
        sets.add(request.mutations)


def mutation_set(words: object, origin: Origin, findings: Findings) -> Mutations | None:
    """Read a list of mutations; None when it is at fault, or names a residue twice."""
    if not isinstance(words, list) or not all(isinstance(word, str) and word.strip() for word in words):
        findings.add(
            origin, found=say(words), expected='a list of mutations such as ["E181A", "R212Q"]',
            remedy="write each mutation in quotes, inside square brackets",
        )  # fmt: skip
        return None
    if len(words) > MOST_MUTATIONS:
        findings.add(
            origin, found=f"{len(words)} mutations", expected=f"at most {MOST_MUTATIONS}",
            remedy="name those that differ between the constructs",
        )  # fmt: skip
        return None
    faults = [fault for word in words if (fault := _word_fault(word)) is not None]
    for found, remedy in faults:
        findings.add(origin, found=found, expected="one mutation in each pair of quotes", remedy=remedy)
    mutations = [named_mutation(word) for word in words]
    places = [mutation.position or mutation.text for mutation in mutations]
    if len(set(places)) < len(places):
        findings.add(
            origin, found="the same residue or mutation twice", expected="each once", remedy="delete one"
        )
        return None
    return None if faults else frozenset(mutations)


def _word_fault(word: str) -> tuple[str, str] | None:
    """What is found and what to do if `word` was most likely meant otherwise than it would be read."""
    if not word.isprintable():
        return f"{word!a} with an invisible character", "type it anew"
    if len(parse_label(word) or ()) > 1:
        return f"several mutations in {shown(word)}", "put each into quotes of its own"
    if parse_mutation(word.strip()) is None:
        bare = word.strip().removeprefix("p.").strip("()")
        for spelling in (bare.upper(), bare[:3].capitalize() + bare[3:-3] + bare[-3:].capitalize()):
            if (meant := parse_mutation(spelling)) is not None:
                return f"{shown(word)}, which is no substitution as it is spelt", f"write {meant}"
    return None
