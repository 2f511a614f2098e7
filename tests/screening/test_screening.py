"""A folder becomes rows: stable, complete, with verdicts counted and failures explained."""

from __future__ import annotations

from collections import Counter
from pathlib import Path

import pytest
from ase.build import bulk
from ase.io import write

from sitesym.crystals import Crystal, read_crystals
from sitesym.errors import ReadingError
from sitesym.groups import PointGroup
from sitesym.groups.symbols import SCHOENFLIES
from sitesym.screening import COLUMNS, Row, Screener, rows, screen_folder, structure_files
from sitesym.tensors import independent_count, kind


def by_id(folder: Path) -> dict[str, Row]:
    """Rows of a folder under their ids."""
    return {str(row["id"]): row for row in screen_folder(folder)}


def test_files_come_sorted_by_path_and_hidden_or_unnamed_ones_are_left_alone(folder: Path) -> None:
    names = [path.relative_to(folder).as_posix() for path in structure_files(folder)]
    assert names == ["deep/AlN.extxyz", "deep/POSCAR_GaAs_112", "empty.cif", "noise.vasp", "salt.cif"]


def test_every_file_is_one_row_with_every_column(folder: Path) -> None:
    found = list(screen_folder(folder))
    assert Counter(row["status"] for row in found) == {"ok": 3, "error": 2}
    assert all(tuple(row) == COLUMNS for row in found)


def test_a_bad_file_is_a_row_that_names_its_error(folder: Path) -> None:
    for name in ("empty.cif", "noise.vasp"):
        row = by_id(folder)[name]
        assert row["error_code"]
        assert "next step: " in str(row["error_message"])
        assert row["piezoelectric"] is None


def test_a_supercell_keeps_the_point_group_of_its_crystal(folder: Path) -> None:
    row = by_id(folder)["deep/POSCAR_GaAs_112"]
    assert (row["point_group"], row["space_group_number"], row["atoms"]) == ("-43m", 216, 4)
    assert row["count_piezoelectric_strain"] == 1


def test_verdicts_of_three_structure_types(folder: Path) -> None:
    """Zinc blende piezoelectric, wurtzite polar too, rock salt neither: common practice, no source."""
    found = by_id(folder)
    columns = ("centrosymmetric", "chiral", "polar", "piezoelectric", "pyroelectric", "second_harmonic")
    verdicts = {
        name: tuple(row[column] for column in columns) for name, row in found.items() if row["status"] == "ok"
    }
    assert verdicts == {
        "deep/POSCAR_GaAs_112": (False, False, False, True, False, True),
        "deep/AlN.extxyz": (False, False, True, True, True, True),
        "salt.cif": (True, False, False, False, False, False),
    }


def test_a_file_of_several_structures_gives_a_row_each(tmp_path: Path) -> None:
    write(tmp_path / "two.extxyz", [bulk("NaCl", "rocksalt", a=5.64), bulk("GaAs", "zincblende", a=5.65)])
    found = list(screen_folder(tmp_path))
    assert [row["point_group"] for row in found] == ["m-3m", "-43m"]
    assert len({row["id"] for row in found}) == 2


def test_a_missing_folder_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(ReadingError, match="no such folder"):
        list(screen_folder(tmp_path / "nowhere"))


def test_a_failure_nobody_foresaw_is_a_row_too(folder: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def fail_on_salt(path: Path) -> tuple[Crystal, ...]:
        if path.name == "salt.cif":
            raise ZeroDivisionError("nobody thought of this")
        return read_crystals(path)

    monkeypatch.setattr(rows, "read_crystals", fail_on_salt)
    found = by_id(folder)
    assert len(found) == 5
    assert found["salt.cif"]["status"] == "error"
    assert "ZeroDivisionError: nobody thought of this" in str(found["salt.cif"]["error_message"])
    assert found["deep/AlN.extxyz"]["status"] == "ok"


def test_counts_kept_for_a_group_are_those_of_that_group() -> None:
    """One screener over all classes in turn: each answer equals the one computed for the group alone."""
    screener = Screener()
    for symbol in [*SCHOENFLIES, *SCHOENFLIES]:
        group = PointGroup.from_symbol(symbol)
        counts = screener.counts(group)
        assert {name: independent_count(kind(name), group) for name in counts} == counts


def test_the_number_of_classes_with_each_property() -> None:
    """20 piezoelectric, 10 pyroelectric, 15 optically active: Nye, Physical Properties of Crystals (1957)."""
    screener = Screener()
    counts = [screener.counts(PointGroup.from_symbol(symbol)) for symbol in SCHOENFLIES]
    having = Counter(name for found in counts for name, number in found.items() if number)
    assert having["piezoelectric-strain"] == 20
    assert having["pyroelectric"] == 10
    assert having["gyration"] == 15
    assert having["permittivity"] == 32
