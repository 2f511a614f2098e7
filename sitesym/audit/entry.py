"""One call from an array and a crystal to an answer: `sitesym.audit`."""

from __future__ import annotations

import os
from collections.abc import Sequence
from typing import TypeAlias

import numpy as np
from numpy.typing import ArrayLike

from sitesym.arrays import FloatArray
from sitesym.audit.auditing import DEFAULT_NOISE, audit
from sitesym.audit.crystal_references import CrystalReference, CrystalShelf
from sitesym.audit.frames import Subject
from sitesym.audit.measurement import Measurement
from sitesym.audit.records import proper_axes, stated_order
from sitesym.audit.result import AuditResult
from sitesym.errors import TensorInputError, UsageError
from sitesym.tensors import TensorKind, kind
from sitesym.tolerances import DEFAULT_TOLERANCE_ANGSTROM

#: What a call takes as the crystal.
CrystalLike: TypeAlias = Subject | str | os.PathLike[str]


def audit_tensor(
    tensor: Measurement | ArrayLike,
    crystal: CrystalLike,
    quantity: str | TensorKind | None = None,
    *,
    axes: str | ArrayLike = "unknown",
    order: str | Sequence[str] = "unknown",
    unit: str = "unknown",
    sigma: ArrayLike | None = None,
    noise: float = DEFAULT_NOISE,
    explain: bool = True,
    tolerance_angstrom: float = DEFAULT_TOLERANCE_ANGSTROM,
) -> AuditResult:
    """Whether a tensor obeys its crystal, and if not, why not.

    >>> import sitesym
    >>> d = [[2.31, -2.31, 0, -0.727, 0, 0], [0, 0, 0, 0, 0.727, -4.62], [0] * 6]
    >>> order = "11 22 33 23 13 12"
    >>> sitesym.audit(d, "32", "piezoelectric-strain", axes="ieee", order=order, unit="pC/N").verdict
    'consistent'

    ``tensor``: a `Measurement`, or the contracted matrix or full tensor of a ``quantity`` (a kind or its
    name). ``crystal``: a `Crystal`, a `CrystalSymmetry`, a `PointGroup`, the path or the text of a structure
    file, or a point-group symbol. ``axes``: a name of axes, or a (3, 3) matrix with the tensor's axes as rows
    in the file's. ``order``: of the six pairs. Axes and orders that are unknown are searched for.
    ``sigma``: standard uncertainty, one number or one an entry. The keywords that describe the array go with
    an array only.

    Raises TensorInputError for an array, order or axes that are not understood, UsageError for a missing
    quantity, ReadingError or SymmetryError for the crystal.
    """
    subject = _subject(crystal, tolerance_angstrom)
    if isinstance(tensor, Measurement):
        return audit(tensor, subject, noise, explain)
    if quantity is None:
        raise UsageError(
            "an array does not say what it measures",
            f"shape {np.shape(tensor)}",
            "a quantity goes with an array",
            "name it, for example quantity='piezoelectric-stress'",
        )
    values = _numbers(tensor, "the tensor")
    tensor_kind = kind(quantity) if isinstance(quantity, str) else quantity
    measurement = Measurement(
        "tensor",
        tensor_kind,
        values,
        order=stated_order(
            tensor_kind, order if isinstance(order, str) else " ".join(order or ()), values.shape
        ),
        axes=axes.strip().lower() if isinstance(axes, str) else proper_axes(_numbers(axes, "the axes")),
        unit=unit,
        sigma=None if sigma is None else _numbers(sigma, "sigma"),
    )
    return audit(measurement, subject, noise, explain)


def _numbers(value: ArrayLike, name: str) -> FloatArray:
    """Real numbers as an array. Raises TensorInputError for anything else."""
    try:
        array = np.asarray(value)
        if not np.iscomplexobj(array):
            return np.asarray(array, dtype=np.float64)
    except (TypeError, ValueError):
        pass
    raise TensorInputError(
        f"{name} is no array of real numbers",
        str(value)[:60],
        "rows of equal length, every entry a real number",
        "give numbers, zeros too",
    )


def _subject(crystal: CrystalLike, tolerance_angstrom: float) -> Subject:
    if isinstance(crystal, str | os.PathLike):
        return CrystalShelf(tolerance_angstrom).host(CrystalReference(os.fspath(crystal)))
    return crystal
