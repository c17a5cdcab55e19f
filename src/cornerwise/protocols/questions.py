"""What is asked of a voltage protocol, and for which curves."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

from ..errors import UsageError
from ..gating import GatingScheme, LinearSequence
from ..plausible import VOLTAGE_LIMIT_MV
from ..simulation import Model, scheme_of
from ..units import thermal_voltage_mv

_SLOW_SHARE = 1 / 3  # of the charge, in the slow step of an uneven curve
_SLOW_DISTANCE = 4.0  # slopes between its two steps


@dataclass(frozen=True, kw_only=True, slots=True)
class ProtocolQuestion:
    """What is asked of a protocol, and how constructs are recorded."""

    bound_mv: float = 1.0  # largest bias of a construct's median, and uncertainty from what is left out
    share: float = 0.02  # of the charge that may move outside the range at either end
    steps_mv: tuple[float, ...] = (5.0, 10.0, 20.0)
    ends_mv: tuple[float, float] | None = None  # a range to judge as well
    noise: float = 0.01  # standard deviation of a point, as a fraction of the whole charge
    cells: int = 5
    cell_sd_mv: float = 2.0  # of the medians of cells
    trials: int = 12  # constructs with noise
    seed: int = 1


def median_and_slope(words: str) -> tuple[float, float]:
    """Read a median voltage and a slope in mV.

    Raises
    ------
    UsageError
        If `words` is not two numbers with a colon between them.

    Examples
    --------
    >>> median_and_slope("-40:8")
    (-40.0, 8.0)
    """
    try:
        median, slope = map(float, words.split(":"))
    except ValueError:
        raise UsageError(f"{words!r} is no curve; write median and slope in mV, such as -40:8") from None
    return median, slope


def expected_curves(
    medians_and_slopes: Sequence[tuple[float, float]], temperature_c: float = 22.0
) -> dict[str, GatingScheme]:
    """Curves one may expect where only median and slope are known.

    Parameters
    ----------
    medians_and_slopes : sequence of (float, float)
        Median voltage (mV), and the slope of the main rise: the voltage (mV) over which the foot of a
        two-state curve grows e-fold, kT over its charge.
    temperature_c : float, optional
        Temperature (degrees Celsius).

    Returns
    -------
    dict of str to GatingScheme
        Three of each: two states; and two with the same main rise and a third of the charge in a step half
        as steep, four slopes above or below it, moved so that the median is the stated one.

    Raises
    ------
    UsageError
        If a slope is not positive or a median beyond the limit of voltages.
    """
    curves: dict[str, GatingScheme] = {}
    kt = thermal_voltage_mv(temperature_c)
    for median, slope in medians_and_slopes:
        if not 0 < slope <= VOLTAGE_LIMIT_MV or not abs(median) <= VOLTAGE_LIMIT_MV:
            raise UsageError(
                f"no curve has a median of {median:g} mV and a slope of {slope:g} mV; give a median within "
                f"{VOLTAGE_LIMIT_MV:g} mV and a slope above 0"
            )
        z, name = kt / slope, f"{median:g} mV, slope {slope:g} mV"
        curves[f"{name}, two states"] = LinearSequence(
            charges_e0=(z,), midpoints_mv=(median,), temperature_c=temperature_c
        )
        fast, slow = _SLOW_SHARE * _SLOW_DISTANCE * slope, (1 - _SLOW_SHARE) * _SLOW_DISTANCE * slope
        curves[f"{name}, late tail"] = LinearSequence(
            charges_e0=(z, z / 2), midpoints_mv=(median - fast, median + slow), temperature_c=temperature_c
        )
        curves[f"{name}, early tail"] = LinearSequence(
            charges_e0=(z / 2, z), midpoints_mv=(median - slow, median + fast), temperature_c=temperature_c
        )
    return curves


def curves_of(model: Model) -> dict[str, GatingScheme]:
    """Curves of all constructs of a model, by label."""
    return {label: scheme_of(model, mutations) for label, mutations in model.genotypes.items()}


def question_for(
    model: Model | None = None,
    *,
    bound_mv: float | None = None,
    share: float | None = None,
    noise: float | None = None,
    steps_mv: Sequence[float] | None = None,
    ends_mv: tuple[float, float] | None = None,
) -> ProtocolQuestion:
    """What is asked, from a model's recording and what is stated beside it.

    Parameters
    ----------
    model : Model, optional
        Its noise, cells and scatter are taken, and its own range and step are judged beside the others.
    bound_mv, share, noise, steps_mv, ends_mv : optional
        As in `ProtocolQuestion`; None for the model's, or else the default.
    """
    usual = ProtocolQuestion()
    if model is not None:
        how = model.recording
        usual = replace(
            usual,
            steps_mv=tuple(sorted({*usual.steps_mv, how.step_mv})),
            ends_mv=(how.first_mv, how.last_mv),
            noise=how.noise,
            cells=how.cells,
            cell_sd_mv=how.cell_sd_mv,
        )
    return replace(
        usual,
        bound_mv=usual.bound_mv if bound_mv is None else bound_mv,
        share=usual.share if share is None else share,
        noise=usual.noise if noise is None else noise,
        steps_mv=tuple(sorted(set(steps_mv))) if steps_mv else usual.steps_mv,
        ends_mv=usual.ends_mv if ends_mv is None else ends_mv,
    )
