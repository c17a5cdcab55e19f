"""Structure files to residues and their atoms, by the library gemmi, an optional extra.

The library passes over what it does not understand: it reads the coordinate ``1a.00`` as 1 and takes what
is left of a PDB file that was cut short. So numbers are checked as text, and a PDB file must end with its
record ``END``, before anything is believed.

Residue numbers and chains are those of the authors of the structure; residues with an insertion code are
passed over. Of several models the first counts, and atoms of occupancy 0 do not count.
"""

from __future__ import annotations

import re
from collections import Counter
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from importlib.metadata import version
from importlib.util import find_spec
from pathlib import PurePosixPath
from typing import TYPE_CHECKING, TypeVar

from ..errors import Origin
from ..side_chains import Atom
from . import text
from .findings import Findings, shown
from .structure import PDB_SUFFIXES, StructureFile

if TYPE_CHECKING:
    import gemmi

_Value = TypeVar("_Value")

# Digits enough for any structure, and too few for a number without end; in brackets an uncertainty.
_NUMBER = re.compile(r"[+-]?(?:[0-9]{1,6}(?:\.[0-9]{0,15})?|\.[0-9]{1,15})(?:\([0-9]{1,6}\))?")
_WHOLE_NUMBER = re.compile(r" *-?[0-9]{1,9}")
_WITH_LETTERS = re.compile(r"[A-Za-z][0-9A-Za-z]{3}")  # residue numbers of a PDB file from 10000 on
_RESIDUE_COLUMNS = (22, 26)  # of a PDB file's lines, from 0
_COORDINATE_COLUMNS = ((30, 38), (38, 46), (46, 54))
_ATOM_RECORDS = ("ATOM  ", "HETATM")
_HYDROGENS = ("H", "D")
_REMEDY = "fetch or save the file anew, as a whole; or leave out [structure]"

_PARENTS = {"MSE": "M"}  # selenomethionine, put in place of methionine to solve a structure


@dataclass(frozen=True, kw_only=True, slots=True)
class Residue:
    """One residue as it stands in a structure."""

    name: str  # three letters
    native: str  # one-letter code, "X" for none of the 20
    atoms: tuple[Atom, ...]  # without hydrogens and those of occupancy 0

    @property
    def doubled(self) -> str | None:
        """Name of an atom that occurs twice in one conformer, which no residue has."""
        counts = Counter((atom.name, atom.conformer) for atom in self.atoms)
        return next((name for (name, _), count in counts.items() if count > 1), None)


@dataclass(frozen=True, kw_only=True, slots=True)
class _Atoms:
    """The atoms of a file's first model, a list for each of their properties; hydrogens too."""

    chain: list[str]
    number: list[int]  # of the residue
    residue: list[str]
    name: list[str]
    conformer: list[str]
    element: list[str]
    occupancy: list[float]
    position: list[tuple[float, float, float]]
    models: int = 1  # how many there are in the file


class Model:
    """The protein of a structure file.

    Parameters
    ----------
    atoms : _Atoms
        Of the whole file.
    file : str
        Its name.
    reader : str
        Library and version.
    """

    def __init__(self, atoms: _Atoms, file: str, reader: str) -> None:
        self._atoms = atoms
        self.file, self.reader, self.models = file, reader, atoms.models
        self._places: dict[str, dict[int, dict[str, list[int]]]] = {}  # by chain, number and name
        acids = {name for name in set(atoms.residue) if _native(name) is not None}
        for place, (chain, number, name) in enumerate(
            zip(atoms.chain, atoms.number, atoms.residue, strict=True)
        ):
            if name in acids:
                numbered = self._places.setdefault(chain, {})
                numbered.setdefault(number, {}).setdefault(name, []).append(place)

    @property
    def chains(self) -> tuple[str, ...]:
        """Names of the chains that hold amino acids."""
        return tuple(sorted(self._places))

    def at(self, chain: str, number: int) -> list[Residue]:
        """Residues of this number: none, one, or several where the sequence varies."""
        named = self._places.get(chain, {}).get(number, {})
        return [
            Residue(name=name, native=_native(name) or "", atoms=tuple(self._counted(places)))
            for name, places in named.items()
        ]

    def sequence(self, chain: str) -> dict[int, set[str]]:
        """One-letter codes by residue number."""
        return {number: {_native(one) or "" for one in at} for number, at in self._places[chain].items()}

    def _counted(self, places: list[int]) -> Iterator[Atom]:
        atoms = self._atoms
        for i in places:
            if atoms.element[i] not in _HYDROGENS and atoms.occupancy[i] > 0:
                yield Atom(name=atoms.name[i], position=atoms.position[i], conformer=atoms.conformer[i])


