"""Distance to the nearest arrangement with inversion, and with the polar axis reversed."""

from itertools import permutations

import numpy as np
import pytest
from scipy.optimize import linear_sum_assignment
from scipy.spatial.transform import Rotation

from sitesym.crystals import Crystal, find_symmetry, read_crystal
from sitesym.crystals import pseudosymmetry as module
from sitesym.crystals.ladder import RUNGS_ANGSTROM, tolerance_ladder
from sitesym.crystals.pairing import _assigned
from sitesym.crystals.pseudosymmetry import pseudosymmetry

PEROVSKITE = np.array([[0, 0, 0], [0.5, 0.5, 0.5], [0.5, 0.5, 0], [0.5, 0, 0.5], [0, 0.5, 0.5]])
NUMBERS = [56, 22, 8, 8, 8]
CELL = np.diag([3.994, 3.994, 4.033])
#: Shifts along the polar axis of BaTiO3, fractional, of Ba, Ti, O, O, O; their mean is taken out below.
OFF_CENTRING = np.array([0.0, 0.0215, -0.0244, -0.0105, -0.0105])


def ferroelectric(scale):
    """A tetragonal perovskite and its constructed shifts along z, angstrom, adding up to zero."""
    shifts = scale * (OFF_CENTRING - OFF_CENTRING.mean())
    positions = PEROVSKITE + shifts[:, None] * np.array([0, 0, 1])
    return Crystal.from_tuple((CELL, positions, NUMBERS)), shifts * CELL[2, 2]


@pytest.mark.parametrize("scale", [1.0, 0.5, 0.2, 0.1, 0.05, 0.02, 0.01, 0.005])
def test_the_distance_is_the_constructed_displacement(scale):
    crystal, shifts = ferroelectric(scale)
    found = pseudosymmetry(find_symmetry(crystal, 1e-5))
    nearest = found.centrosymmetric
    assert nearest.largest_displacement_angstrom == pytest.approx(np.abs(shifts).max(), abs=1e-6)
    assert nearest.rms_displacement_angstrom == pytest.approx(np.sqrt((shifts**2).mean()), abs=1e-6)
    assert nearest.displacements_file == pytest.approx(np.outer(-shifts, [0, 0, 1]), abs=1e-6)
    assert (nearest.parent.symbol, nearest.checked) == ("P4/mmm", True)
    assert found.nonpolar is nearest


@pytest.mark.parametrize("scale", [1.0, 0.5, 0.2, 0.1, 0.05, 0.02, 0.01])
def test_off_centring_becomes_fragile_where_a_search_at_every_rung_says(scale):
    crystal, _ = ferroelectric(scale)
    symmetry = find_symmetry(crystal, 0.01)
    near = [length for length in RUNGS_ANGSTROM if 0.001 <= length <= 0.1]
    groups = {find_symmetry(crystal, length).space_group_number for length in near}
    assert tolerance_ladder(symmetry).fragile == (len(groups) > 1)


def test_off_centring_is_robust_when_large_and_fragile_when_small():
    flags = [tolerance_ladder(find_symmetry(ferroelectric(s)[0])).fragile for s in (1.0, 0.5, 0.2, 0.05)]
    assert flags[0] is False
    assert flags[-1] is True
    assert flags == sorted(flags)


@pytest.mark.parametrize("seed", range(5))
def test_noise_of_5_milliangstrom_is_a_distance_of_that_size(seed):
    noise = np.random.default_rng(seed).normal(size=(5, 3))
    noise *= 0.005 / np.linalg.norm(noise, axis=1)[:, None]
    crystal = Crystal.from_tuple((np.eye(3) * 3.905, PEROVSKITE + noise / 3.905, NUMBERS))
    found = pseudosymmetry(find_symmetry(crystal, 0.002))
    # here every atom is its own partner: what remains of the noise is the noise without its mean
    rest = np.linalg.norm(noise - noise.mean(axis=0), axis=1)
    assert found.centrosymmetric.largest_displacement_angstrom == pytest.approx(rest.max(), abs=1e-9)
    assert 0.003 < found.centrosymmetric.largest_displacement_angstrom < 0.01
    assert found.centrosymmetric.checked


