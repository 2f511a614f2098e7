"""The nearest allowed tensor: least squares onto the allowed form, as an act of its own.

Nothing is symmetrised on the way: the array as given, the fitted one and their difference stand side by
side.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sitesym.arrays import FloatArray, IntArray, frozen
from sitesym.errors import TensorInputError
from sitesym.groups import PointGroup
from sitesym.tensors import AllowedForm, TensorKind, allowed_form, contraction
from sitesym.tensors.indexsymmetry import VOIGT_PAIRS

EQUAL_WEIGHTS = "every component of the full tensor weighted alike"
GIVEN_SIGMAS = "every component weighted by its stated standard deviation"
FROM_SIGMAS = "from the stated standard deviations"
FROM_SCATTER = "from the scatter about the fit"

_SMALLEST_SIGMA = 1e-6


@dataclass(frozen=True)
class FittedValue:
    """An independent component; ``uncertainty`` is one standard deviation, None where nothing tells it."""

    name: str
    value: float
    uncertainty: float | None


@dataclass(frozen=True, eq=False)
class Projection:
    """The nearest allowed tensor, contracted, in the unit and the axes of the array it was made from.

    ``difference`` is ``before - after``. ``relative_change`` compares norms of full tensors. ``chi2`` and
    ``dof`` where standard deviations were given. ``weights`` and ``uncertainty_source`` say how the fit was
    made.
    """

    kind: TensorKind
    group: PointGroup
    before: FloatArray
    after: FloatArray
    difference: FloatArray
    independent: tuple[FittedValue, ...]
    relative_change: float
    weights: str
    uncertainty_source: str | None
    chi2: float | None
    dof: int


def nearest_allowed(
    kind: TensorKind, matrix: FloatArray, group: PointGroup, sigma: FloatArray | None = None
) -> Projection:
    """Least-squares fit of the allowed form to a contracted array in the axes of the group.

    ``matrix`` and ``sigma`` (one standard deviation an entry) have the shape ``contraction(kind).shape``;
    entries that index symmetry makes equal (c12, c21) count once, with their mean. Raises TensorInputError
    for another shape.
    """
    values, errors = _observed(kind, matrix), _observed_errors(kind, matrix, sigma)
    form = allowed_form(kind, group)
    lengths = _lengths(kind)
    scale = lengths if errors is None else 1.0 / errors
    design = form.coefficients * scale[:, None]
    fitted = np.asarray(np.linalg.lstsq(design, values * scale, rcond=None)[0], dtype=np.float64)
    misfit = float((((values - form.coefficients @ fitted) * scale) ** 2).sum())
    dof = len(values) - form.independent_count
    uncertainties, source = _uncertainties(design, misfit, dof, errors is not None)
    after = _contracted(form, fitted)
    norm = float(np.linalg.norm(values * lengths))
    change = float(np.linalg.norm((values - form.coefficients @ fitted) * lengths))
    return Projection(
        kind,
        group,
        frozen(np.asarray(matrix, dtype=np.float64)),
        frozen(after),
        frozen(np.asarray(matrix - after, dtype=np.float64)),
        tuple(map(FittedValue, form.independent, fitted.tolist(), uncertainties)),
        change / norm if norm > 0.0 else 0.0,
        EQUAL_WEIGHTS if errors is None else GIVEN_SIGMAS,
        source,
        None if errors is None else misfit,
        dof,
    )


def _contracted(form: AllowedForm, values: FloatArray) -> FloatArray:
    return form.matrix(dict(zip(form.independent, values.tolist(), strict=True)))


def _uncertainties(
    design: FloatArray, misfit: float, dof: int, with_sigmas: bool
) -> tuple[list[float | None], str | None]:
    """Standard deviations of the fitted values, and where they come from."""
    count = design.shape[1]
    if not count or (not with_sigmas and dof == 0):
        return [None] * count, None
    variance = 1.0 if with_sigmas else misfit / dof
    deviations = np.sqrt(variance * np.diag(np.linalg.inv(design.T @ design)))
    return list(deviations.tolist()), FROM_SIGMAS if with_sigmas else FROM_SCATTER


def _lengths(kind: TensorKind) -> FloatArray:
    """Length in the full tensor of a unit of each written component of the contracted array."""
    lengths: FloatArray = np.sqrt(kind.written.multiplicities) / contraction(kind).factors
    return lengths


def _observed(kind: TensorKind, matrix: FloatArray) -> FloatArray:
    """One value for each written component: the mean of the entries that index symmetry makes equal."""
    places, signs = _places(kind, matrix)
    sums = np.bincount(places, (np.asarray(matrix).ravel() * signs), minlength=len(contraction(kind).keys))
    means: FloatArray = sums / np.bincount(places, np.abs(signs), minlength=len(sums))
    return means


def _observed_errors(kind: TensorKind, matrix: FloatArray, sigma: FloatArray | None) -> FloatArray | None:
    """One standard deviation for each written component: equal entries are one measurement, not two.

    One that is stated as zero counts as a millionth of the largest entry: no weight can be infinite.
    """
    if sigma is None:
        return None
    smallest = _SMALLEST_SIGMA * float(np.abs(matrix).max(initial=0.0)) or 1.0
    places, signs = _places(kind, sigma)
    squares = np.bincount(
        places, np.asarray(sigma).ravel() ** 2 * np.abs(signs), minlength=len(contraction(kind).keys)
    )
    errors = np.sqrt(squares / np.bincount(places, np.abs(signs), minlength=len(squares)))
    return np.maximum(errors, smallest)


def _places(kind: TensorKind, array: FloatArray) -> tuple[IntArray, FloatArray]:
    """For every entry of the contracted array: its written component and sign (0 where it must vanish)."""
    notation = contraction(kind)
    if np.shape(array) != notation.shape:
        raise TensorInputError(
            f"the array does not have the shape of {kind.name}",
            f"shape {np.shape(array)}",
            f"shape {notation.shape}",
            "give the contracted matrix",
        )
    component, sign = kind.written.full_indices
    wide = component.reshape((3,) * kind.rank), sign.reshape((3,) * kind.rank)
    first = [_first_full_index(notation.blocks, entry) for entry in np.ndindex(*notation.shape)]
    return (
        np.array([wide[0][full] for full in first], dtype=np.int64),
        np.array([wide[1][full] for full in first], dtype=np.float64),
    )


def _first_full_index(blocks: tuple[int, ...], entry: tuple[int, ...]) -> tuple[int, ...]:
    """The full index that a contracted one stands for, pairs in the order 11 22 33 23 13 12."""
    return tuple(
        i
        for index, block in zip(entry, blocks, strict=True)
        for i in (VOIGT_PAIRS[index] if block == 6 else (index,))
    )
