"""The store: rows written once, replaced when something changed, kept when the disk is full."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterator
from pathlib import Path

import pytest

from sitesym.errors import BrokenSourceError, StoreError
from sitesym.screening import Row, Settings, Store, WorkItem, columns_for
from sitesym.screening.failures import blank_row
from sitesym.screening.schema import APPLICATION_ID, VERSION
from sitesym.screening.work import content_hash

SETTINGS = Settings(ladder=False)


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """Where a store is to be."""
    return tmp_path / "rows.sitesym"


def item(name: str, text: str = "content") -> WorkItem:
    """A unit of work with a text."""
    return WorkItem.of_text("lines", name, name, text, "vasp")


def row(unit: WorkItem, **values: str | int | float | bool) -> Row:
    """A row of the unit."""
    return blank_row(unit, "", SETTINGS) | {"status": "ok"} | values


def put(store: Store, unit: WorkItem, *rows: Row) -> None:
    """Write rows of a unit, permanently."""
    store.put(unit, content_hash(unit), rows or (row(unit),))
    store.commit()


def stored(path: Path) -> list[Row]:
    """All rows of the store at a path."""
    with Store.reading(path) as store:
        return list(store.rows())


def test_values_come_back_with_their_types(path: Path) -> None:
    unit = item("line 1")
    written = row(unit, point_group="-1", formula="NaN", polar=False, atoms=3, seconds=0.5, space_group="222")
    with Store.writing(path, SETTINGS) as store:
        put(store, unit, written)
    assert stored(path) == [written]
    assert {type(stored(path)[0][name]) for name in ("point_group", "space_group")} == {str}


def test_rows_are_ordered_by_number_whatever_the_order_of_writing(path: Path) -> None:
    with Store.writing(path, SETTINGS) as store:
        for number in (10, 2, 1, 11):
            put(store, item(f"line {number}"))
    assert [found["id"] for found in stored(path)] == ["line 1", "line 2", "line 10", "line 11"]


def test_a_unit_written_again_replaces_all_its_rows(path: Path) -> None:
    unit = item("line 1")
    with Store.writing(path, SETTINGS) as store:
        put(store, unit, *(row(unit, atoms=number) for number in range(3)))
        put(store, unit, row(unit, atoms=9))
    assert [found["atoms"] for found in stored(path)] == [9]


def test_the_store_holds_a_unit_until_content_settings_or_name_change(path: Path) -> None:
    with Store.writing(path, SETTINGS) as store:
        put(store, item("line 1"))
        assert store.holds(item("line 1"))
        assert not store.holds(item("line 1", "other content"))
        assert not store.holds(item("line 2"))
    with Store.writing(path, Settings(ladder=False, tolerance_angstrom=0.1)) as store:
        assert not store.holds(item("line 1"))
    with Store.writing(path, SETTINGS) as store:
        assert store.holds(item("line 1"))


def test_a_file_that_changes_is_not_held(path: Path, tmp_path: Path) -> None:
    file = tmp_path / "a.vasp"
    file.write_text("one")
    with Store.writing(path, SETTINGS) as store:
        put(store, WorkItem.of_path(file, "a"))
        assert store.holds(WorkItem.of_path(file, "a"))
        file.write_text("two")
        assert not store.holds(WorkItem.of_path(file, "a"))
        file.unlink()
        put(store, WorkItem.of_path(file, "a"))
        assert store.holds(WorkItem.of_path(file, "a"))
        file.mkdir()
        assert not store.holds(WorkItem.of_path(file, "a"))


def test_what_ended_its_process_is_tried_again_on_request(path: Path) -> None:
    unit = item("line 1")
    with Store.writing(path, SETTINGS) as store:
        put(store, unit, row(unit, status="timed-out"))
        assert store.holds(unit)
        assert not store.holds(unit, retry=True)


def test_other_properties_add_columns_and_leave_rows_alone(path: Path) -> None:
    with Store.writing(path, SETTINGS) as store:
        put(store, item("line 1"), row(item("line 1"), count_permittivity=6))
    other = Settings(properties=("seebeck",))
    with Store.writing(path, other) as store:
        unit = item("line 2")
        put(store, unit, blank_row(unit, "", other) | {"status": "ok", "count_seebeck": 9})
    first, second = stored(path)
    assert (first["count_permittivity"], first["count_seebeck"]) == (6, None)
    assert (second["count_permittivity"], second["count_seebeck"]) == (None, 9)
    with Store.reading(path) as store:
        assert store.columns == columns_for((*SETTINGS.properties, "seebeck"))
        assert [found["properties"] for found in store.settings_documents()] == [
            list(SETTINGS.properties),
            ["seebeck"],
        ]


def test_hostile_text_is_kept_as_text(path: Path) -> None:
    names = ["'; drop table items; --", "<script>", "=cmd", 'a"b', "line\nbreak", "nul\0", "\udcff"]
    with Store.writing(path, SETTINGS) as store:
        for name in names:
            put(store, item(name))
            assert store.holds(item(name))
    assert {found["id"] for found in stored(path)} == {*names[:-1], "\\udcff"}


def test_two_runs_exclude_each_other_and_a_reader_does_not(path: Path) -> None:
    with Store.writing(path, SETTINGS) as store:
        put(store, item("line 1"))
        with pytest.raises(StoreError, match=r"another run is writing to the store\n.*process \d+ on "):
            Store.writing(path, SETTINGS)
        assert len(stored(path)) == 1
    Store.writing(path, SETTINGS).close()
    assert not path.with_name(path.name + ".lock").exists()


def test_a_full_disk_keeps_what_was_done(path: Path) -> None:
    """SQLite reports a database at its largest size as it reports a full disk."""
    done: list[int] = []

    def fill(store: Store) -> None:
        for number in range(10_000):
            unit = item(f"line {number}")
            put(store, unit, row(unit, remarks="x" * 300))
            done.append(number)

    with Store.writing(path, SETTINGS) as store:
        store.connection.execute("PRAGMA max_page_count = 60")
        with pytest.raises(StoreError, match="database or disk is full"):
            fill(store)
    assert len(done) > 50
    assert [found["id"] for found in stored(path)] == [f"line {number}" for number in done]
    with Store.writing(path, SETTINGS) as store:
        assert store.holds(item("line 0"))


def test_a_store_that_cannot_be_written_is_an_error(path: Path) -> None:
    with Store.writing(path, SETTINGS) as store:
        store.connection.execute("PRAGMA query_only = 1")
        with pytest.raises(StoreError, match="readonly"):
            put(store, item("line 1"))
    with pytest.raises(StoreError, match="no-such-folder"):
        Store.writing(path.parent / "no-such-folder" / "store", SETTINGS)
    with pytest.raises(StoreError):
        Store.reading(path.parent / "nothing-here")


@pytest.fixture
def foreign(tmp_path: Path) -> Iterator[sqlite3.Connection]:
    """A database of something else at other.db."""
    connection = sqlite3.connect(tmp_path / "other.db")
    connection.execute("CREATE TABLE systems (id INTEGER)")
    connection.commit()
    yield connection
    connection.close()


def test_a_database_of_something_else_is_left_alone(foreign: sqlite3.Connection, tmp_path: Path) -> None:
    before = (tmp_path / "other.db").read_bytes()
    with pytest.raises(StoreError, match="database of something else"):
        Store.writing(tmp_path / "other.db", SETTINGS)
    assert (tmp_path / "other.db").read_bytes() == before
    (tmp_path / "text.db").write_text("not a database at all, but long enough to be looked at" * 30)
    with pytest.raises(StoreError, match="not a database"):
        Store.writing(tmp_path / "text.db", SETTINGS)


def test_a_store_of_a_later_version_is_refused(path: Path) -> None:
    Store.writing(path, SETTINGS).close()
    connection = sqlite3.connect(path)
    assert connection.execute("PRAGMA application_id").fetchone() == (APPLICATION_ID,)
    connection.execute(f"PRAGMA user_version = {VERSION + 1}")
    connection.close()
    for opened in (Store.reading, lambda name: Store.writing(name, SETTINGS)):
        with pytest.raises(StoreError, match="later version"):
            opened(path)


def test_a_store_that_is_not_there_is_said_to_be_missing_and_is_not_made(path: Path) -> None:
    with pytest.raises(StoreError, match="there is no such store"):
        Store.reading(path)
    assert not path.exists()


@pytest.mark.parametrize("name", ["undecodable \udcff", "a ?x=1#y %20 b", ":memory:", "file:x?mode=memory"])
def test_any_file_name_is_that_of_a_file(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str) -> None:
    monkeypatch.chdir(tmp_path)
    unit = item("line 1")
    with Store.writing(name, SETTINGS) as store:
        put(store, unit)
    assert (tmp_path / name).is_file()
    assert stored(Path(name)) == [row(unit)]


def test_no_name_is_no_store(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    (tmp_path / "here").mkdir()
    monkeypatch.chdir(tmp_path / "here")
    with pytest.raises(StoreError):
        Store.writing("", SETTINGS)


def test_a_link_leads_to_the_same_lock(path: Path, tmp_path: Path) -> None:
    (tmp_path / "link").symlink_to(path)
    with Store.writing(path, SETTINGS), pytest.raises(StoreError, match="another run is writing"):
        Store.writing(tmp_path / "link", SETTINGS)


def test_a_store_in_a_folder_that_is_read_only_is_read(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Those who run the tests may be allowed everything: what the system says is put in its place."""
    unit = item("line 1")
    with Store.writing(path, SETTINGS) as store:
        put(store, unit)
    before = set(path.parent.iterdir())
    monkeypatch.setattr(os, "access", lambda place, mode: not mode & os.W_OK)
    with Store.reading(path) as store:
        assert list(store.rows()) == [row(unit)]
        assert set(path.parent.iterdir()) == before