@pytest.mark.parametrize("name", ["wurtzite_ZnO.vasp", "quartz_SiO2.vasp", "barium_titanate_BaTiO3.vasp"])
def test_moving_the_atoms_as_said_gives_the_parent(structures, name):
    crystal = read_crystal(structures / name)
    nearest = pseudosymmetry(find_symmetry(crystal)).centrosymmetric
    assert sorted(nearest.atoms) == list(range(len(crystal)))
    moves = np.zeros((len(crystal), 3))
    moves[list(nearest.atoms)] = nearest.displacements_file
    positions = crystal.positions_frac + moves @ np.linalg.inv(crystal.lattice)
    parent = find_symmetry(Crystal(crystal.lattice, positions, crystal.species), 1e-5)
    assert parent.point_group.has_inversion
    assert parent.space_group_symbol == nearest.parent.symbol
    # the centre is an inversion centre of it, and carries each atom onto its partner
    images = 2 * nearest.centre_file - positions[list(nearest.atoms)]
    misses = images - positions[list(nearest.partners)]
    assert np.abs(misses - np.rint(misses)).max() < 1e-9


def test_the_flat_wurtzite_is_the_parent_of_zinc_oxide(structures):
    crystal = read_crystal(structures / "wurtzite_ZnO.cif")
    nearest = pseudosymmetry(find_symmetry(crystal)).centrosymmetric
    # zinc and oxygen end up in one plane: each moves half of (1/2 - u) c
    u = abs(crystal.positions_frac[2, 2] - crystal.positions_frac[0, 2]) % 0.5
    gap = min(u, 0.5 - u) * np.linalg.norm(crystal.lattice[2])
    assert nearest.parent.symbol == "P6_3/mmc"
    assert nearest.largest_displacement_angstrom == pytest.approx(gap / 2, abs=1e-9)


def least_over_centres(crystal, steps):
    """Least r.m.s. displacement over a grid of inversion centres, each improved by the mean mismatch."""
    positions, inverse = crystal.positions_frac, np.linalg.inv(crystal.lattice)
    best = np.inf
    for start in np.stack(np.meshgrid(*[np.arange(steps) / steps] * 3), axis=-1).reshape(-1, 3):
        translation = start
        for _ in range(15):
            ways = positions[None] - (translation - positions)[:, None]
            ways = (ways - np.rint(ways)) @ crystal.lattice
            costs = (ways**2).sum(axis=2) + 1e6 * (
                crystal.species_indices[:, None] != crystal.species_indices
            )
            rows, columns = linear_sum_assignment(costs)
            chosen = ways[rows, columns]
            translation = translation + chosen.mean(axis=0) @ inverse
        if np.array_equal(columns[columns], rows):
            chosen = chosen - chosen.mean(axis=0)
            best = min(best, np.sqrt((chosen**2).sum(axis=1).mean()) / 2)
    return best


@pytest.mark.parametrize("seed", range(4))
def test_no_centre_of_a_grid_is_better_than_the_one_found(seed):
    rng = np.random.default_rng(seed)
    lattice = np.diag([5.0, 6.0, 7.0]) + rng.normal(scale=0.3, size=(3, 3))
    half = rng.random((3, 3))
    positions = np.vstack([half, -half]) + rng.normal(scale=0.02, size=(6, 3))
    crystal = Crystal.from_tuple((lattice, positions, [14, 14, 8, 14, 14, 8]))
    nearest = pseudosymmetry(find_symmetry(crystal)).centrosymmetric
    assert nearest.rms_displacement_angstrom == pytest.approx(least_over_centres(crystal, 6), abs=1e-6)


