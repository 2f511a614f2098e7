"""Samples of the long checks: settings of space groups found and read back, and mutated texts."""

import importlib.util
import subprocess
import sys
from collections import Counter
from importlib.machinery import SourceFileLoader
from pathlib import Path

import numpy as np
import pytest

SCRIPTS = Path(__file__).parents[2] / "scripts"
INTAKE = ("bench_intake", "check_open_structures", "check_settings", "compare_finders", "fuzz_intake")


def script(name):
    loader = SourceFileLoader(f"script_{name}", str(SCRIPTS / name))
    module = importlib.util.module_from_spec(importlib.util.spec_from_loader(loader.name, loader))
    sys.modules[loader.name] = module
    loader.exec_module(module)
    return module


check_settings, fuzz_intake = script("check_settings"), script("fuzz_intake")

#: One in five of the settings, and those whose names leave something open.
SAMPLE = sorted({*range(2, 531, 5), 317, 321, 325, 433, 434, 525, 526})


@pytest.mark.parametrize("part", range(4))
def test_structures_in_sampled_settings_are_found_and_read_back(tmp_path, part):
    for hall_number in SAMPLE[part::4]:
        faults = check_settings.faults(hall_number, 20, tmp_path)
        if faults.get("hm") == check_settings.AMBIGUOUS:
            assert "e" in check_settings.hm_symbol(hall_number)
            del faults["hm"]
        assert faults == {}, hall_number


@pytest.mark.parametrize("name", INTAKE)
def test_a_script_explains_itself(name):
    command = [sys.executable, str(SCRIPTS / name), "--help"]
    run = subprocess.run(command, capture_output=True, text=True, env={"PYTHONPATH": str(SCRIPTS.parent)})
    assert run.returncode == 0, run.stderr
    assert run.stdout.startswith(f"usage: {name} ")
    assert not run.stderr


@pytest.mark.parametrize("file_format", ["cif", "vasp", "extxyz"])
def test_mutated_texts_give_results_or_errors_of_sitesym(tmp_path, file_format):
    outcomes = Counter()
    for seed in range(150):
        text = fuzz_intake.mutated(fuzz_intake.SEEDS[file_format], np.random.default_rng([5, seed]))
        outcomes[fuzz_intake.outcome(text, file_format, tmp_path)] += 1
    assert outcomes["found"] > 10
    assert len(outcomes) > 4
