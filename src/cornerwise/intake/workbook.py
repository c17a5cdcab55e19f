"""Workbooks: one table of a campaign, or a whole campaign.

A campaign in one workbook has the sheets ``curves``, ``medians``, ``charges``, ``openings`` and
``distances`` with the columns of the files of these names, and in place of ``campaign.toml``

- ``campaign``: two columns, a key and its value; a first row ``key``, ``value`` may stand above them.
  A stated charge takes two rows, ``charge.value_e0`` and ``charge.sem_e0``, and perhaps ``charge.citation``.
  ``structure.file``, ``structure.chains`` (separated by commas), ``structure.offset`` and
  ``structure.citation`` name a structure file beside the workbook.
- ``mutations`` (optional): the columns ``construct`` and ``mutations``, the latter separated by commas or
  written like a label (``E181A/R212Q``); left empty for a wild type whose label spells none.
- ``cycles`` (optional): the columns ``name`` (may be left out) and ``mutations``, written in the same way.
- ``exclude`` (optional): the columns ``construct``, ``cell`` and ``reason``, a row for each cell set aside.

Empty sheets and sheets called ``notes`` or ``readme`` are passed over; any other sheet is refused. A workbook
that stands for one table of a folder holds that table alone, on a sheet of any name.
"""

from __future__ import annotations

import re
from collections.abc import Sequence

from ..errors import Origin
from ..mutations import in_residue_order, parse_label
from .book import Book, Refusal, cell_text, read_sheet, refuse_cell
from .exclusions import EXCLUDE_KEYS
from .findings import Findings, nearest, shown
from .header import Field, RawTable
from .settings import Document
from .sheets import Truth, Value
from .table import Table
from .text import refuse_empty

CAMPAIGN_SHEETS = ("campaign", "mutations", "cycles", "exclude")
NOTES = ("notes", "readme")
TEXT_KEYS = (
    "title", "wild_type", "charge_method", "charge.citation", "structure.file", "structure.chains",
    "structure.citation",
)  # fmt: skip
_TABLE_KEYS = ("charge", "structure")  # keys that hold keys of their own, written with a point

_MUTATION_FIELDS = (Field(base="construct"), Field(base="mutations"))
_EXCLUDE_FIELDS = tuple(Field(base=key) for key in EXCLUDE_KEYS)
_CYCLE_FIELDS = (Field(base="name", required=False), Field(base="mutations"))

Places = dict[tuple[str | int, ...], tuple[str, int]]


def read_tables(book: Book, names: Sequence[str], findings: Findings) -> dict[str, RawTable | None]:
    """Read the sheets of a campaign's tables; refuse sheets that are none of the known."""
    titles = _known_titles(book, (*CAMPAIGN_SHEETS, *names), findings)
    if not {"curves", "medians"} & titles.keys():
        findings.add(
            Origin(file=book.file),
            found="neither a sheet curves nor a sheet medians",
            expected="one of them at least",
            remedy="add the sheet curves, or give a sheet its right name",
        )
    tables: dict[str, RawTable | None] = {}
    for name in names:
        if name in titles:
            findings.take_up(book.place(titles[name]))
            tables[name] = read_sheet(book, titles[name], findings)
    return tables


def read_single_table(book: Book, name: str, findings: Findings) -> RawTable | None:
    """Read a workbook that holds the one table `name`."""
    titles = [title for title in book.titles if book.rows(title) and _folded(title) not in NOTES]
    if len(titles) > 1:
        findings.add(
            Origin(file=book.file),
            found=f"{len(titles)} sheets, {', '.join(map(shown, titles))}",
            expected=f"the table {name} alone",
            remedy="keep one sheet; others may be called notes or readme",
        )
    own = [title for title in titles if _folded(title) == name] or titles or book.titles[:1]
    if not own:
        refuse_empty(book.file, findings)
        return None
    findings.take_up(book.place(own[0]))
    return read_sheet(book, own[0], findings)


def read_document(book: Book, findings: Findings) -> Document | None:
    """Read the sheets that stand for ``campaign.toml``."""
    titles = {_folded(title): title for title in book.titles}
    if "campaign" not in titles:
        close = nearest("campaign", book.titles)
        findings.add(
            Origin(file=book.file),
            found=f"no sheet campaign among {', '.join(map(shown, book.titles))}",
            expected="a sheet campaign with a row wild_type at least",
            remedy=f"did you mean {shown(close)}?" if close else "add it, a key and its value in each row",
        )
        return None
    places: Places = {}
    findings.take_up(book.place(titles["campaign"]))
    values = _keys(book, titles["campaign"], places, findings)
    for name, read in (("mutations", _mutations), ("cycles", _cycles), ("exclude", _exclude)):
        if name in titles and book.rows(titles[name]):
            findings.take_up(book.place(titles[name]))
            raw = read_sheet(book, titles[name], findings)
            if raw is not None:
                values.update(read(raw, places, findings))
    return Document(values=values, file=book.place(titles["campaign"]), rows=places)


