"""What every format keeps: strict JSON, whole tables, text as it was."""

from __future__ import annotations

import csv
import io
import json
from typing import Any

import pandas as pd
import pytest

from sitesym.errors import UsageError
from sitesym.reports.layout import joined, table
from sitesym.reports.markup import latex_escape, markdown_escape
from sitesym.reports.render import FORMATS, render

Document = dict[str, Any]


@pytest.mark.parametrize("format_name", FORMATS)
@pytest.mark.parametrize("fixture", ["allowed", "irreps", "screen"])
def test_every_format_ends_in_one_newline(
    fixture: str, format_name: str, request: pytest.FixtureRequest
) -> None:
    text = render(request.getfixturevalue(fixture), format_name)
    assert text.endswith("\n")
    assert not text.endswith("\n\n")
    assert all(line == line.rstrip() for line in text.splitlines()) or format_name not in ("text", "json")


def test_json_comes_back_as_the_document(irreps: Document) -> None:
    assert json.loads(render(irreps, "json")) == irreps


def test_json_refuses_what_is_not_a_number(irreps: Document) -> None:
    irreps["checks"]["unitary_deviation"] = float("nan")
    with pytest.raises(ValueError, match="not JSON compliant"):
        render(irreps, "json")


def test_an_unknown_format_names_the_known_ones(irreps: Document) -> None:
    with pytest.raises(UsageError, match="text, json, csv, markdown, latex"):
        render(irreps, "yaml")


def test_the_character_table_shows_labels_characters_and_functions(irreps: Document) -> None:
    lines = [line.split() for line in render(irreps, "text").splitlines()]
    assert ["A''", "1", "1", "-1", "real", "y"] in lines


def test_a_reduction_is_written_as_a_sum(irreps: Document) -> None:
    assert "pyroelectric = 2 A' + A''" in render(irreps, "text")


def test_irreps_csv_has_one_row_an_irrep_and_class(irreps: Document) -> None:
    rows = list(csv.DictReader(io.StringIO(render(irreps, "csv"))))
    assert [(row["irrep"], row["class"], row["character"]) for row in rows] == [
        ("A'", "1", "1"),
        ("A'", "m [010]", "1"),
        ("A''", "1", "1"),
        ("A''", "m [010]", "-1"),
    ]


def test_screen_csv_survives_pandas_when_read_as_text(screen: Document) -> None:
    frame = pd.read_csv(io.StringIO(render(screen, "csv")), dtype=str, keep_default_na=False)
    assert list(frame["point_group"]) == ["-1", ""]
    assert list(frame["formula"]) == ["NaN", ""]
    assert list(frame["error_message"]) == ["", "line one\nline two"]
    assert list(frame["count_elastic_stiffness"]) == ["21", ""]


def test_screen_text_lists_failures_apart_with_their_reason(screen: Document) -> None:
    text = render(screen, "text")
    assert "2 structures (1 ok, 1 error)" in text
    assert "  x_%.cif  unreadable\n    line one\\nline two" in text


def test_markup_escapes_what_would_break_a_table(screen: Document) -> None:
    assert r"a\|b" in render(screen, "markdown")
    assert r"x\_\%.cif" in render(screen, "latex")
    assert markdown_escape("<script>") == r"\<script\>"
    assert latex_escape("a_b^c~") == r"a\_b\textasciicircum{}c\textasciitilde{}"


def test_a_table_keeps_square_brackets_and_never_wraps() -> None:
    drawn = table(("name", "value"), [("[bold]", "x" * 300)])
    assert "[bold]  " + "x" * 300 in drawn


def test_joined_items_are_never_broken_inside() -> None:
    lines = joined(["d26 = -2 d11"] * 20, width=60).splitlines()
    assert len(lines) > 1
    assert all(line.count("d26 = -2 d11") * len("d26 = -2 d11") <= len(line) <= 60 for line in lines)
    assert "".join(lines).count("d26 = -2 d11") == 20
