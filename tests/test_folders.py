"""Folders of output: whole or not at all, whatever the disk, the permissions, the links and other runs do."""

import errno
import fcntl
import os
import resource
import subprocess
import sys
import time
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest

from cornerwise import folders
from cornerwise.errors import UsageError
from cornerwise.folders import check_destination, clear_left_behind, write_folder

IS_ROOT = os.geteuid() == 0


def _names(folder: Path) -> list[str]:
    return sorted(path.name for path in folder.iterdir())


def test_an_existing_folder_is_kept_unless_forced(tmp_path: Path) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)
    (folder / "mine.txt").write_text("kept")
    with pytest.raises(UsageError, match="use --force"):
        write_folder({"a.txt": "second"}, folder)
    assert (folder / "a.txt").read_text() == "first"
    write_folder({"b.txt": "third"}, folder, force=True)
    assert sorted(path.name for path in folder.iterdir()) == ["b.txt"]
    assert [path.name for path in tmp_path.iterdir()] == ["out"]


def test_a_failed_write_leaves_the_earlier_result(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)

    def full(handle: int) -> None:
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(UsageError, match="No space left on device; nothing was changed"):
        write_folder({"a.txt": "second"}, folder, force=True)
    assert (folder / "a.txt").read_text() == "first"
    assert [path.name for path in tmp_path.iterdir()] == ["out"]


def test_destination_is_checked_before_anything_is_computed(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("")
    with pytest.raises(UsageError, match="is a file"):
        check_destination(tmp_path / "file", force=True)
    with pytest.raises(UsageError, match="is not a folder; make it first"):
        check_destination(tmp_path / "no" / "out", force=False)


def test_a_path_below_the_folder_is_made(tmp_path: Path) -> None:
    write_folder({"a.txt": "first", "figures/one/shape.svg": b"<svg/>"}, tmp_path / "out")
    assert (tmp_path / "out" / "figures" / "one" / "shape.svg").read_bytes() == b"<svg/>"


@pytest.mark.parametrize(
    "name", ["../a.txt", "/etc/a.txt", "figures/../../a.txt", "a//b.txt", "c:a.txt", "a\\b.txt", ""]
)
def test_no_name_leads_out_of_the_folder(tmp_path: Path, name: str) -> None:
    with pytest.raises(ValueError, match="no path below a folder"):
        write_folder({name: "x"}, tmp_path / "out")
    assert list(tmp_path.iterdir()) == []


def test_existing_permissions_are_kept(tmp_path: Path) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)
    assert folder.stat().st_mode & 0o777 == 0o777 & ~_umask()
    folder.chmod(0o750)
    write_folder({"a.txt": "second"}, folder, force=True)
    assert folder.stat().st_mode & 0o777 == 0o750


def _umask() -> int:
    mask = os.umask(0)
    os.umask(mask)
    return mask


def test_a_failed_exchange_leaves_the_earlier_folder(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)
    monkeypatch.setattr(folders, "_exchange", _broken)
    with pytest.raises(UsageError, match="broken; nothing was changed"):
        write_folder({"a.txt": "second"}, folder, force=True)
    assert (folder / "a.txt").read_text() == "first"
    assert _names(tmp_path) == ["out"]


def test_a_failed_second_step_puts_the_earlier_folder_back(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)
    monkeypatch.setattr(folders, "_exchange", _no_exchange)
    real = Path.rename

    def failing(self: Path, target: Path) -> Path:
        if target == folder and not folder.exists() and not self.name.endswith("-old"):
            _broken()
        return real(self, target)

    monkeypatch.setattr(Path, "rename", failing)
    with pytest.raises(UsageError, match="broken; nothing was changed"):
        write_folder({"a.txt": "second"}, folder, force=True)
    assert (folder / "a.txt").read_text() == "first"
    assert _names(tmp_path) == ["out"]


def _no_exchange(*_: object) -> None:
    raise OSError(errno.EINVAL, "not on this file system")


def _broken(*_: object) -> None:
    raise OSError(errno.EIO, "broken")


