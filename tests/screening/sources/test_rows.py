"""The same structures give the same rows, whichever source they come from."""

from __future__ import annotations

import json
import shutil
import tarfile
import zipfile
from collections.abc import Callable
from pathlib import Path

from ase.db import connect
from ase.io import read, write

from sitesym.screening import Screening, Settings, Task, screen
from sitesym.screening.pool import Pool
from sitesym.screening.sources import work_items

STRUCTURES = Path(__file__).parents[3] / "structures"
NAMES = ["diamond_C.vasp", "quartz_SiO2.vasp", "wurtzite_ZnO.vasp"]
SAME = (
    "formula", "atoms", "space_group_number", "space_group", "point_group", "polar", "distinct_sites",
    "highest_site_symmetry", "count_permittivity", "count_piezoelectric_strain", "status",
)  # fmt: skip


def make_folder(path: Path) -> Path:
    path.mkdir()
    for name in NAMES:
        shutil.copy(STRUCTURES / name, path)
    return path


def make_tar(path: Path) -> Path:
    with tarfile.open(path.with_suffix(".tar.gz"), "w:gz") as archive:
        for name in NAMES:
            archive.add(STRUCTURES / name, arcname=f"deep/{name}")
    return path.with_suffix(".tar.gz")


def make_zip(path: Path) -> Path:
    with zipfile.ZipFile(path.with_suffix(".zip"), "w") as archive:
        for name in NAMES:
            archive.write(STRUCTURES / name, name)
    return path.with_suffix(".zip")


def make_lines(path: Path) -> Path:
    entries = ({"id": name, "poscar": (STRUCTURES / name).read_text()} for name in NAMES)
    path.with_suffix(".jsonl").write_text("\n".join(map(json.dumps, entries)))
    return path.with_suffix(".jsonl")


def make_list(path: Path) -> Path:
    path.with_suffix(".txt").write_text("\n".join(str(STRUCTURES / name) for name in NAMES))
    return path.with_suffix(".txt")


def make_database(path: Path) -> Path:
    with connect(path.with_suffix(".db")) as database:
        for name in NAMES:
            database.write(read(STRUCTURES / name, format="vasp"))
    return path.with_suffix(".db")


def make_frames(path: Path) -> Path:
    write(path.with_suffix(".extxyz"), [read(STRUCTURES / name, format="vasp") for name in NAMES])
    return path.with_suffix(".extxyz")


def make_trajectory(path: Path) -> Path:
    write(path.with_suffix(".traj"), [read(STRUCTURES / name, format="vasp") for name in NAMES])
    return path.with_suffix(".traj")


MAKERS: list[Callable[[Path], Path]] = [
    make_folder, make_tar, make_zip, make_lines, make_list, make_database, make_frames, make_trajectory,
]  # fmt: skip


def test_every_source_gives_the_same_rows(tmp_path: Path) -> None:
    inputs = [make(tmp_path / make.__name__) for make in MAKERS]
    settings = Settings(ladder=False, properties=("permittivity", "piezoelectric-strain"))
    with Screening(Task(settings, 60.0, 4000.0), lambda task: Pool(task, 1)) as run:
        rows = list(run.rows(work_items(inputs)))
    assert len(rows) == len(MAKERS) * len(NAMES)
    assert len({(row["source"], row["frame"]) for row in rows}) == len(rows)
    tar = inputs[MAKERS.index(make_tar)]
    members = [(row["id"], row["source"]) for row in rows if str(row["source"]).startswith(str(tar))]
    assert members == [(f"deep/{name}", f"{tar}!deep/{name}") for name in NAMES]
    expected = [{name: row[name] for name in SAME} for row in rows[:3]]
    assert [row["space_group_number"] for row in expected] == [227, 152, 186]
    for start in range(0, len(rows), 3):
        got = [{name: row[name] for name in SAME} for row in rows[start : start + 3]]
        assert got == expected, rows[start]["source"]


def test_one_frame_is_taken_of_files_members_and_inline_texts_alike(tmp_path: Path) -> None:
    """What holds a single structure has a last one; a file of several gives one row."""
    inputs = [make(tmp_path / make.__name__) for make in (make_tar, make_lines, make_frames, make_trajectory)]
    with tarfile.open(tmp_path / "frames.tar", "w") as archive:
        archive.add(inputs[-1], arcname="frames.traj")
    settings = Settings(ladder=False, properties=("permittivity",), frame="last")
    rows = list(screen([*inputs, tmp_path / "frames.tar"], settings, workers=1))
    assert {row["status"] for row in rows} == {"ok"}
    last = rows[2]["space_group_number"]
    assert [row["space_group_number"] for row in rows[-3:]] == [last] * 3
    assert len(rows) == 2 * len(NAMES) + 3
