"""The head and the foot that reports share: group, crystal, axes, tolerance; versions and caution."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Any

from sitesym.reports.layout import labelled, paragraph, vector_text
from sitesym.reports.markup import Document
from sitesym.reports.provenance import CAUTION, versions_line


def header(document: Document) -> str:
    """What the numbers below stand on."""
    return "\n".join(labelled(label, text) for label, text in header_lines(document))


def footer(document: Document) -> str:
    """Versions and caution."""
    return "\n".join([labelled("versions", versions_line(document["versions"])), "", paragraph(CAUTION)])


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
        yield "axes", axes_text(document["axes"], crystal)
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
    """One site in a line."""
    letter = f"{site['multiplicity']}{site['wyckoff']}"
    return f"{site['label']} ({site['species']}), Wyckoff {letter}, site symmetry {site['site_symmetry']}"


def crystal_lines(crystal: Mapping[str, Any]) -> Iterator[tuple[str, str]]:
    """Formula, space group and the tolerance both were found with."""
    name = f"{crystal['formula']}, {crystal['atoms']} atoms"
    yield "crystal", f"{name}, from {crystal['source']}" if crystal.get("source") else name
    space_group = f"{crystal['space_group']} (number {crystal['space_group_number']}"
    yield (
        "symmetry",
        f"{space_group}, Hall number {crystal['hall_number']}), point group {crystal['point_group']}",
    )
    yield "tolerance", f"{crystal['tolerance_angstrom']:g} angstrom"


def axes_text(axes: Mapping[str, Any], crystal: Mapping[str, Any] | None = None) -> str:
    """Name and edition of the axes, their directions, and the cell in the file's axes."""
    lines = [f"{axes['name']} ({axes['edition']})" if axes.get("edition") else axes["name"]]
    rotation = axes.get("rotation_from_file")
    if rotation is not None:
        where = "in the file's Cartesian axes" if crystal else "in the axes of the group's symbol"
        lines.extend(_rows("xyz", rotation, where))
    if crystal and crystal.get("lattice"):
        lines.extend(_rows("abc", crystal["lattice"], "angstrom, in the file's Cartesian axes"))
    return "\n".join(lines)


def _rows(names: str, matrix: Sequence[Sequence[float]], where: str) -> list[str]:
    rows = [f"{name} = {vector_text(row)}" for name, row in zip(names, matrix, strict=True)]
    return [f"{rows[0]}  {where}", *rows[1:]]
