"""Every fault of a structure has its own error and code, before any symmetry finder sees it."""

import numpy as np
import pytest

from sitesym.crystals import Crystal, Species
from sitesym.crystals.validation import closest_pair, plane_spacings
from sitesym.errors import ReadingError

CELL = np.eye(3) * 4.0
TWO = [[0.0, 0.0, 0.0], [0.5, 0.5, 0.5]]


@pytest.mark.parametrize(
    ("lattice", "positions", "numbers", "code"),
    [
        (CELL, [[0, 0, np.nan], TWO[1]], [11, 17], "not-a-number"),
        (CELL, [[0, 0, np.inf], TWO[1]], [11, 17], "infinite"),
        (np.diag([np.nan, 4.0, 4.0]), TWO, [11, 17], "not-a-number"),
        (np.diag([4.0, 4.0, np.inf]), TWO, [11, 17], "infinite"),
        (np.zeros((3, 3)), TWO, [11, 17], "singular-cell"),
        ([[4, 0, 0], [0, 4, 0], [4, 4, 0]], TWO, [11, 17], "singular-cell"),
        (CELL * 1e5, TWO, [11, 17], "singular-cell"),
        (CELL * [[1], [1], [0.01]], TWO, [11, 17], "singular-cell"),
        (CELL, TWO, [11], "count-mismatch"),
        (CELL[:2], TWO, [11, 17], "count-mismatch"),
        (CELL, [[0, 0], [1, 1]], [11, 17], "count-mismatch"),
        (CELL, [[0, 0, 0], [1, 1]], [11, 17], "count-mismatch"),
        (CELL, np.zeros((0, 3)), [], "empty"),
        (CELL, [[0, 0, 0], [1e-9, 0, 0]], [11, 17], "overlap"),
        (CELL, [[0, 0, 0.001], [0, 0, 0.999]], [11, 17], "overlap"),
        (CELL, [[0.001, 0.999, 0.001], [-0.001, 2.001, 0.999]], [11, 11], "overlap"),
        (CELL, TWO, [11, 0], "unreadable"),
        (CELL, TWO, [11, 119], "unreadable"),
    ],
)
def test_each_fault_has_its_code(lattice, positions, numbers, code):
    with pytest.raises(ReadingError) as caught:
        Crystal.from_tuple((lattice, positions, numbers))
    assert caught.value.code == code
    assert caught.value.value
    assert caught.value.rule
    assert caught.value.next_step


@pytest.mark.parametrize("occupancy", [0.0, -0.2, 1.2, float("nan")])
def test_an_occupancy_that_cannot_be_is_refused(occupancy):
    with pytest.raises(ReadingError) as caught:
        Species.mixed({"Fe": occupancy})
    assert caught.value.code == "occupancy"


def test_an_overfull_mixture_is_refused_and_rounding_is_not():
    assert Species.mixed({"Al": 0.333, "Si": 0.677}).parts == (("Al", 0.333), ("Si", 0.677))
    with pytest.raises(ReadingError) as caught:
        Species.mixed({"Al": 0.6, "Si": 0.6})
    assert caught.value.code == "occupancy"


def test_labels_must_belong_to_atoms():
    with pytest.raises(ReadingError) as caught:
        Crystal(CELL, np.array(TWO), (Species.pure("Na"), Species.pure("Cl")), ("Na1",))
    assert caught.value.code == "count-mismatch"


def test_closest_pair_agrees_with_all_pairs_over_all_neighbouring_images():
    rng = np.random.default_rng(7)
    shifts = np.stack(np.meshgrid(*[np.arange(-2, 3)] * 3, indexing="ij"), axis=-1).reshape(-1, 3)
    found = 0
    for _ in range(40):
        lattice = np.eye(3) * 3.0 + rng.normal(scale=0.7, size=(3, 3))
        positions = rng.uniform(-2, 2, size=(12, 3))
        limit = min(0.6, 0.45 * float(plane_spacings(lattice).min()))
        wrapped = positions % 1.0
        vectors = wrapped[:, None, None, :] - wrapped[None, :, None, :] + shifts
        distances = np.linalg.norm(vectors @ lattice, axis=-1)
        distances[np.arange(12), np.arange(12)] = np.inf
        pair = closest_pair(lattice, positions, limit)
        if distances.min() < limit:
            found += 1
            assert pair is not None
            assert pair[2] == pytest.approx(distances.min())
        else:
            assert pair is None
    assert 5 < found < 40
