"""Which files of a folder make up a campaign, and their bytes."""

from __future__ import annotations

import hashlib
import os
from collections import defaultdict
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

from ..campaign import InputFile
from ..errors import Origin, visible
from .findings import Findings, listing, nearest, shown

TABLES = ("curves", "medians", "charges", "openings", "distances")
SUFFIXES = (".csv", ".tsv", ".xlsx")
CAMPAIGN_FILE = "campaign.toml"
MOST_BYTES = 100_000_000
MOST_SETTINGS_BYTES = 1_000_000  # of campaign.toml

_LEFT_BEHIND = (".", "~$", "__MACOSX", "Thumbs.db", "desktop.ini")  # by other programs
_IN_CAMPAIGN_FILE = ("exclude", "exclusions")  # a table of this name would change figures if it were read
_TABLE_LIKE = (*SUFFIXES, ".xls", ".xlsm", ".xlsb", ".ods", ".tab", ".dat", ".txt")


@dataclass(frozen=True, kw_only=True, slots=True)
class Located:
    """What a folder holds of a campaign."""

    paths: Mapping[str, Path]  # of ``campaign`` and the tables that are there
    at_fault: frozenset[str]  # tables of which something is there that is refused, and nothing to read
    unread: tuple[str, ...]  # names of other tables


def locate(folder: Path, findings: Findings) -> Located:
    """Find the files of a campaign.

    Parameters
    ----------
    folder : Path
        The campaign's folder. Upper and lower case in file names do not matter. Folders, hidden files, what
        other programs leave behind and files that are no tables are passed over, and so are tables whose
        names resemble none of the known.
    findings : Findings
        Takes a missing ``campaign.toml``, two files of one table, names that are nearly right, known names
        of what is no file, and links that lead out of the folder.

    Returns
    -------
    Located
        ``campaign`` and the tables, and what may have been meant to be one.
    """
    blocked: set[str] = set()
    try:
        files = sorted(_files_in(folder, blocked, findings))
    except OSError as error:
        findings.add(
            Origin(file=str(folder)),
            found=f"a folder that cannot be opened ({error.strerror})",
            expected="a readable folder",
            remedy="check its permissions",
        )
        return Located(paths={}, at_fault=frozenset(), unread=())
    unread: list[str] = []
    known: dict[str, list[Path]] = defaultdict(list)
    for path in files:
        stem, suffix = path.stem.casefold(), path.suffix.casefold()
        if path.name.casefold() == CAMPAIGN_FILE:
            known["campaign"].append(path)
        elif stem in TABLES and suffix in SUFFIXES:
            known[stem].append(path)
        elif meant := _judge_stray(path, findings):
            blocked.add(meant)
        elif suffix in SUFFIXES:
            unread.append(visible(path.name))
    _refuse_several(known, findings)
    if "campaign" not in known.keys() | blocked:
        _refuse_missing_campaign(folder, files, findings)
    if not {"curves", "medians"} & (known.keys() | blocked):
        findings.add(
            Origin(),
            found="neither curves nor medians in the folder",
            expected=f"a table curves or medians, as {listing(SUFFIXES)}",
            remedy="add curves.csv",
        )
    return Located(
        paths={name: known[name][0] for name in ("campaign", *TABLES) if name in known},
        at_fault=frozenset(blocked - known.keys()),
        unread=tuple(unread),
    )


def _files_in(folder: Path, blocked: set[str], findings: Findings) -> Iterator[Path]:
    """Files of a folder that are the user's own; a known name of anything else is a fault, and blocked."""
    for path in folder.iterdir():
        if path.name.startswith(_LEFT_BEHIND):
            continue
        is_outside = path.is_symlink() and not stays_below(folder, path)
        if path.is_file() and not is_outside:
            yield path
        elif not _is_known(path):
            continue
        elif is_outside:
            blocked.add(path.stem.casefold())
            _refuse_link(path, findings)
        else:
            blocked.add(path.stem.casefold())
            findings.add(
                Origin(file=path.name),
                found="a folder, a device or a link that leads nowhere",
                expected=f"a file {path.name}",
                remedy="put the file there, or rename what is there",
            )


def _is_known(path: Path) -> bool:
    known = path.stem.casefold() in TABLES and path.suffix.casefold() in SUFFIXES
    return known or path.name.casefold() == CAMPAIGN_FILE


