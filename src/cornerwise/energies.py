"""Activation free energies of constructs, as functions of the sources of error."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from .batches import shared_batches
from .campaign import Settings, StatedCharge
from .ledger import Ledger
from .measurements import Measurement
from .quantities import Quantity, Sample, Summary, in_words, shared_cells
from .sources import (
    Component,
    Derived,
    Source,
    StatedSource,
    cell_source,
    linear,
    product,
    summary_source,
)
from .units import energy_per_e0_mv

FloatArray = NDArray[np.float64]
ChargeSource = Literal["measured", "wild type", "stated"]

_OFFSET = Component("voltage offset")
_STATED = Component("stated charge")


@dataclass(frozen=True, kw_only=True, slots=True)
class Energy:
    """One construct's median voltage, charge and activation free energy at 0 mV."""

    label: str
    median: Derived  # mV, without the common offset
    charge: Derived  # e0 per channel, the one the energy is formed with
    charge_source: ChargeSource
    own_charge: Derived | None  # e0 per channel, measured on this construct; None when never measured
    energy: Derived  # F Q (Vm - V0) in the campaign's unit, per channel; V0 is the reference voltage
    measured_energy: Derived | None  # the same with its own measured charge; None without one


def _lone_source(name: str, component: Component, quantity: Quantity) -> Source:
    if isinstance(quantity, Summary):
        return summary_source(name, component, quantity)
    if quantity.n == 0:  # every cell was set aside: the number is not available
        return StatedSource(name=name, component=component, mean=np.nan, std_uncertainty=np.nan, dof=np.nan)
    return cell_source(name, {component: quantity})


def _construct_sources(measurement: Measurement) -> list[Source]:
    """Sources of one construct: medians and charges apart, or together when cells are shared."""
    label = measurement.label
    median, charge = Component("median", label), Component("charge", label)
    v, q = measurement.median_mv, measurement.charge_e0
    if isinstance(v, Sample) and isinstance(q, Sample) and shared_cells(v, q):
        samples = {median: v, charge: q}
        if set(v.cells) == set(q.cells):
            charges = dict(zip(q.cells, q.values, strict=True))
            energies = np.array([charges[cell] for cell in v.cells]) * v.values
            samples[Component("charge x median", label)] = Sample(cells=v.cells, values=energies)
        sources: list[Source] = [cell_source(f"cells of {label} (median and charge)", samples)]
    else:
        sources = [_lone_source(f"median voltage of {label} ({in_words(v)})", median, v)]
        if q is not None:
            sources.append(_lone_source(f"total charge of {label} ({in_words(q)})", charge, q))
    if measurement.truncation_mv > 0:
        name = f"curve shape and extrapolation of {label}"
        component = Component("truncation", label)
        u = measurement.truncation_mv
        sources.append(StatedSource(name=name, component=component, mean=0.0, std_uncertainty=u))
    return sources


def build_ledger(measurements: Sequence[Measurement], settings: Settings) -> Ledger:
    """Collect the campaign's independent sources of error.

    Parameters
    ----------
    measurements : sequence of Measurement
        One for each construct.
    settings : Settings
        Charge policy, voltage offset, seed and replicates.
    """
    sources = [source for measurement in measurements for source in _construct_sources(measurement)]
    if isinstance(settings.charge, StatedCharge):
        value, u = settings.charge.value_e0, settings.charge.sem_e0
        name = "stated total charge, shared by all constructs"
        sources.append(StatedSource(name=name, component=_STATED, mean=value, std_uncertainty=u))
    if settings.voltage_offset_mv > 0:
        name, u = "voltage offset, common to all curves", settings.voltage_offset_mv
        sources.append(StatedSource(name=name, component=_OFFSET, mean=0.0, std_uncertainty=u))
    return Ledger(sources, seed=settings.seed, replicates=settings.replicates)


def _one(component: Component, value: float) -> Derived:
    return Derived(value=value, sensitivities={component: 1.0})


