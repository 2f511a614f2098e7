"""The head and the foot that reports share: group, crystal, axes, tolerance; versions and caution."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from sitesym.reports.layout import labelled, paragraph, vector_text
from sitesym.reports.markup import Document, latex_escape, markdown_escape
from sitesym.reports.provenance import CAUTION, versions_line
from sitesym.reports.reliability_text import reliability_lines

#: Shifts (angstrom) and strains below this are rounding of the file's numbers.
_ROUNDING = 1e-9


def header(document: Document) -> str:
    """What the numbers below stand on."""
    return "\n".join(labelled(label, text) for label, text in header_lines(document))


def footer(document: Document) -> str:
    """Versions and caution."""
    return "\n".join([labelled("versions", versions_line(document["versions"])), "", paragraph(CAUTION)])


def markdown_header(document: Document) -> str:
    """The same as a list."""
    lines = (f"- **{label}** {markdown_escape(_one_line(text))}" for label, text in header_lines(document))
    return "\n".join(lines)


def markdown_footer(document: Document) -> str:
    """Versions and caution."""
    return f"Versions: {versions_line(document['versions'])}\n\n> {CAUTION}\n"


def latex_header(document: Document) -> str:
    """The same as a description list."""
    lines = (rf"\item[{label}] {latex_escape(_one_line(text))}" for label, text in header_lines(document))
    return "\n".join([r"\begin{description}", *lines, r"\end{description}"])


def latex_footer(document: Document) -> str:
    """Versions and caution."""
    return f"Versions: {latex_escape(versions_line(document['versions']))}.\n\n{latex_escape(CAUTION)}\n"


def _one_line(text: str) -> str:
    return "; ".join(" ".join(line.split()) for line in text.splitlines())


def header_lines(document: Document) -> Iterator[tuple[str, str]]:
    """(label, text) of each statement the document has; a text may have several lines."""
    group, crystal, site = document.get("group"), document.get("crystal"), document.get("site")
    if group:
        yield "group", group_text(group)
    if site:
        yield "site", site_text(site)
    if crystal:
        yield from crystal_lines(crystal)
    if document.get("axes"):
        yield "axes", axes_text(document["axes"], bool(crystal))
    elif crystal:
        yield "axes", f"file: {crystal['frame']}"
    if crystal:
        yield "cell", "\n".join(_rows("abc", crystal["lattice"], "angstrom, in the file's Cartesian axes"))
    for remark in document.get("remarks", ()):
        yield "remark", remark


def group_text(group: Mapping[str, Any]) -> str:
    """The oriented symbol, and the class where it differs.

    >>> group_text({"symbol": "3m", "oriented": "31m", "schoenflies": "C3v", "order": 6})
    '31m (class 3m, C3v), order 6'
    """
    oriented, symbol = group["oriented"], group["symbol"]
    names = group["schoenflies"] if oriented == symbol else f"class {symbol}, {group['schoenflies']}"
    system = f", {group['system']}" if group.get("system") else ""
    return f"{oriented} ({names}){system}, order {group['order']}"


def site_text(site: Mapping[str, Any]) -> str:
    """One site, and for which of its atoms the tensors stand: in the others they are turned."""
    letter = f"{site['multiplicity']}{site['wyckoff']}"
    named = f"{site['label']} ({site['species']}), Wyckoff {letter}, site symmetry {site['site_symmetry']}"
    first, *others = site["atoms"]
    atom = f"the tensors are those of atom {first} (numbered from 0 in the file)"
    if not others:
        return f"{named}; {atom}"
    return (
        f"{named}; {atom}; at the other atoms of the orbit they are turned by the operation that leads there"
    )


def crystal_lines(crystal: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    """Formula; space group detected and declared; setting; the tolerance, and what it idealised."""
    name = f"{crystal['formula']}, {crystal['atoms']} atoms"
    origin = ", ".join(text for text in (crystal["source"], crystal["part"]) if text)
    yield "crystal", f"{name}, from {origin}" if origin else name
    declared = crystal["declared_space_group"]
    stated = f"the file declares {declared}" if declared else "the file declares none"
    number, group = crystal["space_group_number"], crystal["point_group_oriented"]
    yield "symmetry", f"{crystal['space_group']} (number {number}), point group {group}; {stated}"
    yield "setting", _setting_text(crystal)
    yield (
        "tolerance",
        f"{crystal['tolerance_angstrom']:g} angstrom; {_idealised_text(crystal['idealisation'])}",
    )
    yield from reliability_lines(crystal)


def _idealised_text(change: Mapping[str, Any]) -> str:
    shift, strain = change["largest_shift_angstrom"], change["largest_strain"]
    if max(shift, strain) < _ROUNDING:
        return "the symmetry is exact in the file"
    operations = change.get("operations", ())
    far = max((operation["displacement_angstrom"] for operation in operations), default=0.0)
    worst = next((o["name"] for o in operations if o["displacement_angstrom"] == far and far > _ROUNDING), "")
    missed = f"; {worst} misses atoms by up to {far:.1e} angstrom" if worst else ""
    moved = f"moving atoms at most {shift:.1e} angstrom and straining the cell by {strain:.1e}"
    return f"made exact by {moved}{missed}"


def _setting_text(crystal: Mapping[str, Any]) -> str:
    """Hall number and symbol, and the way from the file's cell to the conventional one."""
    hall = f"Hall number {crystal['hall_number']} ({crystal['hall_symbol']})"
    matrix, shift = matrix_text(crystal["transformation"]), _numbers(crystal["origin_shift"])
    return f"{hall}; x_conventional = P x_file + p with P = ({matrix}), p = ({shift})"


def matrix_text(rows: Sequence[Sequence[float]]) -> str:
    """A matrix in one line, rows separated by semicolons.

    >>> matrix_text([[1.0, -0.0], [0.5, 1 / 3]])
    '1 0; 0.5 0.333333'
    """
    return "; ".join(map(_numbers, rows))


def _numbers(row: Sequence[float]) -> str:
    return " ".join(f"{round(value, 6) + 0.0:g}" for value in row)


def axes_text(axes: Mapping[str, Any], from_file: bool) -> str:
    """Name, edition and note of the axes, and their directions in the file's (or the symbol's) axes."""
    edition = f" ({axes['edition']})" if axes.get("edition") else ""
    note = f": {axes['note']}" if axes.get("note") else ""
    lines = [f"{axes['name']}{edition}{note}"]
    if axes.get("rotation_from_file") is not None:
        where = "in the file's Cartesian axes" if from_file else "in the lattice axes of the symbol"
        lines.extend(_rows("xyz", axes["rotation_from_file"], where))
    return "\n".join(lines)


def _rows(names: str, matrix: Sequence[Sequence[float]], where: str) -> list[str]:
    rows = [f"{name} = {vector_text(row)}" for name, row in zip(names, matrix, strict=True)]
    return [f"{rows[0]}  {where}", *rows[1:]]
