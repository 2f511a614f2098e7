"""An `irreps` document as LaTeX: labels, characters, functions and elements in mathematical notation."""

from __future__ import annotations

import re

from sitesym.reports.headings import latex_footer, latex_header
from sitesym.reports.irreps_report import check_texts, direct_sum
from sitesym.reports.markup import Document, latex_escape, latex_tabular

_LABEL = re.compile(r"^([12]?)([^\d'])([^']*)")
_ELEMENT = re.compile(r"^(-?)(\d+|m)(?:\^(\d+))?([+-]?)('?)$")
_BARRED = r"\\bar{\1}"


def irreps_latex(document: Document) -> str:
    """The character table as a tabular, what stands below it, and the classes as another tabular."""
    blocks = [latex_header(document), _character_table(document)]
    pairs = document.get("joined") or ()
    for pair in pairs:
        functions = ", ".join(map(latex_function, pair["components"]))
        members = " + ".join(map(latex_label, pair["members"]))
        blocks.append(
            f"joined: ${latex_label(pair['label'])} = {members}$" + (functions and f": {functions}")
        )
    reduction = document.get("reduction")
    if reduction:
        total = direct_sum(reduction["multiplicity"], pairs, latex_label)
        blocks.append(f"reduction: {latex_escape(reduction['property'])} = ${total}$")
    blocks.append(f"checks: {latex_escape('; '.join(check_texts(document['checks'])))}")
    return "\n\n".join([*blocks, _classes(document), latex_footer(document)])


def _character_table(document: Document) -> str:
    classes = [f"{latex_element(entry['label'])} ({entry['size']})" for entry in document["classes"]]
    rows = [
        [
            f"${latex_label(irrep['label'])}$",
            str(irrep["dimension"]),
            *(f"${latex_character(value)}$" for value in irrep["characters"]),
            irrep["reality"],
            ", ".join(map(latex_function, irrep["components"])),
        ]
        for irrep in document["irreps"]
    ]
    return latex_tabular(["", "dim", *classes, "type", "transforms like"], rows)


def _classes(document: Document) -> str:
    names = [latex_element(element["name"]) for element in document["elements"]]
    rows = [
        [latex_element(entry["label"]), ", ".join(names[index] for index in entry["elements"])]
        for entry in document["classes"]
    ]
    return latex_tabular(["class", "elements"], rows)


def latex_label(label: str) -> str:
    r"""A label of an irrep, for math mode.

    >>> latex_label("1E1g"), latex_label("A2''"), latex_label("Γ3")
    ('{}^{1}E_{1g}', "A_{2}''", '\\Gamma_{3}')
    """
    return _LABEL.sub(_label_parts, label)


def _label_parts(found: re.Match[str]) -> str:
    member, letter, below = found.groups()
    before = f"{{}}^{{{member}}}" if member else ""
    after = f"_{{{below}}}" if below else ""
    return before + letter.replace("Γ", r"\Gamma") + after


def latex_character(value: str) -> str:
    r"""An exact character, for math mode.

    >>> latex_character("exp(-2*pi*i/3)"), latex_character("1 - i")
    ('e^{-2\\pi i/3}', '1 - i')
    """
    return re.sub(r"exp\((-?)(?:(\d+)\*)?pi\*i/(\d+)\)", r"e^{\1\2\\pi i/\3}", value)


def latex_function(name: str) -> str:
    r"""A function of x, y, z or a rotation, as a formula.

    >>> latex_function("2z2-x2-y2+i*sqrt(3)*(x2-y2)"), latex_function("Rx-iRy")
    ('$2z^{2}-x^{2}-y^{2}+i\\sqrt{3}(x^{2}-y^{2})$', '$R_{x}-iR_{y}$')
    """
    formula = re.sub(r"sqrt\((\d+)\)", r"\\sqrt{\1}", name.replace("*", ""))
    formula = re.sub(r"(?<=[xyz])(\d)", r"^{\1}", formula)
    return "$" + re.sub(r"R([xyz])", r"R_{\1}", formula) + "$"


def latex_element(name: str) -> str:
    r"""An element or a class, as a formula: bars for minus signs of digits.

    >>> latex_element("-4+ [001]"), latex_element("m [1-10]"), latex_element("2' [010]")
    ('$\\bar{4}^{+}$ $[001]$', '$m$ $[1\\bar{1}0]$', '$2^{\\prime}$ $[010]$')
    """
    symbol, _, direction = name.partition(" ")
    formula = f"${_ELEMENT.sub(_element_parts, symbol)}$"
    if not direction.startswith("["):
        return f"{formula} {direction}".strip()
    return f"{formula} ${re.sub(r'-([0-9])', _BARRED, direction)}$"


def _element_parts(found: re.Match[str]) -> str:
    minus, order, steps, sense, prime = found.groups(default="")
    above = steps + sense + (r"\prime" if prime else "")
    return (rf"\bar{{{order}}}" if minus else order) + (f"^{{{above}}}" if above else "")
