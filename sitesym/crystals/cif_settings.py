"""Space groups by their names: the settings that an H-M symbol, a Hall symbol or a number may mean.

The table is gemmi's; full Hermann-Mauguin symbols come from spglib's. Everything here depends on a text
alone and is computed once for each.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING, Final

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.crystals.operations import check_closed, operation_codes
from sitesym.crystals.spglib_finder import full_symbols, number_of_operations
from sitesym.errors import SpaceGroupStatementError, SymmetryNotFoundError

if TYPE_CHECKING:
    import gemmi

REMEDY: Final = "add the list of operations (_space_group_symop_operation_xyz) or the Hall symbol to the file"

# Suffixes after a blank that some programs write for a setting (common practice, no source).
_SUFFIX_SETTINGS: Final = {"S": "1", "Z": "2", "H": "H", "R": "R", "HR": "H", "RS": "R"}
_MONOCLINIC: Final = range(3, 16)


@dataclass(frozen=True, eq=False)
class Setting:
    """Operations of a space group in one choice of axes and origin: ``rotations`` (n, 3, 3), ``translations``
    (n, 3). ``number`` and ``name`` are those of International Tables, 0 and '' for operations that stand in
    no table. ``codes`` are equal for equal sets of operations, whatever their order.
    """

    rotations: IntArray
    translations: FloatArray
    number: int
    name: str
    codes: frozenset[int]

    @cached_property
    def point_rotations(self) -> IntArray:
        """(k, 3, 3) the rotation parts, each once."""
        unique = {rotation.tobytes(): rotation for rotation in self.rotations}
        return frozen(np.array(list(unique.values()), dtype=np.int64))

    @property
    def text(self) -> str:
        """The name with its number, for messages."""
        return f"{self.name} (number {self.number})" if self.name else "a group in no tabulated setting"


@lru_cache(maxsize=1024)
def setting_of_triplets(triplets: tuple[str, ...]) -> Setting:
    """The group of operations such as -y,x-y,z+1/3. Raises SpaceGroupStatementError when they are none."""
    import gemmi

    operations = {}
    for triplet in triplets:
        try:
            operation = gemmi.Op(triplet).wrap()
        except (RuntimeError, ValueError) as error:
            raise _unreadable_operation(triplet) from error
        if any(entry % operation.DEN for row in operation.rot for entry in row):
            raise _unreadable_operation(triplet)
        operations[operation.triplet()] = operation
    rotations = np.array([operation.rot for operation in operations.values()]) // gemmi.Op.DEN
    for triplet, determinant in zip(operations, np.rint(np.linalg.det(rotations)), strict=True):
        if abs(determinant) != 1.0:
            raise _unreadable_operation(triplet)
    setting = _setting(operations.values())
    check_closed(setting.rotations, setting.translations)
    return setting


@lru_cache(maxsize=1024)
def setting_of_hall(symbol: str) -> Setting:
    """The group of a Hall symbol. Raises SpaceGroupStatementError when it cannot be read."""
    import gemmi

    try:
        setting = _setting(gemmi.symops_from_hall(symbol))
        check_closed(setting.rotations, setting.translations)
    except (RuntimeError, ValueError, SpaceGroupStatementError) as error:
        raise SpaceGroupStatementError(
            "the Hall symbol cannot be read",
            repr(symbol),
            str(error).splitlines()[0],
            "correct the symbol or list the operations",
        ) from error
    return setting


@lru_cache(maxsize=1024)
def settings_of_name(name: str) -> tuple[Setting, ...]:
    """All settings that an H-M symbol may mean: without its suffix an origin or an axis may be left open.

    Raises SpaceGroupStatementError for a symbol that is not known.
    """
    import gemmi

    stem, _, suffix = name.replace("_", "").partition(":")
    words = stem.split()
    if not suffix and len(words) > 1 and words[-1].upper() in _SUFFIX_SETTINGS:
        stem, suffix = " ".join(words[:-1]), _SUFFIX_SETTINGS[words[-1].upper()]
    found = gemmi.find_spacegroup_by_name(stem)
    same = _spelled(stem, found) or _by_full_symbol(stem)
    if not same:
        raise SpaceGroupStatementError(
            "the H-M symbol is not known", repr(name), "a symbol of International Tables A", REMEDY
        )
    chosen = [group for group in same if group.ext == suffix.strip().upper()] if suffix else same
    # Two symbols with a glide plane e may mean the same operations.
    return tuple({setting.codes: setting for setting in map(_tabulated, chosen or same)}.values())


@lru_cache(maxsize=230)
def settings_of_number(number: str) -> tuple[Setting, ...]:
    """The settings of a space group in spglib's database, which leaves out odd ones such as F 1.

    Raises SpaceGroupStatementError for a number outside 1 to 230.
    """
    import gemmi

    usual = {hall for _, hall in full_symbols()}
    table = (group for group in gemmi.spacegroup_table() if group.hall in usual)
    groups = [group for group in table if str(group.number) == number]
    if not groups:
        raise SpaceGroupStatementError(
            "no space group has this number", number, "numbers are 1 to 230", REMEDY
        )
    return tuple(_tabulated(group) for group in groups)


def type_number(setting: Setting, lattice: FloatArray) -> int:
    """Number of the space-group type, found from the operations where the setting is in no table; 0 when
    it is not found. ``lattice``: rows in angstrom."""
    if setting.number:
        return setting.number
    try:
        return number_of_operations(setting.rotations, setting.translations, lattice)
    except SymmetryNotFoundError:
        return 0


def is_unique_axis_b(setting: Setting) -> bool:
    """Whether a monoclinic setting has its axis, or the normal of its mirror, along b."""
    return all(np.array_equal(abs(w) * np.eye(3), abs(w)) and w[0, 0] == w[2, 2] for w in setting.rotations)


def _setting(operations: Iterable[gemmi.Op]) -> Setting:
    import gemmi

    listed = list(operations)
    known = gemmi.find_spacegroup_by_ops(gemmi.GroupOps(listed))
    return _of_operations(listed, known)


@lru_cache(maxsize=600)
def _tabulated(group: gemmi.SpaceGroup) -> Setting:
    return _of_operations(list(group.operations()), group)


def _of_operations(operations: list[gemmi.Op], group: gemmi.SpaceGroup | None) -> Setting:
    rotations = np.array([operation.rot for operation in operations], dtype=np.int64) // operations[0].DEN
    shifts = np.array([operation.tran for operation in operations], dtype=np.int64)
    return Setting(
        frozen(rotations),
        frozen(shifts / operations[0].DEN),
        int(group.number) if group is not None else 0,
        str(group.xhm()) if group is not None else "",
        frozenset(operation_codes(rotations, shifts % operations[0].DEN).tolist()),
    )


def _spelled(stem: str, found: gemmi.SpaceGroup | None) -> list[gemmi.SpaceGroup]:
    """All groups of the table that a symbol may stand for; the one that gemmi finds tells the number."""
    import gemmi

    letters = _letters(stem)
    return [
        group
        for group in gemmi.spacegroup_table()
        if (found is None or group.number == found.number)
        and ((found is not None and group.hm == found.hm) or _stands_for(letters, group))
    ]


def _stands_for(letters: str, group: gemmi.SpaceGroup) -> bool:
    """Whether a symbol is that of a monoclinic group without the two 1 that tell the unique axis, or that of
    a group in which the glide planes a and b, written e, are both there."""
    if group.number in _MONOCLINIC:
        return letters == _letters(" ".join(word for word in group.hm.split() if word != "1"))
    listed = _letters(group.hm)
    return (
        "e" in letters
        and len(letters) == len(listed)
        and all(
            own == other or (own == "e" and other in "abc")
            for own, other in zip(letters, listed, strict=True)
        )
    )


def _by_full_symbol(stem: str) -> list[gemmi.SpaceGroup]:
    import gemmi

    letters = _letters(stem)
    halls = {hall for full, hall in full_symbols() if _letters(full) == letters}
    return [group for group in gemmi.spacegroup_table() if group.hall in halls]


def _letters(symbol: str) -> str:
    """A symbol without blanks, underscores and capitals, for comparison."""
    return symbol.replace("_", "").replace(" ", "").lower()


def _unreadable_operation(triplet: str) -> SpaceGroupStatementError:
    return SpaceGroupStatementError(
        "a symmetry operation cannot be read", repr(triplet), "such as -y,x-y,z+1/3", "correct the operation"
    )
