"""What symmetry cannot tell: everything listed gives another tensor that obeys, and nothing is left out.

The tensors are rebuilt here as full tensors and obey when every operation of the group leaves them as they
are, which is another route than the projections of the audit.
"""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest

from sitesym import PointGroup, TensorKind, kind
from sitesym.arrays import FloatArray
from sitesym.audit import Ambiguity, AuditResult, Measurement, audit
from sitesym.audit.orders import SHEAR_ORDERS, STANDARD_ORDER, Order
from sitesym.groups import standard_rotation
from sitesym.groups.symbols import SCHOENFLIES, rotation_about
from sitesym.tensors import to_full, to_matrix, turned

from .opendata import obeying, random_rotation

D, E, C, S, P, EPS, GYRATION = (
    kind(name)
    for name in (
        "piezoelectric-strain", "piezoelectric-stress", "elastic-stiffness", "elastic-compliance",
        "elasto-optic", "permittivity", "gyration",
    )
)  # fmt: skip
QUARTZ_D = np.array([[2.31, -2.31, 0, -0.727, 0, 0], [0, 0, 0, 0, 0.727, -4.62], [0] * 6])
#: Classes with normalisers of every sort: finite, with turns by 45 and 30 degrees, by any angle.
TELLING = ["2", "2/m", "mm2", "222", "mmm", "4", "-4", "-42m", "4mm", "422", "32", "3m", "-3", "6", "6mm",
           "-6m2", "622", "23", "-43m", "m-3m"]  # fmt: skip


def audited(tensor_kind: TensorKind, values: FloatArray, group: PointGroup, **stated: object) -> AuditResult:
    stated = {"axes": "lattice", "order": STANDARD_ORDER} | stated
    return audit(Measurement("m", tensor_kind, values, **stated), group, noise=1e-3)


def clean(tensor_kind: TensorKind, symbol: str) -> tuple[PointGroup, FloatArray]:
    group = PointGroup.from_symbol(symbol)
    return group, to_matrix(tensor_kind, obeying(tensor_kind, group))


def obeys(tensor_kind: TensorKind, full: FloatArray, group: PointGroup) -> bool:
    generators = group.rotations_cart[list(group.generators)]
    moved = (turned(full, operation, tensor_kind.axial) for operation in generators)
    return all(np.allclose(image, full, atol=1e-9 * np.abs(full).max()) for image in moved)


def in_order(values: FloatArray, order: Order) -> FloatArray:
    """An array whose axes of length six are written in an order, in the standard one."""
    places = [order.index(pair) for pair in STANDARD_ORDER]
    for axis, length in enumerate(values.shape):
        values = np.take(values, places, axis=axis) if length == 6 else values
    return values


def scaled(values: FloatArray, words: str) -> FloatArray:
    """An array that was written with entries multiplied, with these words, as it should be."""
    size = {"doubled": 2.0, "halved": 0.5, "times sqrt(2)": 2**0.5, "divided by sqrt(2)": 0.5**0.5}
    (factor,) = (number for name, number in size.items() if name in words)
    pair = np.array([1.0] * 3 + [factor] * 3)
    shear = [pair if length == 6 else np.ones(length) for length in values.shape]
    if words.startswith("rows"):
        shear[-1] = np.ones(values.shape[-1])
    if words.startswith("columns") and len(shear) > 1:
        shear[0] = np.ones(values.shape[0])
    return values / (np.multiply.outer(*shear) if len(shear) == 2 else shear[0])


def as_read(tensor_kind: TensorKind, values: FloatArray, one: Ambiguity, sign: float) -> FloatArray:
    """The full tensor, in the axes of the group, of the other reading."""
    values = values.T if one.sort == "layout" else values
    values = scaled(values, one.factor) if one.sort == "factor" else values
    values = in_order(values, one.order) if one.sort == "order" else values
    full = turned(to_full(tensor_kind, values), one.rotation.T)
    return full * (sign if one.sort == "hand" else 1.0)


@pytest.mark.parametrize("symbol", TELLING)
@pytest.mark.parametrize("tensor_kind", [D, C, EPS, P, GYRATION], ids=lambda k: k.name)
def test_whatever_is_listed_gives_another_tensor_that_obeys(symbol: str, tensor_kind: TensorKind) -> None:
    group, values = clean(tensor_kind, symbol)
    for one in audited(tensor_kind, values, group).cannot_tell:
        if one.sort == "entry":
            continue
        other = as_read(tensor_kind, values, one, sign=-1.0)
        assert obeys(tensor_kind, other, group), one.reading
        assert not np.allclose(other, to_full(tensor_kind, values), atol=1e-3), one.reading


