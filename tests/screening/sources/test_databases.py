"""ASE databases and extended XYZ: one unit for each row or frame, the same crystals as read whole."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Iterable
from pathlib import Path

import numpy as np
import pytest
from ase import Atoms
from ase.build import bulk
from ase.calculators.singlepoint import SinglePointCalculator
from ase.db import connect
from ase.io import write

from sitesym.crystals.reading import read_crystals
from sitesym.errors import ReadingError
from sitesym.screening.contents import read_item
from sitesym.screening.sources import databases, work_items
from sitesym.screening.work import WorkItem

#: Id, kind and error code of each unit.
InShort = Callable[[Iterable[WorkItem]], list[tuple[str, str, str]]]


def crystals_of(items: list[WorkItem], folder: Path) -> list[tuple[object, ...]]:
    """What each unit of text holds, read as a file of its format."""
    found = []
    for item in items:
        path = folder / f"unit.{item.file_format}"
        path.write_bytes(item.content)
        (crystal,) = read_crystals(path)
        found.append(
            (crystal.lattice.tobytes(), crystal.positions_frac.tobytes(), crystal.formula, crystal.marks)
        )
    return found


@pytest.fixture
def frames() -> list[Atoms]:
    """Iron with a moment, silicon shifted by an odd amount, and a slab that is not periodic."""
    iron, silicon, slab = bulk("Fe"), bulk("Si"), bulk("Cu")
    iron.set_initial_magnetic_moments([2.2])
    silicon.positions += np.array([1 / 3, 2 / 7, 1e-9])
    silicon.calc = SinglePointCalculator(silicon, energy=1.0, magmoms=np.array([0.25, -0.25]))
    slab.pbc = [True, True, False]
    return [iron, silicon, slab]


def test_rows_hold_the_structures_of_the_database_exactly(
    tmp_path: Path, frames: list[Atoms], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(databases, "PAGE", 1)
    with connect(tmp_path / "s.db") as database:
        for atoms in frames[:2]:
            database.write(atoms, data={"note": "x"})
        database.write(frames[0])
        del database[1]
    items = list(work_items([tmp_path]))
    assert [(item.identity, item.frame) for item in items] == [("s.db#2", "row 2"), ("s.db#3", "row 3")]
    whole = [
        (c.lattice.tobytes(), c.positions_frac.tobytes(), c.formula, c.marks)
        for c in read_crystals(tmp_path / "s.db")
    ]
    assert crystals_of(items, tmp_path) == whole
    assert whole[0][3] != {}


def test_a_database_of_another_program_is_an_error_and_stays_untouched(tmp_path: Path) -> None:
    """Whether its rows are streamed, or it is read whole."""
    path = tmp_path / "other.db"
    with sqlite3.connect(path) as connection:
        connection.execute("CREATE TABLE things (x)")
    connection.close()
    before = path.read_bytes()
    (item,) = work_items([path])
    assert "things" in str(item.error)
    (whole,) = work_items([path], split=False)
    with pytest.raises(ReadingError, match="things"):
        list(read_item(whole, {"frame": "last"}))
    assert path.read_bytes() == before


def test_left_whole_each_file_is_one_unit(tmp_path: Path, frames: list[Atoms]) -> None:
    """In folders, lists and by its own name alike; the last frame is then that of the file."""
    for name in ("s.db", "s.extxyz", "s.traj"):
        write(tmp_path / name, frames[:2])
    (tmp_path / "list.txt").write_text("s.db\ns.extxyz\ns.traj\n")
    inputs = [tmp_path, tmp_path / "list.txt", tmp_path / "s.db"]
    items = list(work_items(inputs, split=False))
    assert [item.identity for item in items[:6]] == ["s.db", "s.extxyz", "s.traj"] * 2
    assert {(item.kind, item.frame) for item in items} == {("path", "")}
    last = [crystal.formula for item in items for _, crystal in read_item(item, {"frame": "last"})]
    assert last == ["Si"] * 7


def test_a_file_that_is_no_database_is_an_error(tmp_path: Path, in_short: InShort) -> None:
    (tmp_path / "s.db").write_bytes(b"no database" * 100)
    assert in_short(work_items([tmp_path])) == [("s.db", "error", "unreadable")]


def test_frames_of_extended_xyz_are_cut_as_they_stand(tmp_path: Path, frames: list[Atoms]) -> None:
    write(tmp_path / "s.extxyz", frames)
    items = list(work_items([tmp_path]))
    assert [(item.identity, item.frame) for item in items] == [
        (f"s.extxyz#{n}", f"structure {n}") for n in (1, 2, 3)
    ]
    assert b"".join(item.content for item in items) == (tmp_path / "s.extxyz").read_bytes()
    assert len(crystals_of(items[:2], tmp_path)) == 2


def test_one_frame_is_one_file(tmp_path: Path, frames: list[Atoms], in_short: InShort) -> None:
    write(tmp_path / "s.extxyz", frames[0])
    assert in_short(work_items([tmp_path])) == [("s.extxyz", "path", "")]


def test_a_broken_frame_keeps_those_before_it(tmp_path: Path, frames: list[Atoms], in_short: InShort) -> None:
    write(tmp_path / "s.extxyz", frames)
    text = (tmp_path / "s.extxyz").read_text()
    (tmp_path / "cut.xyz").write_text(text.rsplit("\n", 2)[0] + "\n")
    (tmp_path / "s.extxyz").write_text(text + "not a number\n1\n")
    kinds = [(identity, code) for identity, _, code in in_short(work_items([tmp_path]))]
    assert kinds[:3] == [("cut.xyz#1", ""), ("cut.xyz#2", ""), ("cut.xyz#3", "count-mismatch")]
    assert kinds[3:] == [(f"s.extxyz#{n}", "") for n in (1, 2, 3)] + [("s.extxyz#4", "count-mismatch")]


def test_a_broken_first_frame_is_left_to_the_reader(tmp_path: Path, in_short: InShort) -> None:
    (tmp_path / "s.xyz").write_text("nonsense\n")
    assert in_short(work_items([tmp_path])) == [("s.xyz", "path", "")]
