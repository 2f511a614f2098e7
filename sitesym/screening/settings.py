"""What a screening run was asked to do, with the versions it was done with; both decide every row."""

from __future__ import annotations

import json
from dataclasses import dataclass
from functools import cached_property
from hashlib import blake2b
from math import isfinite
from typing import Any, Final

from sitesym import __version__
from sitesym.choices import ReadingChoices, check_choices, check_finder
from sitesym.errors import UsageError
from sitesym.screening.columns import DEFAULT_PROPERTIES, Column, columns_for
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM

#: Libraries whose version may change a row.
LIBRARIES: Final = ("spglib", "moyopy", "gemmi", "ase", "numpy")


@dataclass(frozen=True)
class Settings:
    """``finder``: spglib, moyo or both. ``ladder``: whether to climb the tolerance ladder and to measure the
    distance from inversion. ``properties``: kinds of tensors whose independent components are counted.

    ``frame`` (of each file that holds several structures, the one with this number, or "last"; None for all),
    ``symmetry_from`` (counts for CIFs alone) and ``distinguish`` as in `sitesym.choices.ReadingChoices`.
    """

    tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM
    finder: str = "spglib"
    ladder: bool = True
    properties: tuple[str, ...] = DEFAULT_PROPERTIES
    frame: str | None = None
    symmetry_from: str | None = None
    distinguish: tuple[str, ...] = ()

    @cached_property
    def columns(self) -> tuple[Column, ...]:
        """The columns of a row, in order."""
        return columns_for(self.properties)

    @cached_property
    def column_names(self) -> tuple[str, ...]:
        """Names of the columns, in order."""
        return tuple(column.name for column in self.columns)

    @property
    def reading(self) -> ReadingChoices:
        """What is chosen on reading a file."""
        return {
            "frame": self.frame,
            "symmetry_from": self.symmetry_from,
            "distinguish": self.distinguish,
        }

    def check(self) -> None:
        """Return when every name means something; else UsageError with what there is."""
        check_finder(self.finder)
        check_choices(self.reading)
        if not set(self.properties) <= set(DEFAULT_PROPERTIES):
            # Loads numpy and most of the package, which workers do at the same time.
            from sitesym.tensors import kind

            for name in self.properties:
                kind(name)
        if not (isfinite(self.tolerance_angstrom) and self.tolerance_angstrom > 0.0):
            raise UsageError(
                "the tolerance is not a length",
                f"{self.tolerance_angstrom}",
                "a number above zero, in angstrom",
                "correct it",
            )

    def document(self) -> dict[str, Any]:
        """Settings and versions as strict JSON."""
        return {
            "tolerance_angstrom": self.tolerance_angstrom,
            "finder": self.finder,
            "ladder": self.ladder,
            "properties": list(self.properties),
            "frame": self.frame,
            "symmetry_from": self.symmetry_from,
            "distinguish": sorted(self.distinguish),
            "versions": versions(),
        }

    def fingerprint(self) -> str:
        """32 hexadecimal digits that differ where settings or versions do."""
        text = json.dumps(self.document(), sort_keys=True)
        return blake2b(text.encode(), digest_size=16).hexdigest()


def versions() -> dict[str, str]:
    """Version of sitesym and of each library that is installed."""
    # Loads the reader of mail headers, which no worker needs.
    from importlib.metadata import PackageNotFoundError, version

    found = {"sitesym": __version__}
    for name in LIBRARIES:
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            continue
    return found
