"""The bytes of a TOML file to its values and the line of each."""

from __future__ import annotations

import re
import tomllib

from ..errors import Origin
from . import text
from .findings import Findings
from .settings import Document
from .toml_lines import lines_of_keys

_LINE = re.compile(r"\(at line (\d+), column \d+\)")


def read_toml(data: bytes, name: str, findings: Findings) -> Document | None:
    """Read a TOML file; None when that fails, which is a fault."""
    decoded = text.decode(data, name, findings)
    if decoded is None:
        return None
    try:
        values = tomllib.loads(decoded)
    except tomllib.TOMLDecodeError as error:
        message = str(error)
        line = _LINE.search(message)
        row = int(line[1]) if line else decoded.count("\n") + 1
        found = f"a line that is no TOML ({_LINE.sub('', message).strip()})"
        findings.add(
            Origin(file=name, row=row), found=found, expected='lines such as wild_type = "WT"',
            remedy="put text in quotes, write numbers with a decimal point and each key once",
        )  # fmt: skip
        return None
    rows = {path: (name, line) for path, line in lines_of_keys(decoded).items()}
    return Document(values=values, file=name, rows=rows)
