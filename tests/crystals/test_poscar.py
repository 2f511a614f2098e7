"""POSCAR texts, compared with what ASE reads from them."""

import io

import ase.io
import numpy as np
import pytest

from sitesym.crystals.poscar import read_poscar
from sitesym.errors import ReadingError
from sitesym.formats import named_format

HEAD = "comment\n{scale}\n4.0 0.1 0.0\n0.0 4.2 0.0\n0.3 0.0 4.5\n{symbols}\n{counts}\n{style}\n"
ROWS = "0.0 0.0 0.0\n0.5 0.51 0.52\n-0.2 1.3 0.25\n"


def same_as_ase(text):
    atoms = ase.io.read(io.StringIO(text), format="vasp")
    crystal = read_poscar(text, "POSCAR")
    assert [str(kind) for kind in crystal.species] == atoms.get_chemical_symbols()
    assert np.allclose(crystal.lattice, atoms.cell.array, rtol=0, atol=1e-12)
    shift = crystal.positions_frac - atoms.cell.scaled_positions(atoms.positions)
    assert np.abs(shift).max() < 1e-12
    return crystal


@pytest.mark.parametrize("scale", ["1.0", "1.5", "-80.0", "1.0 1.1 1.2"])
@pytest.mark.parametrize("style", ["Direct", "cartesian", "K", "Selective dynamics\nDirect", "s\nC"])
def test_scales_and_styles(scale, style):
    rows = ROWS.replace("\n", " T T F\n") if style.lower().startswith("s") else ROWS
    same_as_ase(HEAD.format(scale=scale, symbols="Ti O", counts="1 2", style=style) + rows)


@pytest.mark.parametrize(("symbols", "counts"), [("Ti O", "1 2"), ("O Ti O", "1 1 1"), ("O Ti_pv", "2 1")])
@pytest.mark.parametrize("tail", ["", "\n0.0 0.0 0.0\n0.1 0 0\n0 0 0.1\n", "garbage\n"])
def test_symbols_counts_and_what_follows(symbols, counts, tail):
    same_as_ase(HEAD.format(scale="1", symbols=symbols, counts=counts, style="Direct") + ROWS + tail)


def test_flags_and_symbols_after_the_coordinates():
    rows = "0 0 0 T T F\n0.5 0.51 0.52 F F F Ti\n-0.2 1.3 0.25 T T T\n"
    same_as_ase(HEAD.format(scale="1", symbols="Ti O", counts="1 2", style="Selective\nDirect") + rows)


def test_the_demo_structures(structures):
    paths = [path for path in structures.iterdir() if named_format(path) == "vasp"]
    assert len(paths) > 5
    for path in paths:
        same_as_ase(path.read_text())


def test_random_structures_written_by_ase(tmp_path):
    rng = np.random.default_rng(11)
    for direct in (True, False):
        atoms = ase.Atoms("Sr3TiO7", scaled_positions=rng.uniform(size=(11, 3)), cell=[9] * 3)
        atoms.set_cell(np.eye(3) * 9 + rng.normal(size=(3, 3)), scale_atoms=True)
        ase.io.write(tmp_path / "POSCAR", atoms, format="vasp", direct=direct)
        same_as_ase((tmp_path / "POSCAR").read_text())


def test_direct_coordinates_are_taken_as_written():
    third = "0.3333333333333333 0.6666666666666667 0.0000000000000001"
    text = HEAD.format(scale="1.7", symbols="Zn", counts="1", style="Direct") + third
    assert read_poscar(text, "").positions_frac.tolist() == [[1 / 3, 0.6666666666666667, 1e-16]]


def test_exponents_with_d_checksums_and_deuterium_are_read():
    text = HEAD.format(scale="1.0D0", symbols="Ti/0f3a D", counts="1 2", style="Direct") + ROWS.replace(
        "0.51", "5.1d-1"
    )
    crystal = read_poscar(text, "")
    assert [str(kind) for kind in crystal.species] == ["Ti", "H", "H"]
    assert crystal.marks["isotope"] == ("", "D", "D")
    assert crystal.positions_frac[1, 1] == 0.51


@pytest.mark.parametrize(
    ("changes", "rows", "code"),
    [
        ({"symbols": "1 2"}, ROWS, "unknown-format"),
        ({"symbols": "Xx O"}, ROWS, "unreadable"),
        ({"symbols": "?"}, ROWS, "unreadable"),
        ({"symbols": ""}, ROWS, "unreadable"),
        ({"symbols": "Ti"}, ROWS, "count-mismatch"),
        ({"style": "0.25 0.25 0.25"}, ROWS, "unreadable"),
        ({"style": ""}, ROWS, "unreadable"),
        ({"counts": "1 x"}, ROWS, "count-mismatch"),
        ({"counts": "-1 2"}, ROWS, "count-mismatch"),
        ({"counts": "0 0"}, ROWS, "empty"),
        ({"counts": "1 9"}, ROWS, "count-mismatch"),
        ({"counts": "1 99999999999999"}, ROWS, "count-mismatch"),
        ({"scale": "0"}, ROWS, "singular-cell"),
        ({"scale": "1 -1 1"}, ROWS, "singular-cell"),
        ({"scale": "one"}, ROWS, "not-a-number"),
        ({"scale": "nan"}, ROWS, "singular-cell"),
        ({"scale": "inf"}, ROWS, "singular-cell"),
        ({}, "0 0 0\n0 0\n0 0.5 0\n", "count-mismatch"),
        ({}, "0 0 0\n0 0 x\n0 0.5 0\n", "not-a-number"),
        ({}, "0 0 0\n0 0 nan\n0 0.5 0\n", "not-a-number"),
        ({}, "0 0 0\n0 0 inf\n0 0.5 0\n", "infinite"),
        ({}, "0 0 0\n0 0 0.001\n0 0.5 0\n", "overlap"),
        ({}, "", "count-mismatch"),
    ],
)  # fmt: skip
def test_faults_have_their_codes(changes, rows, code):
    parts = {"scale": "1", "symbols": "Ti O", "counts": "1 2", "style": "Direct", **changes}
    with pytest.raises(ReadingError) as caught:
        read_poscar(HEAD.format(**parts) + rows, "")
    assert caught.value.code == code
    assert caught.value.rule
    assert caught.value.next_step


@pytest.mark.parametrize("lines", range(8))
def test_a_text_that_ends_before_its_atoms_is_empty(lines):
    text = HEAD.format(scale="1", symbols="Ti O", counts="1 2", style="Direct") + ROWS
    with pytest.raises(ReadingError):
        read_poscar("".join(text.splitlines(keepends=True)[:lines]), "")