def test_without_an_exchange_of_folders_it_takes_two_steps(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(folders, "_exchange", _no_exchange)
    write_folder({"a.txt": "first"}, tmp_path / "out")
    write_folder({"a.txt": "second"}, tmp_path / "out", force=True)
    assert (tmp_path / "out" / "a.txt").read_text() == "second"
    assert _names(tmp_path) == ["out"]


def test_what_a_killed_run_left_is_cleared_away(tmp_path: Path) -> None:
    for name in (".out.cornerwise-1a2b", ".out.cornerwise-1a2b-old", ".other.cornerwise-3c"):
        (tmp_path / name).mkdir()
        (tmp_path / name / "a.txt").write_text(name)
    (tmp_path / "out").mkdir()
    clear_left_behind(tmp_path / "out")
    assert _names(tmp_path) == [".other.cornerwise-3c", "out"]


def test_what_was_moved_aside_is_put_back(tmp_path: Path) -> None:
    aside = tmp_path / ".out.cornerwise-1a2b-old"
    aside.mkdir()
    (aside / "a.txt").write_text("earlier")
    clear_left_behind(tmp_path / "out")
    assert _names(tmp_path) == ["out"]
    assert (tmp_path / "out" / "a.txt").read_text() == "earlier"


def test_what_another_run_is_writing_is_left_alone(tmp_path: Path) -> None:
    busy = tmp_path / ".out.cornerwise-1a2b"
    busy.mkdir()
    handle = os.open(busy, os.O_RDONLY)
    fcntl.flock(handle, fcntl.LOCK_EX)
    write_folder({"a.txt": "mine"}, tmp_path / "out")
    assert _names(tmp_path) == [".out.cornerwise-1a2b", "out"]
    os.close(handle)
    write_folder({"a.txt": "mine"}, tmp_path / "out", force=True)
    assert _names(tmp_path) == ["out"]


def test_without_locks_only_what_is_old_is_cleared_away(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def no_locks(*_: object) -> None:
        raise OSError(errno.ENOLCK, "no locks here")

    monkeypatch.setattr(fcntl, "flock", no_locks)
    left = tmp_path / ".out.cornerwise-1a2b"
    left.mkdir()
    clear_left_behind(tmp_path / "out")
    assert left.exists()
    os.utime(left, (0, time.time() - 100_000))
    clear_left_behind(tmp_path / "out")
    assert not left.exists()


@pytest.mark.parametrize("exchange", [True, False])
def test_runs_at_once_do_not_mix(exchange: bool, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    if not exchange:
        monkeypatch.setattr(folders, "_exchange", _no_exchange)
    out = tmp_path / "out"

    def write(number: int) -> None:
        write_folder({f"{letter}.txt": str(number) for letter in "abcdefgh"}, out, force=True)

    for _ in range(5):
        with ThreadPoolExecutor(6) as pool:
            list(pool.map(write, range(12)))
        assert len({path.read_text() for path in out.iterdir()}) == 1
        assert len(_names(out)) == 8
        assert _names(tmp_path) == ["out"]


def test_the_slower_of_two_first_runs_changes_nothing(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tmp_path / "out"
    real = folders._put_in_place

    def overtaken(fresh: Path, place: Path, *, force: bool) -> None:
        place.mkdir()
        (place / "a.txt").write_text("the other")
        real(fresh, place, force=force)

    monkeypatch.setattr(folders, "_put_in_place", overtaken)
    with pytest.raises(UsageError, match="another run has written it meanwhile; nothing was changed"):
        write_folder({"a.txt": "mine"}, out)
    assert (out / "a.txt").read_text() == "the other"
    assert _names(tmp_path) == ["out"]


def test_a_link_is_followed(tmp_path: Path) -> None:
    (tmp_path / "disk").mkdir()
    link = tmp_path / "out"
    link.symlink_to(tmp_path / "disk" / "results")  # leads nowhere yet
    write_folder({"a.txt": "first"}, link)
    write_folder({"a.txt": "second"}, link, force=True)
    assert link.is_symlink()
    assert (tmp_path / "disk" / "results" / "a.txt").read_text() == "second"
    assert _names(tmp_path) == ["disk", "out"]
    assert _names(tmp_path / "disk") == ["results"]


def test_a_link_to_itself_and_the_folder_one_is_in(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    loop = tmp_path / "loop"
    loop.symlink_to(loop)
    with pytest.raises(UsageError, match=r"leads nowhere|is a file"):
        write_folder({"a.txt": "x"}, loop)
    (tmp_path / "here" / "below").mkdir(parents=True)
    monkeypatch.chdir(tmp_path / "here" / "below")
    for place in (Path(), Path(".."), tmp_path / "here", Path("/")):
        with pytest.raises(UsageError, match="holds the folder you are in; give a new folder inside it"):
            check_destination(place, force=True)


@pytest.mark.skipif(IS_ROOT, reason="the superuser may write anywhere")
def test_a_folder_that_cannot_be_written_to(tmp_path: Path) -> None:
    tmp_path.chmod(0o500)
    with pytest.raises(UsageError, match=r"cannot write into .*mend its permissions"):
        check_destination(tmp_path / "out", force=False)


_AS_NOBODY = """
import os, sys
from pathlib import Path
from cornerwise.errors import UsageError
from cornerwise.folders import write_folder
os.setgid(65534)
os.setuid(65534)
try:
    write_folder({"a.txt": "second"}, Path(sys.argv[1]), force=True)
except UsageError as error:
    print(error)
"""


@pytest.mark.skipif(not IS_ROOT, reason="only the superuser can become another user")
def test_a_folder_of_another_user(tmp_path: Path) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)
    closed = _run(_AS_NOBODY, folder)
    assert "cannot write" in closed
    assert "Permission denied; give another folder" in closed
    for path in (tmp_path, *tmp_path.parents):
        if "pytest" in str(path):
            path.chmod(path.stat().st_mode | 0o055)
    assert "cannot write into" in _run(_AS_NOBODY, folder)
    assert (folder / "a.txt").read_text() == "first"


def _run(code: str, folder: Path) -> str:
    words = [sys.executable, "-c", code, str(folder)]
    return subprocess.run(words, capture_output=True, text=True, check=True).stdout


def test_read_only_files_inside_are_replaced_with_their_folder(tmp_path: Path) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)
    (folder / "a.txt").chmod(0o400)
    write_folder({"a.txt": "second"}, folder, force=True)
    assert (folder / "a.txt").read_text() == "second"
    assert _names(tmp_path) == ["out"]


_LIMITED = """
import resource, sys
from pathlib import Path
from cornerwise.errors import UsageError
from cornerwise.folders import write_folder
resource.setrlimit(resource.RLIMIT_FSIZE, (100_000, 100_000))
try:
    write_folder({"a.txt": "second", "b.txt": "x" * 200_000}, Path(sys.argv[1]), force=True)
except UsageError as error:
    print(error)
"""


def test_a_file_larger_than_is_allowed(tmp_path: Path) -> None:
    folder = tmp_path / "out"
    write_folder({"a.txt": "first"}, folder)
    assert "File too large; nothing was changed" in _run(_LIMITED, folder)
    assert (folder / "a.txt").read_text() == "first"
    assert _names(tmp_path) == ["out"]
    assert resource.getrlimit(resource.RLIMIT_FSIZE)[0] != 100_000


def test_a_full_disk(tmp_path: Path) -> None:
    disk = tmp_path / "disk"
    disk.mkdir()
    mounted = subprocess.run(
        ["mount", "-t", "tmpfs", "-o", "size=256k", "tmpfs", str(disk)], capture_output=True, check=False
    )
    if mounted.returncode:
        pytest.skip("no small disk can be mounted here; test_a_file_larger_than_is_allowed stands for it")
    try:
        write_folder({"a.txt": "first"}, disk / "out")
        with pytest.raises(UsageError, match="No space left on device; nothing was changed"):
            write_folder({"a.txt": "second", "b.txt": "x" * 500_000}, disk / "out", force=True)
        assert (disk / "out" / "a.txt").read_text() == "first"
        assert _names(disk) == ["out"]
    finally:
        subprocess.run(["umount", str(disk)], check=True)
