"""Index symmetry of an array as given, before anything else: averaging would hide it."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from sitesym.arrays import FloatArray, IntArray
from sitesym.audit.arrayspace import array_space
from sitesym.audit.layouts import contracted, full_names
from sitesym.audit.measurement import Layout, Measurement
from sitesym.audit.orders import Order
from sitesym.audit.result import EntryPair, IndexFinding

#: A difference of two entries within this many standard uncertainties of it is no contradiction.
_DEVIATIONS = 4.0
#: Differences below this fraction of the largest entry are rounding of the computer's numbers.
_NUMERICAL = 1e-9


def check_index_symmetry(
    measurement: Measurement, layout: Layout, order: Order, noise: float
) -> IndexFinding:
    """Entries that index symmetry makes equal or opposite, compared in the array as given.

    Two entries may differ by four standard uncertainties of their difference and one unit of their last
    digit. Where no uncertainty is stated, ``noise`` times the length of the tensor is taken to be spread
    evenly over its entries.
    """
    values, component, sign, factors, names = _comparable(measurement, layout, order)
    tensor = values / factors
    uncertainty, step = (
        _alike(measurement, name, layout, order, values.shape) / factors for name in ("sigma", "rounding")
    )
    scale = float(np.abs(tensor).max(initial=0.0))
    length = float(np.linalg.norm(tensor))
    if measurement.sigma is None:
        uncertainty = np.full(len(tensor), noise * length / np.sqrt(len(tensor)))
    pairs: list[EntryPair] = []
    largest, applies, breaking = 0.0, False, 0.0
    for members in _groups(component.tobytes(), sign.tobytes()):
        first = int(members[0])
        applies = True
        signed = tensor[members] * sign[members]
        breaking += float(((signed - signed.mean()) ** 2).sum())
        if sign[first] == 0:
            breaking += float(tensor[first] ** 2)
        for second in members[1:] if sign[first] else members:
            expected = tensor[first] * sign[first] * sign[second]
            difference = abs(float(tensor[second] - expected))
            allowed = _DEVIATIONS * float(np.hypot(uncertainty[first], uncertainty[second]))
            allowed = max(allowed, _NUMERICAL * scale) + float(max(step[first], step[second]))
            largest = max(largest, difference * float(factors[second]))
            if difference > allowed:
                pairs.append(
                    EntryPair(
                        names[first],
                        names[second],
                        float(values[first]),
                        float(values[second]),
                        allowed * float(factors[second]),
                    )
                )
    relative = float(np.sqrt(breaking)) / length if length else 0.0
    return IndexFinding(applies, not pairs, largest, relative, tuple(pairs))


def _comparable(
    measurement: Measurement, layout: Layout, order: Order
) -> tuple[FloatArray, IntArray, IntArray, FloatArray, tuple[str, ...]]:
    """Entries (m,), with the component and sign that index symmetry gives each, their factors and names."""
    kind = measurement.kind
    space = array_space(kind)
    component, sign = kind.symmetry.full_indices
    if layout.startswith("full"):
        values = measurement.values
        if layout == "full-last-first":
            shift = 2 if space.blocks[-1] == 6 else 1
            values = np.moveaxis(values, range(shift), range(kind.rank - shift, kind.rank))
        return values.reshape(-1), component, sign, np.ones(3**kind.rank), full_names(kind)
    flat = contracted(kind, measurement.values, layout, order).reshape(-1)
    places = space.full_places
    return flat, component[places], sign[places], space.factors, space.names


def _alike(
    measurement: Measurement, name: str, layout: Layout, order: Order, shape: tuple[int, ...]
) -> FloatArray:
    value = getattr(measurement, name)
    if value is None:
        return np.zeros(shape)
    full = np.broadcast_to(np.asarray(value, dtype=np.float64), measurement.values.shape)
    if layout.startswith("full"):
        return full.reshape(-1)
    return contracted(measurement.kind, full, layout, order).reshape(-1)


@lru_cache(maxsize=256)
def _groups(component_bytes: bytes, sign_bytes: bytes) -> tuple[IntArray, ...]:
    """Entries that belong to one component, where there is more than one, and entries that must vanish."""
    component = np.frombuffer(component_bytes, dtype=np.int64)
    sign = np.frombuffer(sign_bytes, dtype=np.int64)
    regular = np.flatnonzero(sign)
    groups = [regular[component[regular] == c] for c in np.unique(component[regular])]
    forced = [np.array([place]) for place in np.flatnonzero(sign == 0)]
    return (*(group for group in groups if len(group) > 1), *forced)
