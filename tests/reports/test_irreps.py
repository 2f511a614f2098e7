"""Irreps on paper: names of classes, sums of irreps, and what every format keeps."""

from __future__ import annotations

import csv
import io
from typing import Any

import numpy as np
import pytest

from sitesym.groups import PointGroup, character_table
from sitesym.groups.symbols import ORIENTED, SCHOENFLIES
from sitesym.reports.irreps import irreps_document
from sitesym.reports.render import render
from sitesym.tensors import kind

Document = dict[str, Any]

SPELLINGS = [spelling for symbol in SCHOENFLIES for spelling in ORIENTED.get(symbol, (symbol,))]


def document_of(symbol: str, reduced: str | None = None) -> Document:
    table = character_table(PointGroup.from_symbol(symbol))
    axes = {"name": "ieee", "edition": None, "note": "", "rotation_from_file": np.eye(3).tolist()}
    return dict(irreps_document(table, axes, reduced=None if reduced is None else kind(reduced)))


@pytest.mark.parametrize("symbol", SPELLINGS)
def test_no_two_classes_have_one_name(symbol: str) -> None:
    labels = [entry["label"] for entry in document_of(symbol)["classes"]]
    assert len(set(labels)) == len(labels)


@pytest.mark.parametrize(
    ("symbol", "labels"),
    [
        ("4", {"1", "4+ [001]", "4- [001]", "2 [001]"}),
        ("4mm", {"1", "4 [001]", "2 [001]", "m [010]", "m [110]"}),
        ("23", {"1", "3+ [111]", "3- [111]", "2 [100]"}),
        ("m-3m", {"1", "4 [100]", "3 [111]", "2 [100]", "2 [110]",
                  "-1", "-4 [001]", "-3 [111]", "m [001]", "m [011]"}),
    ],
)  # fmt: skip
def test_a_class_is_named_with_a_sign_only_where_the_inverse_is_in_another(
    symbol: str, labels: set[str]
) -> None:
    assert {entry["label"] for entry in document_of(symbol)["classes"]} == labels


def test_members_of_a_complex_pair_stand_together_in_a_sum() -> None:
    text = render(document_of("4", "piezoelectric-strain"), "text")
    assert "reduction  piezoelectric-strain = 4 A + 4 B + 5 (1E + 2E)\n" in text


def test_csv_keeps_functions_and_the_reduction_asked_for() -> None:
    rows = list(csv.DictReader(io.StringIO(render(document_of("3m", "piezoelectric-strain"), "csv"))))
    found = {row["irrep"]: (row["reduced_property"], row["multiplicity"]) for row in rows}
    assert found == {
        "A1": ("piezoelectric-strain", "4"),
        "A2": ("piezoelectric-strain", "2"),
        "E": ("piezoelectric-strain", "6"),
    }
    assert {row["functions"] for row in rows if row["irrep"] == "A1"} == {"z, z2, x2+y2"}
    without = list(csv.DictReader(io.StringIO(render(document_of("3m"), "csv"))))
    assert {(row["reduced_property"], row["multiplicity"]) for row in without} == {("", "")}


def test_real_functions_of_a_complex_pair_stand_beside_it() -> None:
    assert "joined     E = 1E + 2E: x, y, Rx, Ry, yz, xz\n" in render(document_of("4"), "text")
    assert "$E = {}^{1}E + {}^{2}E$: $x$, $y$, $R_{x}$" in render(document_of("4"), "latex")


@pytest.mark.parametrize("symbol", SPELLINGS)
def test_latex_is_balanced_and_leaves_no_program_notation(symbol: str) -> None:
    text = render(document_of(symbol, "piezoelectric-strain"), "latex").split("checks:")[0]
    table = text.split(r"\hline")[1]
    assert text.count("{") == text.count("}")
    assert text.count("$") % 2 == 0
    assert not set("*") & set(table)
    assert "exp(" not in table


def test_latex_writes_labels_characters_and_elements_as_formulas() -> None:
    text = render(document_of("-3", "pyroelectric"), "latex")
    assert "${}^{1}E_{g}$ & 1 & $1$ & $e^{2\\pi i/3}$ & $e^{-2\\pi i/3}$ & $1$" in text
    assert r"$\bar{3}^{+}$ $[001]$ (1)" in text
    assert "pyroelectric = $A_{u} + ({}^{1}E_{u} + {}^{2}E_{u})$" in text


def test_csv_has_the_real_part_before_the_imaginary_one() -> None:
    rows = csv.DictReader(io.StringIO(render(document_of("3"), "csv")))
    row = next(row for row in rows if (row["irrep"], row["class"]) == ("1E", "3+ [001]"))
    assert row["character"] == "exp(2*pi*i/3)"
    assert (float(row["real_part"]), float(row["imaginary_part"])) == pytest.approx((-0.5, 0.75**0.5))


@pytest.mark.parametrize("format_name", ["text", "markdown"])
def test_readable_formats_list_the_elements_of_each_class(format_name: str) -> None:
    text = render(document_of("3m"), format_name).replace("\\", "")
    assert "m [010], m [110], m [100]" in text
