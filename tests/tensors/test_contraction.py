"""Contracted notation: names, order, factors, and the exact way there and back."""

import numpy as np
import pytest

from sitesym.errors import TensorInputError
from sitesym.groups import PointGroup
from sitesym.groups.symbols import SCHOENFLIES
from sitesym.tensors import (
    TensorKind,
    all_kinds,
    allowed_form,
    contraction,
    independent_count,
    kind,
    kind_from_jahn,
    to_full,
    to_matrix,
)

PIEZOELECTRIC = [
    symbol
    for symbol in SCHOENFLIES
    if independent_count(kind("piezoelectric-strain"), PointGroup.from_symbol(symbol))
]


def random_tensor(tensor_kind: TensorKind, seed: int = 0) -> np.ndarray:
    """A full tensor that obeys the written index symmetry, of numbers that doubles hold exactly."""
    component, sign = tensor_kind.written.full_indices
    values = np.random.default_rng(seed).integers(-512, 512, tensor_kind.written.dimension) / 64.0
    return (values[component] * sign).reshape((3,) * tensor_kind.rank)


@pytest.mark.parametrize("tensor_kind", all_kinds(), ids=lambda k: k.name)
def test_from_tensor_to_matrix_and_back_is_exact(tensor_kind: TensorKind) -> None:
    full = random_tensor(tensor_kind)
    matrix = to_matrix(tensor_kind, full)
    assert matrix.shape == contraction(tensor_kind).shape
    assert np.array_equal(to_full(tensor_kind, matrix), full)
    assert np.array_equal(to_matrix(tensor_kind, to_full(tensor_kind, matrix)), matrix)


@pytest.mark.parametrize(
    ("name", "element", "component", "factor"),
    [  # J. F. Nye, Physical Properties of Crystals (1957), chapters VII and VIII; from memory
        ("piezoelectric-strain", (1, 4), (1, 2, 3), 2),
        ("piezoelectric-strain", (3, 3), (3, 3, 3), 1),
        ("piezoelectric-stress", (1, 4), (1, 2, 3), 1),
        ("second-harmonic", (3, 6), (3, 1, 2), 1),
        ("elastic-compliance", (4, 4), (2, 3, 2, 3), 4),
        ("elastic-compliance", (1, 4), (1, 1, 2, 3), 2),
        ("elastic-compliance", (1, 2), (1, 1, 2, 2), 1),
        ("elastic-stiffness", (4, 4), (2, 3, 2, 3), 1),
        ("piezo-optic", (1, 4), (1, 1, 2, 3), 2),
        ("piezo-optic", (4, 1), (2, 3, 1, 1), 1),
        ("elasto-optic", (4, 4), (2, 3, 2, 3), 1),
        ("electro-optic", (4, 1), (2, 3, 1), 1),
        ("third-order-elastic", (4, 5, 6), (2, 3, 1, 3, 1, 2), 1),
        ("permittivity", (1, 3), (1, 3), 1),
    ],
)
def test_matrix_elements_carry_the_factor_of_their_kind(
    name: str, element: tuple[int, ...], component: tuple[int, ...], factor: int
) -> None:
    tensor_kind = kind(name)
    full = random_tensor(tensor_kind, seed=3)
    value = full[tuple(i - 1 for i in component)]
    assert to_matrix(tensor_kind, full)[tuple(i - 1 for i in element)] == factor * value


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"11": 2.3}, "missing: 14"),
        ({"11": 2.3, "14": 0.7, "12": -2.3}, "not independent: 12"),
        ({"d11": 2.3, "d14": 0.7}, "missing: 11, 14; not independent: d11, d14"),
    ],
)
def test_a_form_takes_its_independent_values_and_no_others(values: dict[str, float], words: str) -> None:
    form = allowed_form(kind("piezoelectric-strain"), PointGroup.from_symbol("32"))
    for fill in (form.matrix, form.full):
        with pytest.raises(TensorInputError) as caught:
            fill(values)
        assert caught.value.value == words


