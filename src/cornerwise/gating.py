r"""Equilibrium gating schemes with exact charge-voltage curves, open probabilities and activation energies.

Every scheme here is a list of states. State i has moved the charge z_i (e0, counted from rest) and has
the energy e_i at 0 mV (meV, so that e0 times mV needs no factor). With kT in meV, which is the same number
as kT/e0 in mV, its weight at voltage V is exp((z_i V - e_i)/kT), and the sum of the weights is the
partition function Z(V). Three things follow.

* Charge moved, the logarithmic derivative of Z, which makes charge and voltage linked functions [1]_::

      Q q(V) = kT d ln Z / dV = sum of z_i p_i(V),      Q = largest z_i, smallest z_i = 0

* Activation energy between the two end states. Far below, only the states of charge 0 are left, and
  ln Z tends to -G_rest/kT; far above, only those of charge Q, and ln Z tends to (Q V - G_act)/kT, where
  G = -kT ln(sum of exp(-e_i/kT)) over the states of that end. The energy is G_act - G_rest.

* Median voltage. Integrate the charge from a to b, far outside the curve on either side::

      integral of Q q dV = kT [ln Z(b) - ln Z(a)] = Q b - (G_act - G_rest)

  By parts the same integral is Q b - Q (integral of V dq). The scheme's energy is therefore charge times
  median voltage whatever states lie between the ends::

      Vm = integral of V dq = (G_act - G_rest) / Q,        activation energy at 0 mV = Q Vm

  and Vm is the voltage that makes the area under q left of it equal the area over q right of it: the
  median ligand activity of linked functions [1]_ with voltage in the place of the logarithm of the activity.

The open probability has no such property: it weighs the intermediate states, so that a mutation that only
moves an intermediate displaces it by tens of mV at an unchanged activation energy.

References
----------
.. [1] Wyman J (1964). Linked functions and reciprocal effects in hemoglobin: a second look.
   Advances in Protein Chemistry 19, 223-286. (Cited from memory; the relation is derived above.)
"""

from __future__ import annotations

from abc import ABC, abstractmethod
from dataclasses import dataclass, replace
from math import comb, log

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.special import logsumexp

from .units import thermal_voltage_mv

FloatArray = NDArray[np.float64]


@dataclass(frozen=True, kw_only=True, slots=True)
class State:
    """One conformation, or several that share charge and energy."""

    charge_e0: float  # moved on the way here from rest
    energy_mev: float  # at 0 mV
    open: bool = False
    multiplicity: int = 1  # how many conformations it stands for


