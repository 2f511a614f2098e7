"""Idealised structures written to files, after the structure types of the textbooks."""

from __future__ import annotations

from pathlib import Path

import pytest
from ase import Atoms
from ase.build import bulk, make_supercell
from ase.io import write


def aluminium_nitride() -> Atoms:
    """Wurtzite structure, point group 6mm."""
    return bulk("AlN", "wurtzite", a=3.11, c=4.98, u=0.382)


def salt_text(edge_angstrom: float = 5.64) -> str:
    """POSCAR of a primitive cell of rock salt with the given conventional edge."""
    half = edge_angstrom / 2.0
    return f"""salt
1.0
0 {half} {half}
{half} 0 {half}
{half} {half} 0
Na Cl
1 1
Direct
0 0 0
0.5 0.5 0.5
"""


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """Good files of several formats in two folders, bad ones between them, and no structures at all."""
    root = tmp_path / "structures"
    (root / "deep").mkdir(parents=True)
    gallium_arsenide = bulk("GaAs", "zincblende", a=5.65)
    doubled = make_supercell(gallium_arsenide, [[1, 0, 0], [0, 1, 0], [0, 0, 2]])
    write(root / "deep" / "POSCAR_GaAs_112", doubled, format="vasp")
    write(root / "deep" / "AlN.extxyz", aluminium_nitride())
    write(root / "salt.cif", bulk("NaCl", "rocksalt", a=5.64))
    (root / "empty.cif").write_text("")
    (root / "noise.vasp").write_bytes(b"\xff\xfe\x00 not a structure")
    return root
