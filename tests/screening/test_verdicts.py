"""Verdicts along the tolerance ladder, and the columns that tell how far they can be relied on."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from sitesym.crystals import Crystal, examined_symmetry
from sitesym.crystals.spglib_finder import setting
from sitesym.crystals.symmetry import group_of_setting
from sitesym.screening.verdicts import (
    reliability_columns,
    reliability_remarks,
    verdict_flips,
    verdicts_of_setting,
)

#: The 20 piezoelectric classes, the 10 polar ones, the 15 with a gyration tensor: J. F. Nye, Physical
#: Properties of Crystals (1957), chapters VII, IV and XIV; the lists from memory.
PIEZOELECTRIC = {
    "1", "2", "m", "222", "mm2", "4", "-4", "422", "4mm", "-42m",
    "3", "32", "3m", "6", "-6", "622", "6mm", "-6m2", "23", "-43m",
}  # fmt: skip
POLAR = {
    "1", "2", "m", "mm2", "4", "4mm", "3", "3m", "6", "6mm",
}  # fmt: skip
OPTICALLY_ACTIVE = {
    "1", "2", "m", "222", "mm2", "4", "-4", "422",
    "-42m", "3", "32", "6", "622", "23", "432",
}  # fmt: skip
CENTROSYMMETRIC = {
    "-1", "2/m", "mmm", "4/m", "4/mmm", "-3",
    "-3m", "6/m", "6/mmm", "m-3", "m-3m",
}  # fmt: skip


@pytest.fixture
def barium_titanate() -> Crystal:
    """Tetragonal BaTiO3 with the off-centring of 0.1 angstrom."""
    positions = [[0, 0, 0], [0.5, 0.5, 0.5215], [0.5, 0.5, -0.0244], [0.5, 0, 0.4895], [0, 0.5, 0.4895]]
    return Crystal.from_tuple((np.diag([3.994, 3.994, 4.033]), positions, [56, 22, 8, 8, 8]))


def test_verdicts_of_all_settings_are_those_of_the_published_lists_of_classes() -> None:
    for hall_number in range(1, 531):
        symbol = group_of_setting(hall_number).symbol
        assert verdicts_of_setting(hall_number) == {
            "centrosymmetric": setting(hall_number).has_inversion,
            "polar": symbol in POLAR,
            "piezoelectric": symbol in PIEZOELECTRIC,
            "optical_activity": symbol in OPTICALLY_ACTIVE,
        }, (hall_number, symbol)
        assert setting(hall_number).is_polar == (symbol in POLAR)
        assert setting(hall_number).has_inversion == (symbol in CENTROSYMMETRIC)


def test_verdicts_of_barium_titanate_flip_between_a_tenth_and_a_fifth(barium_titanate: Crystal) -> None:
    for tolerance, in_window in ((0.01, False), (0.2, True)):
        reliability = examined_symmetry(barium_titanate, tolerance).reliability
        assert reliability is not None
        assert reliability.ladder is not None
        flips = verdict_flips(reliability.ladder)
        assert {(flip.verdict, flip.above) for flip in flips} == {
            ("centrosymmetric", True),
            ("polar", False),
            ("piezoelectric", False),
        }
        assert {(flip.lower_angstrom, flip.upper_angstrom) for flip in flips} == {(0.1, 0.2)}
        assert {flip.in_window for flip in flips} == {in_window}
        assert bool(reliability_remarks(reliability)) == in_window


def test_the_columns_say_robust_with_interval_and_distance(barium_titanate: Crystal) -> None:
    columns = reliability_columns(examined_symmetry(barium_titanate).reliability)
    distance = columns.pop("distance_to_centrosymmetric_angstrom")
    assert columns == {
        "stability": "robust",
        "interval_low_angstrom": 1e-5,
        "interval_high_angstrom": 0.1,
    }
    # titanium relative to the mean of all shifts along z
    shifts = np.array([0, 0.0215, -0.0244, -0.0105, -0.0105])
    assert distance == pytest.approx(np.abs(shifts - shifts.mean()).max() * 4.033, abs=1e-9)


def test_what_was_not_asked_is_missing_and_a_second_finder_that_differs_is_named(
    barium_titanate: Crystal,
) -> None:
    plain = examined_symmetry(barium_titanate, ladder=False).reliability
    assert set(reliability_columns(plain).values()) == {None}
    assert reliability_remarks(plain) == []
    both = examined_symmetry(barium_titanate, 0.2, "both", ladder=False).reliability
    (remark,) = reliability_remarks(both)
    assert remark.startswith("moyo differs in space group")
    assert remark.endswith("P4mm")


def test_a_distance_to_an_arrangement_that_no_finder_confirms_is_left_empty(barium_titanate: Crystal) -> None:
    reliability = examined_symmetry(barium_titanate).reliability
    assert reliability is not None
    assert reliability.pseudosymmetry is not None
    nearest = reliability.pseudosymmetry.centrosymmetric
    assert nearest is not None
    unconfirmed = replace(reliability.pseudosymmetry, centrosymmetric=replace(nearest, checked=False))
    columns = reliability_columns(replace(reliability, pseudosymmetry=unconfirmed))
    assert columns["distance_to_centrosymmetric_angstrom"] is None
