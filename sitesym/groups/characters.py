"""Exact irreducible characters of a finite group from its classes alone (Burnside-Dixon).

The class sums commute; their common eigenvectors, found modulo a prime p = 1 (mod exponent), are the
characters modulo p, and the eigenvalue multiplicities of each element lift them to exact sums of roots of
unity.

Source: W. Burnside, Theory of Groups of Finite Order, 2nd ed. (1911) chapter XV; J. D. Dixon, Numer. Math.
10 (1967) 446.
"""

from __future__ import annotations

import numpy as np

from sitesym.arrays import IntArray
from sitesym.errors import SymmetryError
from sitesym.groups.abstract import AbstractGroup
from sitesym.groups.modular import null_space, prime_for, primitive_root_of_unity, row_reduced
from sitesym.groups.rootsum import RootSum


def irreducible_characters(group: AbstractGroup) -> tuple[tuple[RootSum, ...], ...]:
    """All irreducible characters, one row a character, one exact value a class of ``group.classes``.

    Rows are in no particular order but for a given table always the same; as many rows as classes.
    """
    prime = prime_for(group.exponent, group.order)
    lines = _common_eigenvectors(group, prime)
    characters = tuple(_lifted(_character_modulo(line, group, prime), group, prime) for line in lines)
    if len(characters) != len(group.classes):
        raise SymmetryError("the class algebra did not split into as many characters as classes")
    return characters


def class_matrices(group: AbstractGroup) -> IntArray:
    """Class algebra constants a[j, r, s]: number of ways to write the first element of class s as (class
    j)(class r).
    """
    count = len(group.classes)
    constants = np.zeros((count, count, count), dtype=np.int64)
    for s, members in enumerate(group.classes):
        for j, first_factors in enumerate(group.classes):
            second = group.table[group.inverses[list(first_factors)], members[0]]
            np.add.at(constants[j, :, s], group.class_of[second], 1)
    return constants


def _common_eigenvectors(group: AbstractGroup, prime: int) -> list[IntArray]:
    """One vector modulo p for each character: omega_s = |C_s| chi_s / chi_1, an eigenvector of every class
    matrix.
    """
    count = len(group.classes)
    spaces = [np.eye(count, dtype=np.int64)]
    for matrix in class_matrices(group):
        spaces = [part for space in spaces for part in _eigenspaces(matrix, space, prime)]
    return [space[:, 0] for space in spaces]


def _eigenspaces(matrix: IntArray, space: IntArray, prime: int) -> list[IntArray]:
    """Split an invariant subspace (columns) into the eigenspaces of a matrix modulo p."""
    if space.shape[1] == 1:
        return [space]
    restricted = _restriction(matrix, space, prime)
    parts: list[IntArray] = []
    found = 0
    for eigenvalue in range(prime):
        shifted = restricted - eigenvalue * np.eye(len(restricted), dtype=np.int64)
        kernel = null_space(shifted, prime)
        if kernel.shape[1]:
            parts.append(space @ kernel % prime)
            found += kernel.shape[1]
        if found == space.shape[1]:
            break
    return parts


def _restriction(matrix: IntArray, space: IntArray, prime: int) -> IntArray:
    """The matrix X with matrix @ space = space @ X modulo p."""
    dimension = space.shape[1]
    augmented = np.concatenate([space, matrix @ space % prime], axis=1)
    rows, _ = row_reduced(augmented, prime)
    return rows[:dimension, dimension:]


def _character_modulo(omega: IntArray, group: AbstractGroup, prime: int) -> list[int]:
    """chi_s modulo p from omega_s; the degree follows from the length of the character."""
    sizes = [len(members) for members in group.classes]
    inverse_class = [int(group.class_of[group.inverses[members[0]]]) for members in group.classes]
    scaled = [int(value) * pow(int(omega[0]), -1, prime) % prime for value in omega]
    length = sum(scaled[s] * scaled[inverse_class[s]] * pow(sizes[s], -1, prime) for s in range(len(sizes)))
    square = group.order * pow(length, -1, prime) % prime
    degree = next(d for d in range(1, prime) if d * d % prime == square)
    return [degree * scaled[s] * pow(sizes[s], -1, prime) % prime for s in range(len(sizes))]


def _lifted(values: list[int], group: AbstractGroup, prime: int) -> tuple[RootSum, ...]:
    """Exact values: the multiplicity of exp(2 pi i k / e) among the eigenvalues of g is a Fourier sum over
    g^l.
    """
    e = group.exponent
    root = primitive_root_of_unity(e, prime)
    power_class = [group.class_of[group.power_table[:, members[0]]].tolist() for members in group.classes]
    exact = []
    for powers in power_class:
        multiplicities = [
            sum(values[c] * pow(root, -k * power, prime) for power, c in enumerate(powers))
            * pow(e, -1, prime)
            % prime
            for k in range(e)
        ]
        exact.append(RootSum(tuple(multiplicities)))
    return tuple(exact)
