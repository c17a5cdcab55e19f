"""A campaign drawn from a model: curves, total charges, open probabilities.

Every construct draws from random streams of its own, keyed by the seed and its label, and every batch from
one keyed by its name: another construct or cycle in the model changes no number of the others.
"""

from __future__ import annotations

import numpy as np

from ..campaign import Campaign, ChargeReplicate, ChargeSummary, Construct, Curve, FloatArray, OpeningCurve
from ..gating import GatingScheme
from ..mutations import Mutations, find_cycles, in_residue_order
from ..streams import named_stream
from .model import Model, Recording
from .scattering import standard_deviates
from .schemes import scheme_of

_PROBABILITY_DIGITS = 6


def simulate(model: Model) -> Campaign:
    """Draw a campaign.

    Parameters
    ----------
    model : Model
        What is true, and how the constructs are recorded.

    Returns
    -------
    Campaign
        As `cornerwise.read` reads it from the files that ``cornerwise simulate`` writes, numbers rounded as
        in these. The same model and seed give the same numbers.
    """
    constructs = [_construct(model, label, mutations) for label, mutations in model.genotypes.items()]
    labels = {mutations: label for label, mutations in model.genotypes.items()}
    return Campaign(settings=model.settings, constructs=tuple(constructs), cycles=find_cycles(labels))


def _construct(model: Model, label: str, mutations: Mutations) -> Construct:
    scheme, how = scheme_of(model, mutations), model.recording_of(label)
    replicates = _charges(model, label, scheme.total_charge_e0, how)
    summarised = model.common.charges == "summaries"
    return Construct(
        label=label,
        mutations=in_residue_order(mutations),
        curves=_curves(model, label, scheme, how),
        charge_replicates=() if summarised else replicates,
        charge_summaries=_summary(replicates, model.common.charge_decimals) if summarised else (),
        openings=_openings(model, label, scheme, how),
    )


def voltages_mv(first: float, last: float, step: float) -> FloatArray:
    """Voltages of a protocol (mV), none beyond `last`."""
    return np.arange(first, last + 1e-6 * step, step)


def _batch(how: Recording, number: int) -> str | None:
    return how.batches[number % len(how.batches)] if how.batches else None


def _batch_effects(model: Model, how: Recording) -> dict[str | None, tuple[float, float]]:
    """Shift (mV) and relative charge of each batch; a batch has the same in all constructs."""
    common = model.common
    effects: dict[str | None, tuple[float, float]] = {None: (0.0, 0.0)}
    for name in how.batches:
        shift, charge = named_stream(model.seed, f"batch {name}").standard_normal(2)
        effects[name] = (common.batch_sd_mv * shift, common.batch_charge_sd * charge)
    return effects


def _rounded(values: FloatArray, decimals: int) -> FloatArray:
    """Values as they stand in a file."""
    return np.array([float(f"{value:.{decimals}f}") for value in values])


def _shift_mv(how: Recording, rng: np.random.Generator) -> float:
    return how.cell_sd_mv * float(standard_deviates(how.scatter, rng, 1)[0])


def _curves(model: Model, label: str, scheme: GatingScheme, how: Recording) -> tuple[Curve, ...]:
    rng, effects = named_stream(model.seed, f"curves {label}"), _batch_effects(model, how)
    v = voltages_mv(how.first_mv, how.last_mv, how.step_mv)
    curves = []
    for number in range(how.cells):
        batch = _batch(how, number)
        shift = _shift_mv(how, rng) + (how.stray_mv if number == how.cells - 1 else 0.0)
        whole_pc = rng.uniform(*how.gain_pc)
        q = scheme.q(v - (shift + effects[batch][0])) + how.leak_per_mv * v
        q = q + how.noise * rng.standard_normal(len(v)) + how.baseline_sd * rng.standard_normal()
        curves.append(
            Curve(
                construct=label,
                cell=f"c{number + 1:02d}",
                batch=batch,
                voltage_mv=v,
                charge=_rounded(whole_pc * q, model.common.decimals),
                charge_unit="pC",
                holding_mv=how.holding_mv,
            )
        )
    return tuple(curves)


def _charges(model: Model, label: str, charge_e0: float, how: Recording) -> tuple[ChargeReplicate, ...]:
    rng, effects = named_stream(model.seed, f"charges {label}"), _batch_effects(model, how)
    prefix = "c" if how.paired else "n"
    factors = 1 + how.charge_sd * standard_deviates(how.scatter, rng, how.charge_cells)
    return tuple(
        ChargeReplicate(
            construct=label,
            cell=f"{prefix}{number + 1:02d}",
            batch=_batch(how, number),
            charge_e0=float(
                f"{charge_e0 * (factor + effects[_batch(how, number)][1]):.{model.common.charge_decimals}f}"
            ),
            method=how.charge_method,
        )
        for number, factor in enumerate(factors)
    )


def _summary(replicates: tuple[ChargeReplicate, ...], decimals: int) -> tuple[ChargeSummary, ...]:
    if not replicates:
        return ()
    values = np.array([replicate.charge_e0 for replicate in replicates])
    mean, sem = values.mean(), values.std(ddof=1) / np.sqrt(len(values))
    rounded = _rounded(np.array([mean, sem]), decimals)
    return (
        ChargeSummary(
            construct=replicates[0].construct,
            charge_e0=float(rounded[0]),
            sem_e0=float(rounded[1]),
            n=len(values),
            method=replicates[0].method,
        ),
    )


def _openings(model: Model, label: str, scheme: GatingScheme, how: Recording) -> tuple[OpeningCurve, ...]:
    rng, effects = named_stream(model.seed, f"openings {label}"), _batch_effects(model, how)
    curves = []
    for number in range(how.opening_cells):
        batch = _batch(how, number)
        shift = _shift_mv(how, rng) + effects[batch][0]
        v = voltages_mv(how.first_mv, how.last_mv, how.opening_step_mv)
        probability = scheme.open_probability(v - shift)
        scattered = probability * np.exp(how.opening_noise * rng.standard_normal(len(v)))
        seen = probability >= how.opening_floor
        digits = [float(f"{min(p, 1.0):.{_PROBABILITY_DIGITS}g}") for p in scattered[seen]]
        curves.append(
            OpeningCurve(
                construct=label,
                cell=f"p{number + 1:02d}",
                batch=batch,
                voltage_mv=v[seen],
                open_probability=np.array(digits),
            )
        )
    return tuple(curves)
