"""Constructs read by the estimator, and the errors of their medians."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from ..campaign import Curve, FloatArray
from ..gating import GatingScheme
from ..median import CellReading, read_construct
from ..streams import named_stream
from .questions import ProtocolQuestion


@dataclass(frozen=True, kw_only=True, slots=True)
class MedianErrors:
    """Errors of constructs' medians for one curve."""

    means_mv: FloatArray  # (n_trials,), of the cells that are used; empty when there are none
    stated_mv: float  # mean over constructs of the uncertainty shared by their cells
    lost: float  # share of cells

    @property
    def bias_mv(self) -> float | None:
        """Mean error (mV); None where nothing could be read."""
        return float(self.means_mv.mean()) if len(self.means_mv) else None


def size(errors: MedianErrors) -> float:
    """Absolute bias (mV); infinite where nothing could be read."""
    return math.inf if errors.bias_mv is None else abs(errors.bias_mv)


def standard_error(errors: MedianErrors) -> float | None:
    """Of the bias (mV); None for a single construct."""
    n = len(errors.means_mv)
    return float(errors.means_mv.std(ddof=1) / math.sqrt(n)) if n > 1 else None


def without_noise(
    scheme: GatingScheme, step: float, v: FloatArray, question: ProtocolQuestion
) -> MedianErrors:
    """One construct whose cells lie at even distances between two points."""
    phases = (np.arange(question.cells) + 0.5) / question.cells - 0.5
    return _errors([_read(scheme, v, step * phases, np.zeros((question.cells, len(v))))])


def with_noise(name: str, scheme: GatingScheme, v: FloatArray, question: ProtocolQuestion) -> MedianErrors:
    """Constructs as they are recorded."""
    found = []
    for trial in range(question.trials):
        rng = named_stream(question.seed, f"protocol {name} {trial}")
        shifts = question.cell_sd_mv * rng.standard_normal(question.cells)
        noise = question.noise * rng.standard_normal((question.cells, len(v)))
        found.append(_read(scheme, v, shifts, noise))
    return _errors(found)


_Read = tuple[tuple[CellReading, ...], FloatArray]


def _read(scheme: GatingScheme, v: FloatArray, shifts: FloatArray, noise: FloatArray) -> _Read:
    """Readings of one construct's cells, and their true medians."""
    curves = [
        Curve(construct="expected", cell=f"{i:03d}", voltage_mv=v, charge=scheme.q(v - shift) + own)
        for i, (shift, own) in enumerate(zip(shifts, noise, strict=True))
    ]
    return read_construct(curves), scheme.median_mv + shifts


def _errors(constructs: Sequence[_Read]) -> MedianErrors:
    means, stated, lost, count = [], [], 0, 0
    for readings, truth in constructs:
        used = [(r, r.median_mv - true) for r, true in zip(readings, truth, strict=True) if r.used]
        coarse = sum(any(flag.code == "coarse-steps" for flag in reading.flags) for reading, _ in used)
        lost += len(readings) - len(used) + coarse
        count += len(readings)
        if used:
            means.append(float(np.mean([error for _, error in used])))
            stated.append(used[0][0].truncation_mv)
    return MedianErrors(
        means_mv=np.array(means), stated_mv=float(np.mean(stated)) if stated else math.inf, lost=lost / count
    )
