"""Allowed forms on paper: matrices, equations and the statements beside them."""

from __future__ import annotations

import csv
import io
from typing import Any

import numpy as np
import pytest

from sitesym.groups import PointGroup
from sitesym.reports.allowed import allowed_document
from sitesym.reports.component_matrix import component_matrix, relations
from sitesym.reports.expressions import combination, latex_combination, latex_namer, text_namer
from sitesym.reports.render import FORMATS, render
from sitesym.tensors import kind, kind_from_jahn

Document = dict[str, Any]


def document_of(symbol: str, jahn: str) -> Document:
    """The document of one index symmetry in the group of a symbol."""
    axes = {"name": "lattice", "edition": None, "note": "", "rotation_from_file": np.eye(3).tolist()}
    return dict(allowed_document(PointGroup.from_symbol(symbol), [kind_from_jahn(jahn)], axes))


def matrix_rows(text: str, title: str, rows: int) -> list[list[str]]:
    """Cells of the drawn matrix below a title, without the two heads of each row."""
    lines = text.split(title)[1].splitlines()
    start = next(index for index, line in enumerate(lines) if line.split() == list("123456"))
    return [line.split(maxsplit=2)[2].split("  ") for line in lines[start + 1 : start + 1 + rows]]


def test_a_matrix_shows_each_component_by_the_independent_one_it_equals(allowed: Document) -> None:
    rows = matrix_rows(render(allowed, "text"), "piezoelectric-strain", 3)
    cells = [[cell.strip() for cell in row if cell.strip()] for row in rows]
    assert cells == [["d11", "-d11", ".", "d14", ".", "."], [".", ".", ".", ".", "-d14", "-2 d11"], ["."] * 6]


def test_a_symmetric_matrix_repeats_the_upper_triangle_below(allowed: Document) -> None:
    layout = component_matrix(allowed["properties"][1])
    assert layout is not None
    assert layout.cells[1][0].key == "12"
    assert layout.cells[5][3].key == "46"


@pytest.mark.parametrize(
    ("format_name", "expected"),
    [
        ("text", ["2 y -T12 . T23", "3 z -T13 -T23 ."]),
        ("markdown", ["| 2 y | -T12 | 0 | T23 |", "| 3 z | -T13 | -T23 | 0 |"]),
        ("latex", [r"-T_{12} & 0 & T_{23} \\", r"-T_{13} & -T_{23} & 0"]),
    ],
)
def test_below_the_diagonal_of_an_antisymmetric_matrix_stands_the_opposite(
    format_name: str, expected: list[str]
) -> None:
    text = render(document_of("1", "{V2}"), format_name)
    lines = [" ".join(line.split()) for line in text.splitlines()]
    assert all(row in lines for row in expected)
    assert "reverses the sign" in text


def test_the_lower_triangle_of_antisymmetric_pairs_of_pairs_is_not_called_zero() -> None:
    layout = component_matrix(document_of("1", "{[V2]2}")["properties"][0])
    assert layout is not None
    assert layout.cells[5][0].terms == {"16": "-1"}
    assert layout.cells[0][5].terms == {"16": "1"}
    assert layout.cells[5][5].terms == {}


@pytest.mark.parametrize(
    ("symbol", "axes_name", "expected"),
    [
        ("3", "ieee", "by any angle about z:"), ("-4", "ieee", "by any angle about z:"),
        ("2", "ieee", "by any angle about y:"), ("-1", "ieee", "by any angle:"), ("32", "ieee", ""),
        ("3", "file", ""),
    ],
)  # fmt: skip
def test_a_standard_orientation_says_by_which_turns_it_stays_open(
    symbol: str, axes_name: str, expected: str
) -> None:
    axes = {"name": axes_name, "edition": None, "note": "", "rotation_from_file": np.eye(3).tolist()}
    document = allowed_document(PointGroup.from_symbol(symbol), [kind("pyroelectric")], axes)
    assert len(document["remarks"]) == bool(expected)
    assert all(expected in remark for remark in document["remarks"])


