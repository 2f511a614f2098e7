"""The nearest allowed tensor: closest of all allowed ones, weighted as stated, nothing changed in silence."""

from __future__ import annotations

import numpy as np
import pytest

from sitesym.arrays import FloatArray
from sitesym.audit.projection import FROM_SCATTER, FROM_SIGMAS, nearest_allowed
from sitesym.errors import TensorInputError
from sitesym.groups import PointGroup, standard_rotation
from sitesym.tensors import allowed_form, kind, to_full, to_matrix, turned

STIFFNESS = kind("elastic-stiffness")


def standard(symbol: str) -> PointGroup:
    group = PointGroup.from_symbol(symbol)
    return group.rotated(standard_rotation(group))


def random_array(name: str, seed: int) -> FloatArray:
    """A contracted array that obeys index symmetry and no group."""
    tensor_kind, rng = kind(name), np.random.default_rng(seed)
    form = allowed_form(tensor_kind, PointGroup.from_symbol("1"))
    return form.matrix({key: rng.normal() for key in form.independent})


@pytest.mark.parametrize(
    ("name", "symbol"),
    [
        ("elastic-stiffness", "m-3m"),
        ("elastic-compliance", "-3"),
        ("piezoelectric-strain", "32"),
        ("piezoelectric-stress", "4mm"),
        ("permittivity", "2/m"),
        ("electro-optic", "3m"),
        ("elasto-optic", "4/m"),
        ("second-harmonic-kleinman", "-6m2"),
    ],
)
def test_without_sigmas_it_is_the_mean_of_the_tensor_over_the_group(name: str, symbol: str) -> None:
    tensor_kind, group = kind(name), standard(symbol)
    matrix = random_array(name, 1)
    images = [turned(to_full(tensor_kind, matrix), rotation) for rotation in group.rotations_cart]
    projection = nearest_allowed(tensor_kind, matrix, group)
    assert to_full(tensor_kind, projection.after) == pytest.approx(np.mean(images, axis=0), abs=1e-9)
    assert projection.before.tolist() == matrix.tolist()
    assert projection.difference == pytest.approx(matrix - projection.after)


def test_the_same_tensor_in_turned_axes_has_the_turned_nearest_one() -> None:
    group, rng = standard("32"), np.random.default_rng(3)
    turn, _ = np.linalg.qr(rng.normal(size=(3, 3)))
    turn *= np.sign(np.linalg.det(turn))
    tensor_kind, matrix = kind("piezoelectric-strain"), random_array("piezoelectric-strain", 2)
    moved = to_matrix(tensor_kind, turned(to_full(tensor_kind, matrix), turn))
    here = nearest_allowed(tensor_kind, matrix, group)
    there = nearest_allowed(tensor_kind, moved, group.rotated(turn))
    expected = turned(to_full(tensor_kind, here.after), turn)
    assert to_full(tensor_kind, there.after) == pytest.approx(expected, abs=1e-9)
    assert there.relative_change == pytest.approx(here.relative_change)


def test_an_allowed_tensor_is_its_own_nearest_one() -> None:
    group = standard("-43m")
    matrix = allowed_form(STIFFNESS, group).matrix({"11": 118.77, "12": 53.72, "44": 59.44})
    projection = nearest_allowed(STIFFNESS, matrix, group)
    assert projection.after == pytest.approx(matrix)
    assert projection.relative_change == pytest.approx(0.0, abs=1e-12)
    assert {v.name: round(v.value, 9) for v in projection.independent} == {
        "11": 118.77,
        "12": 53.72,
        "44": 59.44,
    }


def test_sigmas_weight_the_mean_and_give_the_uncertainty() -> None:
    # Permittivity of a cubic crystal from three entries: the weighted mean and its textbook uncertainty.
    values, errors = np.array([4.0, 5.0, 6.0]), np.array([0.1, 0.2, 0.4])
    sigma = np.full((3, 3), 0.3)
    np.fill_diagonal(sigma, errors)
    projection = nearest_allowed(kind("permittivity"), np.diag(values), standard("m-3m"), sigma)
    weights = 1.0 / errors**2
    (fitted,) = projection.independent
    assert fitted.value == pytest.approx((weights * values).sum() / weights.sum())
    assert fitted.uncertainty == pytest.approx(weights.sum() ** -0.5)
    assert projection.chi2 == pytest.approx((((values - fitted.value) / errors) ** 2).sum())
    assert (projection.dof, projection.uncertainty_source) == (5, FROM_SIGMAS)


def test_without_sigmas_the_scatter_gives_the_uncertainty() -> None:
    projection = nearest_allowed(kind("permittivity"), np.diag([4.0, 5.0, 6.0]), standard("m-3m"))
    (fitted,) = projection.independent
    # Six components of the orthonormal metric less one; sum of squares 2; the design has squared length 3.
    assert fitted.uncertainty == pytest.approx((2.0 / 5.0 / 3.0) ** 0.5)
    assert projection.uncertainty_source == FROM_SCATTER


def test_where_nothing_is_constrained_nothing_changes_and_no_scatter_tells_an_uncertainty() -> None:
    matrix = random_array("piezoelectric-stress", 4)
    projection = nearest_allowed(kind("piezoelectric-stress"), matrix, standard("1"))
    assert projection.difference == pytest.approx(np.zeros((3, 6)), abs=1e-12)
    assert {value.uncertainty for value in projection.independent} == {None}


def test_where_everything_must_vanish_the_nearest_tensor_is_zero() -> None:
    matrix = random_array("piezoelectric-stress", 5)
    projection = nearest_allowed(kind("piezoelectric-stress"), matrix, standard("m-3m"))
    assert not projection.after.any()
    assert projection.independent == ()
    assert projection.relative_change == pytest.approx(1.0)


def test_an_exactly_known_entry_binds_without_breaking_the_fit() -> None:
    sigma = np.full((3, 3), 0.1)
    sigma[0, 0] = 0.0
    projection = nearest_allowed(kind("permittivity"), np.diag([4.0, 5.0, 6.0]), standard("m-3m"), sigma)
    assert projection.independent[0].value == pytest.approx(4.0, abs=1e-6)


def test_both_triangles_of_a_stiffness_count_as_one_measurement() -> None:
    matrix = allowed_form(STIFFNESS, standard("m-3m")).matrix({"11": 3.0, "12": 1.0, "44": 1.0})
    matrix[0, 1] += 0.2
    projection = nearest_allowed(STIFFNESS, matrix, standard("m-3m"), np.full((6, 6), 0.1))
    # c12 is the mean of three numbers, one of them itself the mean 1.1 of two entries.
    assert {v.name: v.value for v in projection.independent}["12"] == pytest.approx(1.0 + 0.1 / 3)
    assert projection.difference[0, 1] != projection.difference[1, 0]


def test_another_shape_is_refused() -> None:
    with pytest.raises(TensorInputError, match="shape"):
        nearest_allowed(STIFFNESS, np.zeros((3, 6)), standard("m-3m"))
