"""Text in several faces, free of any format."""

from __future__ import annotations

import re
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Literal

Face = Literal["plain", "italic", "bold", "subscript", "superscript"]

_FACES: dict[str, Face] = {"*": "italic", "~": "subscript", "^": "superscript"}
_PIECES = re.compile(r"(\*[^*]+\*|~[^~]+~|\^[^^]+\^|\{\w+\})")


@dataclass(frozen=True, slots=True)
class Run:
    """A stretch of text in one face."""

    text: str
    face: Face = "plain"


Words = tuple[Run, ...]


def printable(text: str) -> str:
    """A text on one line, without characters that a file format forbids."""
    return "".join(letter if letter.isprintable() else " " for letter in text)


def words(template: str, **given: str | Words) -> Words:
    """Runs of a sentence of ours.

    Parameters
    ----------
    template : str
        ``*italic*``, ``~subscript~`` and ``^superscript^``; ``{name}`` stands for what is given under it.
    **given : str or Words
        Text is taken as it is, a user's label too: its asterisks and braces mean nothing; what cannot be
        printed becomes a space.

    Examples
    --------
    >>> words("*V*~m~ of {label}", label="A*B*")[-1]
    Run(text='A*B*', face='plain')
    """
    runs: list[Run] = []
    for piece in filter(None, _PIECES.split(template)):
        if piece[0] in _FACES and len(piece) > 2 and piece[-1] == piece[0]:
            runs.append(Run(piece[1:-1], _FACES[piece[0]]))
        elif piece[0] == "{" and piece[-1] == "}":
            value = given[piece[1:-1]]
            runs.extend((Run(printable(value)),) if isinstance(value, str) else value)
        else:
            runs.append(Run(piece))
    return tuple(runs)


def plain(runs: Words) -> str:
    """The text without its faces."""
    return "".join(run.text for run in runs)


def joined(several: Iterable[Words]) -> Words:
    """Sentences one after the other."""
    runs: list[Run] = []
    for one in several:
        runs += [*([Run(" ")] if runs else []), *one]
    return tuple(runs)
