"""`sitesym table`: from structures with hostile names through a store to every format."""

from __future__ import annotations

import csv
import io
import json
import shutil
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import Result

from sitesym.screening import Screening, Settings, Store, Task, WorkItem
from sitesym.screening.failures import blank_row
from sitesym.screening.pool import Pool
from sitesym.screening.sources import work_items
from sitesym.screening.work import content_hash

Run = Callable[..., Result]

HOSTILE = [
    "'; drop table structures; --", '"; DROP VIEW screened; --', "=cmd|' /C calc'!A0", "@SUM(1+1)*cmd",
    "<script>alert(1)</script>", "two\nlines", "tab\tand\rreturn", "a | b", "--where", "\u202eabc",
]  # fmt: skip
SALT = "x\n1\n0 2.8 2.8\n2.8 0 2.8\n2.8 2.8 0\nNa Cl\n1 1\nDirect\n0 0 0\n0.5 0.5 0.5\n"
TRICLINIC = "x\n1\n3.1 0.2 0.3\n0.1 4.3 0.5\n0.7 0.2 5.9\nMg F\n1 2\nDirect\n0 0 0\n.2 .3 .4\n.8 .7 .6\n"


@pytest.fixture(scope="module")
def store(tmp_path_factory: pytest.TempPathFactory) -> str:
    """The store of structures of class -1 and m-3m whose ids, and one of whose labels, are attacks."""
    folder = tmp_path_factory.mktemp("hostile")
    entries = [
        {"id": text, "poscar": TRICLINIC if number % 2 else SALT} for number, text in enumerate(HOSTILE)
    ]
    entries.append({"id": "=broken", "poscar": SALT.replace("Na", "=cmd")})
    (folder / "s.jsonl").write_text("".join(json.dumps(entry) + "\n" for entry in entries))
    (folder / "=1+1'.vasp").write_text(SALT)
    settings = Settings(ladder=False, properties=("permittivity",))
    task = Task(settings, limit_seconds=60.0, limit_megabytes=4000.0, hashed=True)
    path = folder / "s.sqlite"
    with Store.writing(path, settings) as made, Screening(task, lambda task: Pool(task, 1)) as run:
        assert len(list(run.into(made, work_items([folder / "s.jsonl", folder])))) == len(HOSTILE) + 2
    return str(path)


def output(run: Run, *arguments: str) -> str:
    result = run("table", *arguments)
    assert result.exit_code == 0, result.output
    return result.stdout


def test_hostile_ids_come_out_as_they_went_in(run: Run, store: str) -> None:
    lines = output(run, store, "--format", "jsonl", "--where", "status = ok").splitlines()
    assert {json.loads(line)["id"] for line in lines} == {*HOSTILE, "=1+1'.vasp"}


@pytest.mark.parametrize("text", HOSTILE)
def test_a_hostile_id_can_be_asked_for(run: Run, store: str, text: str) -> None:
    found = output(run, store, "--format", "jsonl", "--where", f"id = '{text}'", "--columns", "id")
    assert json.loads(found) == {"id": text}


def test_attacks_in_every_option_are_refused_and_the_store_is_whole(run: Run, store: str) -> None:
    before = output(run, store, "--format", "jsonl")
    attack = "id; DROP TABLE structures; --"
    for option in ("--where", "--sort", "--columns"):
        result = run("table", store, option, attack)
        assert result.exit_code == 2
        assert "no such column" in result.output or "not understood" in result.output
    assert output(run, store, "--format", "jsonl") == before


def test_a_safe_csv_runs_no_cell_and_a_plain_one_changes_none(run: Run, store: str) -> None:
    def records(*options: str) -> list[dict[str, str]]:
        text = output(run, store, "--format", "csv", *options)
        return list(csv.DictReader(io.StringIO(text, newline="")))

    safe, plain = records(), records("--plain-cells")
    assert {record["id"] for record in plain} == {*HOSTILE, "=broken", "=1+1'.vasp"}
    assert not any(record["id"].startswith(("=", "@", "-")) for record in safe)
    assert [record["id"].removeprefix("'") for record in safe] == [record["id"] for record in plain]
    assert {record["point_group"] for record in safe} == {"-1", "m-3m", ""}


def test_rows_are_chosen_sorted_and_cut(run: Run, store: str) -> None:
    text = output(
        run, store, "--format", "csv", "--where", "point_group = -1", "--where", "atoms >= 3",
        "--sort", "id:desc", "--columns", "point_group,atoms", "--limit", "2",
    )  # fmt: skip
    assert text == '"point_group","atoms"\n"-1",3\n"-1",3\n'


def test_text_and_markdown_have_a_line_for_each_row(run: Run, store: str) -> None:
    rows = len(HOSTILE) + 2
    text = output(run, store)
    assert len(text.splitlines()) == rows + 2
    assert "\u202e" not in text
    markdown = output(run, store, "--format", "markdown", "--columns", "all")
    assert len(markdown.splitlines()) == rows + 2
    assert "<script" not in markdown.replace("\\<", "")


def test_files_are_written(run: Run, store: str, tmp_path: Path) -> None:
    output(run, store, "--format", "csv", "--output", str(tmp_path / "t.csv"))
    assert (tmp_path / "t.csv").read_bytes().decode() == output(run, store, "--format", "csv")
    parquet = pytest.importorskip("pyarrow.parquet", reason="pyarrow is an extra")
    output(run, store, "--format", "parquet", "--output", str(tmp_path / "t.parquet"))
    assert parquet.read_table(tmp_path / "t.parquet").num_rows == len(HOSTILE) + 2


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["--format", "parquet"], "add --output"),
        (["--format", "csv", "--output", "/nowhere/t.csv"], "cannot be written"),
        (["--where", "atoms > many"], "compared with a number"),
        (["--sort", "atoms:up"], "column:asc"),
    ],
)
def test_options_that_cannot_be_followed_say_why(
    run: Run, store: str, arguments: list[str], said: str
) -> None:
    result = run("table", store, *arguments)
    assert result.exit_code == 2
    assert said in result.output


def test_the_settings_of_rows_are_shown_on_request(run: Run, store: str, tmp_path: Path) -> None:
    (made,) = map(json.loads, output(run, store, "--settings").splitlines())
    assert (made["tolerance_angstrom"], made["ladder"], made["properties"]) == (0.01, False, ["permittivity"])
    assert {"sitesym", "spglib", "numpy"} <= set(made["versions"])
    assert "different settings" not in run("table", store).stderr
    both = tmp_path / "both"
    shutil.copy(store, both)
    other = Settings(tolerance_angstrom=0.1, distinguish=("label",))
    item = WorkItem.of_text("lines", "", "salt", SALT, "vasp")
    with Store.writing(both, other) as changed:
        changed.put(item, content_hash(item), [blank_row(item, "", other) | {"status": "ok"}])
        changed.commit()
    assert "rows were made with 2 different settings" in run("table", str(both)).stderr
    shown = [json.loads(line) for line in output(run, str(both), "--settings").splitlines()]
    assert [entry["distinguish"] for entry in shown] == [[], ["label"]]


def test_what_is_no_store_is_refused_and_not_touched(run: Run, tmp_path: Path) -> None:
    (tmp_path / "text.sqlite").write_text("not a store" * 100)
    for name in ("text.sqlite", "missing.sqlite"):
        result = run("table", str(tmp_path / name))
        assert result.exit_code == 3
        assert name in result.output
    assert not (tmp_path / "missing.sqlite").exists()
