"""Distances measured in a structure file.

The fragments are invented and written by hand: two residues in two chains, with coordinates whose distances
are exact by arithmetic.
"""

import re
from dataclasses import replace
from pathlib import Path

import pytest
from structure_library import needs_gemmi

from cornerwise.campaign import Campaign, Distance
from cornerwise.intake import coordinates, read, structure
from cornerwise.side_chains import DEFINITION
from intake.writing import LABELS, TOML, assert_refused, content, curve_rows, folder, problems

pytestmark = needs_gemmi

# Within chain A: OE1 to NH2 is 2, 3, 6 (7 A); across: OE1 of A to NH2 of B is 1, 2, 2 (3 A).
ATOMS = """\
ATOM      1  N   GLU A 181       0.000   0.000 -20.000  1.00 10.00           N
ATOM      2  CA  GLU A 181       2.000   3.000   5.900  1.00 10.00           C
ATOM      3  CB  GLU A 181       0.000   0.000 -12.000  1.00 10.00           C
ATOM      4  CG  GLU A 181       0.000   0.000  -9.000  1.00 10.00           C
ATOM      5  CD  GLU A 181       0.000   0.000  -6.000  1.00 10.00           C
ATOM      6  OE1 GLU A 181       0.000   0.000   0.000  1.00 10.00           O
ATOM      7  OE2 GLU A 181       0.000   0.000  -8.000  1.00 10.00           O
ATOM      8  HB2 GLU A 181       2.000   3.000   5.000  1.00 10.00           H
ATOM      9  CB  ARG A 212      12.000   3.000   6.000  1.00 10.00           C
ATOM     10  CG  ARG A 212      11.000   3.000   6.000  1.00 10.00           C
ATOM     11  CD  ARG A 212      10.000   3.000   6.000  1.00 10.00           C
ATOM     12  NE  ARG A 212       9.000   3.000   6.000  1.00 10.00           N
ATOM     13  CZ  ARG A 212       8.000   3.000   6.000  1.00 10.00           C
ATOM     14  NH1 ARG A 212       7.000   3.000   6.000  1.00 10.00           N
ATOM     15  NH2 ARG A 212       2.000   3.000   6.000  1.00 10.00           N
TER
ATOM     16  CB  GLU B 181     100.000   0.000   0.000  1.00 10.00           C
ATOM     17  OE1 GLU B 181      90.000   0.000   0.000  1.00 10.00           O
ATOM     18  CB  ARG B 212      50.000   0.000   0.000  1.00 10.00           C
ATOM     19  NH2 ARG B 212      -1.000   2.000  -2.000  1.00 10.00           N
TER
"""
PDB = ATOMS + "END\n"
ONE = "".join(line for line in PDB.splitlines(keepends=True) if line[21:22] != "B")

CIF_TAGS = (
    "group_PDB", "id", "type_symbol", "label_atom_id", "label_alt_id", "label_comp_id", "label_asym_id",
    "label_entity_id", "label_seq_id", "Cartn_x", "Cartn_y", "Cartn_z", "occupancy", "auth_seq_id",
    "auth_asym_id", "pdbx_PDB_model_num",
)  # fmt: skip
CIF_HEAD = "data_invented\nloop_\n" + "".join(f"_atom_site.{tag}\n" for tag in CIF_TAGS)
# The archive's own names of chains (X, Y) and its numbers (1, 2) differ from the authors' (A, B; 181, 212).
CIF = (
    CIF_HEAD
    + """\
ATOM 1 O OE1 . GLU X 1 1  0.0 0.0  0.0 1.0 181 A 1
ATOM 2 N NH2 . ARG X 1 2  2.0 3.0  6.0 1.0 212 A 1
ATOM 3 O OE1 . GLU Y 1 1 90.0 0.0  0.0 1.0 181 B 1
ATOM 4 N NH2 . ARG Y 1 2 -1.0 2.0 -2.0 1.0 212 B 1
"""
)


def _folder(path: Path, text: str | bytes, lines: str = "", name: str = "frag.pdb", **given: object) -> Path:
    toml = f'{TOML}[structure]\nfile = "{name}"\n{lines}'
    made = folder(path / "a", toml, **given)
    target = made / name
    target.parent.mkdir(exist_ok=True)
    target.write_bytes(text if isinstance(text, bytes) else text.encode())
    return made


def _read(path: Path, text: str, lines: str = "", name: str = "frag.pdb", **given: object) -> Campaign:
    return read(_folder(path, text, lines, name, **given))


def _distance(path: Path, text: str, lines: str = "", name: str = "frag.pdb") -> Distance:
    (distance,) = _read(path, text, lines, name).distances
    return distance


