"""The bytes of a TOML file to its values and the line of each."""

from __future__ import annotations

import re
import tomllib

from ..errors import Origin
from . import text
from .findings import Findings
from .settings import Document
from .toml_lines import lines_of_keys, repeated_key, unfinished_line

MOST_NAMES = 20  # joined by dots; the time a parser takes grows with their square

_DOTTED = re.compile(rf"(?<![\w-])(?:[\w-]++\s*+\.\s*+){{{MOST_NAMES}}}")
_TWICE = re.compile(r"overwrite a value|declare .* twice")
_OPEN_QUOTE = re.compile(r"character '\\n'|Unterminated string|Expected \"'(?:'')?\"")
_LINE = re.compile(r"\(at line (\d+), column \d+\)")


def read_toml(data: bytes, name: str, findings: Findings) -> Document | None:
    """Read a TOML file; None when that fails, which is a fault."""
    decoded = text.decode(data, name, findings)
    if decoded is None:
        return None
    if dotted := _DOTTED.search(decoded):
        row = decoded.count("\n", 0, dotted.start()) + 1
        _refuse(Origin(file=name, row=row), f"more than {MOST_NAMES} names joined by dots", findings)
        return None
    try:
        values = tomllib.loads(decoded)
        rows = {path: (name, line) for path, line in lines_of_keys(decoded).items()}
    except tomllib.TOMLDecodeError as error:
        _refuse_text(decoded, name, str(error), findings)
        return None
    except (ValueError, RecursionError):  # a number of thousands of digits, lists in lists without end
        _refuse(Origin(file=name), "a number too long or lists too deep to be read", findings)
        return None
    return Document(values=values, file=name, rows=rows)


def _refuse_text(text_of_file: str, name: str, message: str, findings: Findings) -> None:
    """Refuse a text for what the parser says of it; the commonest slips in words of their own."""
    line = _LINE.search(message)
    row = int(line[1]) if line else text_of_file.count("\n") + 1
    repeated = repeated_key(text_of_file) if _TWICE.search(message) else None
    if repeated is not None:
        key, row, first = repeated
        findings.add(
            Origin(file=name, row=row, column=key), found=f"the key {key} comes twice, first in row {first}",
            expected="each key once", remedy="delete one of the two",
        )  # fmt: skip
    elif _OPEN_QUOTE.search(message):
        findings.add(
            Origin(file=name, row=row if line else unfinished_line(text_of_file)),
            found="a text without its closing quote", expected='lines such as wild_type = "WT"',
            remedy="close the quote at the end of the text, with the same quote that opens it",
        )  # fmt: skip
    else:
        _refuse(Origin(file=name, row=row), _LINE.sub("", message).strip(), findings)


def _refuse(origin: Origin, why: str, findings: Findings) -> None:
    findings.add(
        origin, found=f"a line that is no TOML ({why})", expected='lines such as wild_type = "WT"',
        remedy="put text in quotes, write numbers with a decimal point and each key once",
    )  # fmt: skip
