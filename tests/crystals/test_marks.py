"""Atoms told apart by isotope, oxidation state, label and moment, on request and not otherwise."""

import ase.io
import numpy as np
import pytest
from ase import Atoms

from sitesym.crystals import Crystal, find_symmetry, read_crystal
from sitesym.errors import CountMismatchError, EmptyStructureError, UsageError
from sitesym.reports.sites import crystal_remarks, sites_document

CUBIC = "data_x\n_cell_length_a 4\n_cell_length_b 4\n_cell_length_c 4\n_cell_angle_alpha 90\n" + (
    "_cell_angle_beta 90\n_cell_angle_gamma 90\n"
)
P1 = "_space_group_name_H-M_alt 'P 1'\n"
TYPED = "loop_\n_atom_site_label\n_atom_site_type_symbol\n" + (
    "_atom_site_fract_x\n_atom_site_fract_y\n_atom_site_fract_z\n"
)


@pytest.fixture
def read(tmp_path):
    def read_text(*parts, **choices):
        path = tmp_path / "test.cif"
        path.write_text("".join(parts) + "\n")
        return read_crystal(path, **choices)

    return read_text


@pytest.mark.parametrize(
    ("sites", "mark", "text"),
    [
        ("H1 H 0 0 0\nD1 D .5 .5 .5", "isotope", ("", "D")),
        ("Fe1 Fe2+ 0 0 0\nFe2 Fe3+ .5 .5 .5", "oxidation", ("+2", "+3")),
        ("Fe1 Fe 0 0 0\nFe2 Fe .5 .5 .5", "label", ("Fe1", "Fe2")),
    ],
)
def test_a_mark_lowers_the_symmetry_only_when_it_is_asked_for(read, sites, mark, text):
    plain = read(CUBIC, P1, TYPED, sites)
    told_apart = read(CUBIC, P1, TYPED, sites, distinguish=[mark])
    assert plain.marks[mark] == told_apart.marks[mark] == text
    assert find_symmetry(plain).space_group_symbol == "Im-3m"
    assert find_symmetry(told_apart).space_group_symbol == "Pm-3m"
    document = sites_document(find_symmetry(told_apart))
    assert document["crystal"]["distinguished_by"] == ["element", "occupancy", mark]
    assert f"atoms are told apart by element, occupancy, {mark}" in document["remarks"]


def test_deuterium_is_hydrogen_and_the_remark_goes_when_isotopes_count(read):
    sites = "H1 H 0 0 0\nD1 D .5 .5 .5"
    assert any("D counts as hydrogen" in remark for remark in read(CUBIC, P1, TYPED, sites).remarks)
    crystal = read(CUBIC, P1, TYPED, sites, distinguish=["isotope"])
    assert crystal.remarks == ()
    assert crystal.formula == "H"


def test_hydrogen_and_deuterium_on_one_site_are_one_atom_with_a_mark(read):
    occupied = TYPED.replace("loop_\n", "loop_\n_atom_site_occupancy\n")
    crystal = read(CUBIC, P1, occupied, ".3 H1 H 0 0 0\n.7 D1 D 0 0 0\n1 H2 H .5 .5 .5")
    assert [str(kind) for kind in crystal.species] == ["H", "H"]
    assert crystal.marks["isotope"] == ("D:0.7", "")
    assert find_symmetry(crystal.distinguished_by("isotope")).space_group_symbol == "Pm-3m"


def test_oxidation_numbers_of_the_list_of_types_are_read(read):
    types = "loop_\n_atom_type_symbol\n_atom_type_oxidation_number\nFeA 2\nFeB 3.0\n"
    crystal = read(CUBIC, P1, types, TYPED, "Fe1 FeA 0 0 0\nFe2 FeB .5 .5 .5")
    assert crystal.marks["oxidation"] == ("+2", "+3")


@pytest.mark.parametrize(("symbol", "charge"), [("Ti4+", "+4"), ("O2-", "-2"), ("O-2", "-2"), ("Na+", "+1")])
def test_charges_of_type_symbols(read, symbol, charge):
    assert read(CUBIC, P1, TYPED, f"X1 {symbol} 0 0 0").marks["oxidation"] == (charge,)


def test_a_mark_the_file_does_not_give_is_a_remark_and_changes_nothing(read):
    crystal = read(CUBIC, P1, TYPED, "Fe1 Fe 0 0 0\nFe2 Fe .5 .5 .5", distinguish=["oxidation", "moment"])
    assert find_symmetry(crystal).space_group_symbol == "Im-3m"
    assert crystal.remarks == (
        "the file gives no oxidation; atoms are not told apart by it",
        "the file gives no moment; atoms are not told apart by it",
    )


