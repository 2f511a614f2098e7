"""Folders and patterns: order, what is taken, what becomes an error, and that nothing is walked ahead."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from sitesym.errors import ReadingError, UsageError
from sitesym.screening.sources import folder_items, work_items
from sitesym.screening.sources.folders import pattern_paths


def make(root: Path, *names: str) -> None:
    """Empty files below a folder."""
    for name in names:
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        (root / name).write_text("")


def ids(folder: Path) -> list[str]:
    return [item.identity for item in folder_items(folder)]


def test_files_come_in_the_order_of_their_paths_as_texts(tmp_path: Path) -> None:
    names = ["b.cif", "a/z.cif", "a.cif", "a-1/x.cif", "a/b/c.vasp", "a0.cif", "POSCAR", "Ä.cif"]
    make(tmp_path, *names)
    assert ids(tmp_path) == sorted(names)


def test_only_visible_files_of_known_formats_are_taken(tmp_path: Path) -> None:
    make(tmp_path, "a.cif", "notes.md", ".b.cif", ".hidden/c.cif", "tar.tar.gz", "list.txt")
    assert ids(tmp_path) == ["a.cif"]


def test_a_folder_named_like_a_structure_is_an_error_only_when_it_holds_none(tmp_path: Path) -> None:
    (tmp_path / "x.cif").mkdir()
    make(tmp_path, "poscar_set/a.cif")
    assert [(item.identity, item.kind) for item in folder_items(tmp_path)] == [
        ("poscar_set/a.cif", "path"),
        ("x.cif", "error"),
    ]


def test_a_dangling_link_is_a_unit_and_a_linked_folder_is_not_followed(tmp_path: Path) -> None:
    (tmp_path / "gone.cif").symlink_to(tmp_path / "nothing")
    (tmp_path / "loop").symlink_to(tmp_path, target_is_directory=True)
    (tmp_path / "loop.cif").symlink_to(tmp_path, target_is_directory=True)
    assert ids(tmp_path) == ["gone.cif"]


def test_a_link_to_itself_costs_one_row(tmp_path: Path) -> None:
    (tmp_path / "self.cif").symlink_to(tmp_path / "self.cif")
    make(tmp_path, "z.cif")
    assert ids(tmp_path) == ["self.cif", "z.cif"]


def test_folders_nested_without_end_are_an_error_and_the_walk_goes_on(tmp_path: Path) -> None:
    make(tmp_path, "a/" * 250 + "x.cif", "b/" * 150 + "y.cif")
    deep, good = folder_items(tmp_path)
    assert "more than 200" in str(deep.error)
    assert good.identity.endswith("/y.cif")


def test_a_folder_that_cannot_be_opened_is_a_row_and_the_walk_goes_on(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    make(tmp_path, "a/x.cif", "b/y.cif")
    scandir = os.scandir

    def refusing(path: str) -> object:
        if path.endswith("a"):
            raise PermissionError(13, "Permission denied", path)
        return scandir(path)

    monkeypatch.setattr(os, "scandir", refusing)
    items = list(folder_items(tmp_path))
    assert [(item.identity, item.kind) for item in items] == [("a", "error"), ("b/y.cif", "path")]
    assert "Permission denied" in str(items[0].error)


def test_a_folder_is_walked_no_further_than_its_units_are_asked_for(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    make(tmp_path, *(f"{number}/x.cif" for number in range(5)))
    opened: list[str] = []
    scandir = os.scandir
    monkeypatch.setattr(os, "scandir", lambda path: (opened.append(str(path)), scandir(path))[1])
    items = folder_items(tmp_path)
    next(items)
    next(items)
    assert [Path(path).name for path in opened[1:]] == ["0", "1"]


def test_patterns_match_as_in_a_shell(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    make(tmp_path, "a/1.cif", "a/2.vasp", "b/3.cif", "b/c/4.cif", "5.cif", ".h/6.cif", "b/.7.cif")
    monkeypatch.chdir(tmp_path)
    assert list(pattern_paths("*/*.cif")) == ["a/1.cif", "b/3.cif"]
    assert list(pattern_paths("**/*.cif")) == ["5.cif", "a/1.cif", "b/3.cif", "b/c/4.cif"]
    assert list(pattern_paths("[ab]/?.*")) == ["a/1.cif", "a/2.vasp", "b/3.cif"]
    assert list(pattern_paths(f"{tmp_path}/b/*.cif")) == [f"{tmp_path}/b/3.cif"]
    assert list(pattern_paths("nothing*")) == []


def test_a_pattern_of_folders_means_their_files(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    make(tmp_path, "run1/a.cif", "run2/b.cif", "other/c.cif")
    monkeypatch.chdir(tmp_path)
    assert [item.identity for item in work_items(["run*"])] == ["a.cif", "b.cif"]
    assert [item.identity for item in work_items(["**"])] == ["other/c.cif", "run1/a.cif", "run2/b.cif"]


def test_a_pattern_that_would_double_its_matches_is_refused() -> None:
    with pytest.raises(UsageError, match="ambiguous"):
        work_items(["**/a/**/*.cif"])


@pytest.mark.parametrize("name", ["no-such-folder", "no-such-*.cif"])
def test_a_name_that_stands_for_nothing_is_an_error_before_any_unit(name: str) -> None:
    with pytest.raises(ReadingError, match="no such"):
        work_items([name])


def test_a_name_that_is_a_pattern_and_a_file_means_the_file(tmp_path: Path) -> None:
    make(tmp_path, "a[1].cif", "a1.cif")
    assert [Path(item.source).name for item in work_items([tmp_path / "a[1].cif"])] == ["a[1].cif"]


def test_undecodable_names_have_ids_that_a_store_can_hold(tmp_path: Path) -> None:
    (Path(os.fsdecode(os.fsencode(tmp_path) + b"/a\xff.cif"))).write_text("")
    (item,) = folder_items(tmp_path)
    assert item.identity == r"a\udcff.cif"
    assert os.path.exists(item.source)
