"""The table ``[structure]`` of ``campaign.toml``, and the file it names.

The file lies in the campaign's folder, or in a folder below it, and is mmCIF (``.cif``) or PDB (``.pdb``).
``chains`` names the chains of the protein that was mutated; it may be left out where the file has one chain
only. ``offset`` is added to the residue numbers of the campaign to give those of the file.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

from ..campaign import InputFile
from ..errors import Origin
from . import allowed
from .files import read_bytes, stays_below
from .findings import Findings, nearest, shown
from .rules import Reader, Rule, read_by_rules, say, visible_text, whole
from .settings import KEYS, Document
from .spelling import meant_keys

MMCIF_SUFFIXES = (".cif", ".mmcif")
PDB_SUFFIXES = (".pdb", ".ent")
MOST_STRUCTURE_BYTES = 20_000_000
LARGEST_OFFSET = 100_000

_FILE_EXPECTED = "the name of a file in the campaign's folder, in quotes"


def _names(names: list[str]) -> tuple[str, ...]:
    chains = sorted(name.strip() for name in names)
    if len(set(chains)) < len(chains):
        raise ValueError
    return tuple(chains)


STRUCTURE_RULES = (
    Rule(key="file", attribute="file", read=visible_text, expected=_FILE_EXPECTED),
    Rule(
        key="chains", attribute="chains", read=Reader(allowed.items(allowed.label(), least=1), _names),
        expected='names of chains, each once: ["A", "B"]', remedy='write chains = ["A"] with your own',
    ),
    Rule(
        key="offset", attribute="offset", read=whole(-LARGEST_OFFSET, LARGEST_OFFSET),
        expected=f"a whole number, at most {LARGEST_OFFSET} either way",
    ),
    Rule(
        key="citation", attribute="citation", read=visible_text,
        expected="the source of the structure, in quotes", remedy="correct it, or leave it out",
    ),
)  # fmt: skip
STRUCTURE_KEYS = tuple(rule.key for rule in STRUCTURE_RULES)


@dataclass(frozen=True, kw_only=True, slots=True)
class StructureRequest:
    """The table ``[structure]``."""

    file: str
    chains: tuple[str, ...] = ()  # empty: the only one there is
    offset: int = 0  # residue number in the file less that in the campaign
    citation: str | None = None


@dataclass(frozen=True, kw_only=True, slots=True)
class StructureFile:
    """The file that was asked for, opened."""

    request: StructureRequest
    data: bytes
    record: InputFile


def open_structure(document: Document, folder: Path, findings: Findings) -> StructureFile | None:
    """Read ``[structure]`` and the file it names.

    Parameters
    ----------
    document : Document
        The content of ``campaign.toml``.
    folder : Path
        The campaign's folder, which no path may leave.
    findings : Findings
        Takes every fault.

    Returns
    -------
    StructureFile or None
        None where no structure is asked for, or where it cannot be had, which is a fault.
    """
    if "structure" not in document.values:
        return None
    request = structure_request(document, findings)
    path = None if request is None else _path(request, document.origin("structure", "file"), folder, findings)
    if request is None or path is None:
        return None
    findings.take_up(request.file)
    remedy = "keep the chains of the protein, without water and without the experimental data"
    contents = read_bytes(path, findings, name=request.file, most=MOST_STRUCTURE_BYTES, too_large=remedy)
    return None if contents is None else StructureFile(request=request, data=contents[0], record=contents[1])


def structure_request(document: Document, findings: Findings) -> StructureRequest | None:
    """Read the table ``[structure]``; None when it is at fault."""
    table = document.values["structure"]
    if not isinstance(table, Mapping):
        findings.add(
            document.origin("structure"), found=say(table), expected="a table [structure] with a line file",
            remedy='write it as a table: [structure], and below it file = "..."',
        )  # fmt: skip
        return None
    meant = meant_keys(
        table,
        STRUCTURE_KEYS,
        findings,
        origin=lambda key: document.origin("structure", key),
        misplaced=lambda key: f"move {key} above the line [structure]" if key in KEYS else None,
    )
    given = {meant[key]: value for key, value in table.items() if key in meant}
    read = read_by_rules(given, STRUCTURE_RULES, lambda key: document.origin("structure", key), findings)
    if "file" not in given:
        findings.add(
            document.origin("structure", "file"), found="no file", expected=_FILE_EXPECTED,
            remedy='add a line such as file = "protein.cif"',
        )  # fmt: skip
    return StructureRequest(**read) if len(read) == len(given) and "file" in read else None


def _path(request: StructureRequest, origin: Origin, folder: Path, findings: Findings) -> Path | None:
    """Path of the file, inside the folder; None when there is none such, which is a fault."""
    parts = request.file.split("/")
    path = folder.joinpath(*parts)
    plain = all(part not in ("", ".", "..") and not set(part) & set("\\:") for part in parts)
    if not plain or not stays_below(folder, path):
        findings.add(
            origin, found=f"the path {shown(request.file)}, which leads elsewhere",
            expected=_FILE_EXPECTED,
            remedy="copy the file into the folder and write its name, or folder/name below it",
        )  # fmt: skip
        return None
    if path.suffix.casefold() not in (*MMCIF_SUFFIXES, *PDB_SUFFIXES):
        findings.add(
            origin, found=f"the file {shown(request.file)}", expected="a structure as .cif (mmCIF) or .pdb",
            remedy="unpack it if it is compressed, or save it in one of the two formats",
        )  # fmt: skip
        return None
    if not path.is_file():
        there = [p.name for p in path.parent.iterdir()] if path.parent.is_dir() else []
        close = nearest(path.name, there)
        findings.add(
            origin, found=f"the file {shown(request.file)}, which does not exist", expected=_FILE_EXPECTED,
            remedy=f"did you mean {shown(close)}?" if close else "add the file, or delete [structure]",
        )  # fmt: skip
        return None
    return path
