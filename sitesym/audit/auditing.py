"""The audit of one tensor: from a measurement and a crystal to a verdict with its evidence."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from sitesym.arrays import FloatArray, frozen
from sitesym.audit.ambiguities import ambiguities
from sitesym.audit.components import deviations
from sitesym.audit.equivalents import equivalent_axes
from sitesym.audit.frames import Frames, Subject, frames_of
from sitesym.audit.indexcheck import check_index_symmetry
from sitesym.audit.kept_groups import symmetry_tolerance
from sitesym.audit.measurement import Measurement
from sitesym.audit.messages import message
from sitesym.audit.neumann import Subspaces, subspaces
from sitesym.audit.orientations import orientations, stated_orientation
from sitesym.audit.own_symmetry import tensor_symmetry, tensor_symmetry_in_own_axes
from sitesym.audit.result import AuditResult, Deviation, IndexFinding, Reading, TensorSymmetry
from sitesym.audit.search import Field, search
from sitesym.audit.uncertainty import Noise, noise_of
from sitesym.audit.variants import Variant, variants_of
from sitesym.audit.verdicts import Finding, as_stated, explained, left_open
from sitesym.errors import UsageError

DEFAULT_NOISE = 0.01


def audit(
    measurement: Measurement, crystal: Subject, noise: float = DEFAULT_NOISE, explain: bool = True
) -> AuditResult:
    """Whether a measured tensor obeys its crystal, and if not, what would explain it.

    ``crystal``: a `Crystal`, its `CrystalSymmetry`, or a `PointGroup` (whose own axes then count as the
    file's). ``noise``: relative level below which a deviation is none, used where no standard uncertainties
    are stated. ``explain``: whether to search for other readings when the stated one fails; where order or
    axes are not stated the possible ones are tried in any case.

    Raises UsageError for a noise that is no fraction, SymmetryNotFoundError when the crystal has no symmetry
    that can be found.
    """
    if not 0.0 <= noise < 1.0:
        raise UsageError(
            "the noise is no relative level", f"{noise}", "a number from 0 to below 1", "give 0.01 for 1 %"
        )
    frames = frames_of(crystal)
    spaces = subspaces(measurement.kind, frames.standard)
    variants = variants_of(measurement)
    stated = variants[0]
    index = check_index_symmetry(measurement, stated.layout, stated.order, noise)
    level = noise_of(measurement, stated.layout, stated.order, stated.divisors, noise)
    trivial = _without_search(spaces, stated, level, index)
    if trivial is not None:
        return _bare(measurement, frames, spaces, noise, index, trivial)
    axes = stated_orientation(measurement, frames)
    if axes is not None:
        field = search(measurement, frames, spaces, variants, (axes,), noise)
        finding = as_stated(field)
        if finding.verdict == "consistent" or not explain:
            return _detailed(field, index, finding)
    field = search(measurement, frames, spaces, variants, orientations(measurement, frames), noise)
    return _detailed(field, index, explained(field))


def _without_search(spaces: Subspaces, stated: Variant, level: Noise, index: IndexFinding) -> Finding | None:
    """Verdicts that need no residual: nothing is forbidden, or nothing was measured."""
    if not index.holds and not spaces.constraints:
        return Finding("violates", "index-symmetry")
    if not spaces.constraints:
        return Finding("no-constraint")
    if level.drowns(spaces, stated.coordinates):
        return Finding("cannot-tell" if spaces.independent else "consistent")
    return None


def _bare(
    measurement: Measurement,
    frames: Frames,
    spaces: Subspaces,
    noise: float,
    index: IndexFinding,
    finding: Finding,
) -> AuditResult:
    return AuditResult(
        measurement,
        frames.group,
        noise,
        finding.verdict,
        message(measurement, frames.group, index, finding),
        index,
        finding.cause,
        constraints=spaces.constraints,
        independent=spaces.independent,
    )


def _detailed(field: Field, index: IndexFinding, finding: Finding) -> AuditResult:
    """The result with what was found component by component and about symmetry."""
    measurement, frames, spaces = field.measurement, field.frames, field.spaces
    if finding.cause in ("unexplained", "not-searched") and not index.holds:
        finding = replace(finding, cause="index-symmetry")
    cannot_tell = ambiguities(field, finding.best) if finding.best and finding.obeys else ()
    finding = left_open(finding, measurement, cannot_tell)
    shown = finding.best or finding.stated
    rotation = field.orientations[0].rotation if shown is None else shown.rotation
    number = 0 if shown is None else _variant_of(field, shown)
    forbidden, relations = _components(field, finding)
    return AuditResult(
        measurement,
        frames.group,
        field.noise,
        finding.verdict,
        message(measurement, frames.group, index, finding, cannot_tell),
        index,
        finding.cause,
        finding.stated,
        finding.best,
        finding.rivals,
        forbidden,
        relations,
        equivalent_axes(measurement.kind, frames.standard, frames.standard_from_file @ rotation.T),
        cannot_tell,
        _symmetry(field, finding, rotation, number),
        spaces.constraints,
        spaces.independent,
    )


def _symmetry(field: Field, finding: Finding, rotation: FloatArray, number: int) -> TensorSymmetry:
    """The tensor's own symmetry in the crystal's axes, or in its own where the verdict rests on these."""
    own = None if finding.crystal is None else finding.crystal.own
    if own is not None:
        kind, axes = field.measurement.kind, frozen(own.rotation @ field.orientations[0].rotation)
        return tensor_symmetry_in_own_axes(kind, field.spaces.group, own.kept, axes)
    moved = field.moved(rotation, field.variants[number])
    ieee = field.frames.standard_from_file
    tolerance = symmetry_tolerance(field, number, ieee @ rotation.T)
    return tensor_symmetry(field.spaces, moved, tolerance, ieee)


def _components(field: Field, finding: Finding) -> tuple[tuple[Deviation, ...], tuple[Deviation, ...]]:
    """Findings in the axes as stated, where the tensor fails in them."""
    if finding.stated is None or finding.stated.residual.within:
        return (), ()
    variant = field.variants[0]
    level = noise_of(field.measurement, variant.layout, variant.order, variant.divisors, field.noise)
    tolerance = level.entry_tolerance(field.spaces, float(np.linalg.norm(variant.coordinates)))
    to_standard = field.frames.standard_from_file @ finding.stated.rotation.T
    entries = variant.coordinates / field.spaces.space.weights
    return deviations(field.spaces, to_standard, entries, tolerance)


def _variant_of(field: Field, reading: Reading) -> int:
    keys = [(v.order, v.layout, v.factor) for v in field.variants]
    return keys.index((reading.order, reading.layout, reading.factor))
