"""Files in a folder of output that no command wrote: ``--force`` deletes nothing of the user's own."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path, PurePath

from ..columns import OUTPUT_TABLES
from ..errors import UsageError

MOST_NAMED = 3

_FILES = ("result.json", "plan.json", "report.html", *(f"{name}.csv" for name in OUTPUT_TABLES))
_DRAWN = (".svg", ".pdf", ".png")
_BELOW = {"figures": _DRAWN, "tables": (".docx", ".tex", ".md", ".html", ".xlsx"), "truth": (".toml", ".csv")}
_SIMULATED = ("campaign.toml", "curves.csv", "charges.csv", "openings.csv")
_LEFT_BEHIND = (".DS_Store", "Thumbs.db", "desktop.ini")  # by file managers


def refuse_strangers(folder: Path) -> None:
    """Refuse to replace a folder that holds anything but output.

    Raises
    ------
    UsageError
        If `folder` exists and holds a file that no command writes, or a campaign that was not simulated.
    """
    if not folder.is_dir():
        return
    simulated = (folder / "truth" / "model.toml").is_file()
    strangers = [str(path) for path in _files(folder) if not _is_output(path, simulated=simulated)]
    if strangers:
        named = ", ".join(sorted(strangers)[:MOST_NAMED])
        more = f" and {len(strangers) - MOST_NAMED} more" if len(strangers) > MOST_NAMED else ""
        raise UsageError(
            f"{folder} holds files that cornerwise did not write ({named}{more}), which --force would "
            "delete; move them out, or give another folder"
        )


def _files(folder: Path) -> Iterator[PurePath]:
    for path in folder.rglob("*"):
        if path.is_symlink() or not path.is_dir():
            yield path.relative_to(folder)


def _is_output(path: PurePath, *, simulated: bool) -> bool:
    """Whether a path below a folder of output is one that a command writes."""
    if path.name in _LEFT_BEHIND:
        return True
    if len(path.parts) == 1:
        return path.name in _FILES or path.suffix in _DRAWN or (simulated and path.name in _SIMULATED)
    return path.suffix in _BELOW.get(path.parts[0], ())
