"""Crystals: reading, validation, space group, sites and named axes."""

from sitesym.crystals.axes import AXES_NAMES, Axes, axes_for
from sitesym.crystals.choices import ReadingChoices
from sitesym.crystals.cif_symmetry import STATEMENTS
from sitesym.crystals.crystal import Crystal, Source
from sitesym.crystals.finders import DEFAULT_FINDER, FINDERS
from sitesym.crystals.idealisation import Idealisation
from sitesym.crystals.marks import MARKS
from sitesym.crystals.reading import (
    FORMATS,
    named_format,
    read_crystal,
    read_crystals,
    read_each,
)
from sitesym.crystals.reliability import FINDER_CHOICES, Reliability, examined_symmetry
from sitesym.crystals.sites import Site, SiteAxis
from sitesym.crystals.species import Species
from sitesym.crystals.symmetry import CrystalSymmetry, find_symmetry

__all__ = [
    "AXES_NAMES",
    "DEFAULT_FINDER",
    "FINDERS",
    "FINDER_CHOICES",
    "FORMATS",
    "MARKS",
    "STATEMENTS",
    "Axes",
    "Crystal",
    "CrystalSymmetry",
    "Idealisation",
    "ReadingChoices",
    "Reliability",
    "Site",
    "SiteAxis",
    "Source",
    "Species",
    "axes_for",
    "examined_symmetry",
    "find_symmetry",
    "named_format",
    "read_crystal",
    "read_crystals",
    "read_each",
]
