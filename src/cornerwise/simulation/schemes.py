"""From a model and a set of mutations to the gating scheme of that construct.

A step k of the wild type moves z_k and costs e_k at 0 mV. In a construct whose effects add dE to the energy
of the activated state and dQ to the total charge Q, with r = (Q + dQ)/Q and the steps' median voltage
Vm = sum of n_k e_k over Q, each copy of the step has::

    charge   r z_k + (charges added to this step)
    energy   z_k Vm + r (e_k - z_k Vm) + z_k dE/Q + (energies added to this step)

so that dE moves all steps by the same voltage, and dQ scales their charges and leaves both the energy of the
activated state at 0 mV and the voltages between the steps. A step without charge keeps its energy.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import product
from math import comb, prod

from ..gating import GatingScheme, State
from ..mutations import Mutations
from .model import ACTIVATED, REST, Coupling, Effect, Model, Step


@dataclass(frozen=True, kw_only=True, slots=True)
class ListedStates(GatingScheme):
    """A scheme whose states are given one by one."""

    listed: tuple[State, ...]

    def states(self) -> tuple[State, ...]:
        """States of the scheme."""
        return self.listed


def scheme_of(model: Model, mutations: Mutations = frozenset()) -> GatingScheme:
    """Gating scheme of the construct that carries `mutations`.

    Parameters
    ----------
    model : Model
        The gating model and the effects.
    mutations : frozenset of Mutation, optional
        None for the wild type.

    Returns
    -------
    GatingScheme
        With the exact curve, open probability, total charge and activation energy.
    """
    effects = model.effects_on(mutations)
    steps = changed_steps(model.steps, effects)
    opening = model.opening or model.steps[-1].name
    in_order = model.order == "sequence"
    states = _in_sequence(steps, opening) if in_order else _in_any_order(steps, opening, model.couplings)
    named = {name: state for name, state in states if name}
    if in_order:
        named[ACTIVATED] = named[steps[-1].name]
    sides = [
        (side.name, replace(named[side.beside], energy_mev=named[side.beside].energy_mev + side.energy_mev,
                            open=False))
        for side in model.sides
    ]  # fmt: skip
    last = steps[-1].name if in_order else ACTIVATED
    listed = tuple(_raised(name, state, effects, last) for name, state in [*states, *sides])
    return ListedStates(listed=listed, temperature_c=model.settings.temperature_c)


def changed_steps(steps: Sequence[Step], effects: Sequence[Effect]) -> tuple[Step, ...]:
    """Steps of a construct, from those of the wild type; see the notes of this module."""
    total = sum(step.copies * step.charge_e0 for step in steps)
    energies = [
        step.energy_mev + step.charge_e0 * sum(effect.steps_mv.get(step.name, 0.0) for effect in effects)
        for step in steps
    ]
    charged = [(s, e) for s, e in zip(steps, energies, strict=True) if s.charge_e0 > 0]
    median = sum(step.copies * energy for step, energy in charged) / total
    scale = (total + sum(effect.charge_e0 for effect in effects)) / total
    added_mv = sum(effect.activation_mev for effect in effects) / total
    changed = []
    for step, energy in zip(steps, energies, strict=True):
        at_median = step.charge_e0 * median
        spread = at_median + scale * (energy - at_median) if step.charge_e0 > 0 else energy
        own_energy = sum(effect.steps_mev.get(step.name, 0.0) for effect in effects)
        own_charge = sum(effect.step_charges_e0.get(step.name, 0.0) for effect in effects)
        changed.append(
            replace(
                step,
                charge_e0=scale * step.charge_e0 + own_charge,
                energy_mev=spread + step.charge_e0 * added_mv + own_energy,
            )
        )
    return tuple(changed)


def states_number(steps: Sequence[Step], order: str) -> int:
    """How many states of different charge or energy the steps lead through."""
    counts = [step.copies for step in steps]
    return sum(counts) + 1 if order == "sequence" else prod(n + 1 for n in counts)


def _in_sequence(steps: Sequence[Step], opening: str) -> list[tuple[str, State]]:
    """States with their names, "" for those within a step of several copies."""
    states = [(REST, State(charge_e0=0.0, energy_mev=0.0))]
    is_open = False
    for step in steps:
        _, start = states[-1]
        for done in range(1, step.copies + 1):
            complete = done == step.copies
            is_open = is_open or (complete and step.name == opening)
            state = State(
                charge_e0=start.charge_e0 + done * step.charge_e0,
                energy_mev=start.energy_mev + done * step.energy_mev,
                multiplicity=comb(step.copies, done),
                open=is_open,
            )
            states.append((step.name if complete else "", state))
    return states


def _in_any_order(
    steps: Sequence[Step], opening: str, couplings: Sequence[Coupling]
) -> list[tuple[str, State]]:
    """States with their names, "" for all but the two ends."""
    place = {step.name: index for index, step in enumerate(steps)}
    full = tuple(step.copies for step in steps)
    states = []
    for done in product(*(range(n + 1) for n in full)):
        energy = sum(j * step.energy_mev for j, step in zip(done, steps, strict=True))
        for coupling in couplings:
            a, b = coupling.steps
            energy += done[place[a]] * done[place[b]] * coupling.energy_mev
        state = State(
            charge_e0=sum(j * step.charge_e0 for j, step in zip(done, steps, strict=True)),
            energy_mev=energy,
            multiplicity=prod(comb(step.copies, j) for j, step in zip(done, steps, strict=True)),
            open=done[place[opening]] == full[place[opening]],
        )
        states.append((REST if not any(done) else ACTIVATED if done == full else "", state))
    return states


def _raised(name: str, state: State, effects: Sequence[Effect], last: str) -> State:
    """A state with the energies that effects add to it alone; the last one has two names."""
    names = {name, ACTIVATED} if name == last else {name}
    added = sum(effect.states_mev.get(n, 0.0) for effect in effects for n in names if n)
    return replace(state, energy_mev=state.energy_mev + added) if added else state
