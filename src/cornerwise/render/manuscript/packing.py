"""Zip containers with the same bytes each time, whatever the clock says."""

from __future__ import annotations

import io
import re
import zipfile

_NO_DATE = (1980, 1, 1, 0, 0, 0)  # the earliest that a zip entry can have
_UNIX = 3
_READABLE = 0o644 << 16
_DATES = re.compile(rb"<dcterms:(created|modified)\b.*?</dcterms:\1>", flags=re.DOTALL)
_PROPERTIES = "docProps/core.xml"


def timeless(container: bytes) -> bytes:
    """An office document without dates: neither on its entries nor among its properties.

    Parameters
    ----------
    container : bytes
        A ``.docx`` or ``.xlsx`` as a library saved it.
    """
    packed = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(container)) as old, zipfile.ZipFile(packed, "w") as new:
        for name in old.namelist():
            contents = old.read(name)
            if name == _PROPERTIES:
                contents = _DATES.sub(b"", contents)
            entry = zipfile.ZipInfo(name, date_time=_NO_DATE)
            entry.create_system, entry.external_attr = _UNIX, _READABLE
            new.writestr(entry, contents, compress_type=zipfile.ZIP_DEFLATED, compresslevel=6)
    return packed.getvalue()
