"""Finite groups of 3x3 matrices: elements, classes, exact characters, unitary irreps and their labels."""

from sitesym.groups.elements import Element
from sitesym.groups.functions import functions_of_irreps, functions_of_joined
from sitesym.groups.orientation import standard_rotation
from sitesym.groups.pointgroup import PointGroup
from sitesym.groups.table import CharacterTable, Irrep, JoinedIrrep, character_table
from sitesym.groups.verify import Checks

__all__ = [
    "CharacterTable",
    "Checks",
    "Element",
    "Irrep",
    "JoinedIrrep",
    "PointGroup",
    "character_table",
    "functions_of_irreps",
    "functions_of_joined",
    "standard_rotation",
]