def test_an_unknown_mark_is_a_usage_error(read):
    with pytest.raises(UsageError) as caught:
        read(CUBIC, P1, TYPED, "Fe1 Fe 0 0 0", distinguish=["colour"])
    assert caught.value.value == "colour"


def test_marks_belong_to_atoms_in_number(read):
    crystal = read(CUBIC, P1, TYPED, "Fe1 Fe 0 0 0\nFe2 Fe .5 .5 .5")
    with pytest.raises(CountMismatchError):
        Crystal(crystal.lattice, crystal.positions_frac, crystal.species, marks={"isotope": ("",)})


MAGNETIC = """_space_group_magn.name_BNS "P_c 1"
loop_
_space_group_symop_magn_operation.id
_space_group_symop_magn_operation.xyz
1 x,y,z,+1
2 -x,-y,z,-1
loop_
_space_group_symop_magn_centering.id
_space_group_symop_magn_centering.xyz
1 x,y,z,+1
2 x,y,z+1/2,-1
loop_
_atom_site_label
_atom_site_type_symbol
_atom_site_fract_x
_atom_site_fract_y
_atom_site_fract_z
Mn1 Mn 0.2 0.1 0
O1 O 0.5 0.5 0.25
loop_
_atom_site_moment.label
_atom_site_moment.crystalaxis_x
_atom_site_moment.crystalaxis_y
_atom_site_moment.crystalaxis_z
Mn1 1.0 2.0 3.5(1)
"""


def test_moments_of_a_magnetic_cif_are_read_turned_and_said_to_be_unused(read):
    crystal = read(CUBIC, MAGNETIC)
    assert crystal.formula == "Mn2O"
    moments = dict(zip(map(tuple, np.round(crystal.positions_frac, 6)), crystal.marks["moment"], strict=True))
    # -x,-y,z turns the axial vector (1, 2, 3.5) into (-1, -2, 3.5); time reversal changes its sign
    assert moments[0.2, 0.1, 0.0] == "1 2 3.5"
    assert moments[0.8, 0.9, 0.0] == "1 2 -3.5"
    assert moments[0.2, 0.1, 0.5] == "-1 -2 -3.5"
    assert moments[0.8, 0.9, 0.5] == "-1 -2 3.5"
    assert any("moments are read and not used" in remark for remark in crystal.remarks)
    assert "magnetic operations" in crystal.source.part


def test_moments_on_request_tell_atoms_apart_as_labels(read):
    crystal = read(CUBIC, MAGNETIC, distinguish=["moment"])
    plain = read(CUBIC, MAGNETIC)
    assert len(set(crystal.species_indices.tolist())) == 5
    assert len(set(plain.species_indices.tolist())) == 2
    assert any("as labels and not as vectors" in remark for remark in crystal_remarks(find_symmetry(crystal)))


@pytest.mark.parametrize("operation", ["x,y,z,2", "x,y", "x,y,q,1", "x,y,z,1,1"])
def test_a_faulty_magnetic_operation_is_named(read, operation):
    from sitesym.errors import SpaceGroupStatementError

    with pytest.raises(SpaceGroupStatementError):
        read(CUBIC, MAGNETIC.replace("-x,-y,z,-1", operation))


def test_moments_of_a_frame_are_marks(tmp_path):
    atoms = Atoms("Fe2", scaled_positions=[[0, 0, 0], [0.5, 0.5, 0.5]], cell=[2.87] * 3, pbc=True)
    atoms.set_initial_magnetic_moments([2.2, -2.2])
    ase.io.write(tmp_path / "a.traj", atoms)
    crystal = read_crystal(tmp_path / "a.traj", distinguish=["moment"])
    assert crystal.marks["moment"] == ("2.2", "-2.2")
    assert find_symmetry(crystal).space_group_symbol == "Pm-3m"
    assert find_symmetry(read_crystal(tmp_path / "a.traj")).space_group_symbol == "Im-3m"


@pytest.mark.parametrize("column", ["magmoms:R:1", "magmoms:R:3"])
def test_a_frame_without_atoms_is_empty_also_where_it_has_a_column_of_moments(tmp_path, column):
    head = 'Lattice="4 0 0 0 4 0 0 0 4" pbc="T T T" Properties=species:S:1:pos:R:3:'
    (tmp_path / "none.extxyz").write_text(f"0\n{head}{column}\n")
    with pytest.raises(EmptyStructureError):
        read_crystal(tmp_path / "none.extxyz")


def test_a_column_of_words_gives_no_moments():
    atoms = Atoms("Fe", cell=[4, 4, 4], pbc=True)
    atoms.arrays["initial_magmoms"] = np.array(["up"])
    assert "moment" not in Crystal.from_ase(atoms).marks
