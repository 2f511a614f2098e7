"""Reading CIF: symmetry statements, special positions, mixed sites, and the traps of the text."""

import numpy as np
import pytest

from sitesym.crystals import find_symmetry, read_crystal, read_crystals
from sitesym.errors import ReadingError

CELL = "_cell_length_a {0}\n_cell_length_b {1}\n_cell_length_c {2}\n" + (
    "_cell_angle_alpha {3}\n_cell_angle_beta {4}\n_cell_angle_gamma {5}\n"
)
HEXAGONAL = CELL.format(3.25, 3.25, 5.207, 90, 90, 120)
CUBIC = CELL.format(3.567, 3.567, 3.567, 90, 90, 90)
COLUMNS = "loop_\n_atom_site_label\n_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\n"
OCCUPIED = COLUMNS.replace("loop_\n", "loop_\n_atom_site_occupancy\n")


@pytest.fixture
def read(tmp_path):
    def read_text(*parts, encoding="utf-8"):
        path = tmp_path / "test.cif"
        path.write_bytes(("data_test\n" + "\n".join(parts) + "\n").encode(encoding))
        return read_crystal(path)

    return read_text


def name(symbol):
    return f"_symmetry_space_group_name_H-M '{symbol}'"


@pytest.mark.parametrize("symbol", ["P 63 m c", "P63mc", "P 1"])
def test_rounded_thirds_of_wurtzite_give_four_atoms(read, symbol):
    sites = ["Zn1 0.333 0.667 0", "O1 0.333 0.667 0.382"]
    if symbol == "P 1":
        sites += ["Zn2 0.667 0.333 0.5", "O2 0.667 0.333 0.882"]
    crystal = read(HEXAGONAL, name(symbol), COLUMNS, *sites)
    assert len(crystal) == 4
    assert find_symmetry(crystal, 0.02).space_group_symbol == "P6_3mc"


def test_the_move_onto_a_special_position_is_reported_with_its_length(read):
    crystal = read(HEXAGONAL, name("P 63 m c"), COLUMNS, "Zn1 0.333 0.667 0", "O1 0.333 0.667 0.382")
    # (0.333, 0.667) is (1/3, 2/3) + (-1, 1)/3000, of length sqrt(3) a / 3000
    assert (
        crystal.remarks[0]
        == f"site Zn1 moved by {np.sqrt(3) * 3.25 / 3000:.4f} angstrom onto its special position"
    )
    assert np.allclose(crystal.positions_frac[0], [1 / 3, 2 / 3, 0], atol=1e-12)


@pytest.mark.parametrize(
    ("statement", "position"),
    [
        (name("F d -3 m:1"), 0),
        (name("F d -3 m S"), 0),
        (name("F d -3 m:2"), 0.125),
        (name("F d -3 m Z"), 0.125),
        ("_space_group_name_Hall 'F 4d 2 3 -1d'", 0),
        ("_symmetry_space_group_name_Hall '-F 4vw 2vw 3'", 0.125),
    ],
)
def test_diamond_has_eight_atoms_in_every_spelling_that_states_its_origin(read, statement, position):
    crystal = read(CUBIC, statement, COLUMNS, f"C1 {position} {position} {position}")
    assert len(crystal) == 8
    assert find_symmetry(crystal).space_group_number == 227


@pytest.mark.parametrize("statement", [name("F d 3 m"), name("F d -3 m"), "_space_group_IT_number 227"])
def test_an_origin_that_is_not_stated_is_an_error_that_lists_both(read, statement):
    with pytest.raises(ReadingError) as caught:
        read(CUBIC, statement, COLUMNS, "C1 0 0 0")
    assert caught.value.code == "space-group-statement"
    assert "F d -3 m:1, F d -3 m:2" in caught.value.value


@pytest.mark.parametrize(("cell", "count"), [((4.0, 4.0, 10.0, 90, 90, 120), 3), ((4.0,) * 3 + (60,) * 3, 1)])
def test_the_cell_tells_rhombohedral_from_hexagonal_axes(read, cell, count):
    assert len(read(CELL.format(*cell), name("R -3 m"), COLUMNS, "Bi1 0 0 0")) == count


def test_a_number_alone_is_enough_where_it_has_one_setting(read):
    crystal = read(
        CUBIC,
        "_symmetry_Int_Tables_number 216",
        COLUMNS,
        "Ga1 0 0 0",
        "As1 1/4 0.25 0.25".replace("1/4", "0.25"),
    )
    assert len(crystal) == 8
    assert crystal.declared_space_group == "number 216"


def test_a_number_with_several_settings_is_an_error(read):
    with pytest.raises(ReadingError) as caught:
        read(CELL.format(4, 5, 6, 90, 90, 90), "_symmetry_Int_Tables_number 62", COLUMNS, "Ca1 0.1 0.25 0.2")
    assert "P n m a" in caught.value.value
    assert "P b n m" in caught.value.value


