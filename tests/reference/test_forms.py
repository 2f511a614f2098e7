"""Allowed forms against the tables in the layout of Nye (1985), and the piezoelectric patterns of settings.

Reference: forms.json (sources, grades and status stand in it).
"""

from __future__ import annotations

import json
import re
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from sitesym.groups import PointGroup
from sitesym.groups.symbols import rotation_about
from sitesym.tensors import AllowedForm, TensorKind, allowed_form, kind, kind_from_jahn

REFERENCE: dict[str, Any] = json.loads((Path(__file__).parent / "forms.json").read_text(encoding="utf-8"))
KINDS: dict[str, TensorKind] = {
    "pyro": kind("pyroelectric"),
    "eps": kind("permittivity"),
    "gyration": kind("gyration"),
    "axial_general": kind_from_jahn("eV2"),
    "polar_rank2_general": kind_from_jahn("V2"),
    "d_piezo(factor2)": kind("piezoelectric-strain"),
    "e_piezo(no factor)": kind("piezoelectric-stress"),
    "d_shg(no factor)": kind("second-harmonic"),
    "d_shg_kleinman": kind("second-harmonic-kleinman"),
    "r_eo": kind("electro-optic"),
    "electrogyration(no factor)": kind("electrogyration"),
    "c": kind("elastic-stiffness"),
    "s(factors 2,4)": kind("elastic-compliance"),
    "p_photoelastic": kind("elasto-optic"),
    "pi_piezooptic(factor2 in columns)": kind("piezo-optic"),
    "C_third_order(Brugger)": kind("third-order-elastic"),
}
#: The spelling whose conventional cell, x along a and z along c, has the orientation of the reference.
ALTERNATIVES = {
    "2 (2||x3)": "112",
    "m (m perp x3)": "11m",
    "2/m (2||x3)": "112/m",
    "-42m with m perp x1 (cell of -4m2)": "-4m2",
    "32 with 2||x2 (cell of 312)": "312",
    "3m with m perp x2 (cell of 31m)": "31m",
    "-3m with 2||x2 (cell of -31m)": "-31m",
    "-6m2 with m perp x2 (2||x1, cell of -62m)": "-62m",
    "mm2 with 2||x1": "2mm",
    "mm2 with 2||x2": "m2m",
}


def read_relation(text: str) -> dict[str, Fraction]:
    """'1/2*c11-1/2*c12' as {'11': 1/2, '12': -1/2}; the letters of the property are dropped."""
    terms = re.findall(r"([+-]?)(?:(\d+(?:/\d+)?)\*)?[A-Za-z]+(\d+)", text)
    return {key: Fraction(sign + (number or "1")) for sign, number, key in terms}


def expected_components(entry: dict[str, Any]) -> dict[str, dict[str, Fraction]]:
    independent = [re.sub("[A-Za-z]", "", name) for name in entry["independent"]]
    related = {re.sub("[A-Za-z]", "", name): read_relation(text) for name, text in entry["relations"].items()}
    return {key: {key: Fraction(1)} for key in independent} | related


def found_components(form: AllowedForm) -> dict[str, dict[str, str]]:
    return {
        key: {name: str(value) for name, value in terms.items()} for key, terms in form.components.items()
    }


def assert_equal(entry: dict[str, Any], form: AllowedForm) -> None:
    expected = expected_components(entry)
    assert form.exact
    assert form.independent_count == entry["n"]
    assert list(form.independent) == [re.sub("[A-Za-z]", "", name) for name in entry["independent"]]
    assert found_components(form) == {
        key: {name: str(value) for name, value in terms.items()} for key, terms in expected.items()
    }


def test_relations_of_the_reference_are_read() -> None:
    assert read_relation("-1/2*C111-1/4*C112+3/4*C222") == {
        "111": Fraction(-1, 2),
        "112": Fraction(-1, 4),
        "222": Fraction(3, 4),
    }
    assert read_relation("-d14") == {"14": Fraction(-1)}


@pytest.mark.parametrize("symbol", REFERENCE["forms"])
def test_forms_of_every_class_equal_the_tables(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    for name, entry in REFERENCE["forms"][symbol].items():
        if name != "orientation":
            assert_equal(entry, allowed_form(KINDS[name], group))


@pytest.mark.parametrize("orientation", REFERENCE["alternative_orientations"])
def test_forms_in_other_orientations_equal_the_tables(orientation: str) -> None:
    group = PointGroup.from_symbol(ALTERNATIVES[orientation])
    for name, entry in REFERENCE["alternative_orientations"][orientation].items():
        assert_equal(entry, allowed_form(KINDS[name], group))


@pytest.mark.parametrize(
    ("symbol", "pattern"),
    [  # non-zero piezoelectric components with x along a and z along c; common practice, no source
        ("3m1", "15 16 21 22 24 31 32 33"),
        ("31m", "11 12 15 24 26 31 32 33"),
        ("312", "14 16 21 22 25"),
        ("321", "11 12 14 25 26"),
        ("-42m", "14 25 36"),
        ("-4m2", "15 24 31 32"),
        ("-6m2", "16 21 22"),
        ("-62m", "11 12 26"),
        ("121", "14 16 21 22 23 25 34 36"),
        ("112", "14 15 24 25 31 32 33 36"),
        ("211", "11 12 13 14 25 26 35 36"),
    ],
)
def test_piezoelectric_patterns_tell_oriented_symbols_apart(symbol: str, pattern: str) -> None:
    form = allowed_form(kind("piezoelectric-strain"), PointGroup.from_symbol(symbol))
    assert sorted(form.components) == pattern.split()


def test_a_form_with_the_root_of_three_is_exact_and_says_so() -> None:
    turn = rotation_about(np.array([0.0, 0.0, 1.0]), np.pi / 6)
    turned = PointGroup.from_symbol("222").rotated(turn)
    form = allowed_form(kind("permittivity"), turned)
    assert form.exact
    # by hand: diag(a, b, c) turned by 30 degrees has eps12 = sqrt(3)/4 (a - b) and eps11 - eps22 = (a - b)/2
    assert found_components(form)["12"] == {"11": "sqrt(3)/2", "22": "-sqrt(3)/2"}
    rotated = turn @ np.diag([5.0, 3.0, 2.0]) @ turn.T
    assert form.full({"11": rotated[0, 0], "22": rotated[1, 1], "33": 2.0}) == pytest.approx(rotated)


def test_a_form_in_arbitrary_axes_has_float_coefficients_and_says_so() -> None:
    turn = rotation_about(np.array([1.0, 2.0, 3.0]), 0.7)
    form = allowed_form(kind("elastic-stiffness"), PointGroup.from_symbol("m-3m").rotated(turn))
    assert not form.exact
    assert form.independent_count == 3
    assert all(isinstance(v, float) for terms in form.components.values() for v in terms.values())
