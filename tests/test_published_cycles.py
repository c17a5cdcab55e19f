"""Cycles from the literature, their sign conventions translated openly into I = G_wt - G_a - G_b + G_ab.

None of them is a charge-voltage cycle; each gives four energies with uncertainties, which enter here as the
energy of one elementary charge at a median voltage. They check signs, sums and propagated uncertainties.
"""

import math

import pytest
from builders import measurement
from reference_values import load

from cornerwise.campaign import Settings, StatedCharge
from cornerwise.energies import EnergyBook
from cornerwise.interactions import Interaction, interact
from cornerwise.mutations import find_cycles
from cornerwise.quantities import Summary
from cornerwise.units import energy_per_e0_mv

CYCLES = load("published_cycles")
LABELS = ("WT", "A1G", "C2S", "A1G/C2S")


def _interaction(energies: list[float], uncertainties: list[float], unit: str, kelvin: float) -> Interaction:
    per = energy_per_e0_mv(unit, kelvin - 273.15)
    made = [
        measurement(label, Summary(mean=energy / per, sem=u / per, n=None))
        for label, energy, u in zip(LABELS, energies, uncertainties, strict=True)
    ]
    one = StatedCharge(value_e0=1.0, sem_e0=0.0)
    book = EnergyBook(
        made, Settings(wild_type="WT", charge=one, energy_unit=unit, temperature_c=kelvin - 273.15)
    )
    (cycle,) = find_cycles({frozenset(m.construct.mutations): m.label for m in made})
    return interact(cycle, book, "WT")


def test_burst_durations() -> None:
    # Published: ddG = ln(tau_wt / tau_a) - ln(tau_b / tau_ab) in kT, our sign with G = ln tau.
    case = CYCLES["rates"]
    energies = [math.log(tau) for tau in case["tau_ms"]]
    relative = [u / tau for tau, u in zip(case["tau_ms"], case["sem_ms"], strict=True)]
    found = _interaction(energies, relative, "kT", 298.15)
    u = math.sqrt(found.ledger.spread(found.energy).variance)
    assert found.energy.value == pytest.approx(case["published_kT"], abs=CYCLES["tolerance"])
    assert u == pytest.approx(case["published_uncertainty_kT"], abs=0.03)
    assert u == pytest.approx(case["delta_method_recomputed_kT"], abs=0.005)


@pytest.mark.parametrize("agonist", ["ACh", "nicotine", "epibatidine"])
def test_agonist_cycles(agonist: str) -> None:
    # Published: ddG_INT = RT ln(K_ab K_wt / (K_a K_b)), our sign with G = RT ln K.
    case, kelvin = CYCLES["agonists"][agonist], CYCLES["agonists"]["temperature_K"]
    rt = CYCLES["agonists"]["gas_constant_cal"] / 1000 * kelvin
    energies = [rt * math.log(k) for k in case["K"]]
    uncertainties = [rt * u / k for k, u in zip(case["K"], case["se"], strict=True)]
    found = _interaction(energies, uncertainties, "kcal/mol", kelvin)
    # The printed epibatidine value comes from a truncated ratio, 13 for 13.69.
    assert found.energy.value == pytest.approx(case["published"], abs=CYCLES["tolerance"])
    u = math.sqrt(found.ledger.spread(found.energy).variance)
    assert u == pytest.approx(case["propagated_recomputed"], abs=0.006)


@pytest.mark.parametrize("pair", ["K27A/D39A", "R83Q/D39A", "R59A/D35A", "R59A/E76A"])
def test_binding_cycles_have_the_opposite_sign(pair: str) -> None:
    # Published: RT ln(K_a K_b / (K_wt K_ab)) with dissociation constants, positive for an attraction: that is
    # minus our sum with G = RT ln K.
    case, kelvin = CYCLES["binding"][pair], CYCLES["binding"]["temperature_K"]
    rt = 8.31446261815324 / 4184 * kelvin
    found = _interaction([rt * math.log(k) for k in case["kd"]], [0.0] * 4, "kcal/mol", kelvin)
    assert -found.energy.value == pytest.approx(case["recomputed"], abs=1e-3)
    assert -found.energy.value == pytest.approx(case["from_memory"], abs=0.08)
