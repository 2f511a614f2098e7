"""The `allowed` document: for each property the components that a group allows, in stated axes."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from typing import Any

import numpy as np

from sitesym.groups import PointGroup
from sitesym.groups.normaliser import directions_of_any_turn
from sitesym.reports.markup import Document
from sitesym.reports.provenance import CAUTION, library_versions
from sitesym.tensors import AllowedForm, Coefficient, TensorKind, allowed_form, contraction, sense_choices

SCHEMA = "sitesym.allowed/1"
VOIGT_ORDER = "11 22 33 23 13 12"


def allowed_document(
    group: PointGroup,
    kinds: Iterable[TensorKind],
    axes: Mapping[str, Any],
    crystal: Mapping[str, Any] | None = None,
    site: Mapping[str, Any] | None = None,
    remarks: Iterable[str] = (),
) -> Document:
    """The document `sitesym.allowed/1`.

    ``group`` stands in the axes of the answer (``group.rotated(R)``); ``axes`` has name, edition, note and
    rotation_from_file, ``crystal`` and ``site`` what the answer refers to, or None.
    """
    asked = list(kinds)
    standard = axes["name"] == "ieee" and site is None
    return {
        "schema": SCHEMA,
        "group": group_entry(group),
        "crystal": dict(crystal) if crystal is not None else None,
        "site": dict(site) if site is not None else None,
        "axes": dict(axes),
        "properties": [property_entry(kind, group) for kind in asked],
        "remarks": [*remarks, *_time_remarks(asked, group), *_turn_remarks(standard, group)],
        "versions": library_versions(),
        "caution": CAUTION,
    }


def _time_remarks(kinds: Iterable[TensorKind], group: PointGroup) -> list[str]:
    """What a form of a kind odd under time reversal stands for in a group without any time reversal."""
    odd = [kind.name for kind in kinds if kind.time_odd]
    if not odd or group.time_reversal.any():
        return []
    return [
        f"odd under time reversal: {', '.join(odd)}. The form is that of a magnetically ordered crystal "
        "whose magnetic point group is this one, without time reversal; where there is no magnetic order, "
        "every component is zero"
    ]


def _turn_remarks(standard: bool, group: PointGroup) -> list[str]:
    """What the operations of a group in its ``standard`` orientation leave open beyond senses."""
    directions = list(directions_of_any_turn(group)) if standard else []
    if not directions:
        return []
    where = f" about {'xyz'[int(np.argmax(np.abs(directions[0])))]}" if len(directions) == 1 else ""
    return [
        f"the operations alone let the axes turn by any angle{where}: such turns keep which components are "
        "independent and mix their values"
    ]


def group_entry(group: PointGroup) -> dict[str, Any]:
    """What every document says of a point group."""
    return {
        "symbol": group.symbol,
        "oriented": group.oriented,
        "schoenflies": group.schoenflies,
        "order": group.order,
        "system": group.system,
        "generators": [group.names[index] for index in group.generators],
    }


def property_entry(kind: TensorKind, group: PointGroup) -> dict[str, Any]:
    """The allowed form of one kind, with its notation."""
    form = allowed_form(kind, group)
    notation = contraction(kind)
    return {
        "name": kind.name,
        "symbol": kind.symbol,
        "rank": kind.rank,
        "index_symmetry": kind.jahn,
        "parity": kind.parity,
        "time_parity": "odd" if kind.time_odd else "even",
        "unit": kind.unit,
        "order": VOIGT_ORDER if 6 in notation.blocks else "",
        "factor_rule": kind.factor_rule,
        "indices": kind.indices,
        "traceless": kind.traceless,
        "blocks": list(notation.blocks),
        "symmetric": notation.commuting,
        "antisymmetric": notation.anticommuting,
        "keys": list(notation.keys),
        "independent_count": form.independent_count,
        "independent": list(form.independent),
        "components": _components(form),
        "exact": form.exact,
        "equivalent_axes": [
            {"turn": choice.turn, "flips": list(choice.flips)} for choice in sense_choices(form, group)
        ],
    }


def coefficient_text(coefficient: Coefficient) -> str:
    """An exact number as it is ("1/2", "sqrt(3)/2"), a float with twelve digits.

    >>> coefficient_text(1 / 3)
    '0.333333333333'
    """
    return f"{coefficient:.12g}" if isinstance(coefficient, float) else str(coefficient)


def _components(form: AllowedForm) -> dict[str, dict[str, str]]:
    return {
        key: {name: coefficient_text(value) for name, value in terms.items()}
        for key, terms in form.components.items()
    }
