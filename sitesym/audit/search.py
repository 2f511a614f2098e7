"""The search over readings: every named set of axes and turn of it, times every variant of the array.

Readings are ranked by how many of the hypotheses tried would fit so well by chance. For one hypothesis with
c constraints the chance that a residual of typical size r0 is as small as r goes like (r / r0)^c; a reading
with many siblings must fit that much better. Readings that give the same tensor up to an equivalent choice
of axes are one.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from sitesym.arrays import BoolArray, FloatArray, IntArray
from sitesym.audit.frames import Frames
from sitesym.audit.indexcheck import check_index_symmetry
from sitesym.audit.measurement import Measurement
from sitesym.audit.neumann import Subspaces, acting_group, equivalent_actions
from sitesym.audit.orders import STANDARD_ORDER, order_text
from sitesym.audit.orientations import MOST_JOINED, Orientation
from sitesym.audit.result import IndexFinding, Reading, Residual
from sitesym.audit.uncertainty import judged, noise_of
from sitesym.audit.variants import Variant
from sitesym.groups.normaliser import directions_of_any_turn, normalises

#: A residual below this fraction of the noise level is not taken for better than another one.
_FLOOR = 0.1
#: Readings this much (in the logarithm) behind the best are no rivals: a factor of twenty in chance.
RIVAL = 3.0
#: A reading earns its place when fewer than one in twenty searches would find its like by chance.
EARNED = float(np.log(0.05))
#: Axes further than this from those of the group's normaliser are other axes (entries of matrices).
_SAME_AXES = 1e-3
#: A factor must take away at least half of the residual.
_EXPLAINED = 0.5
_MOST_RIVALS = 4


@dataclass(frozen=True, eq=False)
class Candidate:
    """A reading as a place in the field. ``coefficients`` (k,): its allowed part. ``joined``: readings that
    give the same tensor, in words.
    """

    orientation: Orientation
    variant: Variant
    residual: float
    score: float
    coefficients: FloatArray
    joined: tuple[str, ...] = ()

    @property
    def departs(self) -> bool:
        """Whether the reading contradicts what was stated."""
        return self.orientation.departs or self.variant.departs

    @property
    def words(self) -> str:
        """The reading in one phrase, the order only where it is not the standard one."""
        parts = [self.orientation.words]
        if self.variant.order != STANDARD_ORDER:
            parts.append(f"order {order_text(self.variant.order)}")
        if self.variant.layout not in ("matrix", "full"):
            parts.append(f"layout {self.variant.layout}")
        return ", ".join(parts + ([self.variant.factor] if self.variant.factor else []))


@dataclass(frozen=True, eq=False)
class Field:
    """All readings at once: residuals (orientations, variants) and what belongs to them."""

    measurement: Measurement
    spaces: Subspaces
    frames: Frames
    noise: float
    orientations: tuple[Orientation, ...]
    variants: tuple[Variant, ...]
    allowed: FloatArray
    residuals: FloatArray
    tolerances: FloatArray
    scores: FloatArray
    typical: float

    def floor(self, variant: int) -> float:
        """Relative residual below which no reading of a variant counts as better than another."""
        length = float(np.linalg.norm(self.variants[variant].coordinates))
        return _FLOOR * float(self.tolerances[variant]) / length

    def noise_left(self, variant: int) -> float:
        """Residual that noise is expected to leave at most, in the unit of the tensor, read as a variant."""
        read = self.variants[variant]
        noise = noise_of(self.measurement, read.layout, read.order, read.divisors, self.noise)
        return noise.spread_tolerance(self.spaces, float(np.linalg.norm(read.coordinates)))

    def candidate(self, orientation: int, variant: int) -> Candidate:
        """The reading at a place of the field."""
        return Candidate(
            self.orientations[orientation],
            self.variants[variant],
            float(self.residuals[orientation, variant]),
            float(self.scores[orientation, variant]),
            self.allowed[orientation, :, variant],
        )

    def moved(self, rotation: FloatArray, variant: Variant) -> FloatArray:
        """Coordinates (n,) in the standard orientation of a variant with these axes (rows in the file's)."""
        to_standard = self.frames.standard_from_file @ rotation.T
        moved = self.spaces.space.rotated(to_standard[None], variant.coordinates[:, None])
        only: FloatArray = moved[0, :, 0]
        return only


def search(
    measurement: Measurement,
    frames: Frames,
    spaces: Subspaces,
    variants: Sequence[Variant],
    choices: Sequence[Orientation],
    noise: float,
) -> Field:
    """Residuals and scores of every variant in every orientation."""
    to_standard = np.array([frames.standard_from_file @ o.rotation.T for o in choices])
    coordinates = np.array([v.coordinates for v in variants]).T
    moved = spaces.space.rotated(to_standard, coordinates)
    allowed = spaces.allowed @ moved
    lengths = np.linalg.norm(coordinates, axis=0)
    residuals = np.linalg.norm(moved - spaces.allowed.T @ allowed, axis=1)
    tolerances = _tolerances(measurement, spaces, variants, lengths, noise)
    relative = residuals / lengths
    typical = float(np.sqrt((relative**2).mean()))
    numbers = np.outer([o.choices for o in choices], [v.choices for v in variants])
    floor = _FLOOR * tolerances / lengths
    scores = np.log(numbers) + chance(relative, typical, floor, spaces.constraints)
    return Field(
        measurement,
        spaces,
        frames,
        noise,
        tuple(choices),
        tuple(variants),
        allowed,
        residuals,
        tolerances,
        scores,
        typical,
    )


def _tolerances(
    measurement: Measurement,
    spaces: Subspaces,
    variants: Sequence[Variant],
    lengths: FloatArray,
    noise: float,
) -> FloatArray:
    """Largest residual that noise may leave in each variant, shape (variants,)."""
    levels = (noise_of(measurement, v.layout, v.order, v.divisors, noise) for v in variants)
    if measurement.sigma is None and measurement.rounding is None:
        # Noise that is relative to the tensor is the same for every way to read it.
        return next(levels).tolerance(spaces, 1.0) * lengths
    return np.array([n.tolerance(spaces, float(x)) for n, x in zip(levels, lengths, strict=True)])


def without_empty_factors(field: Field) -> Field:
    """The field without variants whose factor explains nothing.

    A factor that halves an entry halves what is wrong with it too. So the best allowed tensor is fitted to
    the numbers as given, before they are divided, and must leave less than half of what is left without the
    factor. Where a reading fits without a factor, or much better than with one, none is tried.
    """
    plain = {(v.order, v.layout): n for n, v in enumerate(field.variants) if not v.factor}
    without = np.array([plain[v.order, v.layout] for v in field.variants])
    factors = without != np.arange(len(without))
    fits = field.residuals <= field.tolerances
    best = field.scores[fits & ~factors].min(initial=np.inf)
    empty = factors & (fits[:, without] | (field.scores > best + RIVAL))
    residuals = np.where(empty, np.inf, field.residuals)
    for place, number in np.argwhere((residuals <= field.tolerances) & factors).tolist():
        variant = field.variants[number]
        to_standard = field.frames.standard_from_file @ field.orientations[place].rotation.T
        design = field.spaces.space.rotated(to_standard.T[None], field.spaces.allowed.T)[0]
        design, target = design * variant.divisors[:, None], variant.coordinates * variant.divisors
        rest = target - design @ np.linalg.lstsq(design, target, rcond=None)[0]
        if np.linalg.norm(rest) > _EXPLAINED * field.residuals[place, without[number]]:
            residuals[place, number] = np.inf
    return replace(field, residuals=residuals)


def chance(relative: FloatArray, typical: float, floor: FloatArray | float, constraints: int) -> FloatArray:
    """Logarithm of the chance that one hypothesis leaves so small a relative residual."""
    logarithm: FloatArray = constraints * np.log(
        np.minimum(np.maximum(relative, floor) / max(typical, 1e-300), 1.0)
    )
    return logarithm


def candidates(field: Field) -> list[Candidate]:
    """Readings within tolerance, one for each tensor that is different, the best first."""
    fits = np.argwhere(field.residuals <= field.tolerances)
    if not len(fits):
        return []
    # At equal scores the one listed first is the simpler one.
    order = np.argsort(np.round(field.scores[tuple(fits.T)], 6), kind="stable")
    chosen: list[Candidate] = []
    open_places = fits[order]
    while len(open_places) and len(chosen) <= _MOST_RIVALS:
        orientation, variant = open_places[0].tolist()
        leader = field.candidate(orientation, variant)
        joined = _same_tensor(field, leader, open_places)
        joined[0] = True
        if accepted(field, leader):
            others = _words(field, open_places[joined][1:])
            names = (*leader.orientation.same_axes, *others)[:MOST_JOINED]
            chosen.append(replace(leader, joined=names))
        open_places = open_places[~joined]
        if chosen and len(open_places) and _score(field, open_places[0]) > chosen[0].score + RIVAL:
            break
    return chosen


def accepted(field: Field, candidate: Candidate) -> bool:
    """Whether a reading obeys index symmetry and the crystal within noise."""
    return (
        residual_of(field, candidate.orientation.rotation, candidate.variant).within
        and index_finding(field, candidate.variant).holds
    )


def index_finding(field: Field, variant: Variant) -> IndexFinding:
    """Index symmetry of the array read in the layout and order of a variant."""
    return check_index_symmetry(field.measurement, variant.layout, variant.order, field.noise)


def _words(field: Field, places: IntArray) -> tuple[str, ...]:
    readings = (field.candidate(*place).words for place in places[:MOST_JOINED].tolist())
    return tuple(readings)


def judged_reading(field: Field, candidate: Candidate) -> Reading:
    """A candidate in words, with its residual judged."""
    return Reading(
        candidate.orientation.words,
        candidate.orientation.rotation,
        candidate.variant.order,
        candidate.variant.layout,
        candidate.variant.factor,
        residual_of(field, candidate.orientation.rotation, candidate.variant),
        candidate.orientation.choices * candidate.variant.choices,
        candidate.score,
        candidate.joined,
    )


def residual_of(field: Field, rotation: FloatArray, variant: Variant) -> Residual:
    """The residual of a variant in the axes with these rows in the file's axes."""
    noise = noise_of(field.measurement, variant.layout, variant.order, variant.divisors, field.noise)
    return judged(noise, field.spaces, variant.coordinates, field.frames.standard_from_file @ rotation.T)


def _score(field: Field, place: IntArray) -> float:
    return float(field.scores[tuple(place)])


def _same_tensor(field: Field, leader: Candidate, places: IntArray) -> BoolArray:
    """Which readings give the leader's tensor up to an equivalent choice of axes, shape (m,)."""
    own = field.allowed[places[:, 0], :, places[:, 1]]
    images = equivalent_actions(field.spaces.space.kind, field.spaces.group) @ leader.coefficients
    distance = np.linalg.norm(own[:, None, :] - images[None], axis=2).min(axis=1)
    same: BoolArray = distance <= 2.0 * field.tolerances[places[:, 1]]
    acting = acting_group(field.spaces.space.kind, field.spaces.group)
    if not len(directions_of_any_turn(acting)):
        return same
    to_standard = field.frames.standard_from_file
    for number in np.flatnonzero(~same):
        orientation, variant = places[number].tolist()
        if field.variants[variant] is leader.variant:
            turn = to_standard @ field.orientations[orientation].rotation.T
            back = leader.orientation.rotation @ to_standard.T
            same[number] = normalises(acting, turn @ back, _SAME_AXES)
    return same
