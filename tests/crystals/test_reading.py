"""Formats by name and content, everything but CIF through ASE, and the errors of files."""

import ase.io
import numpy as np
import pytest
from ase import Atoms
from ase.db import connect

from sitesym.crystals import find_symmetry, read_crystal, read_crystals
from sitesym.errors import ReadingError
from sitesym.formats import named_format

POSCAR = "comment\n1.0\n4 0 0\n0 4 0\n0 0 4\n{symbols}1 1\nDirect\n0 0 0\n0.5 0.5 0.5\n"


@pytest.fixture
def caesium_chloride():
    return Atoms("CsCl", scaled_positions=[[0, 0, 0], [0.5, 0.5, 0.5]], cell=[4.123] * 3, pbc=True)


@pytest.mark.parametrize("file", ["a.vasp", "POSCAR", "CONTCAR_relaxed"])
def test_a_poscar_without_symbols_is_refused(tmp_path, file):
    (tmp_path / file).write_text(POSCAR.format(symbols=""))
    with pytest.raises(ReadingError) as caught:
        read_crystal(tmp_path / file)
    assert caught.value.code == "unknown-format"
    assert "line 6" in caught.value.value


def test_a_poscar_with_symbols_is_read(tmp_path):
    (tmp_path / "POSCAR").write_text(POSCAR.format(symbols="Cs Cl\n"))
    crystal = read_crystal(tmp_path / "POSCAR")
    assert crystal.formula == "CsCl"
    assert crystal.labels == ("Cs1", "Cl1")
    assert crystal.source.format == "vasp"


@pytest.mark.parametrize(
    ("file", "file_format"),
    [
        ("a.vasp", "vasp"),
        ("a.extxyz", "extxyz"),
        ("a.xyz", "extxyz"),
        ("a.json", "json"),
        ("a.traj", "traj"),
        ("a.xsf", "xsf"),
        ("a.gen", "gen"),
        ("a.res", "res"),
    ],
)
def test_formats_read_back_to_the_same_crystal(tmp_path, caesium_chloride, file, file_format):
    ase.io.write(tmp_path / file, caesium_chloride, format=file_format)
    crystal = read_crystal(tmp_path / file)
    assert named_format(file) == crystal.source.format == file_format
    assert np.allclose(crystal.lattice @ crystal.lattice.T, np.eye(3) * 4.123**2, atol=1e-4)
    assert find_symmetry(crystal).space_group_symbol == "Pm-3m"


AIMS = """lattice_vector 4.123 0 0
lattice_vector 0 4.123 0
lattice_vector 0 0 4.123
atom_frac 0 0 0 Cs
atom_frac 0.5 0.5 0.5 Cl
"""
CASTEP = """%BLOCK LATTICE_CART
4.123 0 0
0 4.123 0
0 0 4.123
%ENDBLOCK LATTICE_CART
%BLOCK POSITIONS_FRAC
Cs 0 0 0
Cl 0.5 0.5 0.5
%ENDBLOCK POSITIONS_FRAC
"""


@pytest.mark.parametrize(("file", "text"), [("geometry.in", AIMS), ("a.cell", CASTEP)])
def test_inputs_of_programs_are_read_without_remarks_on_the_library(tmp_path, file, text):
    (tmp_path / file).write_text(text)
    crystal = read_crystal(tmp_path / file)
    assert find_symmetry(crystal).space_group_symbol == "Pm-3m"
    assert crystal.remarks == ()


def test_quantum_espresso_input_is_read(tmp_path, caesium_chloride):
    pseudopotentials = {"Cs": "Cs.upf", "Cl": "Cl.upf"}
    ase.io.write(
        tmp_path / "a.pwi", caesium_chloride, format="espresso-in", pseudopotentials=pseudopotentials
    )
    assert read_crystal(tmp_path / "a.pwi").formula == "CsCl"


def test_every_frame_and_every_row_is_a_structure(tmp_path, caesium_chloride):
    ase.io.write(tmp_path / "a.extxyz", [caesium_chloride] * 3)
    with connect(tmp_path / "a.db") as database:
        database.write(caesium_chloride)
        database.write(caesium_chloride)
    assert len(read_crystals(tmp_path / "a.extxyz")) == 3
    assert len(read_crystals(tmp_path / "a.db")) == 2
    with pytest.raises(ReadingError, match="several structures"):
        read_crystal(tmp_path / "a.extxyz")


def test_a_molecule_in_a_file_is_refused_with_the_file_named(tmp_path):
    ase.io.write(tmp_path / "a.xyz", Atoms("H2", positions=[[0, 0, 0], [0, 0, 0.74]]), format="extxyz")
    with pytest.raises(ReadingError) as caught:
        read_crystal(tmp_path / "a.xyz")
    assert caught.value.code == "not-periodic"
    assert caught.value.file.endswith("a.xyz")


@pytest.mark.parametrize(
    ("file", "text"),
    [
        ("POSCAR", ""),
        ("POSCAR", "x\n1.0\n"),
        ("POSCAR", POSCAR.format(symbols="Xx Yy\n")),
        ("a.json", "[1, 2]"),
        ("a.json", "{"),
        ("a.extxyz", "two\n\n"),
        ("a.xsf", "nothing"),
        ("geometry.in", "atom 0 0"),
        ("a.traj", "no"),
        ("a.db", "no"),
        ("a.cell", "%BLOCK"),
        ("a.res", "CELL"),
        ("a.gen", "1"),
        ("vasprun.xml", "<a>"),
        ("a.cube", "a"),
    ],
)
def test_malformed_content_is_a_reading_error(tmp_path, file, text):
    (tmp_path / file).write_text(text)
    with pytest.raises(ReadingError) as caught:
        read_crystal(tmp_path / file)
    assert caught.value.file.endswith(file)


def test_missing_files_folders_and_unknown_formats_are_reading_errors(tmp_path):
    (tmp_path / "notes.txt").write_text("shopping list")
    for path in (tmp_path / "none.cif", tmp_path, tmp_path / "notes.txt"):
        with pytest.raises(ReadingError):
            read_crystal(path)
    with pytest.raises(ReadingError) as caught:
        read_crystal(tmp_path / "notes.txt", file_format="spreadsheet")
    assert caught.value.code == "unknown-format"


def test_only_structure_files_have_a_named_format():
    assert named_format("some/where/Quartz.CIF") == "cif"
    assert named_format("POSCAR") == named_format("relaxed-POSCAR") == "vasp"
    assert named_format("README.md") is named_format("poscar.md") is None
    assert named_format("data.csv") is None


def test_the_broken_demo_file_overlaps(structures):
    (broken,) = (structures / "broken").iterdir()
    with pytest.raises(ReadingError) as caught:
        read_crystal(broken)
    assert caught.value.code == "overlap"


def test_a_folder_and_a_missing_file_are_told_apart(tmp_path):
    with pytest.raises(ReadingError, match="this is a folder"):
        read_crystal(tmp_path)
    with pytest.raises(ReadingError, match="there is no such file"):
        read_crystal(tmp_path / "none.cif")