def test_a_file_that_states_no_space_group_is_refused(read):
    with pytest.raises(ReadingError) as caught:
        read(CUBIC, COLUMNS, "C1 0 0 0")
    assert caught.value.code == "space-group-statement"


@pytest.mark.parametrize(
    "statements",
    [
        (name("P 63 m c"), "loop_\n_symmetry_equiv_pos_as_xyz\nx,y,z"),
        (name("P -1"), "loop_\n_symmetry_equiv_pos_as_xyz\nx,y,z\n-y,x-y,z\n-x+y,-x,z"),
        ("loop_\n_symmetry_equiv_pos_as_xyz\nx,y,z\n-y,x-y,z",),
        ("loop_\n_symmetry_equiv_pos_as_xyz\nx,y,z\n-x,foo,z",),
        (name("Q 1 2 3"),),
        ("_space_group_name_Hall 'nonsense'",),
        ("_space_group_IT_number 231",),
        (name("P m -3 m"),),
        ("loop_\n_symmetry_equiv_pos_as_xyz\nx,y,z\ny,z,x\nz,x,y",),
    ],
    ids=[
        "P1 list",
        "other class",
        "open list",
        "no triplet",
        "no symbol",
        "no Hall",
        "no number",
        "cell",
        "list cell",
    ],
)
def test_statements_that_contradict_themselves_or_the_cell_are_refused(read, statements):
    with pytest.raises(ReadingError) as caught:
        read(HEXAGONAL, *statements, COLUMNS, "Zn1 0.1 0.2 0.3")
    assert caught.value.code == "space-group-statement"


def test_a_mixed_site_is_kept_and_not_merged_with_a_pure_one(read):
    crystal = read(
        CELL.format(*[3.965] * 3, 90, 90, 90), name("P m -3 m"), OCCUPIED,
        "0.6 Ba1 .5 .5 .5", "0.4 Sr1 .5 .5 .5", "1 Ti1 0 0 0", "1 O1 .5 0 0",
    )  # fmt: skip
    assert [str(kind) for kind in crystal.species] == ["Ba0.6Sr0.4", "Ti", "O", "O", "O"]
    assert any("one mixed site" in remark for remark in crystal.remarks)


def test_mixed_and_pure_sites_are_different_species_to_the_finder(read):
    sites = ["1 Cs1 0 0 0", "0.5 Cs2 .5 .5 .5", "0.5 Rb2 .5 .5 .5"]
    ordered = ["1 Cs1 0 0 0", "1 Cs2 .5 .5 .5"]
    cell = CELL.format(4, 4, 4, 90, 90, 90)
    assert find_symmetry(read(cell, name("P 1"), OCCUPIED, *sites)).space_group_symbol == "Pm-3m"
    assert find_symmetry(read(cell, name("P 1"), OCCUPIED, *ordered)).space_group_symbol == "Im-3m"


def test_a_vacancy_is_not_an_atom_and_a_partial_site_is_its_own_species(read):
    crystal = read(
        CELL.format(4.3, 4.3, 4.3, 90, 90, 90), name("F m -3 m"), OCCUPIED,
        "0.9 Fe1 0 0 0", "0.1 Va1 0 0 0", ". O1 .5 .5 .5",
    )  # fmt: skip
    assert crystal.formula == "Fe0.9O"
    assert any("vacancy" in remark for remark in crystal.remarks)


@pytest.mark.parametrize(
    ("site", "code"),
    [
        ("1 Na1 ? 0 0", "not-a-number"),
        ("1 Na1 . 0 0", "not-a-number"),
        ("1 Na1 nan 0 0", "not-a-number"),
        ("1 Na1 inf 0 0", "infinite"),
        ("1 Na1 0 0 0\n1 Cl1 0 0 0", "overlap"),
        ("1 Na1 0 0 0\n1 Na2 0.001 0 0", "overlap"),
        ("0.7 Na1 0 0 0\n0.7 K1 0 0 0", "occupancy"),
        ("1.3 Na1 0 0 0", "occupancy"),
        ("0 Na1 0 0 0", "occupancy"),
        ("-1 Na1 0 0 0", "occupancy"),
        ("1 Qq1 0 0 0", "unreadable"),
    ],
)
def test_faulty_sites_are_named(read, site, code):
    with pytest.raises(ReadingError) as caught:
        read(CUBIC, name("P 1"), OCCUPIED, site)
    assert caught.value.code == code
    assert caught.value.file.endswith("test.cif")


@pytest.mark.parametrize(
    ("cell", "code"),
    [
        ((0, 4, 4, 90, 90, 90), "singular-cell"),
        ((4, 4, 4, 90, 90, 180), "singular-cell"),
        ((4, 4, 4, 60, 60, 130), "singular-cell"),
        (("?", 4, 4, 90, 90, 90), "not-a-number"),
        (("inf", 4, 4, 90, 90, 90), "infinite"),
    ],
)
def test_faulty_cells_are_named(read, cell, code):
    with pytest.raises(ReadingError) as caught:
        read(CELL.format(*cell), name("P 1"), COLUMNS, "Na1 0 0 0")
    assert caught.value.code == code


