"""Coordinates of contracted arrays: their metric and how rotations act."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.spatial.transform import Rotation

from sitesym import TensorKind, TensorSpace, all_kinds
from sitesym.arrays import FloatArray
from sitesym.audit.arrayspace import array_space
from sitesym.tensors import to_matrix, turned

KINDS = [kind for kind in all_kinds() if kind.rank <= 6]


def random_tensor(kind: TensorKind) -> FloatArray:
    basis = TensorSpace.of(kind).basis
    return np.tensordot(np.random.default_rng(3).normal(size=len(basis)), basis, 1)


@pytest.mark.parametrize("kind", KINDS, ids=lambda k: k.name)
def test_the_length_of_the_coordinates_is_that_of_the_full_tensor(kind: TensorKind) -> None:
    full = random_tensor(kind)
    coordinates = array_space(kind).coordinates(to_matrix(kind, full))
    assert np.linalg.norm(coordinates) == pytest.approx(np.linalg.norm(full))


@pytest.mark.parametrize("kind", KINDS, ids=lambda k: k.name)
def test_coordinates_turn_as_the_full_tensor_does(kind: TensorKind) -> None:
    space, full = array_space(kind), random_tensor(kind)
    rotation = Rotation.random(random_state=5).as_matrix()
    moved = space.rotated(rotation[None], space.coordinates(to_matrix(kind, full))[:, None])[0, :, 0]
    assert space.array(moved) == pytest.approx(to_matrix(kind, turned(full, rotation)), abs=1e-9)


@pytest.mark.parametrize("kind", [k for k in KINDS if k.rank < 5], ids=lambda k: k.name)
def test_generators_are_the_derivatives_of_the_rotations(kind: TensorKind) -> None:
    space = array_space(kind)
    coordinates = space.coordinates(to_matrix(kind, random_tensor(kind)))
    small = 1e-6 * np.array([0.3, -0.5, 0.8])
    forward, backward = (Rotation.from_rotvec(s * small).as_matrix()[None] for s in (1.0, -1.0))
    moved = [space.rotated(r, coordinates[:, None])[0, :, 0] for r in (forward, backward)]
    slope = (moved[0] - moved[1]) / 2.0
    expected = np.einsum("k,kij,j->i", small, space.generators, coordinates)
    assert slope == pytest.approx(expected, abs=1e-9)
