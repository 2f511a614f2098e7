"""One structure file to its rows: symmetry, verdicts, counts of independent components, or the error.

A verdict is a count of invariant components that is not zero; none is read from a list of classes.
"""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import replace
from typing import Final, TypeAlias

from sitesym.crystals.crystal import Crystal
from sitesym.crystals.finders import DEFAULT_FINDER
from sitesym.crystals.native_output import native_output_kept
from sitesym.crystals.reading import read_crystals
from sitesym.crystals.reliability import examined_symmetry
from sitesym.crystals.remarks import finder_remarks
from sitesym.crystals.symmetry import CrystalSymmetry
from sitesym.errors import SitesymError
from sitesym.groups import PointGroup
from sitesym.screening.verdicts import reliability_columns, reliability_remarks
from sitesym.tensors import independent_count, kind
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM

#: One row; the keys are `COLUMNS`, None where a value does not exist.
Row: TypeAlias = dict[str, str | int | float | bool | None]

#: Verdicts that say whether any component of a kind of tensor is allowed: column and kind.
VERDICTS: Final = {
    "piezoelectric": "piezoelectric-strain",
    "pyroelectric": "pyroelectric",
    "second_harmonic": "second-harmonic",
    "second_harmonic_kleinman": "second-harmonic-kleinman",
    "optical_activity": "gyration",
    "electro_optic": "electro-optic",
}

#: Kinds whose independent components are counted in columns of their own.
COUNTED: Final = (
    "pyroelectric",
    "permittivity",
    "gyration",
    "piezoelectric-strain",
    "second-harmonic",
    "second-harmonic-kleinman",
    "electro-optic",
    "elastic-stiffness",
)

_COUNT_COLUMNS: Final = {name: f"count_{name.replace('-', '_')}" for name in COUNTED}

#: All columns, in order. ``chiral`` means that no operation is improper (the space group is a Sohncke group).
COLUMNS: Final = (
    "id", "source", "formula", "atoms", "space_group_number", "space_group", "hall_number", "crystal_system",
    "point_group", "schoenflies", "centrosymmetric", "chiral", "polar", *VERDICTS, *_COUNT_COLUMNS.values(),
    "distinct_sites", "tolerance_angstrom", "stability", "interval_low_angstrom", "interval_high_angstrom",
    "distance_to_centrosymmetric_angstrom", "remarks", "status", "error_code", "error_message",
)  # fmt: skip


class Screener:
    """Makes rows at one tolerance (angstrom); counts are computed once for each group of integer matrices.

    ``finder`` and ``ladder`` as in `examined_symmetry`. What libraries print to standard error meanwhile is
    in the remarks of the row, so the process must be the screener's own.
    """

    def __init__(
        self,
        tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM,
        finder: str = DEFAULT_FINDER,
        ladder: bool = True,
    ) -> None:
        self.tolerance_angstrom = tolerance_angstrom
        self.finder = finder
        self.ladder = ladder
        self._counts: dict[bytes, dict[str, int]] = {}

    def rows(self, path: str | os.PathLike[str], name: str) -> Iterator[Row]:
        """Rows of a file: one for each structure in it, or one with the error that prevented them.

        ``name`` is the ``id``; where a file holds several structures, ``#`` and the part follow.
        """
        try:
            yield from self._rows_of(path, name)
        except SitesymError as error:
            yield self._failed(name, str(path), error)
        except Exception as error:  # noqa: BLE001  the worker boundary: one file must not end a run
            yield self._failed(name, str(path), _unexpected(error))

    def _rows_of(self, path: str | os.PathLike[str], name: str) -> Iterator[Row]:
        crystals = read_crystals(path)
        for crystal in crystals:
            identity = f"{name}#{crystal.source.part}" if len(crystals) > 1 else name
            yield self.row(crystal, identity, str(path))

    def row(self, crystal: Crystal, identity: str, source: str) -> Row:
        """The row of one crystal, or of the error when its symmetry cannot be settled."""
        try:
            with native_output_kept() as printed:
                symmetry = examined_symmetry(crystal, self.tolerance_angstrom, self.finder, self.ladder)
            found = replace(symmetry.found, messages=(*printed, *symmetry.found.messages))
            symmetry = replace(symmetry, found=found)
            return self._blank(identity, source) | self._answers(symmetry) | {"status": "ok"}
        except SitesymError as error:
            return self._failed(identity, source, error)

    def counts(self, group: PointGroup) -> dict[str, int]:
        """Independent components of every kind a row needs, by name of the kind."""
        key = (
            group.rotations_cart.tobytes() if group.rotations_frac is None else group.rotations_frac.tobytes()
        )
        if key not in self._counts:
            names = dict.fromkeys((*VERDICTS.values(), *COUNTED))
            self._counts[key] = {name: independent_count(kind(name), group) for name in names}
        return self._counts[key]

    def _answers(self, symmetry: CrystalSymmetry) -> Row:
        group, counts = symmetry.point_group, self.counts(symmetry.point_group)
        remarks = [
            *symmetry.crystal.remarks,
            *finder_remarks(symmetry),
            *reliability_remarks(symmetry.reliability),
        ]
        facts: Row = {
            "formula": symmetry.crystal.formula,
            "atoms": len(symmetry.crystal),
            "space_group_number": symmetry.space_group_number,
            "space_group": symmetry.space_group_symbol,
            "hall_number": symmetry.hall_number,
            "crystal_system": group.system,
            "point_group": group.oriented,
            "schoenflies": group.schoenflies,
            "centrosymmetric": group.has_inversion,
            "chiral": group.is_chiral,
            "polar": group.is_polar,
            "distinct_sites": len(symmetry.sites),
            "remarks": "; ".join(remarks) or None,
            **reliability_columns(symmetry.reliability),
        }
        verdicts: Row = {column: counts[name] > 0 for column, name in VERDICTS.items()}
        counted: Row = {column: counts[name] for name, column in _COUNT_COLUMNS.items()}
        return facts | verdicts | counted

    def _blank(self, identity: str, source: str) -> Row:
        row: Row = dict.fromkeys(COLUMNS)
        return row | {"id": identity, "source": source, "tolerance_angstrom": self.tolerance_angstrom}

    def _failed(self, identity: str, source: str, error: SitesymError) -> Row:
        labelled = (("value", error.value), ("rule", error.rule), ("next step", error.next_step))
        message = "; ".join([error.what, *(f"{label}: {text}" for label, text in labelled if text)])
        failure: Row = {"status": "error", "error_code": error.code, "error_message": message}
        return self._blank(identity, source) | failure


def _unexpected(error: Exception) -> SitesymError:
    """An error nobody foresaw, as a row can hold it."""
    return SitesymError(
        "unexpected failure of the program",
        f"{type(error).__name__}: {error}",
        "errors of a file are foreseen",
        "report it with the file",
    )