def _folded(title: str) -> str:
    return title.strip().casefold()


def _known_titles(book: Book, names: Sequence[str], findings: Findings) -> dict[str, str]:
    """Titles of the known sheets by name; other sheets that hold anything are faults."""
    titles: dict[str, str] = {}
    for title in book.titles:
        name = _folded(title)
        if name in names:
            titles[name] = title
        elif name not in NOTES and book.rows(title):
            close = nearest(title, names)
            findings.add(
                Origin(file=book.place(title)),
                found=f"the sheet {shown(title)}, which is not read",
                expected=f"only the sheets {', '.join(names)}",
                remedy=f"did you mean {close}?" if close else "delete the sheet, or call it notes",
            )
    return titles


def _keys(book: Book, title: str, places: Places, findings: Findings) -> dict[str, object]:
    """Keys and values of the sheet ``campaign``, as a TOML file would give them."""
    file, rows = book.place(title), book.rows(title)
    if rows and [str(value).strip().casefold() for value in rows[0][1]] == ["key", "value"]:
        rows = rows[1:]
    values: dict[str, object] = {}
    for number, cells in rows:
        key = str(cells[0] or "").strip()
        head, _, inner = key.partition(".")
        path = (head, inner) if inner and head in _TABLE_KEYS else (key,)
        origin = Origin(file=file, row=number, column=key or None)
        if path in places or not key or len(cells) != 2:
            _refuse_row(origin, key, len(cells), findings)
            continue
        places[path] = (file, number)
        text = cell_text(cells[1], as_label=key in TEXT_KEYS)
        if isinstance(text, Refusal) and not isinstance(cells[1], Truth):
            refuse_cell(origin, text, findings)
            continue
        value = text if key in TEXT_KEYS and not isinstance(cells[1], Truth) else _plain(cells[1])
        if len(path) == 1:
            values[key] = value
            continue
        table = values.setdefault(head, {})
        if isinstance(table, dict):
            table[inner] = _names(value) if path == ("structure", "chains") else value
    return values


def _names(value: object) -> object:
    """Split a cell at commas."""
    return [name.strip() for name in value.split(",")] if isinstance(value, str) else value


def _plain(value: Value) -> object:
    """Value as a TOML file would give it; a spreadsheet does not tell whole numbers from others."""
    if isinstance(value, Truth):
        return value.holds
    if isinstance(value, float):
        return int(value) if value.is_integer() else float(value)
    return value


def _refuse_row(origin: Origin, key: str, width: int, findings: Findings) -> None:
    found = f"{width} cells" if width != 2 else "a value without a key"
    if key and width == 1:
        found = f"no value of {key}"
    elif key and width == 2:
        found = f"the key {key} again"
    findings.add(
        origin, found=found, expected="one row for each key: the key and its value",
        remedy="correct the row; rows that begin with # are notes",
    )  # fmt: skip


def _mutations(raw: RawTable, places: Places, findings: Findings) -> dict[str, object]:
    table = Table(raw, _MUTATION_FIELDS, findings)
    constructs, texts = table.labels("construct"), table.text("mutations")
    listed: dict[str, object] = {}
    for index, (construct, text) in enumerate(zip(constructs, texts, strict=True)):
        if construct in listed:
            table.refuse(
                index, "construct", found=f"{shown(construct)} again", expected="one row for each construct",
                remedy="write all its mutations into one row",
            )  # fmt: skip
        elif construct:
            listed[construct] = _words(text)
            places["mutations", construct] = (raw.file, int(raw.rows[index]))
    return {"mutations": listed}


def _cycles(raw: RawTable, places: Places, findings: Findings) -> dict[str, object]:
    table = Table(raw, _CYCLE_FIELDS, findings)
    names, texts = table.text("name"), table.text("mutations")
    cycles: list[dict[str, object]] = []
    for index, (name, text) in enumerate(zip(names, texts, strict=True)):
        places["cycle", len(cycles)] = (raw.file, int(raw.rows[index]))
        cycles.append({"mutations": _words(text)} | ({"name": name} if name else {}))
    return {"cycle": cycles}


def _exclude(raw: RawTable, places: Places, findings: Findings) -> dict[str, object]:
    table = Table(raw, _EXCLUDE_FIELDS, findings)
    columns = [table.text(key) for key in EXCLUDE_KEYS]
    entries: list[dict[str, object]] = []
    for index, texts in enumerate(zip(*columns, strict=True)):
        if table.readable and all(text.isprintable() for text in texts):
            places["exclude", len(entries)] = (raw.file, int(raw.rows[index]))
            entries.append({key: text for key, text in zip(EXCLUDE_KEYS, texts, strict=True) if text})
    return {"exclude": entries}


def _words(text: str) -> list[str]:
    """Split a cell into mutations: as a label, or else at commas and semicolons."""
    spelt = parse_label(text)
    if spelt is not None:
        return [str(mutation) for mutation in in_residue_order(spelt)]
    return [word.strip() for word in re.split("[,;]", text)] if text else []
