"""The tolerance ladder: groups, stable interval, robust or fragile."""

import numpy as np
import pytest

from sitesym.crystals import Crystal, find_symmetry, read_crystal
from sitesym.crystals.ladder import RUNGS_ANGSTROM, Rung, climb, tolerance_ladder

PEROVSKITE = np.array([[0, 0, 0], [0.5, 0.5, 0.5], [0.5, 0.5, 0], [0.5, 0, 0.5], [0, 0.5, 0.5]])


def barium_titanate():
    """Tetragonal, 5 atoms; values as in the list of expected answers of this project's requirements."""
    positions = [[0, 0, 0], [0.5, 0.5, 0.5215], [0.5, 0.5, -0.0244], [0.5, 0, 0.4895], [0, 0.5, 0.4895]]
    return Crystal.from_tuple((np.diag([3.994, 3.994, 4.033]), positions, [56, 22, 8, 8, 8]))


def symbols(ladder):
    return [rung.space_group_symbol for rung in ladder.rungs]


def test_tetragonal_barium_titanate_keeps_its_group_up_to_a_tenth_of_an_angstrom():
    ladder = tolerance_ladder(find_symmetry(barium_titanate()))
    assert [rung.tolerance_angstrom for rung in ladder.rungs] == list(RUNGS_ANGSTROM)
    assert symbols(ladder) == ["P4mm"] * 7 + ["Pm-3m"]
    assert ladder.stable_interval_angstrom == (1e-5, 0.1)


@pytest.mark.parametrize("tolerance", RUNGS_ANGSTROM)
def test_barium_titanate_is_fragile_only_at_a_fifth_of_an_angstrom(tolerance):
    assert tolerance_ladder(find_symmetry(barium_titanate(), tolerance)).fragile == (tolerance == 0.2)


def test_rounded_thirds_of_aluminium_nitride_are_seen_at_small_tolerances():
    a, c = 3.11, 4.98
    lattice = [[a, 0, 0], [-a / 2, a * np.sqrt(3) / 2, 0], [0, 0, c]]
    x, y = 0.3333, 0.6667
    positions = [[x, y, 0], [y, x, 0.5], [x, y, 0.382], [y, x, 0.882]]
    crystal = Crystal.from_tuple((lattice, positions, [13, 13, 7, 7]))
    ladder = tolerance_ladder(find_symmetry(crystal, 1e-5))
    assert symbols(ladder) == ["Cmc2_1"] * 2 + ["P6_3mc"] * 6
    assert ladder.fragile
    assert not tolerance_ladder(find_symmetry(crystal, 0.01)).fragile


@pytest.mark.parametrize("seed", range(5))
def test_a_perovskite_with_noise_of_5_milliangstrom_is_fragile(seed):
    noise = np.random.default_rng(seed).normal(size=(5, 3))
    noise *= 0.005 / np.linalg.norm(noise, axis=1)[:, None]
    crystal = Crystal.from_tuple((np.eye(3) * 3.905, PEROVSKITE + noise / 3.905, [38, 22, 8, 8, 8]))
    ladder = tolerance_ladder(find_symmetry(crystal))
    assert ladder.fragile
    assert symbols(ladder)[0] == "P1"
    assert symbols(ladder)[-1] == "Pm-3m"


def test_the_ladder_says_what_a_search_at_every_rung_says(structures):
    for path in sorted(structures.glob("*.cif")):
        crystal = read_crystal(path)
        ladder = tolerance_ladder(find_symmetry(crystal))
        everywhere = [find_symmetry(crystal, length).space_group_symbol for length in RUNGS_ANGSTROM]
        assert symbols(ladder) == everywhere, path.name


def test_a_tolerance_between_two_rungs_gets_a_rung_of_its_own():
    ladder = tolerance_ladder(find_symmetry(barium_titanate(), 0.13))
    assert [rung.tolerance_angstrom for rung in ladder.rungs][-3:] == [0.1, 0.13, 0.2]
    assert ladder.rungs[ladder.chosen].finder == "spglib"


def test_spglib_is_asked_where_moyo_lowers_the_tolerance():
    with_spglib = tolerance_ladder(find_symmetry(barium_titanate()))
    assert (with_spglib.rungs[-1].finder, with_spglib.rungs[0].finder) == ("spglib", "moyo")
    only_moyo = tolerance_ladder(find_symmetry(barium_titanate(), finder="moyo"), "moyo")
    assert only_moyo.rungs[-1].tolerance_used_angstrom < 0.2
    assert {rung.finder for rung in only_moyo.rungs} <= {"moyo", ""}


def climbed(groups, chosen):
    """The ladder of a made-up crystal with these Hall numbers at the rungs, and the lengths searched."""
    table = dict(zip(RUNGS_ANGSTROM, groups, strict=True))
    searched = []

    def search(length):
        searched.append(length)
        return Rung(length, table[length], "made up", length)

    return climb(Rung(chosen, table[chosen], "made up", chosen), search), searched


def test_nothing_is_searched_between_equal_groups():
    ladder, searched = climbed([525] * 8, 0.01)
    assert searched == [1e-5, 0.2]
    assert [bool(rung.finder) for rung in ladder.rungs] == [
        True,
        False,
        False,
        True,
        False,
        False,
        False,
        True,
    ]
    assert not ladder.fragile


@pytest.mark.parametrize("place", range(1, 8))
@pytest.mark.parametrize("chosen", RUNGS_ANGSTROM)
def test_a_change_is_found_wherever_it_is(place, chosen):
    groups = [1] * place + [525] * (8 - place)
    ladder, _ = climbed(groups, chosen)
    assert [rung.hall_number for rung in ladder.rungs] == groups
    low, high = ladder.stable_interval_angstrom
    assert low <= chosen <= high
    assert (low, high) == ((1e-5, RUNGS_ANGSTROM[place - 1]) if chosen < RUNGS_ANGSTROM[place]
                           else (RUNGS_ANGSTROM[place], 0.2))  # fmt: skip


def test_a_rung_without_an_answer_counts_as_a_change():
    ladder, _ = climbed([525] * 5 + [None] * 3, 0.01)
    assert ladder.fragile
    assert ladder.rungs[-1].space_group_symbol == ""
