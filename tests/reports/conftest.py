"""Small documents written by hand, so that renderers are tested apart from what computes the numbers."""

from __future__ import annotations

from dataclasses import asdict
from typing import Any

import pytest

from sitesym.screening import columns_for

VERSIONS = {"sitesym": "0.0.0", "numpy": "0.0.0", "ase": None}
GROUP = {"symbol": "3m", "oriented": "31m", "schoenflies": "C3v", "order": 6, "system": "trigonal"}


@pytest.fixture
def piezoelectric() -> dict[str, Any]:
    """Class 32 in its standard orientation: Nye, Physical Properties of Crystals (1957), table 8."""
    return {
        "name": "piezoelectric-strain",
        "symbol": "d",
        "rank": 3,
        "index_symmetry": "V[V2]",
        "parity": "polar",
        "unit": "pC/N",
        "order": "11 22 33 23 13 12",
        "independent_count": 2,
        "independent": ["11", "14"],
        "components": {
            "11": {"11": "1"},
            "12": {"11": "-1"},
            "14": {"14": "1"},
            "25": {"14": "-1"},
            "26": {"11": "-2"},
        },
        "exact": True,
        "traceless": False,
        "equivalent_axes": [],
        "blocks": [3, 6],
        "symmetric": False,
        "antisymmetric": False,
        "factor_rule": "factor 2 in columns 4 to 6",
        "indices": "first: field; second: stress",
        "keys": [f"{i}{j}" for i in "123" for j in "123456"],
    }


@pytest.fixture
def elastic() -> dict[str, Any]:
    """An isotropic solid: two independent components, one dependent on both."""
    diagonal = {key: {"11": "1"} for key in ("11", "22", "33")}
    shear = {key: {"11": "1/2", "12": "-1/2"} for key in ("44", "55", "66")}
    off = {key: {"12": "1"} for key in ("12", "13", "23")}
    return {
        "name": "elastic-stiffness",
        "symbol": "c",
        "rank": 4,
        "index_symmetry": "[[V2]2]",
        "parity": "polar",
        "unit": "GPa",
        "order": "11 22 33 23 13 12",
        "independent_count": 2,
        "independent": ["11", "12"],
        "components": diagonal | off | shear,
        "exact": True,
        "traceless": False,
        "equivalent_axes": [],
        "blocks": [6, 6],
        "symmetric": True,
        "antisymmetric": False,
        "factor_rule": "no factor",
        "indices": "stress, then strain",
        "keys": [f"{i}{j}" for i in "123456" for j in "123456" if i <= j],
    }


@pytest.fixture
def allowed(piezoelectric: dict[str, Any], elastic: dict[str, Any]) -> dict[str, Any]:
    """A document with two properties."""
    return {
        "schema": "sitesym.allowed/1",
        "group": GROUP,
        "crystal": None,
        "axes": {"name": "ieee", "edition": "IEEE Std 176-1978", "rotation_from_file": None},
        "properties": [piezoelectric, elastic],
        "versions": VERSIONS,
    }


@pytest.fixture
def irreps() -> dict[str, Any]:
    """The group of order two with its mirror, one matrix an element."""
    return {
        "schema": "sitesym.irreps/1",
        "group": {"symbol": "m", "oriented": "1m1", "schoenflies": "Cs", "order": 2, "system": "monoclinic"},
        "elements": [
            {"name": "1", "matrix": [[1.0, 0, 0], [0, 1.0, 0], [0, 0, 1.0]]},
            {"name": "m [010]", "matrix": [[1.0, 0, 0], [0, -1.0, 0], [0, 0, 1.0]]},
        ],
        "classes": [
            {"label": "1", "size": 1, "elements": [0]},
            {"label": "m [010]", "size": 1, "elements": [1]},
        ],
        "irreps": [
            {
                "label": "A'",
                "dimension": 1,
                "reality": "real",
                "characters": ["1", "1"],
                "characters_numeric": [[1.0, 0.0], [1.0, 0.0]],
                "components": ["x", "z"],
                "matrices": [[[[1.0, 0.0]]], [[[1.0, 0.0]]]],
            },
            {
                "label": "A''",
                "dimension": 1,
                "reality": "real",
                "characters": ["1", "-1"],
                "characters_numeric": [[1.0, 0.0], [-1.0, 0.0]],
                "components": ["y"],
                "matrices": [[[[1.0, 0.0]]], [[[-1.0, 0.0]]]],
            },
        ],
        "checks": {"characters_orthogonal": True, "unitary_deviation": 0.0},
        "reduction": {"property": "pyroelectric", "multiplicity": {"A'": 2, "A''": 1}},
        "versions": VERSIONS,
    }


@pytest.fixture
def screen() -> dict[str, Any]:
    """A formula and a point group that read as something else, and a file that failed."""
    columns = columns_for()
    good = {"id": "a|b", "formula": "NaN", "space_group": "P-1", "point_group": "-1", "centrosymmetric": True}
    good |= dict.fromkeys((column.name for column in columns if column.type == "bool"), False) | good
    good |= {"count_piezoelectric_strain": 0, "count_permittivity": 6, "count_elastic_stiffness": 21}
    bad = {
        "id": "x_%.cif",
        "status": "error",
        "error_code": "unreadable",
        "error_message": "line one\nline two",
    }
    blank = dict.fromkeys(column.name for column in columns)
    return {
        "schema": "sitesym.screen/1",
        "inputs": ["samples"],
        "tolerance_angstrom": 0.01,
        "finder": "spglib",
        "ladder": False,
        "frame": None,
        "symmetry_from": None,
        "distinguished_by": ["element", "occupancy"],
        "columns": [asdict(column) for column in columns],
        "rows": [blank | good | {"status": "ok"}, blank | bad],
        "versions": VERSIONS,
    }