BOTH = 'chains = ["A", "B"]\n'


def test_one_chain(tmp_path: Path) -> None:
    found = _distance(tmp_path, ONE)
    assert found.residues == {181, 212}
    assert found.angstrom == found.within_chain_angstrom == found.charged_angstrom == 7.0
    assert found.across_chains_angstrom is None
    assert found.atoms == "E181 OE1 in chain A to R212 NH2 in chain A"
    assert (found.source, found.definition) == ("frag.pdb", DEFINITION)


@pytest.mark.parametrize(("name", "text"), [("frag.pdb", PDB), ("frag.cif", CIF), ("FRAG.ENT", PDB)])
def test_two_chains(name: str, text: str, tmp_path: Path) -> None:
    found = _distance(tmp_path, text, BOTH, name)
    assert (found.angstrom, found.within_chain_angstrom, found.across_chains_angstrom) == (3.0, 7.0, 3.0)
    assert found.charged_angstrom == 3.0
    assert found.atoms == "E181 OE1 in chain A to R212 NH2 in chain B"


def test_one_of_two_chains(tmp_path: Path) -> None:
    assert _distance(tmp_path, PDB, 'chains = ["A"]\n').angstrom == 7.0
    # 90 and -1, 2 and 2: 91, 2, 2 within B; nothing nearer
    (tmp_path / "b").mkdir()
    found = _distance(tmp_path / "b", PDB, 'chains = ["B"]\n')
    assert found.charged_angstrom == pytest.approx((91**2 + 8) ** 0.5)
    assert found.angstrom == 40.0  # OE1 to CB


def test_source_definition_and_doubts_are_told(tmp_path: Path) -> None:
    campaign = _read(tmp_path, PDB, f'{BOTH}citation = "invented"\n')
    source, incomplete = campaign.notes
    assert source.startswith("side-chain distances are measured in frag.pdb (chains A, B; read with gemmi ")
    assert "a structure shows one state" in source
    assert "E181 in chain B lacks CG CD OE2" in incomplete
    assert "in chain A" not in incomplete
    assert "may be too long" in incomplete
    assert campaign.distances[0].source == "frag.pdb (invented)"
    assert campaign.inputs[-1].name == "frag.pdb"
    assert len(campaign.inputs[-1].sha256) == 64


def test_a_structure_changes_nothing_else(tmp_path: Path) -> None:
    assert content(replace(_read(tmp_path, ONE), distances=())) == content(read(folder(tmp_path / "b", TOML)))


def test_the_order_of_lines_does_not_matter(tmp_path: Path) -> None:
    atoms = [line for line in ATOMS.splitlines(keepends=True) if line.startswith("ATOM")]
    one = _distance(tmp_path, PDB, BOTH)
    (tmp_path / "b").mkdir()
    assert _distance(tmp_path / "b", "".join(atoms[::-1]) + "END\n", 'chains = ["B", "A"]\n') == one


def test_an_offset(tmp_path: Path) -> None:
    moved = ONE.replace(" A 181 ", " A  81 ").replace(" A 212 ", " A 112 ")
    campaign = _read(tmp_path, moved, "offset = -100\n")
    assert campaign.distances[0].angstrom == 7.0
    assert campaign.distances[0].atoms.startswith("E181 OE1")
    assert "residue numbers -100" in campaign.notes[0]


def test_a_file_in_a_folder_below(tmp_path: Path) -> None:
    campaign = _read(tmp_path, ONE, name="models/frag.pdb")
    assert campaign.distances[0].source == "models/frag.pdb"
    assert campaign.inputs[-1].name == "models/frag.pdb"


def test_the_first_of_several_models(tmp_path: Path) -> None:
    second = ATOMS.replace("   2.000   3.000   6.000", "   0.000   0.000   2.000")
    models = f"MODEL        1\n{ATOMS}ENDMDL\nMODEL        2\n{second}ENDMDL\nEND\n"
    campaign = _read(tmp_path, models, 'chains = ["A"]\n')
    assert campaign.distances[0].angstrom == 7.0
    assert "the first of 2 models" in campaign.notes[0]


def test_atoms_that_do_not_count(tmp_path: Path) -> None:
    absent = ONE.replace(
        "3.000   6.000  1.00 10.00           N\nTER", "3.000   6.000  0.00 10.00           N\nTER"
    )
    assert absent != ONE
    campaign = _read(tmp_path, absent)
    assert campaign.distances[0].angstrom == pytest.approx((49 + 9 + 36) ** 0.5)  # OE1 to NH1
    assert "R212 in chain A lacks NH2" in campaign.notes[1]


