"""Laws of allowed forms: every operation leaves them unchanged, and turning the problem turns the answer."""

from functools import reduce

import numpy as np
import pytest

from sitesym.groups import PointGroup, standard_rotation
from sitesym.groups.symbols import ORIENTED, SCHOENFLIES, rotation_about
from sitesym.tensors import TensorKind, all_kinds, allowed_form, contraction, kind, kind_from_jahn, turned

SPELLINGS = [spelling for symbol in SCHOENFLIES for spelling in ORIENTED.get(symbol, (symbol,))]
UP_TO_FOUR = [k for k in all_kinds() if k.rank <= 4]
HIGH = [kind("nonlinear-piezoelectric"), kind("third-order-elastic")]


def random_turn(seed: int) -> np.ndarray:
    rng = np.random.default_rng(seed)
    return rotation_about(rng.standard_normal(3), rng.uniform(0.0, 2.0 * np.pi))


def assert_invariant(tensor_kind: TensorKind, group: PointGroup) -> None:
    """Each independent component by itself, put into the full tensor, is unchanged by every generator."""
    form = allowed_form(tensor_kind, group)
    for name in form.independent:
        full = form.full({n: float(n == name) for n in form.independent})
        for g in group.generators:
            image = turned(full, group.rotations_cart[g], axial=tensor_kind.axial)
            assert np.abs(image - full).max() < 1e-9, (tensor_kind.name, name, group.names[g])


@pytest.mark.parametrize("spelling", SPELLINGS)
def test_exact_forms_are_unchanged_by_every_generator(spelling: str) -> None:
    group = PointGroup.from_symbol(spelling)
    for tensor_kind in UP_TO_FOUR + HIGH:
        assert allowed_form(tensor_kind, group).exact, tensor_kind.name
        assert_invariant(tensor_kind, group)


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_forms_in_random_axes_are_unchanged_by_every_generator(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol).rotated(random_turn(len(symbol)))
    for tensor_kind in UP_TO_FOUR:
        assert_invariant(tensor_kind, group)


@pytest.mark.parametrize("symbol", ["1", "2", "mm2", "32", "-6m2", "4/m", "23", "m-3m"])
def test_turning_group_and_tensor_together_changes_no_answer(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    rng = np.random.default_rng(8)
    for seed in range(2):
        turn = random_turn(seed)
        for tensor_kind in UP_TO_FOUR:
            form = allowed_form(tensor_kind, group)
            other = allowed_form(tensor_kind, group.rotated(turn))
            assert other.independent_count == form.independent_count
            values = dict(zip(form.independent, rng.standard_normal(form.independent_count), strict=True))
            there = turned(form.full(values), turn)
            read_off = values_in(tensor_kind, other.independent, there)
            assert np.abs(other.full(read_off) - there).max() < 1e-7, tensor_kind.name


def values_in(tensor_kind: TensorKind, independent: tuple[str, ...], full: np.ndarray) -> dict[str, float]:
    """Values of the independent components read off a full tensor."""
    names = contraction(tensor_kind)
    written = dict(zip(names.keys, tensor_kind.written.components, strict=True))
    factors = dict(zip(names.keys, names.factors, strict=True))
    return {name: float(full[written[name]] * factors[name]) for name in independent}


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_the_standard_orientation_undoes_any_turn(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    standard = {np.round(m, 6).tobytes() for m in group.rotations_cart + 0.0}
    for seed in range(4):
        turned_group = group.rotated(random_turn(seed))
        rotation = standard_rotation(turned_group)
        assert np.linalg.det(rotation) == pytest.approx(1.0)
        back = np.round(turned_group.rotated(rotation).rotations_cart, 6) + 0.0
        assert {m.tobytes() for m in back} == standard


@pytest.mark.parametrize("spelling", SPELLINGS)
def test_every_spelling_has_one_standard_orientation(spelling: str) -> None:
    group = PointGroup.from_symbol(spelling)
    standard = PointGroup.from_symbol(group.symbol).rotations_cart
    oriented = group.rotated(standard_rotation(group)).rotations_cart
    assert all(np.abs(standard - m).max(axis=(1, 2)).min() < 1e-9 for m in oriented)


def test_preferred_directions_decide_what_symmetry_leaves_open() -> None:
    group = PointGroup.from_symbol("222")
    wishes = np.array([[0.0, 1, 0], [0, 0, 1], [1, 0, 0]])
    assert standard_rotation(group, wishes) == pytest.approx(wishes)
    assert standard_rotation(PointGroup.from_symbol("3"), wishes)[2] == pytest.approx([0, 0, 1])


def test_the_full_average_over_the_group_projects_onto_the_form() -> None:
    # a random tensor of the index symmetry, averaged over the group, has the form and keeps the form's values
    rng = np.random.default_rng(4)
    for symbol, name in (
        ("32", "elastic-stiffness"),
        ("-43m", "piezoelectric-stress"),
        ("6mm", "flexoelectric"),
    ):
        group, tensor_kind = PointGroup.from_symbol(symbol), kind(name)
        component, sign = tensor_kind.symmetry.full_indices
        start = (rng.standard_normal(tensor_kind.symmetry.dimension)[component] * sign).ravel()
        powers = [reduce(np.kron, [r] * tensor_kind.rank) for r in group.rotations_cart]
        average = (np.mean(powers, axis=0) @ start).reshape((3,) * tensor_kind.rank)
        form = allowed_form(tensor_kind, group)
        again = form.full(values_in(tensor_kind, form.independent, average))
        assert np.abs(again - average).max() < 1e-12, symbol


@pytest.mark.parametrize("tilt", [1e-2, 1e-4, 1e-6, 1e-7])
def test_axes_tilted_a_little_change_no_count_and_keep_coefficients_small(tilt: float) -> None:
    for symbol in ("2", "-42m", "32", "6/m", "m-3m"):
        group = PointGroup.from_symbol(symbol)
        tilted = group.rotated(rotation_about(np.array([1.0, 2.0, -0.5]), tilt))
        for tensor_kind in UP_TO_FOUR:
            form = allowed_form(tensor_kind, tilted)
            assert form.independent_count == allowed_form(tensor_kind, group).independent_count
            assert np.abs(form.coefficients).max(initial=0.0) < 20, (symbol, tensor_kind.name)


@pytest.mark.parametrize("symbol", ["mm2", "mmm", "-6m2", "32"])
@pytest.mark.parametrize("seed", [0, 4, 5, 28])
def test_many_components_in_any_axes_lose_none_of_their_number(symbol: str, seed: int) -> None:
    # over a hundred components: solving in the wished order alone would lose all digits in some of these axes
    group = PointGroup.from_symbol(symbol)
    turned_group = group.rotated(random_turn(seed))
    for tensor_kind in (kind("fourth-order-elastic"), kind_from_jahn("[[V2]2]V2"), kind_from_jahn("[V2]3")):
        form = allowed_form(tensor_kind, turned_group)
        assert form.independent_count == allowed_form(tensor_kind, group).independent_count
        assert np.abs(form.coefficients).max() < 60, tensor_kind.name