def test_the_distance_does_not_depend_on_origin_axes_order_or_cell(supercell):
    crystal, _ = ferroelectric(1.0)
    first = pseudosymmetry(find_symmetry(crystal)).centrosymmetric
    rng = np.random.default_rng(7)
    order = rng.permutation(5)
    numbers = [NUMBERS[atom] for atom in order]
    lattice = CELL @ Rotation.random(random_state=3).as_matrix().T
    moved = Crystal.from_tuple((lattice, crystal.positions_frac[order] + rng.random(3), numbers))
    for matrix in (np.eye(3, dtype=int), np.diag([2, 1, 1]), [[1, 1, 0], [-1, 1, 0], [0, 0, 1]]):
        cell = (lattice, np.asarray(moved.positions_frac) % 1, numbers)
        again = pseudosymmetry(find_symmetry(supercell(cell, matrix))).centrosymmetric
        assert again.rms_displacement_angstrom == pytest.approx(first.rms_displacement_angstrom, abs=1e-9)
        assert len(again.atoms) == 5


def test_a_polar_axis_can_be_reversed_without_inversion():
    # P-6m2 with tungsten at 0 and carbon at 1/3 2/3 1/2; carbon off its plane gives P3m1
    a, c, shift = 2.9, 2.84, 0.03
    lattice = [[a, 0, 0], [-a / 2, a * np.sqrt(3) / 2, 0], [0, 0, c]]
    crystal = Crystal.from_tuple((lattice, [[0, 0, 0], [1 / 3, 2 / 3, 0.5 + shift]], [74, 6]))
    symmetry = find_symmetry(crystal)
    found = pseudosymmetry(symmetry)
    assert symmetry.space_group_symbol == "P3m1"
    assert found.nonpolar.parent.symbol == "P-6m2"
    assert found.nonpolar.largest_displacement_angstrom == pytest.approx(shift * c / 2, abs=1e-9)
    assert found.nonpolar.operation.split()[0] in {"m", "2"}
    assert found.nonpolar.centre_file is None
    assert found.nonpolar.checked
    assert found.centrosymmetric.rms_displacement_angstrom > found.nonpolar.rms_displacement_angstrom


def test_what_has_inversion_or_no_polar_axis_has_no_such_distance(structures):
    rocksalt = pseudosymmetry(find_symmetry(read_crystal(structures / "rocksalt_NaCl.cif")))
    assert (rocksalt.centrosymmetric, rocksalt.nonpolar, rocksalt.note) == (None, None, "")
    quartz = pseudosymmetry(find_symmetry(read_crystal(structures / "quartz_SiO2.cif")))
    assert quartz.centrosymmetric is not None
    assert quartz.nonpolar is None


def test_a_cell_that_is_too_large_is_not_searched_and_says_so(monkeypatch):
    monkeypatch.setattr(module, "LARGEST_CELL", 4)
    found = pseudosymmetry(find_symmetry(ferroelectric(1.0)[0]))
    assert found.centrosymmetric is None
    assert "5 atoms" in found.note


@pytest.mark.parametrize("seed", range(20))
def test_the_pairing_is_its_own_inverse_and_the_cheapest_such(seed):
    """For up to five atoms against all permutations; two atoms of three left over can cost more than that."""
    rng = np.random.default_rng(seed)
    points = rng.random((5, 3))
    images = -points + rng.normal(scale=0.15, size=3)
    costs = ((images[:, None] - points[None]) ** 2).sum(axis=2)
    assert np.allclose(costs, costs.T)
    chosen = _assigned(costs)
    assert np.array_equal(chosen[chosen], np.arange(5))
    totals = [
        costs[np.arange(5), order].sum()
        for order in map(list, permutations(range(5)))
        if all(order[order[k]] == k for k in range(5))
    ]
    assert costs[np.arange(5), chosen].sum() == pytest.approx(min(totals))