def test_conformers(tmp_path: Path) -> None:
    a = "ATOM      6  OE1AGLU A 181       0.000   0.000   0.000  0.50 10.00           O\n"
    b = "ATOM      6  OE1BGLU A 181      99.000   0.000   0.000  0.50 10.00           O\n"
    plain = "ATOM      6  OE1 GLU A 181       0.000   0.000   0.000  1.00 10.00           O\n"
    nitrogen = "ATOM     15  NH2 ARG A 212       2.000   3.000   6.000  1.00 10.00           N\n"
    in_b = nitrogen.replace("NH2 ARG", "NH2BARG")
    assert _distance(tmp_path, ONE.replace(plain, a + b)).angstrom == 7.0
    for name in "bc":
        (tmp_path / name).mkdir()
    with_b = _distance(tmp_path / "b", ONE.replace(plain, a + b).replace(nitrogen, in_b))
    assert with_b.charged_angstrom == pytest.approx(
        (49 + 9 + 36) ** 0.5
    )  # A goes with NH1, which has no letter


def test_a_residue_that_is_not_there_has_no_distance(tmp_path: Path) -> None:
    lines = ONE.splitlines(keepends=True)
    without = "".join(line for line in lines if " ARG " not in line)
    campaign = _read(tmp_path, without)
    assert campaign.distances == ()
    assert campaign.notes[1] == "frag.pdb has no side chain of R212: there is no distance for their pairs"
    (tmp_path / "b").mkdir()
    backbone = without.replace("END\n", ATOMS.splitlines(keepends=True)[8].replace(" CB ", " CA ") + "END\n")
    campaign = _read(tmp_path / "b", backbone)
    assert campaign.distances == ()
    assert "no side chain of R212" in campaign.notes[1]


def test_distances_between_subunits_are_not_known_from_one_chain(tmp_path: Path) -> None:
    made = _folder(tmp_path, ONE)
    assert "subunits" not in read(made).notes[0]
    toml = (made / "campaign.toml").read_text()
    (made / "campaign.toml").write_text(f"subunits = 4\n{toml}")
    assert "one chain says nothing of distances between subunits" in read(made).notes[0]


def test_selenomethionine_is_methionine(tmp_path: Path) -> None:
    labels = ("WT", "M181A", "R212Q", "M181A/R212Q")
    text = ONE.replace("GLU", "MSE").replace("ATOM  ", "HETATM")
    (distance,) = _read(tmp_path, text, curves=curve_rows(labels)).distances
    assert distance.angstrom == 7.0


def test_a_stated_distance_beside_the_structure(tmp_path: Path) -> None:
    table = "residue_a,residue_b,distance_A\nE181,K300,9\n"
    campaign = _read(tmp_path, ONE, distances=table)
    assert [one.angstrom for one in campaign.distances] == [7.0, 9.0]
    (tmp_path / "b").mkdir()
    path = _folder(tmp_path / "b", ONE, distances=table + "R212,E181,5\n")
    match = "the distance of E181/R212, which frag.pdb has too .7 A.; expected one source for each pair"
    assert_refused(path, file="distances.csv", row=3, column="residue_a", match=match)


def test_a_workbook_names_a_structure_beside_it(tmp_path: Path) -> None:
    from intake.test_workbook import KEYS, book, saved

    keys = [*KEYS, ["structure.file", "frag.pdb"], ["structure.chains", "A, B"], ["structure.offset", 0]]
    (tmp_path / "frag.pdb").write_text(PDB)
    assert read(saved(book(tmp_path, campaign=keys))).distances[0].angstrom == 3.0


def test_residues_of_another_type(tmp_path: Path) -> None:
    path = _folder(tmp_path, PDB.replace("GLU B", "ASP B"), BOTH)
    match = (
        "ASP 181 in chain B for E181 in frag.pdb, offset 0; expected the wild type's residues.*of a mutant"
    )
    assert_refused(path, file="campaign.toml", column="structure offset", match=match)


def test_residues_where_there_are_none(tmp_path: Path) -> None:
    path = _folder(tmp_path, ONE, "offset = 7\n")
    match = "found none of E181, R212 in frag.pdb, offset 7"
    assert_refused(path, file="campaign.toml", column="structure offset", match=match)


def test_the_offset_that_fits_is_suggested(tmp_path: Path) -> None:
    labels = (*LABELS, "D190N", "D190N/R212Q")
    sequence = {"GLU": 81, "ASP": 90, "ARG": 112, "ALA": 181}
    lines = [
        f"ATOM      1  CB  {name} A {number:3d}     {number:7.3f}   0.000   0.000  1.00 10.00           C\n"
        for name, number in sequence.items()
    ]
    path = _folder(tmp_path, "".join(lines) + "END\n", curves=curve_rows(labels))
    match = "ALA 181 in chain A for E181.*did you mean offset = -100, with which all 3 residues fit"
    assert_refused(path, file="campaign.toml", column="structure offset", match=match)


