"""Sites: orbits of the full space group, site groups from operations, labels and axes."""

from dataclasses import replace

import numpy as np
import pytest

from sitesym.crystals import Crystal, find_symmetry, read_crystal
from sitesym.crystals.sites import build_sites
from sitesym.crystals.spglib_finder import setting
from sitesym.errors import SymmetryError, UsageError
from sitesym.groups import PointGroup


def class_of_oriented_symbol(symbol):
    """Point-group class of an oriented symbol: the symbol without dots, or another spelling of it."""
    bare = symbol.replace(".", "")
    known = {
        "2mm": "mm2",
        "m2m": "mm2",
        "mm": "mm2",
        "22": "222",
        "4/mmm": "4/mmm",
        "-4m2": "-42m",
        "-62m": "-6m2",
    }
    return PointGroup.from_symbol(known.get(bare, bare)).symbol


def test_classes_of_site_groups_agree_with_the_finders_symbols_and_obey_orbit_stabiliser(structures):
    paths = sorted(path for path in structures.glob("*.*") if path.suffix in (".cif", ".vasp"))
    assert len(paths) > 30
    for path in paths:
        symmetry = find_symmetry(read_crystal(path))
        order = len(setting(symmetry.hall_number).rotations)
        for site in symmetry.sites:
            assert site.point_group.symbol == class_of_oriented_symbol(site.symbol), (path.name, site.label)
            assert site.order * site.multiplicity == order, (path.name, site.label)


def test_site_operations_leave_the_position_and_are_listed_like_the_group_elements(structures):
    for name in ("spinel_MgAl2O4.cif", "anatase_TiO2.cif", "corundum_Al2O3.cif"):
        symmetry = find_symmetry(read_crystal(structures / name))
        columns = symmetry.conventional_lattice.T
        for site in symmetry.sites:
            images = site.rotations @ site.position_frac + site.translations
            assert np.abs(images - site.position_frac).max() < 1e-9
            cart = columns @ site.rotations @ np.linalg.inv(columns)
            assert np.allclose(cart, site.point_group.rotations_cart)


def test_the_multiplicity_is_the_number_of_distinct_images_in_the_conventional_cell(structures):
    for name in ("spinel_MgAl2O4.cif", "calcite_CaCO3.cif", "kdp_KH2PO4.cif", "zincblende_GaAs.vasp"):
        symmetry = find_symmetry(read_crystal(structures / name))
        for site in symmetry.sites:
            images = symmetry.setting.rotations @ site.position_frac + symmetry.setting.translations
            distinct = []
            for image in images:
                apart = [image - other for other in distinct]
                if all(np.abs(step - np.rint(step)).max() > 1e-6 for step in apart):
                    distinct.append(image)
            assert len(distinct) == site.multiplicity, (name, site.label)


def test_axes_of_the_perovskite_oxygen_lie_where_its_bonds_do(structures):
    symmetry = find_symmetry(read_crystal(structures / "perovskite_SrTiO3.cif"))
    site = symmetry.site("O1")
    assert site.symbol == "4/mm.m"
    four = [axis for axis in site.axes if axis.order == 4]
    # the representative is at (1/2, 0, 0), between two Ti along a
    assert {axis.symbol for axis in four} == {"4", "-4"}
    assert all(axis.direction_lattice == "[100]" for axis in four)
    assert np.allclose(np.abs(four[0].direction_file), [1, 0, 0])
    assert site.has_inversion
    assert site.has_mirror
    assert not site.is_polar


def test_the_polar_axis_of_a_site_turns_with_the_file(structures):
    crystal = read_crystal(structures / "wurtzite_ZnO.cif")
    cyclic = np.array([[0.0, 0, 1], [1, 0, 0], [0, 1, 0]])
    turned = Crystal(crystal.lattice @ cyclic.T, crystal.positions_frac, crystal.species)
    for site in find_symmetry(turned).sites:
        assert site.is_polar
        assert np.allclose(np.abs(site.point_group.polar_directions), [[1, 0, 0]])


def test_a_site_is_found_by_its_own_label_and_by_that_of_any_of_its_atoms(structures):
    symmetry = find_symmetry(read_crystal(structures / "barium_titanate_BaTiO3.vasp"))
    assert [site.label for site in symmetry.sites] == ["Ba1", "Ti1", "O1", "O2"]
    assert symmetry.site("O3") is symmetry.site("O2")
    with pytest.raises(UsageError) as caught:
        symmetry.site("Pb1")
    assert "Ba1, Ti1, O1, O2" in caught.value.rule


def test_an_inconsistent_answer_of_a_finder_is_an_error(structures):
    symmetry = find_symmetry(read_crystal(structures / "perovskite_SrTiO3.cif"))
    mixed = replace(symmetry.found, orbits=np.where(symmetry.found.orbits == 1, 0, symmetry.found.orbits))
    assert mixed.multiplicities.tolist() == [2, 2, 3, 3, 3]
    with pytest.raises(SymmetryError) as caught:
        build_sites(symmetry.crystal, mixed, symmetry.conventional_lattice, symmetry.point_group)
    assert "Sr1" in str(caught.value)