def stays_below(folder: Path, path: Path) -> bool:
    """Whether a path leads to something inside the folder, links followed."""
    return Path(os.path.realpath(path)).is_relative_to(os.path.realpath(folder))


def _refuse_link(path: Path, findings: Findings) -> None:
    findings.add(
        Origin(file=path.name),
        found="a link to something outside the folder",
        expected="the campaign's files inside its folder",
        remedy="put a copy of the file there, so that the campaign is whole wherever it is kept",
    )


def _refuse_several(known: dict[str, list[Path]], findings: Findings) -> None:
    for name, paths in known.items():
        if len(paths) > 1:
            findings.add(
                Origin(file=paths[-1].name),
                found=f"the files {' and '.join(path.name for path in paths)}",
                expected=f"one file for {name}",
                remedy="delete one, or move it out of the folder",
            )


def read_bytes(
    path: Path,
    findings: Findings,
    *,
    name: str | None = None,
    most: int | None = None,
    too_large: str = "keep one point per voltage step, not the recorded traces",
) -> tuple[bytes, InputFile] | None:
    """Read a file and take its SHA-256; None when that fails, which is a fault.

    Parameters
    ----------
    path : Path
        The file.
    findings : Findings
        Takes the fault.
    name : str, optional
        What the file is called, if not by the last part of its path.
    most : int, optional
        Bytes it may have; `MOST_BYTES` or `MOST_SETTINGS_BYTES` unless given.
    too_large : str, optional
        What to do about a larger one.
    """
    settings = path.name.casefold() == CAMPAIGN_FILE
    name, most = name or path.name, most or (MOST_SETTINGS_BYTES if settings else MOST_BYTES)
    origin = Origin(file=name)
    try:
        size = path.stat().st_size
        data = path.read_bytes() if size <= most else b""
    except OSError as error:
        findings.add(
            origin, found=f"a file that cannot be opened ({error.strerror})", expected="a readable file",
            remedy="check its permissions and whether another program holds it",
        )  # fmt: skip
        return None
    if size > most:
        findings.add(
            origin, found=f"{size / 1e6:.1f} MB", expected=f"at most {most / 1e6:.0f} MB", remedy=too_large
        )
        return None
    return data, InputFile(name=visible(name), sha256=hashlib.sha256(data).hexdigest())


def _judge_stray(path: Path, findings: Findings) -> str | None:
    """Refuse a table that was most likely meant to be read; return which."""
    stem, suffix = path.stem.casefold(), path.suffix.casefold()
    if suffix not in _TABLE_LIKE:
        return None
    if nearest(stem, _IN_CAMPAIGN_FILE):
        findings.add(
            Origin(file=path.name),
            found=f"the file {shown(path.name)}, which is not read",
            expected=f"[[exclude]] entries in {CAMPAIGN_FILE}",
            remedy=f"write them into {CAMPAIGN_FILE}, or move the file out of the folder",
        )
        return "exclude"
    names = ("campaign", *TABLES)
    inside = next((name for name in names if name in stem and (stem == name or suffix != ".txt")), None)
    close = inside or nearest(stem, names)
    if close is None:
        return None
    allowed = CAMPAIGN_FILE if close == "campaign" else listing(f"{close}{ending}" for ending in SUFFIXES)
    findings.add(
        Origin(file=path.name),
        found=f"the file {shown(path.name)}, which is not read",
        expected=allowed,
        remedy="save it under this name if it belongs to the campaign, else move it out of the folder",
    )
    # Another file that is called like campaign.toml does not stand for it.
    return "stray campaign" if close == "campaign" else close


def _refuse_missing_campaign(folder: Path, files: list[Path], findings: Findings) -> None:
    close = nearest(CAMPAIGN_FILE, (path.name for path in files))
    below = [path.parent.name for path in sorted(folder.glob(f"*/{CAMPAIGN_FILE}"))]
    remedy = f"rename {close}" if close else 'write one with the line wild_type = "WT"'
    if below and not close:
        remedy = f"did you mean the folder {folder / below[0]}?"
    findings.add(
        Origin(file=CAMPAIGN_FILE),
        found="no such file",
        expected=f"a file {CAMPAIGN_FILE} that names at least the wild type",
        remedy=remedy,
    )