@pytest.mark.parametrize(
    ("lines", "column", "match"),
    [
        ("", "structure chains", "found 2 chains of protein.*'A', 'B'; add a line such as chains = ."),
        (
            'chains = ["C"]\n',
            "structure chains",
            "found the chain 'C'; expected chains of protein in frag.pdb",
        ),
        ('chains = ["a"]\n', "structure chains", "found the chain 'a'"),
        ("chains = []\n", "structure chains", "found a list; expected names of chains"),
        ('chains = ["A", "A"]\n', "structure chains", "found a list"),
        ("chains = 3\n", "structure chains", "found the number 3"),
        ('chains = "A"\n', "structure chains", "found the text 'A'; expected names of chains"),
        (f"{BOTH}offset = 1.5\n", "structure offset", "found the number 1.5; expected a whole number"),
        (f"{BOTH}offset = true\n", "structure offset", "found the truth value true"),
        (f"{BOTH}offset = 1000000\n", "structure offset", "at most 100000 either way"),
        (f'{BOTH}citation = ""\n', "structure citation", "found an empty text"),
        (f'{BOTH}chain = "A"\n', "structure chain", "the unknown key 'chain'.*did you mean chains"),
        (f"{BOTH}seed = 3\n", "structure seed", "move seed above the line .structure."),
    ],
)
def test_settings_that_are_refused(lines: str, column: str, match: str, tmp_path: Path) -> None:
    assert_refused(_folder(tmp_path, PDB, lines), file="campaign.toml", column=column, match=match)


def test_no_table_and_no_file(tmp_path: Path) -> None:
    one = folder(tmp_path / "a", f"{TOML}[structure]\nchains = ['A']\n")
    assert_refused(one, file="campaign.toml", row=3, column="structure file", match="found no file; expected")
    two = folder(tmp_path / "b", f'{TOML}structure = "frag.pdb"\n')
    assert_refused(two, file="campaign.toml", column="structure", match="expected a table .structure.")


@pytest.mark.parametrize(
    "name",
    [
        "../frag.pdb", "/etc/passwd", "models/../../frag.pdb", "..\\\\frag.pdb", "C:/frag.pdb", "./frag.pdb",
        "models//frag.pdb", "link.pdb", "below/frag.pdb", "loop.pdb",
    ],
)  # fmt: skip
def test_paths_do_not_leave_the_folder(name: str, tmp_path: Path) -> None:
    (tmp_path / "frag.pdb").write_text(ONE)
    made = folder(tmp_path / "a", f'{TOML}[structure]\nfile = "{name}"\n')
    (made / "link.pdb").symlink_to(tmp_path / "frag.pdb")
    (made / "loop.pdb").symlink_to(made / "loop.pdb")
    (made / "below").symlink_to(tmp_path)
    match = "which leads elsewhere|does not exist"
    assert_refused(made, file="campaign.toml", column="structure file", match=match)


@pytest.mark.parametrize(
    ("name", "match"),
    [
        ("frog.pdb", "'frog.pdb', which does not exist; .*did you mean 'frag.pdb'"),
        ("zebra.cif", "add the file, or delete .structure."),
        ("frag.pdb.gz", "unpack it if it is compressed"),
        ("curves.csv", "a structure as .cif .mmCIF. or .pdb"),
    ],
)
def test_files_that_are_not_there_or_no_structure(name: str, match: str, tmp_path: Path) -> None:
    made = folder(tmp_path / "a", f'{TOML}[structure]\nfile = "{name}"\n')
    (made / "frag.pdb").write_text(ONE)
    assert_refused(made, file="campaign.toml", column="structure file", match=match)