def turns_of_cube_and_prisms() -> list[FloatArray]:
    cube = list(PointGroup.from_symbol("432").rotations_cart)
    z, x = np.array([0.0, 0.0, 1.0]), np.array([1.0, 0.0, 0.0])
    upright = [rotation_about(z, np.pi * k / 12) for k in range(24)]
    return [*cube, *upright, *(turn @ rotation_about(x, np.pi) for turn in upright)]


@pytest.mark.parametrize("symbol", [symbol for symbol in TELLING if symbol not in ("2", "2/m")])
@pytest.mark.parametrize("tensor_kind", [D, C, EPS, GYRATION], ids=lambda k: k.name)
def test_no_turn_of_axes_that_obeys_is_left_out(symbol: str, tensor_kind: TensorKind) -> None:
    group, values = clean(tensor_kind, symbol)
    full = to_full(tensor_kind, values)
    listed = [one for one in audited(tensor_kind, values, group).cannot_tell if one.sort in ("axes", "hand")]
    signs = [1.0, -1.0] if any(one.sort == "hand" for one in listed) else [1.0]
    known = [turned(full, one.rotation.T) for one in listed if one.sort == "axes"]
    if any(one.any_angle for one in listed):
        z = np.array([0.0, 0.0, 1.0])
        spun = [rotation_about(z, np.pi * k / 12) for k in range(24)]
        known = [turned(image, turn) for image in [full, *known] for turn in spun]
    known = [sign * image for image in [full, *known] for sign in signs]
    for turn in turns_of_cube_and_prisms():
        other = turned(full, turn)
        if obeys(tensor_kind, other, group):
            assert any(np.allclose(other, image, atol=1e-6) for image in known)


@pytest.mark.parametrize("symbol", ["2", "m", "2/m"])
def test_any_principal_axis_may_lie_along_the_unique_axis_of_a_monoclinic_crystal(symbol: str) -> None:
    group, values = clean(EPS, symbol)
    assert abs(values[0, 2]) > 0.1
    listed = [one for one in audited(EPS, values, group).cannot_tell if "principal" in one.reading]
    along = sorted(float(turned(values, one.rotation.T)[1, 1]) for one in listed)
    assert along == pytest.approx(sorted(np.linalg.eigvalsh(values[np.ix_([0, 2], [0, 2])])))
    uniaxial, isotropic = clean(EPS, "4"), clean(EPS, "23")
    for other, tensor in (uniaxial, isotropic):
        assert not any("principal" in one.reading for one in audited(EPS, tensor, other).cannot_tell)


@pytest.mark.parametrize("symbol", sorted(SCHOENFLIES))
@pytest.mark.parametrize("tensor_kind", [D, C], ids=lambda k: k.name)
def test_exactly_the_orders_that_give_another_obeying_tensor_are_listed(
    symbol: str, tensor_kind: TensorKind
) -> None:
    group, values = clean(tensor_kind, symbol)
    result = audited(tensor_kind, values, group)
    if not result.constraints or not result.independent:
        return
    listed = {one.order for one in result.cannot_tell if one.sort == "order"}
    expected = set()
    for order in SHEAR_ORDERS[1:]:
        other = in_order(values, order)
        if not np.allclose(other, values) and obeys(tensor_kind, to_full(tensor_kind, other), group):
            expected.add(order)
    assert listed == expected


@pytest.mark.parametrize("symbol", TELLING)
@pytest.mark.parametrize("tensor_kind", [E, C], ids=lambda k: k.name)
def test_exactly_the_entries_that_may_change_alone_are_listed(symbol: str, tensor_kind: TensorKind) -> None:
    group, values = clean(tensor_kind, symbol)
    expected = set()
    for row, column in product(*map(range, values.shape)):
        other = values.copy()
        other[row, column] += 1.0
        if values.shape == (6, 6) and row != column:
            other[column, row] += 1.0
        if obeys(tensor_kind, to_full(tensor_kind, other), group) and (values.shape[0] == 3 or row <= column):
            expected.add(f"{row + 1}{column + 1}")
    result = audited(tensor_kind, values, group)
    listed = {name for one in result.cannot_tell for name in one.entries}
    assert listed == (expected if result.independent else set())


@pytest.mark.parametrize("symbol", ["m-3m", "-43m", "432", "23"])
def test_a_cubic_stiffness_is_the_same_in_every_order_and_axes(symbol: str) -> None:
    group, values = clean(C, symbol)
    sorts = {one.sort for one in audited(C, values, group).cannot_tell}
    assert sorts == {"factor"}
    unknown = audited(C, values, group, order=None, axes="unknown")
    assert unknown.verdict == "consistent"


