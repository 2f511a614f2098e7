"""Which symmetry operations a CIF states: its list, else Hall, else Hermann-Mauguin, else number.

All statements of a block are compared with each other and with the cell. A statement that can be read in
more than one way, statements that contradict each other or the cell, and a file without any statement are
errors that name the choices. A file is never taken for P 1 because it is silent.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeAlias

from sitesym.arrays import FloatArray, IntArray
from sitesym.choices import check_statement
from sitesym.crystals.cif_magnetic import magnetic_operations
from sitesym.crystals.cif_settings import (
    REMEDY,
    Setting,
    is_unique_axis_b,
    setting_of_hall,
    setting_of_triplets,
    settings_of_name,
    settings_of_number,
    type_number,
)
from sitesym.crystals.cif_values import first_column, first_text
from sitesym.crystals.operations import StatedOperations, cell_text, metric_misfit
from sitesym.errors import SpaceGroupStatementError
from sitesym.tolerances import CELL_METRIC

if TYPE_CHECKING:
    import gemmi

OPERATION_TAGS = (
    "_space_group_symop_operation_xyz",
    "_symmetry_equiv_pos_as_xyz",
    "_space_group_symop.operation_xyz",
)
HALL_TAGS = ("_space_group_name_Hall", "_symmetry_space_group_name_Hall", "_space_group.name_Hall")
NAME_TAGS = (
    "_space_group_name_H-M_alt",
    "_symmetry_space_group_name_H-M",
    "_space_group.name_H-M_alt",
    "_space_group_name_H-M_ref",
    "_space_group.name_H-M_ref",
    "_space_group_name_H-M_full",
    "_space_group.name_H-M_full",
)
NUMBER_TAGS = ("_space_group_IT_number", "_symmetry_Int_Tables_number", "_space_group.IT_number")


#: What a block says, by statement: the operations as texts, the others as one text.
_Declared: TypeAlias = dict[str, str | tuple[str, ...]]


@dataclass(frozen=True)
class Reading:
    """One statement and the settings it may mean: one for operations and Hall, several for names."""

    statement: str
    text: str
    settings: tuple[Setting, ...]

    @property
    def meaning(self) -> str:
        """The statement and what it means, for messages."""
        names = dict.fromkeys(setting.text for setting in self.settings)
        return f"the {self.text} means {' or '.join(names)}"


@dataclass(frozen=True)
class StatedSymmetry:
    """The operations a block states, the space group as it names it, and remarks of the comparison."""

    operations: StatedOperations
    declared: str
    remarks: tuple[str, ...]


def stated_symmetry(
    block: gemmi.cif.Block, lattice: FloatArray, symmetry_from: str | None = None
) -> StatedSymmetry:
    """The operations of a block with the cell ``lattice`` (rows, angstrom).

    ``symmetry_from``, one of `STATEMENTS`, is the only statement to believe; without it all of them must
    agree. Raises SpaceGroupStatementError, UsageError for an unknown name.
    """
    declared: _Declared = {
        "operations": first_column(block, OPERATION_TAGS),
        "hall": first_text(block, HALL_TAGS),
        "hm": first_text(block, NAME_TAGS),
        "number": first_text(block, NUMBER_TAGS),
    }
    name = str(declared["hm"] or (f"Hall {declared['hall']}" if declared["hall"] else ""))
    name = name or (f"number {declared['number']}" if declared["number"] else "")
    magnetic = magnetic_operations(block) if not declared["operations"] else None
    if magnetic is not None and symmetry_from in (None, "operations"):
        _check_cell([setting_of_triplets(magnetic.triplets)], "list of magnetic operations", lattice)
        return StatedSymmetry(magnetic.stated, name, ())
    if symmetry_from is not None:
        declared = _only(declared, symmetry_from)
    readings, remarks = _readings(declared)
    if not readings:
        raise _silent()
    _compare(readings, lattice)
    chosen = readings[0]
    setting = _fitting_setting(chosen, lattice, remarks)
    stated = StatedOperations(setting.rotations, setting.translations, _stated_by(chosen, setting))
    return StatedSymmetry(stated, name, tuple(remarks))


def _only(declared: _Declared, symmetry_from: str) -> _Declared:
    check_statement(symmetry_from)
    if not declared[symmetry_from]:
        made = ", ".join(name for name, value in declared.items() if value) or "none"
        raise SpaceGroupStatementError(
            "the file does not make the statement asked for",
            symmetry_from,
            f"statements of this file: {made}",
            "choose one that the file makes",
        )
    return {name: value if name == symmetry_from else "" for name, value in declared.items()}


def _readings(declared: _Declared) -> tuple[list[Reading], list[str]]:
    """What the statements mean. One that cannot be read is left out with a remark where another can."""
    readings: list[Reading] = []
    remarks: list[str] = []
    for statement, value in declared.items():
        if not value:
            continue
        try:
            readings.append(_reading(statement, value))
        except SpaceGroupStatementError as error:
            if not readings:
                raise
            remarks.append(f"{error.what} and is not compared: {error.value}")
    return readings, remarks


def _reading(statement: str, value: str | tuple[str, ...]) -> Reading:
    if isinstance(value, tuple):
        return Reading(statement, "list of operations", (setting_of_triplets(value),))
    if statement == "hall":
        return Reading(statement, f"Hall symbol {value}", (setting_of_hall(value),))
    if statement == "hm":
        return Reading(statement, f"H-M symbol {value}", settings_of_name(value))
    return Reading(statement, f"number {value}", settings_of_number(value))


def _compare(readings: list[Reading], lattice: FloatArray) -> None:
    """Each statement against the ones before it; contradictions raise SpaceGroupStatementError."""
    for later, second in enumerate(readings):
        for first in readings[:later]:
            if _agree(first, second, lattice):
                continue
            choices = " or ".join(f"--symmetry-from {reading.statement}" for reading in (first, second))
            raise SpaceGroupStatementError(
                "the file contradicts itself about its space group",
                f"{first.meaning}; {second.meaning}",
                "all statements of a file mean one space group in one setting",
                f"remove the statement that is wrong, or choose: {choices} (symmetry_from in Python)",
            )


def _agree(first: Reading, second: Reading, lattice: FloatArray) -> bool:
    """Whether some setting of the first is one of the second; names of another origin or cell than the
    tables' are compared by type and rotations, a bare number by type."""
    if "number" in (first.statement, second.statement):
        numbers = {setting.number for setting in second.settings}
        return any(type_number(setting, lattice) in numbers for setting in first.settings)
    if {setting.codes for setting in first.settings} & {setting.codes for setting in second.settings}:
        return True
    stated = first.settings[0]
    if stated.number or second.statement != "hm":
        return False
    number = type_number(stated, lattice)
    rotations = _as_set(stated.point_rotations)
    return any(
        setting.number == number and _as_set(setting.point_rotations) == rotations
        for setting in second.settings
    )


