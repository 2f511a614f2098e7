"""Site symmetries of twenty structure types.

Expected: International Tables for Crystallography A, oriented symbols and multiplicities, from memory.
Letters depend on the choice of origin (those that a shift of origin exchanges are listed together).
"""

from pathlib import Path

import pytest

from sitesym.crystals import Crystal, find_symmetry, read_crystal

STRUCTURES = Path(__file__).parents[2] / "structures"

#: File, space group; for each site multiplicity, letters by choice of origin, oriented symbol.
TYPES = [
    ("diamond_C.cif", 227, {"C1": (8, "ab", "-43m")}),
    ("rocksalt_NaCl.cif", 225, {"Na1": (4, "ab", "m-3m"), "Cl1": (4, "ab", "m-3m")}),
    ("caesium_chloride_CsCl.cif", 221, {"Cs1": (1, "ab", "m-3m"), "Cl1": (1, "ab", "m-3m")}),
    ("zincblende_GaAs.cif", 216, {"Ga1": (4, "abcd", "-43m"), "As1": (4, "abcd", "-43m")}),
    ("fluorite_CaF2.cif", 225, {"Ca1": (4, "ab", "m-3m"), "F1": (8, "c", "-43m")}),
    (
        "perovskite_SrTiO3.cif",
        221,
        {"Sr1": (1, "ab", "m-3m"), "Ti1": (1, "ab", "m-3m"), "O1": (3, "cd", "4/mm.m")},
    ),
    (
        "spinel_MgAl2O4.cif",
        227,
        {"Mg1": (8, "ab", "-43m"), "Al1": (16, "cd", ".-3m"), "O1": (32, "e", ".3m")},
    ),
    ("rutile_TiO2.cif", 136, {"Ti1": (2, "ab", "m.mm"), "O1": (4, "fg", "m.2m")}),
    ("anatase_TiO2.cif", 141, {"Ti1": (4, "ab", "-4m2"), "O1": (8, "e", "2mm.")}),
    (
        "chalcopyrite_CuFeS2.cif",
        122,
        {"Cu1": (4, "ab", "-4.."), "Fe1": (4, "ab", "-4.."), "S1": (8, "d", ".2.")},
    ),
    (
        "kdp_KH2PO4.cif",
        122,
        {"P1": (4, "ab", "-4.."), "K1": (4, "ab", "-4.."), "O1": (16, "e", "1"), "H1": (8, "d", ".2.")},
    ),
    ("paratellurite_TeO2.cif", 92, {"Te1": (4, "a", "..2"), "O1": (8, "b", "1")}),
    ("corundum_Al2O3.cif", 167, {"Al1": (12, "c", "3."), "O1": (18, "e", ".2")}),
    ("calcite_CaCO3.cif", 167, {"Ca1": (6, "b", "-3."), "C1": (6, "a", "32"), "O1": (18, "e", ".2")}),
    ("ilmenite_FeTiO3.cif", 148, {"Fe1": (6, "c", "3."), "Ti1": (6, "c", "3."), "O1": (18, "f", "1")}),
    ("lithium_niobate_LiNbO3.cif", 161, {"Li1": (6, "a", "3."), "Nb1": (6, "a", "3."), "O1": (18, "b", "1")}),
    ("quartz_SiO2.cif", 152, {"Si1": (3, "ab", ".2."), "O1": (6, "c", "1")}),
    ("wurtzite_ZnO.cif", 186, {"Zn1": (2, "b", "3m."), "O1": (2, "b", "3m.")}),
    (
        "aragonite_CaCO3.cif",
        62,
        {"Ca1": (4, "c", ".m."), "C1": (4, "c", ".m."), "O1": (4, "c", ".m."), "O2": (8, "d", "1")},
    ),
    (
        "barium_titanate_BaTiO3.cif",
        99,
        {"Ba1": (1, "ab", "4mm"), "Ti1": (1, "ab", "4mm"), "O1": (1, "ab", "4mm"), "O2": (2, "c", "2mm.")},
    ),
]


@pytest.mark.parametrize(("file", "number", "expected"), TYPES, ids=[file for file, _, _ in TYPES])
def test_site_symmetries_of_the_structure_type(file, number, expected):
    symmetry = find_symmetry(read_crystal(STRUCTURES / file))
    assert symmetry.space_group_number == number
    assert {site.label for site in symmetry.sites} == set(expected)
    for site in symmetry.sites:
        multiplicity, letters, symbol = expected[site.label]
        assert (site.multiplicity, site.symbol) == (multiplicity, symbol), site.label
        assert site.wyckoff in letters, site.label


@pytest.mark.parametrize(("file", "number", "expected"), TYPES, ids=[file for file, _, _ in TYPES])
def test_a_doubled_cell_has_the_same_sites(file, number, expected):
    """Doubling a leaves multiplicity and symbol as they are: they belong to the conventional cell."""
    crystal = read_crystal(STRUCTURES / file)
    lattice = crystal.lattice * [[2], [1], [1]]
    halves = [crystal.positions_frac * [0.5, 1, 1] + [shift, 0, 0] for shift in (0, 0.5)]
    doubled = Crystal(
        lattice, [*halves[0], *halves[1]], crystal.species * 2, crystal.labels * 2, source=crystal.source
    )
    symmetry = find_symmetry(doubled)
    assert symmetry.space_group_number == number
    for site in symmetry.sites:
        multiplicity, _, symbol = expected[site.label]
        assert (site.multiplicity, site.symbol) == (multiplicity, symbol), site.label


def test_both_hands_of_quartz_have_the_same_site_symmetry():
    crystal = read_crystal(STRUCTURES / "quartz_SiO2.cif")
    mirrored = Crystal(crystal.lattice, crystal.positions_frac * [1, 1, -1], crystal.species, crystal.labels)
    symmetry = find_symmetry(mirrored)
    assert symmetry.space_group_number == 154
    assert [site.symbol for site in symmetry.sites] == [".2.", "1"]