def test_a_source_that_is_read_again_loses_what_it_no_longer_holds(path: Path) -> None:
    """One frame that became two, a list that became shorter; a file that was not named keeps its rows."""

    def run(*units: WorkItem) -> list[tuple[object, object]]:
        with Store.writing(path, SETTINGS) as store:
            for unit in units:
                if not store.holds(unit):
                    put(store, unit)
            store.drop_unseen()
        return [(row["source"], row["frame"]) for row in stored(path)]

    whole, one, two = (WorkItem.of_text("/x", frame, "x", "content", "vasp") for frame in ("", "one", "two"))
    other = WorkItem.of_text("/y", "", "y", "content", "vasp")
    assert run(whole, other) == [("/x", ""), ("/y", "")]
    assert run(one, two) == [("/x", "one"), ("/x", "two"), ("/y", "")]
    assert run(two) == [("/x", "two"), ("/y", "")]
    assert run(other) == [("/x", "two"), ("/y", "")]


def test_an_archive_that_is_whole_again_loses_its_error(path: Path) -> None:
    member = WorkItem.of_text("/a.zip!x.cif", "member 1", "x.cif", "content", "cif")
    cut = WorkItem.of_error("/a.zip", "after member 1", "a.zip", StoreError("cut", "", "", ""))
    elsewhere = WorkItem.of_error("/b.zip", "after member 1", "b.zip", StoreError("cut", "", "", ""))
    for units, wanted in (((member, cut, elsewhere), 3), ((member,), 2)):
        with Store.writing(path, SETTINGS) as store:
            for unit in units:
                put(store, unit)
            store.drop_unseen()
        assert len(stored(path)) == wanted
    assert [row["source"] for row in stored(path)] == ["/a.zip!x.cif", "/b.zip"]


def test_a_source_that_broke_off_keeps_what_lies_beyond(path: Path) -> None:
    lines = [item(f"line {number}") for number in (1, 2, 3)]
    cut = WorkItem.of_error("lines", "line 2", "lines#2", BrokenSourceError("cut"))
    for units in (lines, [lines[0], cut]):
        with Store.writing(path, SETTINGS) as store:
            for unit in units:
                put(store, unit)
            store.drop_unseen()
    assert [row["frame"] for row in stored(path)] == ["line 1", "line 2", "line 3"]