@dataclass(frozen=True, kw_only=True, slots=True)
class GatingScheme(ABC):
    """What every scheme answers; a scheme only has to list its states.

    Parameters
    ----------
    temperature_c : float
        Temperature (degrees Celsius).
    """

    temperature_c: float = 22.0

    @abstractmethod
    def states(self) -> tuple[State, ...]:
        """States of the scheme, in any order."""

    @property
    def total_charge_e0(self) -> float:
        """Charge moved between the two end states (e0)."""
        return max(state.charge_e0 for state in self.states())

    @property
    def activation_energy_mev(self) -> float:
        """Free energy of the activated end above the resting end at 0 mV (meV per channel).

        Where several states share the charge of an end (an open and an inactivated one, say) the end is
        all of them together, because no charge tells them apart.
        """
        return self._end_energy_mev(self.total_charge_e0) - self._end_energy_mev(0.0)

    @property
    def median_mv(self) -> float:
        """Median voltage (mV): `activation_energy_mev` over `total_charge_e0`, exactly."""
        return self.activation_energy_mev / self.total_charge_e0

    def q(self, v_mv: ArrayLike) -> FloatArray:
        """Scaled charge at each voltage.

        Parameters
        ----------
        v_mv : array_like
            Voltages (mV), any shape.

        Returns
        -------
        ndarray
            Charge moved over `total_charge_e0`, 0 to 1, shape of `v_mv`.
        """
        charge, _, log_weight = self._log_weights(v_mv)
        return self._mean_charge_e0(charge, log_weight) / self.total_charge_e0

    def open_probability(self, v_mv: ArrayLike) -> FloatArray:
        """Probability of the open states at each voltage (mV), shape of `v_mv`."""
        return np.exp(self.log_open_probability(v_mv))

    def log_open_probability(self, v_mv: ArrayLike) -> FloatArray:
        """Natural logarithm of the open probability, finite where the probability itself is 0 in print.

        Takes voltages (mV) of any shape and gives the same shape.
        """
        _, is_open, log_weight = self._log_weights(v_mv)
        total = logsumexp(log_weight, axis=-1)
        return np.asarray(logsumexp(log_weight[..., is_open], axis=-1) - total, dtype=np.float64)

    def limiting_charge_e0(self, v_mv: ArrayLike) -> FloatArray:
        """Slope of the logarithm of the open probability, kT d ln Po / dV, as a charge (e0).

        Parameters
        ----------
        v_mv : array_like
            Voltages (mV), any shape.

        Returns
        -------
        ndarray
            Mean charge of the open states less the mean charge of all, shape of `v_mv`. Far below the
            curve the second term vanishes and the slope is the charge that opening needs.
        """
        charge, is_open, log_weight = self._log_weights(v_mv)
        opened = self._mean_charge_e0(charge[is_open], log_weight[..., is_open])
        return opened - self._mean_charge_e0(charge, log_weight)

    def _log_weights(self, v_mv: ArrayLike) -> tuple[FloatArray, NDArray[np.bool_], FloatArray]:
        """Charges, which are open, and ln weights of shape ``(..., n_states)``."""
        states = self.states()
        charge = np.array([state.charge_e0 for state in states])
        energy = np.array([_free_energy_mev(state, self._kt_mev) for state in states])
        v = np.asarray(v_mv, dtype=np.float64)[..., None]
        return charge, np.array([state.open for state in states]), (v * charge - energy) / self._kt_mev

    def _end_energy_mev(self, charge_e0: float) -> float:
        """Free energy at 0 mV of all states that have moved `charge_e0`."""
        kt = self._kt_mev
        end = [s for s in self.states() if abs(s.charge_e0 - charge_e0) <= 1e-12 * self.total_charge_e0]
        return -kt * float(logsumexp([-_free_energy_mev(state, kt) / kt for state in end]))

    @property
    def _kt_mev(self) -> float:
        return thermal_voltage_mv(self.temperature_c)

    @staticmethod
    def _mean_charge_e0(charge: FloatArray, log_weight: FloatArray) -> FloatArray:
        weight = np.exp(log_weight - log_weight.max(axis=-1, keepdims=True))
        return np.asarray((weight * charge).sum(axis=-1) / weight.sum(axis=-1), dtype=np.float64)


def _free_energy_mev(state: State, kt_mev: float) -> float:
    return state.energy_mev - kt_mev * log(state.multiplicity)


@dataclass(frozen=True, kw_only=True, slots=True)
class TwoStates(GatingScheme):
    """Rest and open, nothing between: q = Po = 1/(1 + exp(-z (V - V0)/kT)), and Vm = V0.

    Parameters
    ----------
    charge_e0 : float
        Charge z of the one step (e0).
    midpoint_mv : float
        V0 (mV).
    """

    charge_e0: float
    midpoint_mv: float

    def states(self) -> tuple[State, ...]:
        """Rest and open."""
        energy = self.charge_e0 * self.midpoint_mv
        return (
            State(charge_e0=0.0, energy_mev=0.0),
            State(charge_e0=self.charge_e0, energy_mev=energy, open=True),
        )


