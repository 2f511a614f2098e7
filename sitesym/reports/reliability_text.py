"""A symmetry's reliability as lines of text, from a document's entry on the crystal."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from itertools import groupby
from typing import Any


def reliability_lines(crystal: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    """(label, text) of what the entries of a document's crystal say."""
    if crystal.get("ladder"):
        yield "ladder", _ladder_text(crystal["ladder"])
    if crystal.get("pseudosymmetry"):
        text = _distance_text(crystal["pseudosymmetry"])
        if text:
            yield "distance", text
    if crystal.get("second_opinion"):
        yield "finders", _second_text(crystal["second_opinion"], crystal)


def _ladder_text(ladder: Mapping[str, Any]) -> str:
    """Robust or fragile, the groups along the ladder, the verdicts that flip.

    >>> rungs = [{"space_group": "P4mm", "tolerance_angstrom": length} for length in (0.01, 0.1)]
    >>> _ladder_text({"fragile": False, "window_angstrom": [0.001, 0.1], "rungs": rungs, "flips": []})
    'robust: P4mm from 0.01 to 0.1 angstrom'
    """
    low, high = ladder["window_angstrom"]
    changes = f"fragile, the group changes within {low:g} to {high:g} angstrom"
    word = changes if ladder["fragile"] else "robust"
    lines = [f"{word}: {'; '.join(_stretches(ladder['rungs']))} angstrom"]
    lines.extend(_flip_texts(ladder["flips"]))
    return "\n".join(lines)


def _stretches(rungs: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    for group, members in groupby(rungs, key=lambda rung: rung["space_group"]):
        lengths = [rung["tolerance_angstrom"] for rung in members]
        span = f"at {lengths[0]:g}" if len(lengths) == 1 else f"from {lengths[0]:g} to {lengths[-1]:g}"
        yield f"{group or 'no answer'} {span}"


def _flip_texts(flips: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    def between(flip: Mapping[str, Any]) -> tuple[float, float]:
        return flip["lower_angstrom"], flip["upper_angstrom"]

    for (lower, upper), members in groupby(flips, key=between):
        changes = (
            f"{flip['verdict'].replace('_', ' ')} becomes {'yes' if flip['above'] else 'no'}"
            for flip in members
        )
        yield f"between {lower:g} and {upper:g}: {', '.join(changes)}"


def _distance_text(distance: Mapping[str, Any]) -> str:
    """How far from inversion, and from a reversed polar axis where that is another arrangement.

    >>> nearest = {"operation": "-1", "largest_displacement_angstrom": 0.106, "checked": True,
    ...     "rms_displacement_angstrom": 0.0615, "parent": "P4/mmm"}
    >>> _distance_text({"note": None, "centrosymmetric": nearest, "nonpolar": nearest})
    'to inversion: atoms move 0.1060 angstrom at most, 0.0615 r.m.s., to P4/mmm in this cell'
    """
    if distance["note"]:
        return str(distance["note"])
    central, nonpolar = distance["centrosymmetric"], distance["nonpolar"]
    lines = [] if central is None else [f"to inversion: {_nearest_text(central)}"]
    if nonpolar is not None and nonpolar["operation"] != "-1":
        lines.append(f"to {nonpolar['operation']}, which reverses the polar axis: {_nearest_text(nonpolar)}")
    return "\n".join(lines)


def _nearest_text(nearest: Mapping[str, Any]) -> str:
    largest, rms = nearest["largest_displacement_angstrom"], nearest["rms_displacement_angstrom"]
    moved = f"atoms move {largest:.4f} angstrom at most, {rms:.4f} r.m.s."
    parent = (
        f"to {nearest['parent']} in this cell" if nearest["checked"] else "to no crystal that was confirmed"
    )
    return f"{moved}, {parent}"


def _second_text(second: Mapping[str, Any], crystal: Mapping[str, Any]) -> str:
    first = f"{crystal['finder']}: {crystal['space_group']}"
    other = f"{second['finder']}: {second['space_group'] or second['reason']}"
    used = second["tolerance_used_angstrom"]
    if used is not None and used < 0.999 * crystal["tolerance_angstrom"]:
        other += f" (it lowered the tolerance to {used:g} angstrom)"
    if second["agrees"]:
        return f"{first}; {other}; they agree in space group, point group and related atoms"
    text = f"{first}; {other}; they differ in {', '.join(second['differences'])}"
    if second["meet_angstrom"] is not None:
        text += f"; both find {second['meet_in']} at {second['meet_angstrom']:g} angstrom"
    return text
