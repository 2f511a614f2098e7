"""Arrangements with inversion that are far away: no two atoms in one place, and the shortest ways."""

import json
from itertools import product
from pathlib import Path

import numpy as np
import pytest
from ase.build import bulk

from sitesym.crystals import Crystal, find_symmetry, read_crystal
from sitesym.crystals.inversion_pairing import INVERSION, shortest_ways, stays_apart
from sitesym.crystals.pairing import Arrangement, least_costly, refined
from sitesym.crystals.pseudosymmetry import pseudosymmetry

OPEN_DATA = Path(__file__).parents[1] / "data" / "opendata"
FACE_CENTRED = np.array([[0, 0.5, 0.5], [0.5, 0, 0.5], [0.5, 0.5, 0]])


def half_heusler():
    """Three elements on 0, 1/4 and 1/2 of the body diagonal of a cube of 6 angstrom; 3/4 is vacant."""
    positions = np.outer([0, 1, 2], [0.25, 0.25, 0.25])
    return Crystal.from_tuple((FACE_CENTRED * 6.0, positions, [12, 29, 51]))


def hydroxide():
    """Na, and O with H 0.97 angstrom above it, on the axis of a rhombohedral cell (invented)."""
    atoms = bulk("Na", "fcc", a=5.0)
    lattice = atoms.cell.array * [1.0, 1.0, 1.3]
    axis = lattice.sum(axis=0) / np.linalg.norm(lattice.sum(axis=0))
    places = np.outer([0.0, 4.1, 5.07], axis) @ np.linalg.inv(lattice)
    return Crystal.from_tuple((lattice, places, [11, 8, 1]))


def moved_as_said(crystal, nearest):
    """The crystal with its atoms moved; it must be primitive."""
    moves = np.zeros((len(crystal), 3))
    moves[list(nearest.atoms)] = nearest.displacements_file
    positions = crystal.positions_frac + moves @ np.linalg.inv(crystal.lattice)
    return Crystal(crystal.lattice, positions, crystal.species)


def test_zincblende_is_an_eighth_of_its_edge_away():
    """Each atom moves an eighth of the edge along it: a quarter together, from the middle of a tetrahedron to
    the middle of an edge of it, which is half of a lattice vector from the other atom."""
    crystal = Crystal.from_ase(bulk("GaAs", "zincblende", a=5.65))
    nearest = pseudosymmetry(find_symmetry(crystal)).centrosymmetric
    assert nearest.largest_displacement_angstrom == pytest.approx(5.65 / 8, abs=1e-9)
    assert nearest.rms_displacement_angstrom == pytest.approx(5.65 / 8, abs=1e-9)
    assert nearest.checked


@pytest.mark.parametrize(
    "crystal",
    [Crystal.from_ase(bulk("ZnS", "zincblende", a=5.41)), half_heusler(), hydroxide()],
    ids=["zincblende", "half-heusler", "hydroxide"],
)
def test_what_is_far_from_inversion_gets_a_parent_that_is_a_crystal(crystal):
    """Checked by another finder, on the moved atoms, at a tolerance of rounding errors."""
    nearest = pseudosymmetry(find_symmetry(crystal)).centrosymmetric
    parent = find_symmetry(moved_as_said(crystal, nearest), 1e-5)
    assert parent.point_group.has_inversion
    assert nearest.checked
    assert nearest.parent.symbol == parent.space_group_symbol


def test_atoms_that_would_meet_are_kept_apart():
    """Oxygen and hydrogen of the hydroxide are nearest to the same inversion centre."""
    crystal = hydroxide()
    positions = crystal.positions_frac
    arrangement = Arrangement(crystal.lattice, positions, (np.array([0]), np.array([1]), np.array([2])))
    meeting = refined(arrangement, INVERSION, 2 * positions[0])
    assert meeting.partners.tolist() == [0, 1, 2]
    assert not stays_apart(arrangement, meeting)
    nearest = pseudosymmetry(find_symmetry(crystal)).centrosymmetric
    assert nearest.rms_displacement_angstrom > meeting.rms
    places = moved_as_said(crystal, nearest).positions_frac
    steps = places[:, None] - places
    distances = np.linalg.norm((steps - np.rint(steps)) @ crystal.lattice, axis=2)
    assert distances[~np.eye(3, dtype=bool)].min() > 0.5


@pytest.mark.parametrize("name", ["piezoelectric", "elastic", "dielectric"])
def test_every_parent_of_the_open_structures_is_confirmed(name, tmp_path):
    path, acentric = tmp_path / "POSCAR", 0
    for line in (OPEN_DATA / f"{name}.jsonl").read_text(encoding="utf-8").splitlines():
        path.write_text(json.loads(line)["poscar"], encoding="utf-8")
        found = pseudosymmetry(find_symmetry(read_crystal(path)))
        nearest = [entry for entry in (found.centrosymmetric, found.nonpolar) if entry is not None]
        assert all(entry.checked for entry in nearest), json.loads(line)["id"]
        acentric += bool(nearest)
    assert acentric > 5


@pytest.mark.parametrize("seed", range(5))
def test_shortest_ways_are_the_shortest_of_many(seed):
    """Against all vectors up to three cells away, in cubic, face-centred and random reduced cells."""
    rng = np.random.default_rng(seed)
    skewed = np.eye(3) + rng.uniform(-0.3, 0.3, size=(3, 3))
    for lattice in (np.eye(3), FACE_CENTRED, skewed, [[1, 0, 0], [-0.5, np.sqrt(0.75), 0], [0, 0, 1.6]]):
        lattice = np.asarray(lattice)
        ways = rng.uniform(-4, 4, size=(40, 3))
        ways[:10] = np.rint(2 * ways[:10]) / 2
        many = np.array(list(product(range(-3, 4), repeat=3)))
        every = (ways - np.rint(ways))[:, None, :] + many
        least = np.linalg.norm(every @ lattice, axis=2).min(axis=1)
        shortest = shortest_ways(ways, lattice)
        assert np.linalg.norm(shortest, axis=1) == pytest.approx(least, abs=1e-12)
        steps = shortest @ np.linalg.inv(lattice) - ways
        assert steps == pytest.approx(np.rint(steps), abs=1e-9)


@pytest.mark.parametrize("seed", range(10))
def test_pairing_all_kinds_at_once_and_one_by_one_is_the_same(seed, monkeypatch):
    rng = np.random.default_rng(seed)
    half = rng.random((6, 3))
    positions = np.vstack([half, -half]) + rng.normal(scale=0.02, size=(12, 3))
    kinds = (np.array([0, 1, 6, 7]), np.array([2, 8]), np.array([3, 4, 5, 9, 10, 11]))
    arrangement = Arrangement(np.diag([5.0, 6.0, 7.0]), positions, kinds)
    together = least_costly(arrangement, INVERSION, np.zeros(3))
    monkeypatch.setattr("sitesym.crystals.pairing._FEW", 0)
    apart = least_costly(arrangement, INVERSION, np.zeros(3))
    for first, second in zip(together, apart, strict=True):
        assert np.array_equal(first, second)
