"""A campaign for the tests of the report: a triple, charges of every kind, names that look like markup."""

from collections.abc import Mapping
from dataclasses import replace

from builders import campaign, construct

from cornerwise.campaign import Campaign, Construct

MEDIANS = {
    "WT": -40.0, "E5A": -33.0, "R9Q": -52.0, "K12A": -45.0, "E5A/R9Q": -20.0, "E5A/K12A": -38.0,
    "R9Q/K12A": -57.0, "E5A/R9Q/K12A": -25.0,
}  # fmt: skip
CHARGES = [13.0, 12.5, 13.3, 12.9]
HOSTILE = '<script>document.title="owned"</script>'
NAMED = '"><img src=x onerror=alert(1)> & [/b]'


def hostile_campaign(**settings: object) -> Campaign:
    """Three pairs and a triple; one construct and one cycle are named to break a page."""
    constructs = []
    for label, m in MEDIANS.items():
        charges = {"R9Q": [0.7 * q for q in CHARGES], "E5A/K12A": None}.get(label, CHARGES)
        one = construct(label, [m - 1, m, m + 0.7, m + 1.4], charges)
        constructs.append(one)
    given = campaign(constructs, title=HOSTILE, **settings)
    return renamed(given, {"K12A": HOSTILE}, {"R9Q/K12A": NAMED})


def renamed(given: Campaign, labels: Mapping[str, str], cycles: Mapping[str, str]) -> Campaign:
    """The campaign with other labels for some constructs and other names for some cycles."""
    return replace(
        given,
        constructs=tuple(_relabelled(one, labels.get(one.label, one.label)) for one in given.constructs),
        cycles=tuple(
            replace(
                cycle,
                name=cycles.get(cycle.name, cycle.name),
                corners=tuple(replace(one, label=labels.get(one.label, one.label)) for one in cycle.corners),
            )
            for cycle in given.cycles
        ),
    )


def _relabelled(one: Construct, label: str) -> Construct:
    return replace(
        one,
        label=label,
        curves=tuple(replace(curve, construct=label) for curve in one.curves),
        charge_replicates=tuple(replace(charge, construct=label) for charge in one.charge_replicates),
    )