def test_uncertainties_latin_text_charges_and_deuterium_are_read(read):
    crystal = read(
        "_publ_author_name 'M\u00fcller'", CELL.format("4.000(3)", 4, 4, 90, 90, 90), name("P 1"),
        "loop_\n_atom_site_type_symbol\n_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z",
        "Ti4+ 0.000(2) 0 0", "O2- 0.50(1) .5 0", "D 0.707(2) 0.7 0.7",
        encoding="latin-1",
    )  # fmt: skip
    assert [str(kind) for kind in crystal.species] == ["Ti", "O", "H"]
    assert crystal.positions_frac[2, 0] == pytest.approx(0.707)
    assert crystal.remarks == ("D counts as hydrogen; distinguish isotope tells isotopes apart",)


def test_equal_labels_are_told_apart_and_the_change_is_reported(read):
    crystal = read(CUBIC, name("P 1"), COLUMNS, "O 0 0 0", "O .5 .5 .6")
    assert crystal.labels == ("O", "O_2")
    assert len(crystal.remarks) == 1


def test_several_data_blocks_are_several_structures(tmp_path):
    path = tmp_path / "two.cif"
    block = "\n".join([CUBIC, name("P 1"), COLUMNS, "Po1 0 0 0"])
    path.write_text(f"data_first\n{block}\ndata_empty\n_cell_length_a 3\ndata_second\n{block}\n")
    assert len(read_crystals(path)) == 2
    with pytest.raises(ReadingError, match="several structures") as caught:
        read_crystal(path)
    assert "first" in caught.value.value
    assert "second" in caught.value.value


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("", "empty"),
        ("data_x\n_cell_length_a 3\n", "empty"),
        ("data_x\nloop_\n_a\n_b\n1 2 3\n", "unreadable"),
        ("\x00\x01", "unreadable"),
    ],
)
def test_a_file_without_atoms_or_without_grammar_is_refused(tmp_path, text, code):
    path = tmp_path / "odd.cif"
    path.write_text(text)
    with pytest.raises(ReadingError) as caught:
        read_crystal(path)
    assert caught.value.code == code


def test_images_near_each_other_without_a_common_special_position_are_refused(read):
    # a mirror and a translation of 0.09 angstrom: images form a chain, no position is common to them
    lines = "loop_\n_symmetry_equiv_pos_as_xyz\nx,y,z\nx,y,z+1/2"
    with pytest.raises(ReadingError):
        read(CELL.format(4, 4, 0.18, 90, 90, 90), lines, COLUMNS, "Po1 0 0 0")


def test_a_partly_filled_site_that_is_moved_says_what_its_occupancy_means(read):
    site = "0.5 Zn1 0.333 0.667 0"
    crystal = read(HEXAGONAL, name("P 63 m c"), OCCUPIED, site, "1 O1 0.333333 0.666667 0.382")
    assert crystal.remarks[0].endswith("; its occupancy 0.5 is taken for that of the special position")
    assert str(crystal.species[0]) == "Zn0.5"


@pytest.mark.parametrize("tag", ["_atom_site_symmetry_multiplicity", "_atom_site_site_symmetry_multiplicity"])
def test_stated_multiplicities_are_compared_with_the_places_found(read, tag):
    table = COLUMNS.replace("loop_\n", f"loop_\n{tag}\n")
    assert read(CUBIC, name("F d -3 m:1"), table, "8 C1 0 0 0").remarks == ()
    crystal = read(CUBIC, name("F d -3 m:1"), table, "16 C1 0 0 0")
    assert crystal.remarks == ("site C1 has 8 places in the cell, the file states 16",)


def test_dummies_and_attached_hydrogen_atoms_are_named(read):
    table = COLUMNS.replace("loop_\n", "loop_\n_atom_site_calc_flag\n_atom_site_attached_hydrogens\n")
    crystal = read(
        CUBIC, name("P 1"), table, "d 2 O1 0 0 0", "dum 0 X1 .5 .5 .5", "d ? Na1 .5 .5 0", "d 0 K1 0 .5 .5"
    )
    assert len(crystal) == 3
    assert crystal.remarks == (
        "hydrogen atoms attached to O1 have no positions and are not in the structure",
        "site X1 is a dummy and holds no atom",
    )


def test_three_rounded_sites_of_a_large_group_meet_on_their_special_positions(read):
    # (0.333, 0.667, z) and (0.667, 0.333, z) are one orbit of P 63/m m c: listed twice, they overlap
    with pytest.raises(ReadingError) as caught:
        read(HEXAGONAL, name("P 63/m m c"), COLUMNS, "Zn1 0.333 0.667 0.25", "Zn2 0.667 0.333 0.75")
    assert caught.value.code == "overlap"
