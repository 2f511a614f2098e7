"""Tensor spaces: representations, reductions and symmetry-adapted bases for every irrep."""

import numpy as np
import pytest

from sitesym.groups import PointGroup, character_table
from sitesym.groups.symbols import SCHOENFLIES, rotation_about
from sitesym.tensors import TensorSpace, all_kinds, kind, kind_from_jahn, turned

NAMES = (
    "piezoelectric-strain",
    "elastic-stiffness",
    "gyration",
    "electric-field-gradient",
    "hall",
    "seebeck",
)
SPACES = {name: TensorSpace.of(kind(name)) for name in NAMES}


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_multiplicities_times_dimensions_make_up_the_space(symbol: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    dimensions = {irrep.label: irrep.dimension for irrep in table.irreps}
    assert len(dimensions) == len(table.irreps)
    for tensor_kind in all_kinds():
        space = TensorSpace.of(tensor_kind)
        found = space.multiplicities(table)
        assert sum(found[label] * d for label, d in dimensions.items()) == space.dimension, tensor_kind.name


@pytest.mark.parametrize("symbol", SCHOENFLIES)
def test_the_trivial_irrep_occurs_as_often_as_there_are_invariant_tensors(symbol: str) -> None:
    table = character_table(PointGroup.from_symbol(symbol))
    for space in SPACES.values():
        first = next(iter(space.multiplicities(table).values()))
        assert first == space.invariant_count(table.group)


def test_polar_vectors_reduce_as_every_table_says() -> None:
    # common practice: infrared-active irreps
    expected = {
        "32": {"A2": 1, "E": 1},
        "-43m": {"T2": 1},
        "4/mmm": {"A2u": 1, "Eu": 1},
        "mm2": {"A1": 1, "B1": 1, "B2": 1},
    }
    for symbol, irreps in expected.items():
        found = TensorSpace.of(kind_from_jahn("V")).multiplicities(
            character_table(PointGroup.from_symbol(symbol))
        )
        assert {label: n for label, n in found.items() if n} == irreps


@pytest.mark.parametrize("symbol", ["2", "-42m", "32", "-6", "6mm", "23", "-43m", "m-3m"])
def test_representations_multiply_and_have_the_characters_of_the_formula(symbol: str) -> None:
    group = PointGroup.from_symbol(symbol)
    for space in SPACES.values():
        matrices = space.representation(group)
        products = np.einsum("gij,hjk->ghik", matrices, matrices)
        assert np.abs(products - matrices[group.product_table]).max() < 1e-12
        assert np.abs(np.trace(matrices, axis1=1, axis2=2) - space.character(group)).max() < 1e-12


@pytest.mark.parametrize("name", NAMES)
def test_a_basis_is_orthonormal_and_the_representation_acts_on_it(name: str) -> None:
    space, tensor_kind = SPACES[name], kind(name)
    flat = space.basis.reshape(space.dimension, -1)
    assert np.abs(flat @ flat.T - np.eye(space.dimension)).max() < 1e-12
    group = PointGroup.from_symbol("-43m")
    matrices = space.representation(group)
    for g in group.generators:
        for column in range(0, space.dimension, 4):
            image = turned(space.basis[column], group.rotations_cart[g], axial=tensor_kind.axial)
            expected = np.tensordot(matrices[g][:, column], space.basis, axes=(0, 0))
            assert np.abs(image - expected).max() < 1e-12


def test_a_traceless_space_has_no_trace() -> None:
    basis = SPACES["electric-field-gradient"].basis
    assert len(basis) == 5
    assert np.abs(np.einsum("nii->n", basis)).max() < 1e-12


@pytest.mark.parametrize("symbol", ["mm2", "4", "-4", "32", "-6m2", "23", "-43m", "6/m"])
@pytest.mark.parametrize(
    "name", ["piezoelectric-strain", "elastic-stiffness", "electric-field-gradient", "hall"]
)
def test_adapted_bases_transform_as_their_irrep_and_fill_the_space(symbol: str, name: str) -> None:
    turn = rotation_about(np.array([0.2, -1.0, 0.4]), 1.1)
    space, axial = SPACES[name], kind(name).axial
    for group in (PointGroup.from_symbol(symbol), PointGroup.from_symbol(symbol).rotated(turn)):
        table = character_table(group)
        everything = []
        for index, irrep in enumerate(table.irreps):
            adapted = space.adapted_basis(table, index)
            assert len(adapted) == space.multiplicities(table)[irrep.label]
            everything.append(adapted.reshape(-1, 3**space.symmetry.rank))
            for g in group.generators:
                rotation = group.rotations_cart[g]
                for copy in adapted:
                    image = np.array(
                        [turned(t.real, rotation, axial) + 1j * turned(t.imag, rotation, axial) for t in copy]
                    )
                    expected = np.tensordot(irrep.matrices[g].T, copy, axes=(1, 0))
                    assert np.abs(image - expected).max() < 1e-10, irrep.label
        stacked = np.concatenate(everything)
        assert len(stacked) == space.dimension
        assert np.abs(stacked @ stacked.conj().T - np.eye(space.dimension)).max() < 1e-10
