"""The two lines of a verdict: what it is, and what to do."""

from __future__ import annotations

from sitesym.audit.measurement import Measurement
from sitesym.audit.orders import STANDARD_ORDER, order_text
from sitesym.audit.result import IndexFinding, Reading, Slip
from sitesym.audit.verdicts import Finding
from sitesym.groups import PointGroup

#: Relative residuals below this are rounding of the computer's numbers.
_ROUNDING = 1e-12


def message(
    measurement: Measurement, group: PointGroup, noise: float, index: IndexFinding, finding: Finding
) -> str:
    """Verdict with its evidence in the first line, the next step in the second."""
    subject = f"{measurement.kind.name} in class {group.oriented}"
    first, second = _LINES[finding.verdict](finding, index)
    return f"{finding.verdict}: {subject} {first}\n{second}"


def _consistent(finding: Finding, index: IndexFinding) -> tuple[str, str]:
    reading = finding.best
    if reading is None:
        return "must vanish, and does", "nothing to do"
    if finding.stated is None:
        return (
            f"obeys when read in axes {reading.axes}{_departures(reading)} ({_residual(reading)})",
            "axes or order were not stated: state those found, and look at the equivalent choices of axes",
        )
    return (
        f"obeys as stated ({_residual(reading)})",
        "nothing to do; signs and axes that symmetry leaves open are listed as equivalent axes",
    )


def _otherwise(finding: Finding, index: IndexFinding) -> tuple[str, str]:
    reading = finding.best
    assert reading is not None
    stated = f"; as stated {_residual(finding.stated)}" if finding.stated else ""
    first = f"obeys when read in axes {reading.axes}{_departures(reading)} ({_residual(reading)}{stated})"
    others = f"; {len(finding.rivals)} other readings do about as well" if finding.rivals else ""
    turn = ""
    if reading.turn is not None:
        turn = f" (turned by {reading.turn.angle_degrees:.2f} degrees)"
    return first, f"check the axes, order and factors at the source; state those found{turn}{others}"


def _violates(finding: Finding, index: IndexFinding) -> tuple[str, str]:
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
    if finding.rivals:
        return (
            f"{stated}; a reading that fits exists, but chance would find one as good",
            "the rivals are listed; state axes and order from the source before relying on any of them",
        )
    return (
        f"{stated}; no reading, slip or other class explains it",
        "check the data and the structure at the source",
    )


def _cannot_tell(finding: Finding, index: IndexFinding) -> tuple[str, str]:
    if finding.best is None:
        return "is zero within its uncertainty", "give more digits, or measure again: nothing can be tested"
    readings = [finding.best, *finding.rivals]
    listed = "; ".join(f"axes {r.axes}{_departures(r)}" for r in readings[:3])
    return (
        f"obeys in {len(readings)} readings that give different tensors: {listed}",
        "state the axes and the order of the source",
    )


def _no_constraint(finding: Finding, index: IndexFinding) -> tuple[str, str]:
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
