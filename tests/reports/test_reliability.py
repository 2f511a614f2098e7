"""Ladder, distances and second opinion in documents and as text."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from sitesym.crystals import examined_symmetry, find_symmetry, read_crystal
from sitesym.reports.reliability_text import reliability_lines
from sitesym.reports.sites import crystal_entry

BARIUM_TITANATE = Path(__file__).parents[2] / "structures" / "barium_titanate_BaTiO3.cif"


def entry(tolerance: float = 0.01, finder: str = "spglib") -> dict[str, Any]:
    symmetry = examined_symmetry(read_crystal(BARIUM_TITANATE), tolerance, finder)
    written: dict[str, Any] = json.loads(json.dumps(crystal_entry(symmetry), allow_nan=False))
    return written


def test_the_entry_holds_every_rung_with_its_verdicts() -> None:
    ladder = entry()["ladder"]
    assert [rung["space_group"] for rung in ladder["rungs"]] == ["P4mm"] * 7 + ["Pm-3m"]
    assert ladder["fragile"] is False
    assert ladder["rungs"][0]["verdicts"]["polar"] is True
    assert ladder["rungs"][-1]["verdicts"] == {
        "centrosymmetric": True,
        "polar": False,
        "piezoelectric": False,
        "optical_activity": False,
    }
    assert {flip["verdict"] for flip in ladder["flips"]} == {"centrosymmetric", "polar", "piezoelectric"}


def test_the_entry_shows_who_is_paired_with_whom_and_how_far_each_atom_moves() -> None:
    nearest = entry()["pseudosymmetry"]["centrosymmetric"]
    assert [(pair["label"], pair["partner_label"]) for pair in nearest["pairs"]][:2] == [
        ("Ba1", "Ba1"),
        ("Ti1", "Ti1"),
    ]
    lengths = [sum(x * x for x in pair["displacement_file"]) ** 0.5 for pair in nearest["pairs"]]
    assert max(lengths) == pytest.approx(nearest["largest_displacement_angstrom"])
    assert nearest["parent"] == "P4/mmm"


def test_the_entry_says_how_far_each_operation_is_from_exact() -> None:
    operations = entry(0.2)["idealisation"]["operations"]
    assert len(operations) == 48
    by_name = {operation["name"]: operation for operation in operations}
    assert by_name["1"]["displacement_angstrom"] == pytest.approx(0.0, abs=1e-9)
    # at this tolerance inversion is taken for a symmetry though atoms miss each other by twice the distance
    distance = entry()["pseudosymmetry"]["centrosymmetric"]["largest_displacement_angstrom"]
    assert by_name["-1"]["displacement_angstrom"] == pytest.approx(2 * distance, rel=0.2)
    assert by_name["3+ [111]"]["strain"] == pytest.approx(4.033 / 3.994 - 1, rel=0.02)


def test_what_was_not_asked_is_null_and_makes_no_line() -> None:
    plain = crystal_entry(find_symmetry(read_crystal(BARIUM_TITANATE)))
    assert (plain["ladder"], plain["pseudosymmetry"], plain["second_opinion"]) == (None, None, None)
    assert list(reliability_lines(plain)) == []


def test_the_lines_say_fragile_with_the_verdicts_and_both_finders() -> None:
    lines = dict(reliability_lines(entry(0.2, "both")))
    assert lines["ladder"].startswith(
        "fragile, the group changes within 0.02 to 0.2 angstrom: P4mm from 1e-05 to 0.1"
    )
    assert "between 0.1 and 0.2: centrosymmetric becomes yes, polar becomes no" in lines["ladder"]
    assert "Pm-3m; moyo" in lines["finders"]
    assert lines["finders"].endswith("both find P4mm at 0.1 angstrom")
    assert "it lowered the tolerance" in lines["finders"]
    assert "distance" not in lines


def test_the_lines_say_robust_and_how_far_inversion_is() -> None:
    lines = dict(reliability_lines(entry()))
    assert lines["ladder"].startswith("robust: P4mm from 1e-05 to 0.1; Pm-3m at 0.2 angstrom")
    assert lines["distance"].endswith("to P4/mmm in this cell")
    assert "they agree" in dict(reliability_lines(entry(0.01, "both")))["finders"]
