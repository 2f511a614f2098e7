"""The two lines of a verdict: what it is, with what symmetry cannot tell, and what to do."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

from sitesym.audit.measurement import Measurement
from sitesym.audit.orders import STANDARD_ORDER, order_text
from sitesym.audit.result import Ambiguity, IndexFinding, Reading, Slip
from sitesym.audit.verdicts import Finding
from sitesym.groups import PointGroup

#: Relative residuals below this are rounding of the computer's numbers.
_ROUNDING = 1e-12


def message(
    measurement: Measurement,
    group: PointGroup,
    index: IndexFinding,
    finding: Finding,
    cannot_tell: Sequence[Ambiguity] = (),
) -> str:
    """Verdict with its evidence in the first line, the next step in the second."""
    subject = f"{measurement.kind.name} in class {group.oriented}"
    first, second = _LINES[finding.verdict](finding, index, _not_stated(measurement))
    return f"{finding.verdict}: {subject} {first}{_clause(cannot_tell)}\n{second}"


#: What each sort of ambiguity is called in the first line.
_SORTS = {
    "order": "another order of columns",
    "layout": "another layout",
    "factor": "other shear factors",
    "axes": "other axes",
    "hand": "the other hand",
    "entry": "a slip in a free entry",
}
#: Sorts that are shown with an example; more would make the line long.
_WITH_EXAMPLE = ("order", "axes")


def _clause(cannot_tell: Sequence[Ambiguity]) -> str:
    """The sorts of ambiguity in a few words."""
    named = []
    for sort, alike in groupby(cannot_tell, key=lambda one: one.sort):
        example = next(alike).reading.removeprefix("order ").removeprefix("axes ")
        named.append(f"{_SORTS[sort]} ({example})" if sort in _WITH_EXAMPLE else _SORTS[sort])
    if not named:
        return ""
    listed = " or ".join(filter(None, (", ".join(named[:-1]), named[-1])))
    return f"; symmetry cannot tell this from {listed}"


def _not_stated(measurement: Measurement) -> str:
    """What the search had to supply: the order, the axes or both."""
    no_axes = isinstance(measurement.axes, str) and measurement.axes == "unknown"
    missing = (["order"] if measurement.order is None else []) + (["axes"] if no_axes else [])
    return " and ".join(missing)


def _consistent(finding: Finding, index: IndexFinding, missing: str) -> tuple[str, str]:
    reading = finding.best
    if reading is None:
        return "must vanish, and does", "nothing to do"
    if finding.stated is None:
        return (
            f"obeys when read in axes {reading.axes}{_departures(reading)} ({_residual(reading)})",
            f"state the {missing} found: the source does not, but every choice that fits gives this tensor",
        )
    return (
        f"obeys as stated ({_residual(reading)})",
        "nothing to do; what symmetry cannot tell, the source has to state",
    )


def _otherwise(finding: Finding, index: IndexFinding, missing: str) -> tuple[str, str]:
    reading = finding.best
    assert reading is not None
    stated = f"; as stated {_residual(finding.stated)}" if finding.stated else ""
    first = f"obeys when read in axes {reading.axes}{_departures(reading)} ({_residual(reading)}{stated})"
    others = f"; {len(finding.rivals)} other readings do about as well" if finding.rivals else ""
    turn = ""
    if reading.turn is not None:
        turn = f" (turned by {reading.turn.angle_degrees:.2f} degrees)"
    changed = _changed(finding, reading, missing)
    return first, f"check the {changed} at the source; state what was found{turn}{others}"


def _changed(finding: Finding, reading: Reading, missing: str) -> str:
    """What the reading takes to be other than stated, or was not stated at all."""
    if finding.stated is None:
        sorts = missing.split(" and ") + (["factors"] if reading.factor else [])
    else:
        told = finding.stated
        departs = {
            "axes": reading.axes != told.axes,
            "order": reading.order != told.order,
            "layout": reading.layout != told.layout,
            "factors": reading.factor != told.factor,
        }
        sorts = [sort for sort, is_other in departs.items() if is_other]
    return " and ".join(filter(None, (", ".join(sorts[:-1]), sorts[-1])))


def _violates(finding: Finding, index: IndexFinding, missing: str) -> tuple[str, str]:
    stated = (
        f"fails as stated ({_residual(finding.stated)})" if finding.stated else "fails in every reading tried"
    )
    match finding.cause:
        case "slip" if finding.best is not None and finding.best.slip is not None:
            return f"{stated}; {_slips(finding, finding.best.slip)}", (
                "look the entry up at the source; until it is corrected do not use the tensor"
            )
        case "crystal" if finding.crystal is not None:
            other = finding.crystal
            return (
                f"{stated}; the data look {other.system} ({other.symbol}, axes {other.axes})",
                "check that structure and tensor belong to one phase (poling, strain, another structure)",
            )
        case "crystal":
            return (
                f"must vanish altogether in this class, and does not ({_residual(finding.stated)})",
                "look for another structure; numbers that are noise need an uncertainty to be told as such",
            )
        case "index-symmetry":
            pairs = ", ".join(f"{p.first} and {p.second}" for p in index.broken[:3])
            return f"breaks index symmetry: {pairs} differ", "look these entries up at the source"
        case "not-searched":
            return f"{stated}; explanations were not searched for", "search for one, or look at the source"
    if finding.rivals:
        return (
            f"{stated}; a reading that fits exists, but chance would find one as good",
            "the rivals are listed; state axes and order from the source before relying on any of them",
        )
    return (
        f"{stated}; no reading, slip or other class explains it",
        "check the data and the structure at the source",
    )


def _cannot_tell(finding: Finding, index: IndexFinding, missing: str) -> tuple[str, str]:
    reading = finding.best
    if reading is None:
        return "is zero within its uncertainty", "give more digits, or measure again: nothing can be tested"
    first = f"obeys when read in axes {reading.axes}{_departures(reading)} ({_residual(reading)})"
    elsewhere = [r for r in finding.rivals if r.axes != reading.axes]
    others = " or ".join(f"axes {r.axes}{_departures(r)}" for r in elsewhere[:2])
    rivals = f", and as well in {others}" if others else ""
    return (
        f"{first}{rivals}, but the source does not state its {missing}",
        f"state the {missing} of the source: other choices give another tensor, which obeys as well",
    )


def _no_constraint(finding: Finding, index: IndexFinding, missing: str) -> tuple[str, str]:
    return "may take any values: symmetry forbids nothing", "nothing was tested; a pass here says nothing"


_LINES = {
    "consistent": _consistent,
    "consistent-otherwise": _otherwise,
    "violates": _violates,
    "cannot-tell": _cannot_tell,
    "no-constraint": _no_constraint,
}


def _slips(finding: Finding, likeliest: Slip) -> str:
    """The likeliest slip, and those that explain the values as well."""
    others = [slip_words(rival.slip) for rival in finding.rivals if rival.slip is not None]
    return ", or ".join([slip_words(likeliest), *others[:2]])


def slip_words(slip: Slip) -> str:
    """A slip in words."""
    entries = " and ".join(slip.entries)
    match slip.sort:
        case "sign":
            return f"the sign of {entries} is likely wrong"
        case "swap":
            return f"{entries} are likely exchanged"
        case "power-of-ten":
            return f"{entries} is likely off by 10^{slip.exponent} (a slip of the decimal point or of a unit)"
        case _:
            return f"{entries} alone is off: {slip.expected[0]:.4g} would fit"


def _departures(reading: Reading) -> str:
    parts = []
    if reading.order != STANDARD_ORDER:
        parts.append(f"order {order_text(reading.order)}")
    if reading.layout not in ("matrix", "full"):
        parts.append(f"layout {reading.layout}")
    if reading.factor:
        parts.append(reading.factor)
    return "".join(f", {part}" for part in parts)


def _residual(reading: Reading | None) -> str:
    if reading is None:
        return "not stated"
    residual = reading.residual
    relative = residual.relative if residual.relative > _ROUNDING else 0.0
    text = f"residual {100 * relative:.3g} %"
    return text if residual.p_value is None else f"{text}, p = {residual.p_value:.2g}"
