"""A simulated campaign as files and as text: what a laboratory would have recorded, and the truth apart."""

from __future__ import annotations

import csv
import io
import json
from collections.abc import Mapping, Sequence

from ..campaign import Campaign
from ..mutations import parse_label
from ..simulation import Model, Truth
from ..tables import Row, Table, Value

HEADER = (
    "Simulated, no recorded data: drawn from truth/model.toml by `cornerwise simulate`.",
    "The folder truth holds what is true and is not read; delete it to judge the campaign blind.",
)


def campaign_files(campaign: Campaign, truth: Truth, model: Model) -> dict[str, str | bytes]:
    """Name and text of every file of a simulated campaign.

    Parameters
    ----------
    campaign : Campaign
        What `cornerwise.simulate` drew.
    truth : Truth
        What `cornerwise.simulation.truth_of` says of the same model.
    model : Model
        What it was drawn from.

    Returns
    -------
    dict of str to str or bytes
        ``campaign.toml``, ``curves.csv``, ``charges.csv`` and ``openings.csv`` where there are any, and in
        the folder ``truth`` the model and the true values, which no reader of the campaign takes up.
    """
    files: dict[str, str | bytes] = {
        "campaign.toml": _campaign_toml(campaign, model),
        "curves.csv": _table(_CURVES, _curve_rows(campaign, model.common.decimals)),
        "charges.csv": _charges(campaign, model.common.charge_decimals),
        "openings.csv": _table(_OPENINGS, _opening_rows(campaign)),
        "truth/model.toml": model.source,
        "truth/constructs.csv": _truth(truth.constructs),
        "truth/cycles.csv": _truth(truth.cycles),
    }
    return {name: content for name, content in files.items() if content}


_TRUE_DECIMALS = 9
_CURVES = ("construct", "cell", "batch", "voltage_mV", "charge_pC", "holding_mV")
_OPENINGS = ("construct", "cell", "batch", "voltage_mV", "open_probability")
_REPLICATES = ("construct", "cell", "batch", "charge_e0", "method")
_SUMMARIES = ("construct", "charge_e0", "sem_e0", "n", "method")
_OPTIONAL = ("batch", "holding_mV", "method")


def _curve_rows(campaign: Campaign, decimals: int) -> list[tuple[str, ...]]:
    return [
        (c.construct, c.cell, c.batch or "", f"{v:g}", f"{q:.{decimals}f}", _plain(c.holding_mv))
        for construct in campaign.constructs
        for c in construct.curves
        for v, q in zip(c.voltage_mv, c.charge, strict=True)
    ]


def _opening_rows(campaign: Campaign) -> list[tuple[str, ...]]:
    return [
        (c.construct, c.cell, c.batch or "", f"{v:g}", f"{p:.6g}")
        for construct in campaign.constructs
        for c in construct.openings
        for v, p in zip(c.voltage_mv, c.open_probability, strict=True)
    ]


def _charges(campaign: Campaign, decimals: int) -> str:
    replicates = [
        (r.construct, r.cell, r.batch or "", f"{r.charge_e0:.{decimals}f}", r.method or "")
        for construct in campaign.constructs
        for r in construct.charge_replicates
    ]
    summaries = [
        (s.construct, f"{s.charge_e0:.{decimals}f}", f"{s.sem_e0:.{decimals}f}", _plain(s.n), s.method or "")
        for construct in campaign.constructs
        for s in construct.charge_summaries
    ]
    return _table(_REPLICATES, replicates) or _table(_SUMMARIES, summaries)


def _truth(table: Table[Row]) -> str:
    return _table(table.columns, [tuple(map(_full, row.cells())) for row in table])


def _full(value: Value) -> str:
    """A value; numbers to nine decimals, below which they hold nothing but rounding errors."""
    if isinstance(value, float):
        return str(round(value, _TRUE_DECIMALS) + 0.0)
    return "" if value is None else str(value)


def _plain(value: float | None) -> str:
    return "" if value is None else f"{value:g}"


def _table(header: Sequence[str], rows: Sequence[tuple[str, ...]]) -> str:
    """Text of a table; optional columns that are empty are left out, and so is a table without rows."""
    if not rows:
        return ""
    kept = [i for i, name in enumerate(header) if name not in _OPTIONAL or any(row[i] for row in rows)]
    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow([header[i] for i in kept])
    writer.writerows([row[i] for i in kept] for row in rows)
    return stream.getvalue()


def _campaign_toml(campaign: Campaign, model: Model) -> str:
    notes = [*model.note.splitlines(), *HEADER]
    lines = [*(f"# {line}".rstrip() for line in notes)]
    lines += [f"{key} = {_toml(value)}" for key, value in model.campaign.items()]
    listed = [one for one in campaign.constructs if parse_label(one.label) != frozenset(one.mutations)]
    named = [(one.label, [m.text for m in one.mutations]) for one in listed if one.mutations]
    if named:
        lines += ["", "[mutations]", *(f"{_toml(label)} = {_toml(words)}" for label, words in named)]
    return "\n".join(lines) + "\n"


def _toml(value: object) -> str:
    """A value as TOML writes it."""
    match value:
        case bool():
            return "true" if value else "false"
        case str():
            return json.dumps(value, ensure_ascii=False).replace("\x7f", "\\u007f")
        case Mapping():
            return "{ " + ", ".join(f"{key} = {_toml(one)}" for key, one in value.items()) + " }"
        case list():
            return "[" + ", ".join(map(_toml, value)) + "]"
    return repr(value)
