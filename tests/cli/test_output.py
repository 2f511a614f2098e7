"""Standard output that is full, closed, or read by nobody: no traceback, and an exit code that says so."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from sitesym.cli.output import write_pieces
from sitesym.cli.progress import watched
from sitesym.errors import UsageError
from sitesym.screening import Row, Screening, Settings, Store, Task, WorkItem
from sitesym.screening.failures import blank_row
from sitesym.screening.work import content_hash

PROGRAM = [sys.executable, "-c", "from sitesym.cli.main import main; main()"]
STRUCTURES = Path(__file__).parents[2] / "structures"
SCREEN = ["screen", str(STRUCTURES / "quartz_SiO2.cif"), "--ladder", "off", "--workers", "1"]
needs_a_full_device = pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device always full")


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> str:
    """A store of more rows than a pipe and a buffer hold."""
    path = tmp_path_factory.mktemp("output") / "store"
    settings = Settings()
    with Store.writing(path, settings) as made:
        for number in range(3000):
            item = WorkItem.of_text("lines", f"line {number}", f"salt {number}", "x", "vasp")
            row = blank_row(item, "", settings) | {"status": "ok"}
            made.put(item, content_hash(item), [row])
        made.commit()
    return str(path)


@pytest.fixture(params=["sites", "screen", "screen-csv", "screen-store", "table", "table-csv"])
def arguments(request: pytest.FixtureRequest, store: str, tmp_path: Path) -> list[str]:
    """A command that writes to standard output, each in its own way."""
    ways = {
        "sites": ["sites", str(STRUCTURES / "quartz_SiO2.cif")],
        "screen": SCREEN,
        "screen-csv": [*SCREEN, "--format", "csv"],
        "screen-store": [*SCREEN, "--store", str(tmp_path / "new")],
        "table": ["table", store],
        "table-csv": ["table", store, "--format", "csv"],
    }
    return ways[request.param]


@pytest.mark.parametrize("format_name", ["text", "json"])
def test_a_character_the_terminal_does_not_have_is_an_error_with_code_2(
    tmp_path: Path, format_name: str
) -> None:
    file = tmp_path / "k\xf6rnig.cif"
    file.write_bytes((STRUCTURES / "quartz_SiO2.cif").read_bytes())
    run = subprocess.run(
        [*PROGRAM, "sites", str(file), "--format", format_name],
        capture_output=True,
        text=True,
        env=os.environ | {"PYTHONIOENCODING": "ascii"},
    )
    assert run.returncode == 2
    assert r"'\xf6' in the encoding ascii" in run.stderr
    assert "Traceback" not in run.stderr


@needs_a_full_device
def test_a_full_disk_is_an_error_with_code_2(arguments: list[str]) -> None:
    with open("/dev/full", "w", encoding="utf-8") as full:
        run = subprocess.run([*PROGRAM, *arguments], stdout=full, stderr=subprocess.PIPE, text=True)
    assert run.returncode == 2, run.stderr
    assert run.stderr.count("the output cannot be written") == 1
    assert "Traceback" not in run.stderr
    assert "Exception ignored" not in run.stderr


def test_a_reader_that_is_gone_ends_the_program_in_silence(arguments: list[str]) -> None:
    process = subprocess.Popen(
        [*PROGRAM, *arguments], stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    )
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.close()
    with process:
        words = process.stderr.read()
    assert process.returncode == 128 + signal.SIGPIPE
    assert "Traceback" not in words
    assert "BrokenPipe" not in words


@needs_a_full_device
def test_a_store_keeps_its_rows_when_the_summary_cannot_be_written(tmp_path: Path) -> None:
    with open("/dev/full", "w", encoding="utf-8") as full:
        subprocess.run([*PROGRAM, *SCREEN, "--store", str(tmp_path / "s")], stdout=full, stderr=full)
    with Store.reading(tmp_path / "s") as made:
        assert [row["space_group"] for row in made.rows()] == ["P3_121"]


def test_standard_output_that_is_closed_is_an_error() -> None:
    code = "import os, sys; os.close(1); sys.stdout = None; " + PROGRAM[-1]
    run = subprocess.run(
        [sys.executable, "-c", code, "conventions"], capture_output=True, text=True, check=False
    )
    assert (run.returncode, "standard output is closed" in run.stderr) == (2, True), run.stderr


@pytest.mark.parametrize("where", [None, "file"])
def test_what_making_a_piece_raises_is_not_blamed_on_the_output(where: str | None, tmp_path: Path) -> None:
    def pieces() -> Iterator[str]:
        yield "one"
        raise PermissionError("of the maker")

    with pytest.raises(PermissionError, match="of the maker"):
        write_pieces(pieces(), where and str(tmp_path / where))


@needs_a_full_device
def test_a_file_on_a_full_disk_is_named() -> None:
    with pytest.raises(UsageError, match=r"/dev/full: the output cannot be written\n.*No space left"):
        write_pieces(["text"] * 10_000, "/dev/full")


@needs_a_full_device
def test_progress_that_nobody_can_read_does_not_end_a_run(
    monkeypatch: pytest.MonkeyPatch, capfd: pytest.CaptureFixture[str]
) -> None:
    """It is shown while no row comes, too: the first takes long."""
    monkeypatch.setattr("sitesym.cli.progress.LINE_SECONDS", 0.01)
    run = Screening(Task(Settings(), 1.0, 1.0), lambda task: None)  # type: ignore[arg-type, return-value]
    rows: list[Row] = [{"id": number} for number in range(3)]

    def slow() -> Iterator[Row]:
        time.sleep(0.2)
        yield from rows

    read: Callable[[], list[object]] = lambda: list(watched(slow(), run, lambda: 0, bar=False))  # noqa: E731
    assert read() == rows
    assert "0 done, 0 failed" in capfd.readouterr().err.splitlines()[0]
    with open("/dev/full", "w", encoding="utf-8") as full:
        kept = os.dup(2)
        os.dup2(full.fileno(), 2)
        try:
            assert read() == rows
        finally:
            os.dup2(kept, 2)
            os.close(kept)
