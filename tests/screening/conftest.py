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


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """Good files of several formats in two folders, bad ones between them, and no structures at all."""
    (tmp_path / "deep").mkdir()
    (tmp_path / ".hidden").mkdir()
    gallium_arsenide = bulk("GaAs", "zincblende", a=5.65)
    doubled = make_supercell(gallium_arsenide, [[1, 0, 0], [0, 1, 0], [0, 0, 2]])
    write(tmp_path / "deep" / "POSCAR_GaAs_112", doubled, format="vasp")
    write(tmp_path / "deep" / "AlN.extxyz", aluminium_nitride())
    write(tmp_path / "salt.cif", bulk("NaCl", "rocksalt", a=5.64))
    write(tmp_path / ".hidden" / "salt.cif", bulk("NaCl", "rocksalt", a=5.64))
    (tmp_path / "empty.cif").write_text("")
    (tmp_path / "noise.vasp").write_bytes(b"\xff\xfe\x00 not a structure")
    (tmp_path / "SOURCES.md").write_text("Where these come from.")
    (tmp_path / "folder.cif").mkdir()
    return tmp_path
