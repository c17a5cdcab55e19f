"""Distances between side chains whose coordinates give them by hand: 3-4-5, 2-3-6-7 and their like."""

import math

import pytest

from cornerwise.side_chains import (
    CHARGED_ATOMS,
    SIDE_CHAIN_ATOMS,
    Atom,
    SideChain,
    closest,
    closest_of,
    side_chain,
)


def _chain(residue: str, chain: str = "A", **atoms: tuple[float, float, float]) -> SideChain:
    made = [Atom(name=name, position=position) for name, position in atoms.items()]
    return side_chain(residue, residue[0], chain, made)


ASP = _chain("D171", N=(0, 0, 9), CA=(0, 0, 8), CB=(0, 0, 4), CG=(0, 0, 2), OD1=(0, 0, 0), OD2=(1, 1, 0))
LYS = _chain("K232", CA=(0, 0, 0.5), CB=(9, 9, 0), NZ=(2, 3, 6))


def test_backbone_does_not_count() -> None:
    # The alpha carbons are 0.5 from an oxygen; the side chains come as close as CG and NZ: 2, 3 and 4.
    assert [atom.name for atom in ASP.atoms] == ["CB", "CG", "OD1", "OD2"]
    found = closest(ASP, LYS)
    assert found is not None
    assert found.angstrom == pytest.approx(math.sqrt(4 + 9 + 4))
    assert str(found) == "D171 CB in chain A to K232 NZ in chain A"


def test_charged_atoms_alone() -> None:
    # OD1 to NZ is 2, 3, 6: exactly 7; OD2 to NZ is 1, 2, 6.
    found = closest(ASP, LYS, charged=True)
    assert found is not None
    assert found.angstrom == pytest.approx(math.sqrt(1 + 4 + 36))
    far = _chain("D171", OD1=(0, 0, 0))
    assert closest(far, LYS, charged=True).angstrom == 7.0
    assert closest(ASP, _chain("S200", CB=(0, 0, 0), OG=(1, 0, 0)), charged=True) is None


def test_glycine_stands_with_its_alpha_carbon() -> None:
    glycine = _chain("G9", N=(0, 0, 0), CA=(3, 4, 0), C=(0, 0, 1))
    assert [atom.name for atom in glycine.atoms] == ["CA"]
    assert closest(glycine, _chain("A3", CB=(0, 0, 0))).angstrom == 5.0
    assert glycine.missing == ()


def test_conformers_of_different_letters_never_meet() -> None:
    def lysine(*places: tuple[str, float]) -> SideChain:
        atoms = [Atom(name="NZ", position=(x, 0, 0), conformer=letter) for letter, x in places]
        return side_chain("K9", "K", "A", atoms)

    one = side_chain(
        "D3", "D", "A", [Atom(name="OD1", position=(0, 0, 0), conformer="A"),
                         Atom(name="OD1", position=(8, 0, 0), conformer="B")],
    )  # fmt: skip
    assert closest(one, lysine(("A", 6.0), ("B", 3.0))).angstrom == 5.0  # B to B, not A to B
    assert "OD1 (conformer B)" in str(closest(one, lysine(("B", 3.0))))
    assert closest(one, lysine(("", 3.0))).angstrom == 3.0
    assert closest(one, lysine(("C", 3.0))) is None


def test_within_and_across_chains() -> None:
    ones = [_chain("D3", chain, OD1=(x, 0, 0)) for chain, x in (("A", 0.0), ("B", 100.0))]
    others = [_chain("K9", chain, NZ=(x, 0, 0)) for chain, x in (("A", 12.0), ("B", 3.0))]
    within, across = closest_of(ones, others)
    assert (within.angstrom, across.angstrom) == (12.0, 3.0)
    assert str(across) == "D3 OD1 in chain A to K9 NZ in chain B"
    within, across = closest_of(ones[:1], others[:1])
    assert (within.angstrom, across) == (12.0, None)
    assert closest_of([], others) == (None, None)


def test_order_of_the_two_does_not_matter() -> None:
    assert closest(ASP, LYS).angstrom == closest(LYS, ASP).angstrom


def test_what_is_missing() -> None:
    assert LYS.missing == ("CG", "CD", "CE")
    assert ASP.missing == ()


# Molecular masses of the free amino acids, g/mol, and their numbers of hydrogens: CRC Handbook of Chemistry
# and Physics, "Properties of Amino Acids" (from memory), neutral forms.
FREE = {
    "A": (89.09, 7), "R": (174.20, 14), "N": (132.12, 8), "D": (133.10, 7), "C": (121.16, 7),
    "Q": (146.14, 10), "E": (147.13, 9), "G": (75.07, 5), "H": (155.15, 9), "I": (131.17, 13),
    "L": (131.17, 13), "K": (146.19, 14), "M": (149.21, 11), "F": (165.19, 11), "P": (115.13, 9),
    "S": (105.09, 7), "T": (119.12, 9), "W": (204.23, 12), "Y": (181.19, 11), "V": (117.15, 11),
}  # fmt: skip
ATOMIC = {"H": 1.008, "C": 12.011, "N": 14.007, "O": 15.999, "S": 32.06}


@pytest.mark.parametrize("native", sorted(SIDE_CHAIN_ATOMS))
def test_the_atoms_add_up_to_the_amino_acid(native: str) -> None:
    mass, hydrogens = FREE[native]
    names = [*{"N", "CA", "C", "O", "OXT", *SIDE_CHAIN_ATOMS[native]}]
    heavy = sum(ATOMIC[name[0]] for name in names)
    assert heavy + hydrogens * ATOMIC["H"] == pytest.approx(mass, abs=0.03)
    assert len(set(SIDE_CHAIN_ATOMS[native])) == len(SIDE_CHAIN_ATOMS[native])


def test_charged_atoms_are_side_chain_atoms() -> None:
    assert set(CHARGED_ATOMS) == set("DEHKR")
    for native, names in CHARGED_ATOMS.items():
        assert set(names) <= set(SIDE_CHAIN_ATOMS[native])
        assert {name[0] for name in names} == ({"O"} if native in "DE" else {"N"})
