"""The law of propagation of uncertainty and effective degrees of freedom."""

import functools
import math
from collections.abc import Sequence

from outside.known import Known, ledger_of, one, sample
from outside.record import Check
from reference_values import load

from cornerwise import intervals
from cornerwise.ledger import Ledger
from cornerwise.quantities import Sample, Summary
from cornerwise.sources import (
    Component,
    Derived,
    StatedSource,
    cell_source,
    linear,
    log_ratio,
    product,
    summary_source,
)

GUM = load("gum")
H2, E13, G41 = GUM["H2"], GUM["E13"], GUM["G41"]


def _welch_satterthwaite(case: str) -> float:
    given = GUM[case]
    dof = [math.inf if nu is None else nu for nu in given["dof"]]
    key = next(key for key in given if key.startswith("u") and isinstance(given[key], list))
    return intervals.welch_satterthwaite([u**2 for u in given[key]], dof)


def _summed(case: str) -> float:
    given = GUM[case]
    sources = [
        StatedSource(name=str(i), component=Component("median", str(i)), mean=0.0, std_uncertainty=u, dof=nu)
        for i, (u, nu) in enumerate(zip(given["u_nm"], given["dof"], strict=True))
    ]
    total = linear([(1.0, one(source.component, 0.0)) for source in sources])
    return Known(total, ledger_of(sources)).u


def _h2_inputs() -> tuple[dict[str, Component], dict[Component, Sample]]:
    volt, ampere, radian = (
        sample(H2["V_volt"]),
        sample([i / 1000 for i in H2["I_mA"]]),
        sample(H2["phi_rad"]),
    )
    parts = {name: Component("median", name) for name in ("V", "I", "phi")}
    return parts, dict(zip(parts.values(), (volt, ampere, radian), strict=True))


@functools.cache
def _h2() -> tuple[Ledger, tuple[Derived, ...], tuple[Derived, ...]]:
    """Voltage, current and phase in the same five observations; resistance, reactance, impedance."""
    _, samples = _h2_inputs()
    inputs = tuple(one(component, sample.mean) for component, sample in samples.items())
    v, i, phi = inputs
    # V / I to first order: d(V/I) = (V/I) d ln(V/I)
    logarithm = log_ratio(v, i)
    z = math.exp(logarithm.value)
    impedance = Derived(value=z, sensitivities=linear([(z, logarithm)]).sensitivities)
    cosine = Derived(
        value=math.cos(phi.value), sensitivities=linear([(-math.sin(phi.value), phi)]).sensitivities
    )
    sine = Derived(
        value=math.sin(phi.value), sensitivities=linear([(math.cos(phi.value), phi)]).sensitivities
    )
    outputs = (product(impedance, cosine), product(impedance, sine), impedance)
    return ledger_of([cell_source("five observations", samples)]), inputs, outputs


def _uncertainties(quantities: Sequence[Derived]) -> tuple[float, ...]:
    return tuple(Known(one, _h2()[0]).u for one in quantities)


def _correlations(quantities: Sequence[Derived]) -> tuple[float, ...]:
    """Of the first with the second, the first with the third, the second with the third."""
    ledger = _h2()[0]

    def of(a: Derived, b: Derived) -> float:
        u_a, u_b, u_sum = (Known(one, ledger).u for one in (a, b, linear([(1.0, a), (1.0, b)])))
        return (u_sum**2 - u_a**2 - u_b**2) / (2 * u_a * u_b)

    a, b, c = quantities
    return of(a, b), of(a, c), of(b, c)


def _expansion() -> tuple[float, float]:
    """Expansion coefficient (L1 - L0) / (L0 (T1 - T0)) and its standard uncertainty."""
    parts = {name: Component("median", name) for name in E13["inputs"]}
    stated = [
        StatedSource(name=name, component=parts[name], mean=mean, std_uncertainty=u)
        for name, (mean, u) in E13["inputs"].items()
    ]
    length0, temperature0, length1, temperature1 = (
        one(parts[name], E13["inputs"][name][0]) for name in ("L0", "T0", "L1", "T1")
    )
    above = linear([(1.0, length1), (-1.0, length0)])
    below = product(length0, linear([(1.0, temperature1), (-1.0, temperature0)]))
    logarithm = log_ratio(above, below)
    value = math.exp(logarithm.value)
    return value, value * Known(logarithm, ledger_of(stated)).u


@functools.cache
def _product_of_three() -> Known:
    """Y = b X1 X2 X3; relative uncertainties add in squares whatever the values."""
    values = [3.0, -7.0, 11.0]
    kinds = [Component("charge", str(i)) for i in range(3)]
    sources = [
        summary_source(str(i), kind, Summary(mean=x, sem=abs(x) * u / 100, n=n))
        for i, (kind, x, u, n) in enumerate(
            zip(kinds, values, G41["u_relative_percent"], G41["n"], strict=True)
        )
    ]
    factors = [one(kind, x) for kind, x in zip(kinds, values, strict=True)]
    return Known(product(product(factors[0], factors[1]), factors[2]), ledger_of(sources))


