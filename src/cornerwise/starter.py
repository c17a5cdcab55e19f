"""A filled-in campaign to start from; invented data."""

from __future__ import annotations

from importlib import resources
from pathlib import Path

from .errors import UsageError
from .folders import write_folder

MARK = "campaign.toml"  # without it a folder is no campaign


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
    files = starter_files()
    try:
        if folder.exists() and (not folder.is_dir() or any(folder.iterdir())):
            raise UsageError(f"{folder} is not an empty folder; give a new name")
        folder.parent.mkdir(parents=True, exist_ok=True)
        if not folder.exists():
            write_folder(files, folder)
        else:  # perhaps the one the user is in, which must not be exchanged for another
            for name in sorted(files, key=lambda name: name == MARK):  # the one that makes it a campaign last
                (folder / name).write_bytes(files[name].encode("utf-8"))
    except OSError as error:
        raise UsageError(f"cannot write {folder}: {error.strerror}") from error
    return tuple(files)
