"""Labels to mutations and back, and the cycles among constructs."""

from itertools import combinations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from cornerwise.mutations import (
    Mutations,
    complete_cycle,
    find_cycles,
    in_residue_order,
    incomplete_cycles,
    joined,
    missing_corners,
    named_mutation,
    parse_label,
    parse_mutation,
)

RESIDUES = "ACDEFGHIKLMNPQRSTVWY"
ORDERED = ("K95N", "E181A", "R212Q", "D300N")


def constructs(*labels: str) -> dict[Mutations, str]:
    """Constructs by mutations; WT carries none."""
    return {(parse_label(label) or frozenset()): label for label in labels}


def all_of(mutations: tuple[str, ...]) -> list[str]:
    """Every combination, the wild type first."""
    sizes = range(1, len(mutations) + 1)
    return ["WT", *("/".join(subset) for size in sizes for subset in combinations(mutations, size))]


@pytest.mark.parametrize(
    "token", ["R212Q", "p.R212Q", "Arg212Gln", "p.Arg212Gln", "p.(Arg212Gln)", "(R212Q)", "p.[Arg212Gln]"]
)
def test_one_substitution_in_every_notation(token: str) -> None:
    mutation = parse_mutation(token)
    assert mutation is not None
    assert (mutation.text, mutation.position, mutation.native, mutation.mutant) == ("R212Q", 212, "R", "Q")


@pytest.mark.parametrize(
    "token",
    [
        "", "R212", "212Q", "R0Q", "R012Q", "R212R", "Arg212Arg", "r212q", "ARG212GLN", "B212Q", "R212X",
        "R212*", "Arg212Ter", "Xaa212Gln", "R212QQ", "R-212Q", "R٢Q", "R2١Q", "wild type", "R212Q,E181A",
        "p.Arg212=",
    ],
)  # fmt: skip
def test_what_is_no_substitution(token: str) -> None:
    assert parse_mutation(token) is None


@pytest.mark.parametrize("joiner", ["+", "/", ";", ":", " ", " + ", "/ ", "  "])
def test_joined_by(joiner: str) -> None:
    assert parse_label(f"R212Q{joiner}p.(Glu181Ala)") == parse_label("E181A/R212Q")


def test_an_hgvs_allele() -> None:
    assert parse_label("p.[Arg212Gln;Glu181Ala]") == parse_label("E181A/R212Q")


@pytest.mark.parametrize(
    "label", ["", " ", "/", "WT", "E181A/foo", "E181A/E181Q", "E181A/E181A", "E181A,R212Q", "E181A-R212Q"]
)
def test_labels_that_spell_no_mutations(label: str) -> None:
    assert parse_label(label) is None


substitutions = st.builds(
    lambda position, pair: f"{pair[0]}{position}{pair[1]}",
    st.integers(1, 3000),
    st.lists(st.sampled_from(RESIDUES), min_size=2, max_size=2, unique=True),
)


@given(st.lists(substitutions, min_size=1, max_size=5, unique_by=lambda text: text[1:-1]), st.data())
def test_a_label_reads_back(texts: list[str], data: st.DataObject) -> None:
    parsed = parse_label("+".join(data.draw(st.permutations(texts))))
    assert parsed is not None
    assert parse_label(joined(parsed)) == parsed
    assert joined(parsed) == "/".join(sorted(texts, key=lambda text: int(text[1:-1])))


def test_residue_order_is_by_number_and_own_words_come_last() -> None:
    mutations = [named_mutation(text) for text in ("Δ6-46", "R1000Q", "E181A", "E99A", "loop")]
    assert list(map(str, in_residue_order(mutations))) == ["E99A", "E181A", "R1000Q", "loop", "Δ6-46"]


@pytest.mark.parametrize("order", [2, 3, 4])
def test_a_full_set_holds_every_cycle_once(order: int) -> None:
    mutations = ORDERED[:order]
    found = find_cycles(constructs(*all_of(mutations)))
    expected = [subset for size in range(2, order + 1) for subset in combinations(mutations, size)]
    assert [tuple(map(str, cycle.mutations)) for cycle in found] == expected
    assert [cycle.name for cycle in found] == ["/".join(subset) for subset in expected]


