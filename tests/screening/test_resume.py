"""A run that is killed goes on where it was: a sample of the long check in scripts/check_resume."""

from __future__ import annotations

import importlib.util
from importlib.machinery import SourceFileLoader
from pathlib import Path
from types import ModuleType

import pytest

from sitesym.screening import Screening, Settings, Store, Task
from sitesym.screening.pool import Pool
from sitesym.screening.sources import work_items

SCRIPTS = Path(__file__).parents[2] / "scripts"
SETTINGS = Settings(ladder=False, finder="moyo")


@pytest.fixture(scope="module")
def script() -> ModuleType:
    """The script as a module."""
    loader = SourceFileLoader("check_resume", str(SCRIPTS / "check_resume"))
    spec = importlib.util.spec_from_loader(loader.name, loader)
    assert spec is not None
    module = importlib.util.module_from_spec(spec)
    loader.exec_module(module)
    return module


def test_a_run_killed_at_random_moments_gives_the_same_table(script: ModuleType, tmp_path: Path) -> None:
    hits, rows, differing = script.check(tmp_path, structures=200, kills=2, seed=3, workers=2)
    assert (rows, differing) == (200, 0)
    assert hits >= 1


def test_only_what_changed_is_done_again(script: ModuleType, tmp_path: Path) -> None:
    lines, path = tmp_path / "lines.jsonl", tmp_path / "store"
    script.write_structures(lines, 40, seed=1)
    counts = []
    for _ in range(3):
        with (
            Store.writing(path, SETTINGS) as store,
            Screening(Task(SETTINGS, 60.0, 1000.0, hashed=True), lambda task: Pool(task, 1)) as run,
        ):
            written = [row["id"] for row in run.into(store, work_items([lines]))]
        counts.append((len(written), run.already_done))
        changed = lines.read_text(encoding="utf-8").replace("Na ", "K ").replace('generated 7"', 'other 7"')
        different = sum(
            1
            for before, after in zip(lines.read_text("utf-8").splitlines(), changed.splitlines(), strict=True)
            if before != after
        )
        lines.write_text(changed, encoding="utf-8")
        counts.append((different, 40 - different))
    assert counts[0] == (40, 0)
    assert counts[2] == counts[1]
    assert counts[4] == counts[3] == (0, 40)
    with Store.reading(path) as store:
        assert len(list(store.rows())) == 40
