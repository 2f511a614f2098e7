"""What a document says of a symmetry's reliability: ladder, second opinion, distance from higher symmetry."""

from __future__ import annotations

from typing import Any

from sitesym.crystals import CrystalSymmetry
from sitesym.crystals.ladder import Ladder, Rung
from sitesym.crystals.pseudosymmetry import NearestArrangement, Pseudosymmetry
from sitesym.crystals.second_opinion import SecondOpinion
from sitesym.crystals.symmetry import group_of_setting
from sitesym.screening.verdicts import verdict_flips, verdicts_of_setting


def reliability_entries(symmetry: CrystalSymmetry) -> dict[str, Any]:
    """The entries ``ladder``, ``pseudosymmetry``, ``second_opinion`` of a crystal, null where not asked."""
    asked = symmetry.reliability
    ladder, distance, second = (
        (None, None, None) if asked is None else (asked.ladder, asked.pseudosymmetry, asked.second_opinion)
    )
    return {
        "ladder": None if ladder is None else _ladder_entry(ladder),
        "pseudosymmetry": None if distance is None else _distance_entry(distance, symmetry),
        "second_opinion": None if second is None else _second_entry(second),
    }


def _ladder_entry(ladder: Ladder) -> dict[str, Any]:
    return {
        "fragile": ladder.fragile,
        "window_angstrom": list(ladder.window_angstrom),
        "stable_interval_angstrom": list(ladder.stable_interval_angstrom),
        "rungs": [_rung_entry(rung) for rung in ladder.rungs],
        "flips": [
            {
                "verdict": flip.verdict,
                "lower_angstrom": flip.lower_angstrom,
                "upper_angstrom": flip.upper_angstrom,
                "above": flip.above,
                "in_window": flip.in_window,
            }
            for flip in verdict_flips(ladder)
        ],
    }


def _rung_entry(rung: Rung) -> dict[str, Any]:
    known = rung.hall_number is not None
    return {
        "tolerance_angstrom": rung.tolerance_angstrom,
        "space_group_number": rung.space_group_number,
        "space_group": rung.space_group_symbol or None,
        "point_group": group_of_setting(rung.hall_number).symbol if rung.hall_number else None,
        "verdicts": dict(verdicts_of_setting(rung.hall_number)) if rung.hall_number else None,
        "searched": bool(rung.finder),
        "finder": rung.finder or None,
        "tolerance_used_angstrom": rung.tolerance_used_angstrom if known else None,
    }


def _distance_entry(distance: Pseudosymmetry, symmetry: CrystalSymmetry) -> dict[str, Any]:
    return {
        "centrosymmetric": _nearest_entry(distance.centrosymmetric, symmetry),
        "nonpolar": _nearest_entry(distance.nonpolar, symmetry),
        "cell": "as it is; its strain is not counted",
        "note": distance.note or None,
    }


def _nearest_entry(nearest: NearestArrangement | None, symmetry: CrystalSymmetry) -> dict[str, Any] | None:
    if nearest is None:
        return None
    labels = symmetry.crystal.labels
    pairs = zip(nearest.atoms, nearest.partners, nearest.displacements_file.tolist(), strict=True)
    return {
        "operation": nearest.operation,
        "centre_file": None if nearest.centre_file is None else nearest.centre_file.tolist(),
        "largest_displacement_angstrom": nearest.largest_displacement_angstrom,
        "rms_displacement_angstrom": nearest.rms_displacement_angstrom,
        "parent_number": None if nearest.parent is None else nearest.parent.number,
        "parent": None if nearest.parent is None else nearest.parent.symbol,
        "checked": nearest.checked,
        "pairs": [
            {
                "atom": atom,
                "label": labels[atom],
                "partner": partner,
                "partner_label": labels[partner],
                "displacement_file": displacement,
            }
            for atom, partner, displacement in pairs
        ],
    }


def _second_entry(second: SecondOpinion) -> dict[str, Any]:
    other = second.symmetry
    return {
        "agrees": second.agrees,
        "differences": list(second.differences),
        "finder": second.finder if other is None else other.found.finder,
        "space_group_number": None if other is None else other.space_group_number,
        "space_group": None if other is None else other.space_group_symbol,
        "tolerance_used_angstrom": None if other is None else other.found.tolerance_used_angstrom,
        "reason": second.reason or None,
        "meet_angstrom": second.meet_angstrom,
        "meet_in": second.meet_in or None,
    }
