"""The columns of a screening table: name, type and meaning of each, in their order.

Types are those of a store and of every format: ``text``, ``int``, ``float``, ``bool``. Point groups and site
symmetries are text even where all of them look like numbers (-1, 222). A value that does not exist, such as
a space group of a file that cannot be read, is missing and not zero.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

#: One row; the keys are names of columns, None where a value does not exist.
Row: TypeAlias = dict[str, str | int | float | bool | None]
ColumnType: TypeAlias = Literal["text", "int", "float", "bool"]


@dataclass(frozen=True)
class Column:
    """A column: its name, the type of its values, what they mean (units included)."""

    name: str
    type: ColumnType
    meaning: str


#: What became of an item: the values of the column ``status``.
STATUSES: Final = ("ok", "error", "crashed", "timed-out", "out-of-memory")

#: Verdicts that say whether any component of a kind of tensor is allowed: column and kind.
VERDICTS: Final = {
    "piezoelectric": "piezoelectric-strain",
    "pyroelectric": "pyroelectric",
    "second_harmonic": "second-harmonic",
    "second_harmonic_kleinman": "second-harmonic-kleinman",
    "optical_activity": "gyration",
    "electro_optic": "electro-optic",
}

#: Properties whose independent components are counted where no others are chosen.
DEFAULT_PROPERTIES: Final = (
    "pyroelectric",
    "permittivity",
    "gyration",
    "piezoelectric-strain",
    "second-harmonic",
    "second-harmonic-kleinman",
    "electro-optic",
    "elastic-stiffness",
)

_BEFORE: Final = (
    Column("id", "text", "name of the structure: path below the folder given, or the id its source gives"),
    Column("source", "text", "absolute path of the file; of an archive, path ! member"),
    Column("frame", "text", "which structure of the source, empty where it holds one"),
    Column("formula", "text", "reduced formula, electropositive elements first"),
    Column("atoms", "int", "atoms in the cell of the file"),
    Column("space_group_number", "int", "number in International Tables A"),
    Column("space_group", "text", "short Hermann-Mauguin symbol, screw axes with an underscore"),
    Column("declared_space_group", "text", "space group the file claims, missing where it claims none"),
    Column("hall_number", "int", "number of the setting, 1 to 530, as in spglib"),
    Column("crystal_system", "text", "of the point group"),
    Column("point_group", "text", "of the crystal, oriented: 31m is not 3m1"),
    Column("centrosymmetric", "bool", "whether the point group has the inversion"),
    Column("sohncke", "bool", "whether the space group has no improper operation (65 types)"),
    Column("chiral_class", "bool", "whether the point group has no improper operation (11 classes)"),
    Column("chiral_space_group", "bool", "whether the mirror image has another space-group type (22 types)"),
    Column("polar", "bool", "whether a polar vector is left unchanged"),
    Column("polar_axis", "text", "unit vector in the file's Cartesian axes, sense open; or what is polar"),
    Column("piezoelectric", "bool", "whether symmetry allows it"),
    Column("pyroelectric", "bool", "whether symmetry allows it"),
    Column("second_harmonic", "bool", "whether symmetry allows second-harmonic generation by dipoles"),
    Column("second_harmonic_kleinman", "bool", "the same where all three indices can be exchanged"),
    Column("optical_activity", "bool", "whether the gyration tensor is allowed"),
    Column("electro_optic", "bool", "whether the linear electro-optic effect is allowed"),
)  # fmt: skip

_AFTER: Final = (
    Column("distinct_sites", "int", "orbits of atoms under the space group"),
    Column("highest_site_symmetry", "text", "oriented symbol of the site group of highest order"),
    Column("lowest_site_symmetry", "text", "oriented symbol of the site group of lowest order"),
    Column("tolerance_angstrom", "float", "distance within which atoms count as related, angstrom"),
    Column("stability", "text", "robust, or fragile: the space group changes near the tolerance"),
    Column("interval_low_angstrom", "float",
           "lowest tolerance from which on the space group is this, angstrom"),
    Column("interval_high_angstrom", "float",
           "highest tolerance at which the space group is still this, angstrom"),
    Column("distance_to_centrosymmetric_angstrom", "float",
           "largest atom shift to the nearest centrosymmetric arrangement found, angstrom"),
    Column("remarks", "text", "what was noticed or changed, parts separated by '; '"),
    Column("status", "text", "one of " + ", ".join(STATUSES)),
    Column("error_code", "text", "kind of the error"),
    Column("error_message", "text", "what happened, the value, the rule, the next step"),
    Column("seconds", "float", "time the structure took"),
)  # fmt: skip


def count_column(property_name: str) -> str:
    """Name of the column with the number of independent components of a kind of tensor.

    >>> count_column("elastic-stiffness")
    'count_elastic_stiffness'
    """
    return f"count_{property_name.replace('-', '_')}"


def columns_for(properties: Sequence[str] = DEFAULT_PROPERTIES) -> tuple[Column, ...]:
    """All columns in order, with a count for each property."""
    counts = (Column(count_column(name), "int", f"independent components of {name}") for name in properties)
    return (*_BEFORE, *counts, *_AFTER)


#: Names of the columns, in order, where no properties are chosen.
COLUMNS: Final = tuple(column.name for column in columns_for())