CHECKS = [
    *(
        Check(
            what=f"{words}: standard uncertainty (nm) and effective degrees of freedom",
            source="GUM H.1",
            expected=(GUM[case]["u_total_nm"], GUM[case]["dof_total"]),
            obtained=lambda case=case: (_summed(case), _welch_satterthwaite(case)),
            within=GUM["tolerance"],
            relative=True,
            why=GUM["tolerance_reason"],
            form=".10g",
        )
        for case, words in (("H1", "end gauge"), ("H1_d", "its comparator"))
    ),
    Check(
        what="end gauge, rounded inputs: effective degrees of freedom",
        source="GUM H.1",
        expected=GUM["H1_rounded"]["dof_used"],
        obtained=lambda: math.floor(_welch_satterthwaite("H1_rounded")),
        form="d",
        why="the document cuts them down to a whole number, as is done here for this row; the package keeps "
        "the fraction, 16.75",
    ),
    Check(
        what="end gauge: half of the 99 % interval of u = 32 nm with 16 degrees of freedom, nm",
        source="GUM H.1",
        expected=GUM["H1_rounded"]["expanded99_nm"],
        obtained=lambda: intervals.t_interval(0.0, GUM["H1_rounded"]["u_total_nm"], 16, 0.99).high,
        within=0.5,
        form=".2f",
        why="printed to a whole nm, from the rounded 32 nm; 31.66 nm unrounded would give 92.5",
    ),
    Check(
        what="two contributions, 0.57 with 9 and 0.25 with infinitely many degrees of freedom",
        source="suncal",
        expected=GUM["two_contributions"]["dof_total"],
        obtained=lambda: _welch_satterthwaite("two_contributions"),
        within=0.05,
        form=".2f",
        why="printed to one decimal",
    ),
    Check(
        what="three numbers from the same five observations: standard uncertainties of V, I and phi",
        source="GUM H.2",
        expected=tuple(H2["u"]),
        obtained=lambda: _uncertainties(_h2()[1]),
        within=0.01,
        relative=True,
        form=".3g",
        why="printed to two digits",
    ),
    Check(
        what="the same five observations: correlations of V with I, V with phi, I with phi",
        source="GUM H.2",
        expected=tuple(H2["r"]),
        obtained=lambda: _correlations(_h2()[1]),
        within=0.005,
        form=".3f",
        why="printed to two decimals",
    ),
    Check(
        what="from them resistance, reactance and impedance, ohm",
        source="GUM H.2",
        expected=tuple(H2["R_X_Z_ohm"]),
        obtained=lambda: tuple(one.value for one in _h2()[2]),
        within=5e-4,
        form=".4f",
        why="printed to three decimals",
    ),
    Check(
        what="standard uncertainties of the three, with the covariance the observations show, ohm",
        source="GUM H.2",
        expected=tuple(H2["u_R_X_Z_ohm"]),
        obtained=lambda: _uncertainties(_h2()[2]),
        within=7e-4,
        form=".4f",
        why="printed to three decimals; the data give 0.2956 for the printed 0.295, which follows from u "
        "rounded to two digits and r to three. Charge and median from the same cells take this path",
    ),
    Check(
        what="correlations of the three: R with X, R with Z, X with Z",
        source="GUM H.2",
        expected=tuple(H2["r_RX_RZ_XZ"]),
        obtained=lambda: _correlations(_h2()[2]),
        within=5e-4,
        form=".4f",
        why="printed to three decimals",
    ),
    Check(
        what="thermal expansion, a quotient whose two parts share L0: value and standard uncertainty, 1/K",
        source="NIST TN 1900 E13",
        expected=(E13["value"], E13["u"]),
        obtained=_expansion,
        within=0.005,
        relative=True,
        form=".4g",
        why="printed to three digits and more",
    ),
    Check(
        what="product of three factors: relative standard uncertainty, %",
        source="GUM G.4.1",
        expected=G41["u_relative_percent_total"],
        obtained=lambda: 100 * _product_of_three().u / abs(_product_of_three().derived.value),
        within=5e-7,
        form=".6f",
        why="inputs recalled, the digits computed; the document rounds to 1.03 %",
        standing="memory",
    ),
    Check(
        what="product of three factors: effective degrees of freedom",
        source="GUM G.4.1",
        expected=G41["dof_total_printed"],
        obtained=lambda: _product_of_three().dof,
        within=0.05,
        form=".4f",
        printed="19.0",
        why="one decimal recalled; from the rounded 1.03 % it would be 19.04",
        standing="memory",
    ),
]
