"""Renderers of the `audit` document on documents written by hand, and strict JSON from results."""

from __future__ import annotations

import csv
import io
import json
from typing import Any

import numpy as np
import pytest

from sitesym.audit.result import Reading, Residual
from sitesym.audit.stability import elastic_stability
from sitesym.groups import PointGroup
from sitesym.reports.audit_evidence import evidence, reading_entry, stability_entry
from sitesym.reports.audit_phrases import index_text, reading_text, slip_text, stated_text, symmetry_text
from sitesym.reports.audit_stability import stability_text
from sitesym.reports.render import render
from sitesym.tensors import allowed_form, kind

IDENTITY = [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]]
ORDER = "11 22 33 23 13 12"


def reading(**fields: Any) -> dict[str, Any]:
    return {
        "axes": "ieee",
        "rotation": IDENTITY,
        "order": ORDER,
        "factor": None,
        "relative_residual": 0.002,
        "layout": "matrix",
        "equal_to": [],
        "slip": None,
        "turn": None,
    } | fields


def deviation(component: str, value: float, relation: str | None = None) -> dict[str, Any]:
    return {"component": component, "value": value, "expected": 0.0, "tolerance": 0.01, "relation": relation}


@pytest.fixture
def violating() -> dict[str, Any]:
    """A record with a finding of every sort; its names try the escapes of each format."""
    return {
        "id": "a|b_1",
        "verdict": "violates",
        "quantity": "piezoelectric-strain",
        "group": "32",
        "stated": {
            "relative_residual": 0.3,
            "chi2": 812.0,
            "dof": 16,
            "p_value": 1e-30,
            "absolute_residual": 1.2,
            "tolerance": 0.04,
            "within": False,
            "axes": "ieee",
            "order": ORDER,
            "layout": "matrix",
        },
        "best": reading(slip={"sort": "sign", "entries": ["12"], "expected": [-2.1], "exponent": 0}),
        "rivals": [reading(axes="file, turned by 30 degrees about [001]")],
        "index_symmetry": {"applies": False, "holds": True, "largest": 0.0, "relative": 0.0, "broken": []},
        "forbidden": [deviation(f"3{k}", 0.5 + k) for k in range(1, 7)],
        "relations": [deviation("12", 2.1, "12 = -11")] * 13,
        "equivalent_axes": [
            {"turn": "180 degrees about [001]", "flips": ["11"], "mixes": False},
            {"turn": "any angle about [001]", "flips": [], "mixes": True},
        ],
        "cannot_tell": [
            {"sort": "order", "reading": "order 11 22 33 12 23 13", "order": "11 22 33 12 23 13"},
            {"sort": "factor", "reading": "columns 4-6 halved", "factor": "columns 4-6 halved"},
            {"sort": "factor", "reading": "columns 4-6 doubled", "factor": "columns 4-6 doubled"},
            {
                "sort": "axes",
                "reading": "axes turned by 180 degrees about [001]",
                "flips": ["11"],
                "mixes": False,
            },
            {
                "sort": "axes",
                "reading": "axes turned by any angle about [001]",
                "flips": [],
                "mixes": True,
            },
            {"sort": "hand", "reading": "the other hand", "flips": ["11", "14"], "mixes": False},
            {"sort": "entry", "reading": "entries in no relation to others: 33", "entries": ["33"]},
        ],
        "tensor_symmetry": {
            "symbol": "mm2",
            "system": "orthorhombic",
            "elements": ["1"],
            "crystal_symbol": "32",
            "relation": "lower",
            "axes": "ieee",
            "rotation": IDENTITY,
        },
        "stability": None,
        "cause": "slip",
        "message": ["violates: fails as stated", "look the entry up"],
        "constraints": 16,
        "independent": 2,
        "error": None,
        "place": "a.json",
        "crystal": {
            "reference": "q.cif",
            "formula": "SiO2",
            "space_group": "P3_121",
            "frame": "a || x",
            "part": "data block q",
            "distinguished_by": ["element", "occupancy", "label"],
            "remarks": ["moments are not looked at"],
        },
        "measurement": {
            "values": [[0.0] * 6] * 3,
            "unit": "pC/N",
            "order": ORDER,
            "axes": "ieee",
            "layout": "matrix",
            "symbol": "d",
            "sigma_stated": True,
            "source": None,
            "conditions": "300 K",
        },
        "warnings": ["the largest entry is large"],
        "remarks": ["invented"],
    }


@pytest.fixture
def unreadable() -> dict[str, Any]:
    """A record that could not be read."""
    error = {
        "code": "tensor-input",
        "what": "no number",
        "value": "line\nbreak",
        "rule": "a number",
        "next_step": "correct it",
    }
    empty = dict.fromkeys(("verdict", "quantity", "group", "stability", "crystal", "measurement"))
    told = {"id": "x%", "error": error, "place": "line 2", "warnings": [], "remarks": []}
    return evidence(None) | empty | told


