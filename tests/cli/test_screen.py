"""`sitesym screen` with a store: it goes on where it was, says so, and ends with codes that tell."""

from __future__ import annotations

import json
import os
import shutil
import signal
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import Result

from sitesym.screening import Settings, Store

Run = Callable[..., Result]
FAST = ("--ladder", "off", "--finder", "moyo", "--workers", "1")
SALT = "salt\n1\n0 2.8 2.8\n2.8 0 2.8\n2.8 2.8 0\nNa Cl\n1 1\nDirect\n0 0 0\n0.5 0.5 0.5\n"


@pytest.fixture
def lines(tmp_path: Path) -> Path:
    """Structures as JSON Lines, the last one broken."""
    path = tmp_path / "lines.jsonl"
    texts = [*(SALT.replace("2.8", f"2.{number:03d}") for number in range(700, 800)), "broken"]
    path.write_text(
        "\n".join(json.dumps({"id": f"salt {n}", "poscar": text}) for n, text in enumerate(texts)),
        encoding="utf-8",
    )
    return path


def test_a_second_run_finds_everything_done(run: Run, lines: Path, tmp_path: Path) -> None:
    first = run("screen", str(lines), "--store", str(tmp_path / "store"), *FAST)
    assert first.exit_code == 0, first.output
    assert "101 structures (100 ok, 1 error)" in first.stdout
    assert "salt 100: the POSCAR ends before its atoms" in first.stdout
    second = run("screen", str(lines), "--store", str(tmp_path / "store"), *FAST, "--format", "jsonl")
    assert second.stderr.rstrip().endswith("101 done before, 0 now")
    rows = [json.loads(line) for line in second.stdout.splitlines()]
    assert [row["id"] for row in rows] == [f"salt {number}" for number in range(101)]


def test_a_store_in_use_and_one_that_is_none_end_with_code_3(run: Run, lines: Path, tmp_path: Path) -> None:
    with Store.writing(tmp_path / "store", Settings()):
        busy = run("screen", str(lines), "--store", str(tmp_path / "store"), *FAST)
    assert (busy.exit_code, "another run is writing to the store" in busy.stderr) == (3, True)
    foreign = run("screen", str(lines), "--store", str(lines), *FAST)
    assert (foreign.exit_code, "file is not a database" in foreign.stderr) == (3, True)


def test_a_file_that_holds_fewer_structures_leaves_no_old_rows(run: Run, lines: Path, tmp_path: Path) -> None:
    store = ("--store", str(tmp_path / "store"), *FAST)
    run("screen", str(lines), *store)
    lines.write_text(
        "".join(lines.read_text(encoding="utf-8").splitlines(keepends=True)[:7]), encoding="utf-8"
    )
    again = run("screen", str(lines), *store, "--format", "jsonl")
    assert len(again.stdout.splitlines()) == 7


def test_rows_of_other_settings_are_pointed_out(run: Run, lines: Path, tmp_path: Path) -> None:
    store = ("--store", str(tmp_path / "store"), *FAST)
    run("screen", str(lines), *store)
    shutil.copy(lines, tmp_path / "other.jsonl")
    both = run("screen", str(tmp_path / "other.jsonl"), *store, "--tolerance", "0.1", "--format", "csv")
    assert "rows were made with 2 different settings" in both.stderr


@pytest.mark.parametrize(
    ("options", "said"),
    [
        (("--format", "parquet"), "add --output"),
        (("--format", "parquet", "--store", "store"), "add --output"),
        (("--store", "store", "--output", "rows.csv"), "add --format"),
        (("--format", "json", "--output", "nowhere/rows.json"), "cannot be written"),
    ],
)
def test_rows_that_cannot_be_written_stop_the_run_before_it_begins(
    run: Run,
    lines: Path,
    tmp_path: Path,
    monkeypatch: pytest.MonkeyPatch,
    options: tuple[str, ...],
    said: str,
) -> None:
    monkeypatch.chdir(tmp_path)
    result = run("screen", str(lines), *FAST, *options)
    assert (result.exit_code, said in result.stderr) == (2, True), result.stderr
    assert not (tmp_path / "store").exists()


def test_a_signal_leaves_a_store_that_resumes(run: Run, lines: Path, tmp_path: Path) -> None:
    """The list is long enough to be still at work; the code is that of the shell for the signal."""
    text = lines.read_text(encoding="utf-8").replace("salt ", "salt A")
    many = tmp_path / "many.jsonl"
    many.write_text("\n".join(text for _ in range(200)), encoding="utf-8")
    store = tmp_path / "store"
    process = subprocess.Popen(
        [sys.executable, "-c", "from sitesym.cli.main import main; main()", "screen", str(many), *FAST,
         "--store", str(store)],
        env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)},
        stderr=subprocess.PIPE,
        text=True,
    )  # fmt: skip
    deadline = time.monotonic() + 60.0
    while stored(store) == 0 and time.monotonic() < deadline:
        time.sleep(0.05)
    process.send_signal(signal.SIGTERM)
    _, words = process.communicate(timeout=30.0)
    assert process.returncode == 128 + signal.SIGTERM
    assert "stopped by SIGTERM; what is done is kept" in words
    done = stored(store)
    assert 0 < done < 20_000
    many.write_text("\n".join(many.read_text(encoding="utf-8").splitlines()[:done]), encoding="utf-8")
    resumed = run("screen", str(many), "--store", str(store), *FAST)
    assert f"{done} done before, 0 now" in resumed.stdout


def stored(path: Path) -> int:
    """Rows that are permanent; 0 while there is no store."""
    if not path.exists() or path.stat().st_size == 0:
        return 0
    with Store.reading(path) as store:
        names = {name for (name,) in store.connection.execute("SELECT name FROM sqlite_master")}
        return sum(1 for _ in store.rows()) if "screened" in names else 0


def test_properties_are_chosen_by_name(run: Run, lines: Path) -> None:
    wrong = run("screen", str(lines), *FAST, "--properties", "pyzo")
    assert (wrong.exit_code, "pyzo" in wrong.stderr) == (2, True)
    chosen = run("screen", str(lines), *FAST, "--properties", "seebeck,permittivity", "--format", "json")
    names = [column["name"] for column in json.loads(chosen.stdout)["columns"]]
    assert [name for name in names if name.startswith("count_")] == ["count_seebeck", "count_permittivity"]
