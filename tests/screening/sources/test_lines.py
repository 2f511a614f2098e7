"""JSON Lines and lists of paths."""

from __future__ import annotations

import gzip
import json
from collections.abc import Callable, Iterable
from pathlib import Path

import pytest

from sitesym.screening.sources import texts, work_items
from sitesym.screening.work import WorkItem

#: Id, kind and error code of each unit.
InShort = Callable[[Iterable[WorkItem]], list[tuple[str, str, str]]]


def lines(path: Path, *entries: object) -> list[WorkItem]:
    """Units of a JSON Lines file with these entries; bytes are written as they are."""
    raw = [entry if isinstance(entry, bytes) else json.dumps(entry).encode() for entry in entries]
    path.write_bytes(b"\n".join(raw))
    return list(work_items([path]))


def test_a_line_gives_its_id_its_text_and_its_format(tmp_path: Path, poscar: str) -> None:
    one, two = lines(
        tmp_path / "s.jsonl", {"id": "a", "poscar": poscar, "energy": 1}, b"", {"id": 7, "cif": "x"}
    )
    assert (one.identity, one.frame, one.kind, one.file_format) == ("a", "line 1", "text", "vasp")
    assert one.content.decode() == poscar
    assert (two.identity, two.frame, two.file_format) == ("7", "line 3", "cif")


@pytest.mark.parametrize(
    ("entry", "reason"),
    [
        (b"{", "not JSON"),
        (b"[" * 200_000, "not JSON"),
        (b"\xff\xfe", "not JSON"),
        ([1], "no JSON object"),
        ({"poscar": "x"}, "no id"),
        ({"id": True, "poscar": "x"}, "no id"),
        ({"id": "a"}, "no structure"),
        ({"id": "a", "poscar": "x", "cif": "y"}, "no structure"),
        ({"id": "a", "cif": 3}, "no structure"),
    ],
)
def test_a_line_that_is_no_entry_is_an_error_and_the_next_is_read(
    tmp_path: Path, entry: object, reason: str
) -> None:
    bad, good = lines(tmp_path / "s.jsonl", entry, {"id": "b", "cif": "x"})
    assert bad.error is not None
    assert reason in str(bad.error)
    assert (bad.identity, bad.frame) == ("s.jsonl#1", "line 1")
    assert (good.identity, good.kind) == ("b", "text")


def test_ids_are_texts_whatever_they_hold(tmp_path: Path) -> None:
    hostile = ["'; drop table rows; --", "=cmd|' /C calc'!A0", '<script>"\n\t', "\x00", "\ud800"]
    items = lines(tmp_path / "s.jsonl", *({"id": text, "cif": "x"} for text in hostile))
    assert [item.identity for item in items] == [*hostile[:-1], "\\ud800"]


def test_a_line_without_end_is_skipped_and_reported(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, in_short: InShort
) -> None:
    monkeypatch.setattr("sitesym.screening.sources.lines.LARGEST_ENTRY_BYTES", 100)
    items = lines(tmp_path / "s.jsonl", b"x" * 1050, {"id": "b", "cif": "x"})
    assert in_short(items) == [("s.jsonl#1", "error", "too-large"), ("b", "text", "")]
    assert texts.LARGEST_ENTRY_BYTES > 100


def test_compressed_lines_are_read_and_a_cut_stream_ends_in_an_error(tmp_path: Path) -> None:
    entries = "\n".join(json.dumps({"id": str(number), "cif": f"{number}" * 50}) for number in range(3000))
    packed = gzip.compress(entries.encode())
    (tmp_path / "s.jsonl.gz").write_bytes(packed)
    assert len(list(work_items([tmp_path / "s.jsonl.gz"]))) == 3000
    (tmp_path / "s.jsonl.gz").write_bytes(packed[: len(packed) // 2])
    *good, last = work_items([tmp_path / "s.jsonl.gz"])
    assert 0 < len(good) < 3000
    assert last.error is not None
    assert "EOFError" in str(last.error)


def test_a_list_is_of_paths_relative_to_itself(tmp_path: Path, in_short: InShort) -> None:
    (tmp_path / "set").mkdir()
    (tmp_path / "set" / "a b.cif").write_text("")
    (tmp_path / "c.cif").write_text("")
    listing = tmp_path / "set" / "list.txt"
    listing.write_bytes(b"a b.cif\r\n\n../c.cif\nmissing.cif\nlist.txt\n.\n")
    items = list(work_items([listing]))
    assert in_short(items) == [
        ("a b.cif", "path", ""),
        ("../c.cif", "path", ""),
        ("missing.cif", "path", ""),
        ("list.txt", "error", "usage"),
        ("a b.cif", "path", ""),
    ]
    assert Path(items[1].source) == tmp_path / "c.cif"


def test_a_list_may_begin_with_the_mark_of_utf_8_and_a_line_with_nul_is_an_error(
    tmp_path: Path, in_short: InShort
) -> None:
    (tmp_path / "a.cif").write_text("")
    (tmp_path / "list.txt").write_bytes(b"\xef\xbb\xbfa.cif\r\nb\0c.cif\na.cif\n")
    items = list(work_items([tmp_path / "list.txt"]))
    assert in_short(items) == [
        ("a.cif", "path", ""),
        ("list.txt#2", "error", "unreadable"),
        ("a.cif", "path", ""),
    ]
    assert Path(items[0].source) == tmp_path / "a.cif"
