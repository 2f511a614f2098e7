"""Rows in every format: values and types survive, hostile text stays text, no cell runs in a spreadsheet."""

from __future__ import annotations

import csv
import io
import json
import math
from pathlib import Path
from typing import Any

import pandas
import pytest

from sitesym.reports.table import TABLE_FORMATS, default_columns, table_lines
from sitesym.reports.table_csv import COMPUTED_TEXT, harmless, pandas_options
from sitesym.reports.table_parquet import write_parquet
from sitesym.screening.columns import COLUMNS, Row, columns_for

HOSTILE = [
    "=cmd|' /C calc'!A0", "+1+1", "-2+3", "@SUM(1)", "\t=1", "\r=1", "＝1+1", "'=1", "'; drop table rows; --",
    "<script>alert(1)</script>", 'say "no"', "two\nlines", "a,b;c|d", "none", "NaN", "Ä\U0001f48e", "-1",
]  # fmt: skip
COLUMNS_USED = columns_for()


def row(**values: Any) -> Row:
    """All columns, missing where not given."""
    return {**dict.fromkeys(COLUMNS), **values}


@pytest.fixture
def rows() -> list[Row]:
    """Inversion groups with hostile names, one row with nothing but an error."""
    good = [
        row(id=text, source=text, frame="", formula="NaN", atoms=number, point_group="-1", polar=number < 9,
            declared_space_group=text, seconds=0.1 * number, tolerance_angstrom=1e-5,
            interval_low_angstrom=-1e-300, status="ok", remarks=text, highest_site_symmetry="-1")
        for number, text in enumerate(HOSTILE)
    ]  # fmt: skip
    return [*good, row(id="broken", status="error", error_code="overlap", error_message="=1; @2")]


def written(rows: list[Row], format_name: str, **options: bool) -> str:
    return "".join(table_lines(rows, COLUMNS_USED, format_name, **options))


def test_pandas_reads_back_every_value_and_type(rows: list[Row]) -> None:
    text = written(rows, "csv", spreadsheet_safe=False)
    frame = pandas.read_csv(io.StringIO(text, newline=""), **pandas_options(COLUMNS_USED))
    assert list(frame.columns) == list(COLUMNS)
    for name in COLUMNS:
        back = [None if pandas.isna(value) else value for value in frame[name]]
        assert back == [None if item[name] == "" else item[name] for item in rows], name
    assert set(frame["point_group"][:-1]) == {"-1"}


def test_without_the_options_pandas_would_change_the_values(rows: list[Row]) -> None:
    """The reason why the options exist."""
    frame = pandas.read_csv(io.StringIO(written(rows[:3], "csv")))
    assert frame["point_group"].tolist() == [-1, -1, -1]
    assert frame["formula"].isna().all()


def test_no_cell_of_a_safe_csv_is_run_and_each_gives_its_text_back(rows: list[Row]) -> None:
    records = list(csv.DictReader(io.StringIO(written(rows, "csv"), newline="")))
    for record, item in zip(records, rows, strict=True):
        for column in COLUMNS_USED:
            cell = record[column.name]
            if column.type != "text" or column.name in COMPUTED_TEXT:
                continue
            assert not cell.startswith(("=", "+", "-", "@", "\t", "\r", "＝", "＋", "－", "＠"))
            assert cell.removeprefix("'") == (item[column.name] or "").__str__()


def test_symbols_and_numbers_are_never_changed(rows: list[Row]) -> None:
    safe = list(csv.DictReader(io.StringIO(written(rows, "csv"), newline="")))
    plain = list(csv.DictReader(io.StringIO(written(rows, "csv", spreadsheet_safe=False), newline="")))
    assert safe[0]["point_group"] == safe[0]["highest_site_symmetry"] == "-1"
    assert safe[0]["interval_low_angstrom"] == "-1e-300"
    for one, other in zip(safe, plain, strict=True):
        changed = {name for name in COLUMNS if one[name] != other[name]}
        assert changed <= {"id", "source", "declared_space_group", "remarks", "error_message"}
        assert all(one[name] == f"'{other[name]}" for name in changed)
    assert [record["id"] for record in plain] == [item["id"] for item in rows]


def test_every_text_column_is_either_made_by_the_program_or_made_harmless() -> None:
    text = {column.name for column in COLUMNS_USED if column.type == "text"}
    assert text >= COMPUTED_TEXT
    assert text - COMPUTED_TEXT == {
        "id", "source", "frame", "declared_space_group", "remarks", "error_message",
    }  # fmt: skip


def test_json_lines_are_strict_and_exact(rows: list[Row]) -> None:
    rows[0]["interval_high_angstrom"] = math.inf
    lines = written(rows, "jsonl").split("\n")
    assert lines.pop() == ""
    back = [json.loads(line, parse_constant=lambda text: pytest.fail(text)) for line in lines]
    assert back == [rows[0] | {"interval_high_angstrom": None}, *rows[1:]]


def test_a_row_is_a_line_of_markdown_without_markup_of_its_own(rows: list[Row]) -> None:
    lines = written(rows, "markdown").splitlines()
    assert len(lines) == len(rows) + 2
    unescaped = [line.replace("\\\\", "").replace("\\|", "") for line in lines]
    assert {line.count("|") for line in unescaped} == {len(COLUMNS) + 1}
    assert not any("<script" in line.replace("\\<", "") for line in lines)


def test_text_has_a_line_for_each_row_and_shows_no_control_characters(rows: list[Row]) -> None:
    lines = written(rows, "text").split("\n")
    assert len(lines) == len(rows) + 3
    assert all(line.isprintable() for line in lines)


def test_parquet_keeps_types_and_meanings(
    rows: list[Row], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    parquet = pytest.importorskip("pyarrow.parquet", reason="pyarrow is an extra")
    monkeypatch.setattr("sitesym.reports.table_parquet.ROWS_A_GROUP", 5)
    write_parquet(iter(rows), COLUMNS_USED, str(tmp_path / "t.parquet"))
    back = parquet.read_table(tmp_path / "t.parquet")
    assert back.to_pylist() == rows
    kinds = {"text": "string", "int": "int64", "float": "double", "bool": "bool"}
    assert [str(field.type) for field in back.schema] == [kinds[column.type] for column in COLUMNS_USED]
    assert back.schema.field("atoms").metadata == {b"meaning": b"atoms in the cell of the file"}


@pytest.mark.parametrize("format_name", ["csv", "jsonl", "markdown"])
def test_rows_are_written_as_they_come(format_name: str, rows: list[Row]) -> None:
    taken: list[Row] = []
    lines = table_lines((taken.append(item) or item for item in rows), COLUMNS_USED, format_name)  # type: ignore[func-returns-value]
    for _ in range(5):
        next(lines)
    assert len(taken) in (3, 4, 5)


def test_text_shows_fewer_columns_than_the_formats_for_programs() -> None:
    assert default_columns(COLUMNS_USED, "csv") == list(COLUMNS)
    shown = default_columns(COLUMNS_USED, "text")
    assert set(shown) < set(COLUMNS)
    assert "point_group" in shown
    assert set(TABLE_FORMATS) == {"text", "csv", "jsonl", "markdown", "parquet"}


def test_an_apostrophe_is_added_only_where_it_is_needed() -> None:
    assert harmless("quartz") == "quartz"
    assert harmless("") == ""
    assert harmless("'a") == "''a"
