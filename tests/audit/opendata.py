"""Published calculated tensors kept with the tests, and tensors that obey a group exactly."""

from __future__ import annotations

import json
from functools import lru_cache
from pathlib import Path

import numpy as np
from scipy.spatial.transform import Rotation

from sitesym import CrystalSymmetry, PointGroup, TensorKind, allowed_form, find_symmetry, kind, read_crystal
from sitesym.arrays import FloatArray
from sitesym.audit import Measurement

FOLDER = Path(__file__).parent.parent / "data" / "opendata"


@lru_cache(maxsize=4)
def records(name: str, scratch: Path) -> tuple[tuple[Measurement, CrystalSymmetry], ...]:
    """Records of one set, stated in the axes of their structure file."""
    read = []
    for line in (FOLDER / f"{name}.jsonl").read_text(encoding="utf-8").splitlines():
        record = json.loads(line)
        poscar = scratch / f"{record['id']}.vasp"
        poscar.write_text(record["poscar"], encoding="utf-8")
        values = np.array(record["values"])
        measurement = Measurement(record["id"], kind(record["quantity"]), values, axes="file")
        read.append((measurement, find_symmetry(read_crystal(poscar))))
    return tuple(read)


def obeying(tensor_kind: TensorKind, group: PointGroup, seed: int = 1) -> FloatArray:
    """A full tensor that obeys a group exactly, built from its allowed form with seeded values."""
    form = allowed_form(tensor_kind, group)
    numbers = np.random.default_rng(seed).uniform(1.0, 3.0, len(form.independent))
    return form.full(dict(zip(form.independent, numbers.tolist(), strict=True)))


def random_rotation(seed: int) -> FloatArray:
    """A proper rotation, the same for the same seed."""
    matrix: FloatArray = Rotation.random(random_state=seed).as_matrix()
    return matrix
