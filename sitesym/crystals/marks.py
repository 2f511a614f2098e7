"""What may tell atoms apart beside element and occupancy: isotope, oxidation state, label, moment.

A file may give such marks for its sites. They are kept as texts, one for each atom, and count only when they
are asked for: then atoms with different marks are atoms of different kinds to the symmetry finder.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import TypeAlias

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.crystals.species import Species

#: Name of a mark to its texts, one for each atom, empty where an atom has none; equal marks are equal texts.
Marks: TypeAlias = Mapping[str, tuple[str, ...]]

_MOMENTS_UNUSED = (
    "magnetic moments are read and not used: the groups given are those without time reversal; "
    "distinguish moment tells atoms apart by them"
)


def kinds_of_atoms(species: Sequence[Species], marks: Marks, distinguish: Sequence[str]) -> IntArray:
    """(n,) whole numbers from 1, equal for atoms of the same species and the same distinguishing marks."""
    used = [marks[name] for name in distinguish if name in marks]
    keys = list(zip((kind.parts for kind in species), *used, strict=True))
    numbers = {key: index for index, key in enumerate(dict.fromkeys(keys), start=1)}
    return frozen(np.array([numbers[key] for key in keys], dtype=np.int64))


def marks_remarks(marks: Marks, distinguish: Sequence[str]) -> tuple[str, ...]:
    """What a result must say of marks that the file gives and nobody uses, or that were asked for in vain."""
    remarks = [
        f"the file gives no {name}; atoms are not told apart by it"
        for name in distinguish
        if name not in marks
    ]
    if "isotope" in marks and "isotope" not in distinguish:
        isotopes = sorted({isotope for text in marks["isotope"] for isotope in text.split()})
        remarks.append(f"{', '.join(isotopes)} counts as hydrogen; distinguish isotope tells isotopes apart")
    if "moment" in marks:
        used = "atoms are told apart by the moments given in the file, taken as labels and not as vectors"
        remarks.append(used if "moment" in distinguish else _MOMENTS_UNUSED)
    return tuple(remarks)


def moment_texts(moments: FloatArray) -> tuple[str, ...]:
    """Moments (n,) or (n, 3) in Bohr magnetons as marks, equal when equal to a thousandth; zero is none."""
    rows = np.round(np.asarray(moments, dtype=np.float64).reshape(len(moments), -1), 3) + 0.0
    return tuple(" ".join(f"{value:g}" for value in row) if row.any() else "" for row in rows)