@pytest.fixture
def document(violating: dict[str, Any], unreadable: dict[str, Any]) -> dict[str, Any]:
    check = {
        "relation": "s = 1/c",
        "records": ["s", "c"],
        "holds": False,
        "relative_difference": 0.1,
        "worst_entry": "33",
        "share_of_tolerance": 3.2,
        "basis": "the printed digits",
    }
    names = ("consistent", "consistent-otherwise", "violates", "cannot-tell", "no-constraint")
    return {
        "schema": "sitesym.audit/1",
        "records": [violating, unreadable],
        "summary": {
            "records": 2,
            "verdicts": {name: int(name == "violates") for name in names},
            "errors": 1,
            "violating_in_stated_axes_alone": 1,
            "axes_or_order_not_stated": 0,
            "cross_checks": 1,
            "cross_checks_failing": 1,
        },
        "cross_checks": [check],
        "unread_files": [{"file": "lost.yaml", "what": "the file cannot be read"}],
        "noise": 0.01,
        "tolerance_angstrom": 0.01,
        "reading": {"frame": None, "block": "q", "symmetry_from": None, "distinguish": ["label", "moment"]},
        "versions": {"sitesym": "0.0.0", "ase": None},
        "caution": "measure",
    }


def test_text_starts_with_the_verdict_and_what_to_do(document: dict[str, Any]) -> None:
    lines = render(document, "text").splitlines()
    assert lines[:2] == ["a|b_1: violates: fails as stated", "  do: look the entry up"]


def test_text_gives_every_finding_and_says_what_it_leaves_out(document: dict[str, Any]) -> None:
    text = " ".join(render(document, "text").split())
    for said in (
        "36 = 0 6.5 0 0.01",
        "12 = -11 2.1 0 0.01",
        "and 1 more",
        "chi2 812 with 16 degrees of freedom, p 1e-30",
        "slip: sign of 12 reversed, expected -2.1",
        "cannot tell read in one of these ways the array is another tensor, which obeys as well:",
        "order: 11 22 33 12 23 13 factor: columns 4-6 halved; columns 4-6 doubled",
        "axes: turned by 180 degrees about [001] reverses 11",
        "axes: turned by any angle about [001] (components change places or mix)",
        "hand: the other hand reverses 11, 14",
        "entry: 33, in no relation to other entries: any size and sign",
        "orthorhombic",
        "warning the largest entry is large",
        "remark invented",
        "point group 32, q.cif, data block q",
        "moments are not looked at",
        "conditions 300 K",
        "x%: error: no number: line\\nbreak (line 2)",
        "do: correct it",
        "s = 1/c s, c no 10 % 33 3.2",
        "2 records: 1 violates, 1 with errors",
        "in the stated axes alone 1 would have been called violating",
        "1 of 1 cross-checks fail",
        "1 file could not be read",
        "noise 1 % of a tensor",
        "reading block q; distinguish label, moment",
    ):
        assert said in text


def test_a_consistent_record_among_others_takes_two_lines(
    document: dict[str, Any], violating: dict[str, Any]
) -> None:
    good = violating | {"verdict": "consistent", "message": ["consistent: obeys", "nothing"], "warnings": []}
    text = render(document | {"records": [good | {"remarks": []}, good]}, "text")
    assert text.startswith("a|b_1: consistent: obeys\n  do: nothing\n\n")


def test_an_unstable_crystal_is_shown_even_where_the_tensor_obeys(
    document: dict[str, Any], violating: dict[str, Any]
) -> None:
    group = PointGroup.from_symbol("m-3m")
    stiffness = allowed_form(kind("elastic-stiffness"), group).matrix({"11": 1.0, "12": 2.0, "44": 1.0})
    entry = stability_entry(elastic_stability(kind("elastic-stiffness"), stiffness, group))
    good = violating | {"verdict": "consistent", "stability": entry, "quantity": "elastic-stiffness"}
    text = " ".join(render(document | {"records": [good, good]}, "text").split())
    assert "do: elastically unstable: see the conditions before using it; symmetry asks" in text
    assert "elastic unstable" in text
    assert "Eg (2x) -1 c11 - c12 > 0 -1 no" in text


def test_csv_survives_a_re_read(document: dict[str, Any]) -> None:
    first, second = csv.DictReader(io.StringIO(render(document, "csv")))
    assert (first["id"], first["forbidden"], first["relations"]) == ("a|b_1", "6", "13")
    assert first["stated_p_value"] == "1e-30"
    assert first["cannot_tell"].startswith("order 11 22 33 12 23 13; columns 4-6 halved; ")
    assert (second["verdict"], second["error_code"]) == ("", "tensor-input")
    assert "line\nbreak" in second["error_message"]