def test_without_the_library(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(coordinates, "find_spec", lambda name: None)
    match = (
        "gemmi is not installed; expected the optional extra structure.*pip install 'cornerwise.structure.'"
    )
    assert_refused(_folder(tmp_path, ONE), file="frag.pdb", match=match)


NH2 = "   2.000   3.000   6.000"
DAMAGED = {
    "empty.pdb": ("", "expected the record END"),
    "words.pdb": ("no structure at all\n", "'no structure at all' as the last line"),
    "end.pdb": ("END\n", "no protein: not one amino acid"),
    "water.pdb": (ONE.replace("GLU", "HOH").replace("ARG", "HOH"), "no protein"),
    "cut.pdb": (ONE[: len(ONE) // 2], "coordinate|END"),
    "cut_between_lines.pdb": (ATOMS, "'TER' as the last line; expected the record END"),
    "letter.pdb": (ONE.replace(NH2, "   2.000   3.0O0   6.000"), "row 15.*the coordinate '   3.0O0'"),
    # What is a blank to one reader is none to the next, which then reads 0.
    "control.pdb": (ONE.replace(NH2, "   2.000 \x1d 3.000   6.000"), r"row 15.*the coordinate .*3\.000"),
    "tab.pdb": (ONE.replace(NH2, "   2.000 \t 3.000   6.000"), r"row 15.*the coordinate .*3\.000"),
    "blank.pdb": (ONE.replace(NH2, "   2.000           6.000"), "row 15.*the coordinate nothing"),
    "not_a_number.pdb": (ONE.replace(NH2, "   2.000     nan   6.000"), "'     nan'; expected a number"),
    "number.pdb": (ONE.replace("A 212 ", "A 2x2 "), "the residue number ' 2x2'"),
    "twice.pdb": (ONE.replace("TER\n", ATOMS.splitlines()[14] + "\nTER\n"), "the atom NH2 twice in ARG 212"),
    "clash.pdb": (ONE.replace(NH2, "   0.500   0.000   0.000"), "0.5 A from E181 OE1 in chain A"),
    "empty.cif": ("", "no blocks with coordinates"),
    "words.cif": ("no structure at all\n", "cannot be read as a structure"),
    "no_atoms.cif": ("data_x\n_entry.id x\n", "no blocks with coordinates"),
    "two.cif": (CIF + CIF.replace("invented", "again"), "2 blocks with coordinates"),
    "cut.cif": (CIF[:-9], "cannot be read as a structure"),
    "letter.cif": (
        CIF.replace(" 3.0  6.0", " 3.O  6.0"),
        "Cartn_y: found '3.O' at atom 2; expected a number",
    ),
    "unknown.cif": (CIF.replace(" 3.0  6.0", " ?  6.0"), "found nothing at atom 2; expected a number"),
    "endless.cif": (CIF.replace(" 3.0  6.0", f" {'9' * 400}  6.0"), "found '9999.*' at atom 2"),
    "number.cif": (CIF.replace("1.0 212 A", "1.0 2x2 A"), "auth_seq_id: found '2x2' at atom 2"),
    "no_residues.cif": (CIF.replace("label_comp_id", "label_other_id"), "atoms without label_comp_id"),
    "same_tag.cif": (CIF + "_entry.id x\n_entry.id y\n", "duplicate tag"),
    "open_quote.cif": (CIF + "_entry.id 'x\n", "cannot be read as a structure"),
    "open_text.cif": (CIF + "_entry.id\n;x\n", "cannot be read as a structure"),
    "entity.cif": ('<!DOCTYPE x [<!ENTITY a "aa">]>\n<x>&a;</x>\n', "cannot be read as a structure"),
}


@pytest.mark.parametrize("name", DAMAGED)
def test_damaged_files_are_refused(name: str, tmp_path: Path) -> None:
    text, match = DAMAGED[name]
    found = problems(_folder(tmp_path, text, 'chains = ["A"]\n', name))
    assert len(found) == 1
    assert found[0].origin.file == name
    assert re.search(match, str(found[0])), found[0]


@pytest.mark.parametrize("data", [b"\xff\xfe\x00", b"\x00" * 5000, bytes(range(256)) * 20])
@pytest.mark.parametrize("name", ["frag.pdb", "frag.cif"])
def test_bytes_that_are_no_text(data: bytes, name: str, tmp_path: Path) -> None:
    assert problems(_folder(tmp_path, data, name=name))[0].origin.file == name


def test_a_file_that_is_too_large(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(structure, "MOST_STRUCTURE_BYTES", 500)
    assert_refused(_folder(tmp_path, ONE), file="frag.pdb", match="at most 0 MB; keep the chains")


def test_faults_of_the_tables_are_told_beside_those_of_the_structure(tmp_path: Path) -> None:
    path = _folder(tmp_path, ATOMS, distances="residue_a,residue_b,distance_A\nE181,R212,0\n")
    assert [one.origin.file for one in problems(path)] == ["distances.csv", "frag.pdb"]


@pytest.mark.parametrize("where", range(0, 1500, 60))
def test_a_file_cut_anywhere_is_refused(where: int, tmp_path: Path) -> None:
    assert problems(_folder(tmp_path, PDB[:where], BOTH))[0].origin.file == "frag.pdb"