class _Broken(Exception):
    """What is wrong with a file, and where."""

    def __init__(
        self, found: str, expected: str, *, row: int | None = None, column: str | None = None
    ) -> None:
        super().__init__(found)
        self.found, self.expected, self.row, self.column = found, expected, row, column


def read_model(opened: StructureFile, findings: Findings) -> Model | None:
    """Read the first model of a structure file.

    Parameters
    ----------
    opened : StructureFile
        The file's bytes.
    findings : Findings
        Takes every fault.

    Returns
    -------
    Model or None
        None when it cannot be read, which is a fault.
    """
    file = opened.request.file
    if find_spec("gemmi") is None:
        findings.add(
            Origin(file=file), found="a structure, while the library gemmi is not installed",
            expected="the optional extra structure, which reads such files",
            remedy="python -m pip install 'cornerwise[structure]'; or state the distances in distances.csv",
        )  # fmt: skip
        return None
    decoded = text.decode(opened.data, file, findings)
    if decoded is None:
        return None
    pdb = PurePosixPath(file).suffix.casefold() in PDB_SUFFIXES
    try:
        atoms = _of_pdb(decoded) if pdb else _of_mmcif(decoded)
        model = Model(atoms, file, f"gemmi {version('gemmi')}")
        if not model.chains:
            raise _Broken("no protein: not one amino acid", "the coordinates of a protein's atoms")
    except _Broken as broken:
        findings.add(
            Origin(file=file, row=broken.row, column=broken.column), found=broken.found,
            expected=broken.expected, remedy=_REMEDY,
        )  # fmt: skip
        return None
    except (ValueError, RuntimeError, LookupError, TypeError, OverflowError) as error:
        reason = " ".join(str(error).split()) or type(error).__name__
        findings.add(
            Origin(file=file), found=f"a file that cannot be read as a structure ({shown(reason)})",
            expected="a whole structure file", remedy=_REMEDY,
        )  # fmt: skip
        return None
    return model


@lru_cache(maxsize=1000)
def _native(name: str) -> str | None:
    """One-letter code of an amino acid, "X" for a modified one; None for anything else."""
    import gemmi

    known = gemmi.find_tabulated_residue(name)
    if not known.is_amino_acid():
        return None
    return _PARENTS.get(name) or (known.one_letter_code if known.one_letter_code.isupper() else "X")


def _of_pdb(decoded: str) -> _Atoms:
    import gemmi

    lines = decoded.split("\n")
    for row, line in enumerate(lines, start=1):
        if line.startswith(_ATOM_RECORDS):
            number = line[slice(*_RESIDUE_COLUMNS)]
            if not (_WHOLE_NUMBER.fullmatch(number) or _WITH_LETTERS.fullmatch(number)):
                raise _Broken(f"the residue number {shown(number)}", "a whole number", row=row)
            for start, end in _COORDINATE_COLUMNS:
                if len(line) < end or not _NUMBER.fullmatch(line[start:end].strip(" ")):
                    raise _Broken(f"the coordinate {shown(line[start:end])}", "a number", row=row)
    last = next((line.rstrip() for line in reversed(lines) if line.strip()), "")
    if last != "END":
        expected = "the record END, without which a file may have been cut short"
        raise _Broken(f"{shown(last)} as the last line", expected)
    structure = gemmi.read_pdb_string(decoded)
    found = [
        (chain.name, residue, atom)
        for chain in (structure[0] if len(structure) else ())
        for residue in chain
        if residue.seqid.icode == " "
        for atom in residue
    ]
    return _Atoms(
        chain=[chain for chain, _, _ in found],
        number=[residue.seqid.num or 0 for _, residue, _ in found],
        residue=[residue.name for _, residue, _ in found],
        name=[atom.name for _, _, atom in found],
        conformer=[atom.altloc.strip("\0") for _, _, atom in found],
        element=[atom.element.name.upper() for _, _, atom in found],
        occupancy=[atom.occ for _, _, atom in found],
        position=[(atom.pos.x, atom.pos.y, atom.pos.z) for _, _, atom in found],
        models=len(structure),
    )


