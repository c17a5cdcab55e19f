"""In which line of a TOML text each key stands.

The parser gives no places, but it can tell where a statement ends: no beginning of an unfinished statement is
TOML, since a value runs over a line's end only inside brackets or triple quotes. So lines are gathered until
they parse; what has been gathered then is one statement, and its first line is the place of all it sets.
"""

from __future__ import annotations

import tomllib
from collections.abc import Iterator, Mapping

LONGEST_STATEMENT = 200  # lines; beyond it the places of what follows stay unknown
MOST_LETTERS = 20_000  # of a statement that runs over several lines; likewise

Path = tuple[str | int, ...]


def lines_of_keys(text: str) -> dict[Path, int]:
    r"""Find the line of every key and every table.

    Parameters
    ----------
    text : str
        A text that is TOML as a whole, with plain line ends.

    Returns
    -------
    dict of tuple to int
        Line, from 1, by the path of the key; entries of an array of tables are counted from 0.

    Examples
    --------
    >>> lines_of_keys('seed = 3\n[[cycle]]\nname = "a"\n')
    {('seed',): 1, ('cycle', 0): 2, ('cycle', 0, 'name'): 3}
    """
    lines: dict[Path, int] = {}
    entries: dict[Path, int] = {}  # how many entries of each array of tables have begun
    table: Path = ()
    for line, statement, values in _statements(text):
        if not statement.lstrip().startswith("["):
            for path in _paths(values):
                lines.setdefault((*table, *path), line)
            continue
        table = _counted(_header(values), entries, begins=statement.lstrip().startswith("[["))
        lines.setdefault(table, line)
    return lines


def repeated_key(text: str) -> tuple[str, int, int] | None:
    r"""Find the first key or table that is set a second time.

    Parameters
    ----------
    text : str
        A text whose statements are TOML one by one, with plain line ends.

    Returns
    -------
    tuple of (str, int, int) or None
        Its name, the parts joined by dots, its line and the line where it was set first.

    Examples
    --------
    >>> repeated_key("seed = 3\nsubunits = 4\nseed = 5\n")
    ('seed', 3, 1)
    """
    first: dict[Path, int] = {}
    entries: dict[Path, int] = {}
    table: Path = ()
    for line, statement, values in _statements(text):
        paths = list(_paths(values))
        heads = {path[:length] for path in paths for length in range(1, len(path))}
        here = [(*table, *path) for path in paths if path not in heads]
        if statement.lstrip().startswith("["):
            table = _counted(_header(values), entries, begins=statement.lstrip().startswith("[["))
            here = [table]
        for path in here:
            if path in first:
                return ".".join(part for part in path if isinstance(part, str)), line, first[path]
            first[path] = line
    return None


def unfinished_line(text: str) -> int:
    r"""Find the line of the first statement that does not end.

    Examples
    --------
    >>> unfinished_line("seed = 3\n\ntitle = 'a\nsubunits = 4\n")
    3
    """
    after = 0
    for line, statement, _ in _statements(text):
        after = line + statement.count("\n")
    lines = text.split("\n")
    is_blank = (not line.strip() or line.lstrip().startswith("#") for line in lines[after:])
    return after + 1 + next((number for number, blank in enumerate(is_blank) if not blank), 0)


def _statements(text: str) -> Iterator[tuple[int, str, Mapping[str, object]]]:
    """First line, text and values of each statement."""
    gathered: list[str] = []
    for number, line in enumerate(text.split("\n"), start=1):
        gathered.append(line)
        letters = sum(map(len, gathered)) if len(gathered) > 1 else 0
        if len(gathered) > LONGEST_STATEMENT or letters > MOST_LETTERS:
            return
        try:
            values = tomllib.loads("\n".join(gathered))
        except tomllib.TOMLDecodeError:
            continue
        if values:
            yield number - len(gathered) + 1, "\n".join(gathered), values
        gathered = []


def _header(values: Mapping[str, object]) -> tuple[str, ...]:
    """Names in the header of a table, from what it parses to: empty tables inside one another."""
    names: list[str] = []
    inner: object = values
    while isinstance(inner, Mapping | list) and inner:
        if isinstance(inner, list):
            inner = inner[0]
        else:
            ((name, inner),) = inner.items()
            names.append(name)
    return tuple(names)


def _counted(names: tuple[str, ...], entries: dict[Path, int], *, begins: bool) -> Path:
    """Put the number of the current entry after each name of an array of tables."""
    path: Path = ()
    for place, name in enumerate(names, start=1):
        path = (*path, name)
        if begins and place == len(names):
            entries[path] = entries.get(path, 0) + 1
        if path in entries:
            path = (*path, entries[path] - 1)
    return path


def _paths(value: object) -> Iterator[Path]:
    """Path of every key in what one statement sets, and of the tables in its arrays."""
    if isinstance(value, Mapping):
        for key, inner in value.items():
            yield (key,)
            yield from ((key, *path) for path in _paths(inner))
    elif isinstance(value, list):
        for index, inner in enumerate(value):
            if isinstance(inner, Mapping):
                yield (index,)
                yield from ((index, *path) for path in _paths(inner))