@pytest.mark.parametrize(("symbol", "jahn", "count"), [("432", "e", 1), ("m", "e", 0), ("m-3m", "a", 1)])
@pytest.mark.parametrize("format_name", FORMATS)
def test_a_scalar_is_one_component_or_forbidden(symbol: str, jahn: str, count: int, format_name: str) -> None:
    # e is the form of a rotatory power averaged over directions: common practice, in the chiral classes only
    document = document_of(symbol, jahn)
    assert document["properties"][0]["independent_count"] == count
    assert render(document, format_name)


def test_relations_chain_what_is_equal_and_write_the_rest_as_equations(allowed: Document) -> None:
    piezoelectric, elastic = allowed["properties"]
    assert relations(piezoelectric, text_namer("d")) == ["d11 = -d12", "d14 = -d25", "d26 = -2 d11"]
    assert relations(elastic, text_namer("c")) == [
        "c11 = c22 = c33",
        "c12 = c13 = c23",
        "c44 = (c11 - c12)/2",
        "c55 = (c11 - c12)/2",
        "c66 = (c11 - c12)/2",
    ]


def test_text_states_group_axes_order_factors_unit_exactness_and_caution(allowed: Document) -> None:
    text = render(allowed, "text")
    for statement in (
        "31m (class 3m, C3v)",
        "IEEE Std 176-1978",
        "11 22 33 23 13 12",
        "factor 2 in columns 4 to 6",
        "pC/N",
        "2 independent of 18 (exact)",
        "first: field; second: stress",
        "sitesym 0.0.0",
    ):
        assert statement in text
    assert text.rstrip().endswith("licensed practice.")


def test_a_forbidden_property_says_so(allowed: Document) -> None:
    allowed["properties"][0] |= {"components": {}, "independent": [], "independent_count": 0}
    assert "forbidden: all 18 components are zero" in render(allowed, "text")
    assert "0 of 18 components independent" in render(allowed, "markdown")


def test_floating_point_coefficients_are_announced(allowed: Document) -> None:
    allowed["properties"][0]["exact"] = False
    for format_name in ("text", "markdown", "latex"):
        assert "floating-point coefficients, not exact" in render(allowed, format_name)


def test_an_expression_too_long_for_a_cell_is_marked_and_given_below(allowed: Document) -> None:
    entry = allowed["properties"][0]
    entry["components"]["26"] = {"11": "-0.333333333333", "14": "0.577350269190"}
    text = render(allowed, "text")
    assert "d26*" in text
    assert "d26 = -0.333333333333 d11 + 0.577350269190 d14" in text


def test_a_property_of_three_indices_is_listed(allowed: Document) -> None:
    entry = allowed["properties"][1]
    entry |= {
        "symbol": "C",
        "blocks": [6, 6, 6],
        "keys": ["111", "112", "222"],
        "independent": ["111"],
        "independent_count": 1,
        "components": {"111": {"111": "1"}, "222": {"111": "1"}},
    }
    text = render(allowed, "text")
    assert "C111 = C222" in text
    assert "1 independent, 1 that follow from them, 1 zero by symmetry" in text


def test_csv_has_one_row_a_component_and_keeps_zero_ones(allowed: Document) -> None:
    rows = list(csv.DictReader(io.StringIO(render(allowed, "csv"))))
    assert len(rows) == 18 + 21
    by_name = {row["name"]: (row["status"], row["expression"]) for row in rows}
    assert by_name["d26"] == ("dependent", "-2 d11")
    assert by_name["d11"] == ("independent", "d11")
    assert by_name["d13"] == ("zero", "0")


SITE = {
    "label": "Si1",
    "species": "Si",
    "multiplicity": 3,
    "wyckoff": "a",
    "site_symmetry": "m",
    "atoms": [4, 5, 6],
}


