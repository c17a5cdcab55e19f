"""One table or one entry of a model file, under known keys, and how its faults are told."""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from ...errors import Origin
from ..findings import Findings, listing, nearest, shown
from ..rules import Rule, number, read_by_rules, say
from ..settings import Document
from ..spelling import meant_keys
from .keys import KEYS


@dataclass(frozen=True, kw_only=True, slots=True)
class Part:
    """A table of the file."""

    document: Document
    path: tuple[str | int, ...]  # () for the top of the file
    values: Mapping[str, object]

    def origin(self, *keys: str) -> Origin:
        """Place of a key."""
        return self.document.origin(*self.path, *keys)

    def read(self, rules: Sequence[Rule], findings: Findings) -> dict[str, Any]:
        """Values by attribute, without those at fault."""
        return read_by_rules(self.values, rules, self.origin, findings)

    def lacks(self, keys: Collection[str], findings: Findings) -> bool:
        """Refuse each of `keys` that is not there."""
        missing = [key for key in keys if key not in self.values]
        for key in missing:
            findings.add(
                self.origin(key), found=f"no {key}", expected=f"the key {key}",
                remedy=f"add a line {key} = ...",
            )  # fmt: skip
        return bool(missing)

    def numbers(self, key: str, known: Sequence[str], what: str, findings: Findings) -> dict[str, float]:
        """Read a table of numbers by the names of steps or states; without those at fault."""
        table = self.values.get(key, {})
        if not isinstance(table, Mapping):
            findings.add(
                self.origin(key), found=say(table), expected=f"a table of {what} by name",
                remedy=f"write {key} = {{ {_bare(known[0])} = 1.0 }} with your own",
            )  # fmt: skip
            return {}
        read = {}
        for name, value in table.items():
            if name not in known:
                self.refuse_name((key, name), name, known, findings)
                continue
            try:
                read[name] = number(value)
            except ValueError:
                findings.add(
                    self.origin(key, name), found=say(value), expected=f"a number, one of the {what}",
                    remedy="correct the value",
                )  # fmt: skip
        return read

    def refuse_name(self, keys: Sequence[str], name: str, known: Sequence[str], findings: Findings) -> None:
        """Refuse the name of something that the file does not have."""
        close = nearest(name, known)
        findings.add(
            self.origin(*keys), found=f"the unknown name {shown(name)}",
            expected=listing(map(shown, known)) if known else "no name, since there is none to choose from",
            remedy=f"did you mean {shown(close)}?" if close else "correct the name",
        )  # fmt: skip


def table_of(document: Document, name: str, findings: Findings, keys: Sequence[str] = ()) -> Part:
    """The table called `name`, empty when it is not there."""
    values = document.values.get(name, {})
    if not isinstance(values, Mapping):
        findings.add(
            document.origin(name), found=say(values), expected=f"a table that begins with [{name}]",
            remedy="use single square brackets and put its keys below",
        )  # fmt: skip
        values = {}
    return _part(document, (name,), values, keys or KEYS[name], findings)


def entries_of(document: Document, name: str, findings: Findings) -> list[Part]:
    """The entries of the array of tables called `name`."""
    entries = document.entries(name, findings)
    return [_part(document, (name, i), entry, KEYS[name], findings) for i, entry in enumerate(entries)]


def _part(
    document: Document,
    path: tuple[str | int, ...],
    values: Mapping[str, object],
    keys: Sequence[str],
    findings: Findings,
) -> Part:
    meant = meant_keys(values, keys, findings, origin=lambda key: document.origin(*path, key))
    known = {meant[key]: value for key, value in values.items() if key in meant}
    return Part(document=document, path=path, values=known)


def _bare(name: str) -> str:
    return name if name.isidentifier() else f'"{name}"'
