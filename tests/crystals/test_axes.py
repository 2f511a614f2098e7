"""Named axes: right-handed, stated, and in the orientation the standard asks for."""

import itertools

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from sitesym.crystals import Crystal, axes_for, find_symmetry, read_crystal
from sitesym.crystals.spglib_finder import setting
from sitesym.crystals.validation import closest_pair
from sitesym.errors import AxesError, UsageError
from sitesym.groups import PointGroup

# IEEE Std 176-1978 (from memory) puts a twofold axis (32, -42m) or a mirror normal (3m, -6m2) along x. With
# the cell of International Tables A and x || a this fails for these space groups.
X_ALONG_A_FAILS = (*range(115, 121), 149, 151, 153, 157, 159, 162, 163, 189, 190)
FIRST_SETTINGS = [
    hall for hall in range(1, 531) if hall == 1 or setting(hall).number != setting(hall - 1).number
]
CELLS = (
    (2, [[6.1, 0, 0], [-1.3, 7.7, 0], [-0.9, 1.2, 9.1]]),
    (15, [[6.1, 0, 0], [0, 7.7, 0], [-1.8, 0, 9.1]]),
    (74, [[6.1, 0, 0], [0, 7.7, 0], [0, 0, 9.1]]),
    (142, [[6.1, 0, 0], [0, 6.1, 0], [0, 0, 9.1]]),
    (194, [[6.1, 0, 0], [-3.05, 3.05 * 3**0.5, 0], [0, 0, 9.1]]),
    (230, [[9.1, 0, 0], [0, 9.1, 0], [0, 0, 9.1]]),
)


def crystal_of_setting(hall):
    """Two general orbits of unlike atoms in a setting; positions drawn with the Hall number as seed."""
    group = setting(hall)
    lattice = np.array(next(cell for last, cell in CELLS if group.number <= last))
    rng = np.random.default_rng(hall)
    numbers = [8] * len(group.rotations) + [14] * len(group.rotations)
    while True:
        positions = np.vstack([group.rotations @ rng.random(3) + group.translations for _ in range(2)])
        if closest_pair(lattice, positions, 0.4) is None:
            return Crystal.from_tuple((lattice, positions, numbers))


def same_operations(first, second):
    distance = np.abs(first[:, None] - second[None]).max(axis=(2, 3))
    return len(first) == len(second) and bool((distance.min(axis=1) < 1e-8).all())


def test_all_230_space_groups_are_in_the_standard_orientation_in_ieee_axes_and_15_are_not_in_lattice_axes():
    assert len(FIRST_SETTINGS) == 230
    not_in_lattice_axes = []
    for hall in FIRST_SETTINGS:
        symmetry = find_symmetry(crystal_of_setting(hall))
        assert symmetry.space_group_number == setting(hall).number
        standard = PointGroup.from_symbol(symmetry.point_group.symbol).rotations_cart
        ieee, lattice = (axes_for(symmetry, name).rotation_from_file for name in ("ieee", "lattice"))
        for rotation in (ieee, lattice):
            assert np.allclose(rotation @ rotation.T, np.eye(3))
            assert np.linalg.det(rotation) > 0
        assert same_operations(symmetry.point_group.rotated(ieee).rotations_cart, standard), hall
        if not same_operations(symmetry.point_group.rotated(lattice).rotations_cart, standard):
            not_in_lattice_axes.append(setting(hall).number)
        order = len(setting(hall).rotations)
        assert all(site.order * site.multiplicity == order for site in symmetry.sites)
    assert tuple(not_in_lattice_axes) == X_ALONG_A_FAILS


