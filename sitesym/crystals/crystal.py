"""A crystal as read: cell, atoms and where they came from."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.choices import checked_marks
from sitesym.crystals.marks import Marks, kinds_of_atoms, marks_remarks, moment_texts
from sitesym.crystals.species import SYMBOLS, Species, reduced_formula
from sitesym.crystals.validation import check_structure, fractional
from sitesym.errors import CountMismatchError, NotPeriodicError, ReadingError

if TYPE_CHECKING:
    from ase import Atoms

FRAME_OF_VECTORS = "x, y, z are the Cartesian axes in which the source gives the cell vectors"


@dataclass(frozen=True)
class Source:
    """Where a crystal came from: file name (empty for none), format, and which part of the file."""

    file: str = ""
    format: str = "python"
    part: str = ""


@dataclass(frozen=True, eq=False)
class Crystal:
    """A periodic arrangement of atoms, validated when it is made.

    ``lattice``: (3, 3), rows a, b, c in angstrom, in the file's Cartesian axes. ``positions_frac``: (n, 3).
    ``species`` and ``labels``: one for each site. ``frame_note`` says where the Cartesian axes come from,
    ``declared_space_group`` what the file claims (empty where it claims nothing) and
    ``declared_operations`` how many operations that is in the file's cell, ``remarks`` what was noticed or
    changed on reading. ``marks``: what the file says of its atoms beside element and occupancy, one text for
    each atom; those named in ``distinguish`` tell atoms apart.

    Raises one of the ReadingError classes, see `sitesym.crystals.validation`.
    """

    lattice: FloatArray
    positions_frac: FloatArray
    species: tuple[Species, ...]
    labels: tuple[str, ...] = ()
    source: Source = field(default_factory=Source)
    frame_note: str = FRAME_OF_VECTORS
    declared_space_group: str = ""
    remarks: tuple[str, ...] = ()
    declared_operations: int = 0
    marks: Marks = field(default_factory=dict)
    distinguish: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "lattice", frozen(np.asarray(self.lattice, dtype=np.float64)))
        object.__setattr__(self, "positions_frac", frozen(np.asarray(self.positions_frac, dtype=np.float64)))
        if not self.labels:
            object.__setattr__(self, "labels", numbered_labels(self.species))
        for name, texts in {"label": self.labels, **self.marks}.items():
            if len(texts) != len(self.species):
                raise CountMismatchError(
                    f"{name}s and atoms differ in number",
                    f"{len(texts)} {name}s, {len(self.species)} atoms",
                    f"one {name} for each atom",
                    f"correct the {name}s or leave them out",
                )
        check_structure(self.lattice, self.positions_frac, self.labels)

    @classmethod
    def from_tuple(cls, cell: tuple[ArrayLike, ArrayLike, Sequence[int]]) -> Crystal:
        """From (lattice rows in angstrom, fractional positions, atomic numbers), every site filled.

        Raises ReadingError for a number that is no element, and the errors of validation.
        """
        lattice, positions, numbers = cell
        species = tuple(Species.pure(_symbol(number)) for number in numbers)
        return cls(_as_floats(lattice, "cell"), _as_floats(positions, "positions"), species)

    @classmethod
    def from_ase(cls, atoms: Atoms, source: Source | None = None, remarks: tuple[str, ...] = ()) -> Crystal:
        """From ASE Atoms, periodic in all three directions; partial occupancies in ``atoms.info`` are kept,
        and magnetic moments (Bohr magnetons, in the axes of ASE) become marks.

        Raises NotPeriodicError and the errors of validation.
        """
        if not all(atoms.pbc):
            raise NotPeriodicError(
                "the structure is not periodic in all three directions",
                f"pbc {atoms.pbc.tolist()}, edges {atoms.cell.lengths().tolist()} angstrom",
                "a crystal repeats along a, b and c",
                "give all three cell vectors; a molecule or a slab has no space group",
            )
        lattice = np.asarray(atoms.cell.array, dtype=np.float64)
        positions = np.asarray(atoms.positions, dtype=np.float64)
        return cls(
            lattice,
            fractional(lattice, positions),
            _ase_species(atoms),
            source=source or Source(format="ase"),
            remarks=remarks,
            marks=_ase_marks(atoms),
        )

    def with_remarks(self, *remarks: str) -> Crystal:
        """The same crystal with more remarks."""
        return replace(self, remarks=self.remarks + remarks)

    def distinguished_by(self, *names: str) -> Crystal:
        """The same crystal with atoms told apart by these marks as well; remarks say which marks go unused.

        Names: isotope, oxidation, label, moment. Raises UsageError for any other.
        """
        distinguish = checked_marks(names)
        unused = marks_remarks(self.marks, distinguish)
        if not unused and distinguish == self.distinguish:
            return self
        return replace(self, distinguish=distinguish, remarks=(*self.remarks, *unused))

    def __len__(self) -> int:
        return len(self.species)

    @cached_property
    def formula(self) -> str:
        """Reduced formula, elements from electropositive to electronegative (IUPAC 2005, Table VI)."""
        return reduced_formula(self.species)

    @cached_property
    def species_indices(self) -> IntArray:
        """(n,) whole numbers from 1, equal for sites with the same species and distinguishing marks."""
        return kinds_of_atoms(self.species, self.marks, self.distinguish)

    @property
    def is_ordered(self) -> bool:
        """False when a site is mixed or partly vacant: the crystal is then an average structure."""
        return all(kind.is_ordered for kind in self.species)


def numbered_labels(species: Sequence[Species]) -> tuple[str, ...]:
    """Labels such as Ti1, O1, O2: the first element of the site and a running number."""
    seen: Counter[str] = Counter()
    labels = []
    for kind in species:
        element = kind.parts[0][0]
        seen[element] += 1
        labels.append(f"{element}{seen[element]}")
    return tuple(labels)


def _as_floats(values: ArrayLike, name: str) -> FloatArray:
    try:
        return np.asarray(values, dtype=np.float64)
    except (TypeError, ValueError) as error:
        raise CountMismatchError(
            f"the {name} cannot be read as rows of three numbers",
            str(error),
            "rows of three numbers",
            "correct them",
        ) from error


def _symbol(number: int) -> str:
    if not 0 < int(number) < len(SYMBOLS):
        raise ReadingError(
            "an atom of no known element", str(number), "atomic numbers are 1 to 118", "correct it"
        )
    return SYMBOLS[int(number)]


def _ase_marks(atoms: Atoms) -> Marks:
    """Moments the file gives: those of a calculation, else those it started from."""
    calculated = atoms.calc.results.get("magmoms") if atoms.calc is not None else None
    moments = calculated if calculated is not None else atoms.arrays.get("initial_magmoms")
    values = np.asarray(() if moments is None else moments)
    # A column of that name may hold anything, and a frame no atoms: neither gives moments.
    if not values.size or values.dtype.kind not in "iuf" or values.shape[0:1] != (len(atoms),):
        return {}
    texts = moment_texts(values)
    return {"moment": texts} if any(texts) else {}


def _ase_species(atoms: Atoms) -> tuple[Species, ...]:
    occupancies = atoms.info.get("occupancy")
    if occupancies is None:
        return tuple(Species.pure(_symbol(number)) for number in atoms.numbers.tolist())
    kinds = [str(kind) for kind in atoms.arrays.get("spacegroup_kinds", ())]
    table = {str(kind): Species.mixed(parts) for kind, parts in occupancies.items()}
    if len(kinds) != len(atoms) or not set(kinds) <= set(table):
        raise CountMismatchError(
            "occupancies and atoms do not belong together",
            f"occupancies of kinds {', '.join(table)}; kinds of atoms: {', '.join(kinds) or 'none'}",
            "atoms.arrays['spacegroup_kinds'] names for each atom an entry of atoms.info['occupancy']",
            "complete both, or remove the occupancies",
        )
    return tuple(table[kind] for kind in kinds)
