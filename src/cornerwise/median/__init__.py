"""Q-V curves to median voltages: one construct's cells read together, with doubts about their curves."""

from .cell_reading import CellReading, FittedCurve
from .plateaus import plain_median_mv
from .reading import read_construct
from .single_sigmoid import SingleSigmoid, single_sigmoid

__all__ = [
    "CellReading",
    "FittedCurve",
    "SingleSigmoid",
    "plain_median_mv",
    "read_construct",
    "single_sigmoid",
]