def test_tables_escape_names_and_show_errors(document: dict[str, Any]) -> None:
    markdown, latex = render(document, "markdown"), render(document, "latex")
    assert r"a\|b\_1" in markdown
    assert r"a\textbar{}b\_1" in latex
    assert r"x\%" in latex
    assert "s = 1/c" in markdown
    rows = [line for line in markdown.splitlines() if line.startswith("| ")]
    assert {line.count(" | ") for line in rows[:4]} == {8}


def test_tables_say_what_the_best_reading_is_and_what_symmetry_cannot_tell(
    document: dict[str, Any], violating: dict[str, Any]
) -> None:
    other = {"order": "11 22 33 12 23 13", "factor": "columns 4-6 doubled"}
    records = [
        violating,
        violating | {"verdict": "consistent-otherwise", "best": reading(**other)},
        violating | {"verdict": "consistent", "best": reading()},
        violating | {"verdict": "cannot-tell", "best": reading(), "stated": None},
    ]
    text = render(document | {"records": records}, "markdown")
    first, second, third, fourth = (line for line in text.splitlines() if line.startswith("| a"))
    assert "axes ieee; slip: sign of 12 reversed, expected -2.1" in first
    assert "axes ieee; order 11 22 33 12 23 13; columns 4-6 doubled |" in second
    assert "| as stated |" in third
    assert f"axes ieee; order {ORDER}; layout matrix |" in fourth
    assert r"12 23 13; columns 4-6 halved; axes turned by 180 degrees about \[001\]; the other hand" in first
    assert "look the entry up; the largest entry is large |" in first


def test_index_symmetry_names_the_entries_that_differ() -> None:
    pair = {"first": "12", "second": "21", "first_value": 1.0, "second_value": 2.0, "tolerance": 0.1}
    entry = {"applies": True, "holds": False, "largest": 1.0, "relative": 0.25, "broken": [pair]}
    assert index_text(entry) == "index symmetry is broken by 25 %: 12 = 1 but 21 = 2"


@pytest.mark.parametrize(
    ("slip", "words"),
    [
        ({"sort": "swap", "entries": ["11", "33"], "expected": [2.0, 1.0]}, "11 and 33 exchanged"),
        ({"sort": "power-of-ten", "entries": ["11"], "expected": [2.0], "exponent": 1}, "11 off by 10^1"),
        ({"sort": "entry", "entries": ["14"], "expected": [0.5]}, "14 wrong, expected 0.5"),
    ],
)
def test_slips_are_said_in_words(slip: dict[str, Any], words: str) -> None:
    assert words in slip_text({"exponent": 0} | slip)


def test_a_free_rotation_gives_angle_axis_and_the_nearest_directions() -> None:
    turn = {
        "angle_degrees": 12.5,
        "axis": [0.0, 0.0, 1.0],
        "nearest": [{"direction": "[110]", "degrees": 2.0}],
    }
    text = reading_text(reading(turn=turn, equal_to=["file", "lattice", "given"]))
    assert "turned by 12.50 degrees about ( 0.0000  0.0000  1.0000)" in text
    assert "x 2 degrees from [110]" in text
    assert "file; lattice and 1 more" in text


@pytest.mark.parametrize("relation", ["same", "higher", "lower", "other"])
def test_every_relation_of_symmetries_has_its_words(relation: str) -> None:
    entry = {"symbol": "4mm", "system": "tetragonal", "crystal_symbol": "32", "relation": relation}
    text = symmetry_text(entry | {"axes": "ieee", "rotation": IDENTITY})
    assert text.startswith("symmetry 4mm (tetragonal) within the noise, ")
    assert "the 32 that such a tensor shows" in text
    assert "sought in the ieee axes of the crystal" in text
    own = symmetry_text(entry | {"axes": "own", "rotation": IDENTITY})
    assert "within the noise, in axes of its own" in own
    assert "x = ( 1.0000  0.0000  0.0000)" in own
    assert "ieee" not in own


def test_a_residual_without_deviations_has_no_chi_squared(violating: dict[str, Any]) -> None:
    assert "chi2" not in stated_text(violating["stated"] | {"chi2": None})


def test_numbers_that_are_not_finite_become_null() -> None:
    residual = Residual(1.0, float("nan"), float("inf"), within=False)
    infinite = Reading("ieee", np.eye(3), tuple(ORDER.split()), "matrix", "", residual, 1, -np.inf)
    entry = reading_entry(infinite)
    assert (entry["relative_residual"], entry["tolerance"], entry["log_chance"]) == (None, None, None)
    json.dumps(entry, allow_nan=False)


def test_averages_of_a_compliance_carry_the_inverse_unit() -> None:
    group = PointGroup.from_symbol("m-3m")
    compliance = allowed_form(kind("elastic-compliance"), group).matrix({"11": 4.0, "12": -1.0, "44": 5.0})
    entry = stability_entry(elastic_stability(kind("elastic-compliance"), compliance, group))
    assert "1/(1/TPa)" in stability_text(entry, "1/TPa", is_compliance=True, indent=4)
    assert "not stated" in stability_text(entry, "unknown", is_compliance=True, indent=4)
