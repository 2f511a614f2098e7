"""Space group, full point group and conventional cell of a crystal."""

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from sitesym.crystals import Crystal, find_symmetry, read_crystal
from sitesym.errors import SymmetryError, SymmetryNotFoundError, UsageError
from sitesym.groups import PointGroup


def same_operations(first, second):
    """Whether two sets of Cartesian matrices are equal up to their order."""
    distance = np.abs(first[:, None] - second[None]).max(axis=(2, 3))
    return len(first) == len(second) and bool((distance.min(axis=1) < 1e-8).all())


@pytest.mark.parametrize(
    ("name", "matrix", "symbol"),
    [
        ("GaAs", np.eye(3, dtype=int), "-43m"),
        ("GaAs", np.diag([2, 1, 1]), "-43m"),
        ("GaAs", np.diag([1, 1, 2]), "-43m"),
        ("GaAs", [[1, 1, 0], [-1, 1, 0], [0, 0, 1]], "-43m"),
        ("Si", [[2, 2, -1], [-1, 2, 2], [2, -1, 2]], "m-3m"),
        ("NaCl", np.diag([3, 1, 1]), "m-3m"),
    ],
)
def test_a_supercell_has_the_point_group_of_its_crystal_in_the_same_axes(
    cubic, supercell, name, matrix, symbol
):
    one = find_symmetry(Crystal.from_tuple(cubic(name)))
    many = find_symmetry(supercell(cubic(name), matrix))
    assert many.point_group.symbol == one.point_group.symbol == symbol
    assert same_operations(many.point_group.rotations_cart, one.point_group.rotations_cart)
    assert [(s.multiplicity, s.symbol, s.order) for s in many.sites] == [
        (s.multiplicity, s.symbol, s.order) for s in one.sites
    ]
    atoms = sorted(atom for site in many.sites for atom in site.atoms)
    assert atoms == list(range(len(many.crystal)))


def test_a_monoclinic_crystal_with_three_right_angles_keeps_its_unique_axis():
    # aluminium and phosphorus in turn along the axis of P4_12_12 would give C222_1; across it, P2_1 along z
    position = np.array([0.13, 0.21, 0.17])
    operations = [(np.diag([1, 1, 1]), [0, 0, 0]), (np.diag([-1, -1, 1]), [0, 0, 0.5])]
    places = [w @ (position + k * np.array([0.31, 0.22, 0.4])) + t for k in (0, 1) for w, t in operations]
    crystal = Crystal.from_tuple((np.diag([5.0, 6.1, 7.3]), places, [13, 13, 15, 15]))
    symmetry = find_symmetry(crystal)
    assert symmetry.space_group_symbol == "P2_1"
    (axis,) = [element.axis for element in symmetry.point_group.elements if element.axis is not None]
    assert np.allclose(np.abs(axis), [0, 0, 1])


def test_a_turned_crystal_has_the_turned_group(structures):
    for seed, path in enumerate(sorted(structures.glob("*.cif"))):
        crystal = read_crystal(path)
        turn = Rotation.random(random_state=seed).as_matrix()
        turned = Crystal(crystal.lattice @ turn.T, crystal.positions_frac, crystal.species)
        before, after = find_symmetry(crystal), find_symmetry(turned)
        assert after.space_group_number == before.space_group_number, path.name
        expected = before.point_group.rotated(turn).rotations_cart
        assert same_operations(after.point_group.rotations_cart, expected), path.name
        assert [site.symbol for site in after.sites] == [site.symbol for site in before.sites]


def test_every_operation_maps_the_crystal_onto_itself(structures):
    """A point operation, with a translation that carries atom 1 to a like atom, finds every atom."""
    for name in (
        "quartz_SiO2.cif",
        "barium_titanate_BaTiO3.vasp",
        "zincblende_GaAs_1x1x2.vasp",
        "pzt_PbZrTiO3.cif",
    ):
        crystal = read_crystal(structures / name)
        symmetry = find_symmetry(crystal)
        conventional = symmetry.conventional_lattice
        cart = crystal.positions_frac @ crystal.lattice
        cell = np.linalg.inv(conventional)
        kinds = crystal.species_indices
        # Positions modulo the centred conventional cell, not the supercell, are what the crystal repeats.
        centring = [t for w, t in zip(symmetry.setting.rotations, symmetry.setting.translations, strict=True)
                    if np.array_equal(w, np.eye(3))]  # fmt: skip
        for rotation in symmetry.point_group.rotations_cart:
            images = cart @ rotation.T
            found = False
            for target in np.flatnonzero(kinds == kinds[0]):
                moved = images + (cart[target] - images[0])
                difference = (moved[:, None] - cart[None]) @ cell
                on_atom = np.zeros(difference.shape[:2], dtype=bool)
                for translation in centring:
                    rest = difference - translation
                    rest = (rest - np.rint(rest)) @ conventional
                    on_atom |= np.linalg.norm(rest, axis=2) < 1e-3
                found |= bool((on_atom & (kinds[:, None] == kinds[None])).any(axis=1).all())
            assert found, name


