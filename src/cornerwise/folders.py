"""Folders that appear, or are replaced, as a whole.

Files are written into a folder beside the place, ``.NAME.cornerwise-...``, which is then put there in one
step: a rename where there was nothing, an exchange of the two folders where there was an earlier one. So
whenever a run is killed, the place holds the earlier folder untouched, or the new one complete, or nothing
as before. What a killed run leaves beside it is cleared away by the next one into the same place; a lock
tells it from what another run is just writing.

Where the file system cannot exchange two folders, the earlier one is first moved aside, and a run that is
killed in between leaves it there, as ``.NAME.cornerwise-...-old``; the next run puts it back.
"""

from __future__ import annotations

import ctypes
import errno
import os
import secrets
import shutil
import stat
import sys
import time
from collections.abc import Iterator, Mapping
from contextlib import contextmanager, suppress
from pathlib import Path

from .errors import UsageError

try:
    import fcntl
except ImportError:  # no such locks on this system
    fcntl = None  # type: ignore[assignment]

_MARK = "cornerwise-"
_OLD = "-old"
_SURELY_LEFT_S = 86_400  # age of what is left behind where there are no locks
_ATTEMPTS = 20
_OCCUPIED = (errno.ENOTEMPTY, errno.EEXIST)
_NO_EXCHANGE = (errno.ENOSYS, errno.EINVAL, errno.ENOTSUP, errno.EOPNOTSUPP)


def check_destination(folder: Path, *, force: bool) -> None:
    """Refuse a destination that would be overwritten unasked, before anything is computed.

    Raises
    ------
    UsageError
        If `folder` exists and `force` is False, or if it is a file, or if its parent is no folder that can
        be written to.
    """
    place = _followed(folder)
    try:
        mode = place.stat().st_mode  # one look: between two, another run may put a folder there
    except (FileNotFoundError, NotADirectoryError):
        mode = None
    except OSError as error:
        raise UsageError(f"cannot write {folder}: {error.strerror}; give another folder") from error
    if mode is not None and not stat.S_ISDIR(mode):
        raise UsageError(f"{folder} is a file; give a folder to write to")
    if mode is not None and not force:
        raise UsageError(f"{folder} exists; use --force to replace it as a whole, or give another folder")
    if not place.parent.is_dir():
        raise UsageError(f"{place.parent} is not a folder; make it first")
    if not place.name or place == Path.cwd().resolve() or place in Path.cwd().resolve().parents:
        raise UsageError(f"{folder} holds the folder you are in; give a new folder inside it")
    if not os.access(place.parent, os.W_OK | os.X_OK):
        raise UsageError(f"cannot write into {place.parent}; give another folder, or mend its permissions")


def write_folder(
    files: Mapping[str, str | bytes], folder: str | os.PathLike[str], *, force: bool = False
) -> None:
    r"""Write files into `folder`, all of them or none.

    Parameters
    ----------
    files : mapping of str to str or bytes
        File name, or a path below `folder` with forward slashes, to contents; text is written
        as UTF-8 with ``\n`` line ends.
    folder : str or path-like
        Appears, or is replaced, as a whole once every file is complete. A link is followed.
    force : bool, optional
        Replace an existing folder.

    Raises
    ------
    UsageError
        As `check_destination`, or if the place cannot be written.
    """
    check_destination(Path(folder), force=force)
    place = _followed(Path(folder))
    try:
        clear_left_behind(place)
        with _beside(place) as fresh:
            for name, contents in files.items():
                _write_file(_place_below(fresh, name), contents)
            with suppress(FileNotFoundError):  # none yet, or another run is just replacing it
                shutil.copymode(place, fresh)
            _put_in_place(fresh, place, force=force)
        _sync(place.parent)
    except OSError as error:
        raise UsageError(f"cannot write {folder}: {_why(error)}; nothing was changed") from error


def clear_left_behind(folder: Path) -> None:
    """Put back or delete what runs that were killed left beside `folder`."""
    for left in sorted(folder.parent.glob(f".{_escaped(folder.name)}.{_MARK}*")):
        with _locked(left) as mine:
            if not mine:
                continue
            if left.name.endswith(_OLD):
                _put_back(left, folder)
            else:
                shutil.rmtree(left, ignore_errors=True)


def _followed(folder: Path) -> Path:
    """Where `folder` really is: its absolute path with all links followed."""
    try:
        return folder.resolve()
    except (OSError, RuntimeError) as error:  # a link that leads to itself
        raise UsageError(f"cannot write {folder}: it is a link that leads nowhere") from error


def _escaped(name: str) -> str:
    """`name` for a pattern, every letter of it taken as it stands."""
    return "".join(f"[{letter}]" if letter in "*?[" else letter for letter in name)