def test_a_seeded_turn_of_the_crystal_leaves_group_and_cell_in_ieee_axes_unchanged(structures):
    for seed, path in enumerate(sorted(structures.glob("*.cif"))):
        crystal = read_crystal(path)
        turn = Rotation.random(random_state=100 + seed).as_matrix()
        turned = Crystal(crystal.lattice @ turn.T, crystal.positions_frac, crystal.species)
        before, after = find_symmetry(crystal), find_symmetry(turned)
        first, second = axes_for(before, "ieee"), axes_for(after, "ieee")
        operations = [
            symmetry.point_group.rotated(axes.rotation_from_file).rotations_cart
            for symmetry, axes in ((before, first), (after, second))
        ]
        assert same_operations(*operations), path.name
        assert np.allclose(abs(first.lattice @ first.lattice.T), abs(second.lattice @ second.lattice.T))


def shortest_vectors(lattice, across=None):
    """Non-zero lattice vectors by length, those in the plane across an axis only where one is given."""
    steps = [np.array(s) for s in itertools.product(range(-4, 5), repeat=3) if any(s)]
    vectors = [step @ lattice for step in steps]
    if across is not None:
        vectors = [vector for vector in vectors if abs(vector @ across) < 1e-8]
    return sorted(vectors, key=np.linalg.norm)


def test_monoclinic_rule_c_shorter_than_a_beta_obtuse_z_along_c():
    # beta of the file's cell is acute and the shortest vector across the axis is a
    lattice = np.array([[4.0, 0, 0], [0, 6.0, 0], [2.9, 0, 6.5]])
    turn = Rotation.random(random_state=5).as_matrix()
    places = [[0.1, 0.2, 0.3], [-0.1, 0.7, -0.3], [0.4, 0.3, 0.15], [-0.4, 0.8, -0.15]]
    symmetry = find_symmetry(Crystal.from_tuple((lattice @ turn.T, places, [13, 13, 15, 15])))
    assert symmetry.point_group.symbol == "2"
    rotation = axes_for(symmetry, "ieee").rotation_from_file
    unique = turn @ [0, 1, 0]
    c = shortest_vectors(lattice @ turn.T, unique)[0]
    others = shortest_vectors(lattice @ turn.T, unique)
    a = next(v for v in others if np.linalg.norm(np.cross(v, c)) > 1e-6 and v @ c <= 0)
    assert abs(rotation[1] @ unique) == pytest.approx(1)
    assert abs(rotation[2] @ c) == pytest.approx(np.linalg.norm(c))
    # beta obtuse: with Z along +c the vector a has a negative Z component and a positive X component
    a = a * np.sign(rotation[0] @ a)
    assert rotation[2] @ a < 0


def test_triclinic_rule_c_shortest_z_along_c_y_normal_to_the_plane_of_a_and_c(structures):
    symmetry = find_symmetry(read_crystal(structures / "invented_triclinic_AlOF.vasp"))
    rotation = axes_for(symmetry, "ieee").rotation_from_file
    vectors = shortest_vectors(symmetry.crystal.lattice)
    c = vectors[0]
    a = next(v for v in vectors if np.linalg.norm(np.cross(v, c)) > 1e-6)
    b = next(v for v in vectors if abs(np.linalg.det([a, v, c])) > 1e-6)
    assert np.linalg.norm(c) < np.linalg.norm(a) < np.linalg.norm(b)
    assert abs(rotation[2] @ c) == pytest.approx(np.linalg.norm(c))
    assert rotation[1] @ a == pytest.approx(0, abs=1e-9)
    assert rotation[1] @ c == pytest.approx(0, abs=1e-9)
    # alpha and beta obtuse, right-handed: with c along +Z and a towards +X, both a and b point down
    c, a, b = c * np.sign(rotation[2] @ c), a * np.sign(rotation[0] @ a), b * np.sign(rotation[1] @ b)
    assert a @ c < 0
    assert b @ c < 0


@pytest.mark.parametrize("order", list(itertools.permutations(range(3))))
def test_orthorhombic_rule_c_shorter_than_a_shorter_than_b(order):
    edges = np.array([4.0, 5.0, 6.5])[list(order)]
    places = np.array([[0.1, 0.2, 0.3]]) * [[1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]]
    symmetry = find_symmetry(Crystal.from_tuple((np.diag(edges), places, [26] * 4)))
    assert symmetry.point_group.system == "orthorhombic"
    cell = axes_for(symmetry, "ieee").lattice
    along = [float(np.linalg.norm(cell[np.argmax(np.abs(cell[:, i]))])) for i in range(3)]
    assert along[2] < along[0] < along[1]


