"""Two symmetry finders behind one answer, and what happens when they differ."""

import logging

import moyopy
import numpy as np
import pytest

from sitesym.crystals import Crystal, find_symmetry, read_crystal
from sitesym.crystals.finders import FINDERS
from sitesym.crystals.second_opinion import second_opinion
from sitesym.crystals.spglib_finder import setting
from sitesym.errors import SymmetryNotFoundError, UsageError


def operations_of(rotations, translations):
    """A set that is equal for equal lists of operations modulo lattice translations; 24ths are exact."""
    steps = np.rint(np.asarray(translations) * 24).astype(int) % 24
    pairs = zip(np.asarray(rotations).reshape(-1, 9).tolist(), steps.tolist(), strict=True)
    return {(*rotation, *step) for rotation, step in pairs}


@pytest.mark.parametrize("hall_numbers", [range(first, min(first + 53, 531)) for first in range(1, 531, 53)])
def test_both_libraries_mean_the_same_operations_by_every_hall_number(hall_numbers):
    for hall_number in hall_numbers:
        ours = setting(hall_number)
        theirs = moyopy.operations_from_number(
            ours.number, setting=moyopy.Setting.hall_number(hall_number), primitive=False
        )
        expected = operations_of(theirs.rotations, theirs.translations)
        assert operations_of(ours.rotations, ours.translations) == expected, hall_number


def test_a_primitive_cell_of_every_setting_has_one_lattice_point():
    for hall_number in range(1, 531):
        found = setting(hall_number)
        centring = len(found.rotations) // len(found.point_rotations)
        assert np.linalg.det(found.primitive_basis) == pytest.approx(1 / centring)
        # every centring translation is a whole combination of the basis
        inside = found.translations[found.point_indices == 0] @ np.linalg.inv(found.primitive_basis)
        assert np.abs(inside - np.rint(inside)).max() < 1e-9


@pytest.mark.parametrize("finder", FINDERS)
@pytest.mark.parametrize(
    ("name", "matrix", "symbol"),
    [
        ("GaAs", np.diag([2, 1, 1]), "-43m"),
        ("GaAs", np.diag([1, 1, 2]), "-43m"),
        ("GaAs", [[1, 1, 0], [-1, 1, 0], [0, 0, 1]], "-43m"),
        ("Si", [[2, 2, -1], [-1, 2, 2], [2, -1, 2]], "m-3m"),
        ("NaCl", np.diag([3, 1, 1]), "m-3m"),
    ],
)
def test_either_finder_gives_a_supercell_the_full_point_group(cubic, supercell, finder, name, matrix, symbol):
    one = find_symmetry(Crystal.from_tuple(cubic(name)), finder=finder)
    many = find_symmetry(supercell(cubic(name), matrix), finder=finder)
    assert many.point_group.symbol == one.point_group.symbol == symbol
    distance = np.abs(many.point_group.rotations_cart[:, None] - one.point_group.rotations_cart[None])
    assert distance.max(axis=(2, 3)).min(axis=1).max() < 1e-8
    assert [(s.multiplicity, s.symbol) for s in many.sites] == [(s.multiplicity, s.symbol) for s in one.sites]


def test_the_finders_agree_on_the_demo_structures_down_to_the_sites(structures):
    for path in [*structures.glob("*.cif"), *structures.glob("*.vasp")]:
        first = find_symmetry(read_crystal(path))
        second = find_symmetry(read_crystal(path), finder="moyo")
        assert second_opinion(first).agrees, path.name
        assert second.hall_number == first.hall_number, path.name
        described = [
            sorted(
                (site.atoms, site.multiplicity, site.point_group.symbol, len(site.axes))
                for site in symmetry.sites
            )
            for symmetry in (first, second)
        ]
        assert described[0] == described[1], path.name
        carried = second.crystal.positions_frac @ second.transformation.T + second.origin_shift
        assert np.abs(carried - second.found.conventional_positions).max() < 1e-4, path.name


def test_where_the_finders_differ_both_answers_and_their_meeting_are_given(structures):
    # moyo lowers a tolerance of 0.2 angstrom by itself until its search succeeds
    crystal = read_crystal(structures / "barium_titanate_BaTiO3.cif")
    opinion = second_opinion(find_symmetry(crystal, 0.2))
    assert opinion.differences == ("space group", "point group", "related atoms")
    assert opinion.symmetry.space_group_symbol == "P4mm"
    assert opinion.symmetry.found.tolerance_used_angstrom < 0.2
    assert (opinion.meet_angstrom, opinion.meet_in) == (0.1, "P4mm")
    back = second_opinion(find_symmetry(crystal, 0.2, "moyo"))
    assert (back.finder, back.symmetry.space_group_symbol) == ("spglib", "Pm-3m")


def test_warnings_of_the_library_reach_no_handler(cubic, supercell, caplog):
    crystal = supercell(cubic("Si"), [[2, 2, -1], [-1, 2, 2], [2, -1, 2]])
    with caplog.at_level(logging.DEBUG):
        logging.getLogger("moyo").warning("heard")
        find_symmetry(crystal, finder="moyo")
    assert [record.getMessage() for record in caplog.records] == ["heard"]


def test_an_unknown_finder_is_refused_with_the_names_of_those_there_are(cubic):
    with pytest.raises(UsageError) as caught:
        find_symmetry(Crystal.from_tuple(cubic("GaAs")), finder="third")
    assert "spglib, moyo" in caught.value.rule


def test_no_answer_of_moyo_is_a_typed_error(cubic, monkeypatch):
    def failing(*_, **__):
        raise ValueError("Primitive symmetry search failed")

    monkeypatch.setattr(moyopy, "MoyoDataset", failing)
    with pytest.raises(SymmetryNotFoundError) as caught:
        find_symmetry(Crystal.from_tuple(cubic("GaAs")), finder="moyo")
    assert "search failed" in caught.value.value
    opinion = second_opinion(find_symmetry(Crystal.from_tuple(cubic("GaAs"))))
    assert (opinion.agrees, opinion.symmetry, opinion.meet_angstrom) == (False, None, None)
