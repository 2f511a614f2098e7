"""What a record names as its crystal: a path, the text of a structure file, or a point-group symbol."""

from __future__ import annotations

import os
import tempfile
from dataclasses import dataclass, replace
from pathlib import Path
from textwrap import shorten
from typing import Final, TypeAlias

from sitesym.choices import ReadingChoices, check_choices
from sitesym.crystals import Crystal, CrystalSymmetry, find_symmetry, read_crystal
from sitesym.crystals.ase_reader import detected_format
from sitesym.errors import SitesymError, TensorInputError
from sitesym.formats import named_format
from sitesym.groups import PointGroup
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM

#: A crystal with its symmetry, or a point group where nothing else is known.
Host: TypeAlias = CrystalSymmetry | PointGroup

_CIF_MARKS: Final = ("data_", "_cell_length_a", "_cell.length_a")


@dataclass(frozen=True)
class CrystalReference:
    """``text`` as given, and the folder relative paths start from. Equal references are one crystal."""

    text: str
    folder: str = ""

    @property
    def is_structure_text(self) -> bool:
        """Whether the structure stands in the record itself."""
        return "\n" in self.text.strip()

    @property
    def is_structure(self) -> bool:
        """Whether it is the structure of one crystal, and not a symbol that many share."""
        return self.is_structure_text or self.is_file

    @property
    def is_file(self) -> bool:
        """Whether there is such a file; a text that can be no path is none."""
        try:
            return self.path.is_file()
        except (OSError, ValueError):
            return False

    @property
    def path(self) -> Path:
        """The path it would be."""
        return Path(self.folder) / self.text


class CrystalShelf:
    """Crystals by reference, each read and searched for symmetry once, at one tolerance (angstrom).

    ``choices`` of reading serve every structure: a data block and a statement of symmetry are chosen in the
    CIFs among them. Raises UsageError for choices that mean nothing in any file.
    """

    def __init__(
        self,
        tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM,
        choices: ReadingChoices | None = None,
    ) -> None:
        self.tolerance_angstrom = tolerance_angstrom
        self.choices: ReadingChoices = choices or {}
        check_choices(self.choices)
        self._known: dict[CrystalReference, Host | SitesymError] = {}

    def host(self, reference: CrystalReference) -> Host:
        """The crystal's symmetry, or the point group a symbol names.

        Raises ReadingError, SymmetryError or, for a reference that is neither, TensorInputError; again and
        again for the same reference.
        """
        if reference not in self._known:
            try:
                self._known[reference] = self._read(reference)
            except SitesymError as error:
                self._known[reference] = error
        known = self._known[reference]
        if isinstance(known, SitesymError):
            raise known
        return known

    def _read(self, reference: CrystalReference) -> Host:
        if reference.is_structure_text:
            crystal = crystal_from_text(reference.text, self.choices)
            return find_symmetry(crystal, self.tolerance_angstrom)
        if reference.is_file:
            return find_symmetry(_crystal_of_file(reference.path, self.choices), self.tolerance_angstrom)
        try:
            return PointGroup.from_symbol(reference.text)
        except SitesymError as error:
            raise TensorInputError(
                "the crystal of the record is not found",
                repr(shorten(reference.text, 80)),
                f"a path from {reference.folder or '.'}, the text of a POSCAR or CIF, a point-group symbol",
                "correct the path or the symbol",
            ) from error


def _crystal_of_file(path: Path, choices: ReadingChoices) -> Crystal:
    file_format = named_format(path) or detected_format(path)
    return read_crystal(path, file_format, **_choices_for(file_format, choices))


def _choices_for(file_format: str, choices: ReadingChoices) -> ReadingChoices:
    """The choices that mean something in a file of a format."""
    kept = choices.copy()
    if file_format != "cif":
        kept["block"] = kept["symmetry_from"] = None
    return kept


def crystal_from_text(text: str, choices: ReadingChoices | None = None) -> Crystal:
    """The one structure in the text of a CIF or POSCAR file. Raises ReadingError and its subclasses."""
    is_cif = any(mark in text for mark in _CIF_MARKS)
    # The reading libraries want a file; its name means nothing to the user and stays out of the result.
    handle, name = tempfile.mkstemp(suffix=".cif" if is_cif else ".vasp")
    try:
        with os.fdopen(handle, "w", encoding="utf-8") as file:
            file.write(text if text.endswith("\n") else text + "\n")
        file_format = "cif" if is_cif else "vasp"
        crystal = read_crystal(name, file_format, **_choices_for(file_format, choices or {}))
    except SitesymError as error:
        told = (error.what, error.value, error.rule, error.next_step)
        raise type(error)(*(part.replace(name, "the text") for part in told)) from error
    finally:
        Path(name).unlink()
    source = replace(crystal.source, file="", part=crystal.source.part.replace(name, ""))
    return replace(crystal, source=source)
