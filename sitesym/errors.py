"""Errors of sitesym: one root, and below it one class for each thing that can be wrong.

    SitesymError
    ├── UsageError               a name or an option that does not exist
    │   └── AxesError
    ├── ReadingError             a file that cannot be turned into a crystal
    │   ├── UnknownFormatError
    │   ├── FileTooLargeError
    │   ├── BrokenSourceError
    │   ├── UnsafePathError
    │   ├── EmptyStructureError
    │   ├── CountMismatchError
    │   ├── NotANumberError
    │   ├── InfiniteValueError
    │   ├── SingularCellError
    │   ├── OverlappingAtomsError
    │   ├── OccupancyError
    │   ├── NotPeriodicError
    │   └── SpaceGroupStatementError
    ├── SymmetryError            a set of operations, or a crystal, whose symmetry cannot be settled
    │   ├── NotAGroupError
    │   └── SymmetryNotFoundError
    ├── TensorInputError         an index symmetry, a kind or an array of values that is not understood
    ├── ScreeningError           worker processes that cannot do their work
    │   ├── CrashError
    │   ├── TooSlowError
    │   └── TooMuchMemoryError
    └── StoreError               a store of results that cannot be opened, read or written

Every error carries what happened, the offending value, the rule it broke and the next step. The constructor
arguments are the exception's ``args``, so that an error survives pickling between processes.
"""

from __future__ import annotations

from typing import ClassVar


class SitesymError(Exception):
    """Root of all errors raised on purpose.

    Parameters are texts: ``what`` happened, the offending ``value``, the ``rule`` that was broken, the
    ``next_step`` for the reader, and the ``file`` concerned (empty where there is none).
    """

    code: ClassVar[str] = "error"

    def __init__(
        self, what: str, value: str = "", rule: str = "", next_step: str = "", file: str = ""
    ) -> None:
        super().__init__(what, value, rule, next_step, file)
        self.what = what
        self.value = value
        self.rule = rule
        self.next_step = next_step
        self.file = file

    def in_file(self, file: str) -> SitesymError:
        """The same error with the file it concerns; a file already named is kept."""
        return type(self)(self.what, self.value, self.rule, self.next_step, self.file or file)

    def __str__(self) -> str:
        parts = [f"{self.file}: {self.what}" if self.file else self.what]
        labelled = (("value", self.value), ("rule", self.rule), ("next step", self.next_step))
        parts.extend(f"{label}: {text}" for label, text in labelled if text)
        return "\n  ".join(parts)


class UsageError(SitesymError):
    """A name, option or combination of options that does not exist."""

    code = "usage"


class AxesError(UsageError):
    """A matrix of axes that is not a right-handed set of orthogonal directions."""

    code = "axes"


class ReadingError(SitesymError):
    """A file that cannot be turned into a crystal."""

    code = "unreadable"


class UnknownFormatError(ReadingError):
    """A file whose format is not known, or that does not say what it must (a POSCAR without symbols)."""

    code = "unknown-format"


class BrokenSourceError(ReadingError):
    """A file, an archive or a database that cannot be read to its end; what lies beyond is not known."""


class FileTooLargeError(ReadingError):
    """A file larger than the limit, as it is or once decompressed."""

    code = "too-large"


class UnsafePathError(ReadingError):
    """A member of an archive whose path leaves the archive, or that is a link."""

    code = "unsafe-path"


class EmptyStructureError(ReadingError):
    """A structure without atoms."""

    code = "empty"


class CountMismatchError(ReadingError):
    """Positions, species or occupancies that do not belong together in number."""

    code = "count-mismatch"


class NotANumberError(ReadingError):
    """A coordinate or a cell entry that is not a number."""

    code = "not-a-number"


class InfiniteValueError(ReadingError):
    """A coordinate or a cell entry that is infinite."""

    code = "infinite"


class SingularCellError(ReadingError):
    """Cell vectors that span no volume, or an absurd one."""

    code = "singular-cell"


class OverlappingAtomsError(ReadingError):
    """Two atoms closer than any two atoms can be."""

    code = "overlap"


class OccupancyError(ReadingError):
    """An occupancy that is negative, or more than one on a site."""

    code = "occupancy"


class NotPeriodicError(ReadingError):
    """A structure that is not periodic in all three directions."""

    code = "not-periodic"


class SpaceGroupStatementError(ReadingError):
    """A file that states its space group not at all, in more than one way to read it, or against itself."""

    code = "space-group-statement"


class SymmetryError(SitesymError):
    """Operations, or a crystal, whose symmetry cannot be settled."""

    code = "symmetry"


class NotAGroupError(SymmetryError):
    """A set of matrices that is not closed under multiplication."""

    code = "not-a-group"


class SymmetryNotFoundError(SymmetryError):
    """The symmetry finder gave no answer for a valid structure."""

    code = "symmetry-not-found"


class TensorInputError(SitesymError):
    """An index symmetry, a tensor kind or an array of values that is not understood."""

    code = "tensor-input"


class ScreeningError(SitesymError):
    """Worker processes that cannot do their work."""

    code = "screening"


class CrashError(ScreeningError):
    """A structure that ended the process working on it."""

    code = "crashed"


class TooSlowError(ScreeningError):
    """A structure that took more time than one structure may."""

    code = "timed-out"


class TooMuchMemoryError(ScreeningError):
    """A structure that took more memory than one structure may."""

    code = "out-of-memory"


class StoreError(SitesymError):
    """A store of results that cannot be opened, read or written."""

    code = "store"