@dataclass(frozen=True, kw_only=True, slots=True)
class LinearSequence(GatingScheme):
    """Steps one after the other, the last state open.

    Step k moves z_k and costs z_k V_k at 0 mV; state j has moved the sum of the first j charges and has
    the sum of the first j energies, so Vm = (sum of z_k V_k)/(sum of z_k), whatever the order of the V_k.

    Parameters
    ----------
    charges_e0 : tuple of float, shape (n_steps,)
        Charge of each step (e0).
    midpoints_mv : tuple of float, shape (n_steps,)
        Voltage at which the two states a step joins are equally likely (mV).
    """

    charges_e0: tuple[float, ...]
    midpoints_mv: tuple[float, ...]

    def states(self) -> tuple[State, ...]:
        """Rest, the intermediates, the open state."""
        charge = np.concatenate([[0.0], np.cumsum(self.charges_e0)])
        steps = np.multiply(self.charges_e0, self.midpoints_mv)
        energy = np.concatenate([[0.0], np.cumsum(steps)])
        last = len(charge) - 1
        return tuple(
            State(charge_e0=float(z), energy_mev=float(e), open=i == last)
            for i, (z, e) in enumerate(zip(charge, energy, strict=True))
        )

    def shift_intermediate(self, state: int, energy_mev: float) -> LinearSequence:
        """Return the same sequence with one intermediate's energy raised by `energy_mev`.

        The step into it becomes dearer and the step out of it cheaper by the same amount, so the ends, the
        activation energy and the median voltage of the Q-V curve stay; the open probability moves by about
        `energy_mev` over the charge of the steps that follow.

        Parameters
        ----------
        state : int
            Index of the intermediate, 1 to n_steps - 1.
        energy_mev : float
            Added to its energy (meV); negative stabilises it.

        Raises
        ------
        ValueError
            If `state` is an end state or does not exist.

        Examples
        --------
        >>> before = LinearSequence(charges_e0=(8.0, 2.0), midpoints_mv=(-50.0, -30.0))
        >>> after = before.shift_intermediate(1, -60.0)
        >>> before.median_mv == after.median_mv == -46.0
        True
        >>> float(before.open_probability(-25.0).round(2)), float(after.open_probability(-25.0).round(2))
        (0.6, 0.12)
        """
        if not 1 <= state < len(self.charges_e0):
            raise ValueError(f"state {state} is no intermediate; use 1 to {len(self.charges_e0) - 1}")
        midpoints = list(self.midpoints_mv)
        midpoints[state - 1] += energy_mev / self.charges_e0[state - 1]
        midpoints[state] -= energy_mev / self.charges_e0[state]
        return replace(self, midpoints_mv=tuple(midpoints))


@dataclass(frozen=True, kw_only=True, slots=True)
class ConcertedOpening(GatingScheme):
    """Equal, independent sensors, all of which must be activated before one concerted opening step.

    With s = exp(z_s (V - V_s)/kT) and o = exp(z_o (V - V_o)/kT)::

        Z = (1 + s)^n + s^n o,        Vm = (n z_s V_s + z_o V_o)/(n z_s + z_o)

    One rise when opening is easy once the sensors are up (V_o at or below V_s); two rises, a strongly
    biphasic curve, when V_o lies well above V_s.

    Parameters
    ----------
    sensors : int
        Number n of sensors.
    sensor_charge_e0, opening_charge_e0 : float
        Charges z_s of each sensor and z_o of the opening step (e0).
    sensor_midpoint_mv, opening_midpoint_mv : float
        V_s and V_o (mV).
    """

    sensors: int = 4
    sensor_charge_e0: float
    sensor_midpoint_mv: float
    opening_charge_e0: float
    opening_midpoint_mv: float

    def states(self) -> tuple[State, ...]:
        """States with 0 to n sensors activated, then the open one."""
        step = self.sensor_charge_e0 * self.sensor_midpoint_mv
        closed = [
            State(
                charge_e0=k * self.sensor_charge_e0, energy_mev=k * step, multiplicity=comb(self.sensors, k)
            )
            for k in range(self.sensors + 1)
        ]
        top = closed[-1]
        opened = State(
            charge_e0=top.charge_e0 + self.opening_charge_e0,
            energy_mev=top.energy_mev + self.opening_charge_e0 * self.opening_midpoint_mv,
            open=True,
        )
        return (*closed, opened)


