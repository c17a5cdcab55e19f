"""Which voltage protocol leaves the median voltage unbiased, found with the estimator that reads the data.

For curves that are expected, ranges that leave out less and less of the charge are tried with several steps.
Each is read twice by `cornerwise.median.read_construct`: without noise, from cells whose curves lie at
different places between two points, which shows what range and step alone do; and with noise and scatter
between cells, many times over, which shows what they do to a real construct. No rule of thumb decides.
"""

from .checking import ProtocolCheck, ProtocolRow, check_protocols
from .questions import ProtocolQuestion, curves_of, expected_curves, median_and_slope, question_for

__all__ = [
    "ProtocolCheck",
    "ProtocolQuestion",
    "ProtocolRow",
    "check_protocols",
    "curves_of",
    "expected_curves",
    "median_and_slope",
    "question_for",
]
