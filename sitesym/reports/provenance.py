"""What stands in every document beside its numbers: the versions of the libraries used, and the caution."""

from __future__ import annotations

from collections.abc import Iterable
from importlib.metadata import PackageNotFoundError, version

import sitesym

#: Ends every report.
CAUTION = (
    "Symmetry says which components may be non-zero, not how large they are: before cutting, poling at high "
    "voltage or relying on a crystal where failure can hurt someone, measure, and follow local rules and "
    "licensed practice."
)

#: The libraries whose results can stand in a document.
LIBRARIES = ("numpy", "spglib", "moyopy", "gemmi", "ase")


def library_versions(names: Iterable[str] = LIBRARIES) -> dict[str, str | None]:
    """Versions of sitesym and of the libraries, read without importing them; None where not installed."""
    versions: dict[str, str | None] = {"sitesym": sitesym.__version__}
    for name in names:
        try:
            versions[name] = version(name)
        except PackageNotFoundError:
            versions[name] = None
    return versions


def versions_line(versions: dict[str, str | None]) -> str:
    """One line for a person.

    >>> versions_line({"sitesym": "0.1.0", "numpy": "2.0.0", "ase": None})
    'sitesym 0.1.0, numpy 2.0.0, ase not installed'
    """
    return ", ".join(f"{name} {number or 'not installed'}" for name, number in versions.items())
