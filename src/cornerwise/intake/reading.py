"""From a path to a campaign: the one public entry of this room.

A campaign is a folder with ``campaign.toml`` and the tables ``curves``, ``medians``, ``charges``,
``openings`` and ``distances``, each as ``.csv``, ``.tsv`` or ``.xlsx`` and each once; or one workbook, see
`cornerwise.intake.workbook`. A structure file may stand beside either, see `cornerwise.intake.structure`.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping, Sequence
from contextlib import suppress
from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

from ..campaign import Campaign, InputFile
from ..errors import DataRefused, Origin
from . import text
from .assemble import assemble
from .charges import ChargesRead, read_charges
from .curves import CurvesRead, read_curves
from .distances import DistancesRead, read_distances
from .exclusions import read_exclusions
from .files import TABLES, locate, read_bytes
from .findings import Findings, nearest
from .header import RawTable
from .listed import cycle_requests, listed_mutations
from .medians import MediansRead, read_medians
from .openings import OpeningsRead, read_openings
from .parts import Parts
from .settings import KEYS, SECTIONS, Document, read_settings
from .structure import StructureFile, open_structure
from .toml_file import read_toml
from .unit_row import without_unit_row

if TYPE_CHECKING:
    from .coordinates import Model

MOST_UNREAD = 5  # tables in the folder that are named though no campaign has them

_Read = TypeVar("_Read")


@dataclass(frozen=True, kw_only=True, slots=True)
class Source:
    """A campaign's files opened: the settings and the tables as text."""

    document: Document | None  # None when it could not be read
    tables: Mapping[str, RawTable | None]  # those that are there; None when one could not be read
    inputs: tuple[InputFile, ...]
    structure: StructureFile | None = None
    notes: tuple[str, ...] = ()


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
    found, remedy = "nothing under this path", _nearby(path)
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


def _nearby(path: Path) -> str:
    """What to do about a path under which there is nothing: perhaps take one that is spelt almost so."""
    there: list[str] = []
    with suppress(OSError):
        there = [one.name for one in path.absolute().parent.iterdir() if not one.name.startswith(".")]
    close = nearest(path.name, there)
    return f"did you mean {path.with_name(close)}?" if close else "check the path"


def _open_folder(folder: Path, findings: Findings) -> Source:
    located = locate(folder, findings)
    document: Document | None = None
    tables: dict[str, RawTable | None] = {name: None for name in TABLES if name in located.at_fault}
    inputs: list[InputFile] = []
    for name, path in located.paths.items():
        findings.take_up(path.name)
        contents = read_bytes(path, findings)
        if contents is not None:
            inputs.append(contents[1])
        if name == "campaign":
            document = None if contents is None else read_toml(contents[0], path.name, findings)
        else:
            tables[name] = None if contents is None else _table(contents[0], path, name, findings)
            rows = sum(len(table.rows) for table in tables.values() if table is not None)
            if rows > text.MOST_ROWS:
                tables[name] = None
                text.refuse_long(path.name, f"{rows} rows with those of the other tables", findings)
    source = _with_structure(document, tables, inputs, folder, findings)
    return replace(source, notes=_of_unread(located.unread))


def _of_unread(names: Sequence[str]) -> tuple[str, ...]:
    """Note of the tables in a folder that no campaign has; one sentence or none."""
    more = f" and {len(names) - MOST_UNREAD} more" if len(names) > MOST_UNREAD else ""
    return (f"not read: {', '.join(names[:MOST_UNREAD])}{more}",) if names else ()


def _with_structure(
    document: Document | None,
    tables: Mapping[str, RawTable | None],
    inputs: Sequence[InputFile],
    folder: Path,
    findings: Findings,
) -> Source:
    """Settings under known keys and tables, with the structure that the settings ask for."""
    document = None if document is None else document.as_meant((*KEYS, *SECTIONS), findings)
    structure = None if document is None else open_structure(document, folder, findings)
    also = () if structure is None else (structure.record,)
    return Source(document=document, tables=tables, inputs=(*inputs, *also), structure=structure)


def _open_workbook(path: Path, findings: Findings) -> Source | None:
    from . import workbook  # imported where there is one to read
    from .book import Book, from_book

    contents = read_bytes(path, findings)
    if contents is None:
        return None

    def source(book: Book) -> Source:
        document = workbook.read_document(book, findings)
        tables = workbook.read_tables(book, TABLES, findings)
        return _with_structure(document, tables, [contents[1]], path.parent, findings)

    return from_book(contents[0], path.name, findings, source)


def _table(data: bytes, path: Path, name: str, findings: Findings) -> RawTable | None:
    if path.suffix.casefold() != ".xlsx":
        decoded = text.decode(data, path.name, findings)
        return None if decoded is None else text.split(decoded, path.name, findings)
    from . import workbook
    from .book import from_book

    return from_book(data, path.name, findings, lambda book: workbook.read_single_table(book, name, findings))


def _model(structure: StructureFile, findings: Findings) -> Model | None:
    from .coordinates import read_model  # imported where there is a structure to read

    return read_model(structure, findings)


def _campaign(source: Source | None, findings: Findings) -> Campaign | None:
    """Make everything of the tables that can be made, so that every fault is found."""
    if source is None:
        return None
    charges = source.tables.get("charges")
    curves_read = _read("curves", read_curves, CurvesRead, source, findings)
    medians_read = _read("medians", read_medians, MediansRead, source, findings)
    charges_read = _read("charges", read_charges, ChargesRead, source, findings)
    openings_read = _read("openings", read_openings, OpeningsRead, source, findings)
    distances_read = _read("distances", read_distances, DistancesRead, source, findings)
    model = None if source.structure is None else _model(source.structure, findings)
    document = source.document
    if document is None:
        return None
    settings = read_settings(document, findings)
    listed = listed_mutations(document, findings)
    requests = cycle_requests(document, findings)
    exclusions = read_exclusions(document, findings)
    if settings is None:
        return None
    parts = Parts(
        document=document, settings=settings, listed=listed, requests=requests,
        exclusions=exclusions, curves=curves_read, medians=medians_read, charges=charges_read,
        openings=openings_read, distances=distances_read, model=model,
        structure=source.structure.request if source.structure else None,
        charges_file=charges.file if charges else None, inputs=source.inputs,
        notes=source.notes,
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
    if table is None:
        return nothing(readable=name not in source.tables)
    table = without_unit_row(table, findings)
    read_from_it = read_table(table, findings)
    if len(table.rows) or table.lost:
        return read_from_it
    text.refuse_no_rows(table, findings)
    return nothing(readable=False)