class EnergyBook:
    """Energies of all constructs of a campaign, and their joint replicates.

    Parameters
    ----------
    measurements : sequence of Measurement
        One for each construct.
    settings : Settings
        Charge policy, energy unit, seed and replicates.

    Notes
    -----
    The energy is F Q (Vm - V0), V0 being the reference voltage. It is formed cell by cell, and averaged,
    when all cells of a construct gave both charge and median; with partly shared cells it is the product of
    the two means with the covariance shown by the shared cells, corrected by the part of that covariance
    which the cell-by-cell mean would include, so that the two agree when all cells are shared. A charge that
    is shared by all constructs is one number: energies are then products with its mean.
    """

    def __init__(self, measurements: Sequence[Measurement], settings: Settings) -> None:
        self.ledger = build_ledger(measurements, settings)
        self.shared_batches = shared_batches(self.ledger)
        self.per_e0_mv = energy_per_e0_mv(settings.energy_unit, settings.temperature_c)
        self._measurements = {measurement.label: measurement for measurement in measurements}
        self._settings = settings
        self._conservative = self.ledger.conservatively()
        self._energy_draws: dict[tuple[str, bool], FloatArray] = {}
        self.energies: Mapping[str, Energy] = {label: self._energy(label) for label in self._measurements}

    @property
    def sloping(self) -> frozenset[str]:
        """Constructs whose plateaus slope while the settings do not ask for the slope to be taken off."""
        if self._settings.correct_sloping_plateaus:
            return frozenset()
        return frozenset(
            label
            for label, one in self._measurements.items()
            if any(flag.code == "sloping-plateau" for cell in one.cells if cell.used for flag in cell.flags)
        )

    def _median(self, label: str) -> Derived:
        terms = [(1.0, _one(Component("median", label), self._measurements[label].median_mv.mean))]
        truncation = Component("truncation", label)
        if truncation in self.ledger:
            terms.append((1.0, _one(truncation, 0.0)))
        return linear(terms)

    def _own_charge(self, label: str) -> Derived | None:
        charge = self._measurements[label].charge_e0
        return None if charge is None else _one(Component("charge", label), charge.mean)

    def _policy_charge(self, label: str) -> tuple[Derived, ChargeSource]:
        policy = self._settings.charge
        if isinstance(policy, StatedCharge):
            return _one(_STATED, policy.value_e0), "stated"
        own, wild_type = self._own_charge(label), self._own_charge(self._settings.wild_type)
        if own is not None and (policy == "measured" or label == self._settings.wild_type):
            return own, "measured"
        if wild_type is None:
            raise KeyError(f"no total charge is known for {label} or for the wild type")
        return wild_type, "wild type"

    def _at_offset(self, median: Derived) -> Derived:
        return linear([(1.0, median), (1.0, _one(_OFFSET, 0.0))]) if _OFFSET in self.ledger else median

    def _measured_energy(self, label: str) -> Derived | None:
        charge, median = self._own_charge(label), self._at_offset(self._median(label))
        if charge is None:
            return None
        by_cell = Component("charge x median", label)
        if by_cell not in self.ledger:
            formed = product(charge, median)
            constant = Derived(value=self._covariance_part(label), sensitivities={})
            return linear([(self.per_e0_mv, formed), (self.per_e0_mv, constant)])
        measurement = self._measurements[label]
        assert isinstance(measurement.median_mv, Sample)
        own = Component("median", label)
        common = {c: charge.value * s for c, s in median.sensitivities.items() if c != own}
        mean = self._mean_of_products(label)
        formed = Derived(value=mean, sensitivities={by_cell: 1.0, **common})
        return linear([(self.per_e0_mv, formed)])

    def _mean_of_products(self, label: str) -> float:
        v, q = self._measurements[label].median_mv, self._measurements[label].charge_e0
        assert isinstance(v, Sample)
        assert isinstance(q, Sample)
        charges = dict(zip(q.cells, q.values, strict=True))
        return float(np.mean([charges[c] * x for c, x in zip(v.cells, v.values, strict=True)]))

    def _covariance_part(self, label: str) -> float:
        v, q = self._measurements[label].median_mv, self._measurements[label].charge_e0
        shared = shared_cells(v, q)
        if len(shared) < 2 or not (isinstance(v, Sample) and isinstance(q, Sample)):
            return 0.0
        medians = dict(zip(v.cells, v.values, strict=True))
        charges = dict(zip(q.cells, q.values, strict=True))
        x = np.array([medians[cell] for cell in shared])
        y = np.array([charges[cell] for cell in shared])
        covariance = float(np.sum((x - x.mean()) * (y - y.mean())) / (len(shared) - 1))
        return covariance * (1 - len(shared) / (v.n * q.n))

    def _at_reference(self, energy: Derived, charge: Derived) -> Derived:
        """Energy at the reference voltage from that at 0 mV: dG(V) = dG - F Q V."""
        voltage = self._settings.reference_voltage_mv
        return linear([(1.0, energy), (-self.per_e0_mv * voltage, charge)]) if voltage else energy

    def _energy(self, label: str) -> Energy:
        charge, source = self._policy_charge(label)
        own, measured = self._own_charge(label), self._measured_energy(label)
        if own is not None and measured is not None:
            measured = self._at_reference(measured, own)
        if source == "measured" and self._settings.charge == "measured" and measured is not None:
            energy = measured
        else:
            formed = linear([(self.per_e0_mv, product(charge, self._at_offset(self._median(label))))])
            energy = self._at_reference(formed, charge)
        return Energy(
            label=label,
            median=self._median(label),
            charge=charge,
            charge_source=source,
            own_charge=own,
            energy=energy,
            measured_energy=measured,
        )

    def energy_draws(self, label: str, *, conservative: bool = False) -> FloatArray:
        """Joint replicates of one construct's energy, shape (replicates,).

        Cells are resampled; `conservative` draws every source from its Student's t distribution instead.
        """
        if (label, conservative) not in self._energy_draws:
            ledger = self._conservative if conservative else self.ledger
            self._energy_draws[label, conservative] = self._draw(label, ledger)
        return self._energy_draws[label, conservative]

    def _draw(self, label: str, ledger: Ledger) -> FloatArray:
        energy = self.energies[label]
        by_cell = Component("charge x median", label)
        charge = _draw_linear(energy.charge, ledger)
        at_reference = -self.per_e0_mv * self._settings.reference_voltage_mv * charge
        if by_cell in energy.energy.sensitivities:
            own = Component("median", label)
            rest = {c: s for c, s in self._at_offset(energy.median).sensitivities.items() if c != own}
            common = _draw_linear(Derived(value=0.0, sensitivities=rest), ledger)
            return self.per_e0_mv * (ledger.draws(by_cell) + charge * common) + at_reference
        median = _draw_linear(self._at_offset(energy.median), ledger)
        part = self._covariance_part(label) if energy.energy is energy.measured_energy else 0.0
        return self.per_e0_mv * (charge * median + part) + at_reference


def _draw_linear(derived: Derived, ledger: Ledger) -> FloatArray:
    total = np.zeros(ledger.replicates)
    for component, sensitivity in derived.sensitivities.items():
        total += sensitivity * ledger.draws(component)
    return total
