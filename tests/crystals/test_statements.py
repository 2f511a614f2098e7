"""Statements of symmetry in a CIF: which of them counts, and what happens when they disagree."""

import numpy as np
import pytest

from sitesym.crystals import find_symmetry, read_crystal, read_each
from sitesym.crystals.cif_settings import (
    setting_of_hall,
    setting_of_triplets,
    settings_of_name,
    settings_of_number,
    type_number,
)
from sitesym.crystals.operations import xyz_text
from sitesym.errors import ReadingError, SpaceGroupStatementError, UsageError
from sitesym.reports.sites import crystal_remarks

CELL = "_cell_length_a {0}\n_cell_length_b {1}\n_cell_length_c {2}\n" + (
    "_cell_angle_alpha {3}\n_cell_angle_beta {4}\n_cell_angle_gamma {5}\n"
)
ORTHOGONAL = CELL.format(5, 6, 7, 90, 90, 90)
SITE = "loop_\n_atom_site_label\n_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\n{}"
GENERAL = SITE.format("Na1 0.11 0.23 0.37")
HM, HALL, NUMBER = (
    "_space_group_name_H-M_alt '{}'",
    '_space_group_name_Hall "{}"',
    "_space_group_IT_number {}",
)
P21 = "loop_\n_space_group_symop_operation_xyz\nx,y,z\n-x,y+1/2,-z"


@pytest.fixture
def read(tmp_path):
    def read_text(*parts, **choices):
        path = tmp_path / "test.cif"
        path.write_text("data_test\n" + "\n".join(parts) + "\n", encoding="utf-8")
        return read_crystal(path, **choices)

    return read_text


@pytest.mark.parametrize(
    ("statements", "readings"),
    [
        ((P21, HALL.format("P 2y")), ("the list of operations means P 1 21 1", "P 2y means P 1 2 1")),
        ((P21, HM.format("P 2")), ("P 1 21 1 (number 4)", "H-M symbol P 2 means P 1 2 1")),
        ((P21, NUMBER.format(5)), ("P 1 21 1 (number 4)", "number 5 means C 1 2 1")),
        ((HALL.format("P 2yb"), HM.format("P 1 1 21")), ("Hall symbol P 2yb", "P 1 1 21 (number 4)")),
        ((HM.format("P 2 2 2"), NUMBER.format(17)), ("P 2 2 2 (number 16)", "number 17")),
        ((HM.format("P 21 21 21"), NUMBER.format(5)), ("P 21 21 21 (number 19)", "number 5")),
    ],
)
def test_two_statements_that_differ_are_an_error_that_prints_both_and_how_to_choose(
    read, statements, readings
):
    with pytest.raises(SpaceGroupStatementError) as caught:
        read(ORTHOGONAL, *statements, GENERAL)
    assert all(reading in caught.value.value for reading in readings)
    assert "--symmetry-from" in caught.value.next_step


def test_the_statement_to_believe_can_be_chosen(read):
    parts = (ORTHOGONAL, P21, HALL.format("P 2 2"), HM.format("P 1"), NUMBER.format(25), GENERAL)
    counts = {name: len(read(*parts, symmetry_from=name)) for name in ("operations", "hall", "hm")}
    assert counts == {"operations": 2, "hall": 4, "hm": 1}
    # 25 has three settings in an orthogonal cell, which the number alone leaves open
    with pytest.raises(SpaceGroupStatementError, match="without its setting"):
        read(*parts, symmetry_from="number")
    with pytest.raises(UsageError):
        read(*parts, symmetry_from="guess")


def test_a_statement_that_the_file_does_not_make_cannot_be_chosen(read):
    with pytest.raises(SpaceGroupStatementError, match="does not make") as caught:
        read(ORTHOGONAL, P21, GENERAL, symmetry_from="hall")
    assert caught.value.rule == "statements of this file: operations"


def test_statements_that_agree_are_read_by_the_first(read):
    crystal = read(ORTHOGONAL, P21, HALL.format("P 2yb"), HM.format("P 21"), NUMBER.format(4), GENERAL)
    assert len(crystal) == 2
    assert crystal.source.part == "data block test; symmetry from the list of operations"
    assert crystal.remarks == ()


def test_an_unknown_name_beside_operations_is_left_out_with_a_remark(read):
    crystal = read(ORTHOGONAL, P21, HM.format("P twenty-one"), GENERAL)
    assert len(crystal) == 2
    assert crystal.remarks == ("the H-M symbol is not known and is not compared: 'P twenty-one'",)


