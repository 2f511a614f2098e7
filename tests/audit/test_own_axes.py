"""The symmetry of a tensor in axes of its own, and what an audit says where it fails in those of the crystal.

Operations are checked on the full tensor, which no part of the search looks at.
"""

from __future__ import annotations

import numpy as np
import pytest

from sitesym import PointGroup, TensorKind, kind
from sitesym.arrays import FloatArray
from sitesym.audit import Measurement, audit
from sitesym.audit.arrayspace import array_space
from sitesym.audit.frames import standard_groups
from sitesym.audit.own_axes import symmetry_in_own_axes
from sitesym.audit.own_symmetry import _subclasses, expected_order, group_of
from sitesym.groups.symbols import SCHOENFLIES
from sitesym.tensors import to_matrix, turned

from .opendata import obeying, random_rotation

E, C, GYRATION = kind("piezoelectric-stress"), kind("elastic-stiffness"), kind("gyration")


@pytest.mark.parametrize("symbol", sorted(SCHOENFLIES))
@pytest.mark.parametrize("tensor_kind", [E, C, GYRATION], ids=lambda k: k.name)
def test_a_tensor_in_any_axes_shows_its_class_or_more(symbol: str, tensor_kind: TensorKind) -> None:
    group = standard_groups()[symbol]
    full = turned(obeying(tensor_kind, group, seed=3), random_rotation(11), tensor_kind.axial)
    if not full.any():
        return
    coordinates = array_space(tensor_kind).coordinates(to_matrix(tensor_kind, full))
    own = symmetry_in_own_axes(tensor_kind, coordinates, 1e-7 * float(np.linalg.norm(coordinates)))
    # More than the class where its free angle can be turned away: a stiffness of 4/m is one of 4/mmm.
    assert len(own.kept.elements) >= expected_order(tensor_kind, group)
    in_own_axes = turned(full, own.rotation, tensor_kind.axial)
    for operation in group_of(own.kept).rotations_cart:
        image = turned(in_own_axes, operation, tensor_kind.axial)
        assert image == pytest.approx(in_own_axes, abs=1e-5)


@pytest.mark.parametrize(
    ("tensor_kind", "shown", "crystal", "relation"),
    [(C, "mmm", "4/mmm", "lower"), (C, "-3m", "mmm", "other"), (E, "32", "mm2", "other")],
)
@pytest.mark.parametrize("seed", [0, 2, 5])
def test_the_data_look_like_another_class_also_in_axes_of_their_own(
    tensor_kind: TensorKind, shown: str, crystal: str, relation: str, seed: int
) -> None:
    full = turned(obeying(tensor_kind, PointGroup.from_symbol(shown)), random_rotation(seed))
    values = to_matrix(tensor_kind, full)
    result = audit(Measurement("m", tensor_kind, values, axes="lattice"), PointGroup.from_symbol(crystal))
    assert (result.verdict, result.cause) == ("violates", "crystal")
    found = result.tensor_symmetry
    assert found is not None
    assert (found.symbol, found.relation, found.axes) == (shown, relation, "own")
    assert f"({shown}, axes turned freely)" in result.message
    seen = turned(full, found.rotation)
    for operation in standard_groups()[shown].rotations_cart:
        assert turned(seen, operation) == pytest.approx(seen, abs=1e-2)


def test_in_the_axes_of_the_crystal_the_symmetry_is_said_to_be_sought_there() -> None:
    values = to_matrix(C, obeying(C, PointGroup.from_symbol("4/mmm")))
    result = audit(Measurement("m", C, values, axes="lattice"), PointGroup.from_symbol("mmm"))
    assert result.tensor_symmetry is not None
    assert (result.tensor_symmetry.symbol, result.tensor_symmetry.axes) == ("4/mmm", "ieee")


def noise_alone(seed: int) -> FloatArray:
    values: FloatArray = np.random.default_rng(seed).normal(size=(3, 6))
    return values


@pytest.mark.parametrize("seed", range(10))
def test_numbers_without_any_symmetry_look_like_no_class(seed: int) -> None:
    result = audit(Measurement("m", E, noise_alone(seed), axes="lattice"), PointGroup.from_symbol("4mm"))
    assert (result.verdict, result.cause) == ("violates", "unexplained")
    assert result.tensor_symmetry is not None
    assert result.tensor_symmetry.symbol == "1"


def test_the_subclasses_of_a_class() -> None:
    # All classes but the seven hexagonal ones; all but the seven tetragonal and the five cubic ones.
    assert len(_subclasses("m-3m")) == 32 - 7
    assert len(_subclasses("6/mmm")) == 32 - 7 - 5
    assert _subclasses("4/mmm") >= {"mmm", "-42m", "4mm", "422", "4/m", "mm2"}
    assert not _subclasses("6mm") & {"4", "222", "-6", "32"}
    assert _subclasses("mm2") == {"1", "2", "m", "mm2"}
