"""Compressed files, limits of size, frames, and cells with empty space."""

import gzip
import lzma
import shutil
import sys
import weakref

import ase.io
import numpy as np
import pytest
from ase import Atoms
from ase.build import bulk, fcc111, molecule
from ase.db import connect

from sitesym.crystals import Crystal, read_crystal, read_crystals, read_each
from sitesym.crystals.files import content
from sitesym.crystals.vacuum import empty_gaps
from sitesym.errors import (
    EmptyStructureError,
    FileTooLargeError,
    ReadingError,
    UnknownFormatError,
    UsageError,
)
from sitesym.formats import named_format


def compressed(source, target, opener):
    with opener(target, "wb") as stream:
        stream.write(source.read_bytes())
    return target


@pytest.fixture
def frames(tmp_path):
    """A trajectory of three frames with edges 4.1, 4.2, 4.3 angstrom."""

    def write(name):
        atoms = [
            Atoms("CsCl", scaled_positions=[[0] * 3, [0.5] * 3], cell=[edge] * 3, pbc=True)
            for edge in (4.1, 4.2, 4.3)
        ]
        if name.endswith(".db"):
            with connect(tmp_path / name) as database:
                for frame in atoms:
                    database.write(frame)
        else:
            ase.io.write(tmp_path / name, atoms)
        return tmp_path / name

    return write


@pytest.mark.parametrize(("suffix", "opener"), [(".gz", gzip.open), (".xz", lzma.open)])
@pytest.mark.parametrize("name", ["quartz_SiO2.cif", "quartz_SiO2.vasp"])
def test_a_compressed_file_is_the_file(structures, tmp_path, name, suffix, opener):
    target = compressed(structures / name, tmp_path / f"{name}{suffix}", opener)
    plain, packed = read_crystal(structures / name), read_crystal(target)
    assert named_format(target) == named_format(name)
    assert packed.source.file == f"{name}{suffix}"
    assert packed.species == plain.species
    assert np.array_equal(packed.positions_frac, plain.positions_frac)


@pytest.mark.parametrize("name", ["a.extxyz", "a.traj", "a.db"])
def test_compressed_files_of_many_frames(frames, tmp_path, name):
    target = compressed(frames(name), tmp_path / f"packed_{name}.gz", gzip.open)
    assert [round(float(crystal.lattice[0, 0]), 6) for crystal in read_crystals(target)] == [4.1, 4.2, 4.3]


def test_zstandard_needs_its_library(structures, tmp_path, monkeypatch):
    target = tmp_path / "a.cif.zst"
    shutil.copy(structures / "quartz_SiO2.cif", target)
    monkeypatch.setitem(sys.modules, "zstandard", None)
    with pytest.raises(UnknownFormatError) as caught:
        read_crystal(target)
    assert "install zstandard" in caught.value.next_step


def test_zstandard_is_read_where_its_library_is_there(structures, tmp_path):
    zstandard = pytest.importorskip("zstandard")
    packed = zstandard.ZstdCompressor().compress((structures / "quartz_SiO2.cif").read_bytes())
    (tmp_path / "a.cif.zst").write_bytes(packed)
    assert read_crystal(tmp_path / "a.cif.zst").formula == "SiO2"
    (tmp_path / "b.cif.zst").write_bytes(packed[:-9])
    (tmp_path / "c.cif.zst").write_bytes(b"nothing of the kind")
    for name in ("b.cif.zst", "c.cif.zst"):
        with pytest.raises(ReadingError):
            read_crystal(tmp_path / name)


@pytest.mark.parametrize(
    ("suffix", "raw"), [(".gz", b"no"), (".xz", b"no"), (".gz", gzip.compress(b"data_x" * 99, mtime=0)[:-9])]
)
def test_damaged_compression_is_a_reading_error(tmp_path, suffix, raw):
    (tmp_path / f"a.cif{suffix}").write_bytes(raw)
    with pytest.raises(ReadingError, match="damaged"):
        read_crystal(tmp_path / f"a.cif{suffix}")


def test_a_file_beyond_the_limit_is_refused_before_and_after_decompression(structures, tmp_path):
    for name in ("quartz_SiO2.cif", "quartz_SiO2.vasp"):
        with pytest.raises(FileTooLargeError) as caught:
            read_crystal(structures / name, largest_megabytes=1e-4)
        assert caught.value.code == "too-large"
    bomb = tmp_path / "bomb.cif.gz"
    bomb.write_bytes(gzip.compress(b"#" * 5_000_000))
    assert bomb.stat().st_size < 10_000
    with pytest.raises(FileTooLargeError, match="once decompressed"):
        read_crystal(bomb, largest_megabytes=0.1)
    assert len(content(bomb, 5.0)) == 5_000_000


def test_ase_formats_obey_the_limit(frames):
    with pytest.raises(FileTooLargeError):
        read_crystals(frames("a.extxyz"), largest_megabytes=1e-4)


@pytest.mark.parametrize("name", ["a.extxyz", "a.traj", "a.db"])
@pytest.mark.parametrize(("frame", "edge"), [("last", 4.3), (1, 4.1), ("2", 4.2), (3, 4.3)])
def test_one_frame_is_chosen_by_its_number_or_as_the_last(frames, name, frame, edge):
    crystal = read_crystal(frames(name), frame=frame)
    assert crystal.lattice[0, 0] == pytest.approx(edge)
    assert crystal.source.part == ("last structure" if frame == "last" else f"structure {frame}")


@pytest.mark.parametrize("name", ["a.extxyz", "a.traj", "a.db"])
def test_a_frame_that_is_not_there_is_an_error(frames, name):
    with pytest.raises(EmptyStructureError) as caught:
        read_crystal(frames(name), frame=4)
    assert "structure 4" in caught.value.value


