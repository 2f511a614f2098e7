"""A raw record to a measurement and the crystal it belongs to."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final, cast, get_args

import numpy as np

from sitesym.arrays import FloatArray
from sitesym.audit.crystal_references import CrystalReference
from sitesym.audit.measurement import Layout, Measurement, StatedAxes
from sitesym.audit.numbers_given import array_given, components_given
from sitesym.audit.orders import STANDARD_ORDER, Order, read_order
from sitesym.audit.printed import PrintedNumber
from sitesym.audit.readers import Fields, RawRecord, read_records
from sitesym.audit.units import UNKNOWN
from sitesym.errors import SitesymError, TensorInputError
from sitesym.tensors import TensorKind, contraction, kind

#: Fields a record may have; others are kept as remarks.
FIELDS: Final = (
    "id", "crystal", "quantity", "unit", "order", "axes", "values", "sigma", "source", "conditions", "layout",
    "rounding", "sample", "remark",
)  # fmt: skip
#: Fields whose text is the structure itself, used where ``crystal`` is missing.
_STRUCTURE_FIELDS: Final = ("poscar", "cif")
_LAYOUTS: Final = get_args(Layout)
_LONGEST_REMARK: Final = 60


@dataclass(frozen=True, eq=False)
class Record:
    """One record of a file: what was measured of which crystal, or the error that prevents knowing.

    ``crystal`` is None where the record names none. ``sample`` joins records of one specimen whose crystal
    is only a symbol. ``place`` says where the record stands; ``remarks`` hold fields that were not used.
    """

    id: str
    place: str
    quantity: str = ""
    measurement: Measurement | None = None
    crystal: CrystalReference | None = None
    sample: str = ""
    remarks: tuple[str, ...] = ()
    error: SitesymError | None = None


def records_of_file(path: str | Path) -> Iterator[Record]:
    """Every record of a file, in its order; one that is not understood carries its error.

    Raises what `read_records` raises for a file that cannot be read.
    """
    for number, raw in enumerate(read_records(path), start=1):
        yield understood(raw, f"{Path(path).name}#{number}")


def understood(raw: RawRecord, default_id: str) -> Record:
    """The record behind raw fields. Never raises: an error stands in the record."""
    identity, quantity = _known_word(raw.fields, "id") or default_id, _known_word(raw.fields, "quantity")
    if raw.error is not None:
        return Record(identity, raw.place, quantity, error=raw.error)
    try:
        return Record(
            _word(raw.fields, "id") or default_id,
            raw.place,
            quantity,
            _measurement(identity, raw.fields),
            _crystal(raw),
            _word(raw.fields, "sample"),
            tuple(_remarks(raw.fields)),
        )
    except SitesymError as error:
        return Record(identity, raw.place, quantity, error=error.in_file(raw.place))


def _known_word(fields: Fields, name: str) -> str:
    """The text of a field, or nothing where it is no text: for naming a record that has an error."""
    try:
        return _word(fields, name)
    except TensorInputError:
        return ""


def _measurement(identity: str, fields: Fields) -> Measurement:
    tensor_kind = kind(_required(fields, "quantity"))
    listed, listed_sigma = _components(tensor_kind, fields)
    values, steps = array_given(listed, "values")
    given = listed_sigma if listed_sigma is not None else fields.get("sigma")
    rounding = fields.get("rounding")
    return Measurement(
        identity,
        tensor_kind,
        values,
        order=stated_order(tensor_kind, _word(fields, "order"), values.shape),
        layout=_layout(fields),
        axes=_axes(fields),
        unit=_word(fields, "unit") or UNKNOWN,
        sigma=_one_or_array(given, "sigma"),
        rounding=steps if rounding is None else _one_or_array(rounding, "rounding"),
        source=_word(fields, "source"),
        conditions=_word(fields, "conditions"),
    )


def _components(tensor_kind: TensorKind, fields: Fields) -> tuple[Any, Any]:
    """Values and standard deviations as nested lists, from a matrix or from components listed one by one."""
    if "components" not in fields:
        if fields.get("values") is None:
            raise TensorInputError(
                "the record has no values", "", "a matrix or a full tensor under values", "add the values"
            )
        return fields["values"], None
    components: dict[str, list[tuple[Any, Any]]] = fields["components"]
    doubled = [label for label, listed in components.items() if len(listed) > 1]
    if doubled:
        raise TensorInputError(
            "a component is listed more than once",
            ", ".join(doubled),
            "each once",
            "give another id or delete one",
        )
    values = {label: listed[0][0] for label, listed in components.items()}
    sigmas = {label: listed[0][1] for label, listed in components.items() if listed[0][1] is not None}
    nested = components_given(tensor_kind, values, "values")
    return nested, components_given(tensor_kind, sigmas, "sigma") if sigmas else None


def _one_or_array(value: Any, name: str) -> float | FloatArray | None:
    if value is None or (isinstance(value, str) and value.strip().lower() in ("", "none", UNKNOWN)):
        return None
    array, _ = array_given(value, name)
    return float(array) if array.shape == () else array


def stated_order(tensor_kind: TensorKind, text: str, shape: tuple[int, ...]) -> Order | None:
    """The order a text states for an array of a shape; None where one matters and none is stated.

    Raises TensorInputError for a text that is no order.
    """
    if text and text.lower() != UNKNOWN:
        return read_order(text)
    contracted = 6 in contraction(tensor_kind).blocks and shape != (3,) * tensor_kind.rank
    return None if contracted else STANDARD_ORDER


def _layout(fields: Fields) -> Layout | None:
    text = _word(fields, "layout")
    if not text or text == UNKNOWN:
        return None
    if text not in _LAYOUTS:
        raise TensorInputError(
            "the layout of the array has no such name",
            repr(text),
            f"one of {', '.join(_LAYOUTS)}",
            "name one of these",
        )
    return cast(Layout, text)


def _axes(fields: Fields) -> StatedAxes:
    """A name, or a proper orthogonal matrix: rounded directions are made exact."""
    value = fields.get("axes")
    if value is None or (isinstance(value, str) and not value.lstrip().startswith("[")):
        return str(value).strip().lower() if value else UNKNOWN
    return proper_axes(array_given(value, "axes")[0])


def proper_axes(matrix: FloatArray) -> FloatArray:
    """Directions (3, 3), rows of any length, as a proper orthogonal matrix. Raises TensorInputError."""
    lengths = np.linalg.norm(matrix, axis=1) if matrix.shape == (3, 3) else np.zeros(3)
    if not np.isfinite(matrix).all() or not lengths.all():
        raise _bad_axes(f"shape {matrix.shape}" if matrix.shape != (3, 3) else str(matrix.tolist()))
    rows = matrix / lengths[:, None]
    if np.abs(rows @ rows.T - np.eye(3)).max() > 1e-3 or np.linalg.det(rows) < 0.0:
        raise _bad_axes(str(matrix.tolist()))
    left, _, right = np.linalg.svd(rows)
    return np.asarray(left @ right, dtype=np.float64)


def _bad_axes(value: str) -> TensorInputError:
    return TensorInputError(
        "the axes are not a right-handed set of orthogonal directions",
        value,
        "a name, or 3x3 numbers whose rows are the tensor's x, y, z in the axes of the structure file",
        "correct the matrix, or leave it out: the axes then count as unknown",
    )


def _crystal(raw: RawRecord) -> CrystalReference | None:
    text = _word(raw.fields, "crystal")
    if text and text.lower() != UNKNOWN:
        return CrystalReference(text, "" if "\n" in text else str(raw.folder))
    for field in _STRUCTURE_FIELDS:
        structure = raw.fields.get(field)
        if isinstance(structure, str) and structure.strip():
            return CrystalReference(structure if "\n" in structure else structure + "\n")
    return None


def _required(fields: Fields, name: str) -> str:
    text = _word(fields, name)
    if not text:
        raise TensorInputError(
            f"the record does not say its {name}", "", f"a text under {name}", f"add the field {name}"
        )
    return text


def _word(fields: Fields, name: str) -> str:
    """A field that is a text; a number keeps its printed form; empty where missing or null.

    Raises TensorInputError for a list or a mapping.
    """
    value = fields.get(name)
    if value is None:
        return ""
    if isinstance(value, PrintedNumber):
        return value.text
    if isinstance(value, str):
        return value if "\n" in value else value.strip()
    if name == "order" and isinstance(value, list):
        return " ".join(item.text if isinstance(item, PrintedNumber) else str(item) for item in value)
    raise TensorInputError(
        f"the field {name} is not a text",
        f"{type(value).__name__}: {str(value)[:40]}",
        "a text",
        "correct the field",
    )


def _remarks(fields: Fields) -> Iterator[str]:
    if _word(fields, "remark"):
        yield _word(fields, "remark")
    used = {*FIELDS, "components"} | (set() if fields.get("crystal") else set(_STRUCTURE_FIELDS))
    unused = [f"{name} {_shown(value)}" for name, value in fields.items() if name not in used]
    if unused:
        yield f"fields not used: {'; '.join(unused)}"


def _shown(value: Any) -> str:
    """A value on one line, cut where it is long."""
    text = " ".join((value.text if isinstance(value, PrintedNumber) else str(value)).split())
    return text if len(text) <= _LONGEST_REMARK else text[:_LONGEST_REMARK] + "..."
