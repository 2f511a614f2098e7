"""The engine: order, completeness, and what a file may do to the process that works on it."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import threading
import time
from collections import Counter
from pathlib import Path

import pytest

from sitesym.errors import ReadingError, ScreeningError, UsageError
from sitesym.screening import COLUMNS, Row, Screening, Settings, Task, WorkItem, screen
from sitesym.screening.pool import Pool
from sitesym.screening.sources import work_items
from tests.screening.conftest import salt_text

FAST = Settings(ladder=False, finder="moyo")
POISON = "tests.screening.poison:read"
ROOT = Path(__file__).parents[2]


@pytest.fixture(autouse=True)
def _importable(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.syspath_prepend(str(ROOT))


def run_of(task: Task, workers: int = 2) -> Screening:
    """A run with that many processes."""
    return Screening(task, lambda task: Pool(task, workers))


def poisoned(folder: Path, workers: int = 2, seconds: float = 3.0) -> dict[str, Row]:
    """Rows of a folder through the reader of poisons, by id; none may be doubled."""
    with run_of(Task(FAST, seconds, 1000.0, reader=POISON), workers) as run:
        rows = list(run.rows(work_items([folder])))
    assert len({row["id"] for row in rows}) == len(rows)
    return {str(row["id"]): row for row in rows}


def test_rows_come_in_the_order_of_paths_each_with_every_column(folder: Path) -> None:
    found = list(screen([folder], FAST, workers=2))
    assert [row["id"] for row in found] == [
        "deep/AlN.extxyz", "deep/POSCAR_GaAs_112", "empty.cif", "noise.vasp", "salt.cif",
    ]  # fmt: skip
    assert Counter(row["status"] for row in found) == {"ok": 3, "error": 2}
    assert all(tuple(row) == COLUMNS for row in found)
    assert [row["point_group"] for row in found] == ["6mm", "-43m", None, None, "m-3m"]


def test_a_bad_file_is_a_row_that_names_its_error(folder: Path) -> None:
    found = {row["id"]: row for row in screen([folder], FAST, workers=1)}
    for name in ("empty.cif", "noise.vasp"):
        assert found[name]["error_code"]
        assert "next step: " in str(found[name]["error_message"])
        assert found[name]["piezoelectric"] is None


def test_many_structures_through_few_processes_keep_their_order() -> None:
    texts = [salt_text(5.0 + number / 500.0) for number in range(300)]
    items = [WorkItem.of_text("lines", str(n), f"salt {n}", text, "vasp") for n, text in enumerate(texts)]
    with run_of(Task(FAST, 60.0, 1000.0)) as run:
        rows = list(run.rows(items))
    assert [row["id"] for row in rows] == [item.identity for item in items]
    assert {row["space_group"] for row in rows} == {"Fm-3m"}
    assert run.tally.rows == run.done == 300


def test_a_poisonous_file_costs_itself_only(tmp_path: Path) -> None:
    """One process, so that good files share batches with bad ones."""
    poisons = ("crash", "hang", "eat", "abort", "leave", "exit", "unforeseen")
    for number, name in enumerate(poisons):
        (tmp_path / f"{number}_{name}.vasp").write_text(name)
        (tmp_path / f"{number}_salt.vasp").write_text(salt_text())
    found = poisoned(tmp_path, workers=1, seconds=2.0)
    good = [row for name, row in found.items() if "salt" in name]
    assert [row["space_group"] for row in good] == ["Fm-3m"] * len(poisons)
    assert {name[2:-5]: row["status"] for name, row in found.items() if "salt" not in name} == {
        "crash": "crashed", "hang": "timed-out", "eat": "out-of-memory", "abort": "out-of-memory",
        "leave": "crashed", "exit": "crashed", "unforeseen": "error",
    }  # fmt: skip
    assert "SIGSEGV: native code: broken table" in str(found["0_crash.vasp"]["error_message"])
    assert "ZeroDivisionError: nobody thought of this" in str(found["6_unforeseen.vasp"]["error_message"])


def test_what_cannot_be_opened_or_read_is_a_row(tmp_path: Path) -> None:
    root = tmp_path / "structures"
    root.mkdir()
    (root / "a.vasp").write_text(salt_text())
    (root / "dangling.cif").symlink_to(root / "nowhere.cif")
    (root / "empty.vasp").write_bytes(b"")
    (root / "folder.cif").mkdir()
    (root / "latin.cif").write_bytes(b"data_x\n_cell_length_a \xe9\xff\n")
    (root / "null.vasp").write_bytes(b"\0" * 5000)
    os.mkfifo(root / "pipe.cif")
    with open(root / "large.cif", "wb") as stream:
        stream.truncate(600_000_000)
    (root / "z.vasp").write_text(salt_text())
    found = {str(row["id"]): row for row in screen([root], FAST, workers=2)}
    assert sorted(found) == sorted(path.name for path in root.iterdir())
    assert {name for name, row in found.items() if row["status"] == "ok"} == {"a.vasp", "z.vasp"}
    assert "folder" in str(found["folder.cif"]["error_message"])
    assert "link" in str(found["dangling.cif"]["error_message"])
    assert "pipe" in str(found["pipe.cif"]["error_message"])
    assert found["large.cif"]["error_code"] == "too-large"


@pytest.mark.parametrize(
    ("poison", "status"),
    [("crash", "crashed"), ("hang", "timed-out"), ("eat", "out-of-memory"), ("unforeseen", "error")],
)
def test_what_one_structure_of_a_file_does_costs_that_one_alone(
    tmp_path: Path, poison: str, status: str
) -> None:
    """The others have their rows, once each, also when the item was tried again; other files lose none."""
    for number in range(2):
        (tmp_path / f"{number}.vasp").write_text(f"frames-{poison}")
        (tmp_path / f"{number}.good").write_text(salt_text())
        (tmp_path / f"{number}_salt.vasp").write_text(salt_text())
    found = poisoned(tmp_path, workers=1, seconds=2.0)
    assert {name: row["status"] for name, row in found.items()} == {
        f"{number}{name}": status if name.endswith("#c") else "ok"
        for number in range(2)
        for name in (".vasp#a", ".vasp#b", ".vasp#c", ".vasp#d", ".vasp#e", "_salt.vasp")
    }
    assert list(found)[:6] == ["0.vasp#a", "0.vasp#b", "0.vasp#c", "0.vasp#d", "0.vasp#e", "0_salt.vasp"]
    assert found["1.vasp#c"]["frame"] == "c"


def test_what_is_not_even_read_is_named_by_its_place(tmp_path: Path) -> None:
    (tmp_path / "0.vasp").write_text("frames-read-crash")
    (tmp_path / "0.good").write_text(salt_text())
    found = poisoned(tmp_path)
    assert {name: row["status"] for name, row in found.items()} == {
        "0.vasp#a": "ok", "0.vasp#b": "ok", "0.vasp#structure 3": "crashed",
    }  # fmt: skip
    assert found["0.vasp#structure 3"]["remarks"] == "what follows in the file could not be reached"


def test_a_crash_that_does_not_repeat_costs_nothing(tmp_path: Path) -> None:
    (tmp_path / "once.vasp").write_text("crash-once")
    (tmp_path / "once.good").write_text(salt_text())
    assert poisoned(tmp_path)["once.vasp"]["status"] == "ok"


def test_words_of_native_code_are_in_the_remarks_of_their_row_alone(tmp_path: Path) -> None:
    (tmp_path / "a.vasp").write_text(salt_text())
    (tmp_path / "b.vasp").write_text("whisper")
    (tmp_path / "b.good").write_text(salt_text())
    (tmp_path / "c.vasp").write_text("whisper")
    (tmp_path / "c.good").write_text(salt_text())
    (tmp_path / "d.vasp").write_text(salt_text())
    found = poisoned(tmp_path, workers=1)
    said = "standard error: native code: a warning"
    assert [found[name]["remarks"] for name in sorted(found)] == [None, said, said, None]


def test_a_run_ends_though_what_makes_its_workers_is_gone(folder: Path) -> None:
    pool = Pool(Task(FAST, 60.0, 1000.0), 1)
    with Screening(pool.task, lambda _: pool) as run:
        rows = run.rows(work_items([folder]))
        assert next(rows)["id"] == "deep/AlN.extxyz"
        os.kill(pool._nursery._process.pid, signal.SIGKILL)
        assert len(list(rows)) == 4


def test_hostile_names_are_kept_as_text(tmp_path: Path) -> None:
    names = [
        "=cmd.vasp",
        "<script>.vasp",
        "'; drop table items; --.vasp",
        'quote".vasp',
        "new\nline.vasp",
    ]
    for name in names:
        (tmp_path / name).write_text(salt_text())
    (tmp_path / os.fsdecode(b"latin\xe9.vasp")).write_text(salt_text())
    found = list(screen([tmp_path], FAST, workers=1))
    assert {row["id"] for row in found} == {*names, "latin\\udce9.vasp"}
    assert {row["status"] for row in found} == {"ok"}


def test_workers_that_cannot_start_end_the_run_with_their_words() -> None:
    items = [WorkItem.of_text("lines", "1", "salt", salt_text(), "vasp")]
    with (
        run_of(Task(FAST, 60.0, 1000.0, reader="tests.screening.nowhere:read")) as run,
        pytest.raises(ScreeningError, match="nowhere"),
    ):
        list(run.rows(items))


def test_settings_that_name_nothing_are_refused_before_any_row() -> None:
    with pytest.raises(UsageError, match="pyzo"):
        list(screen(["."], Settings(properties=("pyzo",)), workers=1))
    with pytest.raises(UsageError, match="tolerance"):
        list(screen(["."], Settings(tolerance_angstrom=float("nan")), workers=1))


def test_a_missing_input_is_an_error(tmp_path: Path) -> None:
    with pytest.raises(ReadingError, match="no such file or folder"):
        list(screen([tmp_path / "nowhere"], FAST, workers=1))


def test_a_signal_finishes_the_rows_in_flight_and_takes_no_more() -> None:
    """An endless stream ends; the rows given are without a gap."""

    def endless():
        number = 0
        while True:
            yield WorkItem.of_text("lines", str(number), str(number), salt_text(), "vasp")
            number += 1

    with run_of(Task(FAST, 60.0, 1000.0)) as run:
        rows = run.rows(endless())
        first = next(rows)
        threading.Timer(0.3, lambda: os.kill(os.getpid(), signal.SIGTERM)).start()
        start = time.monotonic()
        names = [first["id"], *(row["id"] for row in rows)]
    assert time.monotonic() - start < 20.0
    assert run.stopped_by == "SIGTERM"
    assert names == [str(number) for number in range(len(names))]
    assert len(names) > 1


def test_what_gives_out_the_work_loads_no_numpy() -> None:
    code = (
        "import sys; import sitesym.cli.screen; from sitesym.screening import Settings; "
        "from sitesym.screening.sources import work_items; Settings().check(); "
        "list(work_items(['structures'])); sys.exit('numpy' in sys.modules)"
    )
    assert subprocess.run([sys.executable, "-c", code], check=False, cwd=ROOT).returncode == 0
