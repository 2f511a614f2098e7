"""Unitary matrices of an irrep, cut out of tensor powers of the vector representation by projection
operators.

Every irrep of a group of matrices is contained in some tensor power of a faithful representation (W.
Burnside, Theory of Groups of Finite Order, 2nd ed. (1911), section 226), so a short search finds it. Where
it occurs once there, the projector P = (d/|G|) sum_g chi(g)* D(g) gives its space; where it occurs more
often, an averaged symmetric matrix splits the copies.
"""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from sitesym.arrays import ComplexArray, FloatArray
from sitesym.errors import SymmetryError
from sitesym.groups.pointgroup import PointGroup
from sitesym.tolerances import REPRESENTATION

_HIGHEST_POWER = 4


def irrep_matrices(group: PointGroup, character: ComplexArray) -> ComplexArray:
    """Unitary matrices D(g) with the given character (one value an element), shape (n, d, d).

    Real orthogonal where the irrep is real and d > 1. The basis follows the Cartesian axes of the group: an
    irrep that the polar vector contains once is given on its x, y, z. Raises SymmetryError if the search
    finds the irrep in no tensor power.
    """
    dimension = round(character[0].real)
    if dimension == 1:
        return character.reshape(-1, 1, 1).astype(np.complex128)
    representation, multiplicity = _containing(group, character)
    projector = dimension / group.order * np.einsum("g,gij->ij", character.conj(), representation)
    space = _orthonormal_columns(projector)
    if multiplicity > 1:
        space = space @ _one_copy(np.einsum("ai,gab,bj->gij", space.conj(), representation, space), dimension)
    matrices: ComplexArray = np.einsum("ai,gab,bj->gij", space.conj(), representation, space)
    return matrices


def _containing(group: PointGroup, character: ComplexArray) -> tuple[FloatArray, int]:
    """A representation that contains the irrep, once if possible, and how often it does."""
    best: tuple[FloatArray, int] | None = None
    for representation in _tensor_powers(group):
        traces = np.trace(representation, axis1=1, axis2=2)
        multiplicity = round(float((traces * character.conj()).real.mean()))
        if multiplicity == 1:
            return representation, 1
        if multiplicity > 1 and (best is None or multiplicity < best[1]):
            best = representation, multiplicity
    if best is None:
        raise SymmetryError(f"no tensor power up to {_HIGHEST_POWER} of the vector contains the irrep")
    return best


def _tensor_powers(group: PointGroup) -> Iterator[FloatArray]:
    """Polar and axial tensor powers of the vector representation, shape (n, 3^k, 3^k), lowest first."""
    power = group.rotations_cart
    for _ in range(_HIGHEST_POWER):
        yield power
        yield power * group.determinants[:, None, None]
        size = power.shape[1] * 3
        power = np.einsum("gij,gkl->gikjl", power, group.rotations_cart).reshape(-1, size, size)


def _orthonormal_columns(projector: ComplexArray) -> ComplexArray:
    """Orthonormal basis of the range of a Hermitian projector, by Gram-Schmidt on its columns in order.

    The squared residues of all n columns sum to the rank that is still missing, so that one residue is at
    least 1/sqrt(n): taking only such columns is enough, and keeps the basis accurate however the axes lie.
    """
    smallest = 0.99 / np.sqrt(len(projector))
    basis: list[ComplexArray] = []
    for column in projector.T:
        residue = column - sum((vector * (vector.conj() @ column) for vector in basis), np.zeros_like(column))
        norm = float(np.linalg.norm(residue))
        if norm > smallest:
            basis.append(residue / norm)
    return np.array(basis, dtype=np.complex128).T


def _one_copy(copies: ComplexArray, dimension: int) -> ComplexArray:
    """Columns spanning one of several equal irreps: an eigenspace of a matrix that commutes with all of
    them.
    """
    size = copies.shape[1]
    seed = np.random.default_rng(1).standard_normal((size, size))
    averaged = np.einsum("gai,ab,gbj->ij", copies.conj(), seed + seed.T, copies) / len(copies)
    real = np.abs(averaged.imag).max() < REPRESENTATION  # then the eigenvectors shall be real too
    _, vectors = np.linalg.eigh(averaged.real if real else averaged)
    return vectors[:, :dimension].astype(np.complex128)
