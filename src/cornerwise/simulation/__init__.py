"""Campaigns with a known truth, drawn from a gating model and what mutations do to it."""

from .drawing import simulate, voltages_mv
from .model import Coupling, Effect, Model, Recording, SideState, Step
from .schemes import scheme_of
from .truth import ConstructTruth, CycleTruth, Truth, truth_of

__all__ = [
    "ConstructTruth",
    "Coupling",
    "CycleTruth",
    "Effect",
    "Model",
    "Recording",
    "SideState",
    "Step",
    "Truth",
    "scheme_of",
    "simulate",
    "truth_of",
    "voltages_mv",
]
