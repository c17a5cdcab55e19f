"""From a path to a campaign: the one public entry of this room.

A campaign is a folder with ``campaign.toml`` and the tables ``curves``, ``medians``, ``charges`` and
``openings``, each as ``.csv``, ``.tsv`` or ``.xlsx`` and each once; or one workbook, see
`cornerwise.intake.workbook`.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

from ..campaign import Campaign, InputFile
from ..errors import DataRefused, Origin
from . import text, workbook
from .assemble import assemble
from .book import Book, from_book
from .charges import ChargesRead, read_charges
from .curves import CurvesRead, read_curves
from .exclusions import read_exclusions
from .files import TABLES, locate, read_bytes
from .findings import Findings
from .header import RawTable
from .listed import cycle_requests, listed_mutations
from .medians import MediansRead, read_medians
from .openings import OpeningsRead, read_openings
from .parts import Parts
from .settings import KEYS, SECTIONS, Document, read_settings
from .toml_file import read_toml

_Read = TypeVar("_Read")


@dataclass(frozen=True, kw_only=True, slots=True)
class Source:
    """A campaign's files opened: the settings and the tables as text."""

    document: Document | None  # None when it could not be read
    tables: Mapping[str, RawTable | None]  # those that are there; None when one could not be read
    inputs: tuple[InputFile, ...]


def read(path: str | os.PathLike[str]) -> Campaign:
    """Read and check a campaign.

    Parameters
    ----------
    path : str or path-like
        A folder with ``campaign.toml`` and tables, or one ``.xlsx`` workbook.

    Returns
    -------
    Campaign
        The validated campaign; the order of rows, of files and of ``[[cycle]]`` entries does not show.

    Raises
    ------
    DataRefused
        If anything is wrong, with every problem found: file, row, column, what stands there, what should
        stand there, and the way out.
    """
    findings = Findings()
    campaign = _campaign(_open(Path(path), findings), findings)
    if findings or campaign is None:
        raise DataRefused(findings.in_order())
    return campaign


def _open(path: Path, findings: Findings) -> Source | None:
    if path.is_dir():
        return _open_folder(path, findings)
    if path.is_file() and path.suffix.casefold() == ".xlsx":
        return _open_workbook(path, findings)
    found, remedy = "nothing under this path", "check the path"
    if path.exists():
        found = "a file that is no .xlsx workbook"
        remedy = "give the folder that holds campaign.toml and the tables, or save the workbook as .xlsx"
    findings.add(
        Origin(file=str(path)),
        found=found,
        expected="a campaign: a folder or an .xlsx workbook",
        remedy=remedy,
    )
    return None


def _open_folder(folder: Path, findings: Findings) -> Source:
    paths = locate(folder, findings)
    document: Document | None = None
    tables: dict[str, RawTable | None] = {}
    inputs: list[InputFile] = []
    for name, path in paths.items():
        findings.take_up(path.name)
        contents = read_bytes(path, findings)
        if contents is not None:
            inputs.append(contents[1])
        if name == "campaign":
            document = None if contents is None else read_toml(contents[0], path.name, findings)
        else:
            tables[name] = None if contents is None else _table(contents[0], path, name, findings)
    return Source(document=document, tables=tables, inputs=tuple(inputs))


def _open_workbook(path: Path, findings: Findings) -> Source | None:
    contents = read_bytes(path, findings)
    if contents is None:
        return None

    def source(book: Book) -> Source:
        document = workbook.read_document(book, findings)
        tables = workbook.read_tables(book, TABLES, findings)
        return Source(document=document, tables=tables, inputs=(contents[1],))

    return from_book(contents[0], path.name, findings, source)


def _table(data: bytes, path: Path, name: str, findings: Findings) -> RawTable | None:
    if path.suffix.casefold() != ".xlsx":
        decoded = text.decode(data, path.name, findings)
        return None if decoded is None else text.split(decoded, path.name, findings)
    return from_book(data, path.name, findings, lambda book: workbook.read_single_table(book, name, findings))


def _campaign(source: Source | None, findings: Findings) -> Campaign | None:
    """Make everything of the tables that can be made, so that every fault is found."""
    if source is None:
        return None
    charges = source.tables.get("charges")
    curves_read = _read("curves", read_curves, CurvesRead, source, findings)
    medians_read = _read("medians", read_medians, MediansRead, source, findings)
    charges_read = _read("charges", read_charges, ChargesRead, source, findings)
    openings_read = _read("openings", read_openings, OpeningsRead, source, findings)
    if source.document is None:
        return None
    document = source.document.as_meant((*KEYS, *SECTIONS), findings)
    settings = read_settings(document, findings)
    listed = listed_mutations(document, findings)
    requests = cycle_requests(document, findings)
    exclusions = read_exclusions(document, findings)
    if settings is None:
        return None
    parts = Parts(
        document=document, settings=settings, listed=listed, requests=requests,
        exclusions=exclusions, curves=curves_read, medians=medians_read, charges=charges_read,
        openings=openings_read, charges_file=charges.file if charges else None, inputs=source.inputs,
    )  # fmt: skip
    return assemble(parts, findings)


def _read(
    name: str,
    read_table: Callable[[RawTable, Findings], _Read],
    nothing: Callable[..., _Read],
    source: Source,
    findings: Findings,
) -> _Read:
    """What the table `name` says; nothing when it is not there or could not be opened."""
    table = source.tables.get(name)
    return nothing(readable=name not in source.tables) if table is None else read_table(table, findings)