def _of_mmcif(decoded: str) -> _Atoms:
    import gemmi

    document = gemmi.cif.read_string(decoded)
    blocks = [block for block in document if len(block.find_values("_atom_site.Cartn_x"))]
    if len(blocks) != 1:
        found = f"{len(blocks) or 'no'} blocks with coordinates of atoms"
        raise _Broken(found, "one structure, with its atoms")
    table = _AtomTable(blocks[0])
    models = table.words("pdbx_PDB_model_num", default="1")
    insertions = table.words("pdbx_PDB_ins_code", default="")
    first = [i for i, model in enumerate(models) if model == models[0] and not insertions[i]]

    def some(column: list[_Value]) -> list[_Value]:
        return [column[i] for i in first]

    x, y, z = (table.numbers(f"Cartn_{axis}") for axis in "xyz")
    return _Atoms(
        chain=some(table.words("auth_asym_id", "label_asym_id")),
        number=some(table.whole_numbers("auth_seq_id")),
        residue=some(table.words("label_comp_id", "auth_comp_id")),
        name=some(table.words("label_atom_id", "auth_atom_id")),
        conformer=some(table.words("label_alt_id", default="")),
        element=some([symbol.upper() for symbol in table.words("type_symbol")]),
        occupancy=some(table.numbers("occupancy", default="1")),
        position=some(list(zip(x, y, z, strict=True))),
        models=len(set(models)),
    )


class _AtomTable:
    """Columns of a file's table of atoms.

    The library makes a structure of the table in a time that grows with the square of a chain's length, so
    the columns are read as they stand.
    """

    def __init__(self, block: gemmi.cif.Block) -> None:
        self._block = block
        self.length = len(block.find_values("_atom_site.Cartn_x"))

    def words(self, *tags: str, default: str | None = None) -> list[str]:
        """The first of these columns that is there, without quotes; "" where a value is not known."""
        import gemmi

        for tag in tags:
            column = list(self._block.find_values(f"_atom_site.{tag}"))
            if len(column) == self.length:
                plain = {raw: gemmi.cif.as_string(raw) for raw in set(column)}
                return [plain[raw] for raw in column]
        if default is None:
            raise _Broken(f"atoms without {tags[0]}", f"a column _atom_site.{tags[0]}")
        return [default] * self.length

    def numbers(self, tag: str, *, default: str | None = None) -> list[float]:
        """A column of numbers; an uncertainty in brackets is left out."""
        words = self.words(tag, default=default)
        self._refuse_unless(_NUMBER, words, tag, "a number")
        return [float(word.partition("(")[0]) for word in words]

    def whole_numbers(self, tag: str) -> list[int]:
        """A column of whole numbers."""
        words = self.words(tag)
        self._refuse_unless(_WHOLE_NUMBER, words, tag, "a whole number")
        return [int(word) for word in words]

    def _refuse_unless(self, fitting: re.Pattern[str], words: list[str], tag: str, expected: str) -> None:
        for place, word in enumerate(words, start=1):
            if not fitting.fullmatch(word):
                raise _Broken(f"{shown(word)} at atom {place}", expected, column=f"_atom_site.{tag}")