def test_transformation_and_shift_carry_the_file_to_the_conventional_cell(structures):
    for path in sorted(structures.glob("*.*")):
        if path.suffix not in (".cif", ".vasp"):
            continue
        symmetry = find_symmetry(read_crystal(path))
        crystal = symmetry.crystal
        carried = crystal.positions_frac @ symmetry.transformation.T + symmetry.origin_shift
        assert np.abs(carried - symmetry.found.conventional_positions).max() < 1e-4, path.name
        assert np.allclose(
            symmetry.transformation.T @ symmetry.conventional_lattice, crystal.lattice, atol=1e-6
        )


def test_idealising_makes_operations_orthogonal_and_reports_what_it_changed():
    strained = np.diag([4.0, 4.002, 3.999])
    symmetry = find_symmetry(Crystal.from_tuple((strained, [[0, 0, 0], [0.5, 0.5, 0.5005]], [55, 17])), 0.02)
    rotations = symmetry.point_group.rotations_cart
    assert symmetry.point_group.symbol == "m-3m"
    assert np.abs(rotations @ np.swapaxes(rotations, 1, 2) - np.eye(3)).max() < 1e-10
    # edges become the root mean square edge; the strain of the longest one is known
    mean = np.sqrt((np.diag(strained) ** 2).mean())
    assert symmetry.idealisation.largest_strain == pytest.approx(1 - mean / 4.002, rel=1e-2)
    assert symmetry.idealisation.orthogonality_error == pytest.approx((4.002 / 3.999) ** 2 - 1, rel=1e-6)
    assert 1e-4 < symmetry.idealisation.largest_shift_angstrom < 2.1e-3


def test_a_left_handed_cell_gives_a_right_handed_conventional_cell(cubic):
    lattice, positions, numbers = cubic("GaAs")
    symmetry = find_symmetry(Crystal.from_tuple((lattice[[1, 0, 2]], positions[:, [1, 0, 2]], numbers)))
    assert symmetry.point_group.symbol == "-43m"
    assert np.linalg.det(symmetry.conventional_lattice) > 0
    straight = find_symmetry(Crystal.from_tuple(cubic("GaAs")))
    assert same_operations(symmetry.point_group.rotations_cart, straight.point_group.rotations_cart)


@pytest.mark.parametrize("tolerance", [0.0, -1.0, float("nan"), float("inf")])
def test_a_tolerance_that_is_no_length_is_refused(cubic, tolerance):
    with pytest.raises(UsageError):
        find_symmetry(Crystal.from_tuple(cubic("GaAs")), tolerance)


def test_a_tolerance_beyond_the_distances_of_atoms_is_a_typed_error(cubic):
    with pytest.raises((SymmetryNotFoundError, SymmetryError)):
        _ = find_symmetry(Crystal.from_tuple(cubic("GaAs")), 5.0).sites


def test_tetragonal_barium_titanate_becomes_cubic_between_a_tenth_and_a_fifth_of_an_angstrom(structures):
    crystal = read_crystal(structures / "barium_titanate_BaTiO3.cif")
    symbols = [find_symmetry(crystal, tolerance).space_group_symbol for tolerance in (1e-5, 0.01, 0.1, 0.2)]
    assert symbols == ["P4mm", "P4mm", "P4mm", "Pm-3m"]


def test_a_group_in_another_lattice_is_the_one_built_there_and_a_lattice_without_the_symmetry_is_refused():
    cubic_group = PointGroup.from_symbol("m-3m")
    moved = cubic_group.in_lattice(np.eye(3) * 4.2)
    built = PointGroup.from_fractional(cubic_group.rotations_frac, np.eye(3) * 4.2)
    assert np.allclose(moved.rotations_cart, built.rotations_cart, atol=1e-12)
    assert np.array_equal(moved.product_table, built.product_table)
    with pytest.raises(SymmetryError):
        cubic_group.in_lattice(np.diag([4.0, 4.0, 4.1]))
    with pytest.raises(SymmetryError):
        PointGroup.from_cartesian(np.eye(3)[None]).in_lattice(np.eye(3))