@pytest.mark.parametrize("order", [2, 3, 4])
def test_corners_and_signs(order: int) -> None:
    mutations = ORDERED[:order]
    cycle = find_cycles(constructs(*all_of(mutations)))[-1]
    assert cycle.order == order
    assert [corner.label for corner in cycle.corners] == all_of(mutations)
    assert [corner.sign for corner in cycle.corners] == [
        (-1) ** (order - len(corner.mutations)) for corner in cycle.corners
    ]
    assert sum(corner.sign for corner in cycle.corners) == 0


def test_signs_of_order_two_and_three_written_out() -> None:
    found = {cycle.order: cycle for cycle in find_cycles(constructs(*all_of(ORDERED[:3])))}
    assert [corner.sign for corner in found[2].corners] == [1, -1, -1, 1]
    assert [corner.sign for corner in found[3].corners] == [-1, 1, 1, 1, -1, -1, -1, 1]


@pytest.mark.parametrize("order", [2, 3, 4])
def test_anything_that_adds_up_cancels(order: int) -> None:
    """A sum over mutations has no interaction: it vanishes in the signed sum over the corners."""
    share = dict(zip(ORDERED, (1.5, -0.75, 4.0, 0.125), strict=True))
    for cycle in find_cycles(constructs(*all_of(ORDERED[:order]))):
        additive = [7.0 + sum(share[str(m)] for m in corner.mutations) for corner in cycle.corners]
        assert sum(corner.sign * value for corner, value in zip(cycle.corners, additive, strict=True)) == 0


def test_the_order_of_constructs_and_of_words_in_labels_does_not_matter() -> None:
    labels = all_of(ORDERED)
    turned = ["/".join(label.split("/")[::-1]) for label in labels]
    np.random.default_rng(0).shuffle(turned)
    one, other = find_cycles(constructs(*labels)), find_cycles(constructs(*turned))
    assert [(c.name, [k.sign for k in c.corners]) for c in one] == [
        (c.name, [k.sign for k in c.corners]) for c in other
    ]


def test_two_mutations_of_one_residue_make_two_cycles() -> None:
    labels = constructs("WT", "E181A", "E181Q", "R212Q", "E181A/R212Q", "E181Q/R212Q")
    assert [cycle.name for cycle in find_cycles(labels)] == ["E181A/R212Q", "E181Q/R212Q"]


@pytest.mark.parametrize("missing", ["WT", "K95N", "E181A", "K95N/E181A", "E181A/R212Q"])
def test_a_cycle_lacks_what_is_taken_away(missing: str) -> None:
    labels = constructs(*(label for label in all_of(ORDERED[:3]) if label != missing))
    mutations = parse_label("K95N/E181A/R212Q")
    assert mutations is not None
    name = "wild type" if missing == "WT" else missing
    assert missing_corners(mutations, labels) == (name,)
    assert "K95N/E181A/R212Q" not in [cycle.name for cycle in find_cycles(labels)]
    assert ("K95N/E181A/R212Q", (name,)) in incomplete_cycles(labels)
    with pytest.raises(KeyError, match="frozenset"):
        complete_cycle(mutations, labels)


def test_no_cycle_without_double_mutants() -> None:
    labels = constructs("WT", *ORDERED)
    assert find_cycles(labels) == ()
    assert incomplete_cycles(labels) == ()


def test_complete_sets_are_not_called_incomplete() -> None:
    assert incomplete_cycles(constructs(*all_of(ORDERED))) == ()


def test_many_mutations_are_counted_not_listed() -> None:
    many = "/".join(f"A{position}G" for position in range(1, 41))
    labels = constructs("WT", "A1G", many)
    assert find_cycles(labels) == ()
    assert incomplete_cycles(labels) == ((many, (f"{2**40 - 3} constructs",)),)