@contextmanager
def _beside(place: Path) -> Iterator[Path]:
    """A new folder beside `place`, locked; deleted at the end unless it was put in place."""
    for _ in range(_ATTEMPTS):
        fresh = place.with_name(f".{place.name}.{_MARK}{secrets.token_hex(4)}")
        fresh.mkdir()
        with _locked(fresh) as mine:
            if not mine or not fresh.exists():  # another run took it for one left behind
                continue
            try:
                yield fresh
            finally:
                shutil.rmtree(fresh, ignore_errors=True)
            return
    raise OSError(errno.EBUSY, "other runs are writing to this place")


@contextmanager
def _locked(folder: Path) -> Iterator[bool]:
    """Whether `folder` was locked and is so until the end; where that cannot be, whether it is old."""
    try:
        handle = os.open(folder, os.O_RDONLY)
    except OSError:  # it is gone, or this system opens no folders
        yield fcntl is None and _is_old(folder)
        return
    try:
        yield _lock(handle, folder)
    finally:
        os.close(handle)


def _lock(handle: int, folder: Path) -> bool:
    if fcntl is None:
        return _is_old(folder)
    try:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except BlockingIOError:
        return False
    except OSError:  # a file system without locks
        return _is_old(folder)
    return True


def _is_old(folder: Path) -> bool:
    with suppress(OSError):
        return time.time() - folder.stat().st_mtime > _SURELY_LEFT_S
    return False


def _place_below(folder: Path, name: str) -> Path:
    """Path of a file inside `folder`; a name that would leave it is a fault of the program."""
    parts = name.split("/")
    if any(part in ("", ".", "..") or "\\" in part or ":" in part for part in parts):
        raise ValueError(f"{name!r} is no path below a folder")
    return folder.joinpath(*parts)


def _write_file(path: Path, contents: str | bytes) -> None:
    path.parent.mkdir(parents=True, exist_ok=True)
    with path.open("wb") as file:
        file.write(contents.encode("utf-8") if isinstance(contents, str) else contents)
        file.flush()
        os.fsync(file.fileno())  # before the folder is put in place, so that a power cut leaves no empty file


def _sync(folder: Path) -> None:
    """Have the system write down which folder has which name."""
    with suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _put_in_place(fresh: Path, place: Path, *, force: bool) -> None:
    """Give `fresh` the name `place`; what was there is where `fresh` was, or gone."""
    for _ in range(_ATTEMPTS):
        try:
            fresh.rename(place)
            return
        except OSError as error:
            if error.errno not in _OCCUPIED or not force:
                raise
        try:
            _exchange(fresh, place)
            return
        except FileNotFoundError:  # another run has just moved it aside
            continue
        except OSError as error:
            if error.errno not in _NO_EXCHANGE:
                raise
        with suppress(FileNotFoundError):
            _move_aside(fresh, place)
            return
    raise OSError(errno.EBUSY, "other runs are writing to this place")


def _move_aside(fresh: Path, place: Path) -> None:
    """Put `fresh` in place in two steps."""
    aside = fresh.with_name(f"{fresh.name}{_OLD}")
    place.rename(aside)
    with _locked(aside):
        try:
            fresh.rename(place)
        except BaseException as error:
            _put_back(aside, place)
            if isinstance(error, OSError) and error.errno in _OCCUPIED:
                raise FileNotFoundError(error.errno, "another run was quicker") from error
            raise
        shutil.rmtree(aside, ignore_errors=True)


def _put_back(aside: Path, place: Path) -> None:
    """Put back what was moved aside; delete it where another run has filled its place.

    The renaming itself tells which: between a look and a deed other runs may do theirs.
    """
    try:
        aside.rename(place)
    except FileNotFoundError:  # another run has dealt with it
        return
    except OSError as error:
        if error.errno not in _OCCUPIED:
            raise
        shutil.rmtree(aside, ignore_errors=True)


def _exchange(one: Path, other: Path) -> None:
    """Exchange two folders in one step.

    Raises
    ------
    OSError
        With an error number of `_NO_EXCHANGE` where the system or the file system cannot.
    """
    library = None if os.name == "nt" else ctypes.CDLL(None, use_errno=True)
    names = os.fsencode(one), os.fsencode(other)
    if sys.platform == "darwin" and hasattr(library, "renamex_np"):
        done = library.renamex_np(*names, 2)  # RENAME_SWAP
    elif library is not None and hasattr(library, "renameat2"):
        here = -100  # AT_FDCWD
        done = library.renameat2(here, names[0], here, names[1], 2)  # RENAME_EXCHANGE
    else:
        raise OSError(errno.ENOSYS, "no exchange of folders")
    if done != 0:
        number = ctypes.get_errno()
        raise OSError(number, os.strerror(number), str(other))


def _why(error: OSError) -> str:
    if error.errno in _OCCUPIED:
        return "another run has written it meanwhile"
    if error.errno in (errno.EBUSY, errno.EXDEV):
        return f"{error.strerror}; give a new folder inside it"
    return error.strerror or str(error)
