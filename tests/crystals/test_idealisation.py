"""How far each operation is from being exact, measured with the numbers as read."""

import numpy as np
import pytest

from sitesym.crystals import Crystal, find_symmetry, read_crystal


def largest_miss(crystal, symmetry, rotation, translation):
    """Largest distance (angstrom) from an atom's image to the nearest like atom, by trying all images."""
    lattice = symmetry.measured_lattice
    centring = symmetry.setting.translations[symmetry.setting.point_indices == 0]
    positions = crystal.positions_frac @ symmetry.transformation.T + symmetry.origin_shift
    images = positions @ rotation.T + translation
    steps = np.stack(np.meshgrid(*[np.arange(-3, 4)] * 3, indexing="ij"), axis=-1).reshape(-1, 3)
    worst = 0.0
    for kind, image in zip(crystal.species_indices, images, strict=True):
        others = positions[crystal.species_indices == kind]
        everywhere = (others[:, None, None] + steps[:, None] + centring).reshape(-1, 3)
        worst = max(worst, np.linalg.norm((everywhere - image) @ lattice, axis=1).min())
    return worst


def noisy(crystal, size, seed):
    noise = np.random.default_rng(seed).normal(size=(len(crystal), 3))
    noise *= size / np.linalg.norm(noise, axis=1)[:, None]
    positions = crystal.positions_frac + noise @ np.linalg.inv(crystal.lattice)
    return Crystal(crystal.lattice, positions, crystal.species)


@pytest.mark.parametrize("name", ["rutile_TiO2.vasp", "quartz_SiO2.vasp", "diamond_C.vasp"])
@pytest.mark.parametrize("finder", ["spglib", "moyo"])
def test_displacements_of_operations_are_those_found_by_trying_all_images(structures, name, finder):
    crystal = noisy(read_crystal(structures / name), 0.004, 1)
    symmetry = find_symmetry(crystal, 0.05, finder)
    assert symmetry.space_group_symbol == find_symmetry(read_crystal(structures / name)).space_group_symbol
    reported = symmetry.idealisation.operation_displacements_angstrom
    setting = symmetry.setting
    for index, rotation in enumerate(setting.point_rotations):
        translation = setting.translations[np.argmax(setting.point_indices == index)]
        assert reported[index] == pytest.approx(
            largest_miss(crystal, symmetry, rotation, translation), abs=1e-9
        )
    assert reported[0] == pytest.approx(0.0, abs=1e-12)
    assert 0.004 < reported.max() < 0.05


def test_the_strain_of_an_operation_is_the_change_of_length_it_makes():
    # a fourfold operation about z carries the edge of 4.000 onto that of 4.004
    crystal = Crystal.from_tuple((np.diag([4.0, 4.004, 4.3]), [[0, 0, 0], [0.5, 0.5, 0.5]], [55, 17]))
    symmetry = find_symmetry(crystal, 0.02)
    strains = dict(zip(symmetry.point_group.names, symmetry.idealisation.operation_strains, strict=True))
    assert symmetry.space_group_symbol == "P4/mmm"
    assert strains["4+ [001]"] == pytest.approx(4.004 / 4.0 - 1, abs=1e-9)
    assert strains["m [100]"] == pytest.approx(0.0, abs=1e-12)


def test_an_exact_crystal_needs_no_change(structures):
    change = find_symmetry(read_crystal(structures / "perovskite_SrTiO3.cif")).idealisation
    assert change.operation_displacements_angstrom.max() < 1e-9
    assert change.operation_strains.max() < 1e-12
