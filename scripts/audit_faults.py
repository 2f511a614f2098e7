"""Faults to inject into tensors that obey their crystal, and when an audit has named one rightly."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

import sitesym
from sitesym.audit import AuditResult, Measurement, Reading
from sitesym.audit.arrayspace import array_space
from sitesym.audit.frames import Frames, frames_of
from sitesym.audit.neumann import subspaces
from sitesym.audit.orders import SHEAR_ORDERS, STANDARD_ORDER
from sitesym.audit.rotation_search import rotation_of
from sitesym.audit.variants import variants_of
from sitesym.crystals import CrystalSymmetry
from sitesym.groups.normaliser import normalises

Array = NDArray[np.float64]
NOISE = 0.01


@dataclass(frozen=True, eq=False)
class Case:
    """A tensor that obeys its crystal exactly, in the `lattice` axes, and the noise of one component."""

    kind: sitesym.TensorKind
    symmetry: CrystalSymmetry
    frames: Frames
    values: Array
    sigma: float
    length: float


@dataclass(frozen=True, eq=False)
class Fault:
    """What is done to an array, on which crystal it is then audited, and whether a result names it."""

    apply: Callable[[Array], Array]
    named: Callable[[AuditResult], bool]
    symmetry: CrystalSymmetry


def cases(results: list[AuditResult], symmetries: list[CrystalSymmetry]) -> Iterator[Case]:
    """The nearest obeying tensor of every record that has constraints and independent components."""
    for result, symmetry in zip(results, symmetries, strict=True):
        if result.best is None or not result.constraints or result.verdict == "violates":
            continue
        kind, frames = result.measurement.kind, frames_of(symmetry)
        spaces = subspaces(kind, frames.standard)
        space = spaces.space
        variant = variants_of(result.measurement)[0]
        to_standard = frames.standard_from_file @ result.best.rotation.T
        moved = space.rotated(to_standard[None], variant.coordinates[:, None])[0]
        obeying = spaces.allowed.T @ (spaces.allowed @ moved)
        to_lattice = frames.named["lattice"] @ frames.standard_from_file.T
        coordinates = space.rotated(to_lattice[None], obeying)[0, :, 0]
        length = float(np.linalg.norm(coordinates))
        if length > 0.0:
            sigma = NOISE * length / np.sqrt(len(space.index_basis))
            yield Case(kind, symmetry, frames, space.array(coordinates), sigma, length)


def left_over(measurement: Measurement, symmetry: CrystalSymmetry, reading: Reading) -> float:
    """Relative residual of noise-free data under a reading, its slip put right."""
    frames = frames_of(symmetry)
    spaces = subspaces(measurement.kind, frames.standard)
    space = spaces.space
    key = (reading.order, reading.layout, reading.factor)
    variant = next(v for v in variants_of(measurement) if (v.order, v.layout, v.factor) == key)
    vector = variant.coordinates.copy()
    free: list[int] = []
    if reading.slip is not None:
        groups = [[space.names.index(n) for n in text.split(" and ")] for text in reading.slip.entries]
        entries = vector / space.weights
        if reading.slip.sort == "sign":
            entries[groups[0]] *= -1.0
        elif reading.slip.sort == "power-of-ten":
            entries[groups[0]] *= 10.0**-reading.slip.exponent
        elif reading.slip.sort == "swap":
            entries[groups[0]], entries[groups[1]] = entries[groups[1]].copy(), entries[groups[0]].copy()
        else:
            free = groups[0]
        vector = entries * space.weights
    to_standard = frames.standard_from_file @ reading.rotation.T
    rest = spaces.forbidden_part(space.rotated(to_standard[None], vector[:, None])[0, :, 0])
    if free:
        unit = np.zeros(space.size)
        unit[free] = space.weights[free]
        column = spaces.forbidden_part(space.rotated(to_standard[None], unit[:, None])[0, :, 0])
        rest = rest - column * (column @ rest) / (column @ column)
    return float(np.linalg.norm(rest) / np.linalg.norm(vector))


def noisy(case: Case, rng: np.random.Generator) -> Array:
    """The tensor with noise on every component, index symmetry kept."""
    space = array_space(case.kind)
    noise = space.index_basis.T @ rng.normal(size=len(space.index_basis)) * case.sigma
    return case.values + space.array(noise)


def allowed_entries(case: Case) -> NDArray[np.bool_]:
    """Entries the crystal allows in the `lattice` axes, shape of the array."""
    spaces = subspaces(case.kind, case.frames.standard)
    to_lattice = case.frames.named["lattice"] @ case.frames.standard_from_file.T
    rows = spaces.space.rotated(to_lattice[None], spaces.allowed.T)[0]
    visible: NDArray[np.bool_] = (np.linalg.norm(rows, axis=1) > 1e-3).reshape(case.values.shape)
    return visible


def places(
    case: Case, wanted: NDArray[np.bool_], rng: np.random.Generator, both: bool
) -> list[tuple[int, ...]]:
    """A random wanted entry, together with its mirror image where the array is symmetric and ``both``."""
    choices = np.argwhere(wanted)
    if not len(choices):
        return []
    entry = tuple(int(i) for i in choices[rng.integers(len(choices))])
    symmetric = len(set(case.values.shape)) == 1 and entry != entry[::-1]
    return [entry, entry[::-1]] if both and symmetric else [entry]


def slip_named(sort: str, entries: list[tuple[int, ...]]) -> Callable[[AuditResult], bool]:
    wanted = {"".join(str(i + 1) for i in entry) for entry in entries}

    def named(result: AuditResult) -> bool:
        slips = [r.slip for r in (result.best, *result.rivals) if r is not None and r.slip is not None]
        found = [
            {name for text in slip.entries for name in text.split(" and ")}
            for slip in slips
            if slip.sort == sort
        ]
        return result.cause == "slip" and wanted in found

    return named


def forbidden(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    entries = places(case, ~allowed_entries(case), rng, both=True)
    if not entries:
        return None
    weights = array_space(case.kind).weights.reshape(case.values.shape)
    size = 10.0 * case.sigma / weights[entries[0]] / np.sqrt(len(entries)) * rng.choice([-1.0, 1.0])
    change = np.zeros(case.values.shape)
    for entry in entries:
        change[entry] = size
    return Fault(lambda array: array + change, slip_named("entry", entries), case.symmetry)


def wrong_order(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    order = SHEAR_ORDERS[1 + rng.integers(2)]
    columns = [STANDARD_ORDER.index(pair) for pair in order]

    def apply(array: Array) -> Array:
        for axis, block in enumerate(array.shape):
            if block == 6:
                array = np.take(array, columns, axis=axis)
        return array

    return Fault(
        apply, lambda r: has_reading(r, lambda best: best.order == order and not best.factor), case.symmetry
    )


def transposed(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    if case.values.shape != (3, 6):
        return None
    return Fault(
        lambda array: array.T.reshape(3, 6),
        lambda r: has_reading(r, lambda best: best.layout == "by-columns"),
        case.symmetry,
    )


def doubled(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    shears = array_space(case.kind).shears.sum(axis=1).reshape(case.values.shape)
    return Fault(
        lambda array: array * 2.0**shears,
        lambda r: has_reading(r, lambda best: "doubled" in best.factor),
        case.symmetry,
    )


def flipped(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    entries = places(case, np.abs(case.values) > 10.0 * case.sigma, rng, both=bool(rng.integers(2)))

    def apply(array: Array) -> Array:
        array = array.copy()
        for entry in entries:
            array[entry] *= -1.0
        return array

    return Fault(apply, slip_named("sign", entries), case.symmetry) if entries else None


def swapped(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    first = places(case, np.abs(case.values) > 10.0 * case.sigma, rng, both=False)
    if not first:
        return None
    different = np.abs(case.values - case.values[first[0]]) > 10.0 * case.sigma
    second = places(case, different, rng, both=False)
    if not second or second[0] == first[0][::-1]:
        return None

    def apply(array: Array) -> Array:
        array = array.copy()
        array[first[0]], array[second[0]] = array[second[0]], array[first[0]]
        return array

    return Fault(apply, slip_named("swap", [first[0], second[0]]), case.symmetry)


def off_by_ten(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    entries = places(case, np.abs(case.values) > 10.0 * case.sigma, rng, both=bool(rng.integers(2)))
    factor = 10.0 ** rng.choice([-1.0, 1.0])

    def apply(array: Array) -> Array:
        array = array.copy()
        for entry in entries:
            array[entry] *= factor
        return array

    return Fault(apply, slip_named("power-of-ten", entries), case.symmetry) if entries else None


def turned(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    quaternion = rng.normal(size=4)
    angle = 2.0 * np.arctan2(np.linalg.norm(quaternion[1:]), quaternion[0])
    rotation = rotation_of(quaternion[1:] / np.linalg.norm(quaternion[1:]) * angle)
    space = array_space(case.kind)
    true_axes = rotation @ case.frames.named["lattice"]

    def apply(array: Array) -> Array:
        return space.array(space.rotated(rotation[None], space.coordinates(array)[:, None])[0, :, 0])

    exact = Measurement("exact", case.kind, apply(case.values), axes="lattice")

    def same_axes(best: Reading) -> bool:
        # Noise blurs the angles of a nearly isotropic tensor: there the exact tensor must obey instead.
        to_standard = case.frames.standard_from_file
        difference = to_standard @ best.rotation.T @ true_axes @ to_standard.T
        near = normalises(case.frames.standard, difference, 0.1)
        return near or left_over(exact, case.symmetry, best) < NOISE

    return Fault(apply, lambda r: has_reading(r, same_axes), case.symmetry)


def wrong_class(case: Case, rng: np.random.Generator, others: list[Case]) -> Fault | None:
    other = others[rng.integers(len(others))]
    if other.symmetry.point_group.symbol == case.symmetry.point_group.symbol:
        return None
    return Fault(lambda array: array, lambda r: r.cause == "crystal", other.symmetry)


def has_reading(result: AuditResult, right: Callable[[Reading], bool]) -> bool:
    """Whether the best reading, or a rival as good, is the right one."""
    readings = [r for r in (result.best, *result.rivals) if r is not None and r.slip is None]
    return result.cause == "reading" and any(right(reading) for reading in readings)


FAULTS = {
    "forbidden component, 10 x noise": forbidden,
    "wrong order": wrong_order,
    "transposed array": transposed,
    "doubled shear columns": doubled,
    "one flipped sign": flipped,
    "two swapped entries": swapped,
    "one entry off by 10": off_by_ten,
    "random rotation": turned,
    "crystal of another class": wrong_class,
}
