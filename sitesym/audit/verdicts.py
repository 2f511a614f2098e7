"""From all residuals to a verdict: what is consistent, what explains a failure, what stays open."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from sitesym.audit.frames import standard_groups
from sitesym.audit.measurement import Measurement
from sitesym.audit.neumann import acting_group
from sitesym.audit.orientations import stated_orientation
from sitesym.audit.other_crystal import OtherCrystal, other_crystal, other_crystal_in_own_axes
from sitesym.audit.result import Ambiguity, Cause, Reading, Verdict
from sitesym.audit.rotation_search import best_rotation
from sitesym.audit.search import (
    EARNED,
    RIVAL,
    Candidate,
    Field,
    accepted,
    candidates,
    chance,
    index_finding,
    judged_reading,
    residual_of,
    without_empty_factors,
)
from sitesym.audit.slips import Repair, repairs
from sitesym.audit.turns import smallest_turn, turn_of
from sitesym.groups.normaliser import normalises

#: A reading is preferred to a slip unless the slip is this much (in the logarithm) more likely.
_PREFERENCE = 1.0
_MOST_SLIPS = 6
#: Entries of the matrices of a class that its own turn may move.
_SAME_AXES = 1e-3
#: Chance finds the like of such a reading less than once in 10^8 searches.
_BEYOND_DOUBT = -20.0


@dataclass(frozen=True, eq=False)
class Finding:
    """A verdict with the readings behind it. ``crystal``: the class the tensor looks like, if any."""

    verdict: Verdict
    cause: Cause = ""
    stated: Reading | None = None
    best: Reading | None = None
    rivals: tuple[Reading, ...] = ()
    crystal: OtherCrystal | None = None

    @property
    def obeys(self) -> bool:
        """Whether the tensor obeys in some reading, with no slip to be put right first."""
        return self.verdict in ("consistent", "consistent-otherwise", "cannot-tell")


def as_stated(field: Field) -> Finding:
    """Whether a tensor obeys as stated: long enough to be judged, in a crystal that constrains it.

    The first place of the field is the reading as stated.
    """
    first = field.candidate(0, 0)
    stated = judged_reading(field, first)
    if accepted(field, first):
        return Finding("consistent", "", stated, stated)
    return Finding("violates", "not-searched", stated)


def explained(field: Field) -> Finding:
    """What makes a tensor obey that fails as stated, or whose axes or order are not stated."""
    field = without_empty_factors(field)
    if stated_orientation(field.measurement, field.frames) is None:
        return _unstated(field)
    stated = judged_reading(field, field.candidate(0, 0))
    return replace(_explained(field, candidates(field)), stated=stated)


def _unstated(field: Field) -> Finding:
    """Readings that contradict nothing stated come first; several different ones leave the answer open."""
    fits = candidates(field)
    compatible = [fit for fit in fits if not fit.departs]
    if not compatible or compatible[0].score > fits[0].score + RIVAL:
        return _explained(field, fits)
    best, *others = compatible
    rivals = tuple(judged_reading(field, o) for o in others if o.score <= best.score + RIVAL)
    verdict: Verdict = "cannot-tell" if rivals else "consistent"
    return Finding(verdict, "", None, judged_reading(field, best), rivals)


def left_open(finding: Finding, measurement: Measurement, cannot_tell: tuple[Ambiguity, ...]) -> Finding:
    """The finding; where the order or the axes were not stated and others obey as well, it cannot tell."""
    open_sorts = {"axes"} if isinstance(measurement.axes, str) and measurement.axes == "unknown" else set()
    open_sorts |= {"order"} if measurement.order is None else set()
    if finding.verdict != "consistent" or finding.best is None or not open_sorts:
        return finding
    as_read = finding.best.layout, finding.best.factor
    undecided = any(one.sort in open_sorts and (one.layout, one.factor) == as_read for one in cannot_tell)
    return replace(finding, verdict="cannot-tell") if undecided else finding


def _explained(field: Field, fits: list[Candidate]) -> Finding:
    """The most likely explanation of a failure.

    Another reading comes first unless a slip or another crystal is clearly more likely; then the likelier
    of a slip, a free rotation and another crystal.
    """
    if not field.spaces.independent:
        return Finding("violates", "crystal", crystal=other_crystal(field))
    readings = [judged_reading(field, fit) for fit in fits]
    near = tuple(r for r in readings[1:] if r.score <= readings[0].score + RIVAL)
    if readings and _is_beyond_doubt(readings[0]):
        return Finding("consistent-otherwise", "reading", None, readings[0], near)
    slips, crystal = _slips(field), _earned_crystal(field)
    slip = slips[0] if slips and slips[0].score <= EARNED else None
    crystal_score = np.inf if crystal is None else crystal.score
    slip_score = np.inf if slip is None else slip.score
    # A tensor that shows more symmetry than this crystal asks for is no evidence against it.
    against = crystal_score if crystal is not None and crystal.is_lower else np.inf
    if readings and readings[0].score <= min(EARNED, slip_score + _PREFERENCE, against + RIVAL):
        return Finding("consistent-otherwise", "reading", None, readings[0], near)
    if slip is not None and slip_score < crystal_score:
        alike = tuple(s for s in slips[1:] if s.score <= slip_score + RIVAL)[:_MOST_SLIPS]
        return Finding("violates", "slip", None, slip, (*alike, *readings[:1]), crystal)
    turned = _turned(field)
    if turned is not None and (
        turned.score <= min(EARNED, crystal_score + RIVAL) or _keeps_lower_class(field, turned, crystal)
    ):
        return Finding("consistent-otherwise", "reading", None, turned, tuple(readings[:1]))
    rivals = (*readings[:1], *([turned] if turned is not None else []), *slips[:1])
    crystal = _wider(field, crystal)
    return Finding("violates", "unexplained" if crystal is None else "crystal", None, None, rivals, crystal)


def _keeps_lower_class(field: Field, turned: Reading, crystal: OtherCrystal | None) -> bool:
    """Whether the lower class that the tensor shows is that of the crystal seen in turned axes: a turn about
    its main axis leaves it as it is, and in the turned axes the tensor obeys the whole class.
    """
    if crystal is None or not crystal.is_lower or turned.turn is None or turned.score > EARNED:
        return False
    kind = field.spaces.space.kind
    lower = standard_groups().get(crystal.symbol)
    if lower is None:
        return False
    ieee = field.frames.standard_from_file
    turn = ieee @ turned.rotation.T @ field.orientations[0].rotation @ ieee.T
    return normalises(acting_group(kind, lower), turn, _SAME_AXES)


def _is_beyond_doubt(reading: Reading) -> bool:
    """Whether a reading fits so far below the noise that nothing else need be tried."""
    residual = reading.residual
    return reading.score <= _BEYOND_DOUBT and residual.absolute <= 0.1 * residual.tolerance


def _earned_crystal(field: Field) -> OtherCrystal | None:
    found = other_crystal(field)
    return found if found is not None and found.score <= EARNED else None


def _wider(field: Field, crystal: OtherCrystal | None) -> OtherCrystal | None:
    """The class the tensor shows in axes of its own, where that is a larger group than in the crystal's."""
    own = other_crystal_in_own_axes(field)
    if own is None or own.score > EARNED or (crystal is not None and own.order <= crystal.order):
        return crystal
    return own