@pytest.mark.parametrize("frame", ["first", "0", 0, -1, "1.5"])
def test_what_names_no_frame_is_a_usage_error(frames, frame):
    with pytest.raises(UsageError):
        read_crystal(frames("a.extxyz"), frame=frame)


def test_a_block_is_chosen_in_a_cif_only(frames):
    with pytest.raises(UsageError):
        read_crystal(frames("a.extxyz"), block="one")


def test_a_faulty_frame_does_not_hide_the_others(tmp_path):
    good = bulk("Po", "sc", a=3.3)
    flat = Atoms("Po2", positions=[[0, 0, 0], [0, 0, 0.01]], cell=[3.3] * 3, pbc=True)
    ase.io.write(tmp_path / "a.extxyz", [good, flat, good])
    parts = list(read_each(tmp_path / "a.extxyz"))
    assert [name for name, _ in parts] == [f"structure {number}" for number in (1, 2, 3)]
    assert [isinstance(part, Crystal) for _, part in parts] == [True, False, True]
    assert parts[1][1].code == "overlap"


@pytest.mark.parametrize("good", [1, 2])
def test_what_cannot_be_read_keeps_the_frames_before_and_names_the_place(frames, good):
    path = frames("a.extxyz")
    lines = path.read_text().splitlines(keepends=True)
    lines[4 * good + 2] = "Cs 0.0 zero 0.0\n"
    path.write_text("".join(lines))
    parts = list(read_each(path))
    assert [name for name, _ in parts] == [f"structure {number + 1}" for number in range(good + 1)]
    assert [isinstance(part, Crystal) for _, part in parts] == [True] * good + [False]
    with pytest.raises(ReadingError):
        read_crystals(path)


def test_frames_are_read_one_by_one(tmp_path, monkeypatch):
    """Of 60 frames no more than three are alive at any moment."""
    references, most = [], 0
    made = Crystal.from_ase

    def watched(atoms, *arguments):
        nonlocal most
        references.append(weakref.ref(atoms))
        most = max(most, sum(reference() is not None for reference in references))
        return made(atoms, *arguments)

    monkeypatch.setattr(Crystal, "from_ase", watched)
    for name in ("a.traj", "a.extxyz", "a.db"):
        ase.io.write(tmp_path / name, [bulk("Po", "sc", a=3.3 + step / 100) for step in range(60)])
        edges = [part.lattice[0, 0] for _, part in read_each(tmp_path / name)]
        assert edges == pytest.approx([3.3 + step / 100 for step in range(60)])
    assert len(references) == 180
    assert 1 <= most <= 3


@pytest.mark.parametrize("name", ["POSCAR", "a.extxyz", "a.traj"])
def test_only_a_cif_has_statements_of_symmetry(frames, structures, tmp_path, name):
    """One structure: an error that says so. Files of many formats: it counts in a CIF alone."""
    path = frames(name) if "." in name else tmp_path / name
    path.exists() or path.write_text((structures / "quartz_SiO2.vasp").read_text())
    with pytest.raises(UsageError) as caught:
        read_crystal(path, frame="last", symmetry_from="hall")
    assert (caught.value.file, "format" in caught.value.value) == (str(path), True)
    assert all(isinstance(part, Crystal) for _, part in read_each(path, symmetry_from="hall"))


@pytest.mark.parametrize("frame", [2, "3"])
def test_a_format_of_one_structure_has_no_second(tmp_path, frame):
    ase.io.write(tmp_path / "a.gen", bulk("Po", "sc", a=3.3))
    assert read_crystal(tmp_path / "a.gen", frame=1).source.part == "structure 1"
    with pytest.raises(EmptyStructureError):
        read_crystal(tmp_path / "a.gen", frame=frame)


def test_a_frame_that_announces_more_atoms_than_follow_is_refused_at_once(tmp_path):
    (tmp_path / "a.extxyz").write_text('99999999999999\nLattice="4 0 0 0 4 0 0 0 4"\nCs 0 0 0\n')
    with pytest.raises(ReadingError) as caught:
        read_crystal(tmp_path / "a.extxyz")
    assert caught.value.code == "count-mismatch"


@pytest.mark.parametrize(
    ("atoms", "shape"),
    [
        (fcc111("Al", (1, 1, 4), vacuum=10.0, periodic=True), "a slab"),
        (Atoms("C2", positions=[[0, 0, 0], [1.3, 0, 0]], cell=[2.6, 20, 20], pbc=True), "a wire"),
        (molecule("H2O", vacuum=8.0, pbc=True), "a molecule in a box"),
    ],
)
def test_empty_space_is_warned_of_with_its_width(tmp_path, atoms, shape):
    atoms.info.clear()
    ase.io.write(tmp_path / "a.extxyz", atoms)
    crystal = read_crystal(tmp_path / "a.extxyz")
    (remark,) = (remark for remark in crystal.remarks if "angstrom across the planes" in remark)
    assert f"this may be {shape};" in remark
    assert "(more than 7)" in remark


def test_gaps_are_measured_across_the_lattice_planes():
    sheared = np.array([[3.0, 0, 0], [0, 3.0, 0], [2.0, 0, 10.0]])
    assert empty_gaps(sheared, np.array([[0, 0, 0.9], [0.5, 0.5, 0.2]]))[2] == pytest.approx(7.0)
    assert empty_gaps(np.eye(3) * 3.3, np.zeros((1, 3))) == pytest.approx([3.3] * 3)


def test_no_demo_structure_is_taken_for_a_slab(structures):
    for path in sorted(structures.glob("*.*")):
        if named_format(path):
            assert not any("across the planes" in remark for remark in read_crystal(path).remarks), path.name
