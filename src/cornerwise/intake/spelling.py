"""Keys that are spelt wrong: refused, and read on under the name they were meant to have.

So one slip of the pen is told once, and hides no fault in what it names.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Sequence

from ..errors import Origin
from .findings import Findings, nearest, shown


def meant_keys(
    keys: Collection[str],
    known: Sequence[str],
    findings: Findings,
    *,
    origin: Callable[[str], Origin],
    misplaced: Callable[[str], str | None] = lambda _: None,
) -> dict[str, str]:
    """Refuse unknown keys; return the known key that each key is or was meant to be.

    Parameters
    ----------
    keys : collection of str
        Keys as written.
    known : sequence of str
        The keys there are.
    findings : Findings
        Takes every unknown key.
    origin : callable
        Gives the place of a key.
    misplaced : callable, optional
        Gives what to do with a key that belongs elsewhere; None for others.

    Returns
    -------
    dict of str to str
        Keys as written to known keys, each of them once; those that can be read as none are left out.
    """
    meant = {key: key for key in keys if key in known}
    for key in keys:
        if key in known:
            continue
        elsewhere = misplaced(key)
        close = None if elsewhere else nearest(key, known)
        findings.add(
            origin(key),
            found=f"the unknown key {shown(key)}",
            expected="a known key" if close else f"only the keys {', '.join(known)}",
            remedy=elsewhere or (f"did you mean {close}?" if close else "delete it"),
        )
        if close and close not in meant.values():
            meant[key] = close
    return meant
