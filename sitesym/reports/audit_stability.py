"""The elastic stability of an `audit` document as text."""

from __future__ import annotations

from collections.abc import Iterator

from sitesym.reports.audit_phrases import Entry
from sitesym.reports.layout import labelled, table

_MODULI = (("bulk modulus K", "bulk"), ("shear modulus G", "shear"))
_KINDS = ("voigt", "reuss", "hill")
_HEAD = ("irrep", "eigenvalues", "condition", "left side", "holds")


def stability_text(entry: Entry, unit: str, is_compliance: bool, indent: int) -> str:
    """The answer, the conditions irrep by irrep, the averages, behind a left margin."""
    lines = [labelled("  elastic", f"{entry['answer']}: {'; '.join(entry['reasons'])}", label_width=indent)]
    lines.append(table(_HEAD, _rows(entry), indent=indent))
    if entry["averages"] is not None:
        averages = _averages(entry["averages"], _stiffness_unit(unit, is_compliance))
        lines.append(labelled("  averages", "\n".join(averages), label_width=indent))
    return "\n".join(lines)


def _rows(entry: Entry) -> Iterator[tuple[object, ...]]:
    for block in entry["blocks"]:
        eigenvalues = " ".join(f"{value:.5g}" for value in block["eigenvalues"])
        label = f"{block['irrep']} ({block['dimension']}x)" if block["dimension"] > 1 else block["irrep"]
        for number, condition in enumerate(block["conditions"]):
            first = (label, eigenvalues) if number == 0 else (" ", " ")
            yield (*first, condition["text"], f"{condition['value']:.5g}", condition["holds"])


def _stiffness_unit(unit: str, is_compliance: bool) -> str:
    if unit == "unknown":
        return "the unit of the stiffness (not stated)"
    return f"1/({unit})" if is_compliance else unit


def _averages(averages: Entry, unit: str) -> Iterator[str]:
    for words, name in _MODULI:
        values = (f"{which.capitalize()} {averages[f'{name}_{which}']:.5g}" for which in _KINDS)
        yield f"{words}: {', '.join(values)} {unit}"
    yield (
        f"Hill: Young's modulus {averages['young_hill']:.5g} {unit}, Poisson's ratio "
        f"{averages['poisson_hill']:.3f}; universal anisotropy {averages['anisotropy']:.3g}"
    )
    holds = "holds" if averages["bounds_hold"] else "does not hold, as it must for a stable crystal"
    yield f"0 < Reuss <= Voigt {holds}"