def test_operations_of_a_shifted_origin_agree_with_the_name_of_their_group(read):
    shifted = "loop_\n_space_group_symop_operation_xyz\nx,y,z\n-x+1/4,y+1/2,-z+1/3"
    assert len(read(ORTHOGONAL, shifted, HM.format("P 21"), NUMBER.format(4), GENERAL)) == 2
    with pytest.raises(SpaceGroupStatementError, match="contradicts itself"):
        read(ORTHOGONAL, shifted, HM.format("P 2"), GENERAL)


@pytest.mark.parametrize(
    ("cell", "symbol", "name"),
    [
        ((5, 6, 7, 90, 98, 90), "P 21/m", "P 1 21/m 1"),
        ((5, 6, 7, 90, 90, 98), "P 21/m", "P 1 1 21/m"),
        ((5, 6, 7, 98, 90, 90), "P 21/m", "P 21/m 1 1"),
        ((5, 6, 7, 90, 90, 98), "P b", "P 1 1 b"),
    ],
)
def test_the_cell_tells_the_unique_axis_of_a_short_monoclinic_symbol(read, cell, symbol, name):
    crystal = read(CELL.format(*cell), HM.format(symbol), GENERAL)
    assert crystal.source.part.endswith(name)
    assert crystal.remarks == ()


def test_a_short_monoclinic_symbol_in_an_orthogonal_cell_means_axis_b_and_says_so(read):
    crystal = read(ORTHOGONAL, HM.format("P 21"), GENERAL)
    assert np.allclose(crystal.positions_frac[1], [0.89, 0.73, 0.63])
    assert "names no unique axis" in crystal.remarks[0]


def test_a_glide_plane_e_that_leaves_the_axes_open_is_an_error_that_lists_them(read):
    with pytest.raises(SpaceGroupStatementError) as caught:
        read(ORTHOGONAL, HM.format("C m m e"), GENERAL)
    assert "C m m a, C m m b" in caught.value.value
    assert len(read(ORTHOGONAL, HM.format("C m c e"), GENERAL)) == 16


@pytest.mark.parametrize(
    ("symbol", "number"),
    [("F 4_1/d -3 2/m", 227), ("P 2/m 2/m 2/m", 47), ("P6_3/mmc", 194), ("p 21/c", 14), ("I a 3 d", 230)],
)
def test_spellings_of_a_symbol(symbol, number):
    assert {setting.number for setting in settings_of_name(symbol)} == {number}


@pytest.mark.parametrize(
    "triplet", ["x,x,z", "x/2,y,z", "2x,y,z", "x,y", "x+1/5,y,z", "x,y,z,t", "x-1.5y,y,z"]
)
def test_what_is_no_operation_is_refused(triplet):
    with pytest.raises(SpaceGroupStatementError, match="cannot be read"):
        setting_of_triplets(("x,y,z", triplet))


def test_the_type_of_operations_in_no_table_is_found():
    # P 4_2/m n m described in the cell a+b, -a+b, c is no tabulated setting (C-centred)
    tabulated = setting_of_hall("-P 4n 2n")
    change = np.array([[1, -1, 0], [1, 1, 0], [0, 0, 1]])
    texts = set()
    for w, t in zip(tabulated.rotations, tabulated.translations, strict=True):
        for lattice_step in ([0, 0, 0], [1, 0, 0]):
            rotation = np.linalg.inv(change) @ w @ change
            shift = np.linalg.inv(change) @ (t + lattice_step) % 1.0
            texts.add(xyz_text(np.rint(rotation).astype(np.int64), shift))
    setting = setting_of_triplets(tuple(sorted(texts)))
    assert setting.name == ""
    assert len(setting.rotations) == 32
    assert type_number(setting, np.diag([4.6 * np.sqrt(2), 4.6 * np.sqrt(2), 2.95])) == 136


def test_every_number_has_the_settings_of_its_group():
    assert [len(settings_of_number(str(number))) > 0 for number in range(1, 231)] == [True] * 230
    assert {setting.number for number in (1, 62, 230) for setting in settings_of_number(str(number))} == {
        1,
        62,
        230,
    }


