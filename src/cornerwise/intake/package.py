"""The container of a workbook: a zip archive whose parts are read piece by piece, within bounds.

What an archive says of itself is not believed: bytes are counted as they are unpacked. So an archive of a
few kilobytes that unpacks to gigabytes is refused after the bound, not after the memory is full.
"""

from __future__ import annotations

import io
import posixpath
import zipfile
from collections import Counter
from collections.abc import Iterator
from typing import NoReturn

MOST_UNPACKED_BYTES = 600_000_000  # of all parts that are read
MOST_PART_BYTES = 16_000_000  # of a part that is neither a sheet nor the strings of all sheets

MOST_PARTS = 10_000

_PIECE = 1 << 16
_ENTRY = b"PK\x01\x02"  # begins each line of an archive's table of contents


class DamagedBook(ValueError):
    """A file that is no sound workbook; says why."""


class Package:
    """The parts of a workbook.

    Parameters
    ----------
    data : bytes
        The file.

    Raises
    ------
    DamagedBook
        If it is no archive, or one with two parts of the same name.
    """

    def __init__(self, data: bytes) -> None:
        if data.count(_ENTRY) > MOST_PARTS:
            raise DamagedBook(f"it has more than {MOST_PARTS} parts")
        try:
            self._archive = zipfile.ZipFile(io.BytesIO(data))
            names = self._archive.namelist()
        except Exception:  # whatever the library trips over, the archive is at fault
            raise DamagedBook("it is damaged, protected by a password or of an older format") from None
        twins = [name for name, count in Counter(map(str.casefold, names)).items() if count > 1]
        if twins:
            raise DamagedBook(f"it is damaged: two parts are called {twins[0]}")
        self._names = {name.casefold(): name for name in names}
        self._unpacked = 0

    def __contains__(self, name: str) -> bool:
        return name.casefold() in self._names

    def close(self) -> None:
        """Let go of the archive."""
        self._archive.close()

    def pieces(self, name: str, *, most: int | None = None) -> Iterator[bytes]:
        """Bytes of a part, piece by piece.

        Raises
        ------
        DamagedBook
            If there is no such part, if it is damaged, or beyond the bounds.
        """
        most = MOST_PART_BYTES if most is None else most
        if name not in self:
            raise DamagedBook(f"it is damaged: {name} is missing")
        try:
            entry = self._archive.getinfo(self._names[name.casefold()])
            if entry.compress_type not in (zipfile.ZIP_STORED, zipfile.ZIP_DEFLATED):
                raise DamagedBook(f"{name} in it is packed in another way than workbooks are")
            with self._archive.open(entry) as part:
                size = 0
                while piece := part.read(_PIECE):
                    size += len(piece)
                    self._unpacked += len(piece)
                    if size > most or self._unpacked > MOST_UNPACKED_BYTES:
                        _refuse_bound(name, min(most, MOST_UNPACKED_BYTES))
                    yield piece
        except DamagedBook:
            raise
        except Exception as error:  # whatever the library trips over, the archive is at fault
            raise DamagedBook(f"it is damaged: {name} cannot be unpacked ({error})") from None


def _refuse_bound(name: str, most: int) -> NoReturn:
    raise DamagedBook(f"{name} in it unpacks to more than {most / 1e6:.0f} MB")


def beside(name: str, target: str) -> str:
    """Name of the part that `target` means when it is written in the part `name`.

    Examples
    --------
    >>> beside("xl/workbook.xml", "worksheets/sheet1.xml")
    'xl/worksheets/sheet1.xml'
    >>> beside("xl/workbook.xml", "/xl/worksheets/sheet1.xml")
    'xl/worksheets/sheet1.xml'
    """
    return posixpath.normpath(posixpath.join("/", posixpath.dirname(name), target)).lstrip("/")


def relations_of(name: str) -> str:
    """Name of the part that lists what the part `name` refers to."""
    folder, file = posixpath.split(name)
    return posixpath.join(folder, "_rels", f"{file}.rels")
