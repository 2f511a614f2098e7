"""Archives: read as a stream, nothing written to disk, nothing outside reached."""

from __future__ import annotations

import io
import os
import tarfile
import tracemalloc
import zipfile
from collections.abc import Callable, Iterable
from pathlib import Path

import pytest

from sitesym.screening.sources import work_items
from sitesym.screening.work import WorkItem

#: Id, kind and error code of each unit.
InShort = Callable[[Iterable[WorkItem]], list[tuple[str, str, str]]]

NAMES = [
    "a.cif",
    "set/b.vasp",
    "notes.md",
    ".hidden.cif",
    "/etc/c.cif",
    "../d.cif",
    "x/../../e.cif",
    "f/POSCAR",
]
EXPECTED = [
    ("a.cif", "bytes", ""),
    ("set/b.vasp", "bytes", ""),
    ("/etc/c.cif", "error", "unsafe-path"),
    ("../d.cif", "error", "unsafe-path"),
    ("x/../../e.cif", "error", "unsafe-path"),
    ("f/POSCAR", "bytes", ""),
]


def write_tar(path: Path, names: list[str], mode: str = "w") -> Path:
    """An archive whose members hold their own names."""
    with tarfile.open(path, mode) as archive:  # type: ignore[call-overload]
        for name in names:
            member = tarfile.TarInfo(name)
            member.size = len(name)
            archive.addfile(member, io.BytesIO(name.encode()))
    return path


def write_zip(path: Path, names: list[str]) -> Path:
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        for name in names:
            archive.writestr(name, name)
    return path


@pytest.mark.parametrize(
    ("suffix", "mode"), [(".tar", "w"), (".tar.gz", "w:gz"), (".tgz", "w:gz"), (".tar.xz", "w:xz")]
)
def test_a_tar_gives_its_structures_and_refuses_paths_that_leave_it(
    tmp_path: Path, suffix: str, mode: str, in_short: InShort
) -> None:
    path = write_tar(tmp_path / f"s{suffix}", NAMES, mode)
    items = list(work_items([path]))
    assert in_short(items) == EXPECTED
    assert [item.content.decode() for item in items if item.kind == "bytes"] == [
        "a.cif",
        "set/b.vasp",
        "f/POSCAR",
    ]
    assert items[1].source == f"{path}!set/b.vasp"
    assert os.listdir(tmp_path) == [path.name]


def test_a_zip_gives_the_same(tmp_path: Path, in_short: InShort) -> None:
    items = list(work_items([write_zip(tmp_path / "s.zip", NAMES)]))
    assert in_short(items) == EXPECTED
    assert [item.content.decode() for item in items if item.kind == "bytes"] == [
        "a.cif",
        "set/b.vasp",
        "f/POSCAR",
    ]


@pytest.mark.parametrize("name", [r"C:\x.cif", r"..\x.cif", r"\\host\x.cif"])
def test_paths_of_another_system_are_refused_too(tmp_path: Path, name: str, in_short: InShort) -> None:
    assert in_short(work_items([write_tar(tmp_path / "s.tar", [name])])) == [(name, "error", "unsafe-path")]


def test_links_are_not_followed(tmp_path: Path, in_short: InShort) -> None:
    with tarfile.open(tmp_path / "s.tar", "w") as archive:
        for name, kind in (("soft.cif", tarfile.SYMTYPE), ("hard.cif", tarfile.LNKTYPE)):
            member = tarfile.TarInfo(name)
            member.type, member.linkname = kind, "/etc/passwd"
            archive.addfile(member)
    with zipfile.ZipFile(tmp_path / "s.zip", "w") as packed:
        link = zipfile.ZipInfo("soft.cif")
        link.external_attr = 0o120777 << 16
        packed.writestr(link, "/etc/passwd")
    codes = [code for _, _, code in in_short(work_items([tmp_path / "s.tar", tmp_path / "s.zip"]))]
    assert codes == ["unsafe-path"] * 3


def test_members_of_the_same_name_stay_apart(tmp_path: Path) -> None:
    items = list(work_items([write_tar(tmp_path / "s.tar", ["a.cif", "a.cif"])]))
    assert len({(item.source, item.frame) for item in items}) == 2


def test_a_member_that_expands_without_end_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, in_short: InShort
) -> None:
    monkeypatch.setattr("sitesym.screening.sources.archives.LARGEST_ENTRY_BYTES", 1000)
    with zipfile.ZipFile(tmp_path / "s.zip", "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("bomb.cif", b"0" * 1_000_000)
        archive.writestr("good.cif", b"0")
    assert in_short(work_items([tmp_path / "s.zip"])) == [
        ("bomb.cif", "error", "too-large"),
        ("good.cif", "bytes", ""),
    ]


@pytest.mark.parametrize("suffix", [".tar", ".tar.gz", ".zip"])
def test_an_archive_that_is_none_is_one_error(tmp_path: Path, suffix: str, in_short: InShort) -> None:
    (tmp_path / f"s{suffix}").write_bytes(b"no archive" * 100)
    assert in_short(work_items([tmp_path / f"s{suffix}"])) == [(f"s{suffix}", "error", "unreadable")]


@pytest.mark.parametrize(("length", "whole"), [(700, 1), (1024, 1), (1030, 1), (1536, 1), (1600, 2)])
def test_a_cut_archive_gives_what_it_holds_and_an_error(
    tmp_path: Path, length: int, whole: int, in_short: InShort
) -> None:
    path = write_tar(tmp_path / "s.tar", ["a.cif", "b.cif"])
    path.write_bytes(path.read_bytes()[:length])
    kinds = [kind for _, kind, _ in in_short(work_items([path]))]
    assert kinds[-1] == "error"
    assert kinds.count("bytes") == whole


def test_a_damaged_header_is_not_taken_for_the_end(tmp_path: Path, in_short: InShort) -> None:
    path = write_tar(tmp_path / "s.tar", ["a.cif", "b.cif", "c.cif"])
    raw = bytearray(path.read_bytes())
    raw[1024 + 150] ^= 0xFF  # in the checksum of the second header
    path.write_bytes(bytes(raw))
    assert [kind for _, kind, _ in in_short(work_items([path]))] == ["bytes", "error"]


def test_a_damaged_member_of_a_zip_costs_that_member(tmp_path: Path, in_short: InShort) -> None:
    path = write_zip(tmp_path / "s.zip", ["aaaaaaaaaaaaaaaa.cif", "b.cif"])
    raw = bytearray(path.read_bytes())
    raw[30 + 20 + 4] ^= 0xFF  # inside the first member, behind its header and its name of 20 bytes
    path.write_bytes(bytes(raw))
    assert [kind for _, kind, _ in in_short(work_items([path]))] == ["error", "bytes"]


def test_memory_does_not_grow_with_the_members_of_a_tar(tmp_path: Path) -> None:
    path = write_tar(tmp_path / "s.tar", [f"{number}.cif" for number in range(600)])

    def peak(count: int) -> int:
        items = work_items([path])
        tracemalloc.start()
        for _ in range(count):
            next(items)
        size = tracemalloc.get_traced_memory()[1]
        tracemalloc.stop()
        return size

    assert peak(600) < peak(200) + 100_000


def test_a_database_in_an_archive_says_what_to_do(tmp_path: Path) -> None:
    with zipfile.ZipFile(tmp_path / "a.zip", "w") as archive:
        archive.writestr("rows.db", b"SQLite format 3\0")
    (item,) = work_items([tmp_path / "a.zip"])
    assert item.error is not None
    assert (item.error.what, item.error.next_step) == (
        "a database inside an archive is not read",
        "take it out and name it",
    )