@pytest.mark.parametrize("format_name", ["text", "markdown", "latex"])
@pytest.mark.parametrize(("atoms", "turned"), [([4, 5, 6], True), ([4], False)])
def test_a_site_says_for_which_atom_its_tensors_stand(
    allowed: Document, format_name: str, atoms: list[int], turned: bool
) -> None:
    allowed["site"] = SITE | {"atoms": atoms}
    text = " ".join(render(allowed, format_name).split())
    assert "those of atom 4" in text
    assert ("at the other atoms of the orbit they are turned" in text) == turned


@pytest.mark.parametrize("format_name", ["text", "markdown", "latex"])
def test_the_new_axes_are_the_rows_of_the_rotation(allowed: Document, format_name: str) -> None:
    allowed["axes"]["rotation_from_file"] = [[0.0, 1.0, 0.0], [0.0, 0.0, 1.0], [1.0, 0.0, 0.0]]
    text = " ".join(render(allowed, format_name).split())
    for name, row in (("x", "0.000000 1.000000 0.000000"), ("z", "1.000000 0.000000 0.000000")):
        assert f"{name} = ( {row})" in text


def test_csv_says_of_every_row_what_its_number_stands_on(allowed: Document) -> None:
    allowed["site"] = SITE
    allowed["axes"]["rotation_from_file"] = [[0.0, 1.0, 0.0], [-1.0, -0.0, 0.0], [0.0, 0.0, 1.0]]
    for row in csv.DictReader(io.StringIO(render(allowed, "csv"))):
        assert (row["site"], row["rotation_from_file"]) == ("Si1", "0 1 0; -1 0 0; 0 0 1")
        assert row["order"] == "11 22 33 23 13 12"
        assert row["factors"].startswith("factor 2") == (row["property"] == "piezoelectric-strain")


def test_latex_writes_a_matrix_of_names_with_indices(allowed: Document) -> None:
    text = render(allowed, "latex")
    assert r"d_{11} & -d_{11} & 0 & d_{14} & 0 & 0 \\" in text
    assert r"\frac{c_{11} - c_{12}}{2}" in text
    assert text.count("{") == text.count("}")


def test_markdown_has_a_head_for_every_column(allowed: Document) -> None:
    assert "|  | 1 xx | 2 yy | 3 zz | 4 yz | 5 xz | 6 xy |" in render(allowed, "markdown")


@pytest.mark.parametrize(
    ("terms", "text", "latex"),
    [
        ({}, "0", "0"),
        ({"11": "-1"}, "-d11", "-d_{11}"),
        ({"11": "1/2"}, "d11/2", r"\frac{d_{11}}{2}"),
        ({"11": "-sqrt(3)/2", "12": "1/2"}, "(-sqrt(3) d11 + d12)/2", r"\frac{-\sqrt{3} d_{11} + d_{12}}{2}"),
        ({"11": "1/3", "12": "1/2"}, "(2 d11 + 3 d12)/6", r"\frac{2 d_{11} + 3 d_{12}}{6}"),
        ({"11": "0.25"}, "0.25 d11", "0.25 d_{11}"),
    ],
)
def test_a_combination_is_written_over_one_denominator(terms: dict[str, str], text: str, latex: str) -> None:
    assert combination(terms, text_namer("d")) == text
    assert latex_combination(terms, latex_namer("d")) == latex


def test_a_kind_odd_under_time_reversal_says_what_its_form_stands_for() -> None:
    axes = {"name": "lattice", "edition": None, "note": "", "rotation_from_file": np.eye(3).tolist()}
    group = PointGroup.from_symbol("32")
    odd = allowed_document(group, [kind_from_jahn("aeV[V2]"), kind("permittivity")], axes)
    assert len(odd["remarks"]) == 1
    assert "magnetic order" in odd["remarks"][0]
    assert "permittivity" not in odd["remarks"][0]
    assert allowed_document(group, [kind("permittivity")], axes)["remarks"] == []