@pytest.mark.parametrize("symbol", PIEZOELECTRIC)
def test_strains_and_stresses_give_d_equal_e_s_in_tensors_and_in_matrices(symbol: str) -> None:
    # d_ijk = e_ilm s_lmjk and d_iJ = e_iK s_KJ: true only if all three kinds carry the right factors
    group = PointGroup.from_symbol(symbol)
    rng = np.random.default_rng(1)
    e_form = allowed_form(kind("piezoelectric-stress"), group)
    s_form = allowed_form(kind("elastic-compliance"), group)
    e_values = dict(zip(e_form.independent, rng.standard_normal(len(e_form.independent)), strict=True))
    s_values = dict(zip(s_form.independent, rng.standard_normal(len(s_form.independent)), strict=True))
    d_full = np.einsum("ilm,lmjk->ijk", e_form.full(e_values), s_form.full(s_values))
    d_matrix = e_form.matrix(e_values) @ s_form.matrix(s_values)
    assert to_matrix(kind("piezoelectric-strain"), d_full) == pytest.approx(d_matrix, abs=1e-12)
    d_form = allowed_form(kind("piezoelectric-strain"), group)
    places = dict(
        zip(contraction(d_form.kind).keys, contraction(d_form.kind).multi_indices.tolist(), strict=True)
    )
    read_off = {name: float(d_matrix[tuple(places[name])]) for name in d_form.independent}
    assert d_form.matrix(read_off) == pytest.approx(d_matrix, abs=1e-12)


def test_there_are_twenty_piezoelectric_classes() -> None:
    assert len(PIEZOELECTRIC) == 20


def test_compliance_is_the_inverse_of_stiffness_as_matrices_and_as_tensors() -> None:
    group = PointGroup.from_symbol("32")
    c_form = allowed_form(kind("elastic-stiffness"), group)
    values = dict(zip(c_form.independent, (8.7, 0.7, 1.2, -1.8, 10.7, 5.8), strict=True))
    s_full = to_full(kind("elastic-compliance"), np.linalg.inv(c_form.matrix(values)))
    identity = np.einsum("ijkl,klmn->ijmn", c_form.full(values), s_full)
    one = np.eye(3)
    symmetric = (np.einsum("im,jn->ijmn", one, one) + np.einsum("in,jm->ijmn", one, one)) / 2
    assert identity == pytest.approx(symmetric, abs=1e-12)


def test_components_are_named_in_the_order_11_22_33_23_13_12() -> None:
    assert contraction(kind("elastic-stiffness")).keys[:7] == ("11", "12", "13", "14", "15", "16", "22")
    assert contraction(kind("permittivity")).keys == ("11", "22", "33", "23", "13", "12")
    assert contraction(kind("flexoelectric")).keys[:3] == ("111", "112", "113")
    assert contraction(kind("born-charge")).keys[1] == "12"
    assert contraction(kind("third-harmonic")).shape == (3, 3, 3, 3)


def test_an_array_of_another_shape_is_refused_with_both_shapes() -> None:
    with pytest.raises(TensorInputError) as caught:
        to_full(kind("piezoelectric-strain"), np.zeros((6, 3)))
    assert (caught.value.value, caught.value.rule) == ("shape (6, 3)", "shape (3, 6)")
    with pytest.raises(TensorInputError):
        to_matrix(kind("elastic-stiffness"), np.zeros((6, 6)))


def test_antisymmetric_and_scalar_symbols_go_there_and_back_too() -> None:
    for jahn in ("e{V2}V", "{V2}", "e", "{[V2]2}", "a{V3}"):
        full = random_tensor(kind_from_jahn(jahn), seed=2)
        assert np.array_equal(to_full(kind_from_jahn(jahn), to_matrix(kind_from_jahn(jahn), full)), full), (
            jahn
        )
