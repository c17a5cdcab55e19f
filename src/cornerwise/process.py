"""The process a command runs in: what its streams can show, how it is stopped, how it ends."""

from __future__ import annotations

import codecs
import gc
import os
import signal
import sys
from collections.abc import Callable
from contextlib import suppress
from types import FrameType
from typing import NoReturn

INTERRUPTED = 128 + signal.SIGINT
TERMINATED = 128 + signal.SIGTERM

_FEWEST_NEW_OBJECTS = 100_000  # between two looks for garbage; importing alone makes many that stay
_PLAIN = {"−": "-", "±": "+/-", "×": "x", "·": ".", "–": "-", "…": "...", "’": "'"}


def run(command: Callable[[], object]) -> NoReturn:
    """Run a command to its end: exit with its code, whatever the streams, signals and readers of pipes do.

    Parameters
    ----------
    command : callable
        Ends with `SystemExit`, or returns when it is done.
    """
    gc.set_threshold(_FEWEST_NEW_OBJECTS)
    _show_what_can_be_shown()
    # Not by the signals themselves, so that what was begun is cleared away.
    signal.signal(signal.SIGINT, signal.default_int_handler)
    signal.signal(signal.SIGTERM, _stop)
    screen = sys.stdout
    code: object = 0
    try:
        command()
    except SystemExit as ended:
        code = ended.code
    if code in (INTERRUPTED, TERMINATED):
        with suppress(OSError):
            print("cornerwise: stopped; no output was left half written", file=sys.stderr)
    broken = sys.stdout is not screen  # put aside while the help was printed
    try:
        screen.flush()
    except BrokenPipeError:
        broken = True
    if broken:  # the reader of a pipe went away; nothing is wrong
        let_go_of_stdout()
        code = code if code not in (None, 1) else 0
    raise SystemExit(code)


def let_go_of_stdout() -> None:
    """Send what is still to be printed nowhere, so that nothing complains of it at the end."""
    os.dup2(os.open(os.devnull, os.O_WRONLY), sys.__stdout__.fileno() if sys.__stdout__ else 1)


def print_json(text: str) -> None:
    r"""Print JSON on stdout: UTF-8 with ``\n`` line ends, whatever the locale."""
    if hasattr(sys.stdout, "reconfigure"):
        sys.stdout.reconfigure(encoding="utf-8", newline="\n")
    print(text, end="")


def _stop(number: int, _: FrameType | None) -> NoReturn:
    raise SystemExit(128 + number)


def _show_what_can_be_shown() -> None:
    """Have streams that know few characters show others by similar ones, or by their numbers."""
    codecs.register_error("cornerwise.plain", _similar)
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="cornerwise.plain")


def _similar(error: UnicodeError) -> tuple[str, int]:
    r"""Replacement of what an encoding lacks.

    Examples
    --------
    >>> _similar(UnicodeEncodeError("ascii", "2 ± 1 Δ", 2, 3, ""))
    ('+/-', 3)
    >>> _similar(UnicodeEncodeError("ascii", "2 ± 1 Δ", 6, 7, ""))
    ('\\u0394', 7)
    """
    assert isinstance(error, UnicodeEncodeError)
    lacking = error.object[error.start : error.end]
    spelt = (_PLAIN.get(letter) or letter.encode("ascii", "backslashreplace").decode() for letter in lacking)
    return "".join(spelt), error.end
