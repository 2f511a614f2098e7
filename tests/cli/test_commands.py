"""`sitesym sites`, `irreps` and `screen`, and what all commands do with files and errors."""

from __future__ import annotations

import csv
import io
import json
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from click.testing import Result

from sitesym.reports.provenance import CAUTION
from sitesym.reports.render import FORMATS
from sitesym.screening import COLUMNS

Run = Callable[..., Result]
Call = Callable[..., dict[str, Any]]


def test_the_sites_of_quartz(document: Call, quartz: str) -> None:
    """Silicon on 3a with .2., oxygen on 6c: International Tables A, space group 152, from memory."""
    answer = document("sites", quartz)
    assert answer["schema"] == "sitesym.sites/1"
    sites = [(s["label"], s["multiplicity"], s["wyckoff"], s["site_symmetry"]) for s in answer["sites"]]
    assert sites == [("Si1", 3, "a", ".2."), ("O1", 6, "c", "1")]


def test_irreps_multiply_like_the_group_in_the_document(document: Call) -> None:
    """The matrices of JSON alone: products of elements found by their Cartesian matrices."""
    answer = document("irreps", "--group", "23")
    cartesian = np.array([element["matrix"] for element in answer["elements"]])
    for irrep in answer["irreps"]:
        matrices = np.array(irrep["matrices"]) @ np.array([1.0, 1.0j])
        for g, left in enumerate(cartesian):
            for h, right in enumerate(cartesian):
                product = int(np.argmin(np.abs(cartesian - left @ right).max(axis=(1, 2))))
                assert np.allclose(matrices[g] @ matrices[h], matrices[product], atol=1e-12)


def test_a_reduction_counts_every_component_once(document: Call) -> None:
    answer = document("irreps", "--group", "-43m", "--reduce", "elastic-stiffness")
    multiplicity = answer["reduction"]["multiplicity"]
    dimensions = {irrep["label"]: irrep["dimension"] for irrep in answer["irreps"]}
    assert multiplicity["A1"] == 3
    assert sum(times * dimensions[label] for label, times in multiplicity.items()) == 21


def test_any_index_symmetry_is_reduced_by_its_jahn_symbol(document: Call, run: Run) -> None:
    # common practice: strain of -43m is A1 + E + T2
    answer = document("irreps", "--group", "-43m", "--reduce", "[V2]")["reduction"]
    assert {label: times for label, times in answer["multiplicity"].items() if times} == {
        "A1": 1,
        "E": 1,
        "T2": 1,
    }
    refused = run("irreps", "--group", "-43m", "--reduce", "[V2")
    assert refused.exit_code == 2
    assert "not closed" in refused.stderr


@pytest.mark.parametrize("command", ["sites", "allowed", "irreps"])
def test_an_average_structure_is_called_one_by_every_command(
    document: Call, run: Run, structures: str, command: str
) -> None:
    file = str(Path(structures) / "perovskite_BaSrTiO3.cif")
    assert any("average structure" in remark for remark in document(command, file)["remarks"])
    assert "average structure" in run(command, file).output


def test_matrices_appear_in_text_on_request(run: Run) -> None:
    assert "0.866025i" not in run("irreps", "--group", "3").output
    assert "-0.5+0.866025i" in run("irreps", "--group", "3", "--matrices").output


@pytest.mark.parametrize("format_name", ["csv", "markdown", "latex"])
def test_a_format_without_matrices_refuses_to_leave_them_out_silently(run: Run, format_name: str) -> None:
    refused = run("irreps", "--group", "3", "--matrices", "--format", format_name)
    assert refused.exit_code == 2
    assert "text and json" in refused.stderr


def test_screening_the_demo_structures(document: Call, structures: str) -> None:
    rows = document("screen", structures)["rows"]
    broken = [row for row in rows if row["status"] == "error"]
    assert [row["id"] for row in broken] == ["broken/overlapping_atoms.vasp"]
    assert broken[0]["error_code"] == "overlap"
    assert len({row["crystal_system"] for row in rows if row["crystal_system"]}) == 7
    assert [row["id"] for row in rows] == sorted(row["id"] for row in rows)


def test_screening_writes_every_column_as_csv(run: Run, structures: str, tmp_path: Path) -> None:
    target = tmp_path / "table.csv"
    assert run("screen", structures, "--format", "csv", "--output", str(target)).exit_code == 0
    rows = list(csv.DictReader(io.StringIO(target.read_text(encoding="utf-8"))))
    assert tuple(rows[0]) == COLUMNS
    assert next(row for row in rows if row["id"] == "zincblende_GaAs_1x1x2.vasp")["point_group"] == "-43m"


@pytest.mark.parametrize("format_name", FORMATS)
@pytest.mark.parametrize("command", ["sites", "allowed", "irreps", "screen", "conventions"])
def test_every_command_writes_every_format(
    run: Run, quartz: str, structures: str, command: str, format_name: str
) -> None:
    argument = {"screen": [structures], "conventions": []}.get(command, [quartz])
    result = run(command, *argument, "--format", format_name)
    assert result.exit_code == 0, result.output
    if format_name == "csv":
        assert len({len(row) for row in csv.reader(io.StringIO(result.stdout))}) == 1
    elif format_name == "json":
        assert json.loads(result.output)["schema"] == f"sitesym.{command}/1"
    else:
        assert " ".join(result.output.split()).endswith(CAUTION)


@pytest.mark.parametrize("command", ["sites", "allowed", "irreps"])
def test_a_file_that_cannot_be_used_is_exit_code_3(run: Run, structures: str, command: str) -> None:
    for name in ("no-such-file.cif", "broken/overlapping_atoms.vasp"):
        result = run(command, f"{structures}/{name}")
        assert result.exit_code == 3
        assert name in result.stderr
        assert "next step: " in result.stderr
        assert not result.stdout


def test_an_output_that_cannot_be_written_is_a_usage_error(run: Run, tmp_path: Path) -> None:
    result = run("conventions", "--output", str(tmp_path / "missing" / "page.txt"))
    assert result.exit_code == 2
    assert "missing" in result.stderr


def test_a_process_prints_errors_without_a_traceback(structures: str) -> None:
    arguments = [sys.executable, "-c", "from sitesym.cli.main import main; main()", "sites"]
    run = subprocess.run(
        [*arguments, f"{structures}/broken/overlapping_atoms.vasp"],
        capture_output=True,
        text=True,
        check=False,
    )
    assert run.returncode == 3
    assert run.stderr.startswith("error: ")
    assert "Traceback" not in run.stderr
    assert not run.stdout
