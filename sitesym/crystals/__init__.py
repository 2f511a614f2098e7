"""Crystals: reading, validation, space group, sites and named axes."""

from sitesym.crystals.axes import AXES_NAMES, Axes, axes_for
from sitesym.crystals.crystal import Crystal, Source
from sitesym.crystals.finders import FINDERS
from sitesym.crystals.idealisation import Idealisation
from sitesym.crystals.reading import read_crystal, read_crystals, read_each
from sitesym.crystals.reliability import Reliability, examined_symmetry
from sitesym.crystals.sites import Site, SiteAxis
from sitesym.crystals.species import Species
from sitesym.crystals.symmetry import CrystalSymmetry, find_symmetry

__all__ = [
    "AXES_NAMES",
    "FINDERS",
    "Axes",
    "Crystal",
    "CrystalSymmetry",
    "Idealisation",
    "Reliability",
    "Site",
    "SiteAxis",
    "Source",
    "Species",
    "axes_for",
    "examined_symmetry",
    "find_symmetry",
    "read_crystal",
    "read_crystals",
    "read_each",
]
