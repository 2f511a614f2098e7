"""Which symmetry operations a CIF states: its list, else Hall, else Hermann-Mauguin, else number.

A statement that can be read in more than one way, statements that contradict each other or the cell, and a
file without any statement are errors that name the choices. A file is never taken for P 1 because it is
silent.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.crystals.operations import (
    StatedOperations,
    cell_text,
    check_cell_fits,
    check_closed,
    metric_misfit,
)
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
NAME_TAGS = ("_space_group_name_H-M_alt", "_symmetry_space_group_name_H-M", "_space_group.name_H-M_alt")
NUMBER_TAGS = ("_space_group_IT_number", "_symmetry_Int_Tables_number", "_space_group.IT_number")

# Suffixes after a blank that some programs write for a setting (common practice, no source).
_SUFFIX_SETTINGS = {"S": "1", "Z": "2", "H": "H", "R": "R", "HR": "H", "RS": "R"}
_REMEDY = "add the list of operations (_space_group_symop_operation_xyz) or the Hall symbol to the file"


@dataclass(frozen=True)
class Statements:
    """What a data block says about its space group, as texts; empty where it says nothing."""

    operations: tuple[str, ...]
    hall: str
    name: str
    number: str

    @property
    def declared(self) -> str:
        """The space group as the file names it: H-M symbol, else Hall symbol, else number."""
        if self.name or self.hall:
            return self.name or f"Hall {self.hall}"
        return f"number {self.number}" if self.number else ""


def stated_operations(block: gemmi.cif.Block, lattice: FloatArray) -> tuple[StatedOperations, Statements]:
    """The operations of a block with the cell ``lattice`` (rows, angstrom), and what the block states.

    Raises SpaceGroupStatementError.
    """
    statements = read_statements(block)
    operations, stated_by = _choose(statements, lattice)
    result = StatedOperations(
        np.array([operation.rot for operation in operations], dtype=np.int64) // operations[0].DEN,
        np.array([operation.tran for operation in operations], dtype=np.float64) / operations[0].DEN,
        stated_by,
    )
    if statements.operations:
        check_closed(result)
    check_cell_fits(result, lattice)
    return result, statements


def read_statements(block: gemmi.cif.Block) -> Statements:
    """What the block says, '?' and '.' being nothing."""
    operations: tuple[str, ...] = ()
    for tag in OPERATION_TAGS:
        column = block.find_values(tag)
        if len(column) and not operations:
            operations = tuple(text for text in (_text(value) for value in column) if text)
    return Statements(
        operations, _first(block, HALL_TAGS), _first(block, NAME_TAGS), _first(block, NUMBER_TAGS)
    )


def _first(block: gemmi.cif.Block, tags: tuple[str, ...]) -> str:
    values = (_text(block.find_value(tag) or "?") for tag in tags)
    return next((value for value in values if value), "")


def _text(raw: str) -> str:
    import gemmi

    return "" if gemmi.cif.is_null(raw) else " ".join(str(gemmi.cif.as_string(raw)).split())


def _choose(statements: Statements, lattice: FloatArray) -> tuple[list[gemmi.Op], str]:
    if statements.operations:
        operations = _parse_operations(statements.operations)
        _check_against_name(operations, statements)
        return operations, "list of operations"
    if statements.hall:
        return _from_hall(statements.hall), f"Hall symbol {statements.hall}"
    if statements.name:
        group = _setting(_named_settings(statements.name), statements.name, lattice)
        return list(group.operations()), f"H-M symbol {group.xhm()}"
    if statements.number:
        group = _setting(_numbered_settings(statements.number), f"number {statements.number}", lattice)
        return list(group.operations()), f"space group number {statements.number}"
    raise SpaceGroupStatementError(
        "the file does not state its space group",
        "no operations, no Hall symbol, no H-M symbol, no number",
        "a CIF lists the atoms of an asymmetric unit, which means nothing without the operations",
        f"{_REMEDY}; where all atoms of the cell are listed, state P 1",
    )


def _parse_operations(texts: tuple[str, ...]) -> list[gemmi.Op]:
    import gemmi

    operations = []
    for text in texts:
        try:
            operations.append(gemmi.Op(text).wrap())
        except RuntimeError as error:
            raise SpaceGroupStatementError(
                "a symmetry operation cannot be read",
                repr(text),
                "such as -y,x-y,z+1/3",
                "correct the operation",
            ) from error
    unique = {operation.triplet(): operation for operation in operations}
    return list(unique.values())


def _from_hall(symbol: str) -> list[gemmi.Op]:
    import gemmi

    try:
        return list(gemmi.symops_from_hall(symbol))
    except (RuntimeError, ValueError) as error:
        raise SpaceGroupStatementError(
            "the Hall symbol cannot be read",
            repr(symbol),
            str(error),
            "correct the symbol or list the operations",
        ) from error


def _named_settings(name: str) -> list[gemmi.SpaceGroup]:
    """All settings an H-M symbol may mean: those of one number that share the symbol without its suffix."""
    import gemmi

    stem, _, suffix = name.partition(":")
    words = stem.split()
    if not suffix and len(words) > 1 and words[-1] in _SUFFIX_SETTINGS:
        stem, suffix = " ".join(words[:-1]), _SUFFIX_SETTINGS[words[-1]]
    found = gemmi.find_spacegroup_by_name(stem)
    if found is None:
        raise SpaceGroupStatementError(
            "the H-M symbol is not known", repr(name), "a symbol of International Tables A", _REMEDY
        )
    settings = [
        group for group in gemmi.spacegroup_table() if (group.number, group.hm) == (found.number, found.hm)
    ]
    chosen = [group for group in settings if group.ext == suffix.strip()]
    return chosen or settings


def _numbered_settings(number: str) -> list[gemmi.SpaceGroup]:
    import gemmi

    settings = [group for group in gemmi.spacegroup_table() if str(group.number) == number]
    if not settings:
        raise SpaceGroupStatementError(
            "no space group has this number", number, "numbers are 1 to 230", _REMEDY
        )
    return settings


def _setting(settings: list[gemmi.SpaceGroup], stated: str, lattice: FloatArray) -> gemmi.SpaceGroup:
    """The one setting that fits the cell; more than one, or none, is an error that lists them."""
    fitting = [group for group in settings if metric_misfit(_rotations(group), lattice) < CELL_METRIC]
    if len(fitting) == 1:
        return fitting[0]
    listed = ", ".join(group.xhm() for group in (fitting or settings))
    if not fitting:
        raise SpaceGroupStatementError(
            "the cell does not fit the stated space group",
            f"{stated} ({listed}); cell {cell_text(lattice)}",
            "the operations leave the cell unchanged",
            "correct the cell or the space group",
        )
    raise SpaceGroupStatementError(
        "the space group is stated without its setting",
        f"{stated} may be {listed}",
        "origin and axes decide where the atoms are; they are not guessed",
        _REMEDY,
    )


def _check_against_name(operations: list[gemmi.Op], statements: Statements) -> None:
    """Compare the listed operations with the named space group, where one is named and known."""
    import gemmi

    listed = gemmi.find_spacegroup_by_ops(gemmi.GroupOps(operations))
    stem = statements.name.partition(":")[0]
    named = gemmi.find_spacegroup_by_name(stem) if stem else None
    if named is None:
        return
    same_type = listed is None or listed.number == named.number
    # A shifted origin is not in the table; the number of point operations still tells two readings apart.
    same_class = len({str(op.rot) for op in operations}) == len({str(op.rot) for op in named.operations()})
    if not (same_type and same_class):
        reading = listed.xhm() if listed is not None else "an unnamed setting"
        raise SpaceGroupStatementError(
            "the file contradicts itself about its space group",
            f"{len(operations)} listed operations make {reading}; the H-M symbol is {statements.name}",
            "operations and symbol belong to one space group",
            "remove the statement that is wrong",
        )


def _rotations(group: gemmi.SpaceGroup) -> IntArray:
    operations = list(group.operations().sym_ops)
    return np.array([operation.rot for operation in operations], dtype=np.int64) // operations[0].DEN
