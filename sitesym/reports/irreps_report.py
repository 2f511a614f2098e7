"""An `irreps` document as text, CSV and Markdown."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from typing import Any

from sitesym.reports.headings import footer, header, markdown_footer, markdown_header
from sitesym.reports.layout import labelled, table
from sitesym.reports.markup import Document, csv_text, markdown_escape, markdown_table

CSV_COLUMNS = (
    "group", "irrep", "dimension", "reality", "class", "class_size", "character", "real_part",
    "imaginary_part", "functions", "reduced_property", "multiplicity",
)  # fmt: skip

_CLASS_HEAD = ("class", "elements")

#: The checks of a character table in words.
_CHECKS = {
    "irreps_equal_classes": "as many irreps as classes",
    "sum_of_squared_dimensions": "squared dimensions add up to the order of the group:",
    "characters_have_length_order": "squared length of each character is the order (exact)",
    "characters_orthogonal": "different irreps have orthogonal characters (exact)",
    "unitary_deviation": "matrices are unitary",
    "homomorphism_deviation": "D(g) D(h) = D(gh) for all pairs",
    "great_orthogonality_deviation": "great orthogonality theorem over all matrix elements",
    "trace_deviation": "traces are the characters, constant on classes",
}


def irreps_text(document: Document, matrices: bool = False) -> str:
    """Character table, what transforms as which irrep, the checks made; matrices on request."""
    head, rows = _table_cells(document)
    sizes = ["", "", *(str(entry["size"]) for entry in document["classes"]), "", ""]
    drawn = table(None, [head, sizes, *rows], right=range(1, len(head) - 2), indent=2)
    blocks = [
        header(document),
        f"characters (columns: classes; second line: elements in the class)\n\n{drawn}",
    ]
    blocks.append("\n".join(labelled(label, text) for label, text in notes(document)))
    blocks.append("classes\n\n" + table(_CLASS_HEAD, _class_rows(document), indent=2))
    if matrices:
        blocks.append("matrices (unitary; one for each element)")
        blocks.extend(_matrix_blocks(document))
    blocks.append(footer(document))
    return "\n\n".join(blocks) + "\n"


def irreps_csv(document: Document) -> str:
    """One row for each irrep and class."""
    return csv_text(CSV_COLUMNS, _csv_rows(document))


def irreps_markdown(document: Document) -> str:
    """The character table, the notes and the classes."""
    drawn = markdown_table(*_sized_table(document))
    blocks = ["# Irreducible representations", markdown_header(document), drawn]
    below = (f"{label}: {markdown_escape('; '.join(text.splitlines()))}" for label, text in notes(document))
    classes = markdown_table(_CLASS_HEAD, _class_rows(document))
    return "\n\n".join([*blocks, *below, classes, markdown_footer(document)])


def _table_cells(document: Document) -> tuple[list[str], list[list[str]]]:
    head = ["", "dim", *(entry["label"] for entry in document["classes"]), "type", "transforms like"]
    rows = [
        [
            irrep["label"],
            str(irrep["dimension"]),
            *irrep["characters"],
            irrep["reality"],
            ", ".join(irrep["components"]),
        ]
        for irrep in document["irreps"]
    ]
    return head, rows


def _sized_table(document: Document) -> tuple[list[str], list[list[str]]]:
    """The same with the size of each class inside the head, for formats with a single head line."""
    head, rows = _table_cells(document)
    sized = [f"{entry['label']} ({entry['size']})" for entry in document["classes"]]
    return [*head[:2], *sized, *head[-2:]], rows


def _csv_rows(document: Document) -> Iterator[tuple[object, ...]]:
    group, reduction = document["group"]["oriented"], document.get("reduction")
    for irrep in document["irreps"]:
        common = (group, irrep["label"], irrep["dimension"], irrep["reality"])
        times = reduction["multiplicity"][irrep["label"]] if reduction else None
        beside = (", ".join(irrep["components"]), reduction["property"] if reduction else None, times)
        columns = zip(document["classes"], irrep["characters"], irrep["characters_numeric"], strict=True)
        for entry, exact, (real, imaginary) in columns:
            yield *common, entry["label"], entry["size"], exact, real, imaginary, *beside


def notes(document: Document) -> Iterator[tuple[str, str]]:
    """(label, text) of what stands below the table; a text may have several lines."""
    pairs = document.get("joined")
    if pairs:
        yield "joined", "\n".join(joined_texts(pairs))
    reduction = document.get("reduction")
    if reduction:
        yield "reduction", f"{reduction['property']} = {direct_sum(reduction['multiplicity'], pairs or ())}"
    yield "checks", "\n".join(check_texts(document["checks"]))


def joined_texts(pairs: Sequence[Mapping[str, Any]]) -> Iterator[str]:
    """What each complex pair is together, and its real functions: "E = 1E + 2E: x, y"."""
    for pair in pairs:
        functions = f": {', '.join(pair['components'])}" if pair["components"] else ""
        yield f"{pair['label']} = {' + '.join(pair['members'])}{functions}"


def direct_sum(
    multiplicity: Mapping[str, int], pairs: Sequence[Mapping[str, Any]], name: Callable[[str], str] = str
) -> str:
    """A direct sum such as "2 A1 + E", irreps written by ``name``; those that do not occur are left out.

    The members of a complex pair occur equally often in a real tensor and stand together.

    >>> direct_sum({"A": 4, "1E": 5, "2E": 5}, [{"members": ["1E", "2E"]}])
    '4 A + 5 (1E + 2E)'
    """
    together = {pair["members"][0]: f"({' + '.join(map(name, pair['members']))})" for pair in pairs}
    second = {pair["members"][1] for pair in pairs}
    times = {label: count for label, count in multiplicity.items() if count and label not in second}
    names = {label: together.get(label, name(label)) for label in times}
    return " + ".join(f"{n} {names[label]}" if n > 1 else names[label] for label, n in times.items()) or "0"


def check_texts(checks: Mapping[str, Any]) -> Iterator[str]:
    """Each check as a statement, with the largest deviation where it is numerical."""
    for name, value in checks.items():
        if name == "group_order":
            continue  # stands in the statement on the sum of squared dimensions
        statement = _CHECKS.get(name, name.replace("_", " "))
        if isinstance(value, bool):
            yield statement if value else f"FAILS: {statement}"
        elif isinstance(value, float):
            yield f"{statement} (to {value:.0e})"
        else:
            yield f"{statement} {value}"


def _class_rows(document: Document) -> Iterator[tuple[str, str]]:
    for entry in document["classes"]:
        yield entry["label"], ", ".join(document["elements"][index]["name"] for index in entry["elements"])


def _matrix_blocks(document: Document) -> Iterator[str]:
    for irrep in document["irreps"]:
        lines = [f"{irrep['label']}"]
        for element, matrix in zip(document["elements"], irrep["matrices"], strict=True):
            rows = [[_complex_text(entry) for entry in row] for row in matrix]
            drawn = table(None, rows, right=range(len(rows)), indent=4)
            lines.append(f"  {element['name']}\n{drawn}")
        yield "\n".join(lines)


def _complex_text(entry: Sequence[float] | Any, digits: int = 6) -> str:
    """A complex number given as [real, imaginary], short where it is real.

    >>> _complex_text([1.0, 0.0]), _complex_text([-0.5, 0.8660254])
    ('1', '-0.5+0.866025i')
    """
    real, imaginary = (round(float(part), digits) + 0.0 for part in entry)
    if imaginary == 0:
        return f"{real:g}"
    return f"{real:g}{imaginary:+g}i" if real else f"{imaginary:g}i"
