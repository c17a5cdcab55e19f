"""Models made in Python for the tests of simulated campaigns; residues and numbers are invented."""

from cornerwise.campaign import Settings
from cornerwise.mutations import Mutation, Mutations, in_residue_order, named_mutation
from cornerwise.simulation import Effect, Model, Recording, Step

A, B = named_mutation("E21A"), named_mutation("R84Q")
ALONE, OTHER, BOTH = frozenset({A}), frozenset({B}), frozenset({A, B})


def step(name: str, charge_e0: float, midpoint_mv: float, copies: int = 1) -> Step:
    """Step that is half done at this voltage."""
    return Step(name=name, charge_e0=charge_e0, energy_mev=charge_e0 * midpoint_mv, copies=copies)


LADDER = (step("first", 3.0, -75.0), step("second", 5.0, -50.0), step("third", 2.5, -25.0))


def effect(mutations: Mutations, **changes: object) -> Effect:
    """Effect of one or more mutations."""
    return Effect(mutations=mutations, **changes)  # type: ignore[arg-type]


def model(*effects: Effect, **changes: object) -> Model:
    """One cycle of two mutations on a ladder of three steps."""
    mutations: tuple[Mutation, ...] = (A, B)
    given = {
        "settings": Settings(wild_type="WT"),
        "campaign": {"wild_type": "WT"},
        "steps": LADDER,
        "mutations": mutations,
        "effects": effects,
        "cycles": (in_residue_order(mutations),),
        "recording": Recording(cells=4, charge_cells=3),
        **changes,
    }
    return Model(**given)  # type: ignore[arg-type]