def test_declared_symmetry_below_the_found_one_is_a_possible_missed_symmetry(read):
    sites = SITE.format("Cs1 0 0 0\nCl1 0.5 0.5 0.5")
    low = find_symmetry(read(CELL.format(4.1, 4.1, 4.1, 90, 90, 90), HM.format("P 4/m m m"), sites))
    (remark,) = crystal_remarks(low)
    assert remark.startswith("the file declares P 4/m m m, Pm-3m is found at 0.01 angstrom, with 3 times")
    assert remark.endswith("possible missed symmetry")
    same = find_symmetry(read(CELL.format(4.1, 4.1, 4.1, 90, 90, 90), HM.format("P m -3 m"), sites))
    assert crystal_remarks(same) == []


def test_declared_symmetry_of_a_supercell_counts_operations_for_the_same_volume(read):
    cell = CELL.format(4.1, 4.1, 8.2, 90, 90, 90)
    sites = SITE.format("Cs1 0 0 0\nCl1 0.5 0.5 0.25\nCs2 0 0 0.5")
    (remark,) = crystal_remarks(find_symmetry(read(cell, HM.format("P 4/m m m"), sites)))
    assert "with 6 times as many operations" in remark


def test_declared_symmetry_above_the_found_one_is_reported(read):
    cell = CELL.format(4.1, 4.11, 4.1, 90, 90, 90)
    crystal = read(cell, HM.format("P m -3 m"), SITE.format("Cs1 0 0 0\nCl1 0.5 0.5 0.5"))
    (remark,) = crystal_remarks(find_symmetry(crystal, 1e-4))
    assert "P4/mmm is found at 0.0001 angstrom, with only 1 in 3 of its operations" in remark


@pytest.mark.parametrize(
    ("formula", "units", "remark"),
    [
        ("Cs Cl", 1, None),
        ("Cl1 Cs1", "?", None),
        ("Cs2 Cl2", "?", None),
        ("Cs Cl", 4, "the atoms of the cell are Cl1 Cs1, the file states formula x Z = Cl1 Cs1 x 4"),
        (
            "Cs Cl H2 O",
            1,
            "the atoms of the cell are Cl1 Cs1, the file states formula x Z = Cl1 Cs1 H2 O1 x 1",
        ),
        ("Cs Br", "?", "the atoms of the cell are Cl1 Cs1, the file states formula Br1 Cs1"),
        ("'caesium chloride'", 1, None),
        ("Cs.", 1, None),
    ],
)
def test_the_atoms_are_counted_against_formula_and_units(read, formula, units, remark):
    crystal = read(
        CELL.format(4.1, 4.1, 4.1, 90, 90, 90),
        HM.format("P m -3 m"),
        f'_chemical_formula_sum "{formula}"\n_cell_formula_units_Z {units}',
        SITE.format("Cs1 0 0 0\nCl1 0.5 0.5 0.5"),
    )
    assert crystal.remarks == (() if remark is None else (remark,))


def test_tags_of_the_newer_dictionary_are_read(read):
    text = (
        "\n".join([ORTHOGONAL, P21, GENERAL])
        .replace("_cell_", "_cell.")
        .replace("_atom_site_", "_atom_site.")
    )
    crystal = read(text.replace("_space_group_symop_", "_space_group_symop."))
    assert len(crystal) == 2


def test_a_block_without_atoms_is_named_and_a_block_can_be_chosen(tmp_path):
    path = tmp_path / "three.cif"
    block = f"{ORTHOGONAL}\n{P21}\n"
    site = SITE.format("Na1 0.1 0.2 0.3\n")
    path.write_text(f"data_global\n_journal x\ndata_one\n{block}{site}data_two\n{block}{site}")
    crystal = read_crystal(path, block="two")
    assert crystal.source.part.startswith("data block two")
    assert crystal.remarks == ("data block global lists no atoms",)
    for name in ("three", "global"):
        with pytest.raises(ReadingError):
            read_crystal(path, block=name)
    assert read_crystal(path, frame=2).source.part.startswith("data block two")
    assert read_crystal(path, frame="last").source.part.startswith("data block two")


def test_a_faulty_block_does_not_hide_the_others(tmp_path):
    path = tmp_path / "two.cif"
    good = f"{ORTHOGONAL}\n{P21}\n{GENERAL}\n"
    path.write_text(f"data_bad\n{ORTHOGONAL}\n{GENERAL}\ndata_good\n{good}")
    (first, error), (second, crystal) = read_each(path)
    assert (first, error.code, error.file) == ("data block bad", "space-group-statement", str(path))
    assert (second, len(crystal)) == ("data block good", 2)