@pytest.mark.parametrize(
    ("tensor_kind", "symbol", "stated", "verdict"),
    [
        (C, "mmm", {"order": None}, "cannot-tell"),
        (C, "mmm", {"axes": "unknown"}, "cannot-tell"),
        (C, "mmm", {}, "consistent"),
        (C, "3m", {"order": None}, "consistent"),
        (C, "3m", {"axes": "unknown"}, "cannot-tell"),
        (C, "6/mmm", {"order": None, "axes": "unknown"}, "consistent"),
        (D, "32", {"axes": "unknown"}, "cannot-tell"),
        (D, "32", {"order": None}, "consistent"),
        (EPS, "mm2", {"axes": "unknown"}, "cannot-tell"),
        (EPS, "4mm", {"axes": "unknown"}, "consistent"),
    ],
)
def test_what_is_not_stated_is_open_where_several_tensors_obey(
    tensor_kind: TensorKind, symbol: str, stated: dict[str, object], verdict: str
) -> None:
    group, values = clean(tensor_kind, symbol)
    result = audited(tensor_kind, values, group, **stated)
    assert result.verdict == verdict, result.message


def test_the_first_line_says_what_symmetry_cannot_tell() -> None:
    group, values = clean(C, "mmm")
    first = audited(C, values, group).message.splitlines()[0]
    assert first.startswith("consistent: elastic-stiffness in class mmm obeys as stated (residual 0 %); ")
    assert "symmetry cannot tell this from another order of columns (11 22 33 12 23 13)" in first
    assert "other axes (turned by 90 degrees about" in first
    quartz = audited(D, QUARTZ_D, PointGroup.from_symbol("32")).message.splitlines()[0]
    assert quartz.endswith("from other axes (turned by 180 degrees about [001]) or the other hand")


def test_a_reading_other_than_stated_says_it_too() -> None:
    group = PointGroup.from_symbol("32")
    result = audited(D, QUARTZ_D[:, [0, 1, 2, 5, 3, 4]], group)
    assert result.verdict == "consistent-otherwise"
    assert [one.flips for one in result.cannot_tell] == [("11",), ("11", "14")]
    assert "symmetry cannot tell this from other axes" in result.message.splitlines()[0]


def test_a_tensor_that_does_not_obey_has_no_such_list() -> None:
    wrong = QUARTZ_D.copy()
    wrong[1, 5] *= -1.0
    result = audited(D, wrong, PointGroup.from_symbol("32"))
    assert (result.verdict, result.cannot_tell) == ("violates", ())


def test_a_turn_that_changes_less_than_the_noise_is_not_listed() -> None:
    values = QUARTZ_D.copy()
    values[:, [0, 1, 5]] *= 1e-6
    result = audited(D, values, PointGroup.from_symbol("32"))
    assert [one.sort for one in result.cannot_tell if one.sort in ("axes", "hand")] == ["hand"]


def test_with_known_uncertainties_a_turn_is_listed_where_it_changes_more_than_these() -> None:
    group = PointGroup.from_symbol("32")
    for sigma, flips in ((0.01, ("11",)), (3.0, None)):
        result = audited(D, QUARTZ_D, group, sigma=sigma)
        turns = [one.flips for one in result.cannot_tell if one.sort == "axes"]
        assert turns == ([flips] if flips else [])


@pytest.mark.parametrize("symbol", ["312", "31m", "-4m2", "-62m", "2mm", "112"])
def test_turns_and_components_are_named_in_the_axes_of_the_tensor(symbol: str) -> None:
    group, values = clean(E, symbol)
    assert np.abs(standard_rotation(group) - np.eye(3)).max() > 0.1
    for one in audited(E, values, group).cannot_tell:
        if one.sort == "axes" and not one.mixes:
            other = to_matrix(E, turned(to_full(E, values), one.rotation.T))
            for name in one.flips:
                place = int(name[0]) - 1, int(name[1]) - 1
                assert values[place] == pytest.approx(-other[place])
                assert abs(values[place]) > 0.1


@pytest.mark.parametrize("symbol", ["32", "mm2", "4", "-42m"])
def test_turning_crystal_and_tensor_together_leaves_the_list_as_it_is(symbol: str) -> None:
    group, values = clean(E, symbol)
    rotation = random_rotation(5)
    moved = to_matrix(E, turned(to_full(E, values), rotation))
    before = audited(E, values, group, axes="file").cannot_tell
    after = audited(E, moved, group.rotated(rotation), axes="file").cannot_tell
    sorts = [[one.sort for one in listed if one.sort in ("axes", "hand")] for listed in (before, after)]
    assert sorts[0] == sorts[1]