def _slips(field: Field) -> list[Reading]:
    """Slips in the axes that are not turned, read as stated, the most likely first."""
    plain = [
        o
        for o, orientation in enumerate(field.orientations)
        if orientation.is_plain and field.residuals[o, 0] > field.tolerances[0]
    ]
    found: list[tuple[Repair, Candidate]] = []
    for place in plain:
        candidate = field.candidate(place, 0)
        found.extend((repair, candidate) for repair in repairs(field, candidate))
    found.sort(key=lambda pair: pair[0].score)
    distinct: dict[tuple[str, tuple[str, ...], int], Reading] = {}
    for repair, candidate in found:
        key = (repair.slip.sort, repair.slip.entries, repair.slip.exponent)
        if key not in distinct and len(distinct) < 4 * _MOST_SLIPS:
            distinct[key] = _repaired(field, repair, candidate)
    return list(distinct.values())


def _repaired(field: Field, repair: Repair, candidate: Candidate) -> Reading:
    reading = judged_reading(field, candidate)
    relative = repair.residual / float(np.linalg.norm(candidate.variant.coordinates))
    residual = replace(
        reading.residual,
        absolute=repair.residual,
        relative=relative,
        within=True,
        chi2=None,
        dof=None,
        p_value=None,
    )
    return replace(
        reading, residual=residual, choices=repair.choices, score=repair.score, slip=repair.slip, joined=()
    )


def _turned(field: Field) -> Reading | None:
    """The reading in axes turned by a free rotation, where it brings the tensor within tolerance."""
    variant = field.variants[0]
    found = best_rotation(field.spaces, variant.coordinates)
    if found.residual > field.tolerances[0] or not index_finding(field, variant).holds:
        return None
    base = field.orientations[0].rotation
    rotation = smallest_turn(found.rotation.T @ field.frames.standard_from_file, base, field.frames)
    residual = residual_of(field, rotation, variant)
    if not residual.within:
        return None
    free = max(field.spaces.constraints - found.effective, 0)
    score = float(
        np.log(found.choices) + chance(np.array(residual.relative), field.typical, field.floor(0), free)
    )
    return Reading(
        "turned freely",
        rotation,
        variant.order,
        variant.layout,
        variant.factor,
        residual,
        found.choices,
        score,
        turn=turn_of(rotation, base, field.frames),
    )
