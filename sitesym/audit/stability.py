"""Elastic stability of a measured stiffness or compliance: stable, unstable, or unreliable.

The elastic energy must be positive for every strain. In the Kelvin basis, where strain and stress are
vectors with one metric, that is the sign of the six eigenvalues; they are also given irrep by irrep with the
closed-form conditions. An eigenvalue within the noise of zero gives no answer.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Final, Literal, TypeAlias

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.elastic_averages import ElasticAverages, elastic_averages
from sitesym.audit.projection import nearest_allowed
from sitesym.audit.strain_blocks import StrainBlock, strain_blocks
from sitesym.errors import TensorInputError
from sitesym.groups import PointGroup, standard_rotation
from sitesym.tensors import TensorKind, allowed_form, contraction, kind, to_full, to_matrix, turned

StabilityAnswer: TypeAlias = Literal["stable", "unstable", "unreliable"]

#: Kinds that have an elastic stability.
ELASTIC_KINDS: Final = ("elastic-stiffness", "elastic-compliance")

_KELVIN: Final = np.array([1.0, 1.0, 1.0, *[2.0**0.5] * 3])
#: Noise of an eigenvalue is taken three standard deviations wide (no unit).
_SIGMAS: Final = 3.0
#: An array whose two triangles differ by more than this is not taken for one stiffness (relative, no unit).
_LARGEST_ASYMMETRY: Final = 0.1


@dataclass(frozen=True)
class CheckedCondition:
    """A condition in words, the value of its left side for the nearest allowed stiffness, and whether it
    holds.
    """

    text: str
    value: float
    holds: bool


@dataclass(frozen=True, eq=False)
class BlockStability:
    """One irrep: eigenvalues (each ``dimension`` times in the crystal) and conditions, of the nearest allowed
    tensor.
    """

    label: str
    dimension: int
    eigenvalues: FloatArray
    conditions: tuple[CheckedCondition, ...]


@dataclass(frozen=True, eq=False)
class Stability:
    """``eigenvalues`` (6,) ascending, of the symmetric part as given, in the unit of the values; ``margin``
    below which their sign is not known, and ``reasons`` for the answer. ``blocks`` refer to stiffnesses in
    the standard orientation (``rotation`` (3, 3), new axes as rows); ``averages`` to the stiffness, also
    where a compliance was given; None where it cannot be inverted.
    """

    answer: StabilityAnswer
    reasons: tuple[str, ...]
    eigenvalues: FloatArray
    margin: float
    blocks: tuple[BlockStability, ...]
    rotation: FloatArray
    averages: ElasticAverages | None


def elastic_stability(
    tensor_kind: TensorKind,
    matrix: FloatArray,
    group: PointGroup,
    relative_noise: float = 0.0,
    sigma: FloatArray | None = None,
    to_standard: FloatArray | None = None,
) -> Stability:
    """Stability of a stiffness or compliance, a (6, 6) contracted matrix in the axes of the group.

    ``relative_noise``: of the norm of the tensor; ``sigma`` (6, 6): standard deviation of each entry.
    ``to_standard`` (3, 3): leads from the axes of the group to its standard orientation, where that is known
    already. Raises TensorInputError for another kind of tensor, or a matrix of another shape.
    """
    if tensor_kind.name not in ELASTIC_KINDS:
        raise TensorInputError(
            "elastic stability is asked of a tensor that is not elastic",
            tensor_kind.name,
            " or ".join(ELASTIC_KINDS),
            "leave the question out for this quantity",
        )
    kelvin = _kelvin(tensor_kind, matrix)
    symmetric = (kelvin + kelvin.T) / 2.0
    eigenvalues, vectors = np.linalg.eigh(symmetric)
    nearest = _kelvin(tensor_kind, nearest_allowed(tensor_kind, matrix, group).after)
    causes = {
        "the noise": _noise_margin(tensor_kind, kelvin, vectors[:, 0], relative_noise, sigma),
        "the difference between the two triangles of the array": _triangle_difference(kelvin),
        "the distance to the nearest allowed tensor": float(np.linalg.norm(symmetric - nearest, 2)),
        "the precision of the arithmetic": 1e-12 * float(np.linalg.norm(kelvin)),
    }
    answer, reasons = _judged(kelvin, float(eigenvalues[0]), causes)
    stiffness = symmetric if tensor_kind.name == "elastic-stiffness" else _inverse(symmetric)
    rotation = standard_rotation(group) if to_standard is None else to_standard
    return Stability(
        answer,
        reasons,
        frozen(eigenvalues),
        max(causes.values()),
        _blocks(tensor_kind, nearest, group, rotation),
        frozen(rotation),
        _averages(stiffness),
    )


def _kelvin(tensor_kind: TensorKind, matrix: FloatArray) -> FloatArray:
    """Kelvin matrix: tensor components, times sqrt 2 for each shear index."""
    full = to_full(tensor_kind, matrix)
    components = to_matrix(kind("elastic-stiffness"), full)
    return components * np.outer(_KELVIN, _KELVIN)


def _noise_margin(
    tensor_kind: TensorKind,
    kelvin: FloatArray,
    vector: FloatArray,
    relative: float,
    sigma: FloatArray | None,
) -> float:
    """Three standard deviations of the lowest eigenvalue v^T K v, to first order in the noise of K.

    Entries IJ and JI are taken for one measurement, so that their errors add.
    """
    if sigma is None:
        return _SIGMAS * relative * float(np.linalg.norm(kelvin)) / 6.0
    errors = np.outer(vector, vector) * sigma * _kelvin(tensor_kind, np.ones((6, 6)))
    return _SIGMAS * float(np.linalg.norm(np.triu(errors) + np.triu(errors.T, 1)))


def _triangle_difference(kelvin: FloatArray) -> float:
    """How far an eigenvalue can move if one triangle of the array is right and not the mean of both."""
    half = np.triu(kelvin - kelvin.T, 1) / 2.0
    return float(np.linalg.norm(half + half.T, 2))


def _judged(
    kelvin: FloatArray, lowest: float, causes: dict[str, float]
) -> tuple[StabilityAnswer, tuple[str, ...]]:
    difference, total = float(np.linalg.norm(kelvin - kelvin.T)) / 2.0, float(np.linalg.norm(kelvin))
    asymmetry = difference / total if total > 0.0 else 0.0
    if asymmetry > _LARGEST_ASYMMETRY:
        return "unreliable", (
            f"the two triangles of the array differ from their mean by {asymmetry:.1%} of its norm",
        )
    wider = tuple(
        f"the lowest eigenvalue {lowest:.4g} is closer to zero than {cause} ({size:.2g})"
        for cause, size in causes.items()
        if abs(lowest) <= size
    )
    if wider:
        return "unreliable", wider
    if lowest < 0.0:
        return "unstable", (f"the lowest eigenvalue is {lowest:.4g}: some strain lowers the energy",)
    return "stable", (f"the lowest of the six eigenvalues is {lowest:.4g}",)


def _blocks(
    tensor_kind: TensorKind, nearest: FloatArray, group: PointGroup, rotation: FloatArray
) -> tuple[BlockStability, ...]:
    """The irreps' blocks of the nearest allowed tensor, in the standard orientation.

    Conditions are on stiffnesses; of a compliance that cannot be inverted only the eigenvalues are given.
    """
    oriented = _turned_kelvin(nearest, rotation)
    stiffness = oriented if tensor_kind.name == "elastic-stiffness" else _inverse(oriented)
    standard = group.rotated(rotation)
    return tuple(_block(block, oriented, stiffness, standard) for block in strain_blocks(standard))


def _block(
    block: StrainBlock, oriented: FloatArray, stiffness: FloatArray | None, group: PointGroup
) -> BlockStability:
    conditions: tuple[CheckedCondition, ...] = ()
    if stiffness is not None:
        values = _independent(stiffness, group)
        checked = ((condition.text, condition.value(values)) for condition in block.conditions)
        conditions = tuple(CheckedCondition(text, value, value > 0.0) for text, value in checked)
    eigenvalues = np.asarray(np.linalg.eigvalsh(block.matrix(oriented)), dtype=np.float64)
    return BlockStability(block.label, block.dimension, frozen(eigenvalues), conditions)


def _independent(stiffness_kelvin: FloatArray, group: PointGroup) -> dict[str, float]:
    stiffness = kind("elastic-stiffness")
    matrix = stiffness_kelvin / np.outer(_KELVIN, _KELVIN)
    names = contraction(stiffness)
    places = dict(zip(names.keys, names.multi_indices.tolist(), strict=True))
    form = allowed_form(stiffness, group)
    return {name: float(matrix[tuple(places[name])]) for name in form.independent}


def _turned_kelvin(kelvin: FloatArray, rotation: FloatArray) -> FloatArray:
    stiffness = kind("elastic-stiffness")
    full = to_full(stiffness, kelvin / np.outer(_KELVIN, _KELVIN))
    return to_matrix(stiffness, turned(full, rotation)) * np.outer(_KELVIN, _KELVIN)


def _inverse(symmetric: FloatArray) -> FloatArray | None:
    """The inverse, or None for a matrix that is singular within the precision of the arithmetic."""
    values = np.abs(np.linalg.eigvalsh(symmetric))
    if values.min() <= 1e-12 * values.max():
        return None
    return np.asarray(np.linalg.inv(symmetric), dtype=np.float64)


def _averages(stiffness_kelvin: FloatArray | None) -> ElasticAverages | None:
    compliance = None if stiffness_kelvin is None else _inverse(stiffness_kelvin)
    if stiffness_kelvin is None or compliance is None:
        return None
    factors = np.outer(_KELVIN, _KELVIN)
    return elastic_averages(stiffness_kelvin / factors, compliance * factors)