@dataclass(frozen=True, kw_only=True, slots=True)
class AllostericOpening(GatingScheme):
    """Sensors that open nothing by themselves; each one activated lowers the opening energy.

    With s = exp(z_s (V - V_s)/kT), o = exp((z_o V - e_o)/kT) and D = exp(d/kT)::

        Z = (1 + s)^n + o (1 + D s)^n

    With z_o > 0 the ends are single states and Q Vm = n z_s V_s + e_o - n d. With z_o = 0 closed and
    open share the charge of both ends, and each end's free energy is that of the two together.

    Parameters
    ----------
    sensors : int
        Number n of sensors.
    sensor_charge_e0, opening_charge_e0 : float
        Charges z_s and z_o (e0).
    sensor_midpoint_mv : float
        V_s of a sensor while closed (mV).
    opening_energy_mev : float
        e_o, the energy of opening at 0 mV with no sensor activated (meV).
    sensor_coupling_mev : float
        d, by which each activated sensor lowers it (meV).
    """

    sensors: int = 4
    sensor_charge_e0: float
    sensor_midpoint_mv: float
    opening_charge_e0: float
    opening_energy_mev: float
    sensor_coupling_mev: float

    def states(self) -> tuple[State, ...]:
        """0 to n sensors activated, closed and open."""
        step = self.sensor_charge_e0 * self.sensor_midpoint_mv
        return tuple(
            State(
                charge_e0=k * self.sensor_charge_e0 + opened * self.opening_charge_e0,
                energy_mev=k * step + opened * (self.opening_energy_mev - k * self.sensor_coupling_mev),
                open=bool(opened),
                multiplicity=comb(self.sensors, k),
            )
            for k in range(self.sensors + 1)
            for opened in (0, 1)
        )


@dataclass(frozen=True, kw_only=True, slots=True)
class InactivatedAfterOpen(GatingScheme):
    """A sequence whose open state leads on to an inactivated state without moving charge.

    Open and inactivated share the charge Q, so the activated end that the measured energy reaches is the two
    together: with K = exp(-e_i/kT) the Q-V curve gives Q Vm = (energy up to the open state) - kT ln(1 + K),
    not the energy of the open state. A mutation that changes only K moves the measured energy.

    Parameters
    ----------
    sequence : LinearSequence
        Rest to open; its temperature is replaced by this scheme's.
    inactivation_energy_mev : float
        e_i, energy of the inactivated above the open state (meV), the same at every voltage.
    """

    sequence: LinearSequence
    inactivation_energy_mev: float

    def states(self) -> tuple[State, ...]:
        """States of the sequence and the inactivated one."""
        sequence = self.sequence.states()
        energy = sequence[-1].energy_mev + self.inactivation_energy_mev
        return (*sequence, State(charge_e0=sequence[-1].charge_e0, energy_mev=energy))


def example_schemes() -> dict[str, GatingScheme]:
    """Invented schemes that span the shapes Q-V curves take, by name; no protein has these values."""
    ladder = LinearSequence(charges_e0=(3.0, 5.0, 2.5), midpoints_mv=(-75.0, -50.0, -25.0))
    return {
        "two states": TwoStates(charge_e0=3.5, midpoint_mv=-45.0),
        "linear sequence": ladder,
        "concerted opening": ConcertedOpening(
            sensor_charge_e0=2.8, sensor_midpoint_mv=-50.0, opening_charge_e0=1.8, opening_midpoint_mv=-45.0
        ),
        "biphasic": ConcertedOpening(
            sensor_charge_e0=2.5, sensor_midpoint_mv=-70.0, opening_charge_e0=3.0, opening_midpoint_mv=20.0
        ),
        "allosteric": AllostericOpening(
            sensor_charge_e0=2.0,
            sensor_midpoint_mv=-20.0,
            opening_charge_e0=0.6,
            opening_energy_mev=200.0,
            sensor_coupling_mev=70.0,
        ),
        "inactivated": InactivatedAfterOpen(sequence=ladder, inactivation_energy_mev=-50.0),
        "shifted intermediate": ladder.shift_intermediate(2, -60.0),
    }
