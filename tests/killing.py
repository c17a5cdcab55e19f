"""Runs of ``cornerwise couple --out`` that are killed (SIGKILL), and what they leave; run by `test_killed`.

    python killing.py CAMPAIGN OUT earlier|nothing MOMENTS [no-exchange]

The interpreter and its libraries are loaded once; every run is a process forked from there. Half of the
moments are spread over the time a run takes. The others are set by what a run does: it is killed just before
one of its dealings with files beside or inside OUT, at each of the first and last and some in between. Prints
how many runs were killed and in which state they left OUT; fails when it is in any other.
"""

from __future__ import annotations

import errno
import json
import os
import shutil
import signal
import sys
import time
from collections import Counter
from pathlib import Path

import cornerwise.coupling
import cornerwise.intake
import cornerwise.render.files
import cornerwise.render.report.page  # noqa: F401 - so that no run spends its time on it
from cornerwise import folders
from cornerwise.cli import main

Tree = dict[str, bytes]


def tree(folder: Path) -> Tree | None:
    """Every file of a folder; None when there is none."""
    if not folder.exists():
        return None
    return {str(p.relative_to(folder)): p.read_bytes() for p in folder.rglob("*") if p.is_file()}


def start(words: list[str], kill_at: int | None = None, place: str = "", tell: int | None = None) -> int:
    """Run the command in a process that kills itself before its `kill_at`-th dealing with `place`.

    The number of dealings is written to the pipe `tell`.
    """
    child = os.fork()
    if child:
        return child
    seen = 0

    def hook(event: str, arguments: tuple[object, ...]) -> None:
        nonlocal seen
        if event.startswith(("open", "os.", "shutil.")) and any(place in str(one) for one in arguments):
            seen += 1
            if seen == kill_at:
                os.kill(os.getpid(), signal.SIGKILL)

    if place:
        sys.addaudithook(hook)
    silent = os.open(os.devnull, os.O_WRONLY)
    os.dup2(silent, 1)
    os.dup2(silent, 2)
    sys.argv = ["cornerwise", *words]
    code: object = 0
    try:
        main()
    except SystemExit as done:
        code = done.code or 0
    if tell is not None:
        os.write(tell, str(seen).encode())
    os._exit(int(str(code)))


def dealings(words: list[str], place: str) -> int:
    """How often an undisturbed run deals with files beside or inside `place`."""
    heard, told = os.pipe()
    assert ended(start(words, None, place, told)) == 0
    return int(os.read(heard, 20))


def ended(child: int) -> int:
    """Exit code of a run, negative for the signal that killed it."""
    return os.waitstatus_to_exitcode(os.waitpid(child, 0)[1])


def examine(out: Path, before: Tree | None, new: Tree) -> str:
    """In which state a killed run left its place; fails when it is neither the earlier nor the new one."""
    found = tree(out)
    assert all(
        path.name.startswith(f".{out.name}.cornerwise-") for path in out.parent.iterdir() if path != out
    )
    if found == new:
        return "new"
    if found is None and before is not None:  # without an exchange of folders there is a moment between
        (aside,) = out.parent.glob(f".{out.name}.cornerwise-*-old")
        assert tree(aside) == before
        return "aside"
    assert found == before
    return "earlier" if before else "nothing"


def restore(out: Path, before: Tree | None) -> None:
    """The place as it was before a run; what was left beside it stays."""
    if tree(out) == before:
        return
    shutil.rmtree(out, ignore_errors=True)
    for name, contents in (before or {}).items():
        (out / name).parent.mkdir(parents=True, exist_ok=True)
        (out / name).write_bytes(contents)


def without_exchange(*_: object) -> None:
    raise OSError(errno.EINVAL, "this file system cannot")


def run() -> None:
    campaign, place, kind, moments, *options = sys.argv[1:]
    out = Path(place)
    words = ["couple", campaign, "--out", place, "--force"]
    if "no-exchange" in options:
        folders._exchange = without_exchange
    assert ended(start(words)) == 0
    new = tree(out)
    assert new
    before = {"result.json": b"{}", "tables/couplings.md": b"earlier"} if kind == "earlier" else None
    restore(out, before)
    began = time.monotonic()
    assert ended(start(words)) == 0
    lasts = time.monotonic() - began
    states: Counter[str] = Counter()
    for moment in range(int(moments) // 2):
        restore(out, before)
        child = start(words)
        time.sleep(lasts * moment / (int(moments) // 2))
        os.kill(child, signal.SIGKILL)
        states["killed"] += ended(child) == -signal.SIGKILL
        states[examine(out, before, new)] += 1
    folders.clear_left_behind(out)
    restore(out, before)
    last = dealings(words, out.name)
    step = max(1, 4 * last // int(moments))
    for kill_at in sorted({*range(1, 6), *range(6, last - 8, step), *range(max(1, last - 8), last + 1)}):
        folders.clear_left_behind(out)  # whose dealings would be counted too
        restore(out, before)
        if ended(start(words, kill_at, out.name)) == -signal.SIGKILL:
            states["killed"] += 1
            states[examine(out, before, new)] += 1
    restore(out, before)
    assert ended(start(words)) == 0
    assert tree(out) == new
    assert list(out.parent.iterdir()) == [out]
    print(json.dumps(states))


if __name__ == "__main__":
    run()
