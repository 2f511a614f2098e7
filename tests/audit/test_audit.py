"""Verdicts on tensors whose right answer is known."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

import sitesym
from sitesym import PointGroup, kind
from sitesym.audit import Measurement, audit
from sitesym.errors import TensorInputError, UsageError
from sitesym.groups.symbols import SCHOENFLIES
from sitesym.tensors import to_matrix, turned

from .opendata import obeying, random_rotation

PIEZO = kind("piezoelectric-stress")
STIFFNESS = kind("elastic-stiffness")
PERMITTIVITY = kind("permittivity")
QUARTZ_E = np.array([[0.171, -0.171, 0, 0.0406, 0, 0], [0, 0, 0, 0, -0.0406, -0.171], [0, 0, 0, 0, 0, 0.0]])


def about_z(degrees: float) -> np.ndarray:
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    return np.array([[c, s, 0.0], [-s, c, 0.0], [0.0, 0.0, 1.0]])


def in_turned_axes(values: np.ndarray, degrees: float) -> np.ndarray:
    from sitesym.tensors import to_full

    return to_matrix(PIEZO, turned(to_full(PIEZO, values), about_z(degrees)))


@pytest.mark.parametrize("symbol", sorted(SCHOENFLIES))
@pytest.mark.parametrize("name", ["piezoelectric-stress", "elastic-compliance", "permittivity"])
def test_a_tensor_built_from_the_allowed_form_obeys(symbol: str, name: str) -> None:
    group, tensor_kind = PointGroup.from_symbol(symbol), kind(name)
    values = to_matrix(tensor_kind, obeying(tensor_kind, group))
    result = audit(Measurement("m", tensor_kind, values, axes="lattice"), group, noise=1e-6)
    expected = "no-constraint" if not result.constraints else "consistent"
    assert result.verdict == expected
    assert not result.forbidden
    assert not result.relations


@pytest.mark.parametrize("name", [
    "pyroelectric", "gyration", "electro-optic", "second-harmonic", "elasto-optic", "third-order-elastic",
    "hall", "seebeck", "born-charge", "flexoelectric", "second-harmonic-kleinman", "electric-field-gradient",
])  # fmt: skip
def test_every_kind_is_judged_in_full_and_contracted_form(name: str) -> None:
    group, tensor_kind = PointGroup.from_symbol("2"), kind(name)
    full = obeying(tensor_kind, group)
    for values in (full, to_matrix(tensor_kind, full)):
        good = audit(Measurement("m", tensor_kind, values, axes="lattice"), group, noise=1e-6)
        assert good.verdict == "consistent"
        assert good.index_symmetry.holds
    off = turned(full, random_rotation(3), tensor_kind.axial)
    bad = audit(Measurement("m", tensor_kind, off, axes="lattice"), group, noise=1e-6, explain=False)
    assert bad.verdict == "violates"


def test_quartz_turned_by_60_degrees_obeys_and_the_open_signs_are_listed() -> None:
    result = audit(
        Measurement("q", PIEZO, in_turned_axes(QUARTZ_E, 60), axes="ieee"), PointGroup.from_symbol("321")
    )
    assert result.verdict == "consistent"
    assert ("11",) in {choice.flips for choice in result.equivalent_axes}


def test_quartz_turned_by_30_degrees_fails_and_the_turn_is_found() -> None:
    result = audit(
        Measurement("q", PIEZO, in_turned_axes(QUARTZ_E, 30), axes="ieee"), PointGroup.from_symbol("321")
    )
    assert result.verdict == "consistent-otherwise"
    assert result.best is not None
    assert result.best.axes == "ieee, turned by 30 degrees about [001]"
    assert result.message.splitlines()[0].startswith("consistent-otherwise")
    assert len(result.message.splitlines()) == 2


def test_an_arbitrary_turn_is_found_with_its_angle() -> None:
    group = PointGroup.from_symbol("321")
    values = in_turned_axes(QUARTZ_E, 17.0)
    result = audit(Measurement("q", PIEZO, values, axes="ieee"), group, noise=1e-4)
    assert result.verdict == "consistent-otherwise"
    assert result.best is not None
    assert result.best.turn is not None
    # 17 and 60 - 17 degrees differ by a turn of the normaliser.
    assert min(abs(result.best.turn.angle_degrees - angle) for angle in (17.0, 43.0)) < 0.1
    assert abs(result.best.turn.axis[2]) == pytest.approx(1.0, abs=1e-3)


def test_class_1_and_inversion_with_even_rank_constrain_nothing() -> None:
    random = np.random.default_rng(0)
    piezo = Measurement("p", PIEZO, random.normal(size=(3, 6)), axes="file")
    assert audit(piezo, PointGroup.from_symbol("1")).verdict == "no-constraint"
    stiffness = random.normal(size=(6, 6))
    symmetric = Measurement("c", STIFFNESS, stiffness + stiffness.T, axes="file")
    assert audit(symmetric, PointGroup.from_symbol("-1")).verdict == "no-constraint"


def test_broken_index_symmetry_is_found_even_where_the_class_forbids_nothing() -> None:
    values = np.diag([4.0, 5.0, 6.0])
    values[0, 1] = 1.0
    result = audit(Measurement("e", PERMITTIVITY, values, axes="file"), PointGroup.from_symbol("-1"))
    assert (result.verdict, result.cause) == ("violates", "index-symmetry")
    (pair,) = result.index_symmetry.broken
    assert (pair.first, pair.second) == ("12", "21")
    assert result.index_symmetry.largest == pytest.approx(1.0)


def test_broken_index_symmetry_is_not_explained_by_other_axes() -> None:
    values = np.diag([250.0, 200.0, 180.0, 60.0, 50.0, 40.0])
    values[:3, :3] += [[0, 90, 80], [99, 0, 70], [80, 70, 0]]
    measured = Measurement("c", STIFFNESS, values, axes="file", rounding=1.0)
    result = audit(measured, PointGroup.from_symbol("mmm"))
    assert (result.verdict, result.cause) == ("violates", "index-symmetry")
    assert "12 and 21 differ" in result.message
    assert result.stated is not None
    assert result.stated.residual.within


def test_a_field_index_written_last_is_recognised_by_index_symmetry() -> None:
    group = PointGroup.from_symbol("32")
    given = np.moveaxis(obeying(PIEZO, group), 0, 2)
    result = audit(Measurement("e", PIEZO, given, axes="lattice"), group)
    assert not result.index_symmetry.holds
    assert result.verdict == "consistent-otherwise"
    assert result.best is not None
    assert result.best.layout == "full-last-first"


def test_a_centrosymmetric_crystal_must_have_no_piezoelectricity() -> None:
    group = PointGroup.from_symbol("m-3m")
    nothing = audit(Measurement("e", PIEZO, np.zeros((3, 6)), axes="file"), group)
    assert nothing.verdict == "consistent"
    something = audit(Measurement("e", PIEZO, QUARTZ_E, axes="file"), group)
    assert (something.verdict, something.cause) == ("violates", "crystal")


def test_a_tensor_that_is_zero_within_its_digits_cannot_be_judged() -> None:
    group = PointGroup.from_symbol("-43m")
    zero = audit(Measurement("e", PIEZO, np.zeros((3, 6)), axes="file"), group)
    tiny = audit(Measurement("e", PIEZO, 0.004 * np.eye(3, 6), axes="file", sigma=0.01), group)
    assert zero.verdict == tiny.verdict == "cannot-tell"


def test_rounding_of_printed_digits_is_no_violation() -> None:
    values = np.zeros((6, 6))
    values[:3, :3] = [[390, 145, 106], [145, 390, 106], [106, 106, 398]]
    values[3:, 3:] = np.diag([105, 105, 123])  # (390 - 145) / 2 = 122.5
    group = PointGroup.from_symbol("6mm")
    stated = Measurement("c", STIFFNESS, values, axes="ieee", rounding=1.0)
    assert audit(stated, group, noise=0.0).verdict == "consistent"
    exact = Measurement("c", STIFFNESS, values, axes="ieee")
    assert audit(exact, group, noise=0.0).verdict == "violates"


def test_known_uncertainties_give_chi_squared_with_its_degrees_of_freedom() -> None:
    group = PointGroup.from_symbol("m-3m")
    random = np.random.default_rng(4)
    exact = np.zeros((6, 6))
    exact[:3, :3] = 60.0
    np.fill_diagonal(exact, [160.0] * 3 + [80.0] * 3)
    p_values = []
    for _ in range(200):
        noise = np.triu(random.normal(size=(6, 6)) * 2.0)
        values = exact + noise + np.triu(noise, 1).T
        result = audit(Measurement("c", STIFFNESS, values, axes="lattice", sigma=2.0), group, explain=False)
        assert result.stated is not None
        assert result.stated.residual.dof == 18
        p_values.append(result.stated.residual.p_value)
    # p values of true noise are evenly spread.
    assert 0.4 < np.mean(p_values) < 0.6
    assert np.mean(np.array(p_values) < 0.1) < 0.2


def test_forbidden_components_and_broken_relations_stand_with_value_and_expected() -> None:
    values = np.zeros((3, 6))
    values[0, 4], values[1, 3], values[2] = 0.4, 0.3, [-0.6, -0.6, 1.1, 0.2, 0.0, 0.0]
    result = audit(Measurement("e", PIEZO, values, axes="ieee"), PointGroup.from_symbol("6mm"), explain=False)
    assert result.cause == "not-searched"
    assert "explanations were not searched for" in result.message
    (forbidden,) = result.forbidden
    assert (forbidden.component, forbidden.value, forbidden.expected) == ("34", 0.2, 0.0)
    (relation,) = result.relations
    assert relation.relation == "24 = 15"
    assert (relation.value, relation.expected) == (0.3, pytest.approx(0.4))


def test_a_lower_symmetry_of_the_tensor_is_named() -> None:
    group = PointGroup.from_symbol("4/mmm")
    values = to_matrix(STIFFNESS, obeying(STIFFNESS, PointGroup.from_symbol("mmm")))
    result = audit(Measurement("c", STIFFNESS, values, axes="lattice"), group)
    assert result.verdict == "violates"
    assert result.tensor_symmetry is not None
    assert (result.tensor_symmetry.symbol, result.tensor_symmetry.relation) == ("mmm", "lower")
    assert "orthorhombic" in result.message


def test_without_a_stated_order_a_telling_class_gives_the_order_and_another_cannot() -> None:
    columns = [0, 1, 2, 5, 3, 4]  # 11 22 33 12 23 13
    trigonal = PointGroup.from_symbol("3m")
    telling = to_matrix(STIFFNESS, obeying(STIFFNESS, trigonal))[np.ix_(columns, columns)]
    found = audit(Measurement("c", STIFFNESS, telling, order=None, axes="lattice"), trigonal)
    assert found.verdict == "consistent"
    assert found.best is not None
    assert found.best.order == ("11", "22", "33", "12", "23", "13")
    orthorhombic = PointGroup.from_symbol("mmm")
    mute = to_matrix(STIFFNESS, obeying(STIFFNESS, orthorhombic))
    unknown = audit(Measurement("c", STIFFNESS, mute, order=None, axes="lattice"), orthorhombic)
    assert unknown.verdict == "cannot-tell"
    assert unknown.rivals


def test_with_known_uncertainties_the_class_of_the_data_agrees_with_them() -> None:
    # Nearly hexagonal about x: by ten times the uncertainty, though within what the whole tensor leaves open.
    values = np.diag([250.0, 200.0, 180.0, 60.0, 50.0, 40.0])
    values[:3, :3] += [[0, 90, 80], [90, 0, 70], [80, 70, 0]]
    measured = Measurement("c", STIFFNESS, values, axes="file", sigma=2.0)
    result = audit(measured, PointGroup.from_symbol("4/mmm"))
    assert (result.verdict, result.cause) == ("violates", "crystal")
    assert result.tensor_symmetry is not None
    assert (result.tensor_symmetry.symbol, result.tensor_symmetry.relation) == ("mmm", "lower")
    assert "orthorhombic (mmm, axes as stated)" in result.message


@pytest.mark.parametrize(
    ("values", "text"),
    [(np.zeros((4, 6)), "shape"), (np.full((3, 6), np.nan), "finite")],
)
def test_an_array_that_cannot_be_read_is_refused(values: np.ndarray, text: str) -> None:
    with pytest.raises(TensorInputError, match=text):
        Measurement("m", PIEZO, values)


def test_a_noise_that_is_no_fraction_is_refused() -> None:
    with pytest.raises(UsageError, match="noise"):
        audit(Measurement("m", PIEZO, QUARTZ_E, axes="ieee"), PointGroup.from_symbol("32"), noise=5.0)


@pytest.mark.parametrize(
    "wrong",
    [
        {"axes": [[1, 0, 0], [0.5, 1, 0], [0, 0, 1]]},
        {"axes": [[1, 0, 0], [0, 1, 0], [0, 0, -1]]},
        {"axes": [[1, 0], [0, 1]]},
        {"sigma": "much"},
        {"tensor": [[1, 2], [3]]},
        {"tensor": [["a"] * 6] * 3},
        {"tensor": [[1j] * 6] * 3},
    ],
)
def test_a_call_refuses_axes_and_numbers_that_a_record_would_refuse(wrong: dict[str, Any]) -> None:
    given: dict[str, Any] = {"tensor": np.ones((3, 6)), "order": "11 22 33 23 13 12", **wrong}
    with pytest.raises(TensorInputError):
        sitesym.audit(given.pop("tensor"), "32", "piezoelectric-strain", **given)


@pytest.mark.parametrize("symbol", ["4/mmm", "-3m", "3m"])
def test_a_turn_about_the_main_axis_is_no_other_crystal(symbol: str) -> None:
    """A stiffness of class 4/m or -3 is one of class 4/mmm or -3m in axes turned about z."""
    from sitesym.tensors import to_full

    elastic = kind("elastic-stiffness")
    group = PointGroup.from_symbol(symbol)
    angle = np.radians(17.0)
    turn = np.array([[np.cos(angle), -np.sin(angle), 0], [np.sin(angle), np.cos(angle), 0], [0, 0, 1]])
    rows = [[270, 175, 147, 9, 0, 0], [175, 270, 147, -9, 0, 0], [147, 147, 480, 0, 0, 0]]
    rows += [[9, -9, 0, 124, 0, 0], [0, 0, 0, 0, 124, 9], [0, 0, 0, 0, 9, 47.5]]
    if symbol == "4/mmm":
        rows = [[270, 175, 147, 0, 0, 0], [175, 270, 147, 0, 0, 0], [147, 147, 480, 0, 0, 0]]
        rows += [[0, 0, 0, 124, 0, 0], [0, 0, 0, 0, 124, 0], [0, 0, 0, 0, 0, 193]]
    values = to_matrix(elastic, turned(to_full(elastic, np.array(rows)), turn))
    found = audit(Measurement("a", elastic, values, axes="ieee"), group)
    assert (found.verdict, found.cause) == ("consistent-otherwise", "reading")