def test_the_twofold_axis_of_mm2_is_z_whatever_its_length(structures):
    symmetry = find_symmetry(read_crystal(structures / "potassium_niobate_KNbO3.cif"))
    axes = axes_for(symmetry, "ieee")
    polar = axes.rotation_from_file @ symmetry.point_group.polar_directions[0]
    assert np.allclose(np.abs(polar), [0, 0, 1])
    # a (3.973 angstrom) is shorter than b, so X || a
    assert np.allclose(np.abs(axes.rotation_from_file[0]), [1, 0, 0])


def test_equal_edges_of_an_orthorhombic_cell_are_said_to_leave_the_order_open(structures):
    symmetry = find_symmetry(read_crystal(structures / "cristobalite_AlPO4.vasp"))
    assert "order is open" in axes_for(symmetry, "ieee").note
    assert axes_for(symmetry, "ieee").edition == "IEEE Std 176-1978"


def test_only_edges_that_the_rules_order_are_compared():
    four = np.array([[0.1, 0.2, 0.3], [0.9, 0.8, 0.3], [0.1, 0.8, 0.3], [0.9, 0.2, 0.3]])
    polar = Crystal.from_tuple((np.diag([5.0, 6.0, 5.0]), [*four, [0.0, 0.0, 0.75]], [8] * 4 + [22]))
    assert find_symmetry(polar).point_group.symbol == "mm2"
    assert "order is open" not in axes_for(find_symmetry(polar), "ieee").note
    skew = np.array([[5.0, 0, 0], [0, 6.0, 0], [5 * np.cos(1.7), 0, 5 * np.sin(1.7)]])
    places = [[0.1, 0.2, 0.3], [-0.1, 0.2, -0.3], [0.23, 0.61, 0.41], [-0.23, 0.61, -0.41]]
    monoclinic = find_symmetry(Crystal.from_tuple((skew, places, [13, 13, 15, 15])))
    assert monoclinic.point_group.symbol == "2"
    assert "order is open" in axes_for(monoclinic, "ieee").note


def test_file_axes_are_the_files_and_say_where_they_come_from(structures):
    cif = axes_for(find_symmetry(read_crystal(structures / "quartz_SiO2.cif")), "file")
    vasp = axes_for(find_symmetry(read_crystal(structures / "quartz_SiO2.vasp")), "file")
    assert np.array_equal(cif.rotation_from_file, np.eye(3))
    assert "a CIF gives no Cartesian axes" in cif.note
    assert "source gives the cell vectors" in vasp.note


def test_given_axes_are_scaled_made_exact_and_refused_when_they_are_no_frame(structures):
    symmetry = find_symmetry(read_crystal(structures / "quartz_SiO2.cif"))
    axes = axes_for(symmetry, "given", [[1, 1, 0], [-1, 1, 0], [0, 0, 2.0004]])
    half = 0.5**0.5
    assert np.allclose(axes.rotation_from_file, [[half, half, 0], [-half, half, 0], [0, 0, 1]])
    left_handed = [[0, 1, 0], [1, 0, 0], [0, 0, 1]]
    skew = [[1, 0.1, 0], [0, 1, 0], [0, 0, 1]]
    for matrix in (left_handed, skew, np.zeros((3, 3)), np.eye(2), [["a"] * 3] * 3, np.eye(3) * np.nan):
        with pytest.raises(AxesError):
            axes_for(symmetry, "given", matrix)


def test_unknown_names_and_a_matrix_without_its_name_are_usage_errors(structures):
    symmetry = find_symmetry(read_crystal(structures / "quartz_SiO2.cif"))
    for name, matrix in (("crystal", None), ("given", None), ("file", np.eye(3))):
        with pytest.raises(UsageError):
            axes_for(symmetry, name, matrix)
