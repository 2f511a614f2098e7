"""Damaged sources give units and errors, never an exception, and never a unit twice."""

from __future__ import annotations

import io
import json
import tarfile
import warnings
import zipfile
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest
from ase.build import bulk
from ase.db import connect
from ase.io import write

from sitesym.screening.sources import work_items


def make_tar(path: Path, mode: str) -> None:
    with tarfile.open(path, mode, format=tarfile.PAX_FORMAT) as archive:  # type: ignore[call-overload]
        for name in ("a.cif", "ä" * 60 + "/" + "b" * 120 + ".cif", "c.vasp"):
            member = tarfile.TarInfo(name)
            member.size, member.mtime = 40, 1.5
            archive.addfile(member, io.BytesIO(b"x" * 40))


def make_zip(path: Path) -> None:
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        for name in ("a.cif", "ä.cif", "d/c.vasp"):
            archive.writestr(name, "structure " * 20)


def make_lines(path: Path) -> None:
    path.write_text("\n".join(json.dumps({"id": f"a{n}", "cif": "data_x\n"}) for n in range(4)))


def make_database(path: Path) -> None:
    with connect(path) as database:
        for symbol in ("Fe", "Cu", "Al"):
            database.write(bulk(symbol))


MAKERS: dict[str, Callable[[Path], None]] = {
    "s.tar": lambda path: make_tar(path, "w"),
    "s.tar.gz": lambda path: make_tar(path, "w:gz"),
    "s.zip": make_zip,
    "s.jsonl": make_lines,
    "s.db": make_database,
    "s.extxyz": lambda path: write(path, [bulk("Fe"), bulk("Cu"), bulk("Al")]),
}


@pytest.mark.parametrize("name", MAKERS)
def test_no_damage_raises_and_no_unit_comes_twice(tmp_path: Path, name: str) -> None:
    path = tmp_path / name
    MAKERS[name](path)
    whole = path.read_bytes()
    rng = np.random.default_rng(0)
    for trial in range(25 if name == "s.db" else 120):
        raw = np.frombuffer(whole, dtype=np.uint8).copy()
        # Blocks of zeros at the end of an archive make most of it: half of the trials keep to the start.
        places = rng.integers(len(raw) // (1 + trial % 2), size=1 + trial % 5)
        raw[places] = rng.integers(256, size=len(places), dtype=np.uint8)
        path.write_bytes(raw[: rng.integers(1, len(raw))].tobytes() if trial % 7 == 0 else raw.tobytes())
        with warnings.catch_warnings():
            warnings.simplefilter("ignore")
            items = list(work_items([path]))
        assert len({(item.source, item.frame) for item in items}) == len(items)
        for item in items:
            item.identity.encode("utf-8")
            assert (item.error is None) == (item.kind != "error")
