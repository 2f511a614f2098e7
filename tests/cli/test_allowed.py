"""`sitesym allowed`: what is asked for, in which axes, of which group."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from click.testing import Result

from sitesym.cli.allowed import EVERYDAY
from sitesym.tensors import all_kinds

Run = Callable[..., Result]
Call = Callable[..., dict[str, Any]]


def test_class_32_has_the_published_piezoelectric_form(document: Call) -> None:
    """Nye, Physical Properties of Crystals (1957), table 8: x along the twofold axis, d26 = -2 d11."""
    (entry,) = document("allowed", "--group", "32", "--property", "piezoelectric-strain")["properties"]
    assert entry["independent"] == ["11", "14"]
    assert entry["components"] == {
        "11": {"11": "1"},
        "12": {"11": "-1"},
        "14": {"14": "1"},
        "25": {"14": "-1"},
        "26": {"11": "-2"},
    }
    assert entry["exact"] is True


def test_the_document_keeps_its_contract(document: Call, quartz: str) -> None:
    answer = document("allowed", quartz)
    assert answer["schema"] == "sitesym.allowed/1"
    assert {"symbol", "oriented", "schoenflies", "order"} <= set(answer["group"])
    assert answer["crystal"]["space_group_number"] == 152
    assert answer["axes"]["name"] == "file"
    assert np.allclose(answer["axes"]["rotation_from_file"], np.eye(3))
    assert [entry["name"] for entry in answer["properties"]] == list(EVERYDAY)
    assert answer["versions"]["spglib"]


def test_properties_may_be_repeated_listed_or_all(document: Call) -> None:
    listed = document("allowed", "--group", "4mm", "--property", "seebeck, hall", "--property", "gyration")
    assert [entry["name"] for entry in listed["properties"]] == ["seebeck", "hall", "gyration"]
    everything = document("allowed", "--group", "4mm", "--property", "all")
    assert [entry["name"] for entry in everything["properties"]] == [kind.name for kind in all_kinds()]


def test_any_index_symmetry_can_be_asked_for(document: Call) -> None:
    (entry,) = document("allowed", "--group", "23", "--jahn", "V[V2]")["properties"]
    assert entry["independent"] == ["14"]
    assert entry["unit"] == "unknown"


def test_axes_follow_the_source_unless_named(document: Call, quartz: str) -> None:
    assert document("allowed", "--group", "32", "--property", "hall")["axes"]["name"] == "ieee"
    assert document("allowed", quartz, "--property", "hall")["axes"]["name"] == "file"
    ieee = document("allowed", quartz, "--property", "hall", "--axes", "ieee")["axes"]
    assert ieee["edition"] == "IEEE Std 176-1978"


def test_the_lattice_axes_of_an_oriented_symbol_show_its_own_form(document: Call) -> None:
    """With x along a, P31m and P3m1 differ: common practice, no source."""
    patterns = {
        symbol: sorted(
            document("allowed", "--group", symbol, "--property", "piezoelectric-stress", "--axes", "lattice")[
                "properties"
            ][0]["components"]
        )
        for symbol in ("31m", "3m1")
    }
    assert patterns == {
        "31m": ["11", "12", "15", "24", "26", "31", "32", "33"],
        "3m1": ["15", "16", "21", "22", "24", "31", "32", "33"],
    }


def test_a_given_rotation_turns_the_form_and_is_printed(document: Call, quartz: str) -> None:
    turned = document(
        "allowed", quartz, "--property", "piezoelectric-strain", "--rotation", "0 1 0; -1 0 0; 0 0 1"
    )
    assert turned["axes"]["name"] == "given"
    assert turned["axes"]["rotation_from_file"] == [[0, 1, 0], [-1, 0, 0], [0, 0, 1]]
    assert turned["properties"][0]["independent"] == ["14", "22"]


def test_a_site_has_the_tensors_of_its_own_group(document: Call, structures: str) -> None:
    answer = document(
        "allowed",
        f"{structures}/wurtzite_ZnO.cif",
        "--site",
        "Zn1",
        "--property",
        "born-charge,displacement-parameter",
    )
    assert answer["site"]["site_symmetry"] == "3m."
    assert answer["group"]["symbol"] == "3m"
    assert [entry["independent"] for entry in answer["properties"]] == [["11", "33"], ["11", "33"]]


@pytest.mark.parametrize(
    ("arguments", "hint"),
    [
        (["--group", "32", "--property", "pyroelectri"], "pyroelectric"),
        (["--group", "77x"], "77x"),
        (["--group", "32", "--jahn", "V[V"], "V[V"),
        (["--group", "32", "--axes", "file"], "needs a file"),
        (["--group", "32", "--axes", "given"], "--rotation"),
        (["--group", "32", "--rotation", "1 0 0"], "nine numbers"),
        (["--group", "32", "--rotation", "1 0 0 0 1 0 0 0 -1"], "left-handed"),
        (["--group", "32", "--axes", "ieee", "--rotation", "1 0 0 0 1 0 0 0 1"], "--axes given"),
        (["--group", "32", "--site", "Si1"], "FILE"),
        (["--group", "32", "--block", "one"], "--block"),
        (["--group", "32", "--symmetry-from", "hall", "--finder", "both"], "--symmetry-from, --finder"),
        (["--group", "32", "--axes", "sideways"], "sideways"),
        (["--group", "32", "--format", "yaml"], "yaml"),
        ([], "FILE or --group"),
    ],
)
def test_a_wrong_option_is_a_usage_error_that_helps(run: Run, arguments: list[str], hint: str) -> None:
    result = run("allowed", *arguments)
    assert result.exit_code == 2
    assert hint in result.stderr
    assert not result.stdout


def test_a_file_and_a_group_together_are_refused(run: Run, quartz: str) -> None:
    assert run("allowed", quartz, "--group", "32").exit_code == 2


def test_an_atoms_tensor_needs_a_site_in_a_crystal(run: Run, quartz: str) -> None:
    result = run("allowed", quartz, "--property", "born-charge")
    assert result.exit_code == 2
    assert "--site LABEL" in result.stderr


def test_an_unknown_site_lists_the_known_ones(run: Run, quartz: str) -> None:
    result = run("allowed", quartz, "--site", "Xe7")
    assert result.exit_code == 2
    assert "Si1, O1" in result.stderr
