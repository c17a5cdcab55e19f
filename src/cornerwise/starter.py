"""A filled-in campaign to start from; invented data."""

from __future__ import annotations

from importlib import resources
from pathlib import Path

from .errors import UsageError


def starter_files() -> dict[str, str]:
    """Name and text of every file of the starter campaign."""
    folder = resources.files(__package__) / "starter_campaign"
    return {file.name: file.read_text("utf-8") for file in sorted(folder.iterdir(), key=lambda f: f.name)}


def new_campaign(folder: Path) -> tuple[str, ...]:
    """Write the starter campaign.

    Parameters
    ----------
    folder : Path
        Made if it does not exist; must be empty if it does.

    Returns
    -------
    tuple of str
        Names of the files written.

    Raises
    ------
    UsageError
        If `folder` holds anything or cannot be written.
    """
    if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
        raise UsageError(f"{folder} is not an empty folder; give a new name")
    files = starter_files()
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, text in files.items():
            (folder / name).write_text(text, encoding="utf-8", newline="\n")
    except OSError as error:
        raise UsageError(f"cannot write {folder}: {error.strerror}") from error
    return tuple(files)