def _as_set(rotations: IntArray) -> set[bytes]:
    return {rotation.tobytes() for rotation in rotations}


def _fitting_setting(reading: Reading, lattice: FloatArray, remarks: list[str]) -> Setting:
    """The one setting that fits the cell; more than one, or none, is an error that lists them."""
    fitting = _check_cell(list(reading.settings), reading.text, lattice)
    if len(fitting) == 1:
        return fitting[0]
    along_b = [setting for setting in fitting if is_unique_axis_b(setting)]
    if reading.statement == "hm" and len(along_b) == 1:
        remarks.append(
            f"{reading.text} names no unique axis: b, as in International Tables, gives {along_b[0].name}"
        )
        return along_b[0]
    raise SpaceGroupStatementError(
        "the space group is stated without its setting",
        f"{reading.text} may be {', '.join(setting.name for setting in fitting)}",
        "origin and axes decide where the atoms are; they are not guessed",
        REMEDY,
    )


def _check_cell(settings: list[Setting], text: str, lattice: FloatArray) -> list[Setting]:
    """The settings that leave the cell unchanged, at least one."""
    misfits = [metric_misfit(setting.point_rotations, lattice) for setting in settings]
    fitting = [setting for setting, misfit in zip(settings, misfits, strict=True) if misfit <= CELL_METRIC]
    if fitting:
        return fitting
    names = ", ".join(setting.text for setting in settings)
    raise SpaceGroupStatementError(
        "the cell does not fit the stated space group",
        f"{text}: {names}; cell {cell_text(lattice)}; its metric changes by {min(misfits):.2g} of itself",
        f"the operations leave the cell unchanged within {CELL_METRIC:g}",
        "correct the cell or the space group",
    )


def _stated_by(reading: Reading, setting: Setting) -> str:
    if reading.statement == "hm":
        return f"H-M symbol {setting.name}"
    return reading.text if reading.statement != "number" else f"space group {reading.text}"


def _silent() -> SpaceGroupStatementError:
    return SpaceGroupStatementError(
        "the file does not state its space group",
        "no operations, no Hall symbol, no H-M symbol, no number",
        "a CIF lists the atoms of an asymmetric unit, which means nothing without the operations",
        f"{REMEDY}; where all atoms of the cell are listed, state P 1",
    )
